"""Templates: how every simplex is cut by a subdivision, and how the pieces are glued."""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache
from itertools import pairwise, permutations, product
from typing import NamedTuple

import numpy as np

from ..kernels.permutations import permutations_of
from ..topology.classes import corner_subsets
from ..triangulation import Triangulation

__all__ = ["Template", "barycentric", "edgewise", "glued_pieces"]


class Template(NamedTuple):
    """How every simplex is cut, the same way for all.

    Attributes
    ----------
    weight : ndarray of int64, shape (P, K)
        The points of the pieces as barycentric coordinates, which add up to one number.
    piece : ndarray of int64, shape (Q, K)
        The points of each piece.
    sign : ndarray of int8, shape (Q,)
        Orientation of the piece in the simplex.
    """

    weight: np.ndarray
    piece: np.ndarray
    sign: np.ndarray


@cache
def barycentric(d: int) -> Template:
    k = d + 1
    tables = permutations_of(d)
    scale = int(np.lcm.reduce(np.arange(1, k + 1)))
    subsets = [tuple(c) for m in range(1, k + 1) for c in corner_subsets(d, m).tolist()]
    index = {c: p for p, c in enumerate(subsets)}
    weight = np.zeros((len(subsets), k), dtype=np.int64)
    for p, c in enumerate(subsets):
        weight[p, list(c)] = scale // len(c)
    piece = [[index[tuple(sorted(row[: i + 1]))] for i in range(k)] for row in tables.image.tolist()]
    return Template(weight, np.array(piece), tables.sign)


@cache
def edgewise(d: int, r: int) -> Template:
    """Path simplices of the grid in the simplex r >= x_1 >= ... >= x_d >= 0."""
    index: dict[tuple[int, ...], int] = {}
    pieces = []
    for cube in product(range(r), repeat=d):
        if any(a < b for a, b in pairwise(cube)):
            continue
        for order in permutations(range(d)):
            point = list(cube)
            path = [tuple(point)]
            for axis in order:
                point[axis] += 1
                path.append(tuple(point))
            if all(a >= b for x in path for a, b in pairwise(x)):
                pieces.append([index.setdefault(x, len(index)) for x in path])
    x = np.array(list(index))
    stairs = np.concatenate([np.full((len(x), 1), r), x, np.zeros((len(x), 1), dtype=np.int64)], axis=1)
    weight = stairs[:, :-1] - stairs[:, 1:]
    piece = np.array(pieces)
    sign = np.round(np.linalg.det(weight[piece].astype(float) / r) * r**d).astype(np.int8)
    return Template(weight, piece, sign)


def glued_pieces(t: Triangulation, template: Template) -> tuple[np.ndarray, np.ndarray]:
    """The gluing table of the pieces, for gluings that keep the order of the corners."""
    n, k = t.across.shape
    tables = permutations_of(k - 1)
    weight, piece, _ = template
    q = len(piece)
    facets: dict[frozenset, list[tuple[int, int]]] = {}
    for a, row in enumerate(piece.tolist()):
        for slot in range(k):
            facets.setdefault(frozenset(row[:slot] + row[slot + 1 :]), []).append((a, slot))
    across = np.full((n, q, k), -1, dtype=np.int64)
    rank = np.zeros((n, q, k), dtype=np.uint8)
    # facets of pieces on each facet of the simplex, by the weights of the other corners
    outer: list[dict[frozenset, tuple[int, int]]] = [{} for _ in range(k)]

    def images(row: Sequence, slot: int, other: Sequence, there: int) -> list[int]:
        return [there if c == slot else other.index(x) for c, x in enumerate(row)]

    base = np.arange(n) * q
    for points, where in facets.items():
        if len(where) == 2:
            (a, i), (b, j) = where
            one, two = piece[a].tolist(), piece[b].tolist()
            for (a_, i_, row), (b_, j_, other) in (((a, i, one), (b, j, two)), ((b, j, two), (a, i, one))):
                across[:, a_, i_] = base + b_
                rank[:, a_, i_] = tables.rank(np.array(images(row, i_, other, j_)))
        else:
            on = next(c for c in range(k) if all(weight[p, c] == 0 for p in points))
            key = frozenset(tuple(np.delete(weight[p], on).tolist()) for p in points)
            outer[on][key] = where[0]
    for i in range(k):
        for j in range(k):
            there = tables.image[t.rank[:, i], i]
            rows = np.flatnonzero((t.across[:, i] >= 0) & (there == j))
            if not len(rows):
                continue
            for key, (a, slot) in outer[i].items():
                b, slot_there = outer[j][key]
                one = [tuple(np.delete(weight[p], i).tolist()) for p in piece[a]]
                two = [tuple(np.delete(weight[p], j).tolist()) for p in piece[b]]
                one[slot] = two[slot_there] = ()
                across[rows, a, slot] = t.across[rows, i].astype(np.int64) * q + b
                rank[rows, a, slot] = tables.rank(np.array(images(one, slot, two, slot_there)))
    return across.reshape(-1, k), rank.reshape(-1, k)
