"""Elementary shellings: moves of the boundary, which glue one simplex on or take one off."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from ..errors import InputError, TriangulationError
from ..topology.classes import classes, corner_subsets
from ..triangulation import Triangulation
from .charts import averages
from .common import (
    Changed,
    as_written,
    fresh_labels,
    fresh_words,
    label_numbers,
    labelled,
    need_labels,
    new_label,
    rows_with,
    show,
    simplex_number,
)
from .parts import remove
from .tables import orientations, oriented_as

__all__ = ["attach", "detach"]


def attach(triangulation: Triangulation, at: Sequence[Any], *, label: int | str | None = None) -> Changed:
    """Glue a simplex on: an elementary shelling backwards, which is a bistellar move of the boundary.

    The simplex X lies in as many boundary facets as they have points besides X (one facet, or a ball of
    them around X); X and these points are the corners of the new simplex, and X comes to lie inside.  Glued
    on a single facet the new simplex has one new point.

    Parameters
    ----------
    triangulation : Triangulation
        A labelled complex with boundary.
    at : sequence of labels
        X: D labels of a boundary facet, or fewer.
    label : int or str, optional
        Of the new point, where there is one.

    Raises
    ------
    TriangulationError
        If X is not in the boundary, lies in another number of boundary facets, or the simplex that would
        become the new part of the boundary is there already.

    References
    ----------
    U. Pachner, European J. Combin. 12 (1991) 129-145.

    Examples
    --------
    >>> t = Triangulation.from_facets([[0, 1, 2]])
    >>> attach(t, [1, 2]).triangulation.corners.tolist()
    [[0, 1, 2], [1, 2, 3]]
    """
    t, d = triangulation, triangulation.dimension
    corners = need_labels(t, "gluing a simplex on")
    x = label_numbers(t, list(at))
    if not 1 <= len(x) <= d:
        raise InputError(
            f"the place has {len(x)} labels", show(t, x), f"it is a boundary simplex of 1 to {d} labels"
        )
    place = np.argwhere(t.across < 0)
    facets = np.array([np.delete(corners[s], i) for s, i in place.tolist()], dtype=np.int64).reshape(-1, d)
    star = rows_with(facets, x)
    if not len(star):
        raise TriangulationError(
            "no simplex can be glued on: these labels are no simplex of the boundary", show(t, x)
        )
    others = sorted(set(facets[star].ravel().tolist()) - set(x))
    size = d + 1 - len(x)
    fresh: list = []
    words = None if t.corner_names is None else list(t.corner_names)
    if size == 1:
        if words is not None:
            words.append(fresh_words(words, 1)[0] if label is None else str(new_label(t, label)))
            others, fresh = [len(words) - 1], [words[-1]]
        else:
            others = [int(fresh_labels(t, 1)[0]) if label is None else int(new_label(t, label))]
            fresh = list(others)
    else:
        if label is not None:
            raise InputError("a label is given, and the new simplex has no new point")
        if len(star) != size or len(others) != size:
            raise TriangulationError(
                f"no simplex can be glued on: the place lies in {len(star)} boundary facets, not in {size}",
                show(t, x),
            )
        if len(there := rows_with(corners, others)):
            raise TriangulationError(
                "no simplex can be glued on: the simplex that would come to the boundary exists already",
                f"{show(t, others)} in simplex {there[0]}",
            )
    rows = np.concatenate([as_written(t), np.array([sorted([*x, *others])], dtype=np.int64)])
    coordinates = t.coordinates
    notes: tuple[str, ...] = ()
    if coordinates is not None and coordinates.corner is not None:
        coordinates, notes = None, ("coordinates dropped: the new simplex has no chart",)
    elif coordinates is not None and coordinates.point is not None and size == 1:
        # on the other side of the facet, as far as the corner opposite to it
        s, i = place[star[0]].tolist()
        middle = averages(coordinates.point[x], coordinates.period)
        point = 2 * middle - coordinates.point[corners[s, i]]
        if others[0] == len(coordinates.point):
            coordinates = coordinates._replace(point=np.concatenate([coordinates.point, point[None]]))
        else:
            coordinates, notes = None, ("coordinates dropped: the new label has no row in their table",)
    result = labelled(rows, words, coordinates)
    before, _ = orientations(t)
    after, _ = orientations(result)
    result = oriented_as(result, np.concatenate([before, after[-1:]]))
    return Changed(result, np.append(np.arange(len(t)), -1), fresh, notes)


def detach(triangulation: Triangulation, simplex: int) -> Changed:
    """Take a simplex off: an elementary shelling.

    Let X be the corners opposite to the boundary facets of the simplex.  It can be taken off without changing
    what the complex is if it has boundary facets, others as well, and the simplex X is not in the boundary.

    Parameters
    ----------
    triangulation : Triangulation
        Labelled or a gluing table, with boundary.
    simplex : int

    Raises
    ------
    TriangulationError
        If the simplex has no boundary facet, no other, or meets the boundary elsewhere as well.

    Examples
    --------
    >>> t = Triangulation.from_facets([[0, 1, 2], [1, 2, 3]])
    >>> detach(t, 1).triangulation.corners.tolist()
    [[0, 1, 2]]
    """
    t, d = triangulation, triangulation.dimension
    s = simplex_number(t, simplex)
    free = np.flatnonzero(t.across[s] < 0)
    if not len(free):
        raise TriangulationError("the simplex cannot be taken off: it has no boundary facet", t.place(s))
    if len(free) == d + 1:
        raise TriangulationError("the simplex cannot be taken off: it hangs on no other", t.place(s))
    if (t.across[s] == s).any():
        raise TriangulationError("the simplex cannot be taken off: it is glued to itself", t.place(s))
    m = len(free)
    if m < d and _on_boundary(t, s, free):
        raise TriangulationError(
            "the simplex cannot be taken off: it meets the boundary in more than its boundary facets",
            f"{t.place(s)}; corners {free.tolist()} are a simplex of the boundary",
        )
    return remove(t, [s])


def _on_boundary(t: Triangulation, s: int, chosen: np.ndarray) -> bool:
    """Whether the simplex on these corners of `s` lies in a boundary facet."""
    d, m = t.dimension, len(chosen)
    if t.corners is not None and t.matched:
        rows = rows_with(t.corners, t.corners[s, chosen].tolist())
        lacks = ~np.isin(t.corners[rows], t.corners[s, chosen])
        return bool(((t.across[rows] < 0) & lacks).any())
    subsets = corner_subsets(d, m)
    number_of = classes(t, m).number
    mine = number_of[s, subsets.tolist().index(chosen.tolist())]
    for u, column in np.argwhere(number_of == mine).tolist():
        slots = [i for i in range(d + 1) if i not in subsets[column]]
        if (t.across[u, slots] < 0).any():
            return True
    return False
