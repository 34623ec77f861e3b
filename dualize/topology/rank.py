"""Ranks of sparse integer matrices modulo a prime, and the Betti numbers of a chain complex."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from scipy.sparse import csc_array

__all__ = ["betti_numbers", "foam_betti", "rank_mod"]


def rank_mod(matrix: csc_array, prime: int) -> int:
    """Rank over the field of `prime` elements, by sparse elimination.

    Columns are taken shortest first, each is reduced by the pivots met so far, and its pivot is the row that
    fewest columns touch; exact, and quick as long as columns stay short.

    Examples
    --------
    >>> from scipy.sparse import csc_array
    >>> m = csc_array([[2, 1], [0, 2]])
    >>> rank_mod(m, 2), rank_mod(m, 3)
    (1, 2)
    """
    data = (matrix.data % prime).astype(np.int64)
    keep = np.bincount(matrix.indices[data != 0], minlength=matrix.shape[0]).tolist()
    rows, values, offsets = matrix.indices.tolist(), data.tolist(), matrix.indptr.tolist()
    order = np.argsort(np.diff(matrix.indptr), kind="stable").tolist()
    pivots: dict[int, tuple[int, dict[int, int]]] = {}  # row: (age, column with entry 1 there)
    for x in order:
        column: dict[int, int] = {}
        for p in range(offsets[x], offsets[x + 1]):
            if values[p]:
                column[rows[p]] = values[p]
        # a pivot column has no entry at an older pivot's row, so the oldest first ends the work soonest
        while column:
            met = [r for r in column if r in pivots]
            if not met:
                lead = min(column, key=lambda r: (keep[r], r))
                if column[lead] != 1:
                    inverse = pow(column[lead], -1, prime)
                    column = {r: e * inverse % prime for r, e in column.items()}
                pivots[lead] = (len(pivots), column)
                break
            r = min(met, key=lambda q: pivots[q][0])
            factor = column[r]
            for q, e in pivots[r][1].items():
                value = (column.get(q, 0) - factor * e) % prime
                if value:
                    column[q] = value
                else:
                    column.pop(q, None)
    return len(pivots)


def betti_numbers(maps: Sequence[csc_array], prime: int) -> list[int]:
    """Betti numbers b_0 .. b_n of a chain complex over the field of `prime` elements.

    Parameters
    ----------
    maps : sequence of csc_array
        The boundary maps from dimension 1 to n.
    """
    sizes = [maps[0].shape[0], *(m.shape[1] for m in maps)]
    ranks = [0, *(rank_mod(m, prime) for m in maps), 0]
    return [n - ranks[x] - ranks[x + 1] for x, n in enumerate(sizes)]


def foam_betti(d1: csc_array, d2: csc_array, prime: int) -> tuple[int, int]:
    """b_0 and b_1 of the foam over the field of `prime` elements.

    The rank of d1 is that of its graph, whatever the prime.  That of d2 is not changed by leaving out the
    edges of a spanning forest, because a cycle is known by its other edges.
    """
    from scipy.sparse import csr_array
    from scipy.sparse.csgraph import breadth_first_order, connected_components

    vertices, edges = d1.shape
    ends = np.zeros((2, edges), dtype=np.int64)
    proper = np.diff(d1.indptr) == 2  # a loop has no entry left
    first = d1.indptr[:-1][proper]
    ends[:, proper] = d1.indices[first], d1.indices[first + 1]
    # the number of an edge between two vertices, the last one where there are several
    number = np.flatnonzero(proper)
    graph = csr_array(
        (np.ones(len(number), dtype=np.int8), (ends[0, number], ends[1, number])), shape=(vertices, vertices)
    )
    parts, label = connected_components(graph, directed=False)
    code = np.minimum(*ends[:, number]) * vertices + np.maximum(*ends[:, number])
    order = np.argsort(code, kind="stable")
    tree = np.zeros(edges, dtype=bool)
    roots = np.full(parts, -1)
    roots[label[::-1]] = np.arange(vertices)[::-1]
    for root in roots.tolist():
        _, parent = breadth_first_order(graph, root, directed=False)
        child = np.flatnonzero(parent >= 0)
        wanted = np.minimum(child, parent[child]) * vertices + np.maximum(child, parent[child])
        tree[number[order[np.searchsorted(code[order], wanted)]]] = True
    reduced = d2.tocsr()[~tree].tocsc()
    return parts, edges - (vertices - parts) - rank_mod(reduced, prime)
