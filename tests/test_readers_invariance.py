"""What an amplitude must not depend on, what it must notice, and how regions compose.

All of it from files, by the readers in `scripts/`; the rules are those of the conventions and of linear
algebra.
"""

import numpy as np
import pytest
import specimens as sp
from reference import glue_by_labels, table_from_pairs
from regions import (
    READERS,
    admissible_spins,
    amplitude,
    compose,
    cut,
    foam,
    glued,
    rebase,
    same_region,
    scramble,
    tables_of,
)

from dualize import Skeleton, SkeletonError

both = pytest.mark.parametrize("reader", READERS.values(), ids=READERS.keys())

COMPLEXES = {
    "2d-melon-2": (sp.melon(2, 2), {}),
    "2d-moebius": (glue_by_labels(sp.moebius_band()), {}),
    "3d-three-around": (glue_by_labels(sp.move_side(3, 3)), {}),
    "3d-melon-3": (sp.melon(3, 3), {"up_to": 2}),
    "3d-snapped": (sp.GLUED["3d-snapped-tetrahedron"], {"up_to": 2}),
    "3d-twisted": (sp.GLUED["3d-twisted-tetrahedron"], {"up_to": 2}),
    "3d-chain-3": (glue_by_labels(sp.chain(3, 3)), {}),
    "4d-simplex": (glue_by_labels(sp.simplex(4)), {}),
    "4d-chain-3": (glue_by_labels(sp.chain(4, 3)), {}),
    "4d-three-around": (glue_by_labels(sp.move_side(4, 3)), {}),
    "4d-melon-3": (sp.melon(4, 3), {"up_to": 1}),
    "4d-twisted": (sp.GLUED["4d-twisted-simplex"], {}),
    "4d-snapped": (sp.GLUED["4d-snapped-simplex"], {}),
    "4d-closed": (sp.GLUED["four_simplices_2_3"], {"up_to": 1}),
    "3d-closed": (sp.GLUED["tetrahedra_2_4"], {"up_to": 3}),
}
complexes = pytest.mark.parametrize("table, options", COMPLEXES.values(), ids=COMPLEXES.keys())


# --------------------------------------------------------------------------------------------------
# Another description of the same complex


@both
@complexes
def test_scrambled_corners_and_directions(reader, table, options):
    """Simplices and corners renumbered and orientations redrawn: equal tensors, ends permuted and rebased."""
    one = glued(table)
    rng = np.random.default_rng(7)
    sizes, unordered = [], 0
    for _ in range(6):
        other, simplex, corner = scramble(table, rng)
        two = glued(other)
        nodes, links, rules = same_region(one, two, simplex, corner)
        spins = (
            admissible_spins(one, rng, largest=300, unequal=bool(nodes)) if nodes else np.empty(0, dtype=int)
        )
        theirs = np.empty_like(spins)
        theirs[links] = spins
        expected = rebase(amplitude(one, spins, reader, **options), spins, one, *rules)
        got = amplitude(two, theirs, reader, **options)
        np.testing.assert_allclose(
            np.transpose(got, nodes), expected, atol=1e-12 * max(1, np.abs(expected).max())
        )
        sizes.append(np.abs(expected).max())
        unordered += not two.flags["ordered"]
    assert max(sizes) > 1e-4
    assert unordered or len(table.across) == 1 or table.dimension == 2


@both
@pytest.mark.parametrize(
    "facets",
    [sp.move_side(4, 3), sp.chain(4, 2), sp.move_side(3, 3), sp.moebius_band()],
    ids=["4d-three-around", "4d-chain", "3d-three-around", "moebius"],
)
def test_shuffled_labels(reader, facets):
    """Simplices in another order, labels renamed and written in another order."""
    one = foam(facets)
    rng = np.random.default_rng(3)
    for _ in range(5):
        new = rng.permutation(20)
        order = rng.permutation(len(facets))
        listed = [[int(new[x]) for x in rng.permutation(facets[s])] for s in order]
        two = foam(listed)
        simplex = np.argsort(order).tolist()
        corner = [
            [two["vertices/corners"][simplex[s]].tolist().index(new[x]) for x in labels]
            for s, labels in enumerate(one["vertices/corners"].tolist())
        ]
        nodes, links, rules = same_region(one, two, simplex, corner)
        spins = admissible_spins(one, rng, largest=300)
        theirs = np.empty_like(spins)
        theirs[links] = spins
        expected = rebase(amplitude(one, spins, reader), spins, one, *rules)
        np.testing.assert_allclose(np.transpose(amplitude(two, theirs, reader), nodes), expected, atol=1e-12)


# --------------------------------------------------------------------------------------------------
# Tables changed by hand, consistently


def reverse_face(tables, face):
    """An internal face the other way, in every table."""
    tables["wedges/direction"][tables["wedges/face"] == face] *= -1
    tables["edges/face_sign"][tables["edges/face"] == face] *= -1
    a, b = tables["faces/vertex_offsets"][face : face + 2]
    for name in ("faces/vertex", "faces/wedge"):  # the first vertex stays first
        tables[name][a + 1 : b] = tables[name][a + 1 : b][::-1].copy()
    a, b = tables["faces/edge_offsets"][face : face + 2]
    for name in ("faces/edge", "faces/edge_sign", "faces/place"):
        tables[name][a:b] = tables[name][a:b][::-1].copy()
    tables["faces/edge_sign"][a:b] *= -1
    tables["faces/against"][face] = (tables["faces/edge_sign"][a:b] < 0).sum() % 2


def reverse_edge(tables, edge):
    """An internal edge the other way, in every table."""
    for one, two in (("edges/source", "edges/target"), ("edges/source_corner", "edges/target_corner")):
        tables[one][edge], tables[two][edge] = tables[two][edge].copy(), tables[one][edge].copy()
    tables["vertices/leaves"][tables["vertices/edge"] == edge] *= -1
    tables["edges/face_sign"][edge] *= -1
    steps = tables["faces/edge"] == edge
    tables["faces/edge_sign"][steps] *= -1
    for face in range(len(tables["faces/against"])):
        a, b = tables["faces/edge_offsets"][face : face + 2]
        tables["faces/against"][face] = (tables["faces/against"][face] + steps[a:b].sum()) % 2


def permute_places(tables, edge, order):
    """The places of an internal edge in another order, in every table."""
    for name in ("face", "face_sign", "source_corner", "target_corner"):
        tables[f"edges/{name}"][edge] = tables[f"edges/{name}"][edge][order]
    steps = tables["faces/edge"] == edge
    tables["faces/place"][steps] = np.argsort(order)[tables["faces/place"][steps]]


CHANGED = {
    "3d-three-around": (foam(sp.move_side(3, 3)), 2, {}),
    "4d-three-around": (foam(sp.move_side(4, 3)), 1, {}),
    "4d-melon-4": (glued(sp.melon(4, 4)), 1, {"up_to": 1}),
    "4d-closed": (glued(sp.GLUED["four_simplices_2_3"]), 1, {"up_to": 1}),
}
changed = pytest.mark.parametrize("skeleton, spin, options", CHANGED.values(), ids=CHANGED.keys())


@both
@changed
def test_reversed_internal_face(reader, skeleton, spin, options):
    expected = amplitude(skeleton, spin, reader, **options)
    for face in range(skeleton.counts["faces_internal"]):
        tables = tables_of(skeleton)
        reverse_face(tables, face)
        np.testing.assert_allclose(amplitude(tables, spin, reader, **options), expected, atol=1e-11)
    assert np.abs(expected).max() > 1e-3


@both
@changed
def test_reversed_internal_edge(reader, skeleton, spin, options):
    expected = amplitude(skeleton, spin, reader, **options)
    for edge in range(skeleton.counts["edges_internal"]):
        tables = tables_of(skeleton)
        reverse_edge(tables, edge)
        np.testing.assert_allclose(amplitude(tables, spin, reader, **options), expected, atol=1e-11)


@both
@changed
def test_permuted_places_of_an_internal_edge(reader, skeleton, spin, options):
    expected = amplitude(skeleton, spin, reader, **options)
    rng = np.random.default_rng(1)
    for edge in range(skeleton.counts["edges_internal"]):
        tables = tables_of(skeleton)
        permute_places(tables, edge, rng.permutation(skeleton.dimension))
        np.testing.assert_allclose(amplitude(tables, spin, reader, **options), expected, atol=1e-11)


# --------------------------------------------------------------------------------------------------
# Tables damaged: the number changes, and `validate` notices


def damaged(skeleton, name, change):
    arrays = {key: array.copy() for key, array in skeleton.arrays.items()}
    change(arrays[name])
    return Skeleton(skeleton.dimension, skeleton.counts, skeleton.flags, arrays, skeleton.corner_names)


def entries(skeleton, name):
    return list(np.ndindex(skeleton[name].shape))


def test_a_flipped_face_sign_changes_the_tensor_and_is_noticed():
    skeleton = foam(sp.move_side(4, 3))
    expected = amplitude(skeleton, 1)
    for place in entries(skeleton, "edges/face_sign"):

        def flip(table, place=place):
            table[place] *= -1

        wrong = damaged(skeleton, "edges/face_sign", flip)
        assert np.abs(amplitude(wrong, 1) - expected).max() > 1e-3, place
        with pytest.raises(SkeletonError, match="edges/face_sign"):
            wrong.validate()


@both
def test_swapped_target_corners_change_the_tensor_and_are_noticed(reader):
    skeleton = foam(sp.move_side(4, 3))
    expected = amplitude(skeleton, 1, reader)
    seen = 0
    for edge, place in entries(skeleton, "edges/target_corner"):
        if place == 0 or skeleton["edges/target"][edge, 0] < 0:
            continue  # the target is a node, which has no corners

        def swap(table, edge=edge, place=place):
            table[edge, [place - 1, place]] = table[edge, [place, place - 1]]

        wrong = damaged(skeleton, "edges/target_corner", swap)
        with pytest.raises(SkeletonError, match=r"edges/(target_corner|twist)"):
            wrong.validate()
        if (skeleton["edges/face"][edge, [place - 1, place]] >= skeleton.counts["faces_internal"]).all():
            # both faces have the spin 1/2
            assert np.abs(amplitude(wrong, 1, reader) - expected).max() > 1e-3, (edge, place)
            seen += 1
    assert seen > 8


def test_a_flipped_against_changes_the_symbols():
    skeleton = foam(sp.move_side(4, 3))
    expected = amplitude(skeleton, 1, READERS["symbols"])
    for face in range(len(skeleton["faces/against"])):

        def flip(table, face=face):
            table[face] ^= 1

        wrong = damaged(skeleton, "faces/against", flip)
        assert np.abs(amplitude(wrong, 1, READERS["symbols"]) - expected).max() > 1e-3, face
        with pytest.raises(SkeletonError, match="faces/against"):
            wrong.validate()


# --------------------------------------------------------------------------------------------------
# Composition


def all_slots(table):
    return [
        (s, i) for s, row in enumerate(table.across) for i, t in enumerate(row)
        if t >= 0 and (s, i) < (t, table.carry[s][i][i])
    ]  # fmt: skip


def turned_pair(d):
    """Two simplices glued along one facet by a turn of its corners: the order of the places is not kept."""
    image = [*range(1, d), 0, d]
    back = [image.index(c) for c in range(d + 1)]
    free = [None] * d
    return table_from_pairs([[*free, [1, image]], [*free, [0, back]]])


GLUINGS = {
    # name: (whole, cut slots or None for all of them, spins up to, components of the region)
    "two-4-simplices": (glue_by_labels(sp.chain(4, 2)), None, 3, 2),
    "two-4-simplices-turned": (turned_pair(4), None, 3, 2),
    "two-tetrahedra-turned": (turned_pair(3), None, 3, 2),
    "three-4-simplices-one-cut": (glue_by_labels(sp.move_side(4, 3)), 1, 3, 1),
    "three-4-simplices-two-cut": (glue_by_labels(sp.move_side(4, 3)), 2, 3, 2),
    "three-tetrahedra-around": (glue_by_labels(sp.move_side(3, 3)), None, 6, 3),
    "1-4-cut-off": (glue_by_labels(sp.move_side(3, 4)), 2, 2, 1),
    "whole-boundaries-3d": (sp.melon(3, 4), None, 2, 2),
    "whole-boundaries-4d": (sp.melon(4, 5), None, 1, 2),
    "whole-boundary-of-a-ball": (glue_by_labels(sp.sphere(3)), "around the first", 1, 2),
    "melon-4d": (sp.melon(4, 4), None, 1, 2),
    "self-glued-3d": (sp.GLUED["tetrahedra_1_2"], None, 3, 1),
    "self-glued-two-tetrahedra": (sp.GLUED["tetrahedra_2_4"], 2, 3, 1),
    "self-glued-4d": (sp.GLUED["four_simplices_2_3"], 3, 1, 1),
    "snapped-4-simplex": (sp.GLUED["4d-snapped-simplex"], None, 2, 1),
    "non-orientable-4d": (sp.GLUED["4d-twisted-simplex"], None, 2, 1),
    "non-orientable-2d": (glue_by_labels(sp.moebius_band()), 1, 3, 1),
    "projective-plane": (glue_by_labels(sp.projective_plane()), 4, 2, 2),
}


@pytest.mark.parametrize("seed", range(3))
@pytest.mark.parametrize("table, slots, up_to, components", GLUINGS.values(), ids=GLUINGS.keys())
def test_gluing_sums_over_what_becomes_internal(table, slots, up_to, components, seed):
    """The amplitude of the whole, from that of the region that is left when it is cut (in one or more
    components)."""
    rng = np.random.default_rng(seed)
    if slots == "around the first":
        slots = [(s, i) for s, i in all_slots(table) if s == 0]
    elif slots is None or isinstance(slots, int):
        slots = all_slots(table)[:slots]
    if seed:  # then in another description, with corners scrambled
        table, simplex, corner = scramble(table, rng)
        slots = [(simplex[s], corner[s][i]) for s, i in slots]
    whole, region = glued(table), glued(cut(table, slots))
    assert region.counts["components"] == components
    assert region.counts["nodes"] == whole.counts["nodes"] + 2 * len(slots)
    reader = list(READERS.values())[seed % 2]
    for _ in range(20):  # until the tensor is not zero
        spins = np.empty(0, dtype=int)
        if whole.counts["nodes"]:
            spins = admissible_spins(whole, rng, top=2, largest=100)
        expected = amplitude(whole, spins, reader, up_to=up_to)
        if np.abs(expected).max() > 1e-6:
            break
    else:
        pytest.fail("the tensor vanishes")
    got = compose(whole, region, spins, up_to, reader)
    np.testing.assert_allclose(got, expected, atol=1e-11 * max(1, np.abs(expected).max()))
