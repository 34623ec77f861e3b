"""The boundary of a triangulation as a triangulation of its own."""

from types import SimpleNamespace

import networkx as nx
import numpy as np
import pytest
from catalogue import CATALOGUE
from commandline import dualize as program
from damage import triangulation
from hypothesis import given
from specimens import (
    GLUED,
    around_ridge,
    delaunay,
    disjoint,
    kuhn_grid,
    melon,
    moebius_band,
    move_side,
    other_side,
    scrambled,
    simplex,
    slab,
    sphere,
    unlabelled,
)

import dualize
from dualize import Triangulation, kernels
from dualize.boundary import walk
from dualize.topology.gluing import gluing_of

BOUNDED = [n for n, e in CATALOGUE.items() if e.boundary]


def run(*arguments):
    """Status, standard output and standard error of the installed program."""
    done = program(*arguments, cwd="/")
    return SimpleNamespace(
        returncode=done.returncode, stdout=done.stdout.decode(), stderr=done.stderr.decode()
    )


def labelled(facets):
    return Triangulation.from_facets(facets)


@pytest.mark.parametrize("name", BOUNDED)
def test_boundary_has_the_published_counts(name):
    entry = CATALOGUE[name]
    skeleton = dualize.build(labelled(entry.facets).boundary(), points=True)
    points, segments = (int(skeleton[f"vertices/{x}"].max()) + 1 for x in ("point", "segment"))
    f = entry.boundary["f"]
    assert (points, segments, skeleton.counts["vertices"]) == (f[0], f[1], f[-1])
    assert skeleton.counts["components"] == entry.boundary["components"]
    assert all(skeleton.flags["orientable"]) is entry.boundary["orientable"]


@pytest.mark.parametrize("name", BOUNDED)
def test_boundary_of_a_boundary_is_empty(name):
    boundary = labelled(CATALOGUE[name].facets).boundary()
    assert not (boundary.across < 0).any()


def test_a_closed_triangulation_has_no_boundary():
    with pytest.raises(dualize.TriangulationError, match="closed: it has no boundary"):
        labelled(sphere(4)).boundary()


@pytest.mark.parametrize("d", [3, 4])
@pytest.mark.parametrize("k", [1, 2, 3])
def test_both_sides_of_a_move_have_one_boundary(d, k):
    """U. Pachner, European J. Combin. 12 (1991) 129-145 (from memory)."""
    one, two = (labelled(f).boundary() for f in (move_side(d, k), other_side(d, k)))
    assert {frozenset(r) for r in one.corners.tolist()} == {frozenset(r) for r in two.corners.tolist()}


@pytest.mark.parametrize(
    "facets",
    [simplex(4), slab(sphere(3)), kuhn_grid((2, 1, 1)), kuhn_grid((1, 1, 1, 1))],
    ids=["one", "slab", "3D", "4D"],
)
def test_building_the_boundary_gives_the_induced_orientation(facets):
    """From the skeleton as well, and from the facets in the order in which they are written to a file."""
    skeleton = dualize.build(labelled(facets))
    for boundary in (labelled(facets).boundary(), gluing_of(skeleton).boundary()):
        rows = boundary.corners.copy()
        rows[boundary.written < 0, -2:] = rows[boundary.written < 0, -2:][:, ::-1]
        for t in (boundary, labelled(rows)):
            found = dualize.build(t)["vertices/orientation"]
            assert np.array_equal(found, skeleton["nodes/orientation"])


def test_the_induced_orientation_of_a_tetrahedron_is_that_of_its_boundary_map():
    """d [0 1 2 3] = [1 2 3] - [0 2 3] + [0 1 3] - [0 1 2] (J. R. Munkres, Elements of Algebraic Topology,
    1984, section 5)."""
    boundary = labelled([[0, 1, 2, 3]]).boundary()
    signs = {
        tuple(row): s for row, s in zip(boundary.corners.tolist(), boundary.written.tolist(), strict=True)
    }
    assert signs == {(1, 2, 3): 1, (0, 2, 3): -1, (0, 1, 3): 1, (0, 1, 2): -1}


@pytest.mark.parametrize("component", [0, 1])
def test_one_component_keeps_the_order_of_its_nodes(component):
    t = labelled(slab(sphere(3)))
    skeleton = dualize.build(t)
    part = t.boundary(component)
    chosen = skeleton["nodes/corners"][skeleton["nodes/component"] == component]
    assert np.array_equal(part.corners, chosen)


def test_a_component_that_is_not_there_is_refused():
    with pytest.raises(dualize.InputError, match="no boundary component 2"):
        labelled(slab(sphere(3))).boundary(2)


def test_surfaces_have_circles_for_boundaries():
    with pytest.raises(dualize.InputError, match="set of circles"):
        labelled(moebius_band()).boundary()


@pytest.mark.parametrize("name", sorted(GLUED))
@pytest.mark.parametrize("seed", [0, 1])
def test_walks_agree_with_the_foam(name, seed):
    """Nodes, links, places, orientations, directions and twists of the foam from walks around the ridges."""
    t = triangulation(scrambled(GLUED[name], seed))
    s, w, d = dualize.build(t), walk(t), t.dimension
    link = s["nodes/link"]
    assert np.array_equal(w.vertex, s["nodes/vertex"]) and np.array_equal(w.slot, s["nodes/slot"])
    assert np.array_equal(w.orientation, s["nodes/orientation"])
    assert np.array_equal(w.component, s["nodes/component"])
    assert np.array_equal(link[w.there, w.place_there], link)
    assert np.array_equal(s["links/twist"][link], w.twist)
    rule = w.orientation[:, None] * (1 - 2 * (np.arange(d) % 2)) * w.ridge_sign * (1 - 2 * w.bent)
    assert np.array_equal(rule, s["nodes/link_leaves"])


@pytest.mark.parametrize("facets", [around_ridge(4, 5), kuhn_grid((2, 1, 1))], ids=["4D", "3D"])
def test_walks_are_the_same_compiled_and_interpreted(facets):
    t = labelled(facets)
    found = []
    for way in ("interpreted", "compiled"):
        with kernels.mode(way):
            found.append(walk(t, threads=2))
    assert all(np.array_equal(x, y) for x, y in zip(*found, strict=True))


@given(delaunay(d=3))
def test_matching_labels_leads_where_walking_leads(facets):
    t = labelled(facets)
    boundary, w = t.boundary(), walk(t)
    assert boundary.matched
    assert np.array_equal(boundary.across, w.there)
    assert np.array_equal(boundary.rank, w.rank)


def test_the_boundary_of_a_gluing_is_a_gluing():
    """Two tetrahedra with three common facets: a sphere of two triangles (counted by hand)."""
    boundary = triangulation(melon(3)).boundary()
    assert boundary.corners is None
    assert boundary.across.tolist() == [[1, 1, 1], [0, 0, 0]]


def test_charts_follow_the_facets():
    points = np.arange(12.0).reshape(4, 3)
    t = Triangulation.from_facets(simplex(3), coordinates=dualize.Coordinates(corner=points[None]))
    boundary = t.boundary()
    assert np.array_equal(boundary.coordinates.corner, points[boundary.corners])


# --------------------------------------------------------------------------------------------------
# The command line


def test_the_verb_writes_facets_with_the_induced_orientation(tmp_path):
    mesh, out = tmp_path / "mesh.txt", tmp_path / "boundary.txt"
    np.savetxt(mesh, kuhn_grid((2, 1, 1)), fmt="%d")
    assert run("boundary", mesh, "-o", out).returncode == 0
    induced = dualize.build(dualize.read(mesh))["nodes/orientation"]
    assert np.array_equal(dualize.build(dualize.read(out))["vertices/orientation"], induced)
    assert np.array_equal(dualize.read(out).written, induced)


def test_the_verb_takes_skeletons_and_one_component(tmp_path):
    mesh, foam, out = (tmp_path / name for name in ("mesh.txt", "foam.json", "part.txt"))
    np.savetxt(mesh, disjoint(sphere(3), slab(sphere(2))), fmt="%d")
    run("build", mesh, "-o", foam)
    assert run("boundary", foam, "--component", 1, "-o", out).returncode == 0
    assert len(dualize.read(out)) == 4


@pytest.mark.parametrize("kind", ["graphml", "node-link"])
def test_the_verb_writes_the_graph_with_orders_and_directions(tmp_path, kind):
    mesh, out = tmp_path / "mesh.txt", tmp_path / "graph"
    np.savetxt(mesh, slab(sphere(3)), fmt="%d")
    assert run("boundary", mesh, "--graph", kind, "--component", 0, "-o", out).returncode == 0
    graph = dualize.read_export(out, kind)
    whole = dualize.build(dualize.read(mesh)).boundary_graph()
    part = next(iter(nx.weakly_connected_components(whole)))
    assert set(graph) == part
    assert nx.utils.graphs_equal(nx.MultiDiGraph(graph), nx.MultiDiGraph(whole.subgraph(part)))


def test_a_graphml_file_holds_the_graph(tmp_path):
    mesh, out = tmp_path / "mesh.txt", tmp_path / "graph.graphml"
    np.savetxt(mesh, slab(sphere(3)), fmt="%d")
    done = run("boundary", mesh, "-o", out)
    assert done.returncode == 0, done.stderr
    whole = dualize.build(dualize.read(mesh)).boundary_graph()
    assert nx.utils.graphs_equal(nx.MultiDiGraph(dualize.read_export(out, "graphml")), nx.MultiDiGraph(whole))


@pytest.mark.parametrize(
    "facets, options, message",
    [
        (sphere(3), [], "error: the triangulation is closed: it has no boundary"),
        (sphere(3), ["--graph", "graphml"], "error: the triangulation is closed: it has no boundary"),
        (simplex(3), ["--component", "1"], "error: there is no boundary component 1"),
        (moebius_band(), [], "error: the boundary of a surface is a set of circles"),
    ],
    ids=["closed", "closed graph", "component", "surface"],
)
def test_the_verb_refuses_what_has_no_boundary(tmp_path, facets, options, message):
    mesh, out = tmp_path / "mesh.txt", tmp_path / "out.txt"
    np.savetxt(mesh, facets, fmt="%d")
    done = run("boundary", mesh, "-o", out, *options)
    assert done.returncode == 2
    assert done.stderr.startswith(message)
    assert not out.exists()


def test_unlabelled_boundaries_are_written_as_gluing_tables(tmp_path):
    foam, out = tmp_path / "foam.json", tmp_path / "boundary.json"
    dualize.build(triangulation(unlabelled(melon(4)))).write(foam)
    assert run("boundary", foam, "-o", out).returncode == 0
    assert dualize.read(out).across.tolist() == [[1, 1, 1, 1], [0, 0, 0, 0]]
