"""Layouts and the symmetries behind them, against networkx and known groups."""

from collections import Counter

import networkx
import numpy as np
import pytest

from dualize.draw.layouts import layout, nearest
from dualize.draw.symmetry import best_rotation, cycles_of, symmetries

GRAPHS = {
    "pentagon": networkx.cycle_graph(5),
    "complete on five": networkx.complete_graph(5),
    "cube": networkx.hypercube_graph(3),
    "petersen": networkx.petersen_graph(),
    "path": networkx.path_graph(6),
    "star": networkx.star_graph(4),
    "without symmetry": networkx.frucht_graph(),
}
# orders of the groups; F. Harary, Graph Theory (1969), from memory
ORDERS = {
    "pentagon": 10,
    "complete on five": 120,
    "cube": 48,
    "petersen": 120,
    "path": 2,
    "star": 24,
    "without symmetry": 1,
}


def near(graph):
    number = {v: k for k, v in enumerate(graph)}
    return [Counter({number[w]: 1 for w in graph[v]}) for v in graph]


@pytest.mark.parametrize("name", GRAPHS)
def test_all_symmetries_are_found_and_each_is_one(name):
    found = list(symmetries(near(GRAPHS[name])))
    assert len(found) == ORDERS[name] == len({tuple(p) for p in found})
    matcher = networkx.isomorphism.GraphMatcher(GRAPHS[name], GRAPHS[name])
    assert len(found) == sum(1 for _ in matcher.isomorphisms_iter())
    for p in found:
        table = near(GRAPHS[name])
        assert all({p[w] for w in table[v]} == set(table[p[v]]) for v in range(len(p)))


def test_parallel_links_and_loops_limit_the_symmetries():
    square = [Counter({1: 1, 3: 1}), Counter({0: 1, 2: 1}), Counter({1: 1, 3: 1}), Counter({2: 1, 0: 1})]
    assert len(list(symmetries(square))) == 8
    doubled = [Counter({1: 2, 3: 1}), Counter({0: 2, 2: 1}), Counter({1: 1, 3: 1}), Counter({2: 1, 0: 1})]
    assert len(list(symmetries(doubled))) == 2
    looped = [Counter({0: 1, 1: 1, 3: 1}), *square[1:]]
    assert len(list(symmetries(looped))) == 2


def test_the_budget_ends_the_search():
    assert len(list(symmetries(near(networkx.complete_graph(9)), steps=500))) < 500


@pytest.mark.parametrize(
    ("name", "length"),
    [("pentagon", 5), ("complete on five", 5), ("petersen", 5), ("star", 4), ("path", None)],
)
def test_the_best_rotation_is_the_longest(name, length):
    cycles = best_rotation(near(GRAPHS[name]))
    if length is None:
        assert cycles is None
    else:
        assert {len(c) for c in cycles} - {1} == {length}
        assert sorted(v for c in cycles for v in c) == list(range(len(GRAPHS[name])))


def test_cycles_of_a_permutation():
    assert cycles_of([1, 0, 2, 4, 5, 3]) == [[0, 1], [2], [3, 4, 5]]


@pytest.mark.parametrize("name", GRAPHS)
def test_no_two_nodes_are_in_one_place(name):
    at, how = layout(near(GRAPHS[name]))
    gaps = np.linalg.norm(at[:, None] - at[None], axis=2) + 9 * np.eye(len(at))
    assert gaps.min() > 0.3
    assert how in ("symmetric", "planar", "springs")


@pytest.mark.parametrize(
    ("name", "how"), [("pentagon", "symmetric"), ("cube", "planar"), ("petersen", "symmetric")]
)
def test_planar_comes_before_symmetric_and_symmetric_before_springs(name, how):
    assert layout(near(GRAPHS[name]))[1] == how


def test_petersen_is_drawn_as_two_rings_of_five():
    at, _ = layout(near(GRAPHS["petersen"]))
    radii = np.sort(np.linalg.norm(at - at.mean(axis=0), axis=1))
    assert np.allclose(radii[:5], radii[0]) and np.allclose(radii[5:], radii[5]) and radii[5] > radii[4] + 0.1


def test_components_do_not_overlap():
    table = near(networkx.disjoint_union_all([networkx.cycle_graph(6)] * 5))
    at, _ = layout(table)
    boxes = [(at[k : k + 6].min(axis=0), at[k : k + 6].max(axis=0)) for k in range(0, 30, 6)]
    for k, (low, high) in enumerate(boxes):
        for low2, high2 in boxes[:k]:
            assert (low > high2).any() or (low2 > high).any()


def test_the_nearest_nodes_come_ring_by_ring():
    assert nearest(near(networkx.cycle_graph(9)), 4, 5) == [4, 3, 5, 2, 6]
