"""Parity sectors and bounds, against trying all labellings."""

from dataclasses import replace
from itertools import pairwise, product

import numpy as np
import pytest
from sums import FOAMS, all_labellings, boundaries, foam_of, reach, rows_at

import dualize
from dualize import InputError, spins
from dualize.spins.bounds import propagated

every_foam = pytest.mark.parametrize("name", FOAMS)


def sectors_by_trying(s, outer):
    inner = s.counts["faces_internal"]
    return {
        parity
        for parity in product((0, 1), repeat=inner)
        if all(sum(row) % 2 == 0 for row in rows_at(s, [*parity, *outer]))
    }


@every_foam
def test_sectors_are_the_parities_that_every_edge_allows(name):
    s = foam_of(name)
    for outer in boundaries(s):
        found = spins.parity_sectors(spins.rules_of(s, outer))
        expected = sectors_by_trying(s, (outer % 2).tolist())
        assert found.feasible == bool(expected)
        if expected:
            assert 2**found.exponent == len(expected)
            assert {tuple(found.sector(n).tolist()) for n in range(len(expected))} == expected


@every_foam
def test_basis_vectors_are_closed_surfaces(name):
    s = foam_of(name)
    found = spins.parity_sectors(spins.rules_of(s))
    basis = found.basis()
    assert len(basis) == found.exponent
    for vector in basis:
        labels = np.zeros(s.counts["faces_internal"] + s.counts["links"], dtype=int)
        labels[vector] = 1
        assert all(sum(row) % 2 == 0 for row in rows_at(s, labels))


def test_loose_faces_have_either_parity():
    s = dualize.build(dualize.make.move_side(4, 4))
    assert spins.parity_sectors(spins.rules_of(s, 1)).loose.all()
    s = dualize.build(dualize.make.move_side(4, 3))
    assert not spins.parity_sectors(spins.rules_of(s, 1)).loose.any()


def test_integer_spins_have_one_sector():
    s = dualize.build(dualize.make.move_side(4, 5))
    assert spins.parity_sectors(spins.rules_of(s, 2, step=2)).exponent == 0


def test_impossible_parities_come_with_edges_that_contradict():
    """A curve of half-integer links that bounds no surface mod 2: a circle around an annulus, at one end."""
    s = dualize.build(dualize.make.slab(dualize.make.torus(2)))
    links = s.counts["links"]
    met = 0
    rng = np.random.default_rng(5)
    nodes = s["nodes/link"]
    for _ in range(200):
        parity = random_cycle(nodes, links, rng)
        rules = spins.rules_of(s, 2 + parity)
        found = spins.parity_sectors(rules)
        if found.feasible:
            labels = np.concatenate([found.particular, parity])
            assert all(sum(row) % 2 == 0 for row in rows_at(s, labels))
            continue
        met += 1
        edges = list(found.contradiction)
        faces = s["edges/face"][edges]
        internal = faces[faces < s.counts["faces_internal"]]
        assert (np.bincount(internal) % 2 == 0).all()
        outside = faces[faces >= s.counts["faces_internal"]] - s.counts["faces_internal"]
        assert parity[outside].sum() % 2 == 1
    assert met > 20


def random_cycle(nodes, links, rng):
    """A random set of links that meets every node an even number of times, by elimination."""
    import networkx

    graph = networkx.MultiGraph()
    ends = {}
    for n, row in enumerate(nodes.tolist()):
        for link in row:
            ends.setdefault(link, []).append(n)
    for link, (a, b) in ends.items():
        graph.add_edge(a, b, key=link)
    tree = networkx.Graph()
    chosen = {}
    for a, b, link in graph.edges(keys=True):
        if a != b and (not tree.has_node(a) or not tree.has_node(b) or not networkx.has_path(tree, a, b)):
            tree.add_edge(a, b)
            chosen[frozenset((a, b))] = link
    parity = np.zeros(links, dtype=int)
    for a, b, link in graph.edges(keys=True):
        if link not in chosen.values() and rng.integers(2):
            parity[link] ^= 1
            path = networkx.shortest_path(tree, a, b)
            for x, y in pairwise(path):
                parity[chosen[frozenset((x, y))]] ^= 1
    return parity


def rank_mod_2(rows):
    """Rank by elimination of rows as bits, one after the other."""
    pivots = {}
    for row in rows:
        while row and row.bit_length() in pivots:
            row ^= pivots[row.bit_length()]
        if row:
            pivots[row.bit_length()] = row
    return len(pivots)


@pytest.mark.parametrize("bipartite", [True, False], ids=["orientable", "any"])
@pytest.mark.parametrize("seed", [3, 4, 6, 10, 17, 23, 29, 31])
def test_any_right_hand_side_is_solved_or_contradicted(seed, bipartite):
    """Coloured graphs of no manifold: conditions remain that determine no face and follow from no cut."""
    s = dualize.build(dualize.make.coloured_graph(12, 4, bipartite, seed=seed))
    rules = spins.rules_of(s)
    edges, inner = len(rules.face), s.counts["faces_internal"]
    matrix = np.zeros((edges, inner), dtype=int)
    np.add.at(matrix, (np.repeat(np.arange(edges), 4), rules.face.ravel()), 1)
    matrix %= 2
    exponent = inner - rank_mod_2([int("".join(map(str, row)), 2) for row in matrix.tolist()])
    rng = np.random.default_rng(seed)
    outcomes = set()
    for turn in range(40):
        right = matrix @ rng.integers(0, 2, inner) % 2
        right ^= (rng.random(edges) < 0.03) * (turn % 2)
        found = spins.parity_sectors(replace(rules, total=right))
        outcomes.add(found.feasible)
        assert found.exponent == exponent
        if found.feasible:
            for n in (0, int(rng.integers(2**exponent))):
                np.testing.assert_array_equal(matrix @ found.sector(n) % 2, right)
        else:
            chosen = list(found.contradiction)
            assert not (matrix[chosen].sum(axis=0) % 2).any() and right[chosen].sum() % 2 == 1
        assert found.feasible or turn % 2
    assert outcomes == {True, False}


# --------------------------------------------------------------------------------------------------
# Bounds


@pytest.mark.parametrize("method", ["propagation", "linear", "integer"])
@every_foam
def test_bounds_hold_all_labellings(name, method):
    s = foam_of(name)
    most = reach(s.counts["faces_internal"])
    for outer in boundaries(s, 4, seed=3):
        rules = spins.rules_of(s, outer)
        found = all_labellings(s, outer.tolist(), most)
        bounds = spins.spin_bounds(rules, method=method)
        if not len(found):
            continue
        assert bounds.contradiction is None
        assert (bounds.least <= found.min(axis=0)).all()
        free = bounds.greatest < 0
        assert free.tolist() == spins.growth(rules).unbounded.tolist()
        assert ((bounds.greatest >= found.max(axis=0)) | free).all()
        if method == "integer":
            assert bounds.exact
            assert bounds.least.tolist() == found.min(axis=0).tolist()
            known = ~free & (bounds.greatest <= most)
            assert (bounds.greatest == found.max(axis=0))[known].all()


@pytest.mark.parametrize("dimension", [3, 4])
def test_bounds_of_random_foams(dimension):
    """Delaunay triangulations of seven random points."""
    met = 0
    for seed in range(10):
        s = dualize.build(dualize.make.random_delaunay(7, dimension, seed=seed))
        inner = s.counts["faces_internal"]
        if not 0 < inner <= 4:
            continue
        met += 1
        for outer in boundaries(s, 3, seed):
            rules = spins.rules_of(s, outer)
            found = all_labellings(s, outer.tolist(), reach(inner))
            assert spins.count_labellings(rules, reach(inner)) == len(found)
            if not len(found):
                continue
            outer_bounds, reached = (spins.spin_bounds(rules, method=m) for m in ("linear", "integer"))
            assert reached.least.tolist() == found.min(axis=0).tolist()
            assert (outer_bounds.least <= reached.least).all()
            for bounds in (outer_bounds, reached):
                limit = np.where(bounds.greatest < 0, reach(inner), bounds.greatest)
                assert (limit >= found.max(axis=0)).all()
            known = (reached.greatest >= 0) & (reached.greatest <= reach(inner))
            assert (reached.greatest == found.max(axis=0))[known].all()
    assert met > 2


def test_integer_bounds_of_a_sector_are_those_of_its_labellings():
    s = foam_of("4d-melon-4")
    outer = np.array([2, 2, 2, 2])
    rules = spins.rules_of(s, outer)
    sectors = spins.parity_sectors(rules)
    found = all_labellings(s, outer.tolist(), 3)
    for n in range(2**sectors.exponent):
        parity = sectors.sector(n)
        inside = found[(found % 2 == parity).all(axis=1)]
        bounds = spins.spin_bounds(rules, method="integer", sector=parity)
        assert bounds.least.tolist() == inside.min(axis=0).tolist()


def test_three_around_a_triangle_has_two_terms():
    """All boundary spins 1/2: the inner spin is 1/2 or 3/2, by the polygon inequality at each edge."""
    s = dualize.build(dualize.make.move_side(4, 3))
    bounds = spins.spin_bounds(spins.rules_of(s, 1))
    assert (bounds.least.tolist(), bounds.greatest.tolist()) == ([1], [3])


def test_contradicting_inequalities_come_with_multipliers():
    """Farkas' lemma (J. Farkas, 1902; from memory): the multiples add up to an impossible inequality."""
    s = dualize.build(dualize.make.ridge_ring(4, 3))
    inner = s.counts["faces_internal"]
    draw = np.random.default_rng(0).integers(0, 3, (100_000, s.counts["links"]))
    at = draw[:, s["nodes/link"]]
    good = ((at.sum(2) % 2 == 0) & (2 * at.max(2) <= at.sum(2))).all(1)
    met = 0
    for row in draw[good]:
        rules = spins.rules_of(s, row)
        bounds = spins.spin_bounds(rules)
        if bounds.contradiction is None or bounds.contradiction.kind != "inequalities":
            continue
        met += 1
        why = bounds.contradiction
        assert len(all_labellings(s, row.tolist(), 20)) == 0
        labels = np.concatenate([np.zeros(inner, dtype=int), row])
        slope, constant = np.zeros(inner, dtype=int), 0
        for e, k, m in zip(why.edges, why.places, why.multipliers, strict=True):
            faces = s["edges/face"][e]
            for place, f in enumerate(faces.tolist()):
                sign = -1 if place == k else 1
                if f < inner:
                    slope[f] += m * sign
                else:
                    constant += m * sign * int(labels[f])
        # 0 <= slope * spins + constant cannot be: the slope is nowhere positive, the constant is negative
        assert (slope <= 0).all() and constant < 0
        if met == 4:
            break
    assert met >= 3


def test_propagation_notices_what_is_empty():
    s = dualize.build(dualize.make.move_side(4, 3))
    rules = spins.rules_of(s, 1)
    least, greatest = propagated(rules, np.array([5]), np.array([9]))
    assert (least > greatest).any()


def test_unknown_methods_are_refused():
    rules = spins.rules_of(dualize.build(dualize.make.simplex(4)), 0)
    with pytest.raises(InputError, match="no method 'guess'"):
        spins.spin_bounds(rules, method="guess")
