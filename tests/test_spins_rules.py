"""The edge rule, intertwiner spaces and recoupling, against counting weights and against sympy."""

from itertools import product

import numpy as np
import pytest
from regions import SYMBOLS
from sums import FOAMS, allowed, foam_of, weight_count

import dualize
from dualize import InputError, spins

QUADRUPLES = list(product(range(5), repeat=4))


def test_dimension_of_four_spins_counts_weights():
    """Multiplicity of the trivial representation by characters (B. Hall, Lie Groups, 2015; from memory)."""
    got = spins.intertwiner_dimension(QUADRUPLES)
    assert got.tolist() == [weight_count(row) for row in QUADRUPLES]


@pytest.mark.parametrize("legs", [2, 3])
def test_dimension_of_few_spins_counts_weights(legs):
    rows = list(product(range(6), repeat=legs))
    assert spins.intertwiner_dimension(rows).tolist() == [weight_count(row) for row in rows]


@pytest.mark.parametrize("pairing", range(3))
def test_every_pairing_has_as_many_recoupling_spins(pairing):
    least, greatest = spins.recoupling_range(QUADRUPLES, pairing)
    assert ((greatest - least) // 2 + 1).tolist() == [weight_count(row) for row in QUADRUPLES]


@pytest.mark.parametrize("pairing", range(3))
def test_recoupling_spins_are_those_that_couple(pairing):
    order = spins.PAIRINGS[pairing]
    least, greatest = spins.recoupling_range(QUADRUPLES, pairing)
    for row, a, b in zip(QUADRUPLES, least.tolist(), greatest.tolist(), strict=True):
        p, q, r, s = (row[x] for x in order)
        both = [k for k in range(20) if weight_count((p, q, k)) and weight_count((r, s, k))]
        assert list(range(a, b + 1, 2)) == both


@pytest.mark.parametrize("name", FOAMS)
def test_rules_hold_where_the_table_says(name):
    s = foam_of(name)
    rules = spins.rules_of(s, 0)
    rng = np.random.default_rng(2)
    rows = rng.integers(0, 3, (60, s.counts["faces_internal"]))
    outer = [0] * s.counts["links"]
    assert rules.hold(rows).tolist() == [allowed(s, [*row, *outer]) for row in rows.tolist()]


def test_a_node_without_intertwiner_is_named():
    s = dualize.build(dualize.make.simplex(4))
    given = np.ones(10, dtype=int)
    given[0] = 2
    with pytest.raises(InputError, match="admit no intertwiner: their sum is odd"):
        spins.rules_of(s, given)
    given[:] = 0
    given[0] = 2
    with pytest.raises(InputError, match="one exceeds the sum of the others"):
        spins.rules_of(s, given)


@pytest.mark.parametrize(
    "given, match",
    [
        ([1, 2], "2 spins are given, and there are 10 links"),
        (-1, "not negative"),
        (0.5, "integers"),
        (1 << 40, "too large"),
    ],
    ids=["number", "negative", "half", "large"],
)
def test_bad_boundary_spins_are_refused(given, match):
    with pytest.raises(InputError, match=match):
        spins.rules_of(dualize.build(dualize.make.simplex(4)), given)


def test_boundary_spins_must_be_multiples_of_the_step():
    with pytest.raises(InputError, match="no multiple of 2"):
        spins.rules_of(dualize.build(dualize.make.simplex(4)), 1, step=2)


# --------------------------------------------------------------------------------------------------
# Recoupling


def test_six_j_symbols_are_those_of_sympy():
    """sympy.physics.wigner."""
    from sympy import Rational
    from sympy.physics.wigner import wigner_6j

    rng = np.random.default_rng(1)
    met = 0
    for row in rng.integers(0, 5, (1500, 6)).tolist():
        a, b, c, d, e, f = row
        triads = ((a, b, c), (a, e, f), (d, b, f), (d, e, c))
        if all(weight_count(t) for t in triads):
            value = float(wigner_6j(*(Rational(x, 2) for x in row)))
            assert spins.six_j(*row) == pytest.approx(value, abs=1e-14)
            met += 1
        else:
            assert spins.six_j(*row) == 0
    assert met > 20


def _basis(row, order):
    """The intertwiners of an order of the legs, with the axes of the legs in their places."""
    states = SYMBOLS.intertwiners(*(int(row[p]) for p in order))
    return np.moveaxis(states, range(1, states.ndim), [1 + p for p in order])


@pytest.mark.parametrize("legs", [2, 3, 4])
def test_overlaps_are_scalar_products_of_3jm_tensors(legs):
    rng = np.random.default_rng(legs)
    met = 0
    for row in rng.integers(0, 5, (400, legs)):
        if not weight_count(row.tolist()) or met == 60:
            continue
        new, old = rng.permutation(legs).tolist(), rng.permutation(legs).tolist()
        axes = range(1, legs + 1)
        expected = np.tensordot(_basis(row, new), _basis(row, old), axes=[axes, axes])
        np.testing.assert_allclose(spins.overlap(row.tolist(), new, old), expected, atol=1e-12)
        met += 1
    assert met > 10


@pytest.mark.parametrize("row", [(1, 1, 1, 1), (1, 2, 3, 2), (2, 1, 1, 2), (3, 2, 1, 2)], ids=str)
def test_coupled_phase_is_that_of_clebsch_gordan_coefficients(row):
    """sympy.physics.wigner.clebsch_gordan: either pair to k, then both to 0."""
    from sympy import Rational
    from sympy.physics.wigner import clebsch_gordan

    def cg(*twice):
        return float(clebsch_gordan(*(Rational(x, 2) for x in twice)))

    least, greatest = (int(x) for x in spins.recoupling_range(row))
    coupled = np.zeros(((greatest - least) // 2 + 1, *(s + 1 for s in row)))
    for index in product(*(range(s + 1) for s in row)):
        a, b, c, d = (s - 2 * x for s, x in zip(row, index, strict=True))
        if a + b + c + d == 0:
            for x, k in enumerate(range(least, greatest + 1, 2)):
                if abs(a + b) <= k:
                    pairs = cg(row[0], row[1], k, a, b, a + b) * cg(row[2], row[3], k, c, d, c + d)
                    coupled[(x, *index)] = pairs * cg(k, k, 0, a + b, c + d, 0)
    expected = np.tensordot(coupled, SYMBOLS.intertwiners(*row), axes=[range(1, 5)] * 2)
    places = (0, 1, 2, 3)
    np.testing.assert_allclose(spins.overlap(row, places, places, "coupled"), expected, atol=1e-12)
