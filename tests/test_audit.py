"""The audit: its report, and for every identity a skeleton or a witness that breaks just that one."""

import json
from dataclasses import replace

import numpy as np
import pytest
from catalogue import CATALOGUE
from damage import with_entry
from specimens import GLUED, around_ridge, moebius_band, simplex, slab, sphere, twisted_solid_torus

import dualize
from dualize import Skeleton, Triangulation
from dualize.audit import Finding, Report, audit
from dualize.findings import FIGURES, IDENTITIES, PROPERTIES, Subject, counting, homology
from dualize.findings.subject import Subject as TheSubject


def built(facets):
    return dualize.build(Triangulation.from_facets(facets))


SPHERE = built(sphere(4))
SLAB = built(slab(sphere(3)))
TWISTED = built(CATALOGUE["s3_s1_twisted_12"].facets)
TWISTED_BALL = built(twisted_solid_torus(4, 9))


def violated(report):
    return [f.check for f in report if f.verdict == "violated"]


def changed(skeleton, name, flat, value):
    """The skeleton with one entry changed."""
    return with_entry(skeleton, name, flat, value)


# --------------------------------------------------------------------------------------------------
# One identity at a time


@pytest.mark.parametrize(
    "skeleton", [SPHERE, SLAB, TWISTED, TWISTED_BALL], ids=["closed", "bounded", "twisted", "both"]
)
def test_a_good_skeleton_violates_nothing(skeleton):
    report = audit(skeleton)
    assert report.ok
    assert report.fails(["connected", "homology-manifold", "manifold", "tables", "d1-d2"]) == []


# identity -> (skeleton, table, flat index, new value)
BREAKS = {
    "layout": (SPHERE, "edges/twist", 3, 7),
    "tables": (SPHERE, "faces/against", 0, None),
    "d1-d2": (SPHERE, "faces/edge_sign", 5, None),
    "twist": (TWISTED, "edges/twist", 100, None),
    "components": (built([*simplex(3), [4, 5, 6, 7]]), "vertices/component", 1, 0),
    "boundary-cells": (SLAB, "nodes/corners", 0, 77),
    "boundary-signs": (SLAB, "links/twist", 2, 1),
}


def other(skeleton, name, flat, value):
    if value is not None:
        return value
    old = int(skeleton[name].ravel()[flat])
    return 1 - old if name.endswith(("twist", "against")) else -old


@pytest.mark.parametrize("name", BREAKS)
def test_one_changed_entry_violates_one_identity(name):
    skeleton, table, flat, value = BREAKS[name]
    report = audit(changed(skeleton, table, flat, other(skeleton, table, flat, value)))
    assert violated(report) == [name]
    assert not report.ok


def test_the_contradiction_of_the_tables_points_to_the_identity_that_explains_it():
    report = audit(changed(SPHERE, "faces/edge_sign", 5, -SPHERE["faces/edge_sign"][5]))
    assert report["tables"].verdict == "not checked"
    assert "see d1-d2" in report["tables"].against
    assert report["d1-d2"].where == f"face {np.searchsorted(SPHERE['faces/edge_offsets'], 5, 'right') - 1}"


def test_a_broken_layout_leaves_the_rest_unchecked():
    report = audit(changed(SPHERE, "edges/twist", 3, 7))
    assert report["layout"].where == "edges/twist[3]"
    assert {f.verdict for f in report} == {"violated", "not checked", "undecided"}


def test_gluings_that_cannot_be_read_back_are_named():
    report = audit(changed(SPHERE, "edges/target_corner", 0, SPHERE["edges/target_corner"].ravel()[1]))
    assert "gluings" in violated(report)
    assert "edge 0" in report["gluings"].where


@pytest.mark.parametrize(
    "facets, what",
    [
        (around_ridge(4, 5), "4 simplices, the triangulation has 5"),
        ([[x + 1 for x in f] for f in around_ridge(4, 4)], "other labels"),
        ([[0, 1, 2, 3, 4], [0, 1, 2, 4, 5], [0, 1, 2, 5, 6], [0, 1, 2, 6, 7]], "other gluings"),
    ],
    ids=["one more", "renamed", "opened"],
)
def test_another_triangulation_violates_the_gluings(facets, what):
    report = audit(built(around_ridge(4, 4)), triangulation=Triangulation.from_facets(facets))
    assert violated(report) == ["gluings"]
    assert report["gluings"].figure == what


def test_a_wrong_flag_is_no_orientability():
    flags = {**TWISTED.flags, "orientable": [True]}
    broken = Skeleton(4, TWISTED.counts, flags, TWISTED.arrays)
    report = audit(broken)
    assert violated(report) == ["tables"]
    assert report["orientable"].verdict == "no"


# identity -> what the witness is made to say of the boundary of the 5-simplex,
# whose f is (6, 15, 20, 15, 6) and whose Betti numbers are (1, 0, 0, 0, 1)
LIES = {
    "euler": {"gudhi counts": [6, 15, 21, 16, 6]},
    "euler-betti": {"betti": [1, 0, 1, 0, 1], "also": ["universal-coefficients"]},
    "duality": {"betti": [1, 0, 1, 1, 1], "also": ["universal-coefficients"]},
    "foam-b0": {"foam": (2, 0)},
    "foam-b1": {"foam": (1, 1)},
    # seven points and sixteen segments: the same Euler characteristic
    "dehn-sommerville": {"gudhi counts": [7, 16, 20, 15, 6], "own counts": [7, 16, 20, 15, 6]},
}


@pytest.mark.parametrize("name", LIES)
def test_a_witness_that_disagrees_violates_one_identity(name, monkeypatch):
    lie = LIES[name]
    if "gudhi counts" in lie:
        monkeypatch.setattr(
            "dualize.topology.gudhi.simplices_per_dimension", lambda tree: lie["gudhi counts"]
        )
    if "betti" in lie:
        monkeypatch.setattr(homology, "betti_numbers", lambda tree, prime: lie["betti"])
    if "foam" in lie:
        monkeypatch.setattr("dualize.topology.rank.foam_betti", lambda d1, d2, prime: lie["foam"])
    if "own counts" in lie:
        true = Subject(SPHERE, None, False, None).census
        monkeypatch.setattr(TheSubject, "census", true._replace(f=lie["own counts"]))
    assert violated(audit(SPHERE)) == [name, *lie.get("also", [])]


def test_top_cycles_that_disagree_violate_orientability(monkeypatch):
    real = homology.cone_off
    monkeypatch.setattr(homology, "cone_off", lambda facets, boundary: real(facets[1:], boundary))
    assert violated(audit(SPHERE)) == ["orientability"]


def found_by(check, skeleton, **figures):
    """Findings of one check about a skeleton of which some figures are replaced."""
    x = Subject(skeleton, None, False, None)
    x.t  # read back from the good tables  # noqa: B018
    for name, value in figures.items():
        if name == "counts":
            x.s = replace(skeleton, counts={**skeleton.counts, **value})
        else:
            x.__dict__[name] = value
    return {f.check: f for f in check(x)}


@pytest.mark.parametrize(
    "name, message",
    [
        # 20 prisms over S^3: 40 + 20 faces, 45 + 10 edges (counted by hand)
        ("faces_internal", "61 cells for 60 ridges"),
        ("edges_internal", "56 cells for 55 facets"),
        ("links", "2 L is not D B"),
    ],
    ids=["a face too many", "an edge too many", "a link too many"],
)
def test_cells_that_are_not_the_simplices_violate_the_counts(name, message):
    counts = {name: SLAB.counts[name] + 1}
    finding = found_by(counting.check_counts, SLAB, counts=counts)["counts"]
    assert finding.verdict == "violated"
    assert message in finding.figure


def test_a_node_too_many_violates_the_euler_characteristic_of_the_dual():
    found = found_by(counting.check_relations, SLAB, counts={"nodes": SLAB.counts["nodes"] + 1})
    assert [f.check for f in found.values() if f.verdict == "violated"] == ["euler-dual"]


def test_a_boundary_of_wrong_euler_characteristic_is_noticed():
    found = found_by(counting.check_relations, SLAB, boundary_f=[10, 20, 21, 10])
    assert found["euler-boundary"].verdict == "violated"


def test_every_identity_is_broken_by_some_test():
    broken_here = {"gluings", "orientability", "counts", "euler-dual", "euler-boundary", *BREAKS, *LIES}
    # those of coloured graphs and of subdivided gluings have their own tests
    elsewhere = {"derived", "bipartite", "sub-graphs", "face-formula", "melonic-degree"}
    elsewhere |= {"universal-coefficients", "integral-duality", "group-homology", "unimodular"}
    assert set(IDENTITIES) <= broken_here | elsewhere


# --------------------------------------------------------------------------------------------------
# The report


def test_a_report_reads_as_a_table():
    lines = str(audit(built(simplex(3)))).splitlines()
    assert lines[0] == "Audit of 1 simplex of dimension 3, labelled"
    assert {"Identities", "Properties", "Figures"} <= set(lines)
    assert any(line.split()[:2] == ["holds", "d1-d2"] for line in lines)
    assert max(map(len, lines)) <= 110


def test_a_report_is_plain_data():
    report = audit(TWISTED_BALL)
    data = json.loads(json.dumps(report.to_dict()))
    assert data["ok"] is True
    assert [f["check"] for f in data["findings"]] == [f.check for f in report]
    assert set(data["findings"][0]) == {"check", "kind", "verdict", "figure", "against", "where"}


def test_a_report_gives_a_finding_by_name():
    report = audit(SPHERE)
    assert report["f-vector"].figure == [6, 15, 20, 15, 6]
    with pytest.raises(KeyError, match="no such"):
        report["no such"]


def test_all_named_checks_are_there():
    names = [f.check for f in audit(SPHERE)]
    assert len(names) == len(set(names))
    assert set(names) <= {*IDENTITIES, *PROPERTIES, *FIGURES}


def test_undecided_and_unchecked_count_as_failures_of_what_is_required():
    report = Report(
        "",
        (
            Finding("manifold", "property", "undecided"),
            Finding("closed", "property", "yes"),
            Finding("euler", "identity", "not checked"),
        ),
    )
    assert [f.check for f in report.fails(["manifold", "closed"])] == ["manifold"]
    assert [f.check for f in report.fails(["euler"])] == ["euler"]
    assert report.fails() == []


def test_an_unknown_requirement_is_refused_with_near_misses():
    with pytest.raises(dualize.InputError, match="is it orientable"):
        audit(SPHERE, require=["orientible"])


@pytest.mark.parametrize(
    "facets", [moebius_band(), slab(sphere(3)), sphere(3)], ids=["2D", "4D", "closed 3D"]
)
def test_the_audit_is_the_same_for_any_order_of_simplices(facets):
    again = audit(Triangulation.from_facets(facets[::-1]))
    for one, two in zip(audit(Triangulation.from_facets(facets)), again, strict=True):
        assert (one.check, one.verdict) == (two.check, two.verdict)


@pytest.mark.parametrize("name", sorted(GLUED)[::4])
def test_the_audit_of_a_gluing_is_that_of_its_skeleton(name):
    from damage import triangulation

    t = triangulation(GLUED[name])
    verdicts = [(f.check, f.verdict) for f in audit(t)]
    assert verdicts == [(f.check, f.verdict) for f in audit(dualize.build(t))]


# --------------------------------------------------------------------------------------------------
# Limits


def test_costly_checks_have_a_limit_that_full_lifts(monkeypatch):
    monkeypatch.setattr("dualize.findings.subject.GUDHI_LIMIT", 5)
    monkeypatch.setattr("dualize.findings.homology.GUDHI_LIMIT", 5)
    report = audit(SPHERE)
    assert report["betti"].against == "6 simplices, limit 5; --full"
    assert {report[name].verdict for name in ("euler", "euler-betti", "foam-b1", "orientability")} == {
        "not checked"
    }
    assert audit(SPHERE, full=True)["foam-b1"].verdict == "holds"


def test_links_have_a_limit_too(monkeypatch):
    monkeypatch.setattr("dualize.findings.subject.LINK_LIMIT", 5)
    monkeypatch.setattr("dualize.findings.space.LINK_LIMIT", 5)
    report = audit(SPHERE)
    assert report["manifold"].verdict == "undecided"
    assert report["duality"].against == "links not checked: 6 simplices, limit 5; --full"
