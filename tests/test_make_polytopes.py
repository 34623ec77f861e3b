"""Boundaries of polytopes against published counts and coordinates.

H. S. M. Coxeter, Regular Polytopes, 3rd ed. (1973), table I; D. Gale, Neighborly and cyclic polytopes,
Proc. Sympos. Pure Math. 7 (1963) 225-232; B. Gruenbaum, Convex Polytopes (1967), section 4.7 (from memory).
"""

from itertools import combinations, pairwise

import numpy as np
import pytest
from catalogue import CATALOGUE
from make_measures import f_vector, is_closed_manifold, is_sphere_like, orientable, same_complex
from scipy.spatial import ConvexHull

import dualize
from dualize.make import cell_24, cell_600, cross_polytope, cyclic_polytope, simplex_boundary

COUNTS = {
    "simplex 2": (simplex_boundary, (2,), (4, 6, 4)),
    "simplex 3": (simplex_boundary, (3,), (5, 10, 10, 5)),
    "simplex 4": (simplex_boundary, (4,), (6, 15, 20, 15, 6)),
    "octahedron": (cross_polytope, (2,), (6, 12, 8)),
    "16-cell": (cross_polytope, (3,), (8, 24, 32, 16)),
    "cross-polytope 5": (cross_polytope, (4,), (10, 40, 80, 80, 32)),
    # (24, 96, 96, 24): each of the 24 octahedra gets a diagonal, four triangles, and three tetrahedra more
    "24-cell": (cell_24, (), (24, 96 + 24, 96 + 4 * 24, 4 * 24)),
    "600-cell": (cell_600, (), (120, 720, 1200, 600)),
}


@pytest.mark.parametrize("name", COUNTS)
def test_counts_are_the_published_ones(name):
    function, arguments, f = COUNTS[name]
    assert f_vector(function(*arguments)) == f


@pytest.mark.parametrize("name", [n for n in COUNTS if n != "600-cell"])
def test_polytope_boundaries_are_spheres(name):
    function, arguments, _ = COUNTS[name]
    t = function(*arguments)
    assert is_sphere_like(t.corners)
    assert orientable(t)


def test_every_vertex_of_the_600_cell_is_inside_an_icosahedron():
    t = cell_600()
    links = {f: 0 for f in t.corners.ravel().tolist()}
    for row in t.corners.tolist():
        for x in row:
            links[x] += 1
    assert set(links.values()) == {20}  # an icosahedron has 20 triangles
    assert is_closed_manifold(t)


@pytest.mark.parametrize("n", [6, 7, 9, 12])
def test_cyclic_polytope_of_dimension_four_has_the_published_counts(n):
    assert f_vector(cyclic_polytope(n, 3)) == (n, n * (n - 1) // 2, n * (n - 3), n * (n - 3) // 2)


@pytest.mark.parametrize("n", [6, 7, 9, 12])
def test_cyclic_polytope_of_dimension_five_has_the_published_counts(n):
    f = (n, n * (n - 1) // 2, 2 * (n * n - 6 * n + 10), 5 * (n - 3) * (n - 4) // 2, (n - 3) * (n - 4))
    assert f_vector(cyclic_polytope(n, 4)) == f


def gale(n, k):
    """Facets by Gale's evenness condition in its original words: between any two others, evenly many."""
    for facet in combinations(range(n), k):
        others = [x for x in range(n) if x not in facet]
        if all(sum(a < x < b for x in facet) % 2 == 0 for a, b in pairwise(others)):
            yield facet


@pytest.mark.parametrize("n,dimension", [(4, 2), (8, 2), (5, 3), (8, 3), (11, 3), (6, 4), (7, 4), (11, 4)])
def test_cyclic_polytope_has_the_facets_of_gales_condition(n, dimension):
    assert same_complex(cyclic_polytope(n, dimension), list(gale(n, dimension + 1)))


@pytest.mark.parametrize("n,dimension", [(7, 2), (8, 3), (9, 4), (12, 4)])
def test_cyclic_polytope_is_the_convex_hull_of_its_coordinates(n, dimension):
    t = cyclic_polytope(n, dimension)
    assert same_complex(t, ConvexHull(t.coordinates.point).simplices.tolist())


@pytest.mark.parametrize("name", ["cyclic_c7_4", "cyclic_c8_4", "cyclic_c9_5", "cyclic_c10_5"])
def test_cyclic_polytope_is_the_one_of_the_catalogue(name):
    facets = np.array(CATALOGUE[name].facets)
    n, k = int(facets.max()) - int(facets.min()) + 1, facets.shape[1]
    assert same_complex(cyclic_polytope(n, k - 1), (facets - facets.min()).tolist())


@pytest.mark.parametrize("dimension", [2, 3, 4])
def test_cross_polytope_is_the_convex_hull_of_its_coordinates(dimension):
    t = cross_polytope(dimension)
    assert same_complex(t, ConvexHull(t.coordinates.point).simplices.tolist())


def test_tetrahedra_of_the_600_cell_are_regular():
    t = cell_600()
    where = t.coordinates.point[t.corners]
    lengths = {
        round(float(np.linalg.norm(w[i] - w[j])), 9) for w in where for i, j in combinations(range(4), 2)
    }
    assert lengths == {round(2 / (1 + 5**0.5), 9)}  # edge 1 / golden ratio at radius 1 (Coxeter)


def test_pieces_of_the_24_cell_add_up_to_its_surface():
    # 24 regular octahedra of edge sqrt 2, each of volume sqrt(2)/3 a^3 (common knowledge)
    t = cell_24()
    where = t.coordinates.point[t.corners]
    edges = where[:, 1:] - where[:, :1]
    pieces = np.sqrt(np.linalg.det(edges @ edges.transpose(0, 2, 1))) / 6
    assert pieces.sum() == pytest.approx(24 * 2**0.5 / 3 * 2**1.5)
    hull = ConvexHull(t.coordinates.point)
    assert pieces.sum() == pytest.approx(hull.area)


@pytest.mark.parametrize(
    "make,message",
    [
        (lambda: simplex_boundary(5), "dimension is 5"),
        (lambda: cross_polytope(1), "dimension is 1"),
        (lambda: cyclic_polytope(5, 4), "vertices is 5"),
        (lambda: cyclic_polytope(5.0, 3), "not an integer"),
    ],
    ids=["simplex", "cross", "cyclic", "float"],
)
def test_wrong_parameters_are_refused(make, message):
    with pytest.raises(dualize.InputError, match=message):
        make()
