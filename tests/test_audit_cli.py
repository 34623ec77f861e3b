"""``dualize audit`` as a process: what it prints, and its exit status."""

import json

import numpy as np
import pytest
from catalogue import CATALOGUE
from commandline import dualize as program
from commandline import lines, refused
from damage import with_entry
from specimens import HOLONOMY, slab, sphere, suspension

import dualize


@pytest.fixture
def folder(tmp_path):
    """A directory with a blank in its name and a few files."""
    home = tmp_path / "two words"
    home.mkdir()
    np.savetxt(home / "slab.txt", slab(sphere(3)), fmt="%d")
    np.savetxt(home / "poincare.txt", suspension(CATALOGUE["poincare_16"].facets), fmt="%d")
    np.savetxt(home / "crowded.txt", [[0, 1, 2, 3, x] for x in (4, 5, 6)], fmt="%d")
    (home / "text.txt").write_text("0 1 2 3\n0 1 2 4.5\n")
    skeleton = dualize.build(dualize.read(home / "slab.txt"))
    skeleton.write(home / "foam.h5")
    with_entry(skeleton, "faces/edge_sign", 4, -skeleton["faces/edge_sign"][4]).write(home / "twisted.json")
    with_entry(skeleton, "edges/twist", 4, 5).write(home / "damaged.json")
    return home


@pytest.mark.parametrize("name", ["slab.txt", "foam.h5"])
def test_a_good_file_ends_with_0(folder, name):
    done = program("audit", name, "--require", "connected,orientable,manifold", cwd=folder)
    assert (done.returncode, done.stderr) == (0, b"")
    assert lines(done.stdout)[0].startswith("Audit of 20 simplices of dimension 4, labelled")


def test_json_is_the_report_and_nothing_else(folder):
    done = program("audit", "foam.h5", "--json", cwd=folder)
    data = json.loads(done.stdout)
    assert data["ok"] is True
    assert data["file"]["name"] == "foam.h5"
    report = dualize.audit(dualize.load(folder / "foam.h5"))
    assert data["findings"] == json.loads(json.dumps(report.to_dict()["findings"]))


def test_a_violated_identity_ends_with_1(folder):
    done = program("audit", "twisted.json", cwd=folder)
    assert (done.returncode, lines(done.stderr)) == (1, ["d1-d2: violated"])
    assert any(line.split()[:2] == ["violated", "d1-d2"] for line in lines(done.stdout))


@pytest.mark.parametrize(
    "name, require, said",
    [
        ("slab.txt", "closed", "closed: no"),
        ("poincare.txt", "manifold", "manifold: no"),
        ("slab.txt", "duality", "duality: not checked"),
        ("slab.txt", "volumes", "volumes: undecided"),
    ],
    ids=["no", "no sphere", "not checked", "no coordinates"],
)
def test_a_requirement_that_is_not_met_ends_with_1(folder, name, require, said):
    done = program("audit", name, "--require", require, cwd=folder)
    assert (done.returncode, lines(done.stderr)) == (1, [said])


def test_an_unknown_requirement_is_refused_before_reading(folder):
    error, hint = refused(program("audit", "no such file", "--require", "orientabel", cwd=folder))
    assert error == "the audit has no property or identity 'orientabel'; is it orientable or orientability?"
    assert "manifold" in hint and "d1-d2" in hint


@pytest.mark.parametrize(
    "name, message",
    [
        ("crowded.txt", "a facet lies in three or more simplices"),
        ("text.txt", "text.txt"),
        ("damaged.json", "edges/twist[4]"),
        ("absent.txt", "absent.txt"),
    ],
)
def test_what_cannot_be_audited_ends_with_2(folder, name, message):
    error, _ = refused(program("audit", name, cwd=folder))
    assert message in error


def test_singular_complexes_are_audited_on_request(folder):
    from damage import triangulation

    triangulation(HOLONOMY["3d-reversed-edge"]).write(folder / "reversed.json")
    error, hint = refused(program("audit", "reversed.json", cwd=folder))
    assert "holonomy" in error and "--keep-singular" in hint
    done = program("audit", "reversed.json", "--keep-singular", "--require", "regular", cwd=folder)
    assert (done.returncode, lines(done.stderr)) == (1, ["regular: no"])
