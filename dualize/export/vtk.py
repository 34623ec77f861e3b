"""The dual one- and two-skeleton as a mesh of lines and quadrilaterals, where the corners have coordinates.

Every simplex is drawn in its own chart, so that periodic complexes come out whole: half an edge is the line
from the barycentre of the simplex to that of a facet, and the wedge of a face the quadrilateral

    ridge, facet where the face enters, simplex, facet where it leaves

(the dual cells of a triangulation; J. R. Munkres, Elements of Algebraic Topology, 1984, section 64).  Lines
run along their edges and quadrilaterals turn along their faces.  What is lost: the gluing across charts,
except by the numbers.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from ..errors import InputError
from ..layout import wedge_pairs
from ..skeleton import Skeleton

if TYPE_CHECKING:
    import meshio

__all__ = ["charts", "dual_mesh", "projector"]

SUFFIXES = {".vtk": "vtk", ".vtu": "vtu"}


def dual_mesh(
    skeleton: Skeleton, axes: Sequence[int] | None = None, projection: np.ndarray | None = None
) -> meshio.Mesh:
    """The dual one- and two-skeleton as a mesh in three dimensions.

    Parameters
    ----------
    skeleton : Skeleton
        With coordinates.
    axes : sequence of int, optional
        The three axes of the coordinates to keep; by default the first three.
    projection : array_like of float, shape (3, A), optional
        Applied instead.

    Returns
    -------
    meshio.Mesh
        Cell data ``edge`` and ``face`` (number, -1 where it is none), ``vertex`` (the simplex),
        ``direction`` (a line: +1 the edge leaves the vertex, -1 it arrives; a quadrilateral:
        ``wedges/direction``), ``orientation`` (of the simplex) and ``twist`` (of the edge).  Point data
        ``dimension`` (of the dual cell at the middle of which the point lies) and ``number`` (of that cell).

    Raises
    ------
    InputError
        If there are no coordinates, or the axes or the projection do not fit.
    """
    import meshio

    s = skeleton
    corner = charts(s)
    turn = projector(corner.shape[2], axes, projection)
    corner = corner @ turn.T
    n, k = corner.shape[:2]
    pairs = np.array(wedge_pairs(s.dimension))
    total = corner.sum(axis=1)
    centre = total / k
    facet = (total[:, None] - corner) / (k - 1)
    ridge = (total[:, None] - corner[:, pairs[:, 0]] - corner[:, pairs[:, 1]]) / (k - 2)

    # points of one simplex: its centre, its facets, its ridges
    stride = 1 + k + len(pairs)
    points = np.concatenate([centre[:, None], facet, ridge], axis=1).reshape(-1, 3)
    base = stride * np.arange(n, dtype=np.int64)[:, None]
    middle, at_facet = np.broadcast_to(base, (n, k)), base + 1 + np.arange(k)
    leaves = s["vertices/leaves"] > 0
    lines = np.where(leaves[..., None], np.stack([middle, at_facet], -1), np.stack([at_facet, middle], -1))
    onward = s["wedges/direction"] > 0
    enter = base + 1 + np.where(onward, pairs[:, 0], pairs[:, 1])
    leave = base + 1 + np.where(onward, pairs[:, 1], pairs[:, 0])
    at_ridge = base + 1 + k + np.arange(len(pairs))
    quads = np.stack([at_ridge, enter, np.broadcast_to(base, enter.shape), leave], -1)

    edge, face = s["vertices/edge"].astype(np.int64), s["wedges/face"].astype(np.int64)
    vertex = np.arange(n, dtype=np.int64)[:, None]
    data = {
        "edge": (edge, np.full_like(face, -1)),
        "face": (np.full_like(edge, -1), face),
        "vertex": (np.broadcast_to(vertex, edge.shape), np.broadcast_to(vertex, face.shape)),
        "direction": (s["vertices/leaves"], s["wedges/direction"]),
        "orientation": tuple(
            np.broadcast_to(s["vertices/orientation"][:, None], x.shape) for x in (edge, face)
        ),
        "twist": (s["edges/twist"][edge], np.zeros_like(face)),
    }
    kinds = np.repeat([0, 1, 2], [1, k, len(pairs)])
    return meshio.Mesh(
        points,
        [("line", lines.reshape(-1, 2)), ("quad", quads.reshape(-1, 4))],
        point_data={
            "dimension": np.tile(kinds, n).astype(np.int64),
            "number": np.concatenate([vertex, edge, face], axis=1).ravel(),
        },
        cell_data={name: [np.ravel(x).astype(np.int64) for x in blocks] for name, blocks in data.items()},
    )


def charts(skeleton: Skeleton) -> np.ndarray:
    """Coordinates of the corners of every simplex in a chart of its own, shape (V, D + 1, A).

    One chart for all is cut open at its period: every corner is the image next to the first of its simplex.

    Raises
    ------
    InputError
        If there are none, or it is not known which row belongs to which corner.
    """
    s = skeleton
    if "coordinates/corner" in s:
        return s["coordinates/corner"]
    if "coordinates/point" in s:
        labels = s.arrays.get("vertices/corners", s.arrays.get("vertices/point"))
        if labels is None:
            raise InputError(
                "the coordinates belong to points, and the skeleton does not say which corner is which point",
                hint="build it with --points, points=True",
            )
        point = s["coordinates/point"]
        if labels.min() < 0 or labels.max() >= len(point):
            raise InputError(f"there are {len(point)} rows of coordinates, and a corner needs another")
        corner = point[labels]
    else:
        raise InputError(
            "the skeleton has no coordinates", hint="build it from a triangulation that has them"
        )
    if "coordinates/period" in s:
        period = s["coordinates/period"]
        step = corner - corner[:, :1]
        turns = np.divide(step, period, out=np.zeros_like(step), where=period > 0)
        corner = corner[:, :1] + step - np.rint(turns) * period
    return corner


def projector(
    count: int, axes: Sequence[int] | None = None, projection: np.ndarray | None = None
) -> np.ndarray:
    """The map from `count` axes to three, float64, shape (3, count); missing axes are 0.

    Raises
    ------
    InputError
        If `axes` or `projection` do not fit.
    """
    if projection is not None:
        if axes is not None:
            raise InputError("axes and a projection are both given", hint="give one of them")
        try:
            turn = np.asarray(projection, dtype=np.float64)
        except (TypeError, ValueError):
            raise InputError("the projection is no table of numbers") from None
        if turn.shape != (3, count) or not np.isfinite(turn).all():
            raise InputError(
                f"the projection has the shape {turn.shape}", hint=f"give 3 rows of {count} finite numbers"
            )
        return turn
    chosen = list(range(min(3, count))) if axes is None else list(axes)
    if (
        len(set(chosen)) != len(chosen)
        or not 1 <= len(chosen) <= 3
        or any(not 0 <= a < count for a in chosen)
    ):
        raise InputError(
            f"there are no such axes: {', '.join(map(str, chosen))}",
            hint=f"name up to three different ones of 0 to {count - 1}",
        )
    turn = np.zeros((3, count))
    turn[range(len(chosen)), chosen] = 1
    return turn
