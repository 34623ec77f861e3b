"""Bistellar moves: published changes of the f-vector, inverses, refusals, the boundary, homology."""

from itertools import combinations, permutations

import gudhi
import numpy as np
import pytest
from catalogue import CATALOGUE, SMALL_GLUINGS
from hypothesis import given
from hypothesis import strategies as st

from dualize import Coordinates, InputError, Triangulation, TriangulationError, build, change
from dualize.boundary import boundary_of
from dualize.kernels import mode
from dualize.topology.classes import classes

# f-vector changes (U. Pachner, P.L. homeomorphic manifolds are equivalent by elementary shellings, European
# J. Combin. 12 (1991) 129-145, from memory; computed from the boundary of a (D+1)-simplex).
F_CHANGES = {
    "1-3": (1, 3, 2),
    "2-2": (0, 0, 0),
    "1-4": (1, 4, 6, 3),
    "2-3": (0, 1, 2, 1),
    "1-5": (1, 5, 10, 10, 4),
    "2-4": (0, 1, 4, 5, 2),
    "3-3": (0, 0, 0, 0, 0),
}
F_CHANGES |= {f"{kind[2]}-{kind[0]}": tuple(-x for x in f) for kind, f in F_CHANGES.items()}
NAMES = [
    "torus_7",
    "poincare_16",
    "klein_s2_s1_twisted_9",
    "ziegler_ball_10",
    "cp2_9",
    "s2_x_b2_12",
    "cp2_minus_ball_9",
]


def listed(name):
    return Triangulation.from_facets(CATALOGUE[name].facets)


def table(rows):
    """A gluing table of the catalogue."""
    return Triangulation.from_gluings(
        [[entry[0] for entry in row] for row in rows], [[entry[1] for entry in row] for row in rows]
    )


def f_vector(t):
    rows = t.corners.tolist()
    return tuple(
        len({face for row in rows for face in combinations(row, m)}) for m in range(1, t.dimension + 2)
    )


def betti(t, prime):
    tree = gudhi.SimplexTree()
    for row in t.corners.tolist():
        tree.insert(row)
    tree.compute_persistence(homology_coeff_field=prime, persistence_dim_max=True)
    return tree.betti_numbers()


def same(t):
    """The complex as matching its labels anew gives it."""
    again = Triangulation.from_facets(t.named(t.corners))
    assert np.array_equal(again.across, t.across)
    assert np.array_equal(again.rank, t.rank)
    assert again.corner_names == t.corner_names


def rows(t):
    return sorted(map(tuple, t.corners.tolist()))


def spread(name, seed, moves=300):
    """A complex that allows every kind of move."""
    t = listed(name)
    return change.walk(t, moves, seed=seed, target=2 * len(t)).triangulation


@pytest.mark.parametrize("name", NAMES)
def test_each_move_changes_the_f_vector_as_published(name):
    t = spread(name, 1)
    for kind in change.kinds_of_moves(t.dimension):
        result = change.move(t, kind, seed=2)
        moved = tuple(a - b for a, b in zip(f_vector(result.triangulation), f_vector(t), strict=True))
        assert moved == F_CHANGES[kind], kind
        same(result.triangulation)


@pytest.mark.parametrize("name", NAMES)
def test_a_move_and_its_inverse_is_the_identity(name):
    t = spread(name, 3)
    for kind in change.kinds_of_moves(t.dimension):
        result = change.move(t, kind, seed=4)
        [(gone, come)] = list(result.moves)
        label = gone[0] if len(gone) == 1 else None
        back = change.move(
            result.triangulation,
            kind[::-1],
            None if len(gone) == 1 else come,
            simplex=next(
                s for s, row in enumerate(result.triangulation.corners.tolist()) if set(row) == set(come)
            )
            if len(gone) == 1
            else None,
            label=label,
        )
        assert rows(back.triangulation) == rows(t), kind
        one, two = (build(x)["vertices/orientation"] for x in (t, back.triangulation))
        signs = [
            dict(zip(map(tuple, x.corners.tolist()), o.tolist(), strict=True))
            for x, o in ((t, one), (back.triangulation, two))
        ]
        if all(build(t).flags["orientable"]):
            assert signs[0] == signs[1], kind


@pytest.mark.parametrize("name", ["ziegler_ball_10", "s2_x_b2_12", "cp2_minus_ball_9"])
def test_moves_leave_the_boundary_as_it_is(name):
    t = listed(name)
    moved = change.walk(t, 200, seed=5, target=3 * len(t)).triangulation
    one, two = boundary_of(t), boundary_of(moved)
    assert rows(one) == rows(two)
    signs = [
        dict(zip(map(tuple, b.corners.tolist()), build(b)["vertices/orientation"].tolist(), strict=True))
        for b in (one, two)
    ]
    assert signs[0] == signs[1]


@pytest.mark.parametrize("name", NAMES)
def test_moves_keep_the_orientation_of_what_stays(name):
    t = listed(name)
    if not all(build(t).flags["orientable"]):
        pytest.skip("not orientable")
    result = change.walk(t, 8, seed=1)
    before = build(t)["vertices/orientation"]
    after = build(result.triangulation)["vertices/orientation"]
    stayed = result.refined_from >= 0
    assert stayed.any()
    assert np.array_equal(after[stayed], before[result.refined_from[stayed]])
    assert np.array_equal(result.triangulation.corners[stayed], t.corners[result.refined_from[stayed]])


def test_the_2_3_move_replaces_a_triangle_by_a_segment():
    t = Triangulation.from_facets([[0, 1, 2, 3], [1, 2, 3, 4]])
    result = change.move(t, "2-3", [1, 2, 3])
    assert rows(result.triangulation) == [(0, 1, 2, 4), (0, 1, 3, 4), (0, 2, 3, 4)]
    assert result.refined_from.tolist() == [-1, -1, -1]
    assert list(result.moves) == [([1, 2, 3], [0, 4])]


def test_the_input_is_not_altered():
    t = listed("cp2_9")
    copy = listed("cp2_9")
    change.walk(t, 50, seed=1)
    assert t == copy


# -- what is refused -------------------------------------------------------------------------------


def test_a_new_segment_that_exists_is_refused():
    sphere = Triangulation.from_facets(list(combinations(range(6), 5)))
    with pytest.raises(TriangulationError, match=r"the new simplex exists already \(4 5 in simplex"):
        change.move(sphere, "2-4", [0, 1, 2, 3])


def test_the_boundary_of_a_simplex_has_no_point_to_remove():
    sphere = Triangulation.from_facets(list(combinations(range(6), 5)))
    with pytest.raises(TriangulationError, match="the new simplex exists already"):
        change.move(sphere, "5-1", [0])


def test_a_boundary_facet_cannot_be_replaced():
    t = Triangulation.from_facets([[0, 1, 2, 3], [1, 2, 3, 4]])
    with pytest.raises(TriangulationError, match="the simplex to replace is on the boundary"):
        change.move(t, "2-3", [0, 1, 2])


def test_a_wrong_degree_is_told_with_the_number():
    # around the two poles of an octahedron lie four triangles each
    octahedron = Triangulation.from_facets([[a, b, c] for a in (0, 1) for b in (2, 3) for c in (4, 5)])
    with pytest.raises(TriangulationError, match="replaces 3 simplices, and here are 4"):
        change.move(octahedron, "3-1", [0])


def test_a_pinched_point_is_no_manifold():
    # two boundaries of tetrahedra that share the point 0, each with a triangle around 0 to spare
    double = [[0, 1, 2], [0, 1, 3], [0, 2, 3], [1, 2, 3], [0, 4, 5], [0, 4, 6], [0, 5, 6], [4, 5, 6]]
    t = Triangulation.from_facets(double)
    with pytest.raises(TriangulationError, match="here are 6"):
        change.move(t, "3-1", [0])
    # and a walk never takes it for a place
    for moved in change.walk_states(t, 50, seed=1, target=20):
        assert {0} <= set(moved.triangulation.corners.ravel().tolist())
        assert all(0 not in gone or len(gone) > 1 for gone, _ in moved.moves)


@pytest.mark.parametrize(
    "kind, at, message",
    [
        ("4-4", None, "there is no move '4-4' in dimension 4"),
        ("2-4", [1, 2, 3], "replaces a simplex of 4 labels, and 3 are given"),
        ("2-4", [1, 2, 3, 99], "no simplex has the label 99"),
        ("2-4", [1, 2, 3, 3], "the label 3 is given twice"),
    ],
    ids=["kind", "too-few", "unknown", "twice"],
)
def test_a_wrong_place_is_refused(kind, at, message):
    with pytest.raises(InputError, match=message):
        change.move(listed("cp2_9"), kind, at)


def test_labels_that_are_no_simplex_are_refused():
    t = listed("poincare_16")
    there = {tuple(face) for row in t.corners.tolist() for face in combinations(row, 3)}
    missing = next(c for c in combinations(range(1, 17), 3) if c not in there)
    with pytest.raises(InputError, match="no simplex of the complex"):
        change.move(t, "2-3", missing)


def test_a_move_that_can_be_made_nowhere_says_so():
    # the 9-vertex CP2 is 3-neighbourly (Kuehnel, Banchoff 1983), so every triangle is there already
    with pytest.raises(TriangulationError, match="the move 3-3 can be made nowhere"):
        change.move(listed("cp2_9"), "3-3", seed=1)


def test_random_and_named_moves_agree_on_the_places():
    t = spread("torus_7", 1, 20)
    places = {tuple(p) for p in change.places(t, "2-2")}
    assert places
    for seed in range(20):
        [(gone, _)] = list(change.move(t, "2-2", seed=seed).moves)
        assert tuple(gone) in places


# -- labels and coordinates ------------------------------------------------------------------------


def test_words_stay_words_and_the_new_point_gets_a_free_one():
    t = Triangulation.from_facets([["new0", "b", "c", "d"]])
    result = change.move(t, "1-4", simplex=0)
    assert result.new_labels == ["new1"]
    assert result.triangulation.corner_names == ("b", "c", "d", "new0", "new1")
    same(result.triangulation)


def test_the_label_of_the_new_point_can_be_chosen():
    t = Triangulation.from_facets([[0, 1, 2, 3]])
    assert change.move(t, "1-4", simplex=0, label=-7).new_labels == [-7]
    with pytest.raises(InputError, match="the label 3 is in use already"):
        change.move(t, "1-4", simplex=0, label=3)


def test_the_new_point_lies_at_the_barycentre():
    t = Triangulation.from_facets([[0, 1, 2]], coordinates=[[0.0, 0], [3, 0], [0, 6]])
    result = change.move(t, "1-3", simplex=0)
    assert result.triangulation.coordinates.point.tolist() == [[0, 0], [3, 0], [0, 6], [1, 2]]


def test_periodic_charts_become_one_chart():
    # a circle of three cells times another: the 18-triangle torus with its charts
    corner = lambda x, y: (x % 3) * 3 + y % 3  # noqa: E731
    facets, charts = [], []
    for x in range(3):
        for y in range(3):
            for second in ((1, 0), (0, 1)):
                path = [(x, y), (x + second[0], y + second[1]), (x + 1, y + 1)]
                facets.append([corner(*p) for p in path])
                charts.append(path)
    t = Triangulation.from_facets(
        facets, coordinates=Coordinates(corner=np.array(charts, float), period=np.array([3.0, 3]))
    )
    result = change.move(t, "1-3", simplex=len(t) - 1)
    point = result.triangulation.coordinates.point
    assert result.triangulation.coordinates.period.tolist() == [3, 3]
    # the last triangle has the corners (2, 2), (2, 3), (3, 3)
    assert np.allclose((point[-1] - [7 / 3, 8 / 3]) % 3, 0)


# -- gluing tables ---------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["tetrahedra_1_2", "tetrahedra_2_15", "four_simplices_2_6"])
def test_the_first_move_can_always_be_made_in_a_gluing_table(name):
    t = table(SMALL_GLUINGS[name])
    result = change.move(t, change.kinds_of_moves(t.dimension)[0], simplex=0)
    assert len(result.triangulation) == len(t) + t.dimension
    Triangulation.from_gluings(result.triangulation.across, result.triangulation.carry)
    assert change.undo(result.triangulation, result.moves).triangulation == t


def test_a_simplex_glued_to_itself_at_the_facet_is_refused():
    t = table(SMALL_GLUINGS["tetrahedra_1_0"])
    with pytest.raises(TriangulationError, match="the move 2-3 cannot be made"):
        change.move(t, "2-3", simplex=0, corners=[0, 1, 2])


def gluing_homology(t):
    """Betti numbers and order of the torsion of H_1 of a gluing table, by gudhi on its second subdivision."""
    fine = change.derived(t, 2).triangulation
    return [betti(fine, prime) for prime in (2, 3, 5, 7)]


@pytest.mark.parametrize("name", ["tetrahedra_1_2", "tetrahedra_1_3", "tetrahedra_2_7", "tetrahedra_2_15"])
def test_walks_on_gluing_tables_keep_the_homology(name):
    t = table(SMALL_GLUINGS[name])
    moved = change.walk(t, 30, seed=1, target=6).triangulation
    assert gluing_homology(moved) == gluing_homology(t)


# -- properties ------------------------------------------------------------------------------------


@given(seed=st.integers(0, 10**9), moves=st.integers(0, 60), name=st.sampled_from(NAMES))
def test_walks_keep_the_homology(seed, moves, name):
    t = listed(name)
    moved = change.walk(t, moves, seed=seed, target=len(t) + 20).triangulation
    same(moved)
    assert [betti(moved, p) for p in (2, 3)] == [betti(t, p) for p in (2, 3)]
    assert build(moved).flags["orientable"] == build(t).flags["orientable"]


@given(seed=st.integers(0, 10**9), moves=st.integers(0, 60), name=st.sampled_from(NAMES))
def test_undo_restores_the_input_exactly(seed, moves, name):
    t = listed(name)
    result = change.walk(t, moves, seed=seed, target=len(t) + 20)
    assert change.undo(result.triangulation, result.moves).triangulation == t
    assert change.replay(t, result.moves).triangulation == result.triangulation


@given(seed=st.integers(0, 10**9), moves=st.integers(0, 40), name=st.sampled_from(sorted(SMALL_GLUINGS)))
def test_undo_restores_gluing_tables_exactly(seed, moves, name):
    t = table(SMALL_GLUINGS[name])
    result = change.walk(t, moves, seed=seed, target=len(t) + 15)
    made = Triangulation.from_gluings(result.triangulation.across, result.triangulation.carry)
    assert np.array_equal(made.rank, result.triangulation.rank)
    assert change.undo(result.triangulation, result.moves).triangulation == t
    assert change.replay(t, result.moves).triangulation == result.triangulation
    assert build(result.triangulation).flags["orientable"] == build(t).flags["orientable"]


def slow_neighbours(facets, d):
    """Every complex one move leads to, by definition: star of A is A * boundary of B, and B is not there."""
    complex_ = set(map(frozenset, facets))
    faces = {frozenset(c) for f in complex_ for m in range(1, d + 2) for c in combinations(sorted(f), m)}
    out = {}
    for a in faces:
        star = [f for f in complex_ if a <= f]
        b = frozenset().union(*star) - a
        if len(a) == d + 1:
            b = frozenset([max(max(f) for f in complex_) + 1])
        elif len(a) + len(b) != d + 2 or b in faces or len(star) != len(b):
            continue
        new = {(a | b) - {x} for x in a}
        out[f"{len(b)}-{len(a)}", tuple(sorted(a))] = frozenset((complex_ - set(star)) | new)
    return out


@pytest.mark.parametrize(
    "name", ["torus_7", "barnette_sphere_8", "ziegler_ball_10", "cp2_minus_ball_9", "s2_x_b2_12"]
)
def test_the_places_are_those_of_the_definition(name):
    """All places of all kinds, and what comes out, against a plain search."""
    t = change.walk(listed(name), 12, seed=8).triangulation
    slow = slow_neighbours(t.corners.tolist(), t.dimension)
    for kind in change.kinds_of_moves(t.dimension):
        mine = {tuple(place) for place in change.places(t, kind)}
        theirs = {a for k, a in slow if k == kind and _interior(t, a)}
        assert mine == theirs, kind
        for a in sorted(mine)[:5]:
            moved = change.move(t, kind, a).triangulation
            assert frozenset(map(frozenset, moved.corners.tolist())) == slow[kind, a]


def _interior(t, a):
    for s, i in np.argwhere(t.across < 0).tolist():
        if set(a) <= set(np.delete(t.corners[s], i).tolist()):
            return False
    return True


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("moves", [300])
def test_interpreted_and_compiled_walks_are_the_same(name, moves):
    t = listed(name)
    found = []
    for kind in ("interpreted", "compiled"):
        with mode(kind):
            result = change.walk(t, moves, seed=11, target=len(t) + 30)
        found.append((result.triangulation, result.moves.to_dict()))
    assert found[0] == found[1]


@pytest.mark.parametrize("name", ["tetrahedra_2_15", "four_simplices_2_4"])
def test_interpreted_and_compiled_walks_on_tables_are_the_same(name):
    t = table(SMALL_GLUINGS[name])
    found = []
    for kind in ("interpreted", "compiled"):
        with mode(kind):
            found.append(change.walk(t, 200, seed=11, target=30).triangulation)
    assert found[0] == found[1]


def test_all_corner_orders_survive_undo_in_tables():
    """Every way to glue two tetrahedra along one facet, moved 2-3 and back."""
    for p in permutations(range(4)):
        across = [[-1] * 4, [-1] * 4]
        carry = [[[0] * 4] * 4, [[0] * 4] * 4]
        across[0][0] = 1
        across[1][p[0]] = 0
        carry[0] = [list(p)] * 4
        carry[1] = [[p.index(x) for x in range(4)]] * 4
        t = Triangulation.from_gluings(across, carry)
        result = change.move(t, "2-3", simplex=0, corners=[1, 2, 3])
        assert [classes(result.triangulation, m).count for m in (1, 2)] == [5, 10]
        assert change.undo(result.triangulation, result.moves).triangulation == t
