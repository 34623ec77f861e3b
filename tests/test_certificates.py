"""Links and spaces shown to be spheres or balls by moves, or shown to be neither."""

import random
from collections import Counter

import numpy as np
import pytest
from catalogue import CATALOGUE, NAMES, SMALL_GLUINGS
from hypothesis import given, settings
from reference import Table
from spaces import doubled, from_table, glued, listed
from specimens import random_table, scrambled, sphere, suspension, tables

from dualize import InputError, Triangulation, TriangulationError, audit, build, make
from dualize.certificates import (
    BALL,
    NEITHER,
    SPHERE,
    UNDECIDED,
    Certificate,
    certify_links,
    recognise,
    space_kind,
)
from dualize.change import walk
from dualize.kernels import mode
from dualize.kernels.permutations import permutations_of
from dualize.topology.classes import census, classes
from dualize.topology.derived import second_derived_facets
from dualize.topology.gudhi import betti_numbers, simplex_tree
from dualize.topology.linkage import Forms, link

WORDS = {SPHERE: "sphere", BALL: "ball", NEITHER: "neither sphere nor ball", UNDECIDED: "undecided"}
LINKED = [n for n in NAMES if CATALOGUE[n].dimension > 2]
SUSPENDED_POINCARE = Triangulation.from_facets(suspension(CATALOGUE["poincare_16"].facets))

# --------------------------------------------------------------------------------------------------
# Links


@pytest.mark.parametrize("name", LINKED)
def test_verdicts_on_links_of_points_are_the_published_ones(name):
    verdicts = certify_links(listed(name))
    assert Counter(WORDS[x] for x in verdicts.kind[0].tolist()) == CATALOGUE[name].vertex_links


@pytest.mark.parametrize("name", ["k3_16", "rp3_x_i_22", "prod_rp2_s2_24", "kuhn_t4_n3"])
def test_moves_of_every_certificate_can_be_replayed(name):
    certificates = certify_links(listed(name)).certificates
    assert certificates
    for certificate in certificates:
        end = certificate.replay()
        assert len(end) == 5 and len(np.unique(end.corners)) == 5


def test_points_that_look_alike_share_one_certificate():
    """Vertex-transitive: K3 with 16 points and the torus with 31 (their groups: see `catalogue`)."""
    for name in ("k3_16", "t4_31", "kuhn_t4_n3", "cross_polytope_5"):
        assert len(certify_links(listed(name)).certificates) == 1


def test_the_suspended_poincare_sphere_is_no_manifold_by_the_group_of_two_links():
    """All homology tests pass: it has the homology of S4, and all links that of spheres."""
    verdicts = certify_links(SUSPENDED_POINCARE)
    assert not verdicts.figures.wrong(1).any() and not verdicts.figures.wrong(2).any()
    bad = np.flatnonzero(verdicts.kind[0] == NEITHER)
    assert [verdicts.reason(1, y) for y in bad.tolist()] == ["its group has 121 homomorphisms to A5"] * 2
    assert space_kind(verdicts, True) == "manifold but for non-spherical vertices"
    assert (verdicts.kind[0] == SPHERE).sum() == 16


def test_suspended_lens_spaces_are_excluded_by_homology():
    verdicts = certify_links(Triangulation.from_facets(suspension(CATALOGUE["l31_12"].facets)))
    bad = np.flatnonzero(verdicts.kind[0] == NEITHER)
    assert [verdicts.reason(1, y) for y in bad.tolist()] == ["H_1 = Z_3"] * 2


def test_suspending_a_singular_space_makes_segments_singular():
    """The double suspension of T2: on the circle of its two pairs of apexes links of segments are tori."""
    verdicts = certify_links(Triangulation.from_facets(suspension(CATALOGUE["susp_t2_9"].facets)))
    assert (verdicts.kind[1] == NEITHER).sum() == 4
    assert space_kind(verdicts, True) == "pseudomanifold"


@pytest.mark.parametrize(
    "name, kind",
    [
        ("cp2_9", "closed manifold"),
        ("rp3_11", "closed manifold"),
        ("t2_x_b2_21", "manifold with boundary"),
        ("solid_torus_7", "manifold with boundary"),
        ("torus_7", "closed manifold"),
        ("kummer_k3_8", "manifold but for non-spherical vertices"),
        ("kummer_k4_16", "manifold but for non-spherical vertices"),
    ],
)
def test_the_kind_of_space(name, kind):
    t = listed(name)
    assert space_kind(certify_links(t), bool((t.across >= 0).all())) == kind


def test_beyond_the_limit_the_group_decides():
    verdicts = certify_links(listed("rp3_x_i_22"), most=3)
    assert len(verdicts.certificates) == 3
    assert (verdicts.kind[0] == BALL).all()
    some = int(np.flatnonzero(verdicts.which < 0)[0])
    assert verdicts.reason(1, some) == "trivial fundamental group, by the Poincaré theorem"


def test_beyond_the_limit_a_homology_sphere_stays_undecided():
    verdicts = certify_links(SUSPENDED_POINCARE, most=0)
    assert (verdicts.kind[0] == UNDECIDED).sum() == 2
    assert space_kind(verdicts, True) == "undecided"


def test_compiled_and_interpreted_kernels_agree():
    found = []
    for kind in ("interpreted", "compiled"):
        with mode(kind):
            verdicts = certify_links(listed("prod_t2_s2_28"))
            found.append((verdicts.which.tolist(), [c.to_dict() for c in verdicts.certificates]))
    assert found[0] == found[1]


@settings(max_examples=12)
@given(tables(d=3, largest=2))
def test_links_of_random_gluings_agree_with_gudhi_in_the_second_derived_subdivision(table):
    """Every point of a gluing is one of its second subdivision, where gudhi reads the link."""
    t = from_table(table)
    verdicts = certify_links(t)
    facets = second_derived_facets(t)
    # which corner of which tetrahedron the first label of a piece stands for, -1 where it is none
    image = permutations_of(3).image.astype(int)
    piece = np.arange(len(facets))
    corner = np.where(image[piece % 24, 0] == 0, image[piece // 24 % 24, 0], -1)
    simplex = piece // 576
    number = classes(t, 1).number
    for point, kind in enumerate(verdicts.kind[0].tolist()):
        mine = (corner >= 0) & (number[simplex, np.maximum(corner, 0)] == point)
        betti = [betti_numbers(simplex_tree(facets[mine][:, 1:]), p) for p in (2, 3)]
        shown = {(1, 0, 1): SPHERE, (1, 0, 0): BALL}.get(tuple(betti[0]), NEITHER)
        if betti[0] != betti[1]:  # a projective plane looks like a disc over Z_3
            shown = NEITHER
        assert kind == shown


def test_verdicts_on_gluings_agree_with_gudhi_over_a_large_prime():
    """A gluing of two tetrahedra for each verdict; 32003 is large, so no torsion shows there."""
    for name in ("tetrahedra_2_0", "tetrahedra_2_16"):
        t = glued(SMALL_GLUINGS[name])
        tree = simplex_tree(second_derived_facets(t))
        found = [betti_numbers(tree, p) for p in (2, 32003)]
        assert found[1] == [1, 0, 0, 1]  # both are rational homology spheres
        assert (recognise(t).verdict == "sphere") == (found[0] == [1, 0, 0, 1])


# --------------------------------------------------------------------------------------------------
# Whole spaces


@pytest.mark.parametrize(
    "name",
    [
        "simplex_bd_4",
        "cell16",
        "cyclic_c7_4",
        "cyclic_c8_4",
        "barnette_sphere_8",
        "simplex_bd_5",
        "cross_polytope_5",
    ]
    + [f"cyclic_c{n}_5" for n in (7, 8, 9, 10)],
)
def test_spheres_are_recognised_by_moves_that_replay(name):
    """Boundaries of polytopes, and Barnette's non-polytopal sphere (1973)."""
    found = recognise(listed(name))
    assert found.verdict == "sphere"
    assert len(found.replay()) == CATALOGUE[name].dimension + 2


def test_zieglers_unshellable_ball_is_a_ball():
    """G. M. Ziegler, Discrete Comput. Geom. 19 (1998) 159-174."""
    found = recognise(listed("ziegler_ball_10"))
    assert (found.verdict, found.coned) == ("ball", True)
    found.replay()


@pytest.mark.parametrize("d", [2, 3, 4])
def test_one_simplex_is_a_ball_and_its_double_a_sphere(d):
    one = Triangulation.from_facets([list(range(d + 1))])
    assert recognise(one).verdict == "ball"
    assert recognise(doubled(one)).verdict == "sphere"


@pytest.mark.parametrize(
    "name, reason",
    [
        ("rp3_11", "H_1 = Z_2"),
        ("t3_15", "H_1 = Z^3"),
        ("cp2_9", "H_2 = Z"),
        ("poincare_16", "its group has 121 homomorphisms to A5"),
        ("solid_torus_7", "H_1 = Z"),
        ("susp_t2_9", "the link of a point has Euler characteristic 0"),
    ],
)
def test_what_is_no_sphere_or_ball_is_excluded_for_a_reason(name, reason):
    found = recognise(listed(name))
    assert (found.verdict, found.reason) == ("neither", reason)


def test_poincares_sphere_without_a_tetrahedron_is_no_ball():
    """It has the homology of a point and a sphere as its boundary."""
    t = Triangulation.from_facets(CATALOGUE["poincare_16"].facets[1:])
    assert recognise(t).reason == "its group has 121 homomorphisms to A5"


def test_gluings_of_the_sphere_are_the_published_numbers():
    """S3 among all closed gluings: 2 of 4 with one tetrahedron, 6 of 17 with two (see `catalogue`)."""
    found = Counter()
    for name, rows in SMALL_GLUINGS.items():
        if name.startswith("tetrahedra"):
            verdict = recognise(glued(rows))
            found[name.split("_")[1], verdict.verdict] += 1
    assert found == {("1", "sphere"): 2, ("1", "neither"): 2, ("2", "sphere"): 6, ("2", "neither"): 11}


def test_a_gluing_is_reduced_through_its_subdivision_and_replays():
    found = recognise(glued(SMALL_GLUINGS["tetrahedra_2_0"]))
    assert len(found.stages) == 2  # as a gluing, then as a complex
    assert len(found.replay()) == 5


def test_a_walk_from_the_sphere_is_recognised():
    t = walk(Triangulation.from_facets(sphere(4)), 300, seed=2, target=60).triangulation
    assert recognise(t, manifold=True).verdict == "sphere"


def test_without_moves_the_group_decides_in_dimension_3():
    found = recognise(listed("cell16"), tries=())
    assert (found.verdict, found.stages) == ("sphere", ())
    assert "Poincaré theorem" in found.reason


def test_without_moves_a_homotopy_sphere_stays_undecided_in_dimension_4():
    found = recognise(listed("cross_polytope_5"), manifold=True, tries=())
    assert found.verdict == "undecided"
    assert "Freedman" in found.reason


def test_two_spheres_are_none():
    two = Triangulation.from_facets([*sphere(3), *[[x + 9 for x in f] for f in sphere(3)]])
    assert recognise(two).reason == "H_0 = Z^2"


def test_moves_that_lead_elsewhere_are_no_certificate():
    found = recognise(listed("barnette_sphere_8"))
    [stage] = found.stages
    short = Certificate("sphere", "", 19, (stage._replace(moves=stage.moves.upto(3)),))
    with pytest.raises(TriangulationError, match="do not end in the boundary of a simplex"):
        short.replay()


def test_stages_that_do_not_continue_each_other_are_no_certificate():
    found = recognise(glued(SMALL_GLUINGS["tetrahedra_2_0"]))
    other = recognise(glued(SMALL_GLUINGS["tetrahedra_1_0"]))
    mixed = Certificate("sphere", "", 2, (other.stages[0], found.stages[1]))
    with pytest.raises(TriangulationError, match="does not continue the one before"):
        mixed.replay()


# --------------------------------------------------------------------------------------------------
# Links as triangulations, and forms


@pytest.mark.parametrize("name", ["cp2_9", "rp3_11", "s2_x_b2_12"])
def test_links_of_points_are_what_the_labels_say(name):
    """Facets around a label, the label left out, counted and matched on their own."""
    t = listed(name)
    own = link(t, 0, [0])
    x = int(t.corners[0, 0])
    rows = [[y for y in f if y != x] for f in t.corners.tolist() if x in f]
    apart = Triangulation.from_facets(rows)
    assert census(own).f == census(apart).f
    forms = Forms()
    assert forms.find(own) == (0, True) and forms.find(apart) == (0, False)


def test_links_of_segments_in_dimension_4_are_surfaces():
    t = listed("susp_t3_17")
    around = [link(t, s, [a, b]) for s, a, b in ((0, 0, 1), (5, 1, 4), (17, 2, 3))]
    assert [x.dimension for x in around] == [2, 2, 2]
    assert all(recognise(x).verdict == "sphere" for x in around)


@pytest.mark.parametrize("corners", [[], [0, 1, 2], [5], [1, 1]], ids=str)
def test_a_link_of_too_few_dimensions_is_refused(corners):
    with pytest.raises(InputError, match="no link of dimension 2 or more"):
        link(listed("cp2_9"), 0, corners)


def test_isomorphic_gluings_have_one_form_and_different_ones_several():
    """The 21 closed gluings of one and two tetrahedra are different up to relabelling (see `catalogue`)."""
    forms = Forms()
    rows = [r for name, r in SMALL_GLUINGS.items() if name.startswith("tetrahedra")]
    assert [forms.find(glued(r)) for r in rows] == [(x, True) for x in range(21)]
    for x, r in enumerate(rows):
        t = glued(r)
        table = Table(
            t.across.tolist(), [[tuple(p) for p in line] for line in t.carry.tolist()], [1] * len(t)
        )
        assert forms.find(from_table(scrambled(table, 7 * x))) == (x, False)


@pytest.mark.parametrize("seed", range(5))
def test_forms_of_bounded_gluings_do_not_depend_on_the_numbering(seed):
    table = random_table(random.Random(seed), 3, 1 + seed, boundary=0.3)
    t = from_table(table)
    if build(t, keep_singular=True).counts["components"] > 1:
        pytest.skip("forms are of connected complexes")
    forms = Forms()
    assert forms.find(t) == (0, True)
    assert forms.find(from_table(scrambled(table, seed + 100))) == (0, False)


# --------------------------------------------------------------------------------------------------
# In the audit


def test_every_offender_is_in_the_report_and_ten_in_the_table():
    report = audit(listed("kummer_k4_16"))
    finding = report["space"]
    assert finding.figure == "manifold but for non-spherical vertices"
    assert len(finding.offenders) == 16 == len(finding.to_dict()["offenders"])
    assert finding.where.count("point") == 10 and finding.where.endswith("and 6 more")


def test_the_audit_states_certificates_and_recognises_the_sphere():
    report = audit(listed("cyclic_c9_5"))
    assert report["sphere"].verdict == "yes" and report["ball"].verdict == "no"
    assert report["certificates"].figure["points"] == {"spheres": 9}
    assert report["certificates"].figure["different links of points"] == 5


def test_the_audit_recognises_a_grid_as_a_ball():
    report = audit(make.lattice(2, 2, 2))
    assert report["ball"].verdict == "yes" and report["sphere"].figure == "it has a boundary"
