"""Cutting along facets."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from ..errors import InputError
from ..kernels.permutations import permutations_of
from ..topology.classes import classes
from ..triangulation import Triangulation
from .common import Changed, fresh_labels, fresh_words, label_numbers, number, rows_with, show, simplex_number
from .joints import Charts, charts_and_points, finished
from .tables import orientations

__all__ = ["cut", "split_labels"]


def cut(triangulation: Triangulation, facets: Sequence[Any]) -> Changed:
    """Cut along interior facets: each becomes two boundary facets.

    Parameters
    ----------
    triangulation : Triangulation
    facets : sequence
        Each D labels, or a pair (simplex, slot) of numbers in a gluing table.

    Returns
    -------
    Changed
        A point that falls into several keeps its label where most of its simplices are (the first of these,
        if they are equally many), and has new labels elsewhere.  Where both sides of a cut keep all their
        points, the result is no simplicial complex, and is a gluing table.
    """
    t, d = triangulation, triangulation.dimension
    is_labelled = t.corners is not None and t.matched
    places = [_facet(t, facet, is_labelled) for facet in facets]
    if not places:
        raise InputError("no facet is given to cut along")
    across = np.array(t.across, dtype=np.int64)
    rank = np.array(t.rank)
    tables = permutations_of(d)
    for s, i in places:
        there = int(across[s, i])
        if there < 0:
            raise InputError(
                "a facet to cut along is on the boundary, or given twice", f"{t.place(s)}, slot {i}"
            )
        j = int(tables.image[rank[s, i], i])
        across[s, i] = across[there, j] = -1
        rank[s, i] = rank[there, j] = 0
    table = Triangulation(across.astype(np.int32), rank, t.written)
    labels, words, chart = None, None, charts_and_points(t)
    fresh: list = []
    if is_labelled:
        assert t.corners is not None
        labels, words, chart, fresh = split_labels(t, table, chart)
    result = finished(table, labels, words, chart, np.arange(len(t)), [], orientations(t)[0])
    if result.triangulation.corners is not None:
        result = Changed(result.triangulation, result.refined_from, fresh, result.notes)
    return result


def split_labels(
    t: Triangulation, table: Triangulation, chart: Charts
) -> tuple[np.ndarray, list[str] | None, Charts, list]:
    """Labels by the classes of points of a table that was cut out of `t`."""
    assert t.corners is not None
    number_of = classes(table, 1).number
    _, first = np.unique(number_of, return_index=True)
    label = t.corners.ravel()[first]  # label of each class; classes are numbered by first occurrence
    most = np.lexsort((first, -np.bincount(number_of.ravel()), label))
    original = most[np.unique(label[most], return_index=True)[1]]
    again = np.setdiff1d(np.arange(len(label)), original)
    words = None if t.corner_names is None else list(t.corner_names)
    fresh: list = []
    old = label[again].copy()
    if words is not None:
        fresh = list(fresh_words(words, len(again)))
        label[again] = len(words) + np.arange(len(again))
        words += fresh
    elif len(again):
        label[again] = fresh_labels(t, len(again))
        fresh = label[again].tolist()
    by_simplex, point, period = chart
    if point is not None and len(again):
        rows = np.zeros((int(label.max()) + 1 if words is None else len(words), point.shape[1]))
        rows[: len(point)] = point[: len(rows)]
        rows[label[again]] = point[old]
        point = rows
    return label[number_of], words, (by_simplex, point, period), fresh


def _facet(t: Triangulation, facet: Any, is_labelled: bool) -> tuple[int, int]:
    parts = list(facet)
    d = t.dimension
    if is_labelled and len(parts) == d:
        assert t.corners is not None
        labels = label_numbers(t, parts)
        rows = rows_with(t.corners, labels)
        if not len(rows):
            raise InputError("these labels are no facet of the complex", show(t, labels))
        s = int(rows[0])
        return s, next(c for c in range(d + 1) if t.corners[s, c] not in labels)
    if len(parts) != 2:
        kind = f"{d} labels" if is_labelled else "a simplex and a slot"
        raise InputError(f"a facet is {kind}, and this is {' '.join(map(str, parts))}")
    return simplex_number(t, parts[0]), number(parts[1], "slot", 0, d)
