"""Links of simplices as triangulations of their own, and the form by which equal ones are known."""

from __future__ import annotations

from collections.abc import Iterator
from functools import cache

import numpy as np

from ..errors import InputError
from ..kernels import engine
from ..kernels.forms import write_form
from ..kernels.permutations import permutations_of
from ..triangulation import Triangulation
from .classes import classes, corner_subsets

__all__ = ["Forms", "all_point_links", "link", "point_links"]


@cache
def _induced(dimension: int) -> np.ndarray:
    """Rank of the permutation of the other corners, ascending, by permutation and corner left out."""
    tables, small = permutations_of(dimension), permutations_of(dimension - 1)
    k = dimension + 1
    columns = []
    for c in range(k):
        others = [a for a in range(k) if a != c]
        columns.append(small.rank(tables.place[:, c][:, others]))
    return np.column_stack(columns).astype(np.uint8)


def all_point_links(triangulation: Triangulation) -> Triangulation:
    """The links of all points side by side: the one of corner `c` has the simplex ``s * (D + 1) + c`` in `s`.

    Its corners are the other corners of `s`, in ascending order.  The dimension is at least 3.
    """
    t = triangulation
    n, k = t.across.shape
    image = permutations_of(k - 1).image
    across = np.empty((n, k, k - 1), dtype=np.int64)
    rank = np.zeros((n, k, k - 1), dtype=np.uint8)
    for c in range(k):
        slots = [i for i in range(k) if i != c]
        there = t.across[:, slots].astype(np.int64)
        p = t.rank[:, slots]
        across[:, c] = np.where(there >= 0, there * k + image[p, c], -1)
        rank[:, c] = np.where(there >= 0, _induced(k - 1)[p, c], 0)
    if n * k < 2**31:
        across = across.astype(np.int32)
    return Triangulation(
        across=across.reshape(n * k, k - 1),
        rank=rank.reshape(n * k, k - 1),
        written=np.repeat(t.written, k) * np.tile(1 - 2 * (np.arange(k) % 2), n).astype(np.int8),
    )


def part(t: Triangulation, rows: np.ndarray) -> Triangulation:
    """The simplices `rows`, ascending, which no gluing leaves, as a triangulation of their own."""
    across = t.across[rows].astype(np.int64)
    return Triangulation(
        across=np.where(across >= 0, np.searchsorted(rows, across), -1).astype(np.int32),
        rank=t.rank[rows],
        written=t.written[rows],
    )


def link(triangulation: Triangulation, simplex: int, corners: list[int]) -> Triangulation:
    """The link of a face of a simplex: what lies opposite it in all simplices around it.

    Parameters
    ----------
    triangulation : Triangulation
    simplex : int
    corners : list of int
        Corners of it; at most D - 2 of them, so that the link has dimension 2 at least.

    Returns
    -------
    Triangulation
        A gluing table.  Where the face is glued to itself otherwise than by the identity, each of its ways
        counts.

    Examples
    --------
    >>> link(Triangulation.from_facets([[0, 1, 2, 3], [1, 2, 3, 4]]), 0, [1])
    <Triangulation 2D: 2 simplices, unlabelled, 4 boundary facets>
    """
    t, d = triangulation, triangulation.dimension
    chosen = sorted(set(corners))
    if not chosen or len(chosen) > d - 2 or chosen[0] < 0 or chosen[-1] > d or len(chosen) < len(corners):
        raise InputError(
            f"corners {corners} have no link of dimension 2 or more",
            f"a simplex of dimension {d}",
            f"give 1 to {d - 2} different corners between 0 and {d}",
        )
    if not 0 <= simplex < len(t):
        raise InputError(f"there is no simplex {simplex}", hint=f"simplices are numbered 0 to {len(t) - 1}")
    at = simplex
    for done, corner in enumerate(chosen):
        every = all_point_links(t)
        at = at * (t.dimension + 1) + corner - done
        number = classes(t, 1).number.ravel()
        rows = np.flatnonzero(number == number[at])
        t = part(every, rows)
        at = int(np.searchsorted(rows, at))
    return t


def point_links(triangulation: Triangulation, number: np.ndarray) -> Iterator[tuple[int, Triangulation]]:
    """The link of every point in turn; `number` (N, D + 1) is its class at each corner."""
    every = all_point_links(triangulation)
    order = np.argsort(number.ravel(), kind="stable")
    ends = np.cumsum(np.bincount(number.ravel()))
    start = 0
    for point, end in enumerate(ends.tolist()):
        yield point, part(every, order[start:end])
        start = end


class Forms:
    """Triangulations met so far, up to isomorphism.

    A new one is entered under the forms that it takes from all its best starts, so that an isomorphic one is
    found whichever of them it is written from.  Starts are flags, a simplex with an order of its corners; the
    best ones are those for which the numbers of simplices around the ridges, in that order, are rarest.
    Forms are compared entry by entry, so nothing rests on a hash.
    """

    def __init__(self) -> None:
        self._number: dict[bytes, int] = {}
        self._count = 0

    def __len__(self) -> int:
        return self._count

    def find(self, t: Triangulation, lengths: np.ndarray | None = None) -> tuple[int, bool]:
        """Number of the isomorphism class of a connected triangulation, and whether it is new.

        Parameters
        ----------
        t : Triangulation
        lengths : ndarray of int, shape (N, C(D + 1, 2)), optional
            How many simplices lie around the ridge that leaves out two corners, pairs in order.
        """
        d = t.dimension
        if lengths is None:
            lengths = ridge_lengths(t)
        tables = permutations_of(d)
        key = np.zeros((len(t), len(tables.image)), dtype=np.int64)
        for pairs in _turned_pairs(d).T:
            key = key * 1021 + np.minimum(lengths, 1020)[:, pairs]
        values, first, times = np.unique(key.ravel(), return_index=True, return_counts=True)
        best = int(np.argmin(times))
        form = self._form(t, int(first[best]))
        if form in self._number:
            return self._number[form], False
        for flag in np.flatnonzero(key.ravel() == values[best]).tolist():
            self._number[self._form(t, flag)] = self._count
        self._count += 1
        return self._count - 1, True

    @staticmethod
    def _form(t: Triangulation, flag: int) -> bytes:
        n, k = t.across.shape
        tables = permutations_of(k - 1)
        start, turn = divmod(flag, len(tables.image))
        out = np.empty(n * k, dtype=np.int32)
        number = np.full(n, -1, dtype=np.int32)
        frame, queue = np.empty(n, dtype=np.uint8), np.empty(n, dtype=np.int32)
        engine(n).here(
            write_form,
            t.across.ravel(),
            t.rank.ravel(),
            tables.image.ravel(),
            tables.inverse,
            tables.compose.ravel(),
            start,
            turn,
            number,
            frame,
            queue,
            out,
            tuple(range(k)),
            n,
        )
        return out.tobytes()


@cache
def _turned_pairs(dimension: int) -> np.ndarray:
    """Where each permutation sends the pairs of corners, as numbers of pairs, (permutations, pairs)."""
    pairs = corner_subsets(dimension, 2)
    number = np.zeros((dimension + 1, dimension + 1), dtype=np.int64)
    number[pairs[:, 0], pairs[:, 1]] = number[pairs[:, 1], pairs[:, 0]] = np.arange(len(pairs))
    image = permutations_of(dimension).image.astype(np.int64)
    return number[image[:, pairs[:, 0]], image[:, pairs[:, 1]]]


def ridge_lengths(t: Triangulation) -> np.ndarray:
    """How many simplices lie around the ridge opposite each pair of corners, int64, (N, C(D + 1, 2))."""
    d = t.dimension
    # the subset of the corners other than a pair: the order of complements is the reverse one
    number = classes(t, d - 1).number[:, ::-1]
    return np.bincount(number.ravel())[number]
