"""Parts of a triangulation and other names for it: sub-complexes, removal, relabelling, reversal."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from ..errors import InputError
from ..triangulation import Coordinates, Triangulation
from .charts import charts
from .common import (
    Changed,
    label_numbers,
    need_labels,
    number,
    pruned,
    simplex_number,
    simplex_numbers,
    with_fields,
)
from .tables import by_labels, new_positions, orientations, oriented_as

__all__ = ["around", "component", "keep", "relabel", "remove", "reverse"]


def keep(triangulation: Triangulation, simplices: Sequence[int] | np.ndarray) -> Changed:
    """The sub-complex of these top simplices; facets to others become boundary, the orientation stays.

    Labels, coordinates and the order of the simplices stay.  Whether the part is a manifold is not checked.

    Examples
    --------
    >>> t = Triangulation.from_facets([[0, 1, 2], [1, 2, 3], [2, 3, 4]])
    >>> keep(t, [0, 2]).triangulation.corners.tolist()
    [[0, 1, 2], [2, 3, 4]]
    """
    rows = simplex_numbers(triangulation, simplices)
    if not len(rows):
        raise InputError("a triangulation has at least one simplex, and none is to be kept")
    return Changed(subset(triangulation, rows), rows)


def remove(triangulation: Triangulation, simplices: Sequence[int] | np.ndarray) -> Changed:
    """What remains without these top simplices."""
    rows = simplex_numbers(triangulation, simplices)
    rest = np.ones(len(triangulation), dtype=bool)
    rest[rows] = False
    if not rest.any():
        raise InputError("a triangulation has at least one simplex, and all are to be removed")
    return keep(triangulation, np.flatnonzero(rest))


def around(triangulation: Triangulation, simplex: int, radius: int) -> Changed:
    """The simplices that can be reached from one in at most `radius` steps over facets.

    Examples
    --------
    >>> t = Triangulation.from_facets([[0, 1, 2], [1, 2, 3], [2, 3, 4]])
    >>> around(t, 0, 1).refined_from.tolist()
    [0, 1]
    """
    t = triangulation
    start = simplex_number(t, simplex)
    number(radius, "radius", 0)
    inside = np.zeros(len(t), dtype=bool)
    inside[start] = True
    rim = np.array([start])
    for _ in range(radius):
        near = t.across[rim].ravel()
        rim = np.unique(near[near >= 0])
        rim = rim[~inside[rim]]
        if not len(rim):
            break
        inside[rim] = True
    return keep(t, np.flatnonzero(inside))


def component(triangulation: Triangulation, which: int) -> Changed:
    """One connected component, numbered from 0 by smallest simplex."""
    _, part = orientations(triangulation)
    number(which, "component", 0, int(part.max()))
    return keep(triangulation, np.flatnonzero(part == which))


def relabel(
    triangulation: Triangulation,
    names: Mapping[Any, Any] | Sequence[Any] | None = None,
    *,
    seed: int | None = None,
) -> Changed:
    """Give the points other labels.

    Parameters
    ----------
    triangulation : Triangulation
        A labelled complex.
    names : mapping or sequence, optional
        New label of each label, as a mapping (labels that it lacks stay), or in ascending order of the
        labels.  All new labels must be integers, or all words.  By default 0, 1, 2, ... in order.
    seed : int, optional
        Instead of names: the numbers 0, 1, 2, ... dealt at random.

    Returns
    -------
    Changed
        The same complex: every simplex keeps its orientation.

    Examples
    --------
    >>> relabel(Triangulation.from_facets([[5, 7, 9]]), {7: 20}).triangulation.corners.tolist()
    [[5, 9, 20]]
    """
    t = triangulation
    corners = need_labels(t, "relabelling")
    used = np.unique(corners)
    old = t.named(used)
    if names is not None and seed is not None:
        raise InputError("names and a seed are given", hint="give one of them")
    if seed is not None:
        new: list[Any] = np.random.default_rng(number(seed, "seed", 0)).permutation(len(used)).tolist()
    elif names is None:
        new = list(range(len(used)))
    elif isinstance(names, Mapping):
        keys = list(names)
        for key, x in zip(keys, label_numbers(t, keys), strict=True):
            if x not in used:
                raise InputError(f"no simplex has the label {key!r}")
        values = dict(zip(label_numbers(t, keys), names.values(), strict=True))
        new = [values.get(x, name) for x, name in zip(used.tolist(), old, strict=True)]
    else:
        new = list(names)
        if len(new) != len(used):
            raise InputError(f"{len(new)} new labels are given for {len(used)} labels")
    if any(isinstance(x, str) for x in new):
        new = [str(x) for x in new]
    if len(set(new)) < len(new):
        twice = next(x for i, x in enumerate(new) if x in new[:i])
        raise InputError(f"the new label {twice!r} is given twice, so two points would become one")
    return Changed(_with_labels(t, used, new), np.arange(len(t)), sorted(set(new) - set(old)))


def _with_labels(t: Triangulation, used: np.ndarray, new: list[Any]) -> Triangulation:
    assert t.corners is not None

    place = np.searchsorted(used, t.corners)
    # place 0, 1, ... of the old labels -> the new ones
    words = [str(x) for x in new] if any(isinstance(x, str) for x in new) else None
    labels = place if words is not None else np.array(new, dtype=np.int64)[place]
    out = by_labels(t.across.astype(np.int64), t.rank, t.written, labels, words)
    c = t.coordinates
    if c is None:
        return out
    if c.corner is not None:
        order = np.argsort(labels if words is None else _positions(labels, words), axis=1)
        return with_fields(
            out, coordinates=c._replace(corner=np.take_along_axis(c.corner, order[:, :, None], axis=1))
        )
    assert c.point is not None
    if words is not None:
        order = np.array(sorted(range(len(words)), key=words.__getitem__))
        return with_fields(out, coordinates=c._replace(point=c.point[used[order]]))
    if min(new) < 0 or max(new) >= 8 * len(new) + 1024:
        # labels that cannot number rows: one chart for each simplex instead
        order = np.argsort(labels, axis=1)
        rows = np.take_along_axis(c.point[t.corners], order[:, :, None], axis=1)
        return with_fields(out, coordinates=Coordinates(corner=rows, period=c.period))
    point = np.zeros((max(new) + 1, c.point.shape[1]))
    point[np.array(new)] = c.point[used]
    return with_fields(out, coordinates=c._replace(point=point))


def _positions(labels: np.ndarray, words: list[str]) -> np.ndarray:

    return new_positions(labels, words)


def reverse(triangulation: Triangulation) -> Changed:
    """The opposite orientation on every component; where a component is not orientable, of its first simplex.

    Examples
    --------
    >>> reverse(Triangulation.from_facets([[0, 1, 2]])).triangulation.written.tolist()
    [-1]
    """
    t = triangulation
    return Changed(with_fields(t, written=-t.written), np.arange(len(t)))


def subset(t: Triangulation, rows: np.ndarray) -> Triangulation:
    """The simplices `rows` (ascending) with the gluings among them and the orientation they have in `t`."""
    orientation, _ = orientations(t)
    row_of = np.full(len(t), -1, dtype=np.int64)
    row_of[rows] = np.arange(len(rows))
    across = t.across[rows]
    across = np.where(across >= 0, row_of[across], -1)
    c = t.coordinates
    if c is not None and c.corner is not None:
        c = c._replace(corner=c.corner[rows])
    elif c is not None and t.corners is None:
        # rows by class of point: the classes of the part are others

        whole = charts(t)
        assert whole is not None
        c = Coordinates(corner=whole[rows], period=c.period)
    part = with_fields(
        t,
        across=across.astype(np.int32),
        rank=np.where(across >= 0, t.rank[rows], 0).astype(np.uint8),
        written=t.written[rows],
        corners=None if t.corners is None else t.corners[rows],
        coordinates=c,
    )
    return oriented_as(pruned(part), orientation[rows])
