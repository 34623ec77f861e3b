"""The prose of the conventions and the JSON Schemas, against what the package builds (by jsonschema)."""

import copy
import json
import re
from functools import cache

import jsonschema
import pytest
from damage import SPECIMENS, specimen, triangulation
from reference import glue_by_labels, reference_skeleton
from specimens import GLUED, HOLONOMY, LABELLED, scrambled

import dualize
from dualize.layout import COUNTS, FLAGS, TABLES, sizes
from dualize.spec import gluing_schema, prose, schema


@cache
def validator(make=schema):
    return jsonschema.Draft202012Validator(make())


def document(skeleton):
    """The JSON form of a skeleton: an object for each group, tables as nested lists."""
    out = {
        "format": "foam-skeleton",
        "version": 1,
        "dimension": skeleton.dimension,
        "counts": dict(skeleton.counts),
        "flags": dict(skeleton.flags),
        "provenance": None,
    }
    if skeleton.corner_names is not None:
        out["corner_names"] = list(skeleton.corner_names)
    for name, array in skeleton.arrays.items():
        group, table = name.split("/")
        out.setdefault(group, {})[table] = array.tolist()
    return out


# --------------------------------------------------------------------------------------------------
# Schema


@pytest.mark.parametrize("make", [schema, gluing_schema], ids=["skeleton", "gluing"])
def test_schema_is_a_schema(make):
    jsonschema.Draft202012Validator.check_schema(make())
    assert json.loads(json.dumps(make())) == make()


@pytest.mark.parametrize("name", SPECIMENS)
def test_skeleton_follows_the_schema(name):
    validator().validate(document(specimen(name)))


@pytest.mark.parametrize("name", [*LABELLED, *GLUED, *HOLONOMY])
def test_cabinet_follows_the_schema(name):
    table = glue_by_labels(LABELLED[name]) if name in LABELLED else {**GLUED, **HOLONOMY}[name]
    made = dualize.build(triangulation(scrambled(table, seed=1)), keep_singular=True, points=True)
    validator().validate(document(made))


def test_written_file_follows_the_schema(tmp_path):
    for name in ("words", "coordinates", "pinched"):
        path = tmp_path / f"{name}.json"
        specimen(name).write(path)
        validator().validate(json.loads(path.read_text()))


def test_unknown_groups_are_allowed():
    further = document(specimen("bounded 4D")) | {"spins": {"highest": [1, 2]}, "note": "kept"}
    validator().validate(further)


def broken(change, name="bounded 4D"):
    whole = copy.deepcopy(document(specimen(name)))
    change(whole)
    return whole


def put(*path):
    *groups, last, value = path

    def change(whole):
        for key in groups:
            whole = whole[key]
        whole[last] = value

    return change


def drop(*path):
    *groups, last = path

    def change(whole):
        for key in groups:
            whole = whole[key]
        del whole[last]

    return change


BROKEN = {
    "another format": put("format", "foam"),
    "another version": put("version", 2),
    "no format": drop("format"),
    "dimension 5": put("dimension", 5),
    "another dimension than the rows": put("dimension", 3),
    "a missing count": drop("counts", "links"),
    "a negative count": put("counts", "links", -1),
    "an unknown count": put("counts", "cells", 3),
    "a flag that is a number": put("flags", "ordered", 1),
    "orientable as one value": put("flags", "orientable", True),
    "a missing group": drop("wedges"),
    "a missing table": drop("edges", "face"),
    "a group that is a list": put("edges", []),
    "a table that is a number": put("edges", "twist", 0),
    "a row too long": put("edges", "face", 0, [0, 1, 2, 3, 4]),
    "a row too short": put("vertices", "edge", 0, [0, 1, 2, 3]),
    "a flat table": put("edges", "source", [0, 1]),
    "a fraction": put("edges", "face", 0, 0, 0.5),
    "a text": put("edges", "face", 0, 0, "0"),
    "nothing": put("edges", "face", 0, 0, None),
    "a negative id": put("edges", "face", 0, 0, -1),
    "zero as a sign": put("edges", "face_sign", 0, 0, 0),
    "a truth value as a sign": put("edges", "face_sign", 0, 0, True),
    "two as a bit": put("edges", "twist", 0, 2),
    "a corner too large": put("edges", "source_corner", 0, 0, 5),
    "a corner too small": put("edges", "source_corner", 0, 0, -2),
    "a wedge too large": put("faces", "wedge", 0, 10),
    "a place too large": put("faces", "place", 0, 4),
    "a slot too large": put("nodes", "slot", 0, 5),
    "a slot too large at an end": put("edges", "source", 0, [0, 5]),
    "an end below nothing": put("edges", "source", 0, [-2, 0]),
    "an end with three numbers": put("edges", "source", 0, [0, 0, 0]),
    "a negative node": put("edges", "source", 0, [-1, -1]),
    "a negative offset": put("faces", "vertex_offsets", 0, -1),
    "a label beyond 64 bits": put("vertices", "corners", 0, 0, 2**63),
    "labels of vertices only": drop("links", "corners"),
    "labels of the boundary only": drop("vertices", "corners"),
    "points without segments": put("vertices", "point", [[0, 1, 2, 3, 4]] * 4),
    "words that are numbers": put("corner_names", [1, 2]),
    "words twice": put("corner_names", ["a", "a"]),
    "singular faces without the flag": put("faces", "singular", [0] * 28),
    "the flag without singular faces": put("flags", "singular", True),
    "a period without coordinates": put("coordinates", {"period": [1.0]}),
    "colours of edges alone": put("colours", {"edge": [0]}),
    "coordinates in words": put("coordinates", {"point": [["a"]]}),
}


@pytest.mark.parametrize("name", BROKEN)
def test_broken_document_is_rejected(name):
    assert not validator().is_valid(broken(BROKEN[name]))


def test_words_without_labels_are_rejected():
    whole = broken(put("corner_names", ["a"]), name="one tetrahedron glued to itself")
    assert not validator().is_valid(whole)


def gluing_document(t):
    out = {"across": t.across.tolist(), "carry": t.carry.tolist(), "written": t.written.tolist()}
    if t.corners is not None:
        out["corners"] = t.corners.tolist()
    return out


@pytest.mark.parametrize("name", [*GLUED, *HOLONOMY])
def test_gluing_table_follows_its_schema(name):
    validator(gluing_schema).validate(gluing_document(triangulation({**GLUED, **HOLONOMY}[name])))


def test_labelled_gluing_table_follows_its_schema():
    for name in ("2d-grid", "3d-cube", "4d-slab"):
        validator(gluing_schema).validate(gluing_document(dualize.Triangulation.from_facets(LABELLED[name])))


BROKEN_GLUINGS = {
    "no permutations": drop("carry"),
    "row too long": put("across", 0, [0, 1, 0, 1, 0]),
    "another dimension": put("carry", [[[0, 1, 2]] * 3]),
    "simplex below nothing": put("across", 0, 0, -2),
    "corner too large": put("carry", 0, 0, 0, 4),
    "written as zero": put("written", 0, 0),
    "words and numbers": put("corners", [["a", "b", "c", 3]]),
}


@pytest.mark.parametrize("name", BROKEN_GLUINGS)
def test_broken_gluing_table_is_rejected(name):
    whole = gluing_document(triangulation(GLUED["3d-melon-2"]))
    BROKEN_GLUINGS[name](whole)
    assert not validator(gluing_schema).is_valid(whole)


# --------------------------------------------------------------------------------------------------
# Prose


def test_prose_lists_every_table_with_its_shape():
    text = prose()
    rows = dict(re.findall(r"^\| `(\w+/\w+)` \| \(([^)]*)\) \|", text, flags=re.MULTILINE))
    assert {
        name: tuple(x.strip() for x in shape.split(",") if x.strip())
        for name, shape in rows.items()
        if name in TABLES
    } == {name: tuple(map(str, t.shape)) for name, t in TABLES.items()}
    assert "<!--" not in text


def test_prose_states_the_widths_of_the_arrays():
    widths = dict(re.findall(r"^\| `(\w+/\w+)` \| \([^)]*\) \| (\w+) \|", prose(), flags=re.MULTILINE))
    for name in SPECIMENS:
        for table, array in specimen(name).arrays.items():
            assert widths[table] == ("id" if array.dtype == "int32" else str(array.dtype)), table


@pytest.mark.parametrize(
    "word", [*COUNTS, *FLAGS, "format", "version", "dimension", "provenance", "corner_names"]
)
def test_prose_names_every_entry_of_the_header(word):
    assert f"`{word}`" in prose()


def test_prose_explains_every_letter_of_the_shapes():
    text = prose()
    letters = {x for t in TABLES.values() for x in t.shape if isinstance(x, str)}
    assert letters <= set(sizes(4, dict.fromkeys(COUNTS, 0))) | {"P", "A"}
    for letter in letters - {"F+1", "D-1", "V", "B", "L"}:
        assert f"`{letter}`" in text or f"`{letter} = " in text, letter


def test_example_of_the_prose_is_what_is_built():
    """Section 6, sentence by sentence; the reference says the same."""
    facets = [[0, 1, 2, 3], [0, 1, 2, 4]]
    s = dualize.build(dualize.Triangulation.from_facets(facets))
    text = " ".join(prose().split())
    assert "Two tetrahedra `0 1 2 3` and `0 1 2 4`" in text
    assert s["vertices/orientation"].tolist() == [1, -1]
    assert "so edge 0 starts at vertex 1 and ends at vertex 0" in text
    assert s["edges/source"][0].tolist() == [1, 3]
    assert s["edges/target"][0].tolist() == [0, 3]
    assert "edge 1 runs from vertex 0 to node 0" in text
    assert (s["edges/source"][1].tolist(), s["edges/target"][1].tolist()) == ([0, 0], [-1, 0])
    drawn = re.findall(r"node (\d) (◀|─)── (\d) ─", prose()) + re.findall(
        r"(─|◀) (\d) ──?─? ?▶? ?node (\d)", prose()
    )
    assert len(drawn) == 6
    for row in drawn[:3]:
        node, head, edge = int(row[0]), row[1], int(row[2])
        assert s["nodes/edge"][node] == edge
        assert s["nodes/orientation"][node] == (1 if head == "◀" else -1)
    for head, edge, node in drawn[3:]:
        assert s["nodes/edge"][int(node)] == int(edge)
        assert s["nodes/orientation"][int(node)] == (-1 if head == "◀" else 1)
    assert "It lists edge 2 (sign +1), vertex 0, edge 1 (sign +1)" in text
    assert s.face(0) == [("edge", 2, 1), ("vertex", 0, 0), ("edge", 1, 1)]
    assert "it runs from node 0, where the face ends, to node 1, where it begins" in text
    assert (s["links/source"][0], s["links/target"][0]) == (0, 1)
    assert "Face 2 is dual to segment `1 2`" in text
    assert s["links/corners"][2].tolist() == [1, 2]
    assert [cell[:2] for cell in s.face(2)][1:4] == [("vertex", 1), ("edge", 0), ("vertex", 0)]
    reference = reference_skeleton(glue_by_labels(facets))
    assert all(
        s[name].tolist() == [list(r) if isinstance(r, tuple) else r for r in reference[name]]
        for name in s.arrays
    )
