"""Subdivisions: f-vectors by Stirling numbers, Euler characteristics, homology, volumes, orientation."""

from itertools import combinations
from math import comb, factorial

import gudhi
import numpy as np
import pytest
from catalogue import CATALOGUE, SMALL_GLUINGS
from hypothesis import given
from hypothesis import strategies as st
from specimens import kuhn_grid

from dualize import Coordinates, InputError, LimitError, Triangulation, build, change

NAMES = [
    "torus_7",
    "poincare_16",
    "klein_s2_s1_twisted_9",
    "ziegler_ball_10",
    "cp2_9",
    "s2_x_b2_12",
    "emch_8",
]


def listed(name):
    return Triangulation.from_facets(CATALOGUE[name].facets)


def table(rows):
    return Triangulation.from_gluings(
        [[entry[0] for entry in row] for row in rows], [[entry[1] for entry in row] for row in rows]
    )


def f_vector(t):
    rows = t.corners.tolist()
    return [len({face for row in rows for face in combinations(row, m)}) for m in range(1, t.dimension + 2)]


def betti(t, prime=2):
    tree = gudhi.SimplexTree()
    for row in t.corners.tolist():
        tree.insert(row)
    tree.compute_persistence(homology_coeff_field=prime, persistence_dim_max=True)
    return tree.betti_numbers()


def same(t):
    again = Triangulation.from_facets(t.named(t.corners))
    assert np.array_equal(again.across, t.across)
    assert np.array_equal(again.rank, t.rank)


def volumes(t):
    """Signed volumes by the chart of each simplex, as its orientation counts them."""
    c = t.coordinates
    chart = c.corner if c.corner is not None else c.point[t.corners]
    edges = chart[:, 1:] - chart[:, :1]
    return np.linalg.det(edges) / factorial(t.dimension) * build(t)["vertices/orientation"]


def stirling(n, k):
    return sum((-1) ** i * comb(k, i) * (k - i) ** n for i in range(k + 1)) // factorial(k)


@pytest.mark.parametrize("name", NAMES)
def test_the_f_vector_of_the_barycentric_subdivision(name):
    """f_j = sum over i of (j + 1)! S(i + 1, j + 1) f_i, S the Stirling numbers of the second kind.

    F. Brenti, V. Welker, f-vectors of barycentric subdivisions, Math. Z. 259 (2008) 849-865 (from memory).
    """
    t = listed(name)
    f = CATALOGUE[name].f
    expected = [
        factorial(j + 1) * sum(stirling(i + 1, j + 1) * f[i] for i in range(len(f))) for j in range(len(f))
    ]
    result = change.derived(t)
    assert f_vector(result.triangulation) == expected
    assert len(result.new_labels) == expected[0] - f[0]
    same(result.triangulation)


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("how", ["derived", "refine-2", "refine-3", "stellar"])
def test_subdivisions_keep_euler_characteristic_homology_and_orientability(name, how):
    t = listed(name)
    result = {
        "derived": lambda: change.derived(t),
        "refine-2": lambda: change.refine(t, 2),
        "refine-3": lambda: change.refine(t, 3),
        "stellar": lambda: change.stellar(t, t.corners[-1, :2].tolist()),
    }[how]()
    fine = result.triangulation
    same(fine)
    f = f_vector(fine)
    assert sum((-1) ** i * x for i, x in enumerate(f)) == CATALOGUE[name].euler
    assert betti(fine) == betti(t)
    assert build(fine).flags["orientable"] == build(t).flags["orientable"]
    assert (
        build(fine).counts["nodes"] % build(t).counts["nodes"] == 0
        if how != "stellar" and build(t).counts["nodes"]
        else True
    )


@pytest.mark.parametrize("d", [2, 3, 4])
@pytest.mark.parametrize("factor", [1, 2, 3, 4])
def test_refining_a_simplex_gives_equal_volumes_and_grid_points(d, factor):
    """factor**D pieces of equal volume (Edelsbrunner, Grayson 2000), C(factor + D, D) points."""
    point = np.random.default_rng(d).random((d + 1, d))
    t = Triangulation.from_facets([list(range(d + 1))], coordinates=point)
    fine = change.refine(t, factor).triangulation
    assert len(fine) == factor**d
    assert len(np.unique(fine.corners)) == comb(factor + d, d)
    assert np.allclose(volumes(fine), volumes(t)[0] / factor**d)


@pytest.mark.parametrize("d", [2, 3, 4])
def test_barycentric_and_stellar_pieces_add_up_to_the_whole(d):
    t = Triangulation.from_facets(kuhn_grid([2] * d), coordinates=grid_points([2] * d))
    whole = np.abs(volumes(t))
    for result in (change.derived(t), change.stellar(t, t.corners[0, [0, d]].tolist()), change.refine(t, 3)):
        fine = np.abs(volumes(result.triangulation))
        assert np.allclose(np.bincount(result.refined_from, fine), whole)
        signs = volumes(result.triangulation)
        assert (signs > 0).all() or (signs < 0).all()
        assert np.sign(signs[0]) == np.sign(volumes(t)[0])


def grid_points(shape):
    return np.stack(np.meshgrid(*(np.arange(n + 1.0) for n in shape), indexing="ij"), -1).reshape(
        -1, len(shape)
    )


@pytest.mark.parametrize("name", ["torus_7", "cp2_9"])
def test_the_pieces_keep_the_orientation_of_their_simplex(name):
    """Turning the first simplex turns all pieces with it (common practice)."""
    t = change.remove(listed(name), [0]).triangulation
    one = build(change.derived(t).triangulation)
    two = build(change.derived(Triangulation.from_facets(t.corners.tolist())).triangulation)
    first = build(t)["vertices/orientation"][0]
    plain = build(Triangulation.from_facets(t.corners.tolist()))["vertices/orientation"][0]
    assert (one["vertices/orientation"] * first == two["vertices/orientation"] * plain).all()


def test_twice_derived_is_derived_of_derived():
    t = Triangulation.from_facets([[0, 1, 2], [1, 2, 3]])
    twice = change.derived(t, 2)
    again = change.derived(change.derived(t).triangulation)
    assert twice.triangulation == again.triangulation
    assert twice.refined_from.tolist() == [0] * 36 + [1] * 36


@pytest.mark.parametrize("name", sorted(n for n in SMALL_GLUINGS if n.startswith("tetrahedra")))
def test_the_second_subdivision_of_a_gluing_is_a_complex(name):
    """J. R. Munkres, Elements of Algebraic Topology (1984), section 15 and common practice for gluings."""
    t = table(SMALL_GLUINGS[name])
    fine = change.derived(t, 2).triangulation
    assert fine.corners is not None
    same(fine)
    f = f_vector(fine)
    assert sum((-1) ** i * x for i, x in enumerate(f)) == 0  # closed 3-manifolds
    assert betti(fine)[3] == 1
    assert build(fine).flags["orientable"] == build(t).flags["orientable"]


# The lens spaces among the gluings of one tetrahedron are L(4,1) and L(5,2) (S. V. Matveev, Complexity theory
# of three-dimensional manifolds, Acta Appl. Math. 19 (1990) 101-130, from memory): b_1 mod 2 and mod 5.
def test_the_gluings_of_one_tetrahedron_have_the_published_homology():
    names = sorted(n for n in SMALL_GLUINGS if n.startswith("tetrahedra_1"))
    fine = [change.derived(table(SMALL_GLUINGS[n]), 2).triangulation for n in names]
    assert sorted((betti(t, 2)[1], betti(t, 5)[1]) for t in fine) == [(0, 0), (0, 0), (0, 1), (1, 0)]


def test_the_doubled_simplex_is_a_complex_after_one_subdivision():
    """Two simplices with all corners in common: the chains of their faces tell them apart."""
    identity = [list(range(4))] * 4
    t = Triangulation.from_gluings([[1] * 4, [0] * 4], [identity, identity])
    fine = change.derived(t).triangulation
    assert fine.corners is not None
    same(fine)
    assert betti(fine) == [1, 0, 0, 1]


def test_a_gluing_that_folds_stays_a_table():
    fine = change.derived(table(SMALL_GLUINGS["tetrahedra_1_1"])).triangulation
    assert fine.corners is None
    made = Triangulation.from_gluings(fine.across, fine.carry)
    assert np.array_equal(made.rank, fine.rank)


def test_a_gluing_that_mixes_the_order_cannot_be_refined_edgewise():
    with pytest.raises(InputError, match="does not keep the order"):
        change.refine(table(SMALL_GLUINGS["tetrahedra_1_1"]), 2)


@pytest.mark.parametrize("name", ["tetrahedra_1_1", "tetrahedra_2_15"])
def test_after_one_subdivision_it_can(name):
    t = change.derived(table(SMALL_GLUINGS[name])).triangulation
    fine = change.refine(t, 2).triangulation
    made = Triangulation.from_gluings(fine.across, fine.carry)
    assert len(made) == 8 * len(t)
    assert betti(change.derived(fine, 1 if fine.corners is not None else 2).triangulation) == betti(
        change.derived(t).triangulation
    )


def test_labels_of_the_complex_stay():
    t = Triangulation.from_facets([[-3, 5, 70], [5, 70, 71]])
    for result in (change.derived(t), change.refine(t, 2), change.stellar(t, [5, 70])):
        labels = set(np.unique(result.triangulation.corners).tolist())
        assert {-3, 5, 70, 71} <= labels
        assert labels - {-3, 5, 70, 71} == set(result.new_labels)


def test_words_stay_words():
    t = Triangulation.from_facets([["z", "b", "c"], ["b", "c", "new0"]])
    for result in (change.derived(t), change.refine(t, 2), change.stellar(t, ["b", "c"])):
        fine = result.triangulation
        same(fine)
        assert {"z", "b", "c", "new0"} < set(fine.corner_names)
        assert "new0" not in result.new_labels


def test_stellar_subdivision_of_a_top_simplex_is_the_first_move():
    t = listed("cp2_9")
    one = change.stellar(t, t.corners[4].tolist()).triangulation
    two = change.move(t, "1-5", simplex=4).triangulation
    assert sorted(one.corners.tolist()) == sorted(two.corners.tolist())


@pytest.mark.parametrize("m", [2, 3, 4, 5])
def test_the_f_vector_of_a_stellar_subdivision(m):
    """Star of A = A * link: in place of it comes point * boundary of A * link (common practice)."""
    t = listed("s2_x_b2_12")
    a = set(t.corners[0, :m].tolist())
    star = [set(row) for row in t.corners.tolist() if a <= set(row)]
    link = {face for row in star for k in range(6) for face in combinations(sorted(row - a), k)}
    fine = f_vector(change.stellar(t, sorted(a)).triangulation)
    expected = list(CATALOGUE["s2_x_b2_12"].f)
    for face in link:
        expected[m + len(face) - 1] -= 1
        for k in range(m):
            if k + len(face) < 5:
                expected[k + len(face)] += comb(m, k)
    assert fine == expected


@pytest.mark.parametrize(
    "labels, message",
    [([1], "at least two labels"), ([1, 99], "no simplex has the label 99")],
    ids=["one", "unknown"],
)
def test_a_wrong_place_is_refused(labels, message):
    with pytest.raises(InputError, match=message):
        change.stellar(listed("cp2_9"), labels)


def test_a_gluing_table_has_no_labels_to_subdivide_at():
    with pytest.raises(InputError, match="needs a labelled complex"):
        change.stellar(table(SMALL_GLUINGS["tetrahedra_1_1"]), [0, 1])


def test_too_many_pieces_are_refused_before_work():
    with pytest.raises(LimitError, match="more than can be numbered"):
        change.derived(listed("k3_16"), 4)


def test_charts_of_a_periodic_lattice_are_refined():
    facets = [[0, 1, 4], [0, 3, 4]]
    charts = np.array([[[0, 0], [1, 0], [1, 1]], [[0, 0], [0, 1], [1, 1]]], float)
    t = Triangulation.from_facets(facets, coordinates=Coordinates(corner=charts, period=np.array([3.0, 3])))
    fine = change.refine(t, 2).triangulation
    assert fine.coordinates.period.tolist() == [3, 3]
    assert np.allclose(np.abs(volumes(fine)), 1 / 8)


@given(seed=st.integers(0, 10**6), factor=st.integers(1, 3))
def test_refining_random_spheres(seed, factor):
    t = change.walk(listed("simplex_bd_4"), 15, seed=seed, target=12).triangulation
    result = change.refine(t, factor)
    same(result.triangulation)
    assert np.bincount(result.refined_from).tolist() == [factor**3] * len(t)
    assert betti(result.triangulation) == [1, 0, 0, 1]
