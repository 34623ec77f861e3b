"""Contraction of segments under the link condition."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations
from typing import Any

import numpy as np

from ..errors import InputError, TriangulationError
from ..triangulation import Triangulation
from .common import Changed, as_written, label_numbers, labelled, need_labels, number, pruned, rows_with, show
from .tables import orientations, oriented_as

__all__ = ["contract", "contract_all", "contractible"]


def contract(triangulation: Triangulation, segment: Sequence[Any]) -> Changed:
    """Contract an interior segment to one of its ends: the simplices that contain it vanish.

    Parameters
    ----------
    triangulation : Triangulation
        A labelled complex, closed or bounded.
    segment : sequence of two labels
        The first stays, unless it is inside and the second on the boundary.

    Raises
    ------
    TriangulationError
        If the segment is on the boundary or joins two boundary points, or the link condition fails; a common
        simplex of both links that is not in the link of the segment is named.

    Notes
    -----
    The link condition: the links of both ends meet in the link of the segment only.  Then the contraction
    keeps the PL manifold; that the input is one is not checked.  The coordinates of the end that stays are
    kept.

    References
    ----------
    T. K. Dey, H. Edelsbrunner, S. Guha, D. V. Nekhayev, Topology preserving edge contraction, Publ. Inst.
    Math. (Beograd) 66 (1999) 23-45 (dimension up to 3); E. Nevo, Higher minors and Van Kampen's obstruction,
    Math. Scand. 101 (2007) 161-176 (PL manifolds of any dimension).

    Examples
    --------
    >>> disc = Triangulation.from_facets([[0, 1, 9], [1, 2, 9], [2, 3, 9], [0, 3, 9]])
    >>> contract(disc, [0, 9]).triangulation.corners.tolist()
    [[0, 1, 2], [0, 2, 3]]
    """
    t = triangulation
    corners = need_labels(t, "a contraction")
    u, v = _segment(t, segment)
    on_boundary = _boundary_points(t)
    if u in on_boundary and v in on_boundary:
        raise TriangulationError(
            "the segment cannot be contracted: both its ends are on the boundary", show(t, [u, v])
        )
    if v in on_boundary:
        u, v = v, u
    shared = _obstacle(corners, u, v)
    if shared is not None:
        raise TriangulationError(
            "the segment cannot be contracted: the links of its ends have a simplex in common "
            "that is not in the link of the segment",
            f"{show(t, [u, v])}; simplex {show(t, shared)}",
        )
    return _contracted(t, u, v)


def contractible(triangulation: Triangulation) -> list[list]:
    """The segments that `contract` accepts, as pairs of labels."""
    t = triangulation
    corners = need_labels(t, "a contraction")
    on_boundary = _boundary_points(t)
    pairs = np.unique(
        np.concatenate([corners[:, [a, b]] for a, b in combinations(range(t.dimension + 1), 2)]), axis=0
    )
    good = [
        pair
        for pair in pairs.tolist()
        if not (pair[0] in on_boundary and pair[1] in on_boundary) and _obstacle(corners, *pair) is None
    ]
    return [t.named(np.array(pair)) for pair in good]


def contract_all(triangulation: Triangulation, *, seed: int = 0, budget: int | None = None) -> Changed:
    """Contract segments in random order until none is left that can be, or `budget` are contracted."""
    t = triangulation
    rng = np.random.default_rng(number(seed, "seed", 0))
    left = len(t) if budget is None else number(budget, "budget", 0)
    result = Changed(t, np.arange(len(t)))
    while left > 0:
        here = result.triangulation
        corners = need_labels(here, "a contraction")
        on_boundary = _boundary_points(here)
        pairs = np.unique(
            np.concatenate([corners[:, [a, b]] for a, b in combinations(range(t.dimension + 1), 2)]), axis=0
        )
        for u, v in rng.permutation(pairs).tolist():
            if u in on_boundary and v in on_boundary:
                continue
            if v in on_boundary:
                u, v = v, u
            if _obstacle(corners, u, v) is None:
                step = _contracted(here, u, v)
                result = Changed(step.triangulation, result.refined_from[step.refined_from])
                left -= 1
                break
        else:
            break
    return result


def _segment(t: Triangulation, segment: Sequence[Any]) -> tuple[int, int]:
    labels = label_numbers(t, list(segment))
    if len(labels) != 2:
        raise InputError(f"a segment has two labels, and {len(labels)} are given")
    assert t.corners is not None
    if not len(rows_with(t.corners, labels)):
        raise InputError("these two labels are no segment of the complex", show(t, labels))
    return labels[0], labels[1]


def _boundary_points(t: Triangulation) -> set[int]:
    assert t.corners is not None
    s, i = np.nonzero(t.across < 0)
    rows = t.corners[s]
    return set(rows[np.arange(t.dimension + 1) != i[:, None]].tolist())


def _obstacle(corners: np.ndarray, u: int, v: int) -> list[int] | None:
    """A simplex in the links of u and of v that is not in the link of the segment, or None."""

    def faces(rows: np.ndarray, gone: set[int]) -> set[tuple[int, ...]]:
        out: set[tuple[int, ...]] = set()
        for row in rows.tolist():
            rest = [x for x in row if x not in gone]
            for m in range(1, len(rest) + 1):
                out.update(combinations(rest, m))
        return out

    mine = corners[(corners == u).any(axis=1)]
    theirs = corners[(corners == v).any(axis=1)]
    both = faces(mine[~(mine == v).any(axis=1)], {u}) & faces(theirs[~(theirs == u).any(axis=1)], {v})
    extra = both - faces(mine[(mine == v).any(axis=1)], {u, v})
    return list(min((len(f), f) for f in extra)[1]) if extra else None


def _contracted(t: Triangulation, u: int, v: int) -> Changed:
    corners = need_labels(t, "a contraction")
    rows = as_written(t)
    stay = np.flatnonzero(~((corners == u).any(axis=1) & (corners == v).any(axis=1)))
    if not len(stay):
        raise TriangulationError("the segment lies in every simplex: nothing would be left")
    out = np.where(rows[stay] == v, u, rows[stay])
    words = None if t.corner_names is None else list(t.corner_names)
    coordinates = t.coordinates
    notes: tuple[str, ...] = ()
    if coordinates is not None and coordinates.corner is not None:
        coordinates, notes = None, ("coordinates dropped: the charts of the simplices no longer fit",)
    result = labelled(out, words, coordinates)
    orientation, _ = orientations(t)
    # `written` of a row is its parity; where the orientation was that of the written row it still is
    wanted = orientation[stay] * t.written[stay] * result.written
    return Changed(oriented_as(pruned(result), wanted), stay, (), notes)
