"""Gluing, cutting and parts: topology by theorems, labels and orientation that stay, refusals."""

from itertools import combinations

import gudhi
import numpy as np
import pytest
from catalogue import CATALOGUE, SMALL_GLUINGS
from specimens import slab

from dualize import Coordinates, InputError, Triangulation, TriangulationError, build, change, match
from dualize.topology.classes import classes
from dualize.topology.intersection import intersection_form


def listed(name):
    return Triangulation.from_facets(CATALOGUE[name].facets)


def table(rows):
    return Triangulation.from_gluings(
        [[entry[0] for entry in row] for row in rows], [[entry[1] for entry in row] for row in rows]
    )


def betti(t, prime=2):
    tree = gudhi.SimplexTree()
    for row in t.corners.tolist():
        tree.insert(row)
    tree.compute_persistence(homology_coeff_field=prime, persistence_dim_max=True)
    return tree.betti_numbers()


def rows(t):
    return sorted(map(tuple, t.named(t.corners)))


def euler(t):
    d = t.dimension
    facets = (t.across.size + int((t.across < 0).sum())) // 2
    low = sum((-1) ** (m - 1) * classes(t, m).count for m in range(1, d))
    return low + (-1) ** (d - 1) * facets + (-1) ** d * len(t)


def signs(t):
    return dict(zip(map(tuple, t.named(t.corners)), build(t)["vertices/orientation"].tolist(), strict=True))


# -- gluing ----------------------------------------------------------------------------------------


def test_a_ball_glued_back_restores_the_complex():
    t = listed("cp2_9")
    hole = change.remove(t, [7]).triangulation
    ball = Triangulation.from_facets([t.corners[7].tolist()])
    whole = change.glue(hole, ball).triangulation
    assert rows(whole) == rows(t)
    assert signs(whole) == signs(t)


def test_the_connected_sum_of_two_cp2_has_the_homology_of_the_sum():
    """H_2 adds up (A. Hatcher, Algebraic Topology, 2002, section 3.3)."""
    half = listed("cp2_minus_ball_9")
    result = change.glue(half, half, found=True)
    t = result.triangulation
    assert len(t) == 70
    assert betti(t) == [1, 0, 2, 0, 1]
    assert build(t).flags["orientable"] == [True]
    assert build(t).counts["nodes"] == 0
    assert len(result.new_labels) == 4  # 9 + 9 - 5 points
    assert sorted(result.refined_from.tolist()) == list(range(70))


def test_the_slab_closes_to_a_product_with_the_circle():
    """Betti numbers of S3 x S1 by Kuenneth; three layers are enough for a simplicial complex."""
    layer = slab(CATALOGUE["simplex_bd_4"].facets)
    tall = [[x // 2 + 100 * (x % 2 + n) for x in row] for n in range(3) for row in layer]
    result = change.glue(Triangulation.from_facets(tall), components=(0, 1))
    assert result.triangulation.corners is not None
    assert build(result.triangulation).counts["nodes"] == 0
    assert build(result.triangulation).flags["orientable"] == [True]
    assert betti(result.triangulation) == [1, 1, 0, 1, 1]


def test_one_layer_closes_to_a_gluing_table():
    layer = Triangulation.from_facets(slab(CATALOGUE["simplex_bd_4"].facets))
    result = change.glue(layer, components=(0, 1))
    assert result.triangulation.corners is None
    assert "no simplicial complex" in result.notes[0]
    assert euler(result.triangulation) == 0


def test_a_cylinder_glued_to_itself_is_a_torus_or_a_klein_bottle():
    ring = [[i, (i + 1) % 4] for i in range(4)]
    facets = []
    for k in range(4):
        for a, b in ring:
            facets += [
                [10 * k + a, 10 * k + b, 10 * k + 10 + b],
                [10 * k + a, 10 * k + 10 + a, 10 * k + 10 + b],
            ]
    t = Triangulation.from_facets(facets)
    torus = change.glue(t, names={x: 40 + x for x in range(4)}).triangulation
    klein = change.glue(t, names={x: 40 + (-x) % 4 for x in range(4)}).triangulation
    assert [betti(torus), betti(klein, 3)] == [[1, 2, 1], [1, 1, 0]]
    assert [build(x).flags["orientable"] for x in (torus, klein)] == [[True], [False]]
    assert set(np.unique(torus.corners).tolist()) == set(np.unique(t.corners).tolist()) - {40, 41, 42, 43}


def test_gluing_tables_glue_by_a_map_that_is_found():
    t = table(SMALL_GLUINGS["tetrahedra_2_4"])
    cut = change.cut(t, [(0, 0)]).triangulation
    whole = change.glue(cut, cut, found=True).triangulation
    assert build(whole).counts["nodes"] == 0
    assert build(whole).flags["orientable"] == [True]


def test_the_sign_of_the_map_tells_the_two_sums_of_cp2_apart():
    """Signatures add up: 1 + 1 or 1 - 1 (J. Milnor, D. Husemoller, Symmetric Bilinear Forms, 1973, ch. V)."""
    half = listed("cp2_minus_ball_9")
    maps = match(build(half), build(half), limit=1000, by="isomorphism")
    assert len(maps) == 120  # the rearrangements of the 5 points of the boundary
    for sign, signature in ((-1, 2), (1, 0)):
        t = change.glue(half, half, next(m for m in maps if (m.node_sign == sign).all())).triangulation
        assert (len(t), int((t.across < 0).sum())) == (70, 0)
        assert abs(intersection_form(t).signature) == signature


def test_a_map_of_boundaries_glues_gluing_tables_as_it_says():
    t = change.cut(table(SMALL_GLUINGS["tetrahedra_2_4"]), [(0, 0)]).triangulation
    s = build(t)
    (one,) = match(s, s, by="isomorphism")
    whole = change.glue(t, t, one).triangulation
    for n, (v, i) in enumerate(zip(s["nodes/vertex"].tolist(), s["nodes/slot"].tolist(), strict=True)):
        there = int(one.nodes[n])
        assert whole.across[v, i] == len(t) + s["nodes/vertex"][there]


def test_a_map_of_other_boundaries_is_refused():
    half, slabs = listed("cp2_minus_ball_9"), listed("rp3_x_i_22")
    (one,) = match(build(half), build(half))
    with pytest.raises(InputError, match="about other boundaries"):
        change.glue(half, slabs, one)


def test_facets_glue_corner_by_corner():
    """Two tetrahedra glued by equal corners along all facets: a 3-sphere, four points (common practice)."""
    two = Triangulation.from_gluings([[-1] * 4] * 2, [[[0] * 4] * 4] * 2)
    pairs = [(0, [c for c in range(4) if c != i], 1, [c for c in range(4) if c != i]) for i in range(4)]
    t = change.glue_facets(two, pairs).triangulation
    assert [classes(t, m).count for m in (1, 2, 3)] == [4, 6, 4]


@pytest.mark.parametrize(
    "pairs, error, message",
    [
        ([(0, [0, 1, 2], 0, [0, 1, 2])], TriangulationError, "a facet would be glued to itself"),
        ([(0, [0, 1], 1, [0, 1, 2])], InputError, "a facet has 3 corners"),
        ([(0, [0, 1, 2], 5, [0, 1, 2])], InputError, "simplex is 5"),
        ([(0, [0, 1, 2], 1, [0, 1, 2]), (0, [0, 1, 2], 1, [0, 1, 3])], InputError, "glued already"),
    ],
    ids=["itself", "corners", "simplex", "twice"],
)
def test_wrong_facets_are_refused(pairs, error, message):
    two = Triangulation.from_gluings([[-1] * 4] * 2, [[[0] * 4] * 4] * 2)
    with pytest.raises(error, match=message):
        change.glue_facets(two, pairs)


def test_nothing_in_common_is_refused():
    a, b = Triangulation.from_facets([[0, 1, 2]]), Triangulation.from_facets([[2, 3, 4]])
    with pytest.raises(InputError, match="so nothing is glued"):
        change.glue(a, b)


def test_points_that_would_pinch_are_refused():
    a = Triangulation.from_facets([[0, 1, 2]])
    b = Triangulation.from_facets([[1, 2, 3], [2, 3, 4], [3, 4, 0]])
    with pytest.raises(InputError, match="without lying on a glued facet"):
        change.glue(a, b)


def test_boundaries_that_differ_are_refused():
    with pytest.raises(TriangulationError, match="not isomorphic"):
        change.glue(listed("ziegler_ball_10"), Triangulation.from_facets([[0, 1, 2, 3]]), found=True)


def test_the_union_keeps_both_apart():
    t = listed("poincare_16")
    result = change.union(t, t)
    assert build(result.triangulation).counts["components"] == 2
    assert betti(result.triangulation) == [2, 0, 0, 2]
    assert result.notes[0].startswith("labels of the second complex renamed: 1 -> 17")
    assert np.array_equal(result.triangulation.corners[: len(t)], t.corners)


def test_the_union_of_words():
    a, b = Triangulation.from_facets([["a", "b", "c"]]), Triangulation.from_facets([["c", "d", "e"]])
    assert rows(change.union(a, b).triangulation) == [("a", "b", "c"), ("d", "e", "new0")]


# -- cutting ---------------------------------------------------------------------------------------


def test_cutting_out_a_simplex_leaves_two_pieces():
    t = listed("cp2_9")
    result = change.cut(t, [np.delete(t.corners[3], i).tolist() for i in range(5)])
    cut = result.triangulation
    assert build(cut).counts["components"] == 2
    assert len(result.new_labels) == 5
    assert betti(change.component(cut, 0).triangulation) == betti(listed("cp2_minus_ball_9"))
    # the larger side keeps its labels
    assert np.array_equal(np.delete(cut.corners, 3, axis=0), np.delete(t.corners, 3, axis=0))
    again = Triangulation.from_facets(cut.corners.tolist())
    assert np.array_equal(again.across, cut.across)


def test_cut_and_glued_again_is_the_same():
    t = listed("cp2_9")
    result = change.cut(t, [np.delete(t.corners[3], i).tolist() for i in range(5)])
    old = t.corners[3].tolist()
    new = result.triangulation.corners[3].tolist()
    glued = change.glue(result.triangulation, names=dict(zip(new, old, strict=True))).triangulation
    assert rows(glued) == rows(t)
    assert signs(glued) == signs(t)


def test_a_slit_is_a_gluing_table():
    """A facet cut out of the inside opens no point, so both sides have the same labels."""
    result = change.cut(
        listed("cp2_9"), [[1, 2, 3, 7]] if False else [listed("cp2_9").corners[0, 1:].tolist()]
    )
    assert result.triangulation.corners is None
    assert "no simplicial complex" in result.notes[0]
    assert int((result.triangulation.across < 0).sum()) == 2


def test_a_cut_table_has_two_facets_more():
    t = change.cut(table(SMALL_GLUINGS["tetrahedra_1_2"]), [(0, 1)]).triangulation
    assert int((t.across < 0).sum()) == 2


@pytest.mark.parametrize(
    "facets, message",
    [
        ([[0, 1]], "no facet of the complex"),
        ([[1, 2]], "on the boundary"),
        ([[0, 3, 1]], "a facet is 2 labels"),
        ([], "no facet is given"),
    ],
    ids=["unknown", "boundary", "labels", "none"],
)
def test_wrong_cuts_are_refused(facets, message):
    t = Triangulation.from_facets([[1, 2, 3], [2, 3, 0]])
    with pytest.raises(InputError, match=message):
        change.cut(t, facets)


# -- parts and names -------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["cp2_9", "s2_x_b2_12", "poincare_16"])
def test_a_part_keeps_labels_order_and_orientation(name):
    t = listed(name)
    chosen = list(range(1, len(t), 3))
    result = change.keep(t, chosen)
    assert np.array_equal(result.triangulation.corners, t.corners[chosen])
    assert result.refined_from.tolist() == chosen
    again = Triangulation.from_facets(result.triangulation.corners.tolist())
    assert np.array_equal(again.across, result.triangulation.across)
    whole = signs(t)
    part = build(result.triangulation, keep_singular=True)
    for row, sign, c in zip(
        t.corners[chosen].tolist(), part["vertices/orientation"], part["vertices/component"], strict=True
    ):
        assert whole[tuple(row)] == sign, c


def test_the_neighbourhood_grows_by_one_step():
    """Breadth first in the dual graph, against networkx."""
    import networkx

    t = listed("poincare_16")
    graph = networkx.Graph((s, int(u)) for s in range(len(t)) for u in t.across[s])
    for radius in range(5):
        expected = sorted(networkx.single_source_shortest_path_length(graph, 5, radius))
        assert change.around(t, 5, radius).refined_from.tolist() == expected


def test_components_come_apart():
    t = change.union(listed("cp2_9"), listed("k3_16")).triangulation
    assert betti(change.component(t, 1).triangulation)[2] == 22
    with pytest.raises(InputError, match="component is 2"):
        change.component(t, 2)


def test_reversal_turns_every_sign():
    t = listed("cp2_9")
    assert signs(change.reverse(t).triangulation) == {row: -s for row, s in signs(t).items()}


@pytest.mark.parametrize("seed", [0, 1, 2])
def test_relabelling_keeps_the_oriented_complex(seed):
    t = listed("cp2_9")
    result = change.relabel(t, seed=seed)
    there = {tuple(x) for x in result.triangulation.corners.tolist()}
    assert len(there) == 36
    assert set(np.unique(result.triangulation.corners).tolist()) == set(range(9))
    # the simplices stay in order, so the labels at equal corners give the map back
    back = change.relabel(
        result.triangulation, {int(k): int(v) for k, v in _map(result.triangulation, t).items()}
    )
    assert back.triangulation == t or signs(back.triangulation) == signs(t)


def _map(one, two):
    """The map of labels between two copies with the simplices in the same order: by the sets they lie in."""

    def stars(t):
        return {
            x: frozenset(np.flatnonzero((t.corners == x).any(axis=1)).tolist())
            for x in np.unique(t.corners).tolist()
        }

    there = {star: x for x, star in stars(two).items()}
    return {x: there[star] for x, star in stars(one).items()}


def test_relabelling_with_words_and_coordinates():
    t = Triangulation.from_facets(
        [[0, 1, 2]], coordinates=Coordinates(point=np.array([[0.0, 0], [1, 0], [0, 1]]))
    )
    named = change.relabel(t, ["z", "y", "x"]).triangulation
    assert named.corner_names == ("x", "y", "z")
    assert named.coordinates.point.tolist() == [[0, 1], [1, 0], [0, 0]]
    assert build(named)["vertices/orientation"].tolist() == [-1]  # z y x is an odd order of x y z
    far = change.relabel(t, [10**12, 5, 7]).triangulation
    assert far.coordinates.corner[0].tolist() == [[1, 0], [0, 1], [0, 0]]


@pytest.mark.parametrize(
    "names, message",
    [
        ({0: 1}, "given twice"),
        ([1, 2], "2 new labels are given for 3"),
        ({9: 1}, "no simplex has the label 9"),
    ],
    ids=["twice", "too-few", "unknown"],
)
def test_wrong_names_are_refused(names, message):
    with pytest.raises(InputError, match=message):
        change.relabel(Triangulation.from_facets([[0, 1, 2]]), names)


@pytest.mark.parametrize(
    "call, message",
    [
        (lambda t: change.keep(t, []), "none is to be kept"),
        (lambda t: change.keep(t, [40]), "there is no simplex 40"),
        (lambda t: change.remove(t, range(36)), "all are to be removed"),
        (lambda t: change.around(t, 0, -1), "radius is -1"),
    ],
    ids=["none", "unknown", "all", "radius"],
)
def test_wrong_parts_are_refused(call, message):
    with pytest.raises(InputError, match=message):
        call(listed("cp2_9"))


# -- shellings -------------------------------------------------------------------------------------


@pytest.mark.parametrize("d", [2, 3, 4])
def test_attach_and_detach_are_inverse(d):
    t = Triangulation.from_facets([list(range(d + 1))])
    one = change.attach(t, range(1, d + 1))
    assert one.new_labels == [d + 1]
    assert change.detach(one.triangulation, 1).triangulation == t
    # around the common facet the boundary has two facets at each of its facets
    two = change.attach(one.triangulation, [*range(1, d)])
    assert two.new_labels == []
    assert set(two.triangulation.corners[2].tolist()) == {0, *range(1, d), d + 1}
    assert change.detach(two.triangulation, 2).triangulation == one.triangulation
    assert all(build(two.triangulation).flags["orientable"])


@pytest.mark.parametrize("name", ["s2_x_b2_12", "solid_torus_7", "cp2_minus_ball_9"])
def test_shellings_keep_the_homology(name):
    t = start = listed(name)
    rng = np.random.default_rng(1)
    for _ in range(25):
        s, i = rng.choice(np.argwhere(t.across < 0)).tolist()
        facet = np.delete(t.corners[s], i).tolist()
        size = int(rng.integers(1, t.dimension + 1))
        try:
            t = change.attach(t, facet[:size]).triangulation
        except TriangulationError:
            try:
                t = change.detach(t, s).triangulation
            except TriangulationError:
                continue
    assert rows(t) != rows(start)
    assert betti(t) == betti(start)
    assert build(t).flags["orientable"] == build(start).flags["orientable"]


def test_the_ball_of_ziegler_has_no_simplex_to_take_off():
    """G. M. Ziegler, Shelling polyhedral 3-balls and 4-polytopes, Discrete Comput. Geom. 19 (1998) 159-174.

    A ball with 10 points and 21 tetrahedra, strongly non-shellable: none can be taken off (from memory).
    """
    t = listed("ziegler_ball_10")
    for s in range(len(t)):
        with pytest.raises(TriangulationError, match="cannot be taken off"):
            change.detach(t, s)


def test_a_shelled_simplex_peels_off():
    t = change.refine(Triangulation.from_facets([[0, 1, 2, 3]]), 2).triangulation
    left = len(t)
    while left > 1:
        for s in range(left):
            try:
                t = change.detach(t, s).triangulation
                break
            except TriangulationError:
                continue
        assert len(t) == left - 1
        left -= 1
        assert betti(t) == [1, 0, 0, 0]


@pytest.mark.parametrize(
    "call, message",
    [
        (lambda: change.detach(listed("cp2_9"), 0), "it has no boundary facet"),
        (lambda: change.detach(Triangulation.from_facets([[0, 1, 2]]), 0), "it hangs on no other"),
        (lambda: change.attach(listed("cp2_9"), [1, 2]), "no simplex of the boundary"),
        (lambda: change.attach(Triangulation.from_facets([[0, 1, 2]]), [0]), "exists already"),
        (lambda: change.attach(Triangulation.from_facets([[0, 1, 2, 3]]), [0, 1], label=9), "no new point"),
    ],
    ids=["closed", "last", "interior", "exists", "label"],
)
def test_wrong_shellings_are_refused(call, message):
    with pytest.raises((TriangulationError, InputError), match=message):
        call()


# -- contraction -----------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["cell600", "poincare_16", "k3_16", "kuhn_t3_n3", "s2_x_b2_12"])
def test_contractions_keep_the_homology(name):
    t = listed(name)
    result = change.contract_all(
        change.walk(t, 100, seed=1, target=2 * len(t)).triangulation, seed=2, budget=40
    )
    assert betti(result.triangulation) == betti(t)
    assert build(result.triangulation).flags["orientable"] == build(t).flags["orientable"]
    assert (np.diff(result.refined_from) > 0).all()


def test_contraction_undoes_a_stellar_subdivision_of_a_segment():
    t = listed("cp2_9")
    a = t.corners[0, :2].tolist()
    fine = change.stellar(t, a).triangulation
    assert rows(change.contract(fine, [a[0], 9 + 1]).triangulation) == rows(t)
    assert signs(change.contract(fine, [a[0], 10]).triangulation) == signs(t)


def test_a_sphere_contracts_to_the_boundary_of_a_simplex():
    assert len(change.contract_all(listed("cell600"), seed=1).triangulation) == 5


def test_the_link_condition_is_asked_for():
    # in the 9-vertex CP2 any two points span a segment, and none can be contracted: it has the fewest points
    t = listed("cp2_9")
    assert change.contractible(t) == []
    with pytest.raises(TriangulationError, match="the links of its ends have a simplex in common"):
        change.contract(t, [1, 2])


def test_a_segment_between_boundary_points_is_refused():
    t = Triangulation.from_facets([[0, 1, 2], [1, 2, 3]])
    with pytest.raises(TriangulationError, match="both its ends are on the boundary"):
        change.contract(t, [1, 2])


def test_the_boundary_point_stays():
    disc = Triangulation.from_facets([[0, 1, 9], [1, 2, 9], [2, 3, 9], [0, 3, 9]])
    assert rows(change.contract(disc, [9, 0]).triangulation) == [(0, 1, 2), (0, 2, 3)]


@pytest.mark.parametrize(
    "segment, message",
    [([1], "a segment has two labels"), ([0, 2], "no segment of the complex")],
    ids=["one", "none"],
)
def test_wrong_segments_are_refused(segment, message):
    disc = Triangulation.from_facets([[0, 1, 9], [1, 2, 9], [2, 3, 9], [0, 3, 9]])
    with pytest.raises(InputError, match=message):
        change.contract(disc, segment)


# -- simplification --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "name",
    [
        "barnette_sphere_8",
        "cell600",
        "cell16",
        "cyclic_c8_4",
        "cross_polytope_5",
        "cyclic_c10_5",
        "cyclic_c7_5",
    ],
)
def test_spheres_come_down_to_the_boundary_of_a_simplex(name):
    """Boundaries of polytopes, and Barnette's sphere, are PL spheres (see the sources in the catalogue)."""
    t = listed(name)
    result = change.simplify(t, seed=1)
    d = t.dimension
    assert len(result.triangulation) == d + 2
    assert len(np.unique(result.triangulation.corners)) == d + 2
    assert change.replay(t, result.moves).triangulation == result.triangulation
    assert change.undo(result.triangulation, result.moves).triangulation == t


@pytest.mark.parametrize("name", ["cp2_9", "poincare_16", "s3_x_s1_11", "rp3_11"])
def test_other_manifolds_never_do(name):
    """Fewest points, from memory: CP2 9 (Kuehnel, Banchoff 1983), RP3 11 (Walkup 1970), S3 x S1 11
    (Kuehnel, Lassmann 1996), a homology 3-sphere other than the sphere at least 12 (Bagchi, Datta 2005).
    """
    t = change.walk(listed(name), 60, seed=1, target=len(CATALOGUE[name].facets) + 40).triangulation
    result = change.simplify(t, seed=1, budget=3000)
    fewest = {"cp2_9": 9, "rp3_11": 11, "s3_x_s1_11": 11, "poincare_16": 12}[name]
    assert len(np.unique(result.triangulation.corners)) >= fewest
    assert len(result.triangulation) <= len(t)
    assert betti(result.triangulation) == betti(t)


def test_the_torus_comes_down_to_seven_points():
    """A. F. Moebius 1886: the torus has a triangulation with 7 points, and none with fewer."""
    t = change.refine(listed("torus_7"), 3).triangulation
    result = change.simplify(t, seed=1, budget=20_000)
    assert len(result.triangulation) == 14


def test_the_budget_is_kept():
    result = change.simplify(listed("cell600"), seed=1, budget=20)
    assert len(result.moves) <= 20


def test_a_boundary_stays_in_a_simplification():
    t = change.derived(listed("ziegler_ball_10")).triangulation
    result = change.simplify(t, seed=1, budget=2000)
    ends = [
        {tuple(np.delete(x.corners[s], i)) for s, i in np.argwhere(x.across < 0).tolist()}
        for x in (t, result.triangulation)
    ]
    assert ends[0] == ends[1]
    assert len(result.triangulation) < len(t)


def test_the_doubled_pentachoron_is_small_already():
    sphere = Triangulation.from_facets(list(combinations(range(6), 5)))
    assert len(change.simplify(sphere).moves) == 0
