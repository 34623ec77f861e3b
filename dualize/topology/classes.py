"""The simplices of a triangulation in every dimension, counted and named by their own counting.

In a labelled complex a simplex is a set of labels; in a gluing table it is a class of subsets of the corners
of its simplices under the gluings.  A class can be *irregular*: identified with itself other than by the
identity, as a segment that is glued to itself reversed.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from itertools import combinations
from typing import NamedTuple

import numpy as np

from ..kernels import engine
from ..kernels.audit import join_simplices, number_simplices
from ..kernels.permutations import permutations_of
from ..kernels.repeats import mix_rows
from ..triangulation import Triangulation

__all__ = [
    "Census",
    "Classes",
    "all_distinct",
    "census",
    "classes",
    "corner_subsets",
    "count_rows",
    "distinct_simplices",
    "f_vector",
]

COUNTED_FROM = 10_000  # rows from which looking for repeats first is quicker than a sort


@dataclass(frozen=True, eq=False)
class Classes:
    """The classes of the simplices with m corners.

    Attributes
    ----------
    number : ndarray of int, shape (N, C(D + 1, m))
        Class of each m corners of each simplex, in the order of `corner_subsets`; numbered by first
        occurrence.
    turn : ndarray of uint8, shape (N, C(D + 1, m))
        Map of the corners, in ascending order, to those at the first occurrence, as lexicographic rank.
    irregular : ndarray of bool, shape (count,)
    first : ndarray of int64, shape (count,)
        Where each class occurs first, as ``simplex * C(D + 1, m) + subset``.
    """

    number: np.ndarray
    turn: np.ndarray
    irregular: np.ndarray
    first: np.ndarray

    @property
    def count(self) -> int:
        """How many classes there are."""
        return len(self.first)


@cache
def corner_subsets(dimension: int, m: int) -> np.ndarray:
    """The m-subsets of the corners 0..D in lexicographic order, int64, shape (C(D + 1, m), m)."""
    table = np.array(list(combinations(range(dimension + 1), m)), dtype=np.int64).reshape(-1, m)
    table.flags.writeable = False
    return table


@cache
def _moves(dimension: int, m: int) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """For every permutation and subset: its image and the map of the ascending corners; then members."""
    subsets = corner_subsets(dimension, m)
    tables, small = permutations_of(dimension), permutations_of(m - 1)
    code = {tuple(row): number for number, row in enumerate(subsets.tolist())}
    moved = tables.image[:, subsets].astype(np.int64)  # (permutations, subsets, m)
    image = np.array([[code[tuple(sorted(row))] for row in rows] for rows in moved.tolist()], dtype=np.int8)
    turn = small.rank(np.argsort(np.argsort(moved, axis=2), axis=2))
    member = np.zeros((dimension + 1, len(subsets)), dtype=np.int8)
    member[subsets.T, np.arange(len(subsets))] = 1
    return image, turn, np.ascontiguousarray(member.T)


def classes(triangulation: Triangulation, m: int, *, threads: int | None = None) -> Classes:
    """The classes of simplices with `m` corners, 1 <= m <= D, under the gluings alone (labels are not read).

    Notes
    -----
    Union-find over all corner subsets; almost linear in the number of simplices.

    Examples
    --------
    Two tetrahedra glued along all their facets have the points, segments and triangles of one:

    >>> across = [[1, 1, 1, 1], [0, 0, 0, 0]]
    >>> t = Triangulation.from_gluings(across, [[[0, 1, 2, 3]] * 4] * 2)
    >>> [classes(t, m).count for m in (1, 2, 3)]
    [4, 6, 4]
    """
    return _classes(triangulation, [m], threads)[0]


def _classes(t: Triangulation, sizes: list[int], threads: int | None) -> list[Classes]:
    """The classes of the simplices with so many corners, the sizes side by side."""
    n, d = len(t), t.dimension
    run = engine(n, threads)
    axes = tuple(range(d + 1))
    calls, work = [], []
    for m in sizes:
        image, turn, member = _moves(d, m)
        small = permutations_of(m - 1)
        size = n * len(member)
        parent = np.arange(size, dtype=np.int32 if size < 2**31 else np.int64)
        up, irregular = np.zeros(size, dtype=np.uint8), np.zeros(size, dtype=np.int8)
        tables = (member.ravel(), image.ravel(), turn.ravel(), small.compose.ravel(), small.inverse)
        calls.append((t.across.ravel(), t.rank.ravel(), *tables, parent, up, irregular, axes, len(member), n))
        work.append((parent, up, irregular, small.compose.ravel(), len(small.inverse), np.empty_like(parent)))
    for lead in range(0, len(calls), run.threads):
        run.each(join_simplices, calls[lead : lead + run.threads])
        run.each(number_simplices, work[lead : lead + run.threads])
    out = []
    for parent, up, irregular, _, _, number in work:
        first = np.flatnonzero(parent == np.arange(len(parent), dtype=parent.dtype))
        out.append(Classes(number.reshape(n, -1), up.reshape(n, -1), irregular[first] != 0, first))
    return out


class Census(NamedTuple):
    """How many simplices there are of every dimension, and which the gluings tell apart.

    Attributes
    ----------
    f : list of int
        f-vector: label sets where labels name the simplices, else classes.
    classes : list of Classes
        Those of the simplices with 1 to D - 1 corners, under the gluings alone.
    scattered : list of ndarray of int64, shape (groups, m)
        For 1 to D - 1 corners: the label sets that belong to several classes, so that the simplex of that
        name has a disconnected link.  Empty where labels do not name the simplices.
    """

    f: list[int]
    classes: list[Classes]
    scattered: list[np.ndarray]


def census(triangulation: Triangulation, *, threads: int | None = None) -> Census:
    """Count the simplices of a triangulation in every dimension.

    Notes
    -----
    Labels are read at the first occurrence of each class: gluings keep them.

    Examples
    --------
    >>> census(Triangulation.from_facets([[0, 1, 2, 3], [1, 2, 3, 4]])).f
    [5, 9, 7, 2]
    """
    t, d = triangulation, triangulation.dimension
    found = _classes(t, list(range(1, d)), threads)
    facets = (t.across.size + int((t.across < 0).sum())) // 2
    f = [*(c.count for c in found), facets, len(t)]
    scattered = [np.empty((0, m), dtype=np.int64) for m in range(1, d)]
    if t.corners is None or not t.matched:
        return Census(f, found, scattered)
    for m in range(1, d):
        subsets = corner_subsets(d, m)
        simplex, subset = np.divmod(found[m - 1].first, len(subsets))
        names = np.take_along_axis(t.corners[simplex], subsets[subset], axis=1)
        f[m - 1] = count_rows(names)
        if f[m - 1] < len(names):
            rows, times = np.unique(names, axis=0, return_counts=True)
            scattered[m - 1] = rows[times > 1]
    f[d] = count_rows(t.corners)
    if f[d] < len(t):  # twins share every facet, and a facet of two pairs of twins is one simplex
        f[d - 1] = len(distinct_simplices(t.corners, d))
    return Census(f, found, scattered)


def count_rows(rows: np.ndarray) -> int:
    """How many different rows there are, integers of any size, shape (N, m)."""
    if len(rows) == 0:
        return 0
    if len(rows) >= COUNTED_FROM and all_distinct(rows):
        return len(rows)
    points, span = _from_zero(rows)
    if span ** rows.shape[1] >= 2**63:
        return len(np.unique(rows, axis=0))
    key = np.zeros(len(rows), dtype=np.int64)
    for column in points.T:
        key *= span
        key += column
    key.sort()
    return int((key[1:] != key[:-1]).sum()) + 1


def all_distinct(rows: np.ndarray) -> bool:
    """Whether no two rows of int64, shape (N, m), are equal; false also by a rare accident of keys."""
    n, m = rows.shape
    flat = np.ascontiguousarray(rows, dtype=np.int64).ravel()
    return not engine(n).repeats(n, m, tuple(range(m)), (mix_rows, flat))


def f_vector(labels: np.ndarray) -> list[int]:
    """The f-vector of the simplicial complex with these facets, rows of labels that ascend, shape (N, K)."""
    subsets = [corner_subsets(labels.shape[1] - 1, m) for m in range(1, labels.shape[1] + 1)]
    return [count_rows(labels[:, s].reshape(-1, s.shape[1])) for s in subsets]


def distinct_simplices(labels: np.ndarray, m: int) -> np.ndarray:
    """The different sets of `m` labels in rows that ascend, (N, K) to (count, m), in lexicographic order."""
    subsets = corner_subsets(labels.shape[1] - 1, m)
    if len(labels) == 0:
        return np.empty((0, m), dtype=labels.dtype)
    return np.unique(labels[:, subsets].reshape(-1, m), axis=0)


def _from_zero(labels: np.ndarray) -> tuple[np.ndarray, int]:
    """The labels as numbers from 0 in the same order, and how many numbers that takes."""
    low, high = int(labels.min()), int(labels.max())
    if high - low <= 2 * labels.size:
        return labels - low, high - low + 1
    words, positions = np.unique(labels, return_inverse=True)
    return positions.reshape(labels.shape), len(words)
