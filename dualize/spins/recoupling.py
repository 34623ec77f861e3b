"""Change of basis between intertwiners with other orders of legs, other pairings and other phases.

The intertwiner of recoupling spin k over the legs ((a b)(c d)), in terms of 3jm symbols, is

    sqrt(2k+1) sum_m (a b k; . . m) (-1)**(k-m) (k c d; -m . .)

real and of norm 1; that of three legs is the 3jm symbol itself, that of two legs epsilon / sqrt(2j+1) with
``epsilon[m, -m] = (-1)**(j-m)``.  All spins are twice-spins.

D. A. Varshalovich, A. N. Moskalev, V. K. Khersonskii, *Quantum Theory of Angular Momentum* (1988), chapters
8 and 9.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache
from math import factorial, sqrt

import numpy as np

from .rules import admissible

__all__ = ["overlap", "recoupling_spins", "six_j"]


def six_j(a: int, b: int, c: int, d: int, e: int, f: int) -> float:
    """The 6j symbol {a b c; d e f} of twice-spins, by Racah's sum in exact integers.

    Examples
    --------
    >>> round(six_j(2, 2, 2, 2, 2, 2), 15) == round(1 / 6, 15)
    True
    """
    return _six_j(a, b, c, d, e, f)


@lru_cache(maxsize=1 << 16)
def _six_j(a: int, b: int, c: int, d: int, e: int, f: int) -> float:
    triads = ((a, b, c), (a, e, f), (d, b, f), (d, e, c))
    if not all(admissible(np.array(t)) for t in triads):
        return 0.0
    above = [sum(t) // 2 for t in triads]
    below = [(a + b + d + e) // 2, (b + c + e + f) // 2, (c + a + f + d) // 2]
    total = 0
    # over the common denominator of all terms, so that the sum is exact
    last = min(below)
    lengths = [last - x for x in above] + [x - max(above) for x in below]
    unit = 1
    for n in lengths:
        unit *= factorial(n)
    for z in range(max(above), last + 1):
        part = 1
        for x in above:
            part *= factorial(z - x)
        for x in below:
            part *= factorial(x - z)
        total += (-1) ** z * factorial(z + 1) * unit // part
    top, bottom = total * total, unit * unit
    for x, y, z in triads:
        top *= factorial((x + y - z) // 2) * factorial((x - y + z) // 2) * factorial((y + z - x) // 2)
        bottom *= factorial((x + y + z) // 2 + 1)
    return (1 if total >= 0 else -1) * sqrt(_ratio(top, bottom))


def _ratio(top: int, bottom: int) -> float:
    """A quotient of large integers, rounded once."""
    return top / bottom


def recoupling_spins(spins: Sequence[int], order: Sequence[int] = (0, 1, 2, 3)) -> list[int]:
    """The recoupling spins of an edge, ascending; [0] for two or three spins that admit an invariant."""
    if not admissible(np.array(spins)):
        return []
    if len(spins) < 4:
        return [0]
    a, b, c, d = (spins[p] for p in order)
    return list(range(max(abs(a - b), abs(c - d)), min(a + b, c + d) + 1, 2))


def overlap(
    spins: Sequence[int], new: Sequence[int], old: Sequence[int] = (0, 1, 2, 3), phase: str = "symbols"
) -> np.ndarray:
    """Scalar products of the intertwiners of one order of the legs with those of another.

    Parameters
    ----------
    spins : sequence of int, length D
        Twice-spins by place.
    new, old : sequence of int
        Places in the order ((0 1)(2 3)) of either basis; the first three or two entries where D is less.
    phase : str
        Of the new basis: ``"symbols"`` as above, or ``"coupled"``: by Clebsch-Gordan coefficients in the
        phase of Condon and Shortley, first and second pair each to k, then both to 0; three legs, the first
        pair to the spin of the third, then both to 0.

    Returns
    -------
    ndarray of float64, shape (dim, dim)
        ``overlap[x, y] = <new x | old y>``, states by ascending recoupling spin; orthogonal.

    Examples
    --------
    >>> overlap([1, 1, 2], [1, 0, 2], [0, 1, 2]).tolist()  # two legs of a 3jm symbol exchanged
    [[1.0]]
    """
    d = len(spins)
    s = list(spins)
    if d < 4:
        size = len(recoupling_spins(s))
        moved = [list(old[:d]).index(p) for p in new[:d]]
        odd = sum(x > y for n, x in enumerate(moved) for y in moved[n + 1 :]) % 2
        exponent = odd * (sum(s) // 2 if d == 3 else s[0] if s else 0)
        if phase == "coupled" and d == 3:  # two legs coupled to 0 are epsilon / sqrt(2j+1) already
            a, b, c = (s[p] for p in new[:3])
            exponent += (a - b + c) // 2
        return np.full((size, size), (-1.0) ** exponent)
    ks, ls = recoupling_spins(s, old), recoupling_spins(s, new)
    pairs = [frozenset(new[:2]), frozenset(new[2:])]
    if frozenset(old[:2]) in pairs:
        # the same pairing: signs
        signs = np.array([_pair_sign(s, k, old, new) for k in ks], dtype=float).reshape(-1)
        matrix = np.diag(signs) if len(signs) else np.zeros((0, 0))
    else:
        # bring old to ((a b)(c d)) with {a c} a pair of new, change to ((a c)(b d)), then to new
        a, b = old[:2]
        partner = next(iter(next(p for p in pairs if a in p) - {a}))
        c, e = partner, next(p for p in old[2:] if p != partner)
        middle = (a, b, c, e)
        after = (a, c, b, e)
        j1, j2, j3, j4 = (s[p] for p in middle)
        matrix = np.zeros((len(ls), len(ks)))
        for y, k in enumerate(ks):
            for x, m in enumerate(ls):
                value = sqrt((k + 1) * (m + 1)) * six_j(j1, j2, k, j4, j3, m)
                value *= (-1) ** ((j2 + j3 + k + m) // 2)
                matrix[x, y] = value * _pair_sign(s, k, old, middle) * _pair_sign(s, m, after, new)
    if phase == "coupled":
        a, b, c, e = (s[p] for p in new)
        matrix = matrix * np.array([(-1.0) ** ((a - b + c - e) // 2 + k) for k in ls]).reshape(-1, 1)
    return matrix


def _pair_sign(s: Sequence[int], k: int, old: Sequence[int], new: Sequence[int]) -> int:
    """The sign between two orders with the same pairing: legs of a pair exchanged, pairs exchanged."""
    exponent = 0
    first, second = tuple(new[:2]), tuple(new[2:])
    if set(first) != set(old[:2]):
        exponent += k
        first, second = second, first
    if first != tuple(old[:2]):
        exponent += (s[first[0]] + s[first[1]] + k) // 2
    if second != tuple(old[2:]):
        exponent += (s[second[0]] + s[second[1]] + k) // 2
    return -1 if exponent % 2 else 1
