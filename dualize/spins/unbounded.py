"""Unbounded spins: the cone of directions in which admissible labellings grow.

The *recession cone* of the edge rules is what is left of them with boundary spins 0: no spin at an edge is
larger than the sum of the others.  If there is one admissible labelling, the internal faces of the cone's
support are those whose spins have no upper bound, and there are infinitely many labellings exactly if the
support is not empty.

Unbounded spins, closed surfaces mod 2 (`Sectors` with boundary spins 0) and the degree of divergence
(`power`) are three different things; none follows from another.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..errors import LimitError
from .cones import Rays, extreme_rays, sampled_rays
from .rules import Rules

__all__ = ["Growth", "growth", "growth_rays"]


@dataclass(frozen=True, eq=False)
class Growth:
    """The recession cone of the edge rules.

    Attributes
    ----------
    unbounded : ndarray of bool, shape (F_int,)
        The faces of the cone's support.
    dimension : int
        Of the cone.
    group : ndarray of int64, shape (F_int,)
        Faces that grow as one because edges have no others that grow have the same number, 0 .. dimension -
        1; -1 where the spin is bounded.
    """

    unbounded: np.ndarray
    dimension: int
    group: np.ndarray

    def __repr__(self) -> str:
        return f"<Growth: {int(self.unbounded.sum())} unbounded faces, cone of dimension {self.dimension}>"


def growth(rules: Rules) -> Growth:
    """Support and dimension of the recession cone.

    Parameters
    ----------
    rules : Rules
        Boundary spins do not matter.

    Returns
    -------
    Growth

    Notes
    -----
    This is the linear programme "make as many spins positive as possible", solved by inspection.  A face
    that is alone at an edge, and there once, among the faces not yet known to be 0 has spin 0; taking such
    faces away until there are none leaves the support, because there the spins that are all 1 fulfil every
    rule.  They fulfil them strictly but where an edge has just two faces left, whose spins are then equal; so
    the dimension is the number of classes of faces under these equalities.  Time is linear in the size.

    Examples
    --------
    >>> from dualize import build, make
    >>> from dualize.spins import rules_of
    >>> growth(rules_of(build(make.move_side(4, 5))))
    <Growth: 10 unbounded faces, cone of dimension 10>
    """
    member, times = rules.member.tolist(), rules.times.tolist()
    offsets = rules.offsets.tolist()
    edge = rules.edge_of_member
    order = np.argsort(rules.member, kind="stable")
    at = edge[order].tolist()
    bounds = np.searchsorted(rules.member[order], np.arange(rules.internal + 1)).tolist()
    left = np.bincount(edge, weights=rules.times, minlength=len(rules.face)).astype(np.int64).tolist()
    alive = [True] * rules.internal
    ready = [e for e, n in enumerate(left) if n == 1]
    while ready:
        e = ready.pop()
        if left[e] != 1:
            continue
        face = next(member[x] for x in range(offsets[e], offsets[e + 1]) if alive[member[x]])
        alive[face] = False
        for x in range(bounds[face], bounds[face + 1]):
            other = at[x]
            left[other] -= times[order[x]]
            if left[other] == 1:
                ready.append(other)
    parent = list(range(rules.internal))

    def root(f: int) -> int:
        while parent[f] != f:
            parent[f] = parent[parent[f]]
            f = parent[f]
        return f

    for e, n in enumerate(left):
        if n == 2:
            faces = [member[x] for x in range(offsets[e], offsets[e + 1]) if alive[member[x]]]
            if len(faces) == 2:
                parent[root(faces[0])] = root(faces[1])
    unbounded = np.array(alive, dtype=bool)
    number: dict[int, int] = {}
    group = [number.setdefault(root(f), len(number)) if alive[f] else -1 for f in range(rules.internal)]
    return Growth(unbounded, len(number), np.array(group, dtype=np.int64))


def growth_rays(rules: Rules, limit: int = 1000) -> Rays:
    """Extreme rays of the recession cone as integer vectors over the internal faces.

    Parameters
    ----------
    rules : Rules
    limit : int
        At most so many rays.

    Returns
    -------
    Rays
        `complete` tells whether these are all.  Where they are not, they were found one by one in random
        directions; each is checked to be an extreme ray in exact arithmetic.

    Notes
    -----
    For the star of a point of five 4-simplices this is the cone of metrics on five points, with 25 rays
    (M. Deza, M. Laurent, *Geometry of Cuts and Metrics*, 1997).
    """
    found = growth(rules)
    n = found.dimension
    inequalities: set[tuple[int, ...]] = set()
    for e in range(len(rules.face)):
        span = slice(rules.offsets[e], rules.offsets[e + 1])
        row = np.zeros(n, dtype=np.int64)
        here = []
        for f, m in zip(rules.member[span].tolist(), rules.times[span].tolist(), strict=True):
            if found.group[f] >= 0:
                row[found.group[f]] += m
                here.append(int(found.group[f]))
        for x in here:
            one = row.copy()
            one[x] -= 2
            if (one < 0).any():
                inequalities.add(tuple(one.tolist()))
    rows = np.array(sorted(inequalities), dtype=np.int64).reshape(len(inequalities), n)
    try:
        rays, complete = extreme_rays(rows, most=max(4 * limit, 2000)), True
    except LimitError:
        rays, complete = sampled_rays(rows, limit), False
    if len(rays) > limit:
        rays, complete = rays[:limit], False
    full = np.zeros((len(rays), rules.internal), dtype=np.int64)
    full[:, found.unbounded] = rays[:, found.group[found.unbounded]]
    return Rays(full, complete)
