"""Permutations of 0..D as small numbers, and the tables that calculate with them.

A carrying permutation is stored as its rank in lexicographic order (0 is the identity), one byte per slot:
at most 120 of them for D = 4.  Everything a kernel needs of a permutation is a look-up in a flat table.
"""

from __future__ import annotations

from functools import cache
from itertools import permutations
from typing import NamedTuple

import numpy as np

__all__ = ["Permutations", "permutations_of"]


class Permutations(NamedTuple):
    """Tables over the n = (D+1)! permutations of 0..D, K = D + 1.

    Attributes
    ----------
    image : ndarray of int8, shape (n, K)
        ``image[p, i]`` is where `p` sends `i`.
    sign : ndarray of int8, shape (n,)
    inverse : ndarray of uint8, shape (n,)
    compose : ndarray of uint8, shape (n, n)
        ``compose[p, q]`` sends `i` to ``p[q[i]]``.
    keeping : ndarray of uint8, shape (K, K)
        ``keeping[i, j]`` is the permutation that sends `i` to `j` and keeps the order of the others.
    place : ndarray of int8, shape (n, K, K)
        ``place[p, i, a]`` for ``a != i``: position of ``p[a]`` among the corners other than ``p[i]``.
    ranks : ndarray of uint8, shape (K**K,)
        Rank of the permutation whose images are the digits of the index in base K.
    facet_sign : ndarray of int8, shape (n, K)
        Sign of the map that `p` induces from the facet opposite `i` to the one opposite ``p[i]``, both in
        ascending order.
    """

    image: np.ndarray
    sign: np.ndarray
    inverse: np.ndarray
    compose: np.ndarray
    ranks: np.ndarray
    keeping: np.ndarray
    place: np.ndarray
    facet_sign: np.ndarray

    def rank(self, images: np.ndarray) -> np.ndarray:
        """Ranks of permutations given by their images.

        Parameters
        ----------
        images : ndarray of int, shape (..., K)
            Each row a permutation of 0..D (not checked).

        Returns
        -------
        ndarray of uint8, shape (...)
        """
        k = self.image.shape[1]
        return self.ranks[np.asarray(images, dtype=np.int64) @ k ** np.arange(k - 1, -1, -1)]


@cache
def permutations_of(dimension: int) -> Permutations:
    """The tables for dimension D (2, 3 or 4).

    Examples
    --------
    >>> tables = permutations_of(3)
    >>> len(tables.image), tables.image[tables.keeping[0, 2]].tolist()
    (24, [2, 0, 1, 3])
    """
    k = dimension + 1
    rows = list(permutations(range(k)))
    rank = {row: number for number, row in enumerate(rows)}
    inverse = [rank[tuple(row.index(i) for i in range(k))] for row in rows]
    keeping = []
    for i in range(k):
        line = []
        for j in range(k):
            rest = [c for c in range(k) if c != j]
            rest.insert(i, j)
            line.append(rank[tuple(rest)])
        keeping.append(line)
    place = [[[p[a] - (p[a] > p[i]) if a != i else -1 for a in range(k)] for i in range(k)] for p in rows]
    facet_sign = [[_sign([p[a] for a in range(k) if a != i]) for i in range(k)] for p in rows]
    image = np.array(rows, dtype=np.int8)
    ranks = np.zeros(k**k, dtype=np.uint8)
    weights = k ** np.arange(k - 1, -1, -1)
    ranks[image @ weights] = np.arange(len(rows))
    tables = Permutations(
        image=image,
        sign=np.array([_sign(list(row)) for row in rows], dtype=np.int8),
        inverse=np.array(inverse, dtype=np.uint8),
        compose=ranks[image[:, image] @ weights],
        ranks=ranks,
        keeping=np.array(keeping, dtype=np.uint8),
        place=np.array(place, dtype=np.int8),
        facet_sign=np.array(facet_sign, dtype=np.int8),
    )
    for table in tables:
        table.flags.writeable = False
    return tables


def _sign(sequence: list[int]) -> int:
    swaps = sum(a > b for i, a in enumerate(sequence) for b in sequence[i + 1 :])
    return -1 if swaps % 2 else 1
