"""Maps that identify boundaries and foams, against networkx and known groups."""

import json
from types import SimpleNamespace

import networkx as nx
import numpy as np
import pytest
from catalogue import CATALOGUE
from commandline import dualize as program
from damage import triangulation
from reference import glue_by_labels
from specimens import (
    around_ridge,
    disjoint,
    kuhn_torus,
    melon,
    moebius_band,
    move_side,
    other_side,
    scrambled,
    shuffled,
    simplex,
    slab,
    sphere,
    twisted_solid_torus,
    unlabelled,
)

import dualize
from dualize import Triangulation
from dualize.match import boundary_map, match


def run(*arguments):
    """Status, standard output and standard error of the installed program."""
    done = program(*arguments, cwd="/")
    return SimpleNamespace(
        returncode=done.returncode, stdout=done.stdout.decode(), stderr=done.stderr.decode()
    )


def built(facets):
    return dualize.build(Triangulation.from_facets(facets))


def assert_maps(a, b, m):
    """A map takes ends of links to ends of links, with the signs it states."""
    assert sorted(m.nodes.tolist()) == list(range(len(m.nodes)))
    assert sorted(m.links.tolist()) == list(range(len(m.links)))
    for n, y in enumerate(m.nodes.tolist()):
        for k, place in enumerate(m.places[n].tolist()):
            link = a["nodes/link"][n, k]
            assert b["nodes/link"][y, place] == m.links[link]
            leaves = a["nodes/link_leaves"][n, k] * m.link_sign[link]
            assert b["nodes/link_leaves"][y, place] == leaves
    if m.vertices is None:
        return
    for v, y in enumerate(m.vertices.tolist()):
        for i, corner in enumerate(m.corners[v].tolist()):
            edge = a["vertices/edge"][v, i]
            assert b["vertices/edge"][y, corner] == m.edges[edge]
            assert b["vertices/leaves"][y, corner] == a["vertices/leaves"][v, i] * m.edge_sign[edge]
    for f in range(len(m.faces)):
        edges, signs = faces_edges(a, f)
        mapped = sorted(
            zip(m.edges[edges].tolist(), (signs * m.edge_sign[edges] * m.face_sign[f]).tolist(), strict=True)
        )
        assert mapped == sorted(zip(*(x.tolist() for x in faces_edges(b, m.faces[f])), strict=True))


def faces_edges(s, f):
    begin, end = s["faces/edge_offsets"][f : f + 2]
    return s["faces/edge"][begin:end], s["faces/edge_sign"][begin:end]


def automorphisms(graph):
    """Number of automorphisms of a simple graph, by networkx."""
    return sum(1 for _ in nx.algorithms.isomorphism.GraphMatcher(graph, graph).isomorphisms_iter())


# --------------------------------------------------------------------------------------------------
# Labels


@pytest.mark.parametrize("d", [2, 3, 4])
@pytest.mark.parametrize("k", [1, 2])
def test_both_sides_of_a_move_match_by_labels(d, k):
    """U. Pachner, European J. Combin. 12 (1991) 129-145 (from memory)."""
    a, b = built(move_side(d, k)), built(other_side(d, k))
    (m,) = match(a, b)
    assert m.by == "labels"
    assert np.array_equal(a["nodes/corners"], b["nodes/corners"][m.nodes])
    assert np.array_equal(a["links/corners"], b["links/corners"][m.links])
    assert abs(int(m.node_sign.sum())) == len(m.nodes)
    assert_maps(a, b, m)


def test_words_match_as_words():
    a = built([["a", "b", "c", "d"]])
    b = built([["b", "a", "c", "d"], ["z", "y", "x", "w"]])
    assert match(a, b, by="labels") == []
    (m,) = match(a, built([["d", "a", "c", "b"]]))
    assert m.by == "labels"
    assert m.node_sign.tolist() == [1, 1, 1, 1]  # the two orders differ by an even permutation


def test_labels_are_asked_for_and_not_there():
    with pytest.raises(dualize.InputError, match="no labels"):
        match(built(simplex(3)), dualize.build(triangulation(melon(3))), by="labels")


def test_foams_of_two_dimensions_do_not_match():
    with pytest.raises(dualize.InputError, match="dimensions 3 and 4"):
        match(built(simplex(3)), built(simplex(4)))


# --------------------------------------------------------------------------------------------------
# Isomorphism


@pytest.mark.parametrize(
    "facets",
    [
        simplex(3),
        simplex(4),
        move_side(4, 2),
        move_side(4, 3),
        move_side(3, 2),
        around_ridge(4, 4),
        around_ridge(3, 5),
    ],
    ids=["K4", "K5", "K2xK4", "K3xK3", "prism", "K3xC4", "K2xC5"],
)
def test_maps_number_as_the_automorphisms_of_the_graph(facets):
    """The dual graph of the boundary of a simplicial polytope determines it (R. Blind, P. Mani-Levitska,
    Aequationes Math. 34 (1987) 287-297, from memory): its automorphisms are those networkx counts."""
    s = built(facets)
    graph = nx.Graph(s.boundary_graph().to_undirected())
    found = match(s, s, by="isomorphism", limit=10**6)
    assert len(found) == automorphisms(graph)
    assert len({(*m.nodes.tolist(), *m.places.ravel().tolist()) for m in found}) == len(found)
    for m in found[:20]:
        assert_maps(s, s, m)


@pytest.mark.parametrize(
    "name",
    ["cp2_9", "rp3_11", "torus_7", "klein_s2_s1_twisted_9", "s2_x_s1_10", "susp_rp3_13", "solid_torus_7"],
)
def test_maps_of_the_whole_number_as_the_published_automorphisms(name):
    entry = CATALOGUE[name]
    s = built(entry.facets)
    found = match(s, s, whole=True, by="isomorphism", limit=10**6)
    assert len(found) == entry.automorphisms
    assert_maps(s, s, found[-1])


def test_orientation_reversing_maps_say_so():
    """Half of the 120 permutations of the corners of a 4-simplex are odd."""
    s = built(simplex(4))
    signs = [int(m.vertex_sign[0]) for m in match(s, s, whole=True, by="isomorphism", limit=1000)]
    assert (signs.count(1), signs.count(-1)) == (60, 60)


def test_no_map_reverses_the_complex_projective_plane():
    """Its signature is 1, so no map reverses its orientation (common practice)."""
    s = built(CATALOGUE["cp2_9"].facets)
    assert {int(x) for m in match(s, s, whole=True, by="isomorphism", limit=99) for x in m.vertex_sign} == {1}


@pytest.mark.parametrize("seed", range(3))
@pytest.mark.parametrize(
    "facets",
    [slab(sphere(3)), twisted_solid_torus(4, 9), moebius_band(), disjoint(simplex(3), move_side(3, 2))],
    ids=["slab", "twisted ball bundle", "band", "two parts"],
)
def test_another_order_and_other_names_are_found_again(facets, seed):
    a, b = built(facets), built(shuffled(facets, seed))
    for whole in (False, True):
        (m,) = match(a, b, whole=whole)
        assert m.by == "isomorphism"
        assert_maps(a, b, m)


@pytest.mark.parametrize("seed", range(3))
def test_scrambled_gluings_are_found_again(seed):
    for table in (melon(4), kuhn_torus((1, 2, 1)), unlabelled(glue_by_labels(slab(sphere(2))))):
        a, b = dualize.build(triangulation(table)), dualize.build(triangulation(scrambled(table, seed)))
        (m,) = match(a, b, whole=True)
        assert_maps(a, b, m)


def test_different_boundaries_do_not_match():
    assert match(built(around_ridge(4, 4)), built(around_ridge(4, 5))) == []
    assert match(built(simplex(4)), built(move_side(4, 4)), by="isomorphism") == []


def test_limit_bounds_the_number_of_maps():
    s = built(simplex(4))
    assert [len(match(s, s, by="isomorphism", limit=n)) for n in (1, 7, 120, 500)] == [1, 7, 120, 120]


# --------------------------------------------------------------------------------------------------
# Maps that are given


def given_map(recipe, change):
    """The boundary of a recipe mapped to itself: nodes and places of the identity, after `change`."""
    foam = dualize.build(dualize.make.evaluate(recipe))
    count = len(foam["nodes/edge"])
    nodes, places = np.arange(count), np.tile(np.arange(foam.dimension), (count, 1))
    change(nodes, places)
    return boundary_map(foam, foam, nodes, places)


def test_the_identity_is_a_map():
    found = given_map("shared-pair(4)", lambda nodes, places: None)
    assert (found.links.tolist(), found.node_sign.tolist()) == ([0, 1, 2, 3], [1, 1])


def swap_places(nodes, places):
    places[1, :2] = 1, 0


def swap_nodes(nodes, places):
    nodes[[0, -1]] = nodes[[-1, 0]]


@pytest.mark.parametrize(
    "recipe, change",
    # the melon: both nodes keep their neighbours, at other places; two melons: at the same places, others
    [("shared-pair(4)", swap_places), ("dipole-slab(1)", swap_nodes)],
    ids=["places", "neighbours"],
)
def test_a_rearrangement_that_tears_links_is_no_map(recipe, change):
    with pytest.raises(dualize.InputError, match="does not carry links to links"):
        given_map(recipe, change)


# --------------------------------------------------------------------------------------------------
# The command line


@pytest.fixture
def meshes(tmp_path):
    for name, facets in (("two", move_side(4, 2)), ("four", other_side(4, 2)), ("one", simplex(4))):
        np.savetxt(tmp_path / f"{name}.txt", facets, fmt="%d")
    return tmp_path


def test_the_verb_prints_a_table(meshes):
    done = run("match", meshes / "two.txt", meshes / "four.txt")
    assert done.returncode == 0
    lines = done.stdout.splitlines()
    assert lines[0] == "map 0, by labels"
    assert sum(line.startswith("node ") for line in lines) == 8
    assert sum(line.startswith("link ") for line in lines) == 16


def test_the_verb_prints_json(meshes):
    done = run("match", meshes / "one.txt", meshes / "one.txt", "--by", "isomorphism", "--all", 5, "--json")
    maps = json.loads(done.stdout)["maps"]
    assert len(maps) == 5
    assert maps[0]["nodes"] == [0, 1, 2, 3, 4]


def test_the_verb_ends_with_1_where_there_is_no_map(meshes):
    done = run("match", meshes / "one.txt", meshes / "two.txt")
    assert (done.returncode, done.stdout) == (1, "")
    assert done.stderr == "no map identifies the boundaries\n"
