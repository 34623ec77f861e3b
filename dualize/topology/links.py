"""Links of simplices: is this triangulation a manifold?

The link of a simplex with m corners in a triangulation of dimension D has dimension D - m.  In a manifold the
links of interior simplices are spheres and those of boundary simplices are balls.  What is decided here:

* links of dimension 1 are circles or arcs by construction, unless a ridge is pinched or has a holonomy;
* links of dimension 2 are surfaces, so the Euler characteristic decides (classification of surfaces): 2 is a
  sphere, 1 with boundary a disc.  For D <= 3 this settles the question;
* links of dimension 3 (points of a 4-dimensional triangulation) are compact 3-manifolds where all links of
  segments are spheres or discs.  With H_1 = 0 over the integers they have the homology of a sphere or ball,
  by duality.  If moreover the fundamental group is seen to be trivial they are spheres or balls (G. Perelman,
  2002-2003, the Poincaré conjecture; from memory).  The search eliminates generators one by one: it finds the
  group trivial, or finds nothing.  A homology sphere such as Poincaré's has H_1 = 0 and stays undecided.

Euler characteristics of all links come from counting, fundamental groups from a single pass over the complex.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from ..kernels import engine
from ..kernels.links import kill_generators, lay_rings, span_links
from ..kernels.permutations import permutations_of
from ..layout import wedge_pairs
from ..triangulation import Triangulation
from .classes import Census, corner_subsets
from .integral import abelian_group
from .presentation import collapses

__all__ = ["Links", "link_figures"]


class Links(NamedTuple):
    """What is known of the links of all simplices with 1 to D - 2 corners.

    Attributes
    ----------
    euler : list of ndarray of int64
        For m = 1 .. D - 2: Euler characteristic of the link of each class (`Census.classes`), each fan of a
        pinched simplex by itself.
    boundary : list of ndarray of bool
        Whether the class lies on the boundary.
    expected : list of ndarray of int64
        Euler characteristic of the sphere or ball in its place.
    simply_connected : ndarray of bool, shape (points,), or None
        D = 4: the links of points whose fundamental group was found to be trivial.
    homology : dict of int to list of int
        D = 4: H_1 of the links of the other points, its invariant factors (0 for a free one); only points on
        no segment whose link is wrong.
    """

    euler: list[np.ndarray]
    boundary: list[np.ndarray]
    expected: list[np.ndarray]
    simply_connected: np.ndarray | None
    homology: dict[int, list[int]]

    def wrong(self, m: int) -> np.ndarray:
        """Which classes with m corners have a link of wrong Euler characteristic, bool."""
        return self.euler[m - 1] != self.expected[m - 1]


def link_figures(triangulation: Triangulation, census: Census, *, threads: int | None = None) -> Links:
    """Euler characteristics and, in dimension 4, first homology of the links of all simplices.

    Parameters
    ----------
    triangulation : Triangulation
    census : Census
        Its simplices, by `dualize.topology.classes.census`.
    threads : int, optional
    """
    t, d = triangulation, triangulation.dimension
    euler, boundary, expected = [], [], []
    for m in range(1, d - 1):
        chi, touched = _euler(t, census, m)
        euler.append(chi)
        boundary.append(touched)
        expected.append(np.where(touched, 1, 1 + (-1) ** (d - m)))
    simply: np.ndarray | None = None
    homology: dict[int, list[int]] = {}
    if d == 4:
        doubtful = np.zeros(len(euler[0]), dtype=bool)
        bad = census.classes[1].irregular | (euler[1] != expected[1])
        simplex, subset = np.divmod(census.classes[1].first[bad], 10)
        doubtful[census.classes[0].number[simplex[:, None], corner_subsets(4, 2)[subset]]] = True
        simply, homology = _fundamental_groups(t, census.classes[0].number, doubtful, threads)
    return Links(euler, boundary, expected, simply, homology)


def _euler(t: Triangulation, census: Census, m: int) -> tuple[np.ndarray, np.ndarray]:
    """Euler characteristic of the link of each class with m corners, and whether it touches the boundary."""
    d, number = t.dimension, census.classes[m - 1].number
    count = census.classes[m - 1].count
    code = {tuple(row): x for x, row in enumerate(corner_subsets(d, m).tolist())}
    chi = np.zeros(count, dtype=np.int64)
    touched = np.zeros(count, dtype=bool)
    for size in range(m + 1, d + 2):
        subsets = corner_subsets(d, size)
        # the m corners of each subset, as numbers of subsets
        inside = np.array(
            [
                [code[tuple(row[list(pick)])] for pick in corner_subsets(size - 1, m).tolist()]
                for row in subsets
            ]
        )
        if size == d + 1:
            rows = number[:, inside[0]]
        elif size == d:
            slot = np.arange(d + 1)
            there = np.where(t.across < 0, len(t), t.across)
            image = permutations_of(d).image[t.rank, slot]
            half = np.arange(len(t))[:, None] * (d + 1) + slot
            # subset number x leaves out corner d - x
            simplex, slots = np.nonzero(half < there * (d + 1) + image)
            rows = number[simplex[:, None], inside[d - slots]]
            outer, open_slots = np.nonzero(t.across < 0)
            touched[number[outer[:, None], inside[d - open_slots]].ravel()] = True
        else:
            simplex, subset = np.divmod(census.classes[size - 1].first, len(subsets))
            rows = number[simplex[:, None], inside[subset]]
            if size == 2 and m == 1:
                # a segment that is glued to itself reversed has one end, not two
                folded = census.classes[1].irregular
                chi -= np.bincount(rows[folded, 0], minlength=count)
        chi += (-1) ** (size - m - 1) * np.bincount(rows.ravel(), minlength=count)
    return chi, touched


def _fundamental_groups(
    t: Triangulation, point: np.ndarray, doubtful: np.ndarray, threads: int | None
) -> tuple[np.ndarray, dict[int, list[int]]]:
    """Which links are found simply connected, and H_1 of the others unless `doubtful`."""
    n, d = len(t), t.dimension
    k, w = d + 1, d * (d + 1) // 2
    run = engine(n, threads)
    axes = tuple(range(k))
    slots = np.array(wedge_pairs(d), dtype=np.int8)
    pair = np.full((k, k), -1, dtype=np.int8)
    pair[slots[:, 0], slots[:, 1]] = pair[slots[:, 1], slots[:, 0]] = np.arange(w)
    gluings = (t.across.ravel(), t.rank.ravel(), permutations_of(d).image.ravel())
    ids = np.int32 if n * k * w < 2**31 else np.int64
    known = np.zeros(n * k * k, dtype=np.uint8)
    met, queue = np.zeros(n * k, dtype=np.uint8), np.empty(n * k, dtype=ids)
    run(span_links, *gluings, known, met, queue, axes, n)
    ring, unknown = np.full(n * k * w, -2, dtype=ids), np.zeros(n * k * w, dtype=ids)
    run(lay_rings, *gluings, pair.ravel(), known, ring, unknown, axes, n)
    lead = np.flatnonzero(ring == np.arange(n * k * w, dtype=ids))
    stack = np.empty(len(lead) + 1, dtype=ids)
    run(kill_generators, *gluings, pair.ravel(), slots.ravel(), known, ring, unknown, stack, axes, n)
    live = known.reshape(n, k, k) == 0
    live &= (t.across >= 0)[:, None, :] & ~np.eye(k, dtype=bool)
    simply = np.ones(len(doubtful), dtype=bool)
    simply[point[live.any(axis=2)]] = False
    homology: dict[int, list[int]] = {}
    stuck = ~simply & ~doubtful
    if not stuck.any():
        return simply & ~doubtful, homology
    # the few links that are left, one by one: letters of a link are numbered from 1
    letters: dict[int, dict[int, int]] = {p: {} for p in np.flatnonzero(stuck).tolist()}
    words: dict[int, list[list[int]]] = {p: [] for p in letters}
    image = permutations_of(d).image
    for s, c, i in np.argwhere(live).tolist():
        if (p := int(point[s, c])) in letters:
            q = image[t.rank[s, i]]
            there = (int(t.across[s, i]) * k + int(q[c])) * k + int(q[i])
            letters[p].setdefault(min((s * k + c) * k + i, there), len(letters[p]) + 1)
    for item in lead[np.greater(unknown[lead], 0)].tolist():
        corner = item // w
        if (p := int(point[corner // k, corner % k])) in letters:
            words[p].append(
                [letters[p][abs(y) - 1] * (1 if y > 0 else -1) for y in _ring(t, image, live, item, slots)]
            )
    for p, relators in words.items():
        if {abs(x) for r in relators for x in r} == set(letters[p].values()) and collapses(relators):
            simply[p] = True
            continue
        sums = [{x: r.count(x) - r.count(-x) for x in map(abs, r)} for r in relators]
        homology[p] = abelian_group(len(letters[p]), [{x: e for x, e in r.items() if e} for r in sums])
    return simply & ~doubtful, homology


def _ring(t: Triangulation, image: np.ndarray, live: np.ndarray, item: int, slots: np.ndarray) -> list[int]:
    """The generators left on a ring in order: 1 + smaller half-generator, negative from the larger."""
    k = t.dimension + 1
    s, c = divmod(item // len(slots), k)
    a, b = (int(x) for x in slots[item % len(slots)])
    start = (s, c, a, b)
    out: list[int] = []
    while True:
        q = image[t.rank[s, b]]
        there = (int(t.across[s, b]), int(q[c]), int(q[b]), int(q[a]))
        if live[s, c, b]:
            here, other = (s * k + c) * k + b, (there[0] * k + there[1]) * k + there[2]
            out.append(here + 1 if here < other else -(other + 1))
        s, c, a, b = there
        if there == start:
            return out
