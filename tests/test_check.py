"""What `Skeleton.validate` notices: a corruption for every rule, and good skeletons of all kinds."""

import re

import numpy as np
import pytest
from damage import (
    by_reference,
    cut_ring,
    remade,
    renumbered,
    reversed_edge,
    reversed_face,
    specimen,
    triangulation,
    turned_ring,
    unlabelled_table,
    with_entry,
    without,
)
from hypothesis import given
from reference import (
    Refused,
    assert_boundary_of_boundary_is_zero,
    check_table,
    glue_by_labels,
    reference_skeleton,
)
from specimens import (
    GLUED,
    HOLONOMY,
    LABELLED,
    SINGULAR,
    kuhn_grid,
    moebius_band,
    scrambled,
    simplex,
    sphere,
    tables,
)

import dualize
from dualize import SkeletonError, kernels
from dualize.check import RULES, check_skeleton
from dualize.kernels import checks
from dualize.skeleton import Skeleton

# --------------------------------------------------------------------------------------------------
# Good skeletons


@pytest.mark.parametrize("kind", ["interpreted", "compiled"])
@pytest.mark.parametrize("name", LABELLED)
def test_labelled_specimen_passes(name, kind):
    with kernels.mode(kind):
        check_skeleton(dualize.build(dualize.Triangulation.from_facets(LABELLED[name]), points=True))
        table = scrambled(glue_by_labels(LABELLED[name]), seed=3)
        check_skeleton(dualize.build(triangulation(table), keep_singular=True, points=True))


@pytest.mark.parametrize("kind", ["interpreted", "compiled"])
@pytest.mark.parametrize("name", [*GLUED, *HOLONOMY])
def test_gluing_table_passes(name, kind):
    table = {**GLUED, **HOLONOMY}[name]
    with kernels.mode(kind):
        for glued in (table, scrambled(table, seed=1)):
            check_skeleton(dualize.build(triangulation(glued), keep_singular=True, points=True))


@pytest.mark.parametrize("name", SINGULAR)
def test_singular_complex_that_was_kept_passes(name):
    made = dualize.Triangulation.from_facets(SINGULAR[name][0])
    check_skeleton(dualize.build(made, keep_singular=True, points=True))


@pytest.mark.parametrize("name", [*LABELLED, *SINGULAR])
def test_skeleton_written_by_the_slow_reference_passes(name):
    facets = LABELLED[name] if name in LABELLED else SINGULAR[name][0]
    check_skeleton(by_reference(glue_by_labels(facets), keep_singular=True, points=True))


@given(tables())
def test_random_gluing_tables_pass(table):
    try:
        check_table(table)
    except Refused:
        return
    check_skeleton(dualize.build(triangulation(table), keep_singular=True, points=True))


@pytest.mark.parametrize("threads", [1, 2, 7])
def test_number_of_threads_changes_nothing(threads):
    skeleton = dualize.build(dualize.Triangulation.from_facets(kuhn_grid((7, 7, 7))))
    with kernels.mode("compiled"):
        check_skeleton(skeleton, threads=threads)
        broken = with_entry(skeleton, "faces/against", 2500, 1 - skeleton["faces/against"][2500])
        broken = with_entry(broken, "faces/against", 700, 1 - skeleton["faces/against"][700])
        with pytest.raises(SkeletonError, match=r"faces/against\[700\]"):
            check_skeleton(broken, threads=threads)


def test_validate_is_this_check():
    skeleton = specimen("bounded 4D")
    skeleton.validate()
    with pytest.raises(SkeletonError, match=r"edges/twist\[3\]"):
        with_entry(skeleton, "edges/twist", 3, 1).validate()


# --------------------------------------------------------------------------------------------------
# One corruption for every rule of the kernels


def first(condition):
    return int(np.flatnonzero(condition)[0])


def internal(skeleton):
    return np.arange(len(skeleton["edges/twist"])) < skeleton.counts["edges_internal"]


def smallest_is_source(skeleton):
    """Whether an internal edge's source is its smallest half-edge."""
    one, two = skeleton["edges/source"], skeleton["edges/target"]
    k = skeleton.dimension + 1
    return internal(skeleton) & (one[:, 0] * k + one[:, 1] < two[:, 0] * k + two[:, 1])


def swap_corners(skeleton, end, edge):
    table = f"edges/{end}_corner"
    row = skeleton[table][edge].copy()
    row[[0, 1]] = row[[1, 0]]
    return with_entry(skeleton, table, edge, row)


def toggled(skeleton, table, index):
    """A sign or a bit changed."""
    value = skeleton[table][index]
    return with_entry(skeleton, table, index, value ^ 1 if table.endswith(("twist", "against")) else -value)


def other(skeleton, table, index):
    """An id, a place or a wedge changed to 0, or from 0 to 1."""
    return with_entry(skeleton, table, index, 0 if skeleton[table][index] else 1)


def moved_border(skeleton, face, by):
    """A face's list of visits ends `by` later or earlier, at the expense of the next face."""
    arrays = {}
    for name in ("faces/vertex_offsets", "faces/edge_offsets"):
        arrays[name] = skeleton[name].copy()
        arrays[name][face + 1] += by
    return remade(skeleton, arrays)


def long_chain(skeleton):
    """An external face that visits two vertices or more, and the first of its visits."""
    lengths = np.diff(skeleton["faces/vertex_offsets"])
    face = first((lengths > 1) & (np.arange(len(lengths)) >= skeleton.counts["faces_internal"]))
    return face, int(skeleton["faces/vertex_offsets"][face])


def wedge_at(skeleton, visit):
    return int(skeleton["faces/vertex"][visit]), int(skeleton["faces/wedge"][visit])


bounded = lambda: specimen("bounded 4D")  # noqa: E731
closed = lambda: specimen("closed orientable 4D")  # noqa: E731
moebius = lambda: specimen("moebius band")  # noqa: E731


def external_from(end):
    """The first external edge of the bounded specimen whose `end` is a node."""
    return first(bounded()[f"edges/{end}"][:, 0] < 0)


BROKEN = {
    "SOURCE_IS_NODE": lambda: with_entry(bounded(), "edges/source", 0, (-1, 0)),
    "TARGET_IS_NODE": lambda: with_entry(bounded(), "edges/target", 0, (-1, 0)),
    "TARGET_IS_SOURCE": lambda: with_entry(bounded(), "edges/target", 0, bounded()["edges/source"][0]),
    "TARGET_NOT_NODE": lambda: with_entry(bounded(), "edges/target", external_from("target"), (0, 0)),
    "SOURCE_NODE": lambda: other(bounded(), "edges/source", (external_from("source"), 1)),
    "TARGET_NODE": lambda: other(bounded(), "edges/target", (external_from("target"), 1)),
    "EDGE_AT_SOURCE": lambda: other(bounded(), "vertices/edge", tuple(bounded()["edges/source"][0])),
    "LEAVES_AT_SOURCE": lambda: toggled(bounded(), "vertices/leaves", tuple(bounded()["edges/source"][0])),
    "EDGE_AT_TARGET": lambda: other(bounded(), "vertices/edge", tuple(bounded()["edges/target"][0])),
    "LEAVES_AT_TARGET": lambda: toggled(bounded(), "vertices/leaves", tuple(bounded()["edges/target"][0])),
    "SOURCE_CORNER_NODE": lambda: with_entry(
        bounded(), "edges/source_corner", (external_from("source"), 2), 0
    ),
    "TARGET_CORNER_NODE": lambda: with_entry(
        bounded(), "edges/target_corner", (external_from("target"), 2), 0
    ),
    "SOURCE_CORNERS": lambda: with_entry(
        bounded(), "edges/source_corner", (0, 0), bounded()["edges/source_corner"][0, 1]
    ),
    "TARGET_CORNERS": lambda: with_entry(
        bounded(), "edges/target_corner", (0, 0), bounded()["edges/target"][0, 1]
    ),
    "SOURCE_CORNER_ORDER": lambda: swap_corners(closed(), "source", first(smallest_is_source(closed()))),
    "TARGET_CORNER_ORDER": lambda: swap_corners(closed(), "target", first(~smallest_is_source(closed()))),
    "TWIST": lambda: toggled(moebius(), "edges/twist", first(moebius()["edges/twist"])),
    "SOURCE_ARRIVES": lambda: reversed_edge(bounded(), 0),
    "TARGET_LEAVES": lambda: reversed_edge(bounded(), external_from("target")),
    "TWISTED_SOURCE": lambda: reversed_edge(moebius(), first(moebius()["edges/twist"])),
    "FACE_VERTEX": lambda: other(closed(), "faces/vertex", 1),
    "FACE_WEDGE": lambda: other(closed(), "faces/wedge", 1),
    "WEDGE_DIRECTION": lambda: toggled(closed(), "wedges/direction", wedge_at(closed(), 1)),
    "WEDGE_FACE": lambda: other(closed(), "wedges/face", wedge_at(closed(), 1)),
    "FACE_START": lambda: toggled(
        bounded(), "wedges/direction", wedge_at(bounded(), long_chain(bounded())[1])
    ),
    "FACE_EDGE": lambda: other(closed(), "faces/edge", 7),
    "FACE_EDGE_SIGN": lambda: toggled(closed(), "faces/edge_sign", 7),
    "FACE_PLACE": lambda: other(closed(), "faces/place", 7),
    "EDGE_FACE": lambda: other(closed(), "edges/face", (3, 1)),
    "EDGE_FACE_SIGN": lambda: toggled(closed(), "edges/face_sign", (3, 1)),
    "FACE_ENDS_INSIDE": lambda: moved_border(bounded(), long_chain(bounded())[0], 1),
    "FACE_GOES_ON": lambda: moved_border(bounded(), long_chain(bounded())[0], -1),
    "FACE_NOT_FIRST": lambda: turned_ring(closed(), 4),
    "DIRECTION_RULE": lambda: reversed_face(closed(), 4),
    "AGAINST": lambda: toggled(closed(), "faces/against", 4),
    "TARGET_LABEL": lambda: with_entry(closed(), "vertices/corners", (2, 3), 77),
    "NODE_LABEL": lambda: with_entry(bounded(), "nodes/corners", (2, 3), 77),
}
NUMBERS = {name: value for name, value in vars(checks).items() if name.isupper()}


def test_every_rule_has_its_words_and_a_corruption():
    assert set(RULES) == set(NUMBERS.values())
    assert set(BROKEN) == set(NUMBERS)


@pytest.mark.parametrize("kind", ["interpreted", "compiled"])
@pytest.mark.parametrize("name", BROKEN)
def test_broken_rule_is_named(name, kind):
    table, why = RULES[NUMBERS[name]]
    message = re.escape(why).replace(re.escape("{wanted}"), r"-?\d+")
    with kernels.mode(kind), pytest.raises(SkeletonError, match=message) as caught:
        check_skeleton(BROKEN[name]())
    assert re.fullmatch(rf"{table}\[\d+(, \d+)?\]", caught.value.where)
    assert caught.value.hint


@pytest.mark.parametrize("name", ["closed orientable 4D", "bounded 3D", "moebius band", "several components"])
def test_face_listed_against_its_direction_in_every_table_is_noticed(name):
    skeleton = specimen(name)
    for face in range(0, skeleton.counts["faces_internal"] + skeleton.counts["faces_external"], 5):
        with pytest.raises(SkeletonError, match="at a face's smallest wedge the orientation makes it"):
            check_skeleton(reversed_face(skeleton, face))


# --------------------------------------------------------------------------------------------------
# Rules that hold for tables as a whole


def flipped_orientation(facets, vertices):
    """The skeleton by the reference if the orientation of some vertices had been chosen the other way."""
    table = unlabelled_table(facets)
    orientation = reference_skeleton(table)["vertices/orientation"]
    return by_reference(table, [-x if s in vertices else x for s, x in enumerate(orientation)])


def swapped_components(skeleton):
    """Components 0 and 1 exchange their numbers."""
    part = skeleton["vertices/component"]
    new = np.where(part == 0, 1, np.where(part == 1, 0, part)).astype(part.dtype)
    orientable = list(skeleton.flags["orientable"])
    orientable[:2] = orientable[1::-1]
    return remade(skeleton, {"vertices/component": new}, flags={"orientable": orientable})


def merged_components(skeleton):
    """Two components pass for one."""
    part = np.maximum(skeleton["vertices/component"] - 1, 0).astype(np.int32)
    return remade(
        skeleton,
        {"vertices/component": part},
        counts={"components": skeleton.counts["components"] - 1},
        flags={"orientable": list(skeleton.flags["orientable"])[1:]},
    )


def swapped_ends_of_link(skeleton, link):
    leaves = skeleton["nodes/link_leaves"].copy()
    leaves[skeleton["nodes/link"] == link] *= -1
    source, target = skeleton["links/source"].copy(), skeleton["links/target"].copy()
    source[link], target[link] = target[link], source[link]
    return remade(skeleton, {"nodes/link_leaves": leaves, "links/source": source, "links/target": target})


def signs_of_step(skeleton, step):
    """The sign of a face on an edge changed in both tables that hold it."""
    edge, place = skeleton["faces/edge"][step], skeleton["faces/place"][step]
    return toggled(toggled(skeleton, "faces/edge_sign", step), "edges/face_sign", (edge, place))


def same_length(skeleton):
    """Two neighbouring internal faces of one length."""
    lengths = np.diff(skeleton["faces/vertex_offsets"])[: skeleton.counts["faces_internal"]]
    return first(lengths[1:] == lengths[:-1])


def swapped_faces(skeleton, face):
    return renumbered(skeleton, "face", face, face + 1)


def swapped_external_faces(skeleton):
    """Two neighbouring external faces of one length and their links."""
    inner = skeleton.counts["faces_internal"]
    lengths = np.diff(skeleton["faces/vertex_offsets"])[inner:]
    link = first(lengths[1:] == lengths[:-1])
    swapped = renumbered(swapped_faces(skeleton, inner + link), "link", link, link + 1)
    return remade(swapped, {"links/face": skeleton["links/face"]})


def swapped_external_edges(skeleton):
    inner = skeleton.counts["edges_internal"]
    swapped = renumbered(renumbered(skeleton, "edge", inner, inner + 1), "node", 0, 1)
    return remade(swapped, {"nodes/edge": skeleton["nodes/edge"]})


def one_vertex():
    """A closed skeleton with one vertex, so that its rings come back to it by other wedges."""
    return dualize.build(triangulation(GLUED["tetrahedra_1_2"]))


parts = lambda: specimen("several components")  # noqa: E731
pinched = lambda: specimen("pinched")  # noqa: E731
WHOLE = {
    "internal edges out of order": (
        lambda: renumbered(closed(), "edge", 2, 3),
        r"edges/(source|target)\[3, 0\]",
        "internal edges are numbered by smallest half-edges",
    ),
    "external edges out of order": (
        lambda: swapped_external_edges(bounded()),
        r"edges/(source|target)\[\d+, 0\]",
        "external edges are numbered by smallest half-edges",
    ),
    "internal faces out of order": (
        lambda: swapped_faces(closed(), same_length(closed())),
        r"faces/vertex\[\d+\]",
        "internal faces are numbered by smallest wedges",
    ),
    "external faces out of order": (
        lambda: swapped_external_faces(bounded()),
        r"faces/vertex\[\d+\]",
        "external faces are numbered by smallest wedges",
    ),
    "components out of order": (
        lambda: swapped_components(parts()),
        r"vertices/component\[0\]",
        "into component 0, counted by smallest vertices",
    ),
    "two components as one": (
        lambda: merged_components(parts()),
        r"vertices/component\[\d+\]",
        "into component 1, counted by smallest vertices",
    ),
    "orientation not spread breadth first": (
        lambda: flipped_orientation(moebius_band(), {2}),
        r"edges/twist\[\d+\]",
        "the orientation is spread over this edge",
    ),
    "orientable complex with a twist": (
        lambda: flipped_orientation(sphere(3), {1, 3}),
        r"edges/twist\[\d+\]",
        "the orientation is spread over this edge",
    ),
    "orientable flag": (
        lambda: remade(moebius(), flags={"orientable": [True]}),
        r"flags/orientable\[0\]",
        "the component has a twisted edge",
    ),
    "not orientable flag": (
        lambda: remade(closed(), flags={"orientable": [False]}),
        r"flags/orientable\[0\]",
        "the component has no twisted edge",
    ),
    "ordered flag": (
        lambda: remade(closed(), flags={"ordered": False}),
        "flags/ordered",
        "the corners ascend at both ends of every edge",
    ),
    "not ordered flag": (
        lambda: remade(specimen("table with scrambled corners"), flags={"ordered": True}),
        "flags/ordered",
        r"the corners of edge \d+ do not ascend",
    ),
    "sign of a face on an edge, in both tables": (
        lambda: signs_of_step(closed(), 5),
        r"faces/edge_sign\[5\]",
        "passes the edge with sign",
    ),
    "a link the other way, in every table": (
        lambda: swapped_ends_of_link(bounded(), 2),
        r"links/source\[2\]",
        "the external face ends at node",
    ),
    "external edge between two nodes": (
        lambda: with_entry(
            with_entry(bounded(), "edges/source", external_from("target"), (-1, 0)),
            "edges/target",
            external_from("target"),
            (-1, 0),
        ),
        r"edges/target\[\d+, 0\]",
        "only one end of an external edge is a node",
    ),
    "place where the face leaves the edge's target": (
        lambda: other(closed(), "faces/place", first(closed()["faces/edge_sign"] < 0)),
        r"faces/place\[\d+\]",
        "at the place of the vertex's corner",
    ),
    "place where the face leaves the edge's source": (
        lambda: other(closed(), "faces/place", first(closed()["faces/edge_sign"] > 0)),
        r"faces/place\[\d+\]",
        "at the place of the vertex's corner",
    ),
    "one ring as two faces": (
        lambda: cut_ring(closed(), 4, 2),
        r"faces/vertex\[12\]",
        "the edge before leads to vertex",
    ),
    "one ring at one vertex as two faces": (
        lambda: cut_ring(one_vertex(), first(np.diff(one_vertex()["faces/vertex_offsets"]) > 1), 1),
        r"faces/wedge\[\d+\]",
        "the face comes here through wedge",
    ),
    "one component too many": (
        lambda: remade(closed(), counts={"components": 2}, flags={"orientable": [True, True]}),
        "counts/components",
        "it is 2, but the edges make it 1",
    ),
    "link's source": (lambda: other(bounded(), "links/source", 3), r"links/source\[3\]", "ends at node"),
    "link's target": (lambda: other(bounded(), "links/target", 3), r"links/target\[3\]", "starts at node"),
    "node's edge": (
        lambda: other(bounded(), "nodes/edge", 3),
        r"nodes/edge\[3\]",
        "in the order of the nodes",
    ),
    "node's vertex": (lambda: other(bounded(), "nodes/vertex", 3), r"nodes/vertex\[3\]", "at vertex"),
    "node's slot": (lambda: other(bounded(), "nodes/slot", 3), r"nodes/slot\[3\]", "at slot"),
    "node's orientation": (
        lambda: toggled(bounded(), "nodes/orientation", 3),
        r"nodes/orientation\[3\]",
        "the direction of the external edge makes it",
    ),
    "node's component": (
        lambda: with_entry(parts(), "nodes/component", 15, 0),
        r"nodes/component\[15\]",
        "into component 1 of the boundary",
    ),
    "node's link": (lambda: other(bounded(), "nodes/link", (3, 1)), r"nodes/link\[3, 1\]", "has link"),
    "node's link direction": (
        lambda: toggled(bounded(), "nodes/link_leaves", (3, 1)),
        r"nodes/link_leaves\[3, 1\]",
        "starts \\(\\+1\\) or ends \\(-1\\)",
    ),
    "link's face": (
        lambda: other(bounded(), "links/face", 3),
        r"links/face\[3\]",
        "in the order of the links",
    ),
    "link's twist": (lambda: toggled(moebius(), "links/twist", 0), r"links/twist\[0\]", "twists along"),
    "link's labels": (
        lambda: with_entry(bounded(), "links/corners", (4, 1), 99),
        r"links/corners\[4, 1\]",
        "the labels of the ridge, ascending",
    ),
    "holonomy not flagged": (
        lambda: without(specimen("holonomy"), "faces/singular", flags={"singular": False}),
        "flags/singular",
        r"face \d+ has a holonomy",
    ),
    "singular without reason": (
        lambda: remade(closed(), {"faces/singular": np.zeros(20, np.int8)}, flags={"singular": True}),
        "flags/singular",
        "no face is singular and no two vertices have the same labels",
    ),
    "holonomy that is none": (
        lambda: with_entry(specimen("holonomy"), "faces/singular", 1, 1),
        r"faces/singular\[1\]",
        "the gluings and the labels of the ridges make it 0",
    ),
    "pinched face that is not": (
        lambda: with_entry(pinched(), "faces/singular", first(pinched()["faces/singular"] == 0), 2),
        r"faces/singular\[\d+\]",
        "the gluings and the labels of the ridges make it 0",
    ),
    "point": (
        lambda: other(specimen("moebius band"), "vertices/point", (3, 1)),
        r"vertices/point\[3, 1\]",
        "numbered by first occurrence",
    ),
    "segment": (
        lambda: other(specimen("moebius band"), "vertices/segment", (3, 1)),
        r"vertices/segment\[3, 1\]",
        "numbered by first occurrence",
    ),
    "segment's sign": (
        lambda: toggled(specimen("moebius band"), "vertices/segment_sign", (3, 1)),
        r"vertices/segment_sign\[3, 1\]",
        "against the first segment of its class",
    ),
    "label without coordinates": (
        lambda: remade(specimen("coordinates"), {"coordinates/point": np.zeros((3, 3))}),
        r"vertices/corners\[0, 3\]",
        "coordinates/point has 3 rows",
    ),
    "point without coordinates": (
        lambda: remade(specimen("table with scrambled corners"), {"coordinates/point": np.zeros((0, 3))}),
        r"vertices/point\[0, 0\]",
        "coordinates/point has 0 rows",
    ),
    "colour of an edge": (
        lambda: other(specimen("coloured"), "colours/edge", 2),
        r"colours/edge\[2\]",
        "the edge lies at slot 2",
    ),
    "colour of a face": (
        lambda: other(specimen("coloured"), "colours/face", (3, 1)),
        r"colours/face\[3, 1\]",
        "by the wedges of the face it is",
    ),
    "colours where gluings keep none": (
        lambda: remade(
            moebius(),
            {"colours/edge": np.zeros(10, np.int8), "colours/face": np.zeros((5, 2), np.int8)},
        ),
        r"colours/edge\[\d+\]",
        "every edge keeps the corners' numbers",
    ),
}


@pytest.mark.parametrize("name", WHOLE)
def test_broken_whole_is_named(name):
    make, where, message = WHOLE[name]
    broken = make()
    with pytest.raises(SkeletonError, match=message) as caught:
        check_skeleton(broken)
    assert re.fullmatch(where, caught.value.where)


@pytest.mark.parametrize("name", ["closed orientable 4D", "bounded 3D", "bounded non-orientable 4D"])
def test_boundary_of_the_boundary_that_is_not_zero_is_noticed(name):
    """Seen to be nonzero by the plain product of the boundary maps, which shares nothing with the check."""
    skeleton = specimen(name)
    assert_boundary_of_boundary_is_zero(skeleton)
    for step in (0, 1, len(skeleton["faces/edge"]) - 1):
        broken = signs_of_step(skeleton, step)
        with pytest.raises(AssertionError, match="d1 d2 is not zero"):
            assert_boundary_of_boundary_is_zero(broken)
        with pytest.raises(SkeletonError, match="passes the edge with sign"):
            check_skeleton(broken)


# --------------------------------------------------------------------------------------------------
# Form: what must hold before an entry may be an index


def narrowed(name, dtype):
    return lambda: remade(bounded(), {name: bounded()[name].astype(dtype)})


FORM = {
    "dimension": (lambda: remade(bounded(), dimension=5), "dimension", "has dimension 2, 3 or 4"),
    "dimension that is no number": (
        lambda: remade(bounded(), dimension="4"),
        "dimension",
        "has dimension 2, 3",
    ),
    "another dimension": (lambda: remade(bounded(), dimension=3), "counts/edges_internal", "ends of edges"),
    "no vertices": (lambda: remade(bounded(), counts={"vertices": 0}), "counts/vertices", "at least one"),
    "negative count": (lambda: remade(bounded(), counts={"links": -1}), "counts/links", "integer from 0"),
    "broken count": (lambda: remade(bounded(), counts={"links": 1.5}), "counts/links", "integer from 0"),
    "external edges": (
        lambda: remade(bounded(), counts={"edges_external": 3}),
        "counts/edges_external",
        "12 nodes",
    ),
    "external faces": (
        lambda: remade(bounded(), counts={"faces_external": 3}),
        "counts/faces_external",
        "24 links",
    ),
    "nodes": (
        lambda: remade(bounded(), counts={"nodes": 14, "edges_external": 14}),
        "counts/edges_internal",
        "20 ends of edges, 14",
    ),
    "links": (
        lambda: remade(bounded(), counts={"links": 20, "faces_external": 20}),
        "counts/links",
        "48 ends of links",
    ),
    "components": (lambda: remade(bounded(), counts={"components": 5}), "counts/components", "4 vertices"),
    "missing count": (
        lambda: Skeleton(3, {"vertices": 1}, bounded().flags, bounded().arrays),
        "counts/edges_internal",
        "it is missing",
    ),
    "unknown count": (lambda: remade(bounded(), counts={"cells": 5}), "counts/cells", "knows no such"),
    "flag that is no truth value": (
        lambda: remade(bounded(), flags={"ordered": 1}),
        "flags/ordered",
        "not true",
    ),
    "orientable as one value": (
        lambda: remade(bounded(), flags={"orientable": True}),
        "flags/orientable",
        "no list",
    ),
    "orientable too long": (
        lambda: remade(bounded(), flags={"orientable": [True, True]}),
        "flags/orientable",
        "2 entries for 1 components",
    ),
    "internal faces": (
        lambda: remade(bounded(), counts={"faces_internal": 2}),
        "edges/face|faces/vertex_offsets|.*",
        "shape",
    ),
    "missing table": (lambda: without(bounded(), "faces/place"), "faces/place", "the table is missing"),
    "missing labels": (
        lambda: without(bounded(), "links/corners"),
        "links/corners",
        "though there are labels",
    ),
    "missing segments": (
        lambda: without(moebius(), "vertices/segment"),
        "vertices/segment",
        "though there are points or segments",
    ),
    "missing singular": (
        lambda: remade(bounded(), flags={"singular": True}),
        "faces/singular",
        "flags/singular is true",
    ),
    "needless singular": (
        lambda: remade(pinched(), flags={"singular": False}),
        "faces/singular",
        "flags/singular is false",
    ),
    "unknown table": (
        lambda: remade(bounded(), {"edges/spin": bounded()["edges/twist"]}),
        "edges/spin",
        "the layout has no such table",
    ),
    "further group with a table's name": (
        lambda: remade(bounded(), extra={"edges/face": [1]}),
        "edges/face",
        "the name of a table",
    ),
    "period alone": (
        lambda: without(specimen("coordinates"), "coordinates/point", "coordinates/corner"),
        "coordinates/period",
        "there are no coordinates",
    ),
    "axes that differ": (
        lambda: remade(specimen("coordinates"), {"coordinates/period": np.zeros(2)}),
        "coordinates/period",
        r"ask for \(3\)",
    ),
    "shape": (
        lambda: remade(bounded(), {"edges/face": bounded()["edges/face"][:-1]}),
        "edges/face",
        r"its shape is \(15, 4\), but the counts and the layout ask for \(16, 4\)",
    ),
    "number of axes": (
        lambda: remade(bounded(), {"edges/face": bounded()["edges/face"].ravel()}),
        "edges/face",
        r"its shape is \(64,\)",
    ),
    "ids too wide": (narrowed("edges/face", np.int64), "edges/face", "int64, but int32"),
    "signs too wide": (narrowed("edges/face_sign", np.int32), "edges/face_sign", "int32, but int8"),
    "fractions": (narrowed("faces/vertex", np.float32), "faces/vertex", "float32, but int32"),
    "vertex too large": (
        lambda: with_entry(bounded(), "faces/vertex", 3, 4),
        r"faces/vertex\[3\]",
        "it is 4, but a vertex is from 0 to 3",
    ),
    "negative edge": (lambda: with_entry(bounded(), "faces/edge", 3, -1), r"faces/edge\[3\]", "from 0 to 15"),
    "wedge too large": (
        lambda: with_entry(bounded(), "faces/wedge", 3, 10),
        r"faces/wedge\[3\]",
        "from 0 to 9",
    ),
    "place too large": (
        lambda: with_entry(bounded(), "faces/place", 3, 4),
        r"faces/place\[3\]",
        "from 0 to 3",
    ),
    "zero as a sign": (
        lambda: with_entry(bounded(), "edges/face_sign", (3, 1), 0),
        r"edges/face_sign\[3, 1\]",
        r"a sign is \+1 or -1",
    ),
    "end beyond the vertices": (
        lambda: with_entry(bounded(), "edges/source", (0, 0), 4),
        r"edges/source\[0, 0\]",
        "a vertex is from 0 to 3; -1 stands for a node",
    ),
    "end beyond the slots": (
        lambda: with_entry(bounded(), "edges/source", (0, 1), 5),
        r"edges/source\[0, 1\]",
        "a slot is from 0 to 4",
    ),
    "end beyond the nodes": (
        lambda: with_entry(bounded(), "edges/target", (external_from("target"), 1), 12),
        r"edges/target\[\d+, 1\]",
        "a node is from 0 to 11",
    ),
    "end at a node where there is none": (
        lambda: with_entry(closed(), "edges/source", (0, 0), -1),
        r"edges/source\[0, 1\]",
        "there is no node",
    ),
    "offsets that start late": (
        lambda: with_entry(bounded(), "faces/vertex_offsets", 0, 1),
        r"faces/vertex_offsets\[0\]",
        "offsets start at 0",
    ),
    "offsets that stand": (
        lambda: with_entry(bounded(), "faces/vertex_offsets", 2, bounded()["faces/vertex_offsets"][1]),
        r"faces/vertex_offsets\[2\]",
        "offsets grow",
    ),
    "offsets that fall, beyond 64 bits of difference": (
        lambda: with_entry(
            with_entry(bounded(), "faces/vertex_offsets", 2, 2**63 - 1), "faces/vertex_offsets", 3, -(2**63)
        ),
        r"faces/vertex_offsets\[3\]",
        "offsets grow",
    ),
    "offsets that end early": (
        lambda: with_entry(bounded(), "faces/edge_offsets", -1, len(bounded()["faces/edge"]) - 1),
        r"faces/edge_offsets\[\d+\]",
        "offsets end at the number of visits",
    ),
    "offsets of edges against those of vertices": (
        lambda: with_entry(bounded(), "faces/edge_offsets", 1, bounded()["faces/edge_offsets"][1] + 1),
        r"faces/edge_offsets\[1\]",
        "an internal face has as many edges as vertices",
    ),
    "word too many": (
        lambda: with_entry(specimen("words"), "vertices/corners", (0, 0), 5),
        r"vertices/corners\[0, 0\]",
        "a label is from 0 to 4",
    ),
    "words out of order": (
        lambda: remade(specimen("words"), corner_names=("b", "a", "c", "d", "e")),
        r"corner_names\[1\]",
        "words ascend, each once",
    ),
    "words that are none": (
        lambda: remade(specimen("words"), corner_names=(1, 2, 3, 4, 5)),
        "corner_names",
        "no list of words",
    ),
    "words without labels": (
        lambda: remade(specimen("one tetrahedron glued to itself"), corner_names=("a",)),
        "corner_names",
        "there are no labels",
    ),
}


@pytest.mark.parametrize("name", FORM)
def test_broken_form_is_named(name):
    make, where, message = FORM[name]
    broken = make()
    with pytest.raises(SkeletonError, match=message) as caught:
        check_skeleton(broken)
    assert re.fullmatch(where, caught.value.where)


@pytest.mark.parametrize("key", ["vertices", "edges_internal", "faces_internal", "nodes", "components"])
def test_counts_of_a_hostile_file_cost_nothing(key):
    with pytest.raises(SkeletonError, match=r"counts|shape"):
        check_skeleton(remade(bounded(), counts={key: 2**62}))


@pytest.mark.parametrize("vertices", [2**40, 2**80])
def test_counts_that_fit_each_other_but_not_the_tables_are_noticed(vertices):
    counts = dict.fromkeys(bounded().counts, 0)
    counts |= {"vertices": 2 * vertices, "edges_internal": 5 * vertices, "components": 1}
    with pytest.raises(SkeletonError, match="its shape is"):
        check_skeleton(remade(bounded(), counts=counts))


@pytest.mark.parametrize("kind", ["interpreted", "compiled"])
@pytest.mark.parametrize("name", ["bounded 4D", "moebius band", "pinched", "table with scrambled corners"])
def test_random_entries_never_become_an_index_out_of_range(name, kind):
    skeleton = specimen(name)
    random = np.random.default_rng(1)
    whole = list(skeleton.arrays)
    for turn in range(60):
        arrays = {}
        for table in random.choice(whole, 1 + turn % 5, replace=False):
            old = skeleton[table]
            if old.dtype.kind == "f":
                continue
            if turn % 2:  # anything of this width
                info = np.iinfo(old.dtype)
                new = random.integers(info.min, info.max, old.shape, dtype=old.dtype, endpoint=True)
            else:  # in range, and out of order
                new = random.permutation(old.flatten()).reshape(old.shape)
            arrays[str(table)] = new
        broken = remade(skeleton, arrays)
        if broken == skeleton:
            continue
        with kernels.mode(kind), pytest.raises(SkeletonError, match="but"):
            check_skeleton(broken)


def test_small_skeleton_is_checked_without_the_compiler():
    """In a fresh process, so that nothing else has loaded it."""
    import subprocess
    import sys

    code = (
        "import sys, dualize\n"
        f"s = dualize.build(dualize.Triangulation.from_facets({simplex(4)!r}))\n"
        "s.validate()\n"
        "assert not {'numba', 'scipy'} & set(sys.modules), 'a heavy import'\n"
    )
    subprocess.run([sys.executable, "-c", code], check=True)
