"""Counting, listing and drawing labellings, against trying all of them."""

import itertools
from collections import Counter

import numpy as np
import pytest
from sums import FOAMS, all_labellings, boundaries, foam_of, reach, rows_at, weight_count

import dualize
from dualize import InputError, LimitError, make, spins
from dualize.kernels import mode

every_foam = pytest.mark.parametrize("name", FOAMS)
both_modes = pytest.mark.parametrize("kind", ["interpreted", "compiled"])


def listed(rules, most, **options):
    rows = [c.spins for c in spins.list_labellings(rules, most, **options)]
    return np.concatenate(rows) if rows else np.zeros((0, rules.internal), dtype=np.int32)


@every_foam
def test_counts_are_those_of_trying_all(name):
    s = foam_of(name)
    most = reach(s.counts["faces_internal"])
    for outer in boundaries(s):
        rules = spins.rules_of(s, outer)
        found = all_labellings(s, outer.tolist(), most)
        assert spins.count_labellings(rules, most) == len(found)
        both = 0
        for row in found.tolist():
            product = 1
            for at in rows_at(s, [*row, *outer.tolist()]):
                product *= weight_count(at)
            both += product
        assert spins.count_labellings(rules, most, intertwiners=True) == both


@both_modes
@every_foam
def test_listing_gives_each_labelling_once(name, kind):
    s = foam_of(name)
    most = reach(s.counts["faces_internal"])
    for outer in boundaries(s):
        rules = spins.rules_of(s, outer)
        with mode(kind):
            rows = listed(rules, most, chunk=7)
        expected = all_labellings(s, outer.tolist(), most)
        assert len(rows) == len(expected)
        assert {tuple(r) for r in rows.tolist()} == {tuple(r) for r in expected.tolist()}
        assert (np.diff(rows.max(axis=1, initial=0)) >= 0).all()


@pytest.mark.parametrize("step", [2, 3])
def test_steps_keep_multiples(step):
    s = foam_of("4d-melon-3")
    for outer in boundaries(s, step=step):
        rules = spins.rules_of(s, outer, step=step)
        expected = all_labellings(s, outer.tolist(), 2 * step, step)
        assert {tuple(r) for r in listed(rules, 2 * step).tolist()} == {tuple(r) for r in expected.tolist()}
        assert spins.count_labellings(rules, 2 * step) == len(expected)


@both_modes
def test_a_listing_goes_on_from_any_position(kind):
    rules = spins.rules_of(foam_of("4d-melon-4"), 1)
    with mode(kind):
        whole = listed(rules, 3)
        done = 0
        for chunk in spins.list_labellings(rules, 3, chunk=37):
            done += len(chunk.spins)
            place = spins.Position.from_dict(chunk.position.to_dict())
            np.testing.assert_array_equal(listed(rules, 3, start=place, chunk=1000), whole[done:])
    assert done == len(whole) > 100


def test_a_listing_can_start_at_a_layer():
    rules = spins.rules_of(foam_of("4d-2-4"), 1)
    whole = listed(rules, 5)
    np.testing.assert_array_equal(listed(rules, 5, least=4), whole[whole.max(axis=1) >= 4])


def test_a_foreign_position_is_refused():
    rules = spins.rules_of(foam_of("4d-2-4"), 1)
    with pytest.raises(InputError, match="belongs to another sum"):
        next(spins.list_labellings(rules, 3, start=spins.Position(1, 0, (1, 0, 0, 0))))
    with pytest.raises(InputError, match="no position of a listing"):
        spins.Position.from_dict({"layer": 1})


@pytest.mark.parametrize("call", [spins.count_labellings, lambda r, n: next(spins.list_labellings(r, n))])
def test_negative_cutoffs_are_refused(call):
    with pytest.raises(InputError, match="not negative, as -1 is"):
        call(spins.rules_of(foam_of("4d-3-3"), 1), -1)


def test_integer_metrics_on_five_points():
    """The star of a point of five 4-simplices: integer semimetrics on five points, all tried."""
    rules = spins.rules_of(dualize.build(make.move_side(4, 5)), 0)
    pairs = list(itertools.combinations(range(5), 2))
    expected = 0
    for row in itertools.product(range(3), repeat=10):
        d = dict(zip(pairs, row, strict=True))
        sides = ([d[a, b], d[a, c], d[b, c]] for a, b, c in itertools.combinations(range(5), 3))
        expected += all(sum(x) % 2 == 0 and 2 * max(x) <= sum(x) for x in sides)
    assert spins.count_labellings(rules, 2) == expected


def test_large_counts_are_exact():
    """A chain of independent foams: the count is a power, beyond 64 bits."""
    one = make.move_side(4, 3).corners
    n = 60
    t = dualize.Triangulation.from_facets(np.concatenate([one + 10 * k for k in range(n)]))
    rules = spins.rules_of(dualize.build(t), 1)
    assert spins.count_labellings(rules, 3) == 2**n
    # at 1/2 three edges with two intertwiners each, at 3/2 with one
    assert spins.count_labellings(rules, 3, intertwiners=True) == 9**n


def test_cost_is_told_and_refused_beforehand():
    rules = spins.rules_of(dualize.build(make.simplex_boundary(4)), 0)
    cost = spins.counting_cost(rules, 2)
    assert cost.width >= 10 and "tables over at most" in str(cost)
    with pytest.raises(LimitError, match="counting would take"):
        spins.count_labellings(rules, 60)


# --------------------------------------------------------------------------------------------------
# Drawing


def test_draws_are_uniform():
    """Pearson's chi-squared test (1900), at 5 standard deviations."""
    s = foam_of("4d-melon-3")
    rules = spins.rules_of(s, 1)
    cases = {tuple(r) for r in all_labellings(s, [1] * s.counts["links"], 4).tolist()}
    sampler = spins.Sampler(rules, 4, seed=3)
    assert sampler.count == len(cases)
    number = 60 * len(cases)
    met = Counter(map(tuple, sampler.draw(number).tolist()))
    assert set(met) <= cases
    mean = number / len(cases)
    chi = sum((met[c] - mean) ** 2 for c in cases) / mean
    assert abs(chi - (len(cases) - 1)) < 5 * (2 * len(cases)) ** 0.5


def test_draws_with_intertwiners_are_weighted():
    s = foam_of("4d-3-3")
    # spin 1/2 has 2**3 intertwiners, spin 3/2 one
    drawn = spins.Sampler(spins.rules_of(s, 1), 3, intertwiners=True, seed=1).draw(900)
    assert abs(int((drawn == 1).sum()) - 800) < 5 * (900 * 8 / 81) ** 0.5


def test_draws_from_large_numbers_are_admissible():
    one = make.move_side(4, 3).corners
    t = dualize.Triangulation.from_facets(np.concatenate([one + 10 * k for k in range(40)]))
    rules = spins.rules_of(dualize.build(t), 2)
    sampler = spins.Sampler(rules, 6, intertwiners=True)
    assert sampler.count > 2**64
    drawn = sampler.draw(5)
    assert rules.hold(drawn).all() and len(np.unique(drawn)) > 2


def test_drawing_from_nothing_is_refused():
    with pytest.raises(InputError, match="no admissible labelling up to 0"):
        spins.Sampler(spins.rules_of(foam_of("4d-3-3"), 1), 0)
