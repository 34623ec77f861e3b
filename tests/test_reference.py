"""The slow reference against published values and against the statements of the conventions."""

import random
from itertools import combinations

import networkx as nx
import pytest
from catalogue import CATALOGUE, F_OF_TWO_FOUR_SIMPLICES, NAMES, SMALL_GLUINGS
from hypothesis import given
from reference import (
    Refused,
    Table,
    assert_boundary_of_boundary_is_zero,
    boundary_maps,
    check_table,
    face_length_histogram,
    glue_by_labels,
    log2_flat_z2_labellings,
    reference_skeleton,
    ridge_walks,
    sign_of,
    table_from_pairs,
)
from specimens import (
    GLUED,
    HOLONOMY,
    LABELLED,
    REFUSED,
    SINGULAR,
    around_ridge,
    delaunay,
    dimensions,
    disjoint,
    kuhn_torus,
    melon,
    other_side,
    random_table,
    reordered,
    scrambled,
    scrambled_tables,
    seeds,
    shuffled,
    slab,
    sphere,
    subcomplexes,
    tables,
    unlabelled,
)

REGULAR = {name: glue_by_labels(facets) for name, facets in LABELLED.items()} | GLUED


def boundary_multigraph(skeleton):
    graph = nx.MultiGraph()
    graph.add_nodes_from(range(len(skeleton["nodes/edge"])))
    graph.add_edges_from(zip(skeleton["links/source"], skeleton["links/target"], strict=True))
    return graph


def labelled(facets):
    return reference_skeleton(glue_by_labels(facets), points=True)


# --------------------------------------------------------------------------------------------------
# Published values


@pytest.mark.parametrize("name", NAMES)
def test_counts_of_the_catalogue(name):
    entry, skeleton = CATALOGUE[name], labelled(CATALOGUE[name].facets)
    counts = skeleton["counts"]
    expected = {
        key: getattr(entry, key)
        for key in ("vertices", "edges_internal", "edges_external", "faces_internal", "faces_external")
    }
    assert counts == expected | {"nodes": entry.nodes, "links": entry.links, "components": 1}
    assert skeleton["flags"] == {"orientable": [entry.orientable], "ordered": True, "singular": False}
    assert face_length_histogram(skeleton, counts) == entry.face_lengths
    components = 0 if entry.boundary is None else entry.boundary["components"]
    assert len(set(skeleton["nodes/component"])) == components


@pytest.mark.parametrize("name", NAMES)
def test_points_and_segments_of_the_catalogue_number_as_published(name):
    entry, skeleton = CATALOGUE[name], labelled(CATALOGUE[name].facets)
    assert 1 + max(map(max, skeleton["vertices/point"])) == entry.f[0]
    assert 1 + max(map(max, skeleton["vertices/segment"])) == entry.f[1]


@pytest.mark.parametrize("name", NAMES)
def test_flat_z2_labellings_of_the_catalogue(name):
    skeleton = labelled(CATALOGUE[name].facets)
    assert log2_flat_z2_labellings(skeleton, skeleton["counts"]) == CATALOGUE[name].log2_flat_z2


# facts of the trade (common practice), counted by hand: V, E_int, B, F_int, L
COUNTED = {
    "3d-simplex": (1, 0, 4, 0, 6),
    "3d-side-2": (2, 1, 6, 0, 9),
    "3d-side-3": (3, 3, 6, 1, 9),
    "3d-around-4": (4, 4, 8, 1, 12),
    "3d-side-4": (4, 6, 4, 4, 6),
    "3d-cube": (6, 6, 12, 1, 18),
    "3d-melon-3": (2, 3, 2, 3, 3),
    "4d-simplex": (1, 0, 5, 0, 10),
    "4d-side-2": (2, 1, 8, 0, 16),
    "4d-side-3": (3, 3, 9, 1, 18),
    "4d-side-4": (4, 6, 8, 4, 16),
    "4d-side-5": (5, 10, 5, 10, 10),
    "4d-around-4": (4, 4, 12, 1, 24),
    "4d-around-7": (7, 7, 21, 1, 42),
    "4d-melon-4": (2, 4, 2, 6, 4),
    "4d-cube": (24, 36, 48, 14, 96),
    "4d-slab": (20, 45, 10, 40, 20),
    "4d-sphere": (6, 15, 0, 20, 0),
    # H. W. Kuhn, IBM J. Res. Dev. 4 (1960) 518-524 (from memory): densities per cube of the periodic grid
    "kuhn-torus-1x1x1": (6, 12, 0, 7, 0),
    "kuhn-torus-2x2x2": (8 * 6, 8 * 12, 0, 8 * 7, 0),
    "kuhn-torus-1x1x1x1": (24, 60, 0, 50, 0),
    # f-vectors (6, 15, 10) and (5, 10, 5): the six-vertex projective plane, the five-triangle Moebius band
    "projective-plane": (10, 15, 0, 6, 0),
    "moebius-band": (5, 5, 5, 0, 5),
}


@pytest.mark.parametrize("name", COUNTED)
def test_counts_known_by_hand(name):
    counts = reference_skeleton(REGULAR[name])["counts"]
    got = [counts[k] for k in ("vertices", "edges_internal", "nodes", "faces_internal", "links")]
    assert tuple(got) == COUNTED[name]


def product_graph(a, b):
    return nx.cartesian_product(nx.complete_graph(a), nx.complete_graph(b))


# Common practice: the boundary of one side of a move is a join of two boundaries of simplices, so that its
# dual graph is a product of complete graphs; round a ridge, of a complete graph and a cycle.
GRAPHS = {
    "3d-simplex": nx.complete_graph(4),
    "3d-side-2": product_graph(2, 3),
    "3d-side-3": product_graph(2, 3),
    "3d-around-4": nx.hypercube_graph(3),
    "4d-simplex": nx.complete_graph(5),
    "4d-side-2": product_graph(2, 4),
    "4d-side-3": product_graph(3, 3),
    "4d-side-4": product_graph(2, 4),
    "4d-side-5": nx.complete_graph(5),
    "4d-around-7": nx.cartesian_product(nx.complete_graph(3), nx.cycle_graph(7)),
    "4d-slab": nx.disjoint_union(nx.complete_graph(5), nx.complete_graph(5)),
    "4d-melon-4": nx.MultiGraph([(0, 1)] * 4),
    "3d-melon-3": nx.MultiGraph([(0, 1)] * 3),
}


@pytest.mark.parametrize("name", GRAPHS)
def test_boundary_graph(name):
    graph = boundary_multigraph(reference_skeleton(REGULAR[name]))
    assert nx.is_isomorphic(graph, nx.MultiGraph(GRAPHS[name]))


def test_the_seventeen_gluings_of_two_tetrahedra_have_one_that_is_non_orientable():
    flags = [
        reference_skeleton(table_from_pairs(rows))["flags"]["orientable"]
        for name, rows in SMALL_GLUINGS.items()
        if name.startswith("tetrahedra_2")
    ]
    assert sorted(flags) == [[False]] + [[True]] * 16


def test_f_vectors_of_the_eight_gluings_of_two_four_simplices():
    found = []
    for name, rows in SMALL_GLUINGS.items():
        if name.startswith("four_simplices"):
            s = reference_skeleton(table_from_pairs(rows), points=True)
            counts = s["counts"]
            points, segments = (1 + max(map(max, s[f"vertices/{kind}"])) for kind in ("point", "segment"))
            found.append((points, segments, counts["faces_internal"], counts["edges_internal"], 2))
    assert sorted(found) == F_OF_TWO_FOUR_SIMPLICES


@pytest.mark.parametrize("name", [n for n in SMALL_GLUINGS if n.startswith("tetrahedra")])
def test_gluings_of_closed_3_manifolds_have_euler_characteristic_zero(name):
    """H. Seifert, W. Threlfall, Lehrbuch der Topologie (1934): V - E + F is the number of points."""
    s = reference_skeleton(table_from_pairs(SMALL_GLUINGS[name]), points=True)
    counts = s["counts"]
    points = 1 + max(map(max, s["vertices/point"]))
    segments = 1 + max(map(max, s["vertices/segment"]))
    assert counts["vertices"] - counts["edges_internal"] + counts["faces_internal"] == points
    assert segments == counts["faces_internal"]
    assert all(0 not in row for row in s["vertices/segment_sign"])


# --------------------------------------------------------------------------------------------------
# The conventions' own statements


def assert_statements(table, skeleton):
    """What sections 2 to 4 claim, for every regular complex."""
    d = table.dimension
    assert_boundary_of_boundary_is_zero(skeleton)
    counts, twist = skeleton["counts"], skeleton["edges/twist"]
    offsets = skeleton["faces/edge_offsets"]
    # the twists are a cocycle, and they vanish exactly on orientable components
    for f in range(counts["faces_internal"]):
        assert sum(twist[e] for e in skeleton["faces/edge"][offsets[f] : offsets[f + 1]]) % 2 == 0
    for e, (source, target) in enumerate(
        zip(skeleton["edges/source"], skeleton["edges/target"], strict=True)
    ):
        if e >= counts["edges_internal"]:
            assert twist[e] == 0
            continue
        (s, i), (t, j) = source, target
        assert table.across[s][i] == t and table.carry[s][i][i] == j
        assert [table.carry[s][i][c] for c in skeleton["edges/source_corner"][e]] == skeleton[
            "edges/target_corner"
        ][e]
    # every wedge is visited once; every place of every edge has one face
    assert sorted(zip(skeleton["faces/vertex"], skeleton["faces/wedge"], strict=True)) == [
        (s, w) for s in range(counts["vertices"]) for w in range(d * (d + 1) // 2)
    ]
    assert all(None not in row for row in skeleton["edges/face"] + skeleton["nodes/link"])
    # section 4: links and twists
    ascending = skeleton["flags"]["ordered"]
    for link in range(counts["links"]):
        kept = 0
        for node in range(counts["nodes"]):
            for place in range(d):
                if skeleton["nodes/link"][node][place] == link:
                    rule = skeleton["nodes/orientation"][node] * (-1) ** place
                    kept += rule == skeleton["nodes/link_leaves"][node][place]
        if ascending:
            assert kept in ((1,) if skeleton["links/twist"][link] else (0, 2))
            if all(skeleton["flags"]["orientable"]):
                assert kept == 2
    # section 4: in an orientable labelled complex the sign of a face on an edge is (-1)^place
    if table.matched and all(skeleton["flags"]["orientable"]):
        alternating = [(-1) ** k for k in range(d)]
        assert all(row == alternating for row in skeleton["edges/face_sign"])
        pairs = list(combinations(range(d + 1), 2))
        for s, row in enumerate(skeleton["wedges/direction"]):
            sign = skeleton["vertices/orientation"][s]
            assert row == [sign * (-1) ** (i + j) for i, j in pairs]


@pytest.mark.parametrize("name", [*LABELLED, *GLUED])
def test_statements_of_the_conventions(name):
    assert_statements(REGULAR[name], reference_skeleton(REGULAR[name]))


@pytest.mark.parametrize("name", [n for n in NAMES if len(CATALOGUE[n].facets) < 300])
def test_statements_of_the_conventions_on_the_catalogue(name):
    table = glue_by_labels(CATALOGUE[name].facets)
    assert_statements(table, reference_skeleton(table))


@given(reordered(delaunay()))
def test_statements_of_the_conventions_on_delaunay_triangulations(facets):
    table = glue_by_labels(facets)
    assert_statements(table, reference_skeleton(table))


@given(tables())
def test_statements_of_the_conventions_on_random_gluings(table):
    try:
        skeleton = reference_skeleton(table)
    except Refused as refused:
        assert refused.kind == "holonomy"  # all that can be wrong with a random pairing
        assert_boundary_of_boundary_is_zero(reference_skeleton(table, keep_singular=True))
        return
    assert_statements(table, skeleton)


@given(scrambled_tables())
def test_statements_of_the_conventions_on_scrambled_gluings(table):
    assert_statements(table, reference_skeleton(table))


@given(subcomplexes())
def test_statements_of_the_conventions_on_subcomplexes(facets):
    table = glue_by_labels(facets)
    skeleton = reference_skeleton(table, keep_singular=True)
    assert_statements(table, skeleton)


def boundary_by_labels(skeleton):
    """The boundary as facets (ordered so that their parity is the node's orientation)."""
    facets = []
    for labels, sign in zip(skeleton["nodes/corners"], skeleton["nodes/orientation"], strict=True):
        assert labels == sorted(labels)
        facets.append(labels if sign == 1 else [labels[1], labels[0], *labels[2:]])
    return facets


# (simplices that touch at one point or segment have a boundary that is pinched there)
BOUNDED = [
    n
    for n in LABELLED
    if not n.startswith(("2d", "moebius")) and "-at-one-" not in n and labelled(LABELLED[n])["nodes/edge"]
]


@pytest.mark.parametrize("name", BOUNDED)
def test_the_boundary_of_the_dual_is_the_dual_of_the_boundary(name):
    """Nodes and links are the vertices and edges of the boundary's own dual, by labels, signs included."""
    whole = labelled(LABELLED[name])
    boundary = labelled(boundary_by_labels(whole))
    assert boundary["counts"]["edges_external"] == 0
    assert boundary["counts"]["vertices"] == whole["counts"]["nodes"]
    assert boundary["counts"]["edges_internal"] == whole["counts"]["links"]
    assert boundary["vertices/component"] == whole["nodes/component"]

    def by_labels(ends, labels):
        out = {}
        for edge, (a, b) in enumerate(ends):
            out[labels(edge)] = (a, b)
        return out

    def edge_labels(edge):
        s, slot = boundary["edges/source"][edge]
        return tuple(x for c, x in enumerate(boundary["vertices/corners"][s]) if c != slot)

    ends = zip(boundary["edges/source"], boundary["edges/target"], strict=True)
    edges = by_labels([(a[0], b[0]) for a, b in ends], edge_labels)
    links = by_labels(
        zip(whole["links/source"], whole["links/target"], strict=True),
        lambda link: tuple(whole["links/corners"][link]),
    )
    if all(whole["flags"]["orientable"]):
        # the boundary's components are oriented from their first simplex; so are the nodes, up to that sign
        signs = {}
        for node, component in enumerate(whole["nodes/component"]):
            ratio = boundary["vertices/orientation"][node] * whole["nodes/orientation"][node]
            assert signs.setdefault(component, ratio) == ratio == 1
        assert edges == links
    else:
        assert {k: set(v) for k, v in edges.items()} == {k: set(v) for k, v in links.items()}


@pytest.mark.parametrize("name", [n for n in LABELLED if all(labelled(LABELLED[n])["flags"]["orientable"])])
def test_boundary_maps_of_the_dual_are_transposes_of_the_simplicial_ones(name):
    """Section 3: up to the signs of the top simplices (Munkres, Elements of Algebraic Topology, 1984)."""
    facets = LABELLED[name]
    s = labelled(facets)
    d1, d2 = boundary_maps(s)
    corners, orientation = s["vertices/corners"], s["vertices/orientation"]
    for (row, column), value in d1.items():
        if row[0] != "vertex":
            continue
        v, e = row[1], column[1]
        [slot] = [i for i, edge in enumerate(s["vertices/edge"][v]) if edge == e]
        assert value == -orientation[v] * (-1) ** slot
    for (row, f), value in d2.items():
        if row[0] == "edge":
            place = s["edges/face"][row[1]].index(f)
            assert value == (-1) ** place
    assert len(corners) == len(facets)


# --------------------------------------------------------------------------------------------------
# Invariance


@given(seeds)
def test_labels_orders_and_names_change_no_count(seed):
    name = random.Random(seed).choice(sorted(LABELLED))
    one, two = labelled(LABELLED[name]), labelled(shuffled(LABELLED[name], seed))
    for key in ("vertices", "edges_internal", "faces_internal", "links", "components"):
        assert one["counts"][key] == two["counts"][key]
    assert sorted(one["flags"]["orientable"]) == sorted(two["flags"]["orientable"])
    lengths = face_length_histogram(one, one["counts"])
    assert lengths == face_length_histogram(two, two["counts"])
    assert nx.is_isomorphic(boundary_multigraph(one), boundary_multigraph(two)) or len(one["nodes/edge"]) > 40


def test_first_simplex_of_every_component_has_the_parity_it_was_written_with():
    s = labelled(disjoint([[0, 1, 2, 3]], [[1, 0, 2, 3]], [[1, 2, 0, 3]]))
    assert s["vertices/orientation"] == [1, -1, 1]


def test_exchanging_two_labels_of_the_first_simplex_reverses_a_component():
    facets = around_ridge(4, 4)
    flipped = [[facets[0][1], facets[0][0], *facets[0][2:]], *facets[1:]]
    one, two = labelled(facets), labelled(flipped)
    assert [-x for x in one["vertices/orientation"]] == two["vertices/orientation"]
    assert one["edges/source"] == two["edges/target"]


def test_labelled_complex_equals_its_own_gluing_table():
    table = glue_by_labels(slab(sphere(3)))
    with_labels, without = reference_skeleton(table), reference_skeleton(unlabelled(table))
    assert {k for k in with_labels if k not in without} == {
        "vertices/corners",
        "nodes/corners",
        "links/corners",
    }
    assert all(without[k] == with_labels[k] for k in without)


def test_periodic_grid_by_labels_and_by_gluings_have_the_same_counts():
    one = reference_skeleton(kuhn_torus((3, 3, 3)), points=True)
    two = labelled(LABELLED["3d-torus"])
    assert one["counts"] == two["counts"]
    assert max(map(max, one["vertices/point"])) == max(map(max, two["vertices/point"])) == 26


# --------------------------------------------------------------------------------------------------
# One tetrahedron and its neighbour, by hand


def test_two_triangles_by_hand():
    """Triangles 012 and 123, glued along 12.  Slot i is opposite corner i; internal edge 0 crosses 12."""
    s = labelled([[0, 1, 2], [1, 2, 3]])
    # slot 0 of triangle 0 and slot 2 of triangle 1: sign(p) = (-1)^(0+2) = +1, so the second is negative
    assert s["vertices/orientation"] == [1, -1]
    assert s["edges/source"][0] == [0, 0] and s["edges/target"][0] == [1, 2]
    # external: (0,1) = edge 02 arrives, +1 * (-1)^1; (0,2) = 01 leaves; (1,0) = 23 arrives; (1,1) = 13 leaves
    assert s["edges/source"][1:] == [[-1, 0], [0, 2], [-1, 2], [1, 1]]
    assert s["edges/target"][1:] == [[0, 1], [-1, 1], [1, 0], [-1, 3]]
    assert s["nodes/orientation"] == [-1, 1, -1, 1]
    assert s["nodes/corners"] == [[0, 2], [0, 1], [2, 3], [1, 3]]
    # wedge 0 of triangle 0 is (0,1), at corner 2; it passes from slot 1 to slot 0, on to triangle 1
    assert s["wedges/direction"] == [[-1, 1, -1], [1, -1, 1]]
    # the faces: at corner 2 (wedge 0 of triangle 0), at corner 1, at corner 0, at corner 3
    assert s["links/corners"] == [[2], [1], [0], [3]]
    assert s["faces/edge"] == [1, 0, 3, 4, 0, 2, 2, 1, 3, 4]
    assert s["faces/vertex"] == [0, 1, 1, 0, 0, 1]


# --------------------------------------------------------------------------------------------------
# What is refused


@pytest.mark.parametrize("name", SINGULAR)
def test_singular_is_refused_or_recorded(name):
    facets, kind = SINGULAR[name]
    table = glue_by_labels(facets)
    with pytest.raises(Refused, match=kind):
        reference_skeleton(table)
    skeleton = reference_skeleton(table, keep_singular=True)
    assert skeleton["flags"]["singular"]
    assert len(skeleton["faces/singular"]) == len(skeleton["faces/against"])
    if kind == "pinched ridge":
        assert 2 in skeleton["faces/singular"]
    assert_boundary_of_boundary_is_zero(skeleton)


@pytest.mark.parametrize("name", HOLONOMY)
def test_holonomy_is_refused_or_recorded(name):
    with pytest.raises(Refused, match="holonomy"):
        reference_skeleton(HOLONOMY[name])
    skeleton = reference_skeleton(HOLONOMY[name], keep_singular=True)
    assert 1 in skeleton["faces/singular"] and skeleton["flags"]["singular"]
    assert_boundary_of_boundary_is_zero(skeleton)


@pytest.mark.parametrize("name", REFUSED)
def test_lists_without_a_dual_are_refused(name):
    facets, kind = REFUSED[name]
    with pytest.raises(Refused, match=kind):
        reference_skeleton(glue_by_labels(facets), keep_singular=True)


def broken(change):
    table = melon(3)
    change(table)
    return table


BROKEN = {
    "simplex too large": (lambda t: t.across[0].__setitem__(0, 2), "out of range"),
    "simplex too small": (lambda t: t.across[0].__setitem__(0, -2), "out of range"),
    "corner twice": (lambda t: t.carry[0].__setitem__(0, (0, 1, 1, 3)), "no permutation"),
    "corner too large": (lambda t: t.carry[0].__setitem__(0, (0, 1, 2, 4)), "no permutation"),
    "no way back": (lambda t: t.across[1].__setitem__(0, -1), "inverse"),
    "another way back": (lambda t: t.carry[1].__setitem__(0, (0, 2, 1, 3)), "inverse"),
    "facet on itself": (
        lambda t: (t.across[0].__setitem__(3, 0), t.carry[0].__setitem__(3, (1, 0, 2, 3))),
        "self-glued facet",
    ),
}


@pytest.mark.parametrize("name", BROKEN)
def test_tables_that_are_no_gluing_are_refused(name):
    change, kind = BROKEN[name]
    with pytest.raises(Refused, match=kind):
        check_table(broken(change))


@given(dimensions, seeds)
def test_no_ridge_folds_unless_a_facet_is_glued_to_itself(d, seed):
    """Reversing a walk is an involution that a fold would have to fix: at a wedge (i = j), or across a facet
    glued to itself.  So the first test of `check_table` already excludes every folded ridge."""
    rng = random.Random(seed)
    table = random_table(rng, d, rng.randint(1, 5), boundary=0.1)
    ridge_walks(table)  # raises at a fold


def test_a_facet_glued_to_itself_folds_a_ridge():
    across, carry = [[0, -1, -1, -1]], [[(0, 2, 1, 3), None, None, None]]
    table = Table(across, carry, [1])
    with pytest.raises(Refused, match="folded ridge"):
        ridge_walks(table)


def test_scrambling_keeps_counts():
    table = GLUED["tetrahedra_2_16"]
    assert reference_skeleton(scrambled(table, 5))["counts"] == reference_skeleton(table)["counts"]


def test_sign_of_counts_inversions():
    assert [sign_of(p) for p in ((0, 1, 2), (1, 0, 2), (1, 2, 0), (2, 1, 0))] == [1, -1, 1, -1]


def test_the_two_sides_of_a_move_fill_the_sphere():
    for d in (2, 3, 4):
        for k in range(1, d + 2):
            both = [*LABELLED.get(f"{d}d-side-{k}", [[*range(1, d + 2)]]), *other_side(d, k)]
            assert reference_skeleton(glue_by_labels(both))["counts"]["nodes"] == 0
