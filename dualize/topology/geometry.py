"""What coordinates say of a triangulation, from differences within its simplices only.

Only differences within one simplex are taken, so a seam of a periodic chart raises no alarm: with one chart
for all and a period they are brought to the nearest image, and with a chart for each simplex neighbours are
compared after translation.  Charts that are turned against each other as well, as at a twisted seam, do not
tell sides: any facet of the right shape can be put on the other's far side by a reflection.
"""

from __future__ import annotations

from math import prod
from typing import NamedTuple

import numpy as np

from ..kernels.permutations import permutations_of
from ..triangulation import Triangulation

__all__ = ["Shapes", "shapes"]

FLAT = 1e-12  # a volume this small against the product of the edges is zero


class Shapes(NamedTuple):
    """Which simplices are flat, and which neighbours do not fit.

    Attributes
    ----------
    axes : int
    flat : ndarray of int64, shape (n,)
        Simplices of zero volume.
    folded : ndarray of int64, shape (m, 2), or None
        Half-facets ``(simplex, slot)`` whose two simplices lie on the same side; None unless there are as
        many axes as dimensions.  Flat simplices have no side and are left out.
    apart : ndarray of int64, shape (m, 2)
        Half-facets whose edges have other lengths in the two charts.
    turned : ndarray of int64, shape (m, 2)
        Half-facets of the same shape in both charts, in another direction: `folded` leaves them out.
    smallest, largest : float
        Smallest and largest volume, without sign.
    """

    axes: int
    flat: np.ndarray
    folded: np.ndarray | None
    apart: np.ndarray
    turned: np.ndarray
    smallest: float
    largest: float


def shapes(triangulation: Triangulation, points: np.ndarray | None = None) -> Shapes | None:
    """Volumes and sides, or None where there are no coordinates, or fewer axes than dimensions.

    Parameters
    ----------
    triangulation : Triangulation
    points : ndarray of int, shape (N, D + 1), optional
        Rows of the coordinates of points at the corners; by default the labels.
    """
    t, d = triangulation, triangulation.dimension
    charts = t.coordinates
    rows = t.corners if points is None else points
    if charts is None or (charts.corner is None and (charts.point is None or rows is None)):
        return None
    if charts.corner is not None:
        corner = charts.corner
        period = None
    else:
        assert charts.point is not None and rows is not None
        corner = charts.point[rows]
        period = charts.period
    axes = corner.shape[2]
    if axes < d:
        return None
    edges = _nearest(corner[:, 1:] - corner[:, :1], period)  # (N, D, axes)
    if axes == d:
        volume = np.linalg.det(edges)
    else:
        volume = np.sqrt(np.maximum(np.linalg.det(edges @ edges.swapaxes(1, 2)), 0.0))
    scale = np.linalg.norm(edges, axis=2).prod(axis=1)
    flat = ~(np.abs(volume) > FLAT * scale)
    corners = np.concatenate([np.zeros_like(edges[:, :1]), edges], axis=1)  # each chart moved to corner 0
    apart, turned, folded = [], [], []
    image = permutations_of(d).image
    for i in range(d + 1):
        here = np.flatnonzero(t.across[:, i] >= 0)
        there = t.across[here, i]
        carried = image[t.rank[here, i]].astype(np.int64)
        first = here * (d + 1) + i < there * (d + 1) + carried[:, i]
        here, there, carried = here[first], there[first], carried[first]
        others = [c for c in range(d + 1) if c != i]
        mine = corners[here][:, others]
        theirs = corners[there[:, None], carried[:, others]]
        mine, theirs = (_nearest(x - x[:, :1], period) for x in (mine, theirs))
        gap = _nearest(mine - theirs, period)
        size = np.abs(mine).max(axis=(1, 2))
        wide = np.abs(gap).max(axis=(1, 2)) > 1e-9 * size
        # the products of all edges at one corner are the shape
        bent = np.abs(mine @ mine.swapaxes(1, 2) - theirs @ theirs.swapaxes(1, 2)).max(axis=(1, 2))
        other = wide & (bent > 1e-9 * size**2)
        apart.append(np.column_stack([here[other], np.full(int(other.sum()), i)]))
        turned.append(np.column_stack([here[wide & ~other], np.full(int((wide & ~other).sum()), i)]))
        if axes == d:
            sign = permutations_of(d).sign[t.rank[here, i]]
            same = np.sign(volume[here]) * np.sign(volume[there]) * sign > 0
            same &= ~flat[here] & ~flat[there] & ~wide
            folded.append(np.column_stack([here[same], np.full(int(same.sum()), i)]))
    size = np.abs(volume) / prod(range(1, d + 1))
    return Shapes(
        axes,
        np.flatnonzero(flat),
        np.concatenate(folded) if axes == d else None,
        np.concatenate(apart),
        np.concatenate(turned),
        float(size.min()),
        float(size.max()),
    )


def _nearest(difference: np.ndarray, period: np.ndarray | None) -> np.ndarray:
    """Differences brought to the nearest image on periodic axes."""
    if period is None:
        return difference
    turns = np.where(period > 0, np.round(difference / np.where(period > 0, period, 1.0)), 0.0)
    return difference - turns * period
