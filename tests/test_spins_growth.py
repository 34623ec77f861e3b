"""Unbounded spins, rays, bubbles and power counting, against published values and linear programming."""

import numpy as np
import pytest
import specimens as sp
from hypothesis import given
from hypothesis import strategies as st
from reference import glue_by_labels, table_from_pairs
from regions import glued, scramble
from sums import FOAMS, foam_of

import dualize
from dualize import InputError, make, spins
from dualize.spins.power import interior_group, interior_homology


def cone_rows(skeleton):
    """The recession cone as rows of ``A @ x >= 0``, from the table alone."""
    inner = skeleton.counts["faces_internal"]
    rows = []
    for faces in skeleton["edges/face"][: skeleton.counts["edges_internal"]].tolist():
        for k in range(len(faces)):
            row = np.zeros(inner, dtype=int)
            for place, f in enumerate(faces):
                if f < inner:
                    row[f] += -1 if place == k else 1
            rows.append(row)
    return np.array(rows, dtype=int).reshape(-1, inner)


def support_by_programme(skeleton):
    """Make as many spins positive as possible: sum of t with t <= x, t <= 1."""
    from scipy.optimize import linprog

    inner = skeleton.counts["faces_internal"]
    rows = cone_rows(skeleton)
    zero = np.zeros_like(rows)
    a = np.vstack([np.hstack([-rows, zero]), np.hstack([-np.eye(inner), np.eye(inner)])])
    goal = np.concatenate([np.zeros(inner), -np.ones(inner)])
    bounds = [(0, None)] * inner + [(0, 1)] * inner
    found = linprog(goal, A_ub=a, b_ub=np.zeros(len(a)), bounds=bounds)
    return found.x[inner:] > 0.5


SMALL = {**FOAMS, "4d-1-5": glue_by_labels(sp.move_side(4, 5)), "3d-sphere": glue_by_labels(sp.sphere(3))}


@pytest.mark.parametrize("name", SMALL)
def test_unbounded_faces_are_those_of_the_linear_programme(name):
    s = glued(SMALL[name])
    if not s.counts["faces_internal"]:
        assert not spins.growth(spins.rules_of(s)).unbounded.any()
        return
    assert spins.growth(spins.rules_of(s)).unbounded.tolist() == support_by_programme(s).tolist()


@pytest.mark.parametrize("name", SMALL)
def test_rays_are_extreme_and_span_the_cone(name):
    s = glued(SMALL[name])
    rules = spins.rules_of(s)
    found, growth = spins.growth_rays(rules), spins.growth(rules)
    assert found.complete
    inner = s.counts["faces_internal"]
    rank = np.linalg.matrix_rank(found.vectors.astype(float)) if found.vectors.size else 0
    assert rank == growth.dimension
    rows = np.vstack([cone_rows(s), np.eye(inner, dtype=int)]) if inner else np.zeros((0, 0), dtype=int)
    for ray in found.vectors:
        value = rows @ ray
        assert (value >= 0).all() and np.gcd.reduce(ray) == 1
        # an extreme ray is the only direction in all the facets that it lies in
        assert np.linalg.matrix_rank(rows[value == 0].astype(float)) == inner - 1
    if inner:
        assert (found.vectors.any(axis=0) == growth.unbounded).all() or not len(found.vectors)


# V. Bonzom, M. Smerlak, "Bubble divergences from cellular cohomology" (2010); M. Deza, M. Laurent, "Geometry
# of Cuts and Metrics" (1997) for the 25 rays of the metrics on five points; the other numbers from memory.
TABLE = {
    # name: triangulation, V, E_int, F_int, Omega, unbounded faces, dimension, rays
    "3d-1-4": (make.move_side(3, 4), 4, 6, 4, 1, 4, 1, 1),
    "3d-2-3": (make.move_side(3, 3), 3, 3, 1, 0, 0, 0, 0),
    "3d-4-4": (make.ridge_ring(4, 3), 4, 4, 1, 0, 0, 0, 0),
    "3d-melon-3": (make.shared_pair(3, 3), 2, 3, 3, 1, 3, 1, 1),
    "4d-1-5": (make.move_side(4, 5), 5, 10, 10, 4, 10, 10, 25),
    "4d-2-4": (make.move_side(4, 4), 4, 6, 4, 1, 4, 1, 1),
    "4d-3-3": (make.move_side(4, 3), 3, 3, 1, 0, 0, 0, 0),
    "4d-melon-4": (make.shared_pair(4, 4), 2, 4, 6, 3, 6, 6, 7),
    "4d-melon-3": (make.shared_pair(3, 4), 2, 3, 3, 1, 3, 1, 1),
    "4d-melon-2": (make.shared_pair(2, 4), 2, 2, 1, 0, 0, 0, 0),
    "3d-sphere-5": (make.simplex_boundary(3), 5, 10, 10, 4, 10, 10, 25),
    "3d-sphere-2": (make.shared_pair(4, 3), 2, 4, 6, 3, 6, 6, 7),
    "4d-sphere-2": (make.shared_pair(5, 4), 2, 5, 10, 6, 10, 10, 37),
}


@pytest.mark.parametrize("row", TABLE.values(), ids=TABLE)
def test_published_cones_and_powers(row):
    triangulation, vertices, edges, faces, omega, unbounded, dimension, rays = row
    s = dualize.build(triangulation)
    rules = spins.rules_of(s)
    growth = spins.growth(rules)
    counts = (s.counts["vertices"], s.counts["edges_internal"], s.counts["faces_internal"])
    assert counts == (vertices, edges, faces)
    assert spins.omega(s) == omega
    assert (int(growth.unbounded.sum()), growth.dimension) == (unbounded, dimension)
    assert len(spins.growth_rays(rules).vectors) == rays


def test_the_four_sphere_has_a_cone_of_dimension_twenty():
    s = dualize.build(make.simplex_boundary(4))
    growth = spins.growth(spins.rules_of(s))
    assert (spins.omega(s), int(growth.unbounded.sum()), growth.dimension) == (10, 20, 20)


def test_metric_cone_has_fifteen_cuts():
    """Deza, Laurent (1997): 15 of the 25 rays of the metrics on five points are cuts."""
    s = dualize.build(make.move_side(4, 5))
    rays = spins.growth_rays(spins.rules_of(s)).vectors
    closed = {tuple(row) for row in rays.tolist() if max(row) == 1}
    surfaces = set()
    sectors = spins.parity_sectors(spins.rules_of(s))
    for n in range(1, 2**sectors.exponent):
        surfaces.add(tuple(sectors.sector(n).tolist()))
    assert len(surfaces) == 15
    assert surfaces == {ray for ray in closed if ray in surfaces}


def test_metrics_on_six_points():
    """V. P. Grishukhin, "Computing extreme rays of the metric cone for seven points", Europ. J. Combin. 13
    (1992) 153-165 (from memory): 296 extreme rays on six points."""
    from itertools import combinations, permutations

    from dualize.spins.cones import extreme_rays

    number = {pair: x for x, pair in enumerate(combinations(range(6), 2))}
    rows = []
    for a, b, c in permutations(range(6), 3):
        if a < b:
            row = [0] * 15
            row[number[a, b]] = -1
            row[number[tuple(sorted((a, c)))]] = row[number[tuple(sorted((b, c)))]] = 1
            rows.append(row)
    assert len(extreme_rays(np.array(rows))) == 296


def test_unbounded_spins_without_closed_surface():
    """A sphere of one tetrahedron (triangles 012 on 013, 023 on 231): no cycle mod 2, Omega 0, and yet spins
    grow.  Closed surfaces, Omega and unbounded spins are three different things."""
    gluings = [[[0, [1, 3, 0, 2]], [0, [2, 0, 3, 1]], [0, [0, 1, 3, 2]], [0, [0, 1, 3, 2]]]]
    s = glued(table_from_pairs(gluings))
    rules = spins.rules_of(s)
    assert spins.parity_sectors(rules).exponent == 0
    assert spins.omega(s) == 0
    growth = spins.growth(rules)
    assert (growth.dimension, int(growth.unbounded.sum())) == (2, 2)
    assert sorted(sorted(ray) for ray in spins.growth_rays(rules).vectors.tolist()) == [[0, 1], [1, 2]]


def test_sampled_rays_are_extreme():
    s = dualize.build(make.simplex_boundary(4))
    found = spins.growth_rays(spins.rules_of(s), 3)
    assert not found.complete and len(found.vectors) == 3
    rows = np.vstack([cone_rows(s), np.eye(20, dtype=int)])
    for ray in found.vectors:
        assert (rows @ ray >= 0).all()
        assert np.linalg.matrix_rank(rows[rows @ ray == 0].astype(float)) == 19


# --------------------------------------------------------------------------------------------------
# Bubbles


@pytest.mark.parametrize(
    "triangulation, number, independent",
    [
        (make.move_side(4, 5), 5, 4),
        (make.move_side(4, 4), 1, 1),
        (make.move_side(4, 3), 0, 0),
        (make.move_side(3, 4), 1, 1),
        (make.shared_pair(4, 4), 4, 3),
        (make.simplex_boundary(4), 15, 10),
    ],
    ids=["1-5", "2-4", "3-3", "1-4", "melon", "4-sphere"],
)
def test_bubbles_of_simple_foams_are_spheres(triangulation, number, independent):
    """Bonzom, Smerlak (2010): Omega bubbles are independent where the second homology comes from bubbles."""
    s = dualize.build(triangulation)
    found = spins.bubbles(s)
    assert (len(found), found.independent) == (number, independent)
    assert (found.characteristic == 2).all()
    assert independent == spins.omega(s)


def test_the_bubbles_of_a_point_have_one_relation():
    found = spins.bubbles(dualize.build(make.move_side(4, 5)))
    assert found.relations() == [[0, 1, 2, 3, 4]]
    assert [len(found.faces_of(n)) for n in range(5)] == [4] * 5


@pytest.mark.parametrize("name", ["T3", "RP3", "S2xS1", "CP2"])
def test_bubbles_are_links_of_all_simplices(name):
    """Each is the dual of a link, a 2-sphere in a manifold; together they pass each face D - 1 times."""
    s = dualize.build(make.published(name))
    found = spins.bubbles(s)
    assert (found.characteristic == 2).all()
    times = np.zeros(s.counts["faces_internal"], dtype=int)
    np.add.at(times, found.face, found.face_times)
    assert (times == s.dimension - 1).all()


def test_a_bubble_that_is_no_sphere():
    """The cone on the projective plane: the surface around its tip has the characteristic of the plane, 1."""
    s = dualize.build(dualize.Triangulation.from_facets(sp.cone(sp.projective_plane())))
    assert spins.bubbles(s).characteristic.tolist() == [1]


def test_every_bubble_is_a_closed_surface():
    for name in ("4d-melon-4", "3d-1-4", "4d-closed", "3d-closed-2", "4d-2-4"):
        s = foam_of(name)
        found = spins.bubbles(s)
        for n in range(len(found)):
            labels = np.zeros(len(s["faces/against"]), dtype=int)
            a, b = found.face_offsets[n : n + 2]
            labels[found.face[a:b]] = found.face_times[a:b]
            rows = labels[s["edges/face"][: s.counts["edges_internal"]]]
            assert (rows.sum(axis=1) % 2 == 0).all()


def test_a_2d_foam_has_no_bubbles():
    with pytest.raises(InputError, match="2D foam has no bubbles"):
        spins.bubbles(foam_of("2d-sphere"))


# --------------------------------------------------------------------------------------------------
# Powers


@pytest.mark.parametrize(
    "name, factors", [("RP3", [2]), ("T3", [0, 0, 0]), ("S3", []), ("S2xS1", [0])], ids=str
)
def test_first_homology_of_the_foam_is_that_of_the_space(name, factors):
    """The dual two-complex carries the fundamental group (common practice; groups from memory)."""
    s = dualize.build(make.published(name))
    assert interior_homology(s, interior_group(s)) == factors


@pytest.mark.parametrize("name", ["RP3", "T3", "S2xS1", "S3"])
def test_omega_of_a_closed_three_manifold(name):
    """Omega is the second Betti number of the dual two-complex: N0 - 1 + b_2 by Euler characteristics."""
    betti = {"RP3": 0, "T3": 3, "S2xS1": 1, "S3": 0}[name]
    t = make.published(name)
    assert spins.omega(dualize.build(t)) == len(np.unique(t.corners)) - 1 + betti


def test_estimate_is_maximal_on_the_whole_cone():
    rules = spins.rules_of(dualize.build(make.shared_pair(4, 4)))
    whole = spins.estimate(rules, 1)
    every = spins.estimate(rules, 1, {})
    # dimension 6, and 6 growing spins; every edge has a face at the boundary, or three faces only
    assert whole.degree == every.degree == 12
    assert every.cone_faces > 7


def test_estimate_counts_edges_whose_spins_all_grow():
    """Two 4-simplices on one another: dimension 10, ten growing spins, five edges of four."""
    rules = spins.rules_of(dualize.build(make.shared_pair(5, 4)))
    whole = spins.estimate(rules, 1)
    assert (whole.degree, whole.edges) == (25, 5)
    # a single surface of three faces: at each of its edges two spins grow, and they are equal
    only = frozenset(np.flatnonzero(spins.growth_rays(rules).vectors[0]).tolist())
    assert spins.estimate(rules, -9, lambda growing: 90.0 if growing == only else 0.0).edges == 0


def test_estimate_with_exponents_picks_another_face():
    """One pair of rays of the melon: with a heavy price for each spin that grows, nothing grows."""
    rules = spins.rules_of(dualize.build(make.shared_pair(4, 4)))
    assert spins.estimate(rules, -5).degree == 0
    triangle = frozenset(np.flatnonzero(spins.growth_rays(rules).vectors[0]).tolist())
    kept = spins.estimate(rules, -5, lambda growing: 100.0 if growing == triangle else 0.0)
    assert kept.growing == tuple(sorted(triangle))
    assert kept.degree == 1 - 5 * len(triangle) + 100


# --------------------------------------------------------------------------------------------------
# Another description of the same foam


@given(st.sampled_from(sorted(SMALL)), st.integers(0, 2**32 - 1))
def test_relabelling_changes_nothing(name, seed):
    table = SMALL[name]
    other, _, _ = scramble(table, np.random.default_rng(seed))
    one, two = glued(table), glued(other)
    numbers = []
    for s in (one, two):
        rules = spins.rules_of(s)
        growth = spins.growth(rules)
        rays = spins.growth_rays(rules)
        numbers.append(
            [
                spins.parity_sectors(rules).exponent,
                int(growth.unbounded.sum()),
                growth.dimension,
                sorted(sorted(ray) for ray in rays.vectors.tolist()),
                spins.omega(s),
                spins.count_labellings(rules, 2, intertwiners=True),
                spins.estimate(rules).degree,
                None if s.dimension == 2 else sorted(spins.bubbles(s).characteristic.tolist()),
            ]
        )
    assert numbers[0] == numbers[1]
