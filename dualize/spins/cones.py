"""Extreme rays of small pointed cones in exact integers."""

from __future__ import annotations

from fractions import Fraction
from math import gcd, lcm
from typing import NamedTuple

import numpy as np

from ..errors import LimitError

__all__ = ["Rays", "extreme_rays", "sampled_rays"]


class Rays(NamedTuple):
    """Extreme rays of a cone.

    Attributes
    ----------
    vectors : ndarray of int64, shape (rays, n)
        Each without common divisor.
    complete : bool
        Whether these are all.
    """

    vectors: np.ndarray
    complete: bool


# pairs of rays that are tried on the way before the enumeration is given up: some seconds
PAIRS = 3_000_000


def extreme_rays(inequalities: np.ndarray, most: int = 100_000) -> np.ndarray:
    """Extreme rays of the cone of all x >= 0 with ``inequalities @ x >= 0``.

    Parameters
    ----------
    inequalities : ndarray of int64, shape (m, n)
    most : int
        At most so many rays on the way.

    Returns
    -------
    ndarray of int64, shape (rays, n)
        In lexicographic order.

    Raises
    ------
    LimitError
        If there are more rays on the way, or too many pairs of them.

    Notes
    -----
    The double description method: T. S. Motzkin, H. Raiffa, G. L. Thompson, R. M. Thrall, "The double
    description method", *Contributions to the Theory of Games II* (1953) 51-73; two rays are adjacent when no
    third lies in all the facets that they share (from memory).  Integers are exact.

    Examples
    --------
    The cone of metrics on three points:

    >>> extreme_rays(np.array([[1, 1, -1], [1, -1, 1], [-1, 1, 1]])).tolist()
    [[0, 1, 1], [1, 0, 1], [1, 1, 0]]
    """
    m, n = inequalities.shape
    # a ray and the inequalities that are equalities there, as bits: x >= 0 first, then the rows so far
    rays = [tuple(int(x == y) for x in range(n)) for y in range(n)]
    tight = [((1 << n) - 1) ^ (1 << y) for y in range(n)]
    pairs = 0
    for number, row in enumerate(inequalities.tolist()):
        bit = 1 << (n + number)
        terms = [(x, c) for x, c in enumerate(row) if c]
        value = [sum(c * ray[x] for x, c in terms) for ray in rays]
        above = [x for x, v in enumerate(value) if v > 0]
        below = [x for x, v in enumerate(value) if v < 0]
        pairs += len(above) * len(below)
        if pairs > PAIRS:
            raise LimitError(f"after {number} of {m} inequalities the cone has {len(rays):,} rays")
        keep_rays = [ray for ray, v in zip(rays, value, strict=True) if v >= 0]
        keep_tight = [z | (bit if v == 0 else 0) for z, v in zip(tight, value, strict=True) if v >= 0]
        for a in above:
            for b in below:
                common = tight[a] & tight[b]
                if common.bit_count() < n - 2:
                    continue
                if any(common & z == common for x, z in enumerate(tight) if x != a and x != b):
                    continue
                new = [value[a] * y - value[b] * x for x, y in zip(rays[a], rays[b], strict=True)]
                divisor = gcd(*new)
                keep_rays.append(tuple(x // divisor for x in new))
                keep_tight.append(common | bit)
        rays, tight = keep_rays, keep_tight
        if len(rays) > most:
            raise LimitError(
                f"after {number + 1} of {m} inequalities the cone has {len(rays):,} rays, and {most:,} are "
                "allowed"
            )
    return np.array(sorted(rays), dtype=np.int64).reshape(len(rays), n)


def sampled_rays(inequalities: np.ndarray, limit: int, seed: int = 0) -> np.ndarray:
    """Some extreme rays of the cone of all x >= 0 with ``inequalities @ x >= 0``, at most `limit`.

    Each is the optimum of a random linear function, brought to integers and checked in exact arithmetic to
    lie in n - 1 independent facets.
    """
    from scipy.optimize import linprog

    m, n = inequalities.shape
    rng = np.random.default_rng(seed)
    found: set[tuple[int, ...]] = set()
    misses = 0
    while len(found) < limit and misses < 20 + limit // 10:
        result = linprog(
            rng.exponential(size=n) - 0.5,
            A_ub=-inequalities,
            b_ub=np.zeros(m),
            A_eq=np.ones((1, n)),
            b_eq=[1.0],
            method="highs-ds",
        )
        ray = None if result.x is None else _integers(result.x)
        if ray is None or ray in found or not _is_extreme(inequalities, np.array(ray, dtype=object)):
            misses += 1
            continue
        misses = 0
        found.add(ray)
    return np.array(sorted(found), dtype=np.int64).reshape(len(found), n)


def _integers(vector: np.ndarray) -> tuple[int, ...] | None:
    top = float(vector.max())
    if top <= 0:
        return None
    parts = [Fraction(float(x) / top).limit_denominator(10_000) for x in vector]
    scale = lcm(*(p.denominator for p in parts))
    whole = [int(p * scale) for p in parts]
    divisor = gcd(*whole)
    ray = tuple(x // divisor for x in whole)
    return ray if max(ray) < 1 << 60 else None


def _is_extreme(inequalities: np.ndarray, ray: np.ndarray) -> bool:
    """Whether a vector is in the cone, and in n - 1 independent facets of it."""
    n = len(ray)
    values = inequalities.astype(object) @ ray
    if (values < 0).any() or (ray < 0).any():
        return False
    tight = inequalities[values == 0].tolist()
    tight += [[int(x == y) for y in range(n)] for x in range(n) if ray[x] == 0]
    return exact_rank(tight) == n - 1


def exact_rank(rows: list[list[int]]) -> int:
    """Rank of a small integer matrix over the rational numbers."""
    work = [[Fraction(x) for x in row] for row in rows]
    rank = 0
    while work:
        row = work.pop()
        lead = next((x for x, value in enumerate(row) if value), None)
        if lead is None:
            continue
        rank += 1
        for other in work:
            if other[lead]:
                factor = other[lead] / row[lead]
                other[:] = [a - factor * b for a, b in zip(other, row, strict=True)]
    return rank
