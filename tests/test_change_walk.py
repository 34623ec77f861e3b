"""Random walks: size, seed, streams, records as documents, refusals, and the cost of a move."""

import json
import time

import numpy as np
import pytest
from catalogue import CATALOGUE
from specimens import kuhn_grid, slab

from dualize import Coordinates, InputError, Triangulation, TriangulationError, change
from dualize.change import Moves


def listed(name):
    return Triangulation.from_facets(CATALOGUE[name].facets)


def test_a_walk_is_the_same_for_the_same_seed():
    t = listed("cp2_9")
    one, two, other = (change.walk(t, 50, seed=s).triangulation for s in (3, 3, 4))
    assert one == two
    assert one != other


def test_a_walk_comes_to_its_target():
    t = listed("simplex_bd_5")
    sizes = [
        len(r.triangulation) for r in change.walk_states(t, 3000, every=100, seed=1, target=200, spread=20)
    ]
    assert all(150 <= n <= 250 for n in sizes[10:])


def test_the_stream_of_states_is_the_walk():
    t = listed("poincare_16")
    whole = change.walk(t, 90, seed=2)
    states = list(change.walk_states(t, 90, every=40, seed=2))
    assert [len(r.moves) for r in states] == [40, 80, 90]
    assert states[-1].triangulation == whole.triangulation
    assert change.replay(t, whole.moves.upto(40)).triangulation == states[0].triangulation
    assert change.undo(whole.triangulation, whole.moves, 10).triangulation == states[1].triangulation


def test_a_walk_of_chosen_kinds_makes_only_those():
    moves = change.walk(listed("poincare_16"), 60, seed=2, kinds=["2-3", "3-2"], target=100).moves
    assert set(moves.counts()) <= {"2-3", "3-2"}


def test_an_unknown_kind_is_refused():
    with pytest.raises(InputError, match="there is no move '2-4' in dimension 3"):
        change.walk(listed("poincare_16"), 5, kinds=["2-4"])


def test_a_walk_without_a_way_says_that_it_is_stuck():
    with pytest.raises(TriangulationError, match="the walk is stuck after 0 of 5 moves"):
        change.walk(listed("cp2_9"), 5, kinds=["3-3"])


def test_the_record_survives_as_a_document():
    t = listed("s2_x_b2_12")
    result = change.walk(t, 80, seed=5)
    read = Moves.from_dict(json.loads(json.dumps(result.moves.to_dict())))
    assert change.replay(t, read).triangulation == result.triangulation
    assert change.undo(result.triangulation, read).triangulation == t


def test_words_and_coordinates_come_back_with_the_undo():
    words = np.array([f"p{x}" for x in range(20)])
    coordinates = np.random.default_rng(1).random((16, 3))
    rows = words[np.array(CATALOGUE["barnette_sphere_8"].facets)].tolist()
    names = sorted({w for row in rows for w in row})
    place = {w: x for x, w in enumerate(names)}
    t = Triangulation.from_facets(
        [[place[w] for w in row] for row in rows], corner_names=names, coordinates=coordinates[: len(names)]
    )
    result = change.walk(t, 60, seed=1)
    assert len(result.triangulation.coordinates.point) == len(result.triangulation.corner_names)
    read = Moves.from_dict(json.loads(json.dumps(result.moves.to_dict())))
    assert change.undo(result.triangulation, read).triangulation == t
    assert change.replay(t, read).triangulation == result.triangulation


def test_points_that_stay_keep_their_coordinates():
    point = np.random.default_rng(1).random((6, 4))
    facets = [[x for x in range(6) if x != y] for y in range(6)]
    t = Triangulation.from_facets(facets, coordinates=Coordinates(point=point))
    moved = change.walk(t, 100, seed=3, target=30).triangulation
    assert np.array_equal(moved.coordinates.point[:6], point)
    assert len(moved.coordinates.point) > int(moved.corners.max())


def test_a_record_of_another_triangulation_is_refused():
    result = change.walk(listed("cp2_9"), 20, seed=1)
    with pytest.raises(TriangulationError, match="belongs to another triangulation"):
        change.replay(listed("k3_16"), result.moves)
    shuffled = Triangulation.from_facets(CATALOGUE["cp2_9"].facets[::-1])
    with pytest.raises(TriangulationError, match="cannot be made here"):
        change.replay(shuffled, result.moves)


@pytest.mark.parametrize(
    "spoil, message",
    [
        (lambda d: d.update(format="x"), "no record of moves"),
        (lambda d: d.update(version=9), "version 9"),
        (lambda d: d.update(dimension=7), "dimension 7"),
        (lambda d: d["kind"].__setitem__(0, 9), "kind in the record has an entry outside 1 to 5"),
        (lambda d: d["labels"].pop(), "labels in the record is not a table"),
        (lambda d: d.update(simplex="x"), "simplex in the record"),
    ],
    ids=["format", "version", "dimension", "range", "shape", "type"],
)
def test_a_damaged_record_is_refused(spoil, message):
    document = change.walk(listed("cp2_9"), 5, seed=1).moves.to_dict()
    spoil(document)
    with pytest.raises(InputError, match=message):
        Moves.from_dict(document)


def test_two_simplices_with_the_same_labels_are_refused():
    double = Triangulation.from_facets([[0, 1, 2, 3], [0, 1, 2, 3]])
    with pytest.raises(InputError, match="two simplices have the same labels"):
        change.walk(double, 1)


def test_new_labels_start_behind_the_largest():
    result = change.walk(Triangulation.from_facets([[5, 9, 12]]), 30, seed=1, target=20)
    assert min(result.new_labels) > 12


def test_arrays_grow_with_the_walk():
    t = listed("simplex_bd_5")
    result = change.walk(t, 20_000, seed=1, target=8000)
    assert len(result.triangulation) > 7000
    again = Triangulation.from_facets(result.triangulation.corners.tolist())
    assert np.array_equal(again.across, result.triangulation.across)
    assert change.undo(result.triangulation, result.moves).triangulation == t


def test_a_slab_keeps_both_ends():
    t = Triangulation.from_facets(slab(CATALOGUE["simplex_bd_4"].facets))
    moved = change.walk(t, 500, seed=1, target=60).triangulation
    ends = {tuple(np.delete(t.corners[s], i)) for s, i in np.argwhere(t.across < 0).tolist()}
    assert ends == {tuple(np.delete(moved.corners[s], i)) for s, i in np.argwhere(moved.across < 0).tolist()}


def test_the_cost_of_a_move_does_not_grow_with_the_complex():
    """An incremental walk: far below a rebuild, on about 25 000 simplices (loose, for busy machines)."""
    t = Triangulation.from_facets(kuhn_grid([6, 6, 6, 6], periodic=True))
    change.walk(t, 10)  # compiles
    start = time.process_time()
    change.walk(t, 10)
    setup = time.process_time() - start
    start = time.process_time()
    change.walk(t, 20_010)
    cost = (time.process_time() - start - setup) / 20_000
    assert cost < 150e-6
