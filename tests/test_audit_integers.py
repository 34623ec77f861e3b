"""The audit over the integers: what it states, and that it notices what does not fit."""

import pytest
from catalogue import CATALOGUE, NAMES
from spaces import listed
from specimens import slab

from dualize import Triangulation, audit, build, change
from dualize.findings import Subject, integral
from dualize.topology.intersection import IntersectionForm
from dualize.topology.presentation import Presentation


def found_by(check, t, **figures):
    """Findings of one check, with some figures of the subject replaced."""
    x = Subject(build(t), None, False, None)
    x.__dict__.update(figures)
    return {f.check: f for f in check(x)}


@pytest.mark.parametrize("name", ["rp3_11", "kummer_k4_16", "prod_rp2_s2_24", "l51_16"])
def test_the_audit_states_the_published_homology(name):
    stated = audit(listed(name))["homology"].figure
    published = CATALOGUE[name].homology
    assert [g.replace(" ", "") for g in stated.values()] == published


def test_the_audit_states_k3s_form():
    report = audit(listed("k3_16"))
    assert report["intersection-form"].figure["parity"] == "even"
    assert report["unimodular"].figure == "determinant -1, rank 22, signature -16"


def test_a_form_belongs_to_closed_orientable_complexes_of_dimension_4_only():
    names = {
        f.check for name in ("rp3_11", "prod_rp2_s2_24", "cp2_minus_ball_9") for f in audit(listed(name))
    }
    assert not names & {"intersection-form", "unimodular"}


def test_the_group_is_stated_with_its_homomorphisms():
    report = audit(listed("l51_16"))
    assert report["fundamental-group"].figure.replace("A", "a") == "<a | a a a a a>"
    assert report["homomorphisms"].figure == CATALOGUE["l51_16"].dual_group["homomorphisms"]


def test_with_singular_points_the_audit_says_whose_group_it_is():
    report = audit(listed("susp_rp3_13"))
    assert "the space without its singular points" in report["fundamental-group"].against
    assert report["group-homology"].verdict == "not checked"


def test_groups_of_components_are_taken_together():
    both = change.union(listed("l31_12"), listed("l51_16")).triangulation
    assert audit(both)["group-homology"].figure == "Z_15"


@pytest.mark.parametrize("name", [n for n in NAMES if CATALOGUE[n].boundary and CATALOGUE[n].orientable])
def test_lefschetz_duality_holds_for_bounded_manifolds(name):
    found = found_by(integral.check_integral, listed(name))
    assert found["integral-duality"].verdict == "holds"
    assert found["integral-duality"].figure == "Lefschetz duality"


# identity -> check, complex, figures that are made wrong
LIES = {
    "universal-coefficients": (integral.check_integral, "rp3_11", {"integral": [[0], [], [2], [0]]}),
    "integral-duality": (integral.check_integral, "rp3_11", {"integral": [[0], [2], [2], [0]]}),
    "group-homology": (integral.check_groups, "rp3_11", {"groups": [Presentation(1, ((1, 1, 1),))]}),
    "unimodular": (integral.check_form, "cp2_9", {"integral": [[0], [], [0, 0], [], [0]]}),
}


@pytest.mark.parametrize(
    "integral_groups",
    [[[0], [2], [0], [0]], [[0], [0, 2], [], [0]]],
    ids=["one more free group in dimension 2", "in dimension 1"],
)
def test_free_parts_that_are_not_dual_violate_duality(integral_groups):
    found = found_by(integral.check_integral, listed("rp3_11"), integral=integral_groups)
    assert found["integral-duality"].verdict == "violated"


@pytest.mark.parametrize("name", LIES)
def test_figures_that_do_not_fit_violate_the_identity(name):
    check, where, figures = LIES[name]
    assert found_by(check, listed(where))[name].verdict == "holds"
    assert found_by(check, listed(where), **figures)[name].verdict == "violated"


@pytest.mark.parametrize(
    "form",
    [IntersectionForm(((2,),), 1, 2, 1, "even"), IntersectionForm(((1,),), 1, 1, 1, "even")],
    ids=["determinant 2", "even of signature 1"],
)
def test_forms_that_no_manifold_has_are_violations(form, monkeypatch):
    monkeypatch.setattr(integral, "intersection_form", lambda t, threads: form)
    assert found_by(integral.check_form, listed("cp2_9"))["unimodular"].verdict == "violated"


def test_beyond_the_limit_integers_are_not_checked(monkeypatch):
    monkeypatch.setattr("dualize.findings.subject.INTEGRAL_LIMIT", 5)
    report = audit(listed("cp2_9"))
    assert report["homology"].verdict == report["unimodular"].verdict == "not checked"
    assert report["homology"].against == "36 simplices, limit 5; --full"
    assert audit(listed("cp2_9"), full=True)["homology"].verdict == "stated"


def test_a_slab_over_a_sphere_is_no_ball():
    t = Triangulation.from_facets(slab(CATALOGUE["simplex_bd_4"].facets))
    report = audit(t)
    assert report["relative-homology"].figure == {"H_0": "0", "H_1": "Z", "H_2": "0", "H_3": "0", "H_4": "Z"}
    assert report["ball"].figure == "H_3 = Z"
