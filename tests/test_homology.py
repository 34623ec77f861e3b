"""Homology over the integers: published groups, duality, gudhi over fields, sympy, large coefficients."""

import random

import numpy as np
import pytest
from catalogue import CATALOGUE, NAMES, SMALL_GLUINGS
from hypothesis import given, settings
from hypothesis import strategies as st
from spaces import factors, from_table, glued, listed, over_field
from specimens import cone, projective_plane, random_table, subcomplexes, tables

from dualize import Triangulation, make
from dualize.kernels import mode
from dualize.topology import homology as module
from dualize.topology.classes import census, classes
from dualize.topology.derived import first_derived, second_derived_facets
from dualize.topology.gudhi import betti_numbers, cone_off, simplex_tree
from dualize.topology.homology import chain_homology, integral_homology, pair
from dualize.topology.integral import abelian_name, invariant_factors, left_kernel
from dualize.topology.maps import simplex_maps

SMALL = (2, 3)
FIELDS = (2, 32003)  # gudhi needs a second for the latter: it tabulates inverses


# --------------------------------------------------------------------------------------------------
# Published groups


@pytest.mark.parametrize("name", NAMES)
def test_integral_homology_is_the_published_one(name):
    assert integral_homology(listed(name)) == [factors(g) for g in CATALOGUE[name].homology]


def test_first_homology_of_two_tetrahedra_is_that_of_matveevs_list():
    """S. V. Matveev, Complexity theory of three-dimensional manifolds, Acta Appl. Math. 19 (1990) 101-130:
    six spheres' tables, L(5,1), L(7,2), L(8,3), S^3/Q_8 and the rest (from memory; see `catalogue`)."""
    found = sorted(
        abelian_name(integral_homology(glued(rows))[1])
        for name, rows in SMALL_GLUINGS.items()
        if name.startswith("tetrahedra_2")
    )
    expected = ["0"] * 6 + ["Z"] * 2 + ["Z_2"] * 2 + ["Z_2 + Z_2"] + ["Z_3"] * 3 + ["Z_5", "Z_7", "Z_8"]
    assert found == expected


def test_lens_spaces_with_different_groups_are_told_apart():
    first = {
        name: tuple(integral_homology(listed(name))[1]) for name in ("rp3_11", "l31_12", "l41_14", "l51_16")
    }
    assert first == {"rp3_11": (2,), "l31_12": (3,), "l41_14": (4,), "l51_16": (5,)}


@pytest.mark.parametrize("p", [2, 7, 10**20], ids=str)
def test_the_cells_of_a_lens_space_give_its_torsion(p):
    """One cell in each dimension, boundaries 0, p, 0 (A. Hatcher, Algebraic Topology, 2002, example 2.43)."""
    from scipy.sparse import csc_array

    if p > 2**62:  # beyond 64 bits only the last step is asked
        assert invariant_factors([{0: p}]) == (1, [p])
        return
    zero, degree = csc_array(np.array([[0]])), csc_array(np.array([[p]]))
    assert chain_homology([zero, degree, zero]) == [[0], [p], [], [0]]


@pytest.mark.parametrize(
    "name", [n for n in NAMES if CATALOGUE[n].boundary and CATALOGUE[n].orientable and CATALOGUE[n].manifold]
)
def test_homology_relative_to_the_boundary_is_lefschetz_dual_to_the_published_one(name):
    """H_k(M, boundary) = H^(D-k)(M), from the published groups by universal coefficients (Munkres 1984,
    sections 53 and 70; from memory)."""
    absolute = [factors(g) for g in CATALOGUE[name].homology]
    d = len(absolute) - 1
    dual = []
    for k in range(d + 1):
        free = [0] * absolute[d - k].count(0)
        dual.append(free + [e for e in (absolute[d - k - 1] if k < d else []) if e])
    assert integral_homology(listed(name), relative=True) == dual


def test_a_closed_complex_has_the_same_homology_relative_to_its_boundary():
    assert integral_homology(listed("rp3_11"), relative=True) == integral_homology(listed("rp3_11"))


def test_the_projective_plane_and_its_cone():
    assert integral_homology(Triangulation.from_facets(projective_plane())) == [[0], [2], []]
    assert integral_homology(Triangulation.from_facets(cone(projective_plane()))) == [[0], [], [], []]


def test_tori_have_binomial_numbers_and_few_cells_are_left():
    t = make.lattice(4, 4, 4, periodic="xyz")
    assert [g.count(0) for g in integral_homology(t)] == [1, 3, 3, 1]


# --------------------------------------------------------------------------------------------------
# Against gudhi and sympy


@settings(max_examples=6)
@given(tables(d=3, largest=2))
def test_random_gluings_agree_with_gudhi_on_the_second_derived_subdivision(table):
    t = from_table(table)
    groups = integral_homology(t)
    tree = simplex_tree(second_derived_facets(t))
    for p in FIELDS:
        assert over_field(groups, p) == betti_numbers(tree, p)


@given(tables(d=2, largest=6))
def test_random_surfaces_agree_with_gudhi(table):
    t = from_table(table)
    tree = simplex_tree(second_derived_facets(t))
    for p in SMALL:
        assert over_field(integral_homology(t), p) == betti_numbers(tree, p)


@given(subcomplexes())
def test_pairs_agree_with_gudhi_on_the_complex_with_its_boundary_coned_off(facets):
    t = Triangulation.from_facets(facets)
    labels = np.unique(t.corners, axis=0)
    if any(len(rows) for rows in census(t).scattered):
        return  # labels and gluings name other spaces
    simplex, slot = np.nonzero(t.across < 0)
    k = t.dimension + 1
    outer = np.array([np.delete(t.corners[s], i) for s, i in zip(simplex, slot, strict=True)]).reshape(
        -1, k - 1
    )
    tree = simplex_tree(cone_off(labels, outer))
    groups = integral_homology(t, relative=True)
    for p in SMALL:
        # the cone point is the boundary shrunk to a point: reduced homology of the quotient
        theirs = betti_numbers(tree, p)
        theirs[0] -= bool(len(outer))
        assert over_field(groups, p) == theirs


@pytest.mark.parametrize("seed", range(4))
def test_the_subdivision_of_a_gluing_has_its_homology(seed):
    t = from_table(random_table(random.Random(seed), 4, 2, order_keeping=True))
    assert integral_homology(first_derived(t)) == integral_homology(t)


@given(st.lists(st.lists(st.integers(-9, 9), min_size=4, max_size=4), min_size=1, max_size=5))
def test_invariant_factors_are_those_of_sympy(rows):
    from sympy import ZZ, Matrix
    from sympy.matrices.normalforms import smith_normal_form

    normal = smith_normal_form(Matrix(rows), domain=ZZ)
    diagonal = [abs(normal[x, x]) for x in range(min(normal.shape)) if normal[x, x]]
    rank, found = invariant_factors([{x: e for x, e in enumerate(row) if e} for row in rows])
    assert (rank, found) == (len(diagonal), sorted(e for e in diagonal if e != 1))


@given(st.lists(st.lists(st.integers(-5, 5), min_size=2, max_size=2), min_size=1, max_size=5))
def test_left_kernels_vanish_on_the_matrix_and_complete_to_a_basis(rows):
    from sympy import Matrix

    kernel, rest = left_kernel(rows)
    assert abs(Matrix(kernel + rest).det()) == 1
    assert all(
        sum(a * b for a, b in zip(line, column, strict=True)) == 0
        for line in kernel
        for column in zip(*rows, strict=True)
    )
    assert len(rest) == Matrix(rows).rank()


# --------------------------------------------------------------------------------------------------
# Ways of computing


@pytest.mark.parametrize("name", ["l51_16", "kummer_k4_16", "prod_rp2_s2_24"])
def test_coefficients_of_any_size_give_the_same(name, monkeypatch):
    monkeypatch.setattr(module, "BOUND", 0)
    assert integral_homology(listed(name)) == [factors(g) for g in CATALOGUE[name].homology]


@pytest.mark.parametrize("name", ["l51_16", "kummer_k4_16", "b3_bundle_twisted_9"])
def test_compiled_and_interpreted_kernels_agree(name):
    found = []
    for kind in ("interpreted", "compiled"):
        with mode(kind):
            found.append([integral_homology(listed(name), relative=r) for r in (False, True)])
    assert found[0] == found[1]


@settings(max_examples=10)
@given(tables(d=3, largest=4))
def test_pairs_are_pairs_and_a_cell_below_was_removed_before(table):
    t = first_derived(from_table(table))
    paired = pair(simplex_maps(t, census(t), classes(t, 3)))
    cells = np.arange(len(paired.mate))
    assert (paired.mate[paired.mate] == cells).all()
    assert sorted(paired.order.tolist()) == cells.tolist()
    time = np.argsort(paired.order)
    for a in np.flatnonzero(paired.mate < cells).tolist():
        inside = slice(paired.faces.indptr[a], paired.faces.indptr[a + 1])
        others = paired.faces.indices[inside]
        unit = paired.faces.data[inside][others == paired.mate[a]]
        assert abs(unit[0]) == 1
        assert (time[others[others != paired.mate[a]]] < time[a]).all()
