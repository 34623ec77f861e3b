"""Counting, links, boundary maps, ranks and groups, against published values, gudhi, scipy and sympy."""

import random
from itertools import pairwise

import numpy as np
import pytest
import sympy
from catalogue import CATALOGUE, F_OF_TWO_FOUR_SIMPLICES, NAMES, SMALL_GLUINGS
from damage import triangulation
from hypothesis import given
from hypothesis import strategies as st
from reference import glue_by_labels, table_from_pairs
from scipy.sparse import csc_array
from specimens import (
    GLUED,
    HOLONOMY,
    delaunay,
    kuhn_grid,
    kuhn_torus,
    scrambled,
    seeds,
    sphere,
    subcomplexes,
    suspension,
    tables,
)

import dualize
from dualize import Triangulation, kernels
from dualize.kernels.permutations import permutations_of
from dualize.topology import gudhi as bridge
from dualize.topology.classes import all_distinct, census, classes, corner_subsets, count_rows, f_vector
from dualize.topology.gluing import gluing_of
from dualize.topology.integral import abelian_group
from dualize.topology.links import link_figures
from dualize.topology.maps import foam_maps, simplex_maps
from dualize.topology.presentation import collapses
from dualize.topology.rank import betti_numbers, foam_betti, rank_mod

SMALL = [n for n in NAMES if CATALOGUE[n].f[-1] <= 120]


def labelled(facets):
    return Triangulation.from_facets(facets)


def bare(t):
    return Triangulation(t.across, t.rank, t.written)


# --------------------------------------------------------------------------------------------------
# Gluings read back


@pytest.mark.parametrize("name", NAMES)
def test_labelled_triangulations_are_read_back(name):
    t = labelled(CATALOGUE[name].facets)
    found = gluing_of(dualize.build(t))
    assert found.matched
    for key in ("across", "rank", "corners"):
        assert np.array_equal(getattr(found, key), getattr(t, key))


@pytest.mark.parametrize("name", sorted(GLUED))
def test_building_what_was_read_back_gives_the_skeleton_again(name):
    skeleton = dualize.build(triangulation(scrambled(GLUED[name], 5)))
    assert dualize.build(gluing_of(skeleton)) == skeleton


@given(tables())
def test_random_gluings_are_read_back(table):
    skeleton = dualize.build(triangulation(table), keep_singular=True)
    assert dualize.build(gluing_of(skeleton), keep_singular=True) == skeleton


# --------------------------------------------------------------------------------------------------
# Counts


@pytest.mark.parametrize("name", NAMES)
def test_f_vectors_are_published_with_and_without_labels(name):
    t = labelled(CATALOGUE[name].facets)
    assert census(t).f == CATALOGUE[name].f
    assert census(bare(t)).f == CATALOGUE[name].f
    assert f_vector(t.corners) == CATALOGUE[name].f


def test_f_vectors_of_two_four_simplices():
    """Exhaustive enumeration: see `catalogue.small_gluings`."""
    found = [
        tuple(census(triangulation(table_from_pairs(rows))).f)
        for name, rows in SMALL_GLUINGS.items()
        if name.startswith("four_simplices")
    ]
    assert sorted(found) == F_OF_TWO_FOUR_SIMPLICES


@pytest.mark.parametrize("shape", [(1, 1, 1), (2, 1, 3), (1, 1, 1, 1), (2, 1, 1, 1)], ids=str)
def test_densities_of_the_periodic_grid(shape):
    """(1, 7, 12, 6) and (1, 15, 50, 60, 24) per cube (H. W. Kuhn, IBM J. Res. Dev. 4 (1960), from memory)."""
    per_cube = {3: (1, 7, 12, 6), 4: (1, 15, 50, 60, 24)}[len(shape)]
    cubes = int(np.prod(shape))
    assert census(triangulation(kuhn_torus(shape))).f == [cubes * x for x in per_cube]


@given(subcomplexes())
def test_counts_are_those_of_gudhi(facets):
    t = labelled(facets)
    assert census(t).f == bridge.simplices_per_dimension(bridge.simplex_tree(t.corners))


@pytest.mark.parametrize("name", ["cp2_9", "cell16", "torus_7"])
def test_classes_are_the_same_compiled_and_interpreted(name):
    t = bare(labelled(CATALOGUE[name].facets))
    for m in range(1, t.dimension + 1):
        found = []
        for way in ("interpreted", "compiled"):
            with kernels.mode(way):
                found.append(classes(t, m, threads=2))
        one, two = found
        for key in ("number", "turn", "irregular", "first"):
            assert np.array_equal(getattr(one, key), getattr(two, key))


@pytest.mark.parametrize("name", ["cp2_9", "cell16", "rp3_x_i_22"])
def test_classes_carry_corners_to_those_of_equal_label(name):
    """In a scrambled complex the maps of corners are of every kind; labels tell what they should be."""
    t = triangulation(scrambled(glue_by_labels(CATALOGUE[name].facets), 1))
    for m in range(1, t.dimension + 1):
        found, subsets = classes(t, m), corner_subsets(t.dimension, m)
        assert not found.irregular.any()
        labels = t.corners[:, subsets]  # (N, subsets, m)
        simplex, subset = np.divmod(found.first[found.number], len(subsets))
        there = labels[simplex, subset]
        image = permutations_of(m - 1).image[found.turn].astype(np.int64)
        assert np.array_equal(np.take_along_axis(there, image, axis=2), labels)


@pytest.mark.parametrize("name", sorted(HOLONOMY))
def test_simplices_glued_to_themselves_are_irregular(name):
    found = census(triangulation(HOLONOMY[name])).classes
    assert any(level.irregular.any() for level in found)
    assert not found[0].irregular.any()


# --------------------------------------------------------------------------------------------------
# Chain complexes


@pytest.mark.parametrize("name", SMALL)
def test_own_betti_numbers_are_those_of_gudhi(name):
    t = labelled(CATALOGUE[name].facets)
    maps = simplex_maps(t, census(t), classes(t, t.dimension))
    assert all(abs(a @ b).sum() == 0 for a, b in pairwise(maps))
    tree = bridge.simplex_tree(t.corners)
    for prime in (2, 3, 101):
        assert betti_numbers(maps, prime) == bridge.betti_numbers(tree, prime)


@pytest.mark.parametrize("name", [n for n in SMALL if CATALOGUE[n].manifold])
def test_the_foam_of_a_manifold_has_its_first_betti_numbers(name):
    t = labelled(CATALOGUE[name].facets)
    tree = bridge.simplex_tree(t.corners)
    d1, d2 = foam_maps(dualize.build(t))
    for prime in (2, 3):
        assert list(foam_betti(d1, d2, prime)) == bridge.betti_numbers(tree, prime)[:2]


@pytest.mark.parametrize("name", sorted(SMALL_GLUINGS)[::3])
def test_the_foam_of_a_gluing_has_the_betti_numbers_of_its_chains(name):
    t = triangulation(table_from_pairs(SMALL_GLUINGS[name]))
    maps = simplex_maps(t, census(t), classes(t, t.dimension))
    d1, d2 = foam_maps(dualize.build(t))
    for prime in (2, 5, 9973):
        assert list(foam_betti(d1, d2, prime)) == betti_numbers(maps, prime)[:2]


@given(seeds, st.sampled_from((2, 3, 9973)))
def test_ranks_are_those_of_sympy(seed, prime):
    rng = random.Random(seed)
    rows, columns = rng.randint(1, 7), rng.randint(1, 7)
    dense = [[rng.choice((0, 0, 0, 1, -1, 2, 3)) for _ in range(columns)] for _ in range(rows)]
    field = sympy.GF(prime)
    known = sympy.polys.matrices.DomainMatrix(
        [[field(x) for x in row] for row in dense], (rows, columns), field
    ).rank()
    assert rank_mod(csc_array(np.array(dense)), prime) == known


@given(seeds)
def test_groups_are_those_of_the_smith_form_of_sympy(seed):
    from sympy.matrices.normalforms import smith_normal_form

    rng = random.Random(seed)
    generators, count = rng.randint(1, 5), rng.randint(1, 6)
    dense = [[rng.choice((0, 0, 1, -1, 2, -3, 4, 6)) for _ in range(generators)] for _ in range(count)]
    form = smith_normal_form(sympy.Matrix(dense), domain=sympy.ZZ)
    diagonal = [abs(int(form[x, x])) for x in range(min(form.shape))]
    known = sorted([e for e in diagonal if e > 1]) + [0] * (generators - sum(e != 0 for e in diagonal))
    found = abelian_group(generators, [{g: e for g, e in enumerate(row) if e} for row in dense])
    assert sorted(e for e in found if e) + [0] * found.count(0) == known


@pytest.mark.parametrize(
    "relators, trivial",
    [
        ([[1]], True),
        ([[1, 2, 2], [2]], True),
        ([[1, 1]], False),
        ([[1, 2, -1, -2]], False),
        ([], True),
    ],
    ids=["one", "two", "Z_2", "Z^2", "empty"],
)
def test_trivial_groups_are_seen_by_elimination(relators, trivial):
    assert collapses(relators) is trivial


def test_poincares_group_is_not_taken_for_trivial():
    """<a, b | a^3 = b^5 = (a b)^2>, of order 120 (H. Poincaré 1904; from memory)."""
    assert not collapses([[1, 1, 1, -2, -2, -2, -2, -2], [1, 2, 1, 2, -1, -1, -1]])


# --------------------------------------------------------------------------------------------------
# Links


@pytest.mark.parametrize("name", [n for n in NAMES if CATALOGUE[n].dimension > 2])
def test_links_of_points_are_the_published_ones(name):
    entry = CATALOGUE[name]
    t = labelled(entry.facets)
    found = link_figures(t, census(t))
    wrong = found.wrong(1)
    if found.simply_connected is not None:
        wrong = wrong | ~found.simply_connected
    tally = {
        "sphere": int((~wrong & ~found.boundary[0]).sum()),
        "ball": int((~wrong & found.boundary[0]).sum()),
        "neither sphere nor ball": int(wrong.sum()),
    }
    assert {kind: n for kind, n in tally.items() if n} == entry.vertex_links


@given(subcomplexes(d=4))
def test_links_have_the_euler_characteristics_that_gudhi_counts(facets):
    """Of simplices in no pinched one; the fans of others are taken apart."""
    t = labelled(facets)
    found = census(t)
    links = link_figures(t, found)
    for m in (1, 2):
        subset = {1: [[c] for c in range(5)], 2: [[i, j] for i in range(5) for j in range(i + 1, 5)]}[m]
        scattered = [set(row) for level in found.scattered[m - 1 :] for row in level.tolist()]
        for number, first in enumerate(found.classes[m - 1].first.tolist()):
            simplex, which = divmod(first, len(subset))
            labels = tuple(t.corners[simplex, subset[which]].tolist())
            if any(set(labels) <= row for row in scattered):
                continue
            link = [[x for x in f if x not in labels] for f in t.corners.tolist() if set(labels) <= set(f)]
            counts = bridge.simplices_per_dimension(bridge.simplex_tree(np.array(link)))
            assert links.euler[m - 1][number] == sum((-1) ** k * n for k, n in enumerate(counts))


@pytest.mark.parametrize("name", ["l31_12", "l41_14", "rp3_11", "t3_15", "s2_x_s1_10", "poincare_16"])
def test_first_homology_of_links_is_the_published_one(name):
    t = labelled(suspension(CATALOGUE[name].facets))
    found = link_figures(t, census(t))
    group = CATALOGUE[name].homology[1]
    known = {"0": [], "Z": [0], "Z^3": [0, 0, 0], "Z_2": [2], "Z_3": [3], "Z_4": [4]}[group]
    assert sorted(found.homology.values()) == [known, known]


@pytest.mark.parametrize("name", [n for n in sorted(SMALL_GLUINGS) if n.startswith("four_simplices")])
def test_links_of_small_manifolds_are_spheres(name):
    """All vertex links are 3-spheres: see `catalogue.small_gluings`."""
    t = triangulation(table_from_pairs(SMALL_GLUINGS[name]))
    found = link_figures(t, census(t))
    assert found.simply_connected.all()
    assert not found.wrong(1).any()
    assert not found.wrong(2).any()


def test_a_segment_glued_to_itself_reversed_is_found():
    """The 4-simplex with two facets glued by the map that swaps corners 0 and 1."""
    across, carry = [[-1, -1, -1, 0, 0]], [[[1, 0, 2, 4, 3]] * 5]
    t = Triangulation.from_gluings(across, carry)
    segments = census(t).classes[1]
    assert segments.irregular.sum() == 1
    assert segments.irregular[segments.number[0, 0]]


def test_links_are_the_same_compiled_and_interpreted():
    t = labelled(suspension(CATALOGUE["poincare_16"].facets))
    found = []
    for way in ("interpreted", "compiled"):
        with kernels.mode(way):
            found.append(link_figures(t, census(t)))
    one, two = found
    assert np.array_equal(one.simply_connected, two.simply_connected)
    assert one.homology == two.homology
    assert all(np.array_equal(x, y) for x, y in zip(one.euler, two.euler, strict=True))


# --------------------------------------------------------------------------------------------------
# gudhi


@pytest.mark.parametrize("d", [2, 3, 4])
def test_the_bridge_to_gudhi_knows_spheres_and_balls(d):
    tree = bridge.simplex_tree(np.array(sphere(d)))
    assert bridge.betti_numbers(tree, 2) == [1] + [0] * (d - 1) + [1]
    ball, boundary = np.array(sphere(d)[1:]), np.array(sphere(d)[:1])[:, None]
    edge = np.array([np.delete(boundary[0, 0], k) for k in range(d + 1)])
    assert bridge.betti_numbers(bridge.simplex_tree(ball), 9973) == [1] + [0] * d
    coned = bridge.simplex_tree(bridge.cone_off(ball, edge))
    assert bridge.betti_numbers(coned, 9973)[d] == 1


@given(delaunay(d=3))
def test_large_labels_are_renumbered_for_gudhi(facets):
    shifted = np.array(facets, dtype=np.int64) * 2**40 - 2**60
    assert bridge.simplices_per_dimension(bridge.simplex_tree(shifted)) == f_vector(np.sort(shifted, axis=1))


def test_a_periodic_lattice_has_the_homology_of_the_torus():
    """b = (1, 4, 6, 4, 1) (common practice)."""
    t = labelled(kuhn_grid((3, 3, 3, 3), periodic=True))
    d1, d2 = foam_maps(dualize.build(t))
    assert foam_betti(d1, d2, 2) == (1, 4)
    assert bridge.betti_numbers(bridge.simplex_tree(t.corners), 2) == [1, 4, 6, 4, 1]
    assert link_figures(t, census(t)).simply_connected.all()


@pytest.mark.parametrize("kind", ["interpreted", "compiled"])
@pytest.mark.parametrize("columns", [1, 3, 5])
def test_equal_rows_are_noticed_whatever_the_labels(kind, columns):
    random = np.random.default_rng(columns)
    rows = np.unique(random.integers(-(2**62), 2**62, (4000, columns)), axis=0)
    with kernels.mode(kind):
        assert all_distinct(rows)
        assert not all_distinct(np.concatenate([rows, rows[-1:]]))


def test_rows_are_counted_with_and_without_repeats():
    rows = np.arange(60_000).reshape(-1, 3) << 40
    assert count_rows(rows) == 20_000
    assert count_rows(np.concatenate([rows, rows[:7]])) == 20_000
