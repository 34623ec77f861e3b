"""Small integer matrices: the abelian group of generators and relators."""

from __future__ import annotations

from math import gcd

__all__ = ["abelian_group"]


def abelian_group(generators: int, relators: list[dict[int, int]]) -> list[int]:
    """Invariant factors of an abelian group; 0 stands for a free factor, and ``[]`` for the trivial group.

    Parameters
    ----------
    generators : int
        How many there are; those that no relator names are free.
    relators : list of dict
        Generator to exponent.

    Notes
    -----
    Generators with exponent +1 or -1 are eliminated first, the sparsest relator first; what is left goes
    through the Smith normal form.  Exact integers throughout.

    Examples
    --------
    >>> abelian_group(2, [{0: 2, 1: 2}, {0: 2, 1: -2}])
    [2, 4]
    >>> abelian_group(3, [{0: 1, 1: -1}, {1: 1}])
    [0]
    """
    rows = {x: dict(r) for x, r in enumerate(relators) if r}
    where: dict[int, set[int]] = {}
    for x, row in rows.items():
        for g in row:
            where.setdefault(g, set()).add(x)
    gone = 0
    ready = sorted(rows, key=lambda x: -len(rows[x]))
    while ready:
        x = ready.pop()
        row = rows.get(x, {})
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
                ready.append(y)
            else:
                del rows[y]
    left = sorted({g for row in rows.values() for g in row})
    column = {g: x for x, g in enumerate(left)}
    dense = [[0] * len(left) for _ in rows]
    for line, row in zip(dense, rows.values(), strict=True):
        for g, e in row.items():
            line[column[g]] = e
    diagonal = _smith(dense)
    free = generators - gone - len(diagonal)
    return [0] * free + [e for e in diagonal if e != 1]


def _smith(matrix: list[list[int]]) -> list[int]:
    """The nonzero invariant factors of an integer matrix, each dividing the next (J. Munkres, Elements of
    Algebraic Topology, 1984, section 11; from memory)."""
    rows = [row[:] for row in matrix]
    diagonal = []
    while any(any(row) for row in rows):
        _, r, c = min((abs(e), r, c) for r, row in enumerate(rows) for c, e in enumerate(row) if e)
        rows[0], rows[r] = rows[r], rows[0]
        for row in rows:
            row[0], row[c] = row[c], row[0]
        pivot = rows[0]
        clean = True
        for row in rows[1:]:
            factor = row[0] // pivot[0]
            for x, e in enumerate(pivot):
                row[x] -= factor * e
            clean = clean and row[0] == 0
        for x in range(1, len(pivot)):
            factor = pivot[x] // pivot[0]
            for row in rows:
                row[x] -= factor * row[0]
            clean = clean and pivot[x] == 0
        if clean:
            diagonal.append(abs(pivot[0]))
            rows = [row[1:] for row in rows[1:]]
    # each factor is to divide the next
    for x in range(len(diagonal)):
        for y in range(x + 1, len(diagonal)):
            common = gcd(diagonal[x], diagonal[y])
            diagonal[x], diagonal[y] = common, diagonal[x] * diagonal[y] // common
    return diagonal
