"""Random triangulations: what is promised of each holds, and a seed fixes it."""

import numpy as np
import pytest
from make_measures import betti, boundary_facets, euler, f_vector, is_sphere_like, orientable, volumes
from scipy.spatial import ConvexHull

import dualize
from dualize.make import (
    coloured_graph,
    delaunay,
    melonic_graph,
    random_delaunay,
    random_gluing,
    stacked_ball,
    stacked_sphere,
)

SEEDED = {
    "delaunay": lambda seed: random_delaunay(30, 3, seed),
    "stacked ball": lambda seed: stacked_ball(20, 4, seed),
    "stacked sphere": lambda seed: stacked_sphere(20, 3, seed),
    "coloured graph": lambda seed: coloured_graph(12, 4, seed=seed),
    "coloured graph, not bipartite": lambda seed: coloured_graph(12, 3, bipartite=False, seed=seed),
    "melonic graph": lambda seed: melonic_graph(12, 4, seed),
    "gluing": lambda seed: random_gluing(3, 3, seed=seed),
    "ordered gluing": lambda seed: random_gluing(12, 4, ordered=True, seed=seed),
}


@pytest.mark.parametrize("name", SEEDED)
def test_a_seed_gives_the_same_result_and_another_seed_another(name):
    make = SEEDED[name]
    assert make(5) == make(5)
    assert any(make(5) != make(seed) for seed in (6, 7, 8))


# -- Delaunay --------------------------------------------------------------------------------------


@pytest.mark.parametrize("number,dimension", [(12, 2), (40, 3), (25, 4), (5, 4)])
@pytest.mark.parametrize("seed", [0, 1])
def test_delaunay_fills_the_convex_hull_and_is_a_ball(number, dimension, seed):
    t = random_delaunay(number, dimension, seed)
    assert volumes(t).sum() == pytest.approx(ConvexHull(t.coordinates.point).volume)
    assert betti(t.corners) == (1, *[0] * dimension)
    assert is_sphere_like(boundary_facets(t))
    assert f_vector(t)[0] == number


def test_delaunay_spheres_are_empty():
    t = random_delaunay(20, 3, 3)
    where = t.coordinates.point
    for simplex in where[t.corners]:
        a = 2 * (simplex[1:] - simplex[0])
        centre = np.linalg.solve(a, (simplex[1:] ** 2).sum(axis=1) - (simplex[0] ** 2).sum())
        assert (np.linalg.norm(where - centre, axis=1) > np.linalg.norm(simplex[0] - centre) - 1e-9).all()


def test_delaunay_simplices_are_positive_as_written():
    t = random_delaunay(20, 4, 1)
    assert (dualize.build(t)["vertices/orientation"] == t.written).all()


@pytest.mark.parametrize(
    "points,message",
    [
        ([[0, 0, 0], [1, 0, 0], [0, 1, 0]], "span no simplex"),
        ([[0, 0, 0], [1, 0, 0], [0, 1, 0], [1, 1, 0]], "no Delaunay triangulation"),
        ([[0, 0, 0], [1, 0, 0], [0, 1, 0], [0, 0, 1], [0, 0, 1]], "is left out"),
        ([[0, 0, 0, 0, 0]] * 7, "shape"),
        ([[0, 0], [1, float("nan")], [0, 1]], "not finite"),
    ],
    ids=["few", "flat", "twice", "five axes", "nan"],
)
def test_points_without_a_delaunay_triangulation_are_refused(points, message):
    with pytest.raises(dualize.InputError, match=message):
        delaunay(points)


def test_a_grid_of_points_is_triangulated_or_refused_never_wrong():
    points = np.stack(np.meshgrid(*[np.arange(3.0)] * 3), axis=-1).reshape(-1, 3)
    try:
        t = delaunay(points)
    except dualize.InputError as error:
        assert "flat simplices" in str(error)
    else:
        assert volumes(t).sum() == pytest.approx(8)


# -- stacked ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("dimension", [2, 3, 4])
@pytest.mark.parametrize("simplices", [1, 2, 25])
def test_stacked_ball_is_a_ball_whose_dual_is_a_tree(dimension, simplices):
    t = stacked_ball(simplices, dimension, 4)
    assert betti(t.corners) == (1, *[0] * dimension)
    assert is_sphere_like(boundary_facets(t))
    counts = dualize.build(t).counts
    assert (counts["edges_internal"], counts["faces_internal"]) == (simplices - 1, 0)
    assert f_vector(t)[0] == simplices + dimension


# D. W. Walkup (1970): f_1 >= 4 f_0 - 10 in dimension 3, >= 5 f_0 - 15 in dimension 4, equality for stacked
# spheres.
@pytest.mark.parametrize(
    "dimension,f1", [(2, lambda n: 3 * n - 6), (3, lambda n: 4 * n - 10), (4, lambda n: 5 * n - 15)]
)
@pytest.mark.parametrize("extra", [0, 1, 20])
def test_stacked_sphere_meets_the_lower_bound(dimension, f1, extra):
    n = dimension + 2 + extra
    t = stacked_sphere(n, dimension, 2)
    f = f_vector(t)
    assert (f[0], f[1]) == (n, f1(n))
    assert is_sphere_like(t.corners)
    assert orientable(t)


# -- coloured graphs -------------------------------------------------------------------------------


# Melonic: F = 3 p / 2 + 3 for D = 3, 3 p + 4 for D = 4, f(D = 4) = (p/2 + 4, 2 p + 6, 3 p + 4, 5 p / 2, p)
# (R. Gurau, Ann. Henri Poincare 13 (2012) 399-423; from memory).
@pytest.mark.parametrize("p", [2, 4, 10, 40])
@pytest.mark.parametrize("seed", [0, 1])
def test_melonic_graph_has_degree_zero(p, seed):
    t = melonic_graph(p, 4, seed)
    dualize.Triangulation.from_gluings(t.across, t.carry)
    assert f_vector(t) == (p // 2 + 4, 2 * p + 6, 3 * p + 4, 5 * p // 2, p)
    t = melonic_graph(p, 3, seed)
    assert f_vector(t) == (p // 2 + 3, 3 * p // 2 + 3, 2 * p, p)  # Euler characteristic 0: a manifold
    assert orientable(t)


@pytest.mark.parametrize("dimension", [2, 3, 4])
@pytest.mark.parametrize("bipartite", [True, False])
@pytest.mark.parametrize("seed", range(4))
def test_coloured_graph_is_closed_connected_and_keeps_colours(dimension, bipartite, seed):
    t = coloured_graph(14, dimension, bipartite, seed)
    dualize.Triangulation.from_gluings(t.across, t.carry)
    s = dualize.build(t)
    assert s.counts["components"] == 1
    assert s.counts["nodes"] == 0
    assert (t.carry == np.arange(dimension + 1)).all()
    if bipartite:
        assert orientable(t)
        assert set(np.unique(t.across[::2] % 2)) == {1}


def test_some_graphs_that_are_not_bipartite_are_not_orientable():
    assert not all(orientable(coloured_graph(14, 4, False, seed)) for seed in range(4))


def test_coloured_graphs_of_dimension_two_are_surfaces():
    # F - E + V is even and at most 2 for a closed orientable surface (common knowledge)
    for seed in range(5):
        x = euler(coloured_graph(20, 2, seed=seed))
        assert x <= 2
        assert x % 2 == 0


# -- gluings ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("dimension", [2, 3, 4])
@pytest.mark.parametrize("options", [{}, {"orientable": True}, {"ordered": True}, {"free": 4}], ids=str)
@pytest.mark.parametrize("seed", range(3))
def test_random_gluing_is_regular_connected_and_as_asked(dimension, options, seed):
    n = 2
    t = random_gluing(n, dimension, seed=seed, **options)
    dualize.Triangulation.from_gluings(t.across, t.carry)
    s = dualize.build(t)
    assert s.counts["components"] == 1
    assert s.counts["nodes"] == options.get("free", 0)
    if options.get("orientable"):
        assert orientable(t)
    if options.get("ordered"):
        assert s.flags["ordered"]


def test_ordered_gluings_of_many_simplices_need_one_draw():
    assert len(random_gluing(200, 4, ordered=True, tries=1, seed=3)) == 200


def test_draws_that_all_have_a_holonomy_are_told():
    with pytest.raises(dualize.LimitError, match="3 draws gave no"):
        random_gluing(200, 4, tries=3)


@pytest.mark.parametrize(
    "make,message",
    [
        (lambda: random_gluing(1, 4), "5 facets cannot be paired"),
        (lambda: random_gluing(2, 3, free=9), "free is 9"),
        (lambda: random_gluing(2, 3, ordered=True, orientable=True), "cannot be asked for together"),
        (lambda: coloured_graph(7), "vertices is 7"),
        (lambda: melonic_graph(3), "vertices is 3"),
        (lambda: stacked_sphere(5, 4), "vertices is 5"),
        (lambda: stacked_ball(0), "simplices is 0"),
        (lambda: random_delaunay(3, 3), "number is 3"),
        (lambda: random_delaunay(9, 3, -1), "seed is -1"),
    ],
)
def test_wrong_parameters_are_refused(make, message):
    with pytest.raises(dualize.InputError, match=message):
        make()
