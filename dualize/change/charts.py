"""Where the corners lie: charts of the simplices, one chart for all, and what moves make of it."""

from __future__ import annotations

import numpy as np

from ..kernels import engine
from ..kernels.moves import average_points
from ..topology.classes import classes
from ..triangulation import Coordinates, Triangulation
from .record import Moves

__all__ = ["averages", "charts", "moved_coordinates", "one_chart", "rows_in_order"]


def charts(t: Triangulation) -> np.ndarray | None:
    """Coordinates of the corners of every simplex, (N, D + 1, A), the images nearest to its first corner."""
    c = t.coordinates
    if c is None:
        return None
    if c.corner is not None:
        return c.corner
    assert c.point is not None
    labels = t.corners if t.corners is not None else classes(t, 1).number
    rows = c.point[labels]
    if c.period is None or not (c.period > 0).any():
        return rows
    step = rows - rows[:, :1]
    length = np.where(c.period > 0, c.period, 1.0)
    return rows[:, :1] + np.where(c.period > 0, step - length * np.round(step / length), step)


def averages(rows: np.ndarray, period: np.ndarray | None) -> np.ndarray:
    """Averages over the second last axis, (..., m, A) to (..., A); of nearest images, where periodic."""
    if period is None or not (period > 0).any():
        return rows.mean(axis=-2)
    step = rows - rows[..., :1, :]
    length = np.where(period > 0, period, 1.0)
    step = np.where(period > 0, step - length * np.round(step / length), step)
    return rows[..., 0, :] + step.mean(axis=-2)


def moved_coordinates(t: Triangulation, moves: Moves) -> tuple[Coordinates | None, tuple[str, ...]]:
    """Coordinates after moves: rows by label (by word of the record), new points at barycentres."""
    if t.coordinates is None:
        return None, ()
    if moves.labels is None:
        return None, ("coordinates dropped: a gluing table has one chart for each simplex",)
    chart = one_chart(t)
    if chart is None:
        return None, ("coordinates dropped: the charts of the simplices do not fit together to one",)
    assert chart.point is not None
    point, period = chart.point, chart.period
    births = moves.labels[moves.kind == 1]
    if len(births):
        rows = np.zeros((max(len(point), int(births.max()) + 1), point.shape[1]))
        rows[: len(point)] = point
        wrap = np.zeros(point.shape[1]) if period is None else period
        flat = rows.ravel()

        arguments = (
            births[:, :-1].ravel(),
            births[:, -1].copy(),
            flat,
            wrap,
            tuple(range(births.shape[1] - 1)),
        )
        engine(len(births))(average_points, *arguments, len(births))
        point = flat.reshape(rows.shape)
    note = ("coordinates kept: moves are combinatorial, so simplices may overlap or be flat",)
    return Coordinates(point=point, period=period), note


def one_chart(t: Triangulation) -> Coordinates | None:
    """One chart for all labels, where the charts of the simplices agree up to periods; None where not."""
    c = t.coordinates
    if c is None or t.corners is None or c.point is not None:
        return c
    assert c.corner is not None
    flat = t.corners.ravel()
    if flat.min() < 0 or flat.max() >= 4 * len(flat):
        return None
    rows = c.corner.reshape(len(flat), -1)
    used, first = np.unique(flat, return_index=True)
    point = np.zeros((int(flat.max()) + 1, rows.shape[1]))
    point[used] = rows[first]
    step = rows - point[flat]
    wide = c.corner.max(axis=1) - c.corner.min(axis=1)
    if c.period is not None:
        length = np.where(c.period > 0, c.period, 1.0)
        step = np.where(c.period > 0, step - length * np.round(step / length), step)
        if (np.where(c.period > 0, wide / length, 0.0) >= 0.5).any():
            return None  # the nearest image of a corner is not the one meant
    if np.abs(step).max() > 1e-9 * max(1.0, float(np.abs(rows).max())):
        return None
    return Coordinates(point=point, period=c.period)


def rows_in_order(t: Triangulation, moves: Moves, coordinates: Coordinates) -> Coordinates:
    """Rows in the order of the words of `t`; by label where labels are numbers."""
    if t.corner_names is None or moves.words is None:
        return coordinates
    assert coordinates.point is not None
    row = {word: x for x, word in enumerate(moves.words)}
    return coordinates._replace(point=coordinates.point[[row[word] for word in t.corner_names]])
