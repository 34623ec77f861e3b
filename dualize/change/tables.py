"""Gluing tables and labels: orientation, sorting by labels, and whether labels name the simplices."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from ..kernels import engine
from ..kernels.orient import spread_orientation
from ..kernels.permutations import permutations_of
from ..topology.classes import classes, corner_subsets
from ..triangulation import Coordinates, Triangulation
from .common import with_fields

__all__ = ["by_labels", "labels_name_simplices", "new_positions", "orientations", "oriented_as"]


def orientations(t: Triangulation) -> tuple[np.ndarray, np.ndarray]:
    """Orientation and component of every simplex, as `build` finds them."""
    n, k = t.across.shape
    out = np.zeros(n, dtype=np.int8)
    component, queue = np.empty((2, n), dtype=t.across.dtype)
    sign = permutations_of(k - 1).sign
    flat = (t.across.ravel(), t.rank.ravel(), sign, t.written, out, component, queue)
    engine(n)(spread_orientation, *flat, tuple(range(k)))
    return out, component


def oriented_as(t: Triangulation, wanted: np.ndarray) -> Triangulation:
    """`t` with the first simplex of each component written so that it has the orientation `wanted` there."""
    _, component = orientations(t)
    first = np.unique(component, return_index=True)[1]
    if np.array_equal(t.written[first], wanted[first]):
        return t
    written = t.written.copy()
    written[first] = wanted[first]
    return with_fields(t, written=written)


def labels_name_simplices(t: Triangulation, labels: np.ndarray) -> bool:
    """Whether simplices of `t`, as classes under its gluings, are told apart by these labels of the corners.

    The labels (N, D + 1) must agree across gluings.  If they do, `t` is the simplicial complex on them.
    """
    k = t.dimension + 1
    ordered = np.sort(labels, axis=1)
    if (ordered[:, 1:] == ordered[:, :-1]).any():
        return False
    sort = np.argsort(labels, axis=1)
    place = np.argsort(sort, axis=1)
    for m in [k, *range(1, k)]:
        if m == k:
            rows = ordered
        else:
            first = classes(t, m).first
            subsets = corner_subsets(k - 1, m)
            row, column = np.divmod(first, len(subsets))
            chosen = np.sort(np.take_along_axis(place[row], subsets[column], axis=1), axis=1)
            rows = np.take_along_axis(ordered[row], chosen, axis=1)
        rows = rows[np.lexsort(rows.T[::-1])]
        if (rows[1:] == rows[:-1]).all(axis=1).any():
            return False
    return True


def by_labels(
    across: np.ndarray,
    rank: np.ndarray,
    written: np.ndarray,
    labels: np.ndarray,
    words: Sequence[str] | None,
    point: np.ndarray | None = None,
    period: np.ndarray | None = None,
) -> Triangulation:
    """The labelled complex of a gluing table whose simplices these labels tell apart.

    The corners are sorted, and the gluings with them.  With `words`, label x stands for ``words[x]``.  Row x
    of `point` belongs to label x.
    """
    k = labels.shape[1]
    tables = permutations_of(k - 1)
    names = None
    if words is not None:
        used = np.unique(labels)
        order = sorted(used.tolist(), key=words.__getitem__)
        position = np.zeros(len(words), dtype=np.int64)
        position[order] = np.arange(len(order))
        names = tuple(words[x] for x in order)
        labels = position[labels]
        point = None if point is None else point[order]
    inner = across >= 0
    sort = np.argsort(labels, axis=1)
    if np.array_equal(sort, np.broadcast_to(np.arange(k), sort.shape)):
        there = tables.image[rank, np.arange(k)]
    else:
        place = np.argsort(sort, axis=1)
        there = place[np.where(inner, across, 0), tables.image[rank, np.arange(k)].astype(np.int64)]
        across, there, labels = (np.take_along_axis(x, sort, axis=1) for x in (across, there, labels))
        written = written * tables.sign[tables.rank(sort)]
    return Triangulation(
        across=across.astype(np.int32),
        rank=np.where(across >= 0, tables.keeping[np.arange(k), there], 0).astype(np.uint8),
        written=written.astype(np.int8),
        corners=labels.astype(np.int64),
        corner_names=names,
        coordinates=None if point is None else Coordinates(point=point, period=period),
        matched=True,
    )


def new_positions(labels: np.ndarray, words: Sequence[str]) -> np.ndarray:
    """Labels as the positions that their words have in order."""
    order = sorted(range(len(words)), key=words.__getitem__)
    position = np.empty(len(words), dtype=np.int64)
    position[order] = np.arange(len(order))
    return position[labels]
