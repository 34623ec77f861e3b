"""What `describe` says, against what is known of the meshes."""

import json

import pytest
from commandline import MESHES, dualize, lines

from dualize import Triangulation, build, read
from dualize.describe import describe


def facts(name):
    return describe(read(MESHES / name)).facts


def test_closed_orientable():
    # W. Kuehnel, T. F. Banchoff, The 9-vertex complex projective plane (1983): f = (9, 36, 84, 90, 36)
    found = facts("cp2_9.txt")
    assert (found["simplices"], found["labels"]["different"], found["facets"]["glued"]) == (36, 9, 90)
    assert found["dual"]["faces_internal"] == 84
    assert (found["components"], found["orientable_components"], found["boundary"]["components"]) == (1, 1, 0)


def test_words_are_named_from_first_to_last():
    assert facts("harbour_inside.txt")["labels"] == {
        "are": "words",
        "different": 6,
        "first": "buoy",
        "last": "quay",
    }


def test_two_components_one_of_them_orientable():
    klein = [[f"k{x}" for x in row] for row in _rows("klein_bottle_3d_9.txt")]
    found = describe(Triangulation.from_facets([*klein, ["a", "b", "c", "d"]]))
    assert (found.facts["components"], found.facts["orientable_components"]) == (2, 1)
    assert "2, 1 of them orientable" in str(found)


def _rows(name):
    return [line.split() for line in (MESHES / name).read_text().splitlines() if not line.startswith("#")]


def test_singular_ridges_are_counted_by_their_kind():
    # a tetrahedron with two facets glued so that the edge 0 1 between them comes back reversed
    turned = Triangulation.from_gluings([[-1, -1, 0, 0]], [[[0] * 4, [0] * 4, [1, 0, 3, 2], [1, 0, 3, 2]]])
    found = describe(turned)
    assert found.facts["singular_faces"] == {"holonomy": 1, "pinched": 0, "both": 0}
    assert "yes (1 holonomy)" in str(found)


@pytest.mark.parametrize("name", ["slab_4d.txt", "twisted_ball_bundle_9.txt", "figure_eight_knot.json"])
def test_a_triangulation_and_its_skeleton_agree(name):
    t = read(MESHES / name)
    of_t, of_s = describe(t).facts, describe(build(t)).facts
    for key in ("dimension", "components", "orientable_components", "boundary", "singular"):
        assert of_t[key] == of_s[key]
    assert of_t["dual"] == of_s["counts"]


def test_lengths_of_faces_are_counted():
    # W. Kuehnel, G. Lassmann (1984), 15-vertex torus: 45 edges in 4 tetrahedra, 60 in 6
    found = describe(build(read(MESHES / "torus_3d_15.txt")))
    assert found.facts["face_lengths"] == {"4": 45, "6": 60}


def test_twisted_edges_are_counted_where_a_component_cannot_be_oriented():
    assert describe(build(read(MESHES / "klein_bottle_3d_9.txt"))).facts["twisted_edges"] > 0
    assert describe(build(read(MESHES / "torus_3d_15.txt"))).facts["twisted_edges"] == 0


@pytest.mark.parametrize("name", sorted(p.name for p in MESHES.iterdir() if p.name != "README.md"))
def test_every_mesh_is_described_as_text_and_as_json(name, tmp_path):
    text = dualize("describe", MESHES / name, cwd=tmp_path)
    assert text.returncode == 0, text.stderr
    assert lines(text.stdout)[0].startswith(f"{name} (")
    data = json.loads(dualize("describe", MESHES / name, "--json", cwd=tmp_path).stdout)
    assert data["kind"] == "triangulation"
    assert data["file"]["name"] == name
    assert len(data["samples"]) == min(3, data["simplices"])


def test_samples_of_a_skeleton_name_cells_of_each_kind(tmp_path):
    dualize("build", MESHES / "slab_4d.txt", "-o", "foam.json", cwd=tmp_path)
    said = lines(dualize("describe", "foam.json", cwd=tmp_path).stdout)
    for kind in ("vertex", "edge", "face", "node", "link"):
        assert sum(line.startswith(f"  {kind} ") for line in said) == 3
