"""Integer matrices: ranks, invariant factors, kernels, and the abelian group of generators and relators.

Entries +1 and -1 are eliminated first, in exact integers of any size; what is left goes through the Smith
normal form of FLINT (python-flint).
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from itertools import groupby

__all__ = ["abelian_group", "abelian_name", "invariant_factors", "left_kernel"]


def abelian_group(generators: int, relators: list[dict[int, int]]) -> list[int]:
    """Invariant factors of an abelian group; 0 stands for a free factor, and ``[]`` for the trivial group.

    Parameters
    ----------
    generators : int
        How many there are; those that no relator names are free.
    relators : list of dict
        Generator to exponent.

    Examples
    --------
    >>> abelian_group(2, [{0: 2, 1: 2}, {0: 2, 1: -2}])
    [2, 4]
    >>> abelian_group(3, [{0: 1, 1: -1}, {1: 1}])
    [0]
    """
    rank, factors = invariant_factors(relators)
    return [0] * (generators - rank) + factors


def abelian_name(factors: Sequence[int]) -> str:
    """An abelian group by name, its free part first.

    Examples
    --------
    >>> abelian_name([0, 0, 2, 4]), abelian_name([])
    ('Z^2 + Z_2 + Z_4', '0')
    """
    parts = []
    for factor, group in groupby(factors):
        times = len(list(group))
        if factor == 0:
            parts.append("Z" if times == 1 else f"Z^{times}")
        else:
            parts += [f"Z_{factor}"] * times
    return " + ".join(parts) or "0"


def invariant_factors(lines: Iterable[dict[int, int]]) -> tuple[int, list[int]]:
    """Rank of an integer matrix, and its invariant factors other than 1, each dividing the next.

    Parameters
    ----------
    lines : iterable of dict
        Its rows (or columns): place to entry, entries other than 0.

    Notes
    -----
    The sparsest line with an entry +1 or -1 is used first, at the place that fewest lines touch (after
    H. M. Markowitz, 1957).  A line that has grown is looked at again only when its turn comes.

    Examples
    --------
    >>> invariant_factors([{0: 1, 1: 5}, {0: 2, 1: 4}])
    (2, [6])
    """
    from heapq import heapify, heappop, heappush

    rows = {x: dict(line) for x, line in enumerate(lines) if line}
    where: dict[int, set[int]] = {}
    for x, row in rows.items():
        for g in row:
            where.setdefault(g, set()).add(x)
    gone = 0
    ready = [(len(row), x) for x, row in rows.items()]
    heapify(ready)
    while ready:
        size, x = heappop(ready)
        row = rows.get(x, {})
        if len(row) != size:
            continue
        units = [g for g, e in row.items() if abs(e) == 1]
        if not units:
            continue
        g = min(units, key=lambda h: len(where[h]))
        del rows[x]
        for h in row:
            where[h].discard(x)
        gone += 1
        for y in list(where[g]):
            other = rows[y]
            factor = -other[g] * row[g]
            for h, e in row.items():
                value = other.get(h, 0) + factor * e
                if value:
                    other[h] = value
                    where[h].add(y)
                elif h in other:
                    del other[h]
                    where[h].discard(y)
            if other:
                heappush(ready, (len(other), y))
            else:
                del rows[y]
    if not rows:
        return gone, []
    from flint import fmpz_mat

    column = {g: x for x, g in enumerate(sorted({g for row in rows.values() for g in row}))}
    dense = [[0] * len(column) for _ in rows]
    for line, row in zip(dense, rows.values(), strict=True):
        for g, e in row.items():
            line[column[g]] = e
    normal = fmpz_mat(dense).snf()
    diagonal = [abs(int(normal[x, x])) for x in range(min(len(dense), len(column)))]
    diagonal = [e for e in diagonal if e]
    return gone + len(diagonal), [e for e in diagonal if e != 1]


def left_kernel(matrix: Sequence[Sequence[int]]) -> tuple[list[list[int]], list[list[int]]]:
    """A basis of the integer rows x with ``x matrix = 0``, and rows that complete it to a basis of them all.

    Parameters
    ----------
    matrix : sequence of sequence of int, shape (n, m)

    Returns
    -------
    kernel, rest : list of list of int
        Together the n rows of a unimodular matrix.

    Notes
    -----
    The Hermite normal form of the matrix beside the identity (H. Cohen, A Course in Computational Algebraic
    Number Theory, 1993, section 2.4; from memory).

    Examples
    --------
    >>> left_kernel([[1], [1]])
    ([[1, -1]], [[0, 1]])
    """
    from flint import fmpz_mat

    n = len(matrix)
    if n == 0:
        return [], []
    m = len(matrix[0])
    unit = [[int(x == y) for y in range(n)] for x in range(n)]
    form = fmpz_mat([[*map(int, row), *line] for row, line in zip(matrix, unit, strict=True)]).hnf().tolist()
    kernel: list[list[int]] = []
    rest: list[list[int]] = []
    for row in form:
        line = [int(e) for e in row]
        (rest if any(line[:m]) else kernel).append(line[m:])
    return kernel, rest
