"""The package against published values: counts of the dual, boundary graphs, flat labellings.

The values and their sources are in `catalogue.py`; what is counted by hand says so here.
"""

from collections import Counter

import networkx as nx
import pytest
from catalogue import CATALOGUE, F_OF_TWO_FOUR_SIMPLICES, NAMES, SMALL_GLUINGS
from reference import (
    assert_boundary_of_boundary_is_zero,
    face_length_histogram,
    log2_flat_z2_labellings,
    table_from_pairs,
)
from specimens import around_ridge, kuhn_grid, kuhn_torus, melon, move_side, simplex, slab, sphere
from test_build_reference import from_table

import dualize


def built(facets, **how):
    return dualize.build(dualize.Triangulation.from_facets(facets), **how)


def glued(table, **how):
    return dualize.build(from_table(table), **how)


@pytest.fixture(scope="module")
def catalogue_skeletons():
    """Each catalogue entry, built once."""
    return {name: built(CATALOGUE[name].facets, points=True) for name in NAMES}


# --------------------------------------------------------------------------------------------------
# The catalogue


@pytest.mark.parametrize("name", NAMES)
def test_counts_are_the_published_ones(name, catalogue_skeletons):
    entry, counts = CATALOGUE[name], catalogue_skeletons[name].counts
    assert counts["vertices"] == entry.vertices == entry.f[-1]
    assert counts["edges_internal"] == entry.edges_internal
    assert counts["edges_external"] == entry.edges_external
    assert counts["faces_internal"] == entry.faces_internal
    assert counts["faces_external"] == entry.faces_external
    assert (counts["nodes"], counts["links"]) == (entry.nodes, entry.links)
    assert counts["components"] == 1
    assert counts["edges_internal"] + counts["edges_external"] == entry.f[-2]
    assert counts["faces_internal"] + counts["faces_external"] == entry.f[-3]
    inner = counts["vertices"] - counts["edges_internal"] + counts["faces_internal"]
    assert inner == entry.inner_euler


@pytest.mark.parametrize("name", NAMES)
def test_face_lengths_are_the_published_ones(name, catalogue_skeletons):
    skeleton = catalogue_skeletons[name]
    assert face_length_histogram(skeleton, skeleton.counts) == CATALOGUE[name].face_lengths


@pytest.mark.parametrize("name", NAMES)
def test_orientability_is_the_published_one(name, catalogue_skeletons):
    skeleton = catalogue_skeletons[name]
    assert list(skeleton.flags["orientable"]) == [CATALOGUE[name].orientable]
    assert bool(skeleton["edges/twist"].any()) is not CATALOGUE[name].orientable


@pytest.mark.parametrize("name", NAMES)
def test_flat_z2_labellings_number_as_published(name, catalogue_skeletons):
    skeleton = catalogue_skeletons[name]
    assert log2_flat_z2_labellings(skeleton, skeleton.counts) == CATALOGUE[name].log2_flat_z2


@pytest.mark.parametrize("name", [n for n in NAMES if CATALOGUE[n].dual_group])
def test_flat_z2_labellings_count_homomorphisms(name, catalogue_skeletons):
    """|G|^(V-1) |Hom(pi, G)| (R. Dijkgraaf, E. Witten, Comm. Math. Phys. 129 (1990) 393-429, from memory)."""
    skeleton = catalogue_skeletons[name]
    homomorphisms = CATALOGUE[name].dual_group["homomorphisms"]["Z2"]
    log2 = log2_flat_z2_labellings(skeleton, skeleton.counts)
    assert 2**log2 == 2 ** (CATALOGUE[name].vertices - 1) * homomorphisms


@pytest.mark.parametrize("name", NAMES)
def test_points_and_segments_number_as_published(name, catalogue_skeletons):
    skeleton, f = catalogue_skeletons[name], CATALOGUE[name].f
    assert int(skeleton["vertices/point"].max()) + 1 == f[0]
    assert int(skeleton["vertices/segment"].max()) + 1 == f[1]


@pytest.mark.parametrize("name", NAMES)
def test_boundary_of_boundary_is_zero(name, catalogue_skeletons):
    assert_boundary_of_boundary_is_zero(catalogue_skeletons[name])


@pytest.mark.parametrize("name", [n for n in NAMES if CATALOGUE[n].boundary])
def test_boundary_is_the_published_one(name, catalogue_skeletons):
    entry, skeleton = CATALOGUE[name], catalogue_skeletons[name]
    assert entry.boundary["f"][-2:] == [skeleton.counts["links"], skeleton.counts["nodes"]]
    assert len(set(skeleton["nodes/component"].tolist())) == entry.boundary["components"]
    graph = skeleton.boundary_graph().to_undirected()
    assert nx.number_connected_components(graph) == entry.boundary["components"]
    assert {degree for _, degree in graph.degree} == {entry.dimension}
    # the boundary's own dual, built from the labels of the nodes
    boundary = built(skeleton["nodes/corners"].tolist())
    assert boundary.counts["nodes"] == 0
    assert all(boundary.flags["orientable"]) is entry.boundary["orientable"]
    assert boundary.counts["edges_internal"] == entry.boundary["f"][-2]


@pytest.mark.parametrize("name", [n for n in NAMES if not CATALOGUE[n].boundary and CATALOGUE[n].manifold])
def test_closed_manifolds_obey_the_counting_relations(name, catalogue_skeletons):
    """H. Seifert, W. Threlfall (1934) in 3D; M. Dehn (1905), D. Sommerville (1927) in 4D, from memory."""
    entry, counts = CATALOGUE[name], catalogue_skeletons[name].counts
    V, E, F = counts["vertices"], counts["edges_internal"], counts["faces_internal"]
    assert (entry.dimension + 1) * V == 2 * E
    if entry.dimension == 3:
        assert entry.f[0] == V - E + F
    if entry.dimension == 4:
        assert entry.euler + entry.f[1] - entry.f[0] == V - E + F


# --------------------------------------------------------------------------------------------------
# Gluings that are no simplicial complexes


@pytest.mark.parametrize("kind, of_s3, number", [("tetrahedra_1", 4, 4), ("tetrahedra_2", 16, 17)])
def test_orientable_closed_gluings_of_few_tetrahedra(kind, of_s3, number):
    """4 of one tetrahedron, all orientable; 17 of two, 16 orientable (Burton, SoCG 2011, from memory)."""
    flags = [
        glued(table_from_pairs(rows)).flags["orientable"]
        for name, rows in SMALL_GLUINGS.items()
        if name.startswith(kind)
    ]
    assert len(flags) == number
    assert sum(list(f) == [True] for f in flags) == of_s3


def test_f_vectors_of_the_orientable_gluings_of_two_four_simplices():
    found = []
    for name, rows in SMALL_GLUINGS.items():
        if name.startswith("four_simplices"):
            s = glued(table_from_pairs(rows), points=True)
            points, segments = (int(s[f"vertices/{x}"].max()) + 1 for x in ("point", "segment"))
            found.append((points, segments, s.counts["faces_internal"], s.counts["edges_internal"], 2))
    assert sorted(found) == F_OF_TWO_FOUR_SIMPLICES


@pytest.mark.parametrize("shape", [(1, 1), (3, 2), (1, 1, 1), (3, 2, 1), (1, 1, 1, 1), (2, 1, 1, 2)], ids=str)
def test_densities_of_the_periodic_grid(shape):
    """V, E, F per cube: 2, 3, 1; 6, 12, 7; 24, 60, 50 (H. W. Kuhn 1960, from memory)."""
    cubes = 1
    for side in shape:
        cubes *= side
    counts = glued(kuhn_torus(shape)).counts
    per_cube = {2: (2, 3, 1), 3: (6, 12, 7), 4: (24, 60, 50)}[len(shape)]
    got = (counts["vertices"], counts["edges_internal"], counts["faces_internal"])
    assert got == tuple(cubes * x for x in per_cube)
    assert counts["nodes"] == 0


# --------------------------------------------------------------------------------------------------
# Boundary graphs


K = {n: nx.complete_graph(n) for n in (2, 3, 4, 5)}

# name -> (skeleton, (V, E_int, F_int), boundary graph).  Common practice: the boundary of one side of a move
# is a join of two boundaries of simplices, so its dual graph is a product of complete graphs; round a ridge,
# a product of a complete graph and a cycle.  Counts by hand.
BOUNDARIES = {
    "one tetrahedron": (lambda: built(simplex(3)), (1, 0, 0), K[4]),
    "two tetrahedra": (lambda: built(move_side(3, 2)), (2, 1, 0), nx.cartesian_product(K[2], K[3])),
    "three round an edge": (lambda: built(move_side(3, 3)), (3, 3, 1), nx.cartesian_product(K[2], K[3])),
    "four round an edge": (lambda: built(around_ridge(3, 4)), (4, 4, 1), nx.hypercube_graph(3)),
    "four round a vertex": (lambda: built(move_side(3, 4)), (4, 6, 4), K[4]),
    "two tetrahedra, three common": (lambda: glued(melon(3)), (2, 3, 3), nx.MultiGraph([(0, 1)] * 3)),
    "one 4-simplex": (lambda: built(simplex(4)), (1, 0, 0), K[5]),
    "two 4-simplices": (lambda: built(move_side(4, 2)), (2, 1, 0), nx.cartesian_product(K[2], K[4])),
    "three round a triangle": (lambda: built(move_side(4, 3)), (3, 3, 1), nx.cartesian_product(K[3], K[3])),
    "four round a segment": (lambda: built(move_side(4, 4)), (4, 6, 4), nx.cartesian_product(K[2], K[4])),
    "five round a vertex": (lambda: built(move_side(4, 5)), (5, 10, 10), K[5]),
    "two 4-simplices, four common": (lambda: glued(melon(4)), (2, 4, 6), nx.MultiGraph([(0, 1)] * 4)),
    "slab over the sphere of 5": (
        lambda: built(slab(sphere(3))),
        (20, 45, 40),
        nx.disjoint_union(K[5], K[5]),
    ),
    "closed sphere": (lambda: built(sphere(4)), (6, 15, 20), nx.empty_graph(0)),
    **{
        f"{n} round a triangle": (
            lambda n=n: built(around_ridge(4, n)),
            (n, n, 1),
            nx.cartesian_product(K[3], nx.cycle_graph(n)),
        )
        for n in (4, 5, 6, 9)
    },
    **{
        f"{n} round a segment": (
            lambda n=n: built(around_ridge(3, n)),
            (n, n, 1),
            nx.cartesian_product(K[2], nx.cycle_graph(n)),
        )
        for n in (5, 8)
    },
}


@pytest.mark.parametrize("name", BOUNDARIES)
def test_boundary_graph_is_isomorphic_to_the_known_one(name):
    make, counts, known = BOUNDARIES[name]
    skeleton = make()
    c = skeleton.counts
    assert (c["vertices"], c["edges_internal"], c["faces_internal"]) == counts
    graph = skeleton.boundary_graph()
    assert sorted(graph.nodes) == list(range(c["nodes"]))
    assert graph.number_of_edges() == c["links"]
    assert is_isomorphic_multigraph(graph, nx.MultiGraph(known))


def is_isomorphic_multigraph(a, b):
    """Isomorphism with multiplicities (networkx on simple graphs weighted by the number of links)."""

    def weighted(graph):
        simple = nx.Graph()
        simple.add_nodes_from(graph.nodes)
        for (u, v), number in Counter(tuple(sorted(e[:2])) for e in graph.edges).items():
            simple.add_edge(u, v, number=number)
        return simple

    match = nx.algorithms.isomorphism.numerical_edge_match("number", 0)
    return nx.is_isomorphic(weighted(a), weighted(b), edge_match=match)


def test_boundary_graph_agrees_with_the_links():
    skeleton = built(kuhn_grid((1, 1, 1, 1)))
    links = Counter(
        frozenset(pair)
        for pair in zip(skeleton["links/source"].tolist(), skeleton["links/target"].tolist(), strict=True)
    )
    assert Counter(frozenset(e[:2]) for e in skeleton.boundary_graph().edges) == links


def test_kuhn_hypercube_has_the_counts_of_the_freudenthal_cut():
    """f = (16, 65, 110, 84, 24): V 24, E 36 + 48, F 14 + 96 (Freudenthal 1942, Kuhn 1960; by hand)."""
    counts = built(kuhn_grid((1, 1, 1, 1))).counts
    assert (counts["vertices"], counts["edges_internal"], counts["edges_external"]) == (24, 36, 48)
    assert (counts["faces_internal"], counts["faces_external"]) == (14, 96)


@pytest.mark.parametrize("name", ["simplex_bd_4", "cell16"])
def test_slab_has_the_dual_graph_of_its_base_at_both_ends(name):
    """The staircase product with an interval ends in two copies (Eilenberg, Steenrod 1952, from memory)."""
    facets = CATALOGUE[name].facets
    base = built(facets)
    skeleton = built(slab(facets))
    ends = zip(base["edges/source"][:, 0].tolist(), base["edges/target"][:, 0].tolist(), strict=True)
    dual = nx.Graph(list(ends))
    graph = nx.Graph(skeleton.boundary_graph().to_undirected())
    parts = [graph.subgraph(nodes) for nodes in nx.connected_components(graph)]
    assert len(parts) == 2
    assert all(nx.is_isomorphic(part, dual) for part in parts)
    if name == "cell16":  # its dual graph is that of the 4-cube (H. S. M. Coxeter, Regular Polytopes)
        assert nx.is_isomorphic(dual, nx.hypercube_graph(4))
