"""The orientable double cover."""

from __future__ import annotations

import numpy as np

from ..errors import InputError
from ..kernels.permutations import permutations_of
from ..triangulation import Triangulation
from .common import Changed, with_fields
from .cutting import split_labels
from .joints import Charts, charts_and_points, finished
from .tables import orientations

__all__ = ["double_cover"]


def double_cover(triangulation: Triangulation) -> Changed:
    """Every simplex with both its orientations, glued where they agree: the orientable double cover.

    Parameters
    ----------
    triangulation : Triangulation
        With a component that is not orientable.

    Returns
    -------
    Changed
        Simplex s and simplex ``s + N`` lie over simplex s, the former with its orientation, the latter with
        the opposite one.  It is connected over every component that is not orientable; an orientable one
        becomes two copies.  In a labelled complex one of the points over a point keeps its label; where
        labels do not tell the simplices apart, the cover is a gluing table.

    Raises
    ------
    InputError
        If the complex is orientable: then the cover is two copies of it.

    Notes
    -----
    The cover belongs to the twists, a Z2 cocycle that represents the first Stiefel-Whitney class.  Over a
    point whose link is not orientable lies one point, a branch point of the map.

    Examples
    --------
    >>> plane = Triangulation.from_facets([[0, 1, 2], [0, 2, 3], [0, 3, 4], [0, 4, 5], [0, 1, 5], [1, 2, 4],
    ...                                    [2, 3, 5], [1, 3, 4], [2, 4, 5], [1, 3, 5]])
    >>> double_cover(plane).triangulation
    <Triangulation 2D: 20 simplices, labelled, 0 boundary facets>
    """
    t, d = triangulation, triangulation.dimension
    n = len(t)
    orientation, component = orientations(t)
    tables = permutations_of(d)
    inner = t.across >= 0
    twisted = inner & (orientation[t.across] * tables.sign[t.rank] == orientation[:, None])
    if not twisted.any():
        raise InputError(
            "the complex is orientable, so its double cover is two copies of it",
            hint="only a complex with a twisted edge has a connected one",
        )
    bent = np.unique(component[twisted.any(axis=1)])
    notes = []
    if (whole := len(np.unique(component)) - len(bent)) > 0:
        notes.append(f"{whole} orientable component{'s' if whole > 1 else ''} became two copies each")
    sheets = []
    for sheet in (0, 1):
        over = t.across + n * (twisted ^ bool(sheet))
        sheets.append(np.where(inner, over, -1))
    table = Triangulation(
        np.concatenate(sheets).astype(np.int32 if 2 * n < 2**31 else np.int64),
        np.concatenate([t.rank, t.rank]),
        np.concatenate([t.written, -t.written]),
        coloured=t.coloured,
    )
    labels, words = None, None
    fresh: list = []
    by_simplex, point, period = charts_and_points(t)
    chart: Charts = (None if by_simplex is None else np.concatenate([by_simplex] * 2), point, period)
    if t.corners is not None and t.matched:
        twice = with_fields(table, corners=np.concatenate([t.corners] * 2), corner_names=t.corner_names)
        if t.coordinates is not None and t.coordinates.point is not None:
            twice = with_fields(twice, coordinates=t.coordinates)
        labels, words, chart, fresh = split_labels(twice, table, chart)
    wanted = np.concatenate([orientation, -orientation])
    result = finished(table, labels, words, chart, np.tile(np.arange(n), 2), notes, wanted)
    if result.triangulation.corners is None:
        fresh = []
    return Changed(result.triangulation, result.refined_from, fresh, result.notes)
