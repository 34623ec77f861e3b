"""What a sum repeats, and how to fix it: group elements, divergent directions, redundant integrations."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from ..skeleton import Skeleton
from ..topology.classes import classes
from ..topology.gluing import gluing_of
from .power import interior_map, interior_rank

__all__ = ["Gauge", "gauge"]

# primes for the choice of columns; the exact rank decides whether the choice is right
PRIMES = (2_147_483_647, 2_147_483_629, 2_147_483_587)


@dataclass(frozen=True, eq=False)
class Gauge:
    """What may be held fixed.

    Attributes
    ----------
    edges : ndarray of int64
        A spanning forest of the internal edges, ascending: their group elements may be set to 1, for the
        freedom at the vertices.
    faces : ndarray of int64
        Internal faces whose spins may be held fixed, or whose deltas may be dropped, ascending; see `how`.
    how : str
        ``"tree"``: in 3D, dual to a maximal tree of the interior points and segments with the boundary
        contracted to a point.  ``"rank"``: in 4D and 2D, Omega faces without which the boundary map keeps
        its rank over Q; valid near the trivial flat connection.
    slot : ndarray of int8, shape (V,)
        The slot of each vertex whose integration over a non-compact group is redundant.
    """

    edges: np.ndarray
    faces: np.ndarray
    how: str
    slot: np.ndarray

    def to_dict(self) -> dict[str, Any]:
        """As plain lists."""
        return {
            "edges": self.edges.tolist(),
            "faces": self.faces.tolist(),
            "how": self.how,
            "slot": self.slot.tolist(),
        }


def gauge(skeleton: Skeleton, *, slot: int = 0, rank: int | None = None) -> Gauge:
    """A choice of what to hold fixed in a sum.

    Parameters
    ----------
    skeleton : Skeleton
    slot : int
        The redundant slot of every vertex; one for all, so that equal vertices stay equal.
    rank : int, optional
        Rank over Q of the boundary map from internal faces to internal edges, where it is known already.

    Notes
    -----
    The tree in 3D is that of L. Freidel, D. Louapre, "Diffeomorphisms and spin foam models", Nucl. Phys. B
    662 (2003) 279-298; the choice by rank leaves the deltas that are independent near the trivial connection,
    V. Bonzom, M. Smerlak, "Bubble divergences from cellular cohomology" (2010) (both from memory).

    Examples
    --------
    >>> from dualize import build, make
    >>> gauge(build(make.move_side(4, 5))).faces.tolist()
    [6, 7, 8, 9]
    """
    count = skeleton.counts["edges_internal"]
    ends = np.stack([skeleton[f"edges/{end}"][:count, 0] for end in ("source", "target")], axis=1)
    edges = _forest(ends, len(skeleton["vertices/orientation"]))
    if skeleton.dimension == 3:
        faces, how = _dual_tree(skeleton), "tree"
    else:
        faces, how = _spare_columns(skeleton, rank), "rank"
    vertices = len(skeleton["vertices/orientation"])
    return Gauge(edges, faces, how, np.full(vertices, slot, dtype=np.int8))


def _forest(ends: np.ndarray, points: int) -> np.ndarray:
    """The edges of a graph, in ascending order, that close no circle with earlier ones."""
    parent = list(range(points))

    def root(v: int) -> int:
        while parent[v] != v:
            parent[v] = parent[parent[v]]
            v = parent[v]
        return v

    out = []
    for e, (a, b) in enumerate(ends.tolist()):
        x, y = root(a), root(b)
        if x != y:
            parent[x] = y
            out.append(e)
    return np.array(out, dtype=np.int64)


def _dual_tree(skeleton: Skeleton) -> np.ndarray:
    """3D: internal faces dual to a maximal tree of the interior segments, the boundary being one point.

    One point for each component of the foam, because trees of different components have nothing in common.
    """
    t = gluing_of(skeleton)
    found = classes(t, 1)
    number = found.number.astype(np.int64)
    vertex, slot = np.nonzero(t.across < 0)
    outside = np.zeros(found.count, dtype=bool)
    for corner in range(4):
        keep = slot != corner
        outside[number[vertex[keep], corner]] = True
    part = np.zeros(found.count, dtype=np.int64)
    part[number.ravel()] = np.repeat(skeleton["vertices/component"].astype(np.int64), 4)
    number = np.where(outside[number], found.count + part[number], number)
    inner = skeleton.counts["faces_internal"]
    first = skeleton["faces/vertex_offsets"][:inner]
    at, wedge = skeleton["faces/vertex"][first], skeleton["faces/wedge"][first]
    # the segment of wedge (i, j) has the other two corners: wedges w and 5 - w are opposite
    pairs = np.array([(0, 1), (0, 2), (0, 3), (1, 2), (1, 3), (2, 3)])
    ends = np.take_along_axis(number[at], pairs[5 - wedge.astype(np.int64)], axis=1)
    return _forest(ends, found.count + skeleton.counts["components"])


def _spare_columns(skeleton: Skeleton, rank: int | None) -> np.ndarray:
    """Omega internal faces without which the boundary map keeps its rank over Q.

    Columns that are independent modulo a prime are independent over Q; with as many of them as the exact
    rank, the rest may go.
    """
    matrix = interior_map(skeleton)
    rank = interior_rank(skeleton) if rank is None else rank
    for prime in PRIMES:
        kept = _independent(matrix, prime)
        if len(kept) == rank:
            break
    else:  # pragma: no cover - three primes would have to divide an invariant factor
        raise ArithmeticError("no prime keeps the rank")
    spare = np.ones(matrix.shape[1], dtype=bool)
    spare[kept] = False
    return np.flatnonzero(spare)


def _independent(matrix: Any, prime: int) -> list[int]:
    """The columns that are independent of earlier ones modulo a prime."""
    pivots: dict[int, dict[int, int]] = {}
    age: dict[int, int] = {}
    kept = []
    rows, values, offsets = matrix.indices.tolist(), (matrix.data % prime).tolist(), matrix.indptr.tolist()
    often = np.bincount(matrix.indices, minlength=matrix.shape[0]).tolist()
    for x in range(matrix.shape[1]):
        column = {rows[p]: values[p] for p in range(offsets[x], offsets[x + 1]) if values[p]}
        while column:
            met = [r for r in column if r in pivots]
            if not met:
                lead = min(column, key=lambda r: (often[r], r))
                inverse = pow(column[lead], -1, prime)
                pivots[lead] = {r: v * inverse % prime for r, v in column.items()}
                age[lead] = len(age)
                kept.append(x)
                break
            r = min(met, key=age.__getitem__)
            factor = column[r]
            for q, v in pivots[r].items():
                value = (column.get(q, 0) - factor * v) % prime
                if value:
                    column[q] = value
                else:
                    column.pop(q, None)
    return kept
