"""First foams against counts of the dual two-complex that follow from joins of spheres (from memory,
counted by hand)."""

import networkx as nx
import pytest
from make_measures import f_vector

import dualize
from dualize.make import (
    dipole_slab,
    move_side,
    ridge_ring,
    shared_pair,
    simplex,
    simplex_pair,
)


def counts(t):
    c = dualize.build(t).counts
    return c["vertices"], c["edges_internal"], c["edges_external"], c["faces_internal"], c["faces_external"]


def boundary_graph(t):
    s = dualize.build(t)
    graph = nx.MultiGraph()
    graph.add_nodes_from(range(s.counts["nodes"]))
    graph.add_edges_from(zip(s["links/source"].tolist(), s["links/target"].tolist(), strict=True))
    return graph


# Vertices, internal and external edges, internal and external faces; boundary graphs are products of
# complete graphs, since the boundary of a move is the join of the boundaries of two simplices (U. Pachner
# 1991, from memory).
FOAMS = {
    "tetrahedron": (lambda: simplex(3), (1, 0, 4, 0, 6)),
    "4-simplex": (lambda: simplex(4), (1, 0, 5, 0, 10)),
    "two tetrahedra": (lambda: simplex_pair(3), (2, 1, 6, 0, 9)),
    "two 4-simplices": (lambda: simplex_pair(4), (2, 1, 8, 0, 16)),
    "three around an edge": (lambda: ridge_ring(3, 3), (3, 3, 6, 1, 9)),
    "four around an edge": (lambda: ridge_ring(4, 3), (4, 4, 8, 1, 12)),
    "three around a triangle": (lambda: ridge_ring(3, 4), (3, 3, 9, 1, 18)),
    "six around a triangle": (lambda: ridge_ring(6, 4), (6, 6, 18, 1, 36)),
    "3D side of four": (lambda: move_side(3, 4), (4, 6, 4, 4, 6)),
    "4D side of four": (lambda: move_side(4, 4), (4, 6, 8, 4, 16)),
    "4D side of five": (lambda: move_side(4, 5), (5, 10, 5, 10, 10)),
    "3D melon": (lambda: shared_pair(3, 3), (2, 3, 2, 3, 3)),
    "4D melon": (lambda: shared_pair(4, 4), (2, 4, 2, 6, 4)),
    "closed graph of two vertices": (lambda: shared_pair(5, 4), (2, 5, 0, 10, 0)),
    "dipole slab": (dipole_slab, (8, 18, 4, 20, 8)),
}


@pytest.mark.parametrize("name", FOAMS)
def test_foam_has_the_counts_of_its_dual(name):
    make, expected = FOAMS[name]
    assert counts(make()) == expected


@pytest.mark.parametrize("shared", [1, 2, 3, 4, 5])
def test_shared_pair_has_as_many_internal_faces_as_pairs_of_shared_facets(shared):
    t = shared_pair(shared, 4)
    assert counts(t)[:4] == (2, shared, 2 * (5 - shared), shared * (shared - 1) // 2)


@pytest.mark.parametrize("d", [3, 4])
def test_melon_has_two_nodes_joined_by_d_links(d):
    graph = boundary_graph(shared_pair(d, d))
    assert sorted(map(sorted, graph.edges())) == [[0, 1]] * d


def test_closed_graph_of_two_vertices_has_the_published_counts():
    # the elementary coloured graph: f = (5, 10, 10, 5, 2), S4 (R. Gurau 2012; from memory)
    assert f_vector(shared_pair(5, 4)) == (5, 10, 10, 5, 2)


@pytest.mark.parametrize("layers", [1, 2, 3])
def test_dipole_slab_ends_in_two_graphs_of_two_nodes_and_four_links(layers):
    t = dipole_slab(layers)
    dualize.Triangulation.from_gluings(t.across, t.carry)
    if layers == 1:
        assert f_vector(t) == (8, 22, 28, 22, 8)
    graph = boundary_graph(t)
    assert sorted(map(len, nx.connected_components(graph))) == [2, 2]
    for part in nx.connected_components(graph):
        assert graph.subgraph(part).number_of_edges() == 4
        assert not any(a == b for a, b in graph.subgraph(part).edges())


@pytest.mark.parametrize("n", [3, 4, 7])
def test_boundary_graph_of_a_ring_around_a_triangle_is_a_ring_of_triangles(n):
    expected = nx.cartesian_product(nx.cycle_graph(n), nx.cycle_graph(3))
    assert nx.is_isomorphic(nx.Graph(boundary_graph(ridge_ring(n, 4))), expected)


@pytest.mark.parametrize("d,k", [(d, k) for d in (2, 3, 4) for k in range(1, d + 2)])
def test_two_sides_of_a_move_have_the_same_boundary(d, k):
    one, two = (dualize.build(move_side(d, k, opposite=x)) for x in (False, True))
    assert (one.counts["vertices"], two.counts["vertices"]) == (k, d + 2 - k)
    nodes = [
        sorted(zip(map(tuple, s["nodes/corners"].tolist()), s["nodes/orientation"].tolist(), strict=True))
        for s in (one, two)
    ]
    assert nodes[0] == nodes[1]
    expected = nx.cartesian_product(nx.complete_graph(k), nx.complete_graph(d + 2 - k))
    assert nx.is_isomorphic(nx.Graph(boundary_graph(move_side(d, k))), expected)


@pytest.mark.parametrize(
    "make,message",
    [
        (lambda: ridge_ring(2), "number is 2"),
        (lambda: move_side(3, 5), "simplices is 5"),
        (lambda: shared_pair(6), "shared is 6"),
        (lambda: shared_pair(0), "shared is 0"),
        (lambda: dipole_slab(0), "layers is 0"),
        (lambda: simplex(1), "dimension is 1"),
    ],
)
def test_wrong_parameters_are_refused(make, message):
    with pytest.raises(dualize.InputError, match=message):
        make()
