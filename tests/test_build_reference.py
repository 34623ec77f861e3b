"""The package against the slow reference, table by table, with every kind of kernel and number of threads."""

from contextlib import contextmanager
from itertools import pairwise
from unittest import mock

import numpy as np
import pytest
from catalogue import CATALOGUE, NAMES
from hypothesis import given
from hypothesis import strategies as st
from reference import Refused, Table, glue_by_labels, reference_skeleton
from specimens import (
    GLUED,
    HOLONOMY,
    LABELLED,
    REFUSED,
    SINGULAR,
    around_ridge,
    delaunay,
    delaunay_facets,
    kuhn_grid,
    kuhn_torus,
    reordered,
    scrambled,
    scrambled_tables,
    seeds,
    shuffled,
    subcomplexes,
    tables,
    unlabelled,
)

import dualize
from dualize import kernels

WAYS = [("interpreted", 1), ("interpreted", 2), ("compiled", 1), ("compiled", 2), ("finely cut", 5)]
COMPILED = [("compiled", 1), ("compiled", 2), ("compiled", 3), ("compiled", 8)]


@contextmanager
def way(kind):
    """Kernels of one kind.  Small input is never shared among threads; "finely cut" shares any, so that rings
    and chains cross from thread to thread in small complexes too."""

    def ranges(engine, length, parts=None):
        parts = max(1, min(parts or engine.threads, length))
        return list(pairwise(length * part // parts for part in range(parts + 1)))

    if kind == "finely cut":
        with kernels.mode("compiled"), mock.patch.object(kernels.Engine, "ranges", ranges):
            yield
    else:
        with kernels.mode(kind):
            yield


# The layout of the conventions: the shape of a row after the first axis, and the width.
ROWS = {
    "vertices/corners": "K label",
    "vertices/orientation": "sign",
    "vertices/component": "id",
    "vertices/edge": "K id",
    "vertices/leaves": "K sign",
    "wedges/face": "W id",
    "wedges/direction": "W sign",
    "edges/source": "2 id",
    "edges/target": "2 id",
    "edges/twist": "sign",
    "edges/face": "D id",
    "edges/face_sign": "D sign",
    "edges/source_corner": "D sign",
    "edges/target_corner": "D sign",
    "faces/vertex_offsets": "offset",
    "faces/vertex": "id",
    "faces/wedge": "sign",
    "faces/edge_offsets": "offset",
    "faces/edge": "id",
    "faces/edge_sign": "sign",
    "faces/place": "sign",
    "faces/singular": "sign",
    "faces/against": "sign",
    "nodes/edge": "id",
    "nodes/vertex": "id",
    "nodes/slot": "sign",
    "nodes/orientation": "sign",
    "nodes/component": "id",
    "nodes/link": "D id",
    "nodes/link_leaves": "D sign",
    "nodes/corners": "D label",
    "links/source": "id",
    "links/target": "id",
    "links/face": "id",
    "links/twist": "sign",
    "links/corners": "D-1 label",
    "vertices/point": "K id",
    "vertices/segment": "W id",
    "vertices/segment_sign": "W sign",
}
WIDTHS = {"id": np.int32, "sign": np.int8, "offset": np.int64, "label": np.int64}


def assert_same(skeleton, reference):
    """Every table, its shape and its width; counts; flags."""
    d = len(reference["vertices/edge"][0]) - 1
    sizes = {"K": d + 1, "W": d * (d + 1) // 2, "D": d, "D-1": d - 1, "2": 2}
    wanted = {name for name in reference if "/" in name}
    assert set(skeleton.arrays) == wanted
    for name in sorted(wanted):
        *row, width = ROWS[name].split()
        shape = (len(reference[name]), *(sizes[letter] for letter in row))
        got = np.asarray(skeleton[name])
        assert got.shape == shape, name
        assert got.dtype == WIDTHS[width], name
        expected = np.array(reference[name], dtype=WIDTHS[width]).reshape(shape)
        if not np.array_equal(got, expected):
            at = tuple(int(x[0]) for x in np.nonzero(got != expected))
            pytest.fail(f"{name}{list(at)}: package {got[at]}, reference {expected[at]}")
    assert dict(skeleton.counts) == reference["counts"]
    flags = {**skeleton.flags, "orientable": [bool(x) for x in skeleton.flags["orientable"]]}
    assert flags == reference["flags"]


def from_table(table):
    """The package's triangulation of a reference table."""
    k = table.dimension + 1
    carry = [[[-1] * k if p is None else list(p) for p in row] for row in table.carry]
    return dualize.Triangulation.from_gluings(
        table.across, carry, written=table.written, corners=table.corners
    )


# A word of the package's message for each kind of refusal.
MESSAGES = {
    "repeated label": "label",
    "overfull facet": "facet",
    "holonomy": "holonomy",
    "pinched ridge": "pinched",
    "twins": "same labels",
}


def assert_agrees(make, reference, keep_singular=False, ways=WAYS, points=True):
    """`make()` is built in every way as the reference builds, or refused exactly when it refuses."""
    try:
        expected, refusal = reference(), None
    except Refused as refused:
        expected, refusal = None, refused.kind
    for kind, threads in ways:
        with way(kind):
            if refusal is None:
                skeleton = dualize.build(make(), keep_singular=keep_singular, points=points, threads=threads)
                assert_same(skeleton, expected)
            else:
                with pytest.raises(dualize.TriangulationError, match=MESSAGES[refusal]):
                    dualize.build(make(), keep_singular=keep_singular, points=points, threads=threads)
    return refusal


def assert_facets_agree(facets, keep_singular=False, **how):
    return assert_agrees(
        lambda: dualize.Triangulation.from_facets(facets),
        lambda: reference_skeleton(glue_by_labels(facets), keep_singular, points=True),
        keep_singular,
        **how,
    )


def assert_table_agrees(table, keep_singular=False, **how):
    return assert_agrees(
        lambda: from_table(table),
        lambda: reference_skeleton(table, keep_singular, points=True),
        keep_singular,
        **how,
    )


# --------------------------------------------------------------------------------------------------
# Everything in the cabinet and in the catalogue


@pytest.mark.parametrize("name", NAMES)
def test_catalogue_agrees(name):
    ways = WAYS if len(CATALOGUE[name].facets) < 400 else COMPILED[:2]
    assert assert_facets_agree(CATALOGUE[name].facets, ways=ways) is None


@pytest.mark.parametrize("name", NAMES)
def test_catalogue_agrees_under_other_orders_and_names(name):
    facets = shuffled(CATALOGUE[name].facets, seed=len(name))
    assert assert_facets_agree(facets, ways=[("compiled", 2)]) is None


@pytest.mark.parametrize("name", LABELLED)
def test_labelled_specimen_agrees(name):
    assert assert_facets_agree(LABELLED[name]) is None


@pytest.mark.parametrize("name", LABELLED)
def test_labelled_specimen_agrees_under_other_orders_and_names(name):
    for seed in range(3):
        assert assert_facets_agree(shuffled(LABELLED[name], seed)) is None


@pytest.mark.parametrize("name", GLUED)
def test_gluing_table_agrees(name):
    assert assert_table_agrees(GLUED[name]) is None


@pytest.mark.parametrize("name", LABELLED)
def test_labelled_specimen_agrees_as_a_gluing_table_without_labels(name):
    table = unlabelled(glue_by_labels(LABELLED[name]))
    assert assert_table_agrees(table) is None
    assert assert_table_agrees(scrambled(table, seed=7)) is None


@pytest.mark.parametrize("name", SINGULAR)
def test_singular_complex_is_refused_like_the_reference(name):
    facets, kind = SINGULAR[name]
    assert assert_facets_agree(facets) == kind


@pytest.mark.parametrize("name", SINGULAR)
def test_singular_complex_is_kept_like_the_reference(name):
    for seed in range(3):
        assert assert_facets_agree(shuffled(SINGULAR[name][0], seed), keep_singular=True) is None


@pytest.mark.parametrize("name", HOLONOMY)
def test_holonomy_is_refused_or_kept_like_the_reference(name):
    assert assert_table_agrees(HOLONOMY[name]) == "holonomy"
    assert assert_table_agrees(HOLONOMY[name], keep_singular=True) is None


@pytest.mark.parametrize("keep_singular", [False, True], ids=["strict", "keeping"])
@pytest.mark.parametrize("name", REFUSED)
def test_list_without_a_dual_is_refused_like_the_reference(name, keep_singular):
    facets, kind = REFUSED[name]
    with pytest.raises(dualize.DualizeError, match=MESSAGES[kind]):
        dualize.build(
            dualize.Triangulation.from_facets(facets),
            keep_singular=keep_singular,
        )


@pytest.mark.parametrize("name", ["3d-sphere", "4d-around-7", "4d-moebius-slab"])
def test_points_are_left_out_unless_asked_for(name):
    skeleton = dualize.build(dualize.Triangulation.from_facets(LABELLED[name]))
    assert_same(skeleton, reference_skeleton(glue_by_labels(LABELLED[name])))


@pytest.mark.parametrize("name", ["3d-sphere", "4d-around-7", "tetrahedra_2_16"])
def test_keeping_singular_complexes_changes_nothing_where_none_is(name):
    if name in LABELLED:
        assert assert_facets_agree(LABELLED[name], keep_singular=True) is None
    else:
        assert assert_table_agrees(GLUED[name], keep_singular=True) is None


# --------------------------------------------------------------------------------------------------
# Larger ones, which threads share by themselves

LARGE = {
    "2d-grid-40x30": lambda: kuhn_grid((40, 30)),
    "2d-delaunay-1200": lambda: delaunay_facets(2, 1200, seed=2),
    "3d-torus-8x8x6": lambda: kuhn_grid((8, 8, 6), periodic=True),
    "3d-delaunay-500": lambda: delaunay_facets(3, 500, seed=3),
    "4d-grid-4x3x3x3": lambda: kuhn_grid((4, 3, 3, 3)),
    "4d-delaunay-150": lambda: delaunay_facets(4, 150, seed=4),
    # one face that is longer than any thread's share of the wedges
    "2d-round-one-vertex": lambda: around_ridge(2, 9000),
    "3d-round-one-edge": lambda: around_ridge(3, 3000),
}


@pytest.mark.parametrize("name", LARGE)
def test_large_complex_agrees(name):
    facets = LARGE[name]()
    assert assert_facets_agree(facets, ways=[("interpreted", 2), *COMPILED]) is None
    assert assert_facets_agree(shuffled(facets, seed=1), ways=COMPILED) is None


@pytest.mark.parametrize("shape", [(40, 30), (8, 6, 9), (4, 3, 2, 4)], ids=str)
def test_large_gluing_table_agrees(shape):
    table = kuhn_torus(shape)
    assert assert_table_agrees(table, ways=COMPILED) is None
    assert assert_table_agrees(scrambled(table, seed=3), ways=COMPILED) is None


@pytest.mark.parametrize("threads", range(1, 12))
def test_any_cut_among_threads_changes_nothing(threads):
    facets = shuffled(delaunay_facets(3, 60, seed=3), seed=5)
    assert assert_facets_agree(facets, ways=[("finely cut", threads)]) is None


# --------------------------------------------------------------------------------------------------
# Random ones


@pytest.mark.parametrize("d", [2, 3, 4])
def test_random_delaunay_triangulations_agree(d):
    @given(reordered(delaunay(d)))
    def check(facets):
        assert assert_facets_agree(facets) is None

    check()


@pytest.mark.parametrize("keep_singular", [False, True], ids=["strict", "keeping"])
@pytest.mark.parametrize("d", [2, 3, 4])
def test_random_subcomplexes_agree(d, keep_singular):
    @given(reordered(subcomplexes(d)))
    def check(facets):
        refused = assert_facets_agree(facets, keep_singular)
        assert refused in ((None,) if keep_singular else (None, "pinched ridge"))

    check()


@pytest.mark.parametrize("keep_singular", [False, True], ids=["strict", "keeping"])
@pytest.mark.parametrize("d", [2, 3, 4])
def test_random_gluing_tables_agree(d, keep_singular):
    @given(tables(d))
    def check(table):
        refused = assert_table_agrees(table, keep_singular)
        assert refused in ((None,) if keep_singular else (None, "holonomy"))

    check()


@given(scrambled_tables())
def test_scrambled_gluing_tables_agree(table):
    assert assert_table_agrees(table) is None


@pytest.mark.parametrize("kind", ["interpreted", "compiled"])
def test_labels_that_a_gluing_does_not_keep_are_refused(kind):
    table = GLUED["3d-melon-1"]  # glued along slot 0
    table = Table(table.across, table.carry, table.written, [[0, 1, 2, 3], [4, 1, 2, 3]])
    assert assert_table_agrees(table) is None
    table.corners[1][1] = 7
    with kernels.mode(kind), pytest.raises(dualize.DualizeError, match="label"):
        from_table(table)


@given(seeds, st.sampled_from(sorted(LABELLED)))
def test_a_gluing_table_may_carry_labels_in_any_corner_order(seed, name):
    table = scrambled(glue_by_labels(LABELLED[name]), seed)
    assert assert_table_agrees(table) is None


# --------------------------------------------------------------------------------------------------
# Tables that are no gluing


def identity_pair(d=3):
    across = [[1] * (d + 1), [0] * (d + 1)]
    carry = [[list(range(d + 1))] * (d + 1) for _ in range(2)]
    return across, carry


def with_change(row, slot, simplex=None, image=None):
    across, carry = (np.array(x).tolist() for x in identity_pair())
    if simplex is not None:
        across[row][slot] = simplex
    if image is not None:
        carry[row][slot] = image
    return Table(across, [[tuple(p) for p in r] for r in carry], [1, 1])


NO_GLUINGS = {
    "simplex too large": (with_change(0, 1, simplex=2), "out of range", "simplex"),
    "simplex too small": (with_change(1, 2, simplex=-2), "out of range", "simplex"),
    "corner twice": (with_change(0, 1, image=[0, 1, 1, 3]), "no permutation", "permutation"),
    "corner too large": (with_change(0, 1, image=[0, 1, 2, 4]), "no permutation", "permutation"),
    "corner negative": (with_change(0, 1, image=[0, 1, 2, -1]), "no permutation", "permutation"),
    "no way back": (with_change(0, 1, simplex=-1), "inverse", "back|inverse"),
    "another way back": (with_change(0, 1, image=[2, 1, 0, 3]), "inverse", "back|inverse"),
    "another facet": (with_change(0, 1, image=[1, 0, 2, 3]), "inverse", "back|inverse"),
    "facet on itself": (
        with_change(0, 1, simplex=0, image=[2, 1, 0, 3]),
        "self-glued facet",
        "itself",
    ),
}


@pytest.mark.parametrize("kind", ["interpreted", "compiled"])
@pytest.mark.parametrize("name", NO_GLUINGS)
def test_table_that_is_no_gluing_is_refused_like_the_reference(name, kind):
    table, reason, message = NO_GLUINGS[name]
    with pytest.raises(Refused, match=reason):
        reference_skeleton(table)
    with kernels.mode(kind), pytest.raises(dualize.DualizeError, match=message):
        from_table(table)


@given(tables(), seeds)
def test_damaged_random_tables_are_refused_exactly_when_the_reference_refuses(table, seed):
    rng = np.random.default_rng(seed)
    n, k = len(table.across), table.dimension + 1
    across = [list(row) for row in table.across]
    carry = [[tuple(range(k)) if p is None else p for p in row] for row in table.carry]
    s, i = int(rng.integers(n)), int(rng.integers(k))
    if rng.random() < 0.5:
        across[s][i] = int(rng.integers(-2, n + 1))
    else:
        carry[s][i] = tuple(int(x) for x in rng.permutation(k))
    damaged = Table(across, carry, table.written)

    def built():
        try:
            return dualize.build(from_table(damaged), keep_singular=True, threads=1)
        except dualize.DualizeError:
            return None

    try:
        expected = reference_skeleton(damaged, keep_singular=True)
    except Refused:
        assert built() is None
    else:
        skeleton = built()
        assert skeleton is not None
        assert_same(skeleton, expected)
