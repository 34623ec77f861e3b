"""The plan of a sum as a document and as a page, and its arrays in the file of the foam."""

import json

import numpy as np
import pytest
from commandline import MESHES, dualize, lines, refused

import dualize as package
from dualize import make
from dualize.plan import plan


def document(*arguments, cwd, data=b""):
    run = dualize("plan", *arguments, "--json", cwd=cwd, data=data)
    assert run.returncode in (0, 1), run.stderr
    return json.loads(run.stdout), run.returncode


def test_the_five_around_a_point():
    """Deza, Laurent (1997): 25 rays; Bonzom, Smerlak (2010): Omega 4, degree 12, and bubbles."""
    found = plan(package.build(make.move_side(4, 5)), 1, most=3)
    d = found.to_dict()
    assert d["parity"]["exponent"] == 4
    assert (len(d["growth"]["unbounded"]), d["growth"]["dimension"], len(d["growth"]["rays"])) == (10, 10, 25)
    assert (d["bubbles"]["number"], d["bubbles"]["independent"]) == (5, 4)
    assert (d["power"]["omega"], d["power"]["su2_degree"]) == (4, 12)
    assert len(d["gauge"]["faces"]) == 4
    page = str(found)
    for line in ("parity sectors   16", "Omega = 4", "5, 4 independent mod 2", "growth rays    25"):
        assert line in page


def test_a_bounded_sum_is_told_to_be_complete():
    found = plan(package.build(make.move_side(4, 3)), 1)
    assert found.document["sum"]["counts"][-1] == {"most": 3, "spins": 2, "spins_and_intertwiners": 9}
    assert "these are all labellings" in str(found)


def test_an_endless_sum_needs_a_cutoff():
    found = plan(package.build(make.move_side(4, 4)), 1)
    assert "a largest twice-spin is needed" in str(found)


def test_without_boundary_data_only_what_does_not_need_them():
    found = plan(package.build(make.move_side(4, 3)))
    assert found.rules is None and "parity" not in found.document
    assert "no boundary data" in str(found)


def test_a_foam_whose_group_is_not_trivial_is_marked():
    """First homology of projective space: Z/2 (from memory)."""
    found = plan(package.build(make.published("RP3")))
    assert found.document["power"]["h1"] == [2]
    assert "other flat connections can dominate" in str(found)


def test_a_closed_foam_needs_no_boundary():
    found = plan(package.build(make.simplex_boundary(3)), most=2)
    assert found.document["sum"]["counts"][1]["spins"] == 16


@pytest.mark.parametrize("kind", ["json", "h5", "npz"])
def test_the_groups_of_a_plan_stay_in_the_file(kind, tmp_path):
    s = package.build(make.move_side(4, 4))
    found = plan(s, 1, most=2)
    path = tmp_path / f"foam.{kind}"
    found.kept_in(s).write(path)
    again = package.load(path)
    again.validate()
    for name, array in found.groups().items():
        np.testing.assert_array_equal(np.asarray(again.extra[name]), array)
    assert set(found.groups()) >= {"spins/least", "spins/parity", "bubbles/face", "gauge/face", "gauge/slot"}


def test_the_groups_are_documented():
    from dualize.spec import prose

    text = prose()
    names = plan(package.build(make.move_side(4, 4)), 1, most=2).groups()
    assert all(f"`{name}`" in text for name in names)


def test_files_with_a_plan_follow_the_schema(tmp_path):
    from jsonschema import Draft202012Validator

    from dualize.spec import schema

    s = package.build(make.move_side(4, 4))
    plan(s, 1, most=2).kept_in(s).write(tmp_path / "foam.json")
    Draft202012Validator(schema()).validate(json.loads((tmp_path / "foam.json").read_text()))


# --------------------------------------------------------------------------------------------------
# The command


def test_the_page_of_a_mesh(tmp_path):
    run = dualize("plan", MESHES / "harbour_inside.txt", "--boundary", "all=1", cwd=tmp_path)
    assert run.returncode == 0 and run.stderr == b""
    text = lines(run.stdout)
    assert text[0].startswith("4D foam: 3 vertices, 3 internal and 9 external edges")
    assert any("these are all labellings" in line for line in text)


def test_a_filled_template_is_boundary_data(tmp_path):
    run = dualize("plan", MESHES / "harbour_inside.txt", "--template", cwd=tmp_path)
    template = json.loads(run.stdout)
    for row in template["links"]:
        row["spin"] = 1
    template["nodes"][0]["recoupling"] = 2
    (tmp_path / "data.json").write_text(json.dumps(template))
    for mesh in ("harbour_inside.txt", "harbour_outside.txt"):
        found, status = document(MESHES / mesh, "--boundary", "data.json", cwd=tmp_path)
        assert status == 0 and len(found["boundary"]["states"]) == 1


def test_boundary_data_come_from_standard_input(tmp_path):
    found, _ = document(MESHES / "harbour_inside.txt", "--boundary", "-", cwd=tmp_path, data=b'{"all": 1}')
    assert found["boundary"]["spins"] == [1] * 18


def test_boundary_data_without_labelling_end_with_status_1(tmp_path):
    """Four tetrahedra around a segment: its spin would be 0 by one of them, and not 0 by another."""
    mesh = tmp_path / "ring.txt"
    mesh.write_text("0 1 2 3\n0 1 3 4\n0 1 4 5\n0 1 5 2\n")
    template = json.loads(dualize("plan", mesh, "--template", cwd=tmp_path).stdout)
    spin = {"0 2": 2, "1 2": 0, "0 3": 1, "1 3": 1, "2 3": 1, "0 4": 0, "1 4": 0, "3 4": 1}
    spin |= {"0 5": 1, "1 5": 1, "4 5": 1, "2 5": 1}
    for row in template["links"]:
        row["spin"] = spin[" ".join(map(str, row["corners"]))]
    (tmp_path / "data.json").write_text(json.dumps(template))
    found, status = document(mesh, "--boundary", "data.json", cwd=tmp_path)
    assert status == 1
    assert found["bounds"]["contradiction"]["kind"] == "inequalities"


def test_integer_spins_leave_out_half_integers(tmp_path):
    found, _ = document(
        MESHES / "sphere_4d.txt", "--integer-spins", "--max-twice-spin", 1, "--rays", 5, cwd=tmp_path
    )
    assert found["sum"]["counts"][-1]["spins"] == 1


def test_the_vertex_table_of_a_user_is_fitted(tmp_path):
    (tmp_path / "table.json").write_text(json.dumps({"nodes": [4, 3, 2, 1, 0], "contraction": "delta"}))
    run = dualize("plan", MESHES / "slab_4d.txt", "--vertex-table", "table.json", cwd=tmp_path)
    found = json.loads(run.stdout)
    assert len(found["vertices"]) == 20 and found["vertices"][0]["axes"] == [4, 3, 2, 1, 0]


def test_the_foam_is_written_with_the_plan(tmp_path):
    run = dualize(
        "plan", MESHES / "harbour_inside.txt", "--boundary", "all=1", "-o", "out.json", cwd=tmp_path
    )
    assert run.returncode == 0
    assert json.loads((tmp_path / "out.json").read_text())["spins"]["greatest"] == [3]


REFUSED = {
    "no number": (["--boundary", "all=x"], "has a twice-spin, such as all=1"),
    "no file": (["--boundary", "nothing.json"], "it cannot be read"),
    "odd node": (["--boundary", "odd.json"], "admit no intertwiner"),
    "version": (["--boundary", "version.json"], "version 7 of boundary data is not known"),
    "no json": (["--boundary", "text.json"], "this is no JSON"),
    "no object": (["--boundary", "list.json"], "this is no JSON object"),
    "cutoff": (["--max-twice-spin", "-1"], "--max-twice-spin"),
    "steps": (["--integer-spins", "--step", "3"], "contradict"),
    "slot": (["--slot", "7"], "no slot 7"),
    "table": (["--vertex-table", "list.json"], "this is no JSON object"),
}


@pytest.mark.parametrize("arguments, match", REFUSED.values(), ids=REFUSED)
def test_what_is_wrong_is_one_sentence(arguments, match, tmp_path):
    (tmp_path / "odd.json").write_text(json.dumps({"all": 0, "links": [{"link": 0, "spin": 1}]}))
    (tmp_path / "version.json").write_text('{"version": 7, "all": 1}')
    (tmp_path / "text.json").write_text("all = 1")
    (tmp_path / "list.json").write_text("[1]")
    said, _ = refused(dualize("plan", MESHES / "harbour_inside.txt", *arguments, cwd=tmp_path))
    assert match in said


def test_closed_foams_have_no_template(tmp_path):
    said, _ = refused(dualize("plan", MESHES / "sphere_4d.txt", "--template", cwd=tmp_path))
    assert "the foam is closed" in said


def test_a_network_is_exported_with_an_order(tmp_path):
    run = dualize("build", MESHES / "slab_4d.txt", "-o", "foam.json", cwd=tmp_path)
    run = dualize("export", "foam.json", "--as", "einsum", "-o", "-", cwd=tmp_path)
    net = json.loads(run.stdout)
    s = package.load(tmp_path / "foam.json")
    assert net["tensors"] == s["vertices/edge"].tolist()
    assert net["output"] == list(range(45, 55))
    terms, output = net["einsum"].split("->")
    assert len(terms.split(",")) == 20 and len(output) == 10
    assert len(net["path"]) == 19
