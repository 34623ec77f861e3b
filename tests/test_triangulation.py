"""The constructors of a triangulation: what they refuse, and what they keep."""

import itertools
import pickle

import numpy as np
import pytest

from dualize import Coordinates, InputError, Triangulation, TriangulationError

TETRAHEDRON = [[0, 1, 2, 3]]
SELF_GLUED = ([[0, 0, -1, -1]], [[[1, 0, 2, 3], [1, 0, 2, 3], [0, 1, 2, 3], [0, 1, 2, 3]]])

REFUSED_FACETS = [
    pytest.param([[0, 1, 2, 2]], "label 2 is repeated in a simplex", id="repeated label"),
    pytest.param([[0, 1, 2, 3], [0, 1, 2]], "different numbers of labels", id="unequal rows"),
    pytest.param([], "not \\(simplices, labels of each\\)", id="no simplex"),
    pytest.param([[0, 1]], "has 2 columns", id="segments"),
    pytest.param([[0, 1, 2, 3, 4, 5]], "has 6 columns", id="5-simplices"),
    pytest.param([[0.0, 1.5, 2.0, 3.0]], "labels are integers or words", id="floats"),
    pytest.param([[0, 1, 2, 2**70]], "a label is beyond 64 bits", id="beyond 64 bits"),
    pytest.param([[True, False, 2, 3]], "truth value", id="booleans"),
]


@pytest.mark.parametrize(("facets", "message"), REFUSED_FACETS)
def test_facets_are_refused(facets, message):
    with pytest.raises(InputError, match=message):
        Triangulation.from_facets(facets)


def test_a_facet_in_three_simplices_is_refused_with_its_labels_and_simplices():
    with pytest.raises(TriangulationError, match="a facet lies in three or more") as caught:
        Triangulation.from_facets([[0, 1, 2, 3], [0, 1, 2, 4], [5, 2, 1, 0]])
    assert caught.value.where == "facet 0 1 2 of simplices 0, 1, 2"


def test_the_first_ten_crowded_facets_are_named_and_all_are_counted():
    rows = [[10 * m, 10 * m + 1, 10 * m + 2, 10 * m + 3 + x] for m in range(12) for x in range(3)]
    with pytest.raises(TriangulationError, match="12 facets lie in three or more") as caught:
        Triangulation.from_facets(rows)
    assert caught.value.where.count("facet ") == 10
    assert caught.value.where.endswith("and 2 more facets")


REFUSED_COORDINATES = [
    pytest.param(np.zeros((3, 2)), "3 rows of coordinates, and a label has none", id="too few rows"),
    pytest.param(np.full((4, 2), np.nan), "not a finite number", id="not a number"),
    pytest.param(Coordinates(corner=np.zeros((1, 3, 2))), "corner charts have the shape", id="chart shape"),
    pytest.param(
        Coordinates(point=np.zeros((4, 2)), period=np.array([1.0])),
        "one number for each of 2 axes",
        id="period",
    ),
    pytest.param(
        Coordinates(point=np.zeros((4, 2)), period=np.array([1.0, -1.0])), "a period is", id="negative period"
    ),
]


@pytest.mark.parametrize(("coordinates", "message"), REFUSED_COORDINATES[:4])
def test_coordinates_are_refused(coordinates, message):
    with pytest.raises(InputError, match=message):
        Triangulation.from_facets(TETRAHEDRON, coordinates=coordinates)


def test_a_negative_period_is_refused():
    with pytest.raises(InputError, match="the period is"):
        Triangulation.from_facets(TETRAHEDRON, coordinates=REFUSED_COORDINATES[4].values[0])


def test_charts_of_a_gluing_table_are_checked_too():
    with pytest.raises(InputError, match="corner charts have the shape"):
        Triangulation.from_gluings(*SELF_GLUED, coordinates=Coordinates(corner=np.zeros((2, 4, 3))))


@pytest.mark.parametrize(
    ("names", "message"),
    [
        pytest.param(["b", "a", "c", "d"], "in order of code points", id="order"),
        pytest.param(["a", "a", "c", "d"], "different words", id="twice"),
        pytest.param(["a", "b", "c"], "3 corner_names, and a label has none", id="too few"),
    ],
)
def test_corner_names_are_refused(names, message):
    with pytest.raises(InputError, match=message):
        Triangulation.from_facets(TETRAHEDRON, corner_names=names)


def test_charts_follow_their_corners_when_these_are_sorted():
    chart = np.arange(8.0).reshape(1, 4, 2)
    t = Triangulation.from_facets([[3, 0, 2, 1]], coordinates=Coordinates(corner=chart))
    assert t.coordinates.corner[0].tolist() == chart[0, [1, 3, 2, 0]].tolist()


def test_scattered_labels_are_glued_like_their_ranks():
    """Labels too far apart for a table over their range are numbered by another kernel."""
    facets = np.array(list(itertools.combinations(range(6), 5)))
    far = np.array([-(2**62), -7, 0, 5, 2**40, 2**62])
    near, wide = Triangulation.from_facets(facets), Triangulation.from_facets(far[facets])
    assert np.array_equal(near.across, wide.across)
    assert np.array_equal(near.rank, wide.rank)


def test_words_are_kept_in_order_of_code_points():
    t = Triangulation.from_facets([["sea", "Air", "isle", "bay"]])
    assert t.corner_names == ("Air", "bay", "isle", "sea")
    assert t.named(t.corners) == [["Air", "bay", "isle", "sea"]]


def test_a_triangulation_survives_pickling():
    t = Triangulation.from_facets([["sea", "Air", "isle", "bay"]])
    assert pickle.loads(pickle.dumps(t)) == t


def test_arrays_are_read_only():
    t = Triangulation.from_facets(TETRAHEDRON)
    with pytest.raises(ValueError, match="read-only"):
        t.across[0, 0] = 0
