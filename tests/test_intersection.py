"""Intersection forms: published ones, doubles, subdivisions, orientation, refusals."""

import pytest
from catalogue import CATALOGUE, NAMES, SMALL_GLUINGS
from spaces import doubled, from_table, glued, listed
from specimens import scrambled

from dualize import TriangulationError, build, change
from dualize.coloured import from_coloured_graph
from dualize.kernels import mode
from dualize.topology.intersection import intersection_form


def invariants(t):
    form = intersection_form(t)
    return form.rank, abs(form.determinant), abs(form.signature), form.parity


@pytest.mark.parametrize("name", [n for n in NAMES if CATALOGUE[n].intersection_form])
def test_intersection_form_is_the_published_one(name):
    assert intersection_form(listed(name)).to_dict() == CATALOGUE[name].intersection_form


def test_k3_is_even_of_rank_22_and_signature_16():
    """V. A. Rokhlin 1952; K3: A. Scorpan, The Wild World of 4-Manifolds, 2005, chapter 3 (from memory)."""
    assert invariants(listed("k3_16")) == (22, 1, 16, "even")


@pytest.mark.parametrize(
    "name, expected",
    [
        # by Kuenneth: hyperbolic planes, one for each pair of complementary 2-tori (common practice)
        ("t4_31", (6, 1, 0, "even")),
        ("prod_t2_s2_28", (2, 1, 0, "even")),
        ("s3_x_s1_11", (0, 1, 0, "even")),
        ("simplex_bd_5", (0, 1, 0, "even")),
    ],
)
def test_products_and_spheres(name, expected):
    assert invariants(listed(name)) == expected


@pytest.mark.parametrize(
    "name, expected",
    [
        # the double of CP2 without a ball is CP2 # -CP2
        ("cp2_minus_ball_9", (2, 1, 0, "odd")),
        # of S2 x B2 it is S2 x S2, of S1 x B3 S3 x S1, of T2 x B2 T2 x S2
        ("s2_x_b2_12", (2, 1, 0, "even")),
        ("s1_x_b3_10", (0, 1, 0, "even")),
        ("t2_x_b2_21", (2, 1, 0, "even")),
    ],
)
def test_doubles_have_signature_zero(name, expected):
    assert invariants(doubled(listed(name))) == expected


def test_reversal_changes_the_sign_of_the_signature():
    t = listed("cp2_9")
    assert intersection_form(change.reverse(t).triangulation).signature == -intersection_form(t).signature


def test_signatures_of_components_are_added():
    """CP2 with -CP2 beside it, and CP2 with a second CP2."""
    t = listed("cp2_9")
    same = change.union(t, t).triangulation
    other = change.union(t, change.reverse(t).triangulation).triangulation
    assert [abs(intersection_form(x).signature) for x in (same, other)] == [2, 0]


@pytest.mark.parametrize("seed", range(3))
def test_a_gluing_in_no_order_goes_through_its_subdivision(seed):
    """The same space, corners renumbered at random, so that gluings keep no order."""
    from reference import glue_by_labels

    table = scrambled(glue_by_labels(CATALOGUE["cp2_9"].facets), seed)
    t = from_table(table)
    assert not build(t).flags["ordered"]
    assert invariants(t) == (1, 1, 1, "odd")


def test_the_crystallisation_of_cp2():
    """C. Gagliardi, On the genus of the complex projective plane, Aequationes Math. 37 (1989) 130-140."""
    import networkx

    maps = ["0123", "0231", "1032", "1203", "2301"]
    graph = networkx.MultiGraph()
    for colour, images in enumerate(maps):
        for white, black in enumerate(images):
            graph.add_edge(f"w{white}", f"b{black}", colour=colour)
    assert invariants(from_coloured_graph(graph)) == (1, 1, 1, "odd")


@pytest.mark.parametrize("name", [n for n in SMALL_GLUINGS if n.startswith("four")])
def test_gluings_of_two_simplices_have_no_form_to_speak_of(name):
    """Their second homology is 0: S4 six times, S3 x S1 twice (see `catalogue`)."""
    assert invariants(glued(SMALL_GLUINGS[name])) == (0, 1, 0, "even")


def test_compiled_and_interpreted_kernels_agree():
    found = []
    for kind in ("interpreted", "compiled"):
        with mode(kind):
            found.append(intersection_form(listed("prod_s2_s2_16")))
    assert found[0] == found[1]


@pytest.mark.parametrize(
    "name, message",
    [
        ("cp2_minus_ball_9", "with boundary is not computed"),
        ("prod_rp2_s2_24", "not orientable"),
        ("t3_15", "belongs to dimension 4"),
    ],
)
def test_what_has_no_form_is_refused(name, message):
    with pytest.raises(TriangulationError, match=message):
        intersection_form(listed(name))


def test_a_pseudomanifold_may_have_a_form_that_is_not_unimodular():
    """16 points of the Kummer variety have links RP3, so H^2 is unimodular only over Z[1/2]."""
    form = intersection_form(listed("kummer_k4_16"))
    assert form.rank == 6 and abs(form.determinant) == 2**6
