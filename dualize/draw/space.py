"""The triangulation and its dual in space, where the corners have coordinates."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations

import numpy as np

from ..errors import InputError
from ..export.vtk import charts, projector
from ..skeleton import Skeleton
from .graphs import checked_most, checked_number, chosen, plural, sentence
from .looks import QUIET
from .sketch import PAGE, Badge, Curve, Mark, Sketch, Words, arrow, finished, straight

__all__ = ["VIEW", "foam_in_space"]

VIEW = (-60.0, 22.0)
# the fourth axis is drawn obliquely, as in the usual pictures of a cube in a cube
FOURTH = (-0.5, 0.1, 0.3)


def foam_in_space(
    skeleton: Skeleton,
    *,
    number: int | None = None,
    most: int = 24,
    axes: Sequence[int] | None = None,
    projection: np.ndarray | None = None,
    view: tuple[float, float] = VIEW,
) -> Sketch:
    """Segments of the triangulation, and the dual in them.

    A vertex is drawn in the middle of its simplex; its edges lead through the middles of facets, and nodes
    are in the middles of the boundary facets.

    Parameters
    ----------
    skeleton : Skeleton
        With coordinates.
    number : int, optional
        Where there are more than `most` vertices, draw those nearest to this one in the dual graph.
    most : int
        At most so many vertices.
    axes, projection : optional
        Three axes to show, or a map to three dimensions, shape (3, A); by default the first three axes, the
        fourth drawn obliquely.
    view : pair of float
        Direction of view: turn about the upright axis and height above the ground, in degrees.

    Raises
    ------
    InputError
        If there are no coordinates, or the axes or the projection do not fit.

    Notes
    -----
    Every simplex is drawn in its own chart, so an edge across the seam of a periodic chart is drawn as two
    halves.
    """
    s = skeleton
    count = s.counts["vertices"]
    most = checked_most(most)
    if number is not None:
        checked_number(number, count, "vertex")
    corner = charts(s)
    count_axes = corner.shape[2]
    if axes is None and projection is None and count_axes == 4:
        projection = np.column_stack([np.eye(3), FOURTH])
    turn = projector(count_axes, axes, projection)
    inner = s.counts["edges_internal"]
    ends = np.column_stack([s["edges/source"][:inner, 0], s["edges/target"][:inner, 0]])
    shown = chosen(np.arange(count), ends, number, most)
    flat = count_axes == 2 and projection is None
    eye = np.eye(3) if flat else _eye(*view)
    place = corner[shown] @ turn.T @ eye.T  # right, up, towards the reader
    k = place.shape[1]
    total = place.sum(axis=1)
    centre = total / k
    facet = (total[:, None] - place) / (k - 1)
    span = np.ptp(place.reshape(-1, 3), axis=0)
    scale = (300.0 if len(shown) > 8 else 210.0) / max(float(span[:2].max()), 1e-12)
    place, centre, facet = place * scale, centre * scale, facet * scale

    deep: list[tuple[float, Mark]] = []
    seen: set[tuple[float, ...]] = set()
    middle = float(np.median(place[..., 2]))
    for row in place:
        for a, b in combinations(range(k), 2):
            key = tuple(np.round(np.concatenate([row[a, :2], row[b, :2]]), 2))
            if key in seen or (*key[2:], *key[:2]) in seen:
                continue
            seen.add(key)
            depth = float(row[[a, b], 2].mean())
            look = "segment" if flat or depth >= middle else "far segment"
            deep.append((depth, Curve(straight(row[a, :2], row[b, :2]), look)))
    twist = s["edges/twist"]
    size = 6.5 if len(shown) <= 16 else 5.6 if len(shown) <= 30 else 4.6 if len(shown) <= 60 else 3.0
    named = len(shown) <= 60
    for x, v in enumerate(shown.tolist()):
        for slot, (e, leaves) in enumerate(s.edges_at(v)):
            look = "external" if e >= inner else "twisted" if twist[e] else "edge"
            a, b = centre[x], facet[x, slot]
            course = straight(a[:2], b[:2]) if leaves > 0 else straight(b[:2], a[:2])
            depth = float((a[2] + b[2]) / 2)
            deep.append((depth, Curve(course, look, ("edge", e))))
            # one arrowhead for an edge: on its first half, or on all there is of it
            if leaves > 0 or e >= inner:
                where = 0.8 if e < inner else 0.55
                deep.append((depth + 0.01, arrow(course, where, look, ("edge", e), 4.5 if named else 3.5)))
            if e >= inner:
                n = e - inner
                sign = "node+" if s["nodes/orientation"][n] > 0 else "node-"
                text = str(n) if len(shown) <= 8 else ""
                deep.append((float(b[2]) + 0.02, Badge(b[:2], text, sign, ("node", n), 5.0 if text else 2.2)))
        sign = "vertex+" if s["vertices/orientation"][v] > 0 else "vertex-"
        deep.append(
            (
                float(centre[x, 2]) + 0.03,
                Badge(centre[x, :2], str(v) if named else "", sign, ("vertex", v), size),
            )
        )
    deep.sort(key=lambda pair: round(pair[0], 6))
    marks = [mark for _, mark in deep]
    marks += _tripod(turn, eye, place.reshape(-1, 3)[:, :2].min(axis=0))
    note = []
    if len(shown) < count:
        note.append(f"only a part: {len(shown)} of {count} simplices, those nearest to {number or 0}")
    if projection is not None and count_axes == 4 and axes is None:
        note.append("the fourth axis is projected")
    elif count_axes > 3 or axes is not None:
        dropped = [a for a in range(count_axes) if not turn[:, a].any()]
        note.append(f"axes {', '.join(map(str, dropped))} left out" if dropped else "")
    if "coordinates/period" in s or "coordinates/corner" in s:
        note.append("every simplex in its own chart: across a seam an edge is in two halves")
    title = f"Triangulation and dual: {plural(count, 'simplex')} of dimension {s.dimension}"
    return finished(marks, title, sentence(note), width=PAGE if len(shown) > 8 else None)


def _eye(turn: float, height: float) -> np.ndarray:
    """Rows: to the right, up, and towards the reader, for a reader in this direction."""
    if not np.isfinite([turn, height]).all():
        raise InputError("the direction of view is two angles in degrees")
    a, h = np.radians(turn), np.radians(height)
    towards = np.array([np.cos(h) * np.cos(a), np.cos(h) * np.sin(a), np.sin(h)])
    right = np.array([-np.sin(a), np.cos(a), 0.0])
    return np.array([right, np.cross(towards, right), towards])


def _tripod(turn: np.ndarray, eye: np.ndarray, corner: np.ndarray) -> list[Mark]:
    """The directions of the axes of the coordinates, in the lower left corner."""
    marks: list[Mark] = []
    base = corner - 26.0
    for axis in range(turn.shape[1]):
        way = (eye @ turn[:, axis])[:2]
        if np.linalg.norm(way) < 0.08:
            continue
        tip = base + 20.0 * way
        marks.append(Curve(straight(base, tip), "axis"))
        marks.append(
            Words(base + (20.0 + 6.0 / np.linalg.norm(way)) * way, str(axis), colour=QUIET, size=6.0)
        )
    return marks
