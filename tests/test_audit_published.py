"""The audit against published values, entry by entry of the catalogue, and against known spaces.

Sources stand in `catalogue.py`; those of single facts stand beside them.
"""

import re

import pytest
from catalogue import CATALOGUE, NAMES
from hypothesis import given, settings
from specimens import (
    cone,
    delaunay,
    disjoint,
    moebius_band,
    projective_plane,
    scrambled_tables,
    shuffled,
    sphere,
    subcomplexes,
    suspension,
    tables,
)

import dualize
from dualize import Triangulation, make
from dualize.audit import audit

LARGE = {"cell600", "kuhn_t4_n3"}  # gudhi takes a second over each: their figures are in `test_topology`


def ranks(homology, prime):
    """Betti numbers over Z_prime of integral groups "Z^2+Z_2" (universal coefficients)."""
    free, torsion = [], []
    for group in homology:
        parts = re.findall(r"Z(?:\^(\d+))?(?:_(\d+))?", group)
        free.append(sum(int(n or 1) for n, t in parts if not t))
        torsion.append(sum(1 for _, t in parts if t and int(t) % prime == 0))
    below = [0, *torsion[:-1]]
    return [f + t + b for f, t, b in zip(free, torsion, below, strict=True)]


@pytest.fixture(scope="module", params=[n for n in NAMES if n not in LARGE])
def published(request):
    entry = CATALOGUE[request.param]
    return entry, audit(Triangulation.from_facets(entry.facets))


def test_no_identity_is_violated(published):
    _, report = published
    assert report.ok
    unchecked = {f.check for f in report if f.verdict == "not checked"}
    assert unchecked <= {
        "duality",
        "integral-duality",
        "unimodular",
        "group-homology",
        "dehn-sommerville",
        "euler-dual",
        "euler-boundary",
        "foam-b1",
    }


def test_f_vector_and_euler_characteristic(published):
    entry, report = published
    assert report["f-vector"].figure == entry.f
    assert report["euler"].figure == entry.euler
    assert report["euler"].verdict == "holds"


def test_betti_numbers_over_both_fields(published):
    entry, report = published
    betti = report["betti"].figure
    assert betti["Z_2"] == ranks(entry.homology, 2)
    assert betti["Z_9973"] == ranks(entry.homology, 9973)


def test_orientability(published):
    entry, report = published
    assert (report["orientable"].verdict == "yes") is entry.orientable


def test_links(published):
    """The published verdict on every vertex link: sphere, ball, or neither."""
    entry, report = published
    assert (report["manifold"].verdict == "yes") is entry.manifold
    assert (report["homology-manifold"].verdict == "yes") is entry.manifold
    neither = entry.vertex_links.get("neither sphere nor ball", 0)
    if neither:
        assert report["manifold"].figure == f"{neither} links are no homology spheres or balls"
    elif entry.dimension > 2:
        points = report["links"].figure["points"]
        assert points.get("inside", 0) == entry.vertex_links.get("sphere", 0)
        assert points.get("on the boundary", 0) == entry.vertex_links.get("ball", 0)


def test_degrees_of_ridges(published):
    entry, report = published
    internal = report["ridge-degrees"].figure.get("internal", {})
    assert {int(k): n for k, n in internal.items()} == entry.face_lengths


def test_boundary(published):
    entry, report = published
    if entry.boundary is None:
        assert report["closed"].verdict == "yes"
        return
    figure = report["boundary"].figure
    assert figure["components"] == entry.boundary["components"]
    assert figure["f-vector"] == entry.boundary["f"]
    betti = report["boundary-betti"].figure
    assert betti["Z_2"] == ranks(entry.boundary["homology"], 2)
    assert betti["Z_9973"] == ranks(entry.boundary["homology"], 9973)


@pytest.mark.parametrize("name", ["rp3_minus_ball_11", "prod_rp2_s1_18", "susp_t2_9", "s1_x_b3_10", "cp2_9"])
def test_without_its_labels_a_complex_has_the_same_verdicts(name):
    t = Triangulation.from_facets(CATALOGUE[name].facets)
    bare = Triangulation(t.across, t.rank, t.written)
    one, two = audit(t), audit(bare)
    assert [(f.check, f.verdict) for f in one] == [(f.check, f.verdict) for f in two]
    for check in ("f-vector", "betti", "euler"):
        assert one[check].figure == two[check].figure


# --------------------------------------------------------------------------------------------------
# Spaces that mislead


def test_the_foam_of_a_suspended_torus_sees_the_space_without_its_singular_points():
    """b_1 = 2 in the foam, 0 in the suspension (common practice: a suspension is simply connected)."""
    finding = audit(Triangulation.from_facets(suspension(CATALOGUE["torus_7"].facets)))["foam-b1"]
    assert finding.verdict == "not checked"
    assert finding.figure["foam"] == {"Z_2": 2, "Z_9973": 2}
    assert finding.figure["triangulation"] == {"Z_2": 0, "Z_9973": 0}
    assert "without its singular points" in finding.against


def test_a_suspended_homology_sphere_is_no_manifold_by_the_groups_of_its_links():
    """No manifold, though every link has the homology of a sphere: two links are Poincaré's sphere, whose
    group has order 120 (H. Seifert, W. Threlfall, Lehrbuch der Topologie, 1934; from memory)."""
    report = audit(Triangulation.from_facets(suspension(CATALOGUE["poincare_16"].facets)))
    assert report.ok
    assert report["homology-manifold"].verdict == "yes"
    assert report["manifold"].verdict == "no"
    assert report["manifold"].where.count("its group has 121 homomorphisms to A5") == 2
    assert report["space"].figure == "manifold but for non-spherical vertices"
    assert len(report["space"].offenders) == 2
    assert report.fails(["manifold"]) == [report["manifold"]]


@pytest.mark.parametrize(
    "name, group",
    [("l31_12", "Z_3"), ("l51_16", "Z_5"), ("rp3_11", "Z_2"), ("s2_x_s1_10", "Z"), ("t3_15", "Z^3")],
)
def test_torsion_in_a_link_is_seen_whatever_the_prime(name, group):
    """H_1 of lens spaces, S2 x S1, T3: H. Seifert, W. Threlfall, Topologie (1934), from memory."""
    report = audit(Triangulation.from_facets(suspension(CATALOGUE[name].facets)))
    assert report["manifold"].verdict == "no"
    assert report["manifold"].where.count(f"H_1 = {group}") == 2


@pytest.mark.parametrize(
    "facets, where",
    [
        (cone(projective_plane()), "point 6: chi 1, not 2 as of a sphere"),
        (suspension(projective_plane()), "point 6: chi 1, not 2 as of a sphere"),
        (suspension(suspension(projective_plane())), "segment 6 8: chi 1, not 2 as of a sphere"),
    ],
    ids=["cone", "suspension", "twice suspended"],
)
def test_the_worst_links_are_named_by_their_labels(facets, where):
    finding = audit(Triangulation.from_facets(facets))["manifold"]
    assert finding.verdict == "no"
    assert where in finding.where


def test_two_balls_at_one_point_are_connected_by_labels_only():
    facets = [[0, 1, 2, 3], [3, 4, 5, 6]]
    report = audit(Triangulation.from_facets(facets))
    assert report["manifold"].where == "point 3: disconnected link"
    assert report["betti"].figure["Z_2"][0] == 1
    assert report["components"].figure == {"bulk": 2, "boundary": 2}
    assert report["foam-b0"].verdict == "not checked"


def test_components_are_counted_apart():
    report = audit(Triangulation.from_facets(disjoint(sphere(3), moebius_slab(), sphere(3))))
    assert report.ok
    assert report["connected"].figure == "3 components"
    assert report["orientable"].where == "component 1"


def moebius_slab():
    from specimens import slab

    return slab(moebius_band())


# --------------------------------------------------------------------------------------------------
# Properties on random complexes


@settings(max_examples=12)
@given(delaunay())
def test_delaunay_balls_are_balls(facets):
    """A Delaunay triangulation of points in general position is a ball (common practice)."""
    report = audit(Triangulation.from_facets(facets))
    assert report.ok
    assert report.fails(["connected", "orientable", "simplicial", "manifold"]) == []
    dimension = len(facets[0]) - 1
    assert report["betti"].figure["Z_2"] == [1] + [0] * dimension
    assert report["boundary-betti"].figure["Z_9973"] == [1] + [0] * (dimension - 2) + [1]


@settings(max_examples=20)
@given(subcomplexes())
def test_subcomplexes_violate_nothing(facets):
    triangulation = Triangulation.from_facets(facets)
    assert audit(triangulation, keep_singular=True).ok


@settings(max_examples=10)
@given(scrambled_tables())
def test_scrambled_gluings_violate_nothing(table):
    from damage import triangulation

    assert audit(triangulation(table)).ok


@settings(max_examples=10)
@given(tables(d=3, largest=4))
def test_random_gluings_violate_nothing(table):
    from damage import triangulation

    assert audit(triangulation(table), keep_singular=True).ok


@pytest.mark.parametrize("name", ["cp2_9", "solid_torus_7", "susp_t2_9"])
def test_names_and_order_do_not_change_the_figures(name):
    facets = CATALOGUE[name].facets
    one = audit(Triangulation.from_facets(facets))
    two = audit(Triangulation.from_facets(shuffled(facets, 3)))
    for f, g in zip(one, two, strict=True):
        assert (f.check, f.verdict) == (g.check, g.verdict)
        if f.check in ("f-vector", "betti", "ridge-degrees", "boundary", "links"):
            assert f.figure == g.figure


# --------------------------------------------------------------------------------------------------
# Coordinates


def lattice(n, periodic_chart):
    import numpy as np
    from specimens import kuhn_grid

    facets = np.array(kuhn_grid((n, n, n), periodic=True))
    points = np.array(np.unravel_index(np.arange(n**3), (n, n, n))).T.astype(float)
    period = np.full(3, float(n)) if periodic_chart else None
    return facets, dualize.Coordinates(point=points, period=period)


def test_a_periodic_seam_raises_no_alarm():
    facets, chart = lattice(4, True)
    report = audit(Triangulation.from_facets(facets, coordinates=chart))
    assert report.fails(["volumes", "sides"]) == []
    assert report["volumes"].figure == "from 0.167 to 0.167"


def test_without_the_period_the_seam_folds():
    facets, chart = lattice(4, False)
    report = audit(Triangulation.from_facets(facets, coordinates=chart))
    assert report["sides"].verdict == "no"


def test_charts_of_single_simplices_are_compared_after_translation():
    import numpy as np

    facets, chart = lattice(3, True)
    corner = chart.point[facets]
    origin = corner[:, :1]
    near = corner - 3 * np.round((corner - origin) / 3)
    shift = np.arange(len(facets))[:, None, None] * [[[5.0, -2.0, 7.0]]]
    charts = dualize.Coordinates(corner=near + shift)
    t = Triangulation.from_facets(facets, coordinates=charts)
    assert audit(t).fails(["volumes", "sides"]) == []
    bent = near.copy()
    bent[7, 2] += 0.1
    report = audit(Triangulation.from_facets(facets, coordinates=dualize.Coordinates(corner=bent)))
    assert "different edges in their two charts" in report["sides"].figure


TWISTED = {
    "exchange": ("z=yx", "paths", 18),
    "inversion": ("z=-x-y", "coned", 18),
    "reflection": ("z=-xy", "barycentric", 72),
}


@pytest.mark.parametrize("twist, variant, facets", TWISTED.values(), ids=TWISTED)
def test_a_twisted_seam_raises_no_alarm_but_tells_no_sides(twist, variant, facets):
    # the seam is a square of 3 x 3 squares, in 2 triangles each, 8 when subdivided; see make.lattice
    t = make.lattice(3, 3, 3, periodic="xyz", twist=twist, variant=variant)
    report = audit(t)
    assert report["volumes"].verdict == "yes"
    assert report["sides"].verdict == "undecided"
    assert f"{facets} facets lie in charts turned" in report["sides"].figure


@pytest.mark.parametrize(
    "apex, volumes, sides, where",
    [
        ([0.3, 0.3, -1.0], "yes", "yes", ""),
        ([0.3, 0.3, 0.0], "no", "undecided", "simplex 1: 0 1 2 4"),
        ([0.3, 0.3, 2.0], "yes", "no", "slot 3 of simplex 0: 0 1 2 3"),
    ],
    ids=["opposite", "flat", "folded"],
)
def test_flat_and_folded_neighbours_are_named(apex, volumes, sides, where):
    points = [[0, 0, 0], [1, 0, 0], [0, 1, 0], [0.2, 0.2, 1], apex]
    report = audit(Triangulation.from_facets([[0, 1, 2, 3], [0, 1, 2, 4]], coordinates=points))
    assert (report["volumes"].verdict, report["sides"].verdict) == (volumes, sides)
    assert where in report["volumes"].where + report["sides"].where


def test_more_axes_than_dimensions_have_volumes_and_no_sides():
    points = [[0, 0, 0], [1, 0, 0], [0, 1, 0], [1, 1, 1]]
    report = audit(Triangulation.from_facets([[0, 1, 2], [1, 2, 3]], coordinates=points))
    assert report["volumes"].verdict == "yes"
    assert report["sides"].verdict == "undecided"
