"""What a triangulation is made of, checked: labels, gluings and coordinates as they are given.

Each function takes what a caller wrote and gives plain arrays, or the `InputError` that names the first
wrong row.  Nothing here knows the class `Triangulation`.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from itertools import pairwise
from typing import Any, NamedTuple

import numpy as np

from .errors import InputError
from .kernels.permutations import permutations_of

__all__ = [
    "Coordinates",
    "carry_labels",
    "check_colours_kept",
    "check_dimension",
    "check_gluings",
    "check_labels_kept",
    "checked_coordinates",
    "checked_names",
    "integers",
    "labels_of",
    "show",
    "sorted_charts",
]


class Coordinates(NamedTuple):
    """Where the corners lie; not used by the dual, carried along and checked by the audit.

    Attributes
    ----------
    point : ndarray of float64, shape (P, A), or None
        One chart for all: the row of label ``p`` in a labelled complex, of point class ``p`` in a table.
    corner : ndarray of float64, shape (N, D + 1, A), or None
        One chart for each simplex.
    period : ndarray of float64, shape (A,), or None
        Period of each axis, 0 where there is none.
    """

    point: np.ndarray | None = None
    corner: np.ndarray | None = None
    period: np.ndarray | None = None


# -- labels -------------------------------------------------------------------------------------------


def labels_of(facets: Any) -> tuple[np.ndarray, tuple[str, ...] | None]:
    """Facets as an int64 array, and the words where labels are words."""
    if not isinstance(facets, np.ndarray):
        rows = list(facets) if isinstance(facets, Iterable) else facets
        lengths = {len(r) if hasattr(r, "__len__") else -1 for r in rows}
        if len(lengths) > 1 or -1 in lengths:
            raise InputError(
                "the simplices have different numbers of labels",
                hint="every simplex of one triangulation has D + 1 labels",
            )
        if any(isinstance(x, bool) for r in rows for x in r):
            raise InputError("a label is a truth value", hint="labels are integers or words")
        try:
            facets = np.array(rows)
        except (ValueError, OverflowError):
            facets = np.array(rows, dtype=object)
    if facets.ndim != 2 or 0 in facets.shape:
        raise InputError(
            f"facets have the shape {facets.shape}, not (simplices, labels of each)",
            hint="give at least one simplex, and the labels of its corners",
        )
    check_dimension(facets.shape[1], "facets")
    if facets.dtype.kind == "U":
        words, positions = np.unique(facets, return_inverse=True)
        return positions.reshape(facets.shape).astype(np.int64), tuple(words.tolist())
    wide = facets.dtype == object and all(isinstance(x, int) for x in facets.flat)
    if wide or (facets.dtype.kind == "u" and int(facets.max()) > np.iinfo(np.int64).max):
        raise InputError("a label is beyond 64 bits", hint="number the labels anew, or write them as words")
    if facets.dtype.kind not in "iu":
        raise InputError(
            f"labels are integers or words, and these are {facets.dtype}",
            hint="a mixture of numbers and words is written as words throughout",
        )
    return np.ascontiguousarray(facets, dtype=np.int64), None


def checked_names(names: Sequence[str], labels: np.ndarray) -> tuple[str, ...]:
    """Words in ascending order, one for every label."""
    words = tuple(names)
    if any(a >= b for a, b in pairwise(words)):
        raise InputError("corner_names are not different words in order of code points")
    if int(labels.min()) < 0 or int(labels.max()) >= len(words):
        bad = int(np.flatnonzero(((labels < 0) | (labels >= len(words))).any(axis=1))[0])
        raise InputError(
            f"there are {len(words)} corner_names, and a label has none",
            f"simplex {bad}: {show(labels[bad], None)}",
            "labels are positions in corner_names, counted from 0",
        )
    return words


def check_dimension(k: int, name: str) -> None:
    if k not in (3, 4, 5):
        raise InputError(
            f"{name} has {k} columns",
            hint="a simplex has 3, 4 or 5 corners: triangles, tetrahedra or 4-simplices",
        )


def show(labels: Any, names: tuple[str, ...] | None) -> str:
    return " ".join(str(x) if names is None else names[x] for x in np.asarray(labels).tolist())


# -- gluings ------------------------------------------------------------------------------------------


def integers(values: Any, name: str, ndim: int) -> np.ndarray:
    try:
        array = np.asarray(values)
    except ValueError:
        array = np.empty(0, dtype=object)
    if array.ndim != ndim or array.dtype.kind not in "iu" or (ndim > 1 and 0 in array.shape):
        raise InputError(f"{name} is no table of integers with {ndim} dimension{'s' if ndim > 1 else ''}")
    return array.astype(np.int64)


def check_gluings(across: np.ndarray, carry: np.ndarray) -> np.ndarray:
    """Ranks of the permutations of a table, or the error that names its first wrong row."""
    n, k = across.shape
    tables = permutations_of(k - 1)

    def refuse(bad: np.ndarray, what: str, hint: str) -> None:
        places = np.argwhere(bad)
        if len(places):
            s, i = places[0].tolist()
            more = f" and {len(places) - 1} more" if len(places) > 1 else ""
            values = f"across {across[s, i]}, carry {carry[s, i].tolist()}"
            raise InputError(what, f"simplex {s}, slot {i}: {values}{more}", hint)

    refuse(
        (across < -1) | (across >= n),
        "a slot is glued to a simplex that does not exist",
        f"simplices are numbered 0 to {n - 1}; -1 means boundary",
    )
    inner = across >= 0
    images = np.where(inner[:, :, None], carry, np.arange(k))
    refuse(
        (np.sort(images, axis=2) != np.arange(k)).any(axis=2),
        "the images of the corners are no permutation",
        f"each of 0 to {k - 1} must occur once",
    )
    rank = tables.rank(images)
    rows = np.arange(n)[:, None]
    slots = np.broadcast_to(np.arange(k), (n, k))
    there = np.where(inner, across, rows)
    slot_there = np.where(inner, tables.image[rank, slots], slots)
    refuse(
        inner & (there == rows) & (slot_there == slots),
        "a facet is glued to itself: there the two-complex folds",
        "glue it to another facet, or leave it in the boundary (across -1)",
    )
    back = (across[there, slot_there] == rows) & (rank[there, slot_there] == tables.inverse[rank])
    refuse(
        inner & ~back,
        "a gluing has no inverse on the other side, or another one",
        "the slot across must lead back, by the inverse permutation",
    )
    rank[~inner] = 0
    return rank


def check_labels_kept(across: np.ndarray, rank: np.ndarray, labels: np.ndarray) -> None:
    k = across.shape[1]
    images = permutations_of(k - 1).image[rank]
    for i in range(k):
        inner = np.flatnonzero(across[:, i] >= 0)
        theirs = np.take_along_axis(labels[across[inner, i]], images[inner, i].astype(np.int64), axis=1)
        differ = theirs != labels[inner]
        differ[:, i] = False
        if differ.any():
            s = int(inner[np.flatnonzero(differ.any(axis=1))[0]])
            raise InputError(
                "a gluing carries a corner to one with another label",
                f"simplex {s}, slot {i}: labels {labels[s].tolist()} meet {labels[across[s, i]].tolist()}",
                "leave the labels out, or mend the gluing",
            )


def check_colours_kept(across: np.ndarray, rank: np.ndarray) -> None:
    wrong = np.argwhere((across >= 0) & (rank != 0))
    if len(wrong):
        s, i = wrong[0].tolist()
        image = permutations_of(across.shape[1] - 1).image[rank[s, i]].tolist()
        raise InputError(
            "a gluing does not keep the colours of the corners",
            f"simplex {s}, slot {i}: corners 0 to {len(image) - 1} go to {image}",
            "in a coloured graph corner c is carried to corner c",
        )


def carry_labels(labels: np.ndarray, across: np.ndarray, names: tuple[str, ...] | None) -> np.ndarray:
    """The carrying permutations that keep the labels of the shared facets: int64, shape (N, K, K)."""
    n, k = labels.shape

    def refuse(bad: np.ndarray, what: str, hint: str) -> None:
        places = np.argwhere(bad)
        if len(places):
            s, i = places[0].tolist()
            more = f" and {len(places) - 1} more" if len(places) > 1 else ""
            t = across[s, i]
            theirs = f", and simplex {t}: {show(labels[t], names)}" if 0 <= t < n else ""
            raise InputError(what, f"simplex {s}: {show(labels[s], names)}, slot {i}{theirs}{more}", hint)

    refuse(
        (across < -1) | (across >= n),
        "a slot is glued to a simplex that does not exist",
        f"simplices are numbered 0 to {n - 1}; -1 means boundary",
    )
    inner = across >= 0
    there = np.where(inner, across, 0)
    others = np.array([[c for c in range(k) if c != i] for i in range(k)])
    # the corners of each facet in the order of their labels
    order = [others[i][np.argsort(labels[:, others[i]], axis=1, kind="stable")] for i in range(k)]
    facet = [np.take_along_axis(labels, order[i], axis=1) for i in range(k)]
    twice = np.stack([(facet[i][:, 1:] == facet[i][:, :-1]).any(axis=1) for i in range(k)], axis=1)
    refuse(
        inner & twice,
        "a label occurs twice on a facet, so the labels do not say how it is glued",
        "give the carrying permutations (carry) as well",
    )
    carry = np.full((n, k, k), -1, dtype=np.int64)
    fitting = np.zeros((n, k), dtype=np.int8)
    for i in range(k):
        for j in range(k):
            t = there[:, i]
            fits = inner[:, i] & (across[t, j] == np.arange(n)) & (facet[i] == facet[j][t]).all(axis=1)
            if i == j:
                fits &= t != np.arange(n)  # a facet is not glued to itself
            rows = np.flatnonzero(fits)
            fitting[rows, i] += 1
            carry[rows, i, i] = j
            carry[rows[:, None], i, order[i][rows]] = order[j][t[rows]]
    refuse(
        inner & (fitting == 0),
        "no facet of the simplex across has these labels and leads back",
        "slot i is the facet opposite corner i: are the neighbours in the order of the corners?",
    )
    refuse(
        inner & (fitting > 1),
        "several facets of the simplex across would do, so the labels do not say which is glued",
        "give the carrying permutations (carry) as well",
    )
    return carry


# -- coordinates --------------------------------------------------------------------------------------


def checked_coordinates(given: Any, n: int, k: int, labels: np.ndarray | None) -> Coordinates | None:
    """Coordinates as arrays of finite numbers, with a row for every label or simplex."""
    if given is None:
        return None
    if not isinstance(given, Coordinates):
        given = Coordinates(point=np.asarray(given))
    point, chart, period = (None if x is None else np.asarray(x, dtype=np.float64) for x in given)
    for array in (point, chart, period):
        if array is not None and not np.isfinite(array).all():
            raise InputError("a coordinate or a period is not a finite number")
    axes = None
    if point is not None:
        if point.ndim != 2:
            raise InputError(f"coordinates have the shape {point.shape}, not (points, axes)")
        axes = point.shape[1]
        if labels is not None and (int(labels.min()) < 0 or int(labels.max()) >= len(point)):
            bad = int(np.flatnonzero(((labels < 0) | (labels >= len(point))).any(axis=1))[0])
            raise InputError(
                f"there are {len(point)} rows of coordinates, and a label has none",
                f"simplex {bad}: {show(labels[bad], None)}",
                "row p of the coordinates belongs to label p, counted from 0",
            )
    if chart is not None:
        if chart.ndim != 3 or chart.shape[:2] != (n, k):
            raise InputError(
                f"corner charts have the shape {chart.shape}, not {(n, k, 'axes')}", "coordinates/corner"
            )
        axes = chart.shape[2]
    if period is not None and (period.shape != (axes,) or (period < 0).any()):
        raise InputError(
            f"the period is {period.tolist()}, not one number for each of {axes} axes",
            hint="a period is positive, and 0 where there is none",
        )
    return Coordinates(point, chart, period)


def sorted_charts(given: Coordinates | None, labels: np.ndarray) -> Coordinates | None:
    """Corner charts brought into the order of the sorted corners."""
    if given is None or given.corner is None:
        return given
    order = np.argsort(labels, axis=1, kind="stable")
    return given._replace(corner=np.take_along_axis(given.corner, order[:, :, None], axis=1))
