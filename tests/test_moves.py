"""Both sides of a Pachner move have the same boundary, signs included, and counts that differ as published.

U. Pachner, P.L. homeomorphic manifolds are equivalent by elementary shellings, European J. Combin. 12 (1991)
129-145 (from memory).
"""

import random

import numpy as np
import pytest
from specimens import move_side, other_side

import dualize

# (dimension, simplices before): 1-3, 2-2; 1-4, 2-3; 1-5, 2-4, 3-3
MOVES = [(2, 1), (2, 2), (3, 1), (3, 2), (4, 1), (4, 2), (4, 3)]
IDS = [f"{d}d-{k}-{d + 2 - k}" for d, k in MOVES]


def built(facets):
    return dualize.build(dualize.Triangulation.from_facets(facets))


def flipped(facets):
    """The same complex with the opposite orientation: two labels of the first simplex exchanged."""
    first = facets[0]
    return [[first[1], first[0], *first[2:]], *facets[1:]]


def nodes_by_labels(skeleton):
    """{labels of the facet: orientation of the node}"""
    rows = zip(skeleton["nodes/corners"].tolist(), skeleton["nodes/orientation"].tolist(), strict=True)
    return {tuple(labels): sign for labels, sign in rows}


def links_by_labels(skeleton):
    """{labels of the ridge: (labels of the node it starts from, of the node it ends at, twist)}"""
    nodes = [tuple(row) for row in skeleton["nodes/corners"].tolist()]
    columns = ("links/corners", "links/source", "links/target", "links/twist")
    rows = zip(*(skeleton[name].tolist() for name in columns), strict=True)
    return {tuple(labels): (nodes[a], nodes[b], twist) for labels, a, b, twist in rows}


def places_by_labels(skeleton):
    """{(labels of the facet, place): (labels of the link there, does it leave?)}"""
    nodes = [tuple(row) for row in skeleton["nodes/corners"].tolist()]
    ridges = [tuple(row) for row in skeleton["links/corners"].tolist()]
    return {
        (labels, place): (
            ridges[skeleton["nodes/link"][n, place]],
            int(skeleton["nodes/link_leaves"][n, place]),
        )
        for n, labels in enumerate(nodes)
        for place in range(len(labels))
    }


def sides(d, k, seed=None):
    """Both sides of a move, oriented so that their boundaries agree."""
    before, after = move_side(d, k), other_side(d, k)
    if seed is not None:
        rng = random.Random(seed)
        before, after = (
            [rng.sample(f, d + 1) for f in rng.sample(side, len(side))] for side in (before, after)
        )
    one, two = built(before), built(after)
    a, b = nodes_by_labels(one), nodes_by_labels(two)
    first = next(iter(a))
    return one, two if a[first] == b[first] else built(flipped(after))


@pytest.mark.parametrize("d, k", MOVES, ids=IDS)
@pytest.mark.parametrize("seed", [None, 1, 2, 3], ids=["as-written", "order-1", "order-2", "order-3"])
class TestBoundaries:
    def test_nodes_are_equal_by_labels_and_sign(self, d, k, seed):
        one, two = sides(d, k, seed)
        assert nodes_by_labels(one) == nodes_by_labels(two)
        # the boundary of one side: facets that omit one label of each side
        assert len(nodes_by_labels(one)) == k * (d + 2 - k)

    def test_links_are_equal_by_labels_and_direction(self, d, k, seed):
        one, two = sides(d, k, seed)
        assert links_by_labels(one) == links_by_labels(two)

    def test_places_are_equal_by_labels(self, d, k, seed):
        one, two = sides(d, k, seed)
        assert places_by_labels(one) == places_by_labels(two)

    def test_the_opposite_orientation_reverses_every_node_and_link(self, d, k, seed):
        one, _ = sides(d, k, seed)
        facets = one["vertices/corners"].tolist()  # sorted, so that the first simplex is positive
        reverse = built(flipped(facets) if one["vertices/orientation"][0] == 1 else facets)
        assert nodes_by_labels(reverse) == {labels: -sign for labels, sign in nodes_by_labels(one).items()}
        turned = {labels: (b, a, twist) for labels, (a, b, twist) in links_by_labels(one).items()}
        assert links_by_labels(reverse) == turned


# dV, dE, dF: computed from the boundary of the (d+1)-simplex (Pachner 1991)
CHANGES = {(3, 1): (3, 6, 4), (3, 2): (1, 2, 1), (4, 1): (4, 10, 10), (4, 2): (2, 5, 4), (4, 3): (0, 0, 0)}


@pytest.mark.parametrize("d, k", CHANGES, ids=[f"{d}d-{k}-{d + 2 - k}" for d, k in CHANGES])
def test_counts_change_as_published(d, k):
    one, two = built(move_side(d, k)), built(other_side(d, k))
    change = tuple(
        two.counts[name] - one.counts[name] for name in ("vertices", "edges_internal", "faces_internal")
    )
    assert change == CHANGES[d, k]


@pytest.mark.parametrize("d, k", MOVES, ids=IDS)
def test_both_sides_together_are_the_boundary_of_a_simplex(d, k):
    """Closed, oriented, every two simplices adjacent: opposite orientations of the shared boundary cancel."""
    whole = built(move_side(d, k) + other_side(d, k))
    assert whole.counts["nodes"] == 0
    assert list(whole.flags["orientable"]) == [True]
    assert whole.counts["edges_internal"] == (d + 2) * (d + 1) // 2
    pairs = {
        frozenset(pair)
        for pair in np.stack([whole["edges/source"][:, 0], whole["edges/target"][:, 0]], 1).tolist()
    }
    assert len(pairs) == (d + 2) * (d + 1) // 2
