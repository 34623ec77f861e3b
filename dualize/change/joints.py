"""What gluing and cutting share: tables side by side, gluings put in, labels merged, the result."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from ..errors import InputError, TriangulationError
from ..kernels.permutations import permutations_of
from ..triangulation import Coordinates, Triangulation
from .charts import charts
from .common import Changed, fresh_labels, fresh_words, with_fields
from .tables import by_labels, labels_name_simplices, new_positions, oriented_as

__all__ = [
    "Charts",
    "charts_and_points",
    "charts_of_both",
    "finished",
    "merged_labels",
    "side_by_side",
    "with_gluings",
]


# Coordinates by simplex, by label, and the period; each may be missing.
Charts = tuple[np.ndarray | None, np.ndarray | None, np.ndarray | None]


def charts_and_points(t: Triangulation) -> Charts:
    """What is known of where the corners lie: a chart for each simplex, rows by label, and the period."""
    c = t.coordinates
    if c is None:
        return None, None, None
    return charts(t), (c.point if t.corners is not None and t.matched else None), c.period


def charts_of_both(first: Triangulation, second: Triangulation) -> Charts:
    """Charts of two complexes together, where both have some of the same kind."""
    one, two = charts(first), charts(second)
    if one is None or two is None or one.shape[2] != two.shape[2]:
        return None, None, None
    assert first.coordinates is not None and second.coordinates is not None
    p, q = first.coordinates.period, second.coordinates.period
    if (p is None) != (q is None) or (p is not None and q is not None and not np.array_equal(p, q)):
        return None, None, None
    return np.concatenate([one, two]), None, p


def side_by_side(
    first: Triangulation, second: Triangulation, target: Mapping[int, int]
) -> tuple[Triangulation, np.ndarray | None, list[str] | None, list[str], list]:
    """Both tables as one, and labels: those of `second` in `target` as it says, others kept apart."""
    if first.dimension != second.dimension:
        raise InputError(
            f"complexes of different dimension, {first.dimension} and {second.dimension}, are put together"
        )
    n = len(first)
    across = np.concatenate([first.across, np.where(second.across >= 0, second.across + n, -1)])
    table = Triangulation(
        across.astype(np.int32),
        np.concatenate([first.rank, second.rank]),
        np.concatenate([first.written, second.written]),
    )
    have = [t.corners is not None and t.matched for t in (first, second)]
    if not all(have) or (first.corner_names is None) != (second.corner_names is None):
        note = [] if not any(have) else ["labels dropped: the other complex has none of their kind"]
        return table, None, None, note, []
    assert first.corners is not None and second.corners is not None
    theirs = np.unique(second.corners).tolist()
    words: list[str] | None = None
    renamed: list[tuple] = []
    new = np.empty(len(theirs), dtype=np.int64)
    if first.corner_names is not None and second.corner_names is not None:
        words = list(first.corner_names)
        taken = set(words)
        spare = iter(fresh_words([*words, *second.corner_names], len(theirs)))
        for row, x in enumerate(theirs):
            if x in target:
                new[row] = target[x]
                continue
            word = second.corner_names[x]
            if word in taken:
                renamed.append((word, next(spare)))
                word = renamed[-1][1]
            new[row] = len(words)
            words.append(word)
    else:
        used = set(np.unique(first.corners).tolist())
        top = max(int(fresh_labels(first, len(theirs))[0]), int(fresh_labels(second, len(theirs))[0]))
        for row, x in enumerate(theirs):
            new[row] = target.get(x, x)
            if x in used and x not in target:
                renamed.append((x, top + len(renamed)))
                new[row] = renamed[-1][1]
    labels = np.concatenate([first.corners, new[np.searchsorted(theirs, second.corners)]])
    return table, labels, words, [], renamed


def with_gluings(t: Triangulation, joined: list) -> tuple[Triangulation, list]:
    """`t` with facets glued, each ((simplex, corners), (simplex, corners)); and the same list."""
    k = t.dimension + 1
    tables = permutations_of(k - 1)
    across = np.array(t.across, dtype=np.int64)
    rank = np.array(t.rank)
    for (s, mine), (u, theirs) in joined:
        i = next(c for c in range(k) if c not in mine)
        j = next(c for c in range(k) if c not in theirs)
        for a, slot in ((s, i), (u, j)):
            if across[a, slot] >= 0:
                raise InputError(
                    "a facet to glue is glued already",
                    f"{t.place(a)}, slot {slot}",
                    "only boundary facets are free",
                )
        if (s, i) == (u, j):
            raise TriangulationError(
                "a facet would be glued to itself: there the two-complex folds", f"{t.place(s)}, slot {i}"
            )
        image = [0] * k
        image[i] = j
        for c, e in zip(mine, theirs, strict=True):
            image[c] = e
        forward = int(tables.rank(np.array(image)))
        across[s, i], across[u, j] = u, s
        rank[s, i], rank[u, j] = forward, tables.inverse[forward]
    return Triangulation(across.astype(np.int32), rank, t.written), joined


def merged_labels(labels: np.ndarray, joined: list) -> np.ndarray:
    """Labels of which those that gluings identify have become the smallest of them."""
    import scipy.sparse
    import scipy.sparse.csgraph

    used, place = np.unique(labels, return_inverse=True)
    place = place.reshape(labels.shape)
    ends = [
        (place[s, c], place[u, e])
        for (s, mine), (u, theirs) in joined
        for c, e in zip(mine, theirs, strict=True)
    ]
    rows = np.array(ends, dtype=np.int64).reshape(-1, 2)
    graph = scipy.sparse.coo_matrix((np.ones(len(rows)), (rows[:, 0], rows[:, 1])), shape=(len(used),) * 2)
    _, part = scipy.sparse.csgraph.connected_components(graph, directed=False)
    smallest = np.full(part.max() + 1, np.iinfo(np.int64).max)
    np.minimum.at(smallest, part, used)
    return smallest[part][place]


def finished(
    table: Triangulation,
    labels: np.ndarray | None,
    words: list[str] | None,
    chart: Charts,
    refined_from: np.ndarray,
    notes: list[str],
    wanted: np.ndarray | None = None,
) -> Changed:
    """A labelled complex where the labels allow it, else the table; oriented as `wanted`."""
    by_simplex, point, period = chart
    if wanted is not None:
        table = oriented_as(table, wanted)
    notes = list(notes)
    if labels is not None and labels_name_simplices(table, labels):
        out = by_labels(
            table.across.astype(np.int64), table.rank, table.written, labels, words, point, period
        )
        if point is None and by_simplex is not None:
            if words is None:
                order = np.argsort(labels, axis=1)
            else:
                order = np.argsort(new_positions(labels, words), axis=1)
            rows = np.take_along_axis(by_simplex, order[:, :, None], axis=1)
            out = with_fields(out, coordinates=Coordinates(corner=rows, period=period))
        return Changed(out, refined_from, (), tuple(notes))
    if labels is not None:
        notes.append("no simplicial complex (several simplices on the same points), so it has no labels")
    if by_simplex is not None:
        table = with_fields(table, coordinates=Coordinates(corner=by_simplex, period=period))
    return Changed(table, refined_from, (), tuple(notes))
