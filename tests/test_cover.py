"""The orientable double cover."""

import json

import numpy as np
import pytest
from catalogue import CATALOGUE
from commandline import dualize, lines

from dualize import InputError, Triangulation, audit, build, change
from dualize.topology.classes import census
from dualize.topology.homology import integral_homology

Z, ZERO = [0], []
# Covers by what the spaces are: the bundles over the circle are covered by products, RP^2 by S^2 (A. Hatcher,
# Algebraic Topology, 2002, sections 1.3 and 3.3; from memory).
COVERS = {
    "klein_s2_s1_twisted_9": [Z, Z, Z, Z],  # S^2 x S^1
    "s3_s1_twisted_12": [Z, Z, ZERO, Z, Z],  # S^3 x S^1
    "prod_rp2_s2_24": [Z, ZERO, [0, 0], ZERO, Z],  # S^2 x S^2
    "prod_rp2_s1_18": [Z, Z, Z, Z],  # S^2 x S^1
    "b3_bundle_twisted_9": [Z, Z, ZERO, ZERO, ZERO],  # B^3 x S^1
}


def listed(name):
    return Triangulation.from_facets(CATALOGUE[name].facets)


@pytest.mark.parametrize("name", COVERS)
def test_cover_has_the_homology_of_the_space_that_covers(name):
    assert integral_homology(change.double_cover(listed(name)).triangulation) == COVERS[name]


@pytest.mark.parametrize("name", COVERS)
def test_cover_of_a_manifold_has_twice_the_simplices_of_every_dimension(name):
    t = change.double_cover(listed(name)).triangulation
    assert census(t).f == [2 * f for f in CATALOGUE[name].f]
    assert t.matched  # it is a labelled complex again


@pytest.mark.parametrize("name", [*COVERS, "kummer_k3_8"])
def test_cover_is_connected_and_audited_orientable(name):
    report = audit(change.double_cover(listed(name)).triangulation)
    assert report.ok and report["connected"].verdict == report["orientable"].verdict == "yes"


def test_cover_of_the_kummer_variety_is_the_torus():
    # T^3/{+-1}: the sign changes orientation in dimension 3, so its cover is T^3, branched over the 8 points
    # with links RP^2 (W. Kuehnel, Minimal triangulations of Kummer varieties, 1987; from memory).
    t = change.double_cover(listed("kummer_k3_8")).triangulation
    assert integral_homology(t) == [[0], [0, 0, 0], [0, 0, 0], [0]]
    assert census(t).f[0] == 8 and audit(t)["manifold"].verdict == "yes"


@pytest.mark.parametrize("name", [*COVERS, "kummer_k3_8"])
def test_the_map_down_carries_gluings_to_gluings(name):
    t = listed(name)
    result = change.double_cover(t)
    assert np.bincount(result.refined_from).tolist() == [2] * len(t)
    over = result.triangulation.across
    neighbours = [sorted(result.refined_from[row].tolist()) for row in np.where(over >= 0, over, 0)]
    # simplices of the cover touch what their images touch, slot by slot up to the order of the corners
    expected = [sorted(np.where(row >= 0, row, 0).tolist()) for row in t.across[result.refined_from]]
    closed = (t.across >= 0).all()
    assert not closed or neighbours == expected
    assert ((over < 0).sum(axis=1) == (t.across < 0).sum(axis=1)[result.refined_from]).all()


def test_first_sheet_keeps_labels_where_it_can():
    t = listed("klein_s2_s1_twisted_9")
    result = change.double_cover(t)
    assert set(np.unique(t.corners)) < set(np.unique(result.triangulation.corners))
    assert len(result.new_labels) == 9


def test_words_and_coordinates_are_carried_along():
    rows = [[f"p{x}" for x in f] for f in CATALOGUE["klein_s2_s1_twisted_9"].facets]
    points = np.arange(27.0).reshape(9, 3)
    t = Triangulation.from_facets(rows, coordinates=points)
    result = change.double_cover(t).triangulation
    assert len(result.corner_names) == 18 and result.coordinates.point.shape == (18, 3)
    assert sorted(map(tuple, result.coordinates.point)) == sorted(2 * list(map(tuple, points)))


def test_gluing_table_one_tetrahedron_over_the_other():
    # the non-orientable closed gluing of two tetrahedra: an S^2 bundle over the circle
    from catalogue import SMALL_GLUINGS

    tables = [
        Triangulation.from_gluings([[p[0] for p in r] for r in rows], [[p[1] for p in r] for r in rows])
        for rows in SMALL_GLUINGS.values()
    ]
    [bent] = [t for t in tables if not all(build(t).flags["orientable"])]
    cover = change.double_cover(bent).triangulation
    assert len(cover) == 4 and integral_homology(cover) == [[0], [0], [0], [0]]
    assert build(cover).flags["orientable"] == [True]


def test_orientable_component_becomes_two_copies_and_is_noted():
    both = change.union(listed("klein_s2_s1_twisted_9"), listed("simplex_bd_4")).triangulation
    result = change.double_cover(both)
    assert result.notes == ("1 orientable component became two copies each",)
    assert build(result.triangulation).counts["components"] == 3


def test_orientable_complex_is_refused():
    with pytest.raises(InputError, match="orientable, so its double cover is two copies"):
        change.double_cover(listed("t3_15"))


def test_command_line_writes_cover_and_origin(tmp_path):
    source = CATALOGUE["klein_s2_s1_twisted_9"].path
    done = dualize("change", source, "double-cover", "-o", "cover.txt", "--origin", "from.json", cwd=tmp_path)
    assert done.returncode == 0, done.stderr
    assert "27 -> 54 simplices" in lines(done.stderr)
    assert len(json.loads((tmp_path / "from.json").read_text())["refined_from"]) == 54
