"""The boundary of a triangulation, from the triangulation alone.

Its simplices are the boundary facets in the order of the foam's nodes, their corners in the order of the
places; two of them are neighbours across place k when walking around the ridge opposite that corner leads
from one to the other.  Nothing here looks at the dual, so the audit can compare the two.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from .errors import InputError, TriangulationError
from .kernels import Engine, engine
from .kernels.audit import walk_boundary
from .kernels.classes import join_pairs, number_classes
from .kernels.orient import spread_orientation
from .kernels.permutations import permutations_of
from .layout import wedge_pairs
from .triangulation import Coordinates, Triangulation

__all__ = ["BoundaryWalk", "boundary_of", "walk"]


class BoundaryWalk(NamedTuple):
    """The boundary facets of a triangulation and how they meet; B facets of D corners each.

    Attributes
    ----------
    vertex, slot : ndarray of int, shape (B,)
        Simplex and slot of each facet, in the order of half-facets.
    orientation : ndarray of int8, shape (B,)
        +1 where the ascending order of the corners agrees with the induced orientation, else -1.
    component : ndarray of int, shape (B,)
        Component of the boundary, numbered by smallest facet.
    there : ndarray of int, shape (B, D)
        The facet across each place.
    rank : ndarray of uint8, shape (B, D)
        The map of the places to those of the facet across, as lexicographic rank.
    ridge_sign : ndarray of int8, shape (B, D)
        Sign of the map from the corners of the ridge to those at its smallest wedge, both ascending.
    bent : ndarray of int8, shape (B, D)
        Twisted gluings on the way to the smallest wedge, mod 2.
    twist : ndarray of int8, shape (B, D)
        Twisted gluings on the whole way, mod 2.
    bulk : ndarray of int, shape (B,)
        Component of the triangulation to which the facet belongs.
    """

    vertex: np.ndarray
    slot: np.ndarray
    orientation: np.ndarray
    component: np.ndarray
    there: np.ndarray
    rank: np.ndarray
    ridge_sign: np.ndarray
    bent: np.ndarray
    twist: np.ndarray
    bulk: np.ndarray

    @property
    def place_there(self) -> np.ndarray:
        """The place at which each walk arrives, int8, shape (B, D)."""
        d = self.there.shape[1]
        return permutations_of(d - 1).image[self.rank, np.arange(d)]


def walk(triangulation: Triangulation, *, threads: int | None = None) -> BoundaryWalk:
    """Walk around every ridge of the boundary, from either side.

    Notes
    -----
    Takes time in proportion to the lengths of the walks.
    """
    t, d, n = triangulation, triangulation.dimension, len(triangulation)
    run = engine(n, threads)
    tables, axes = permutations_of(d), tuple(range(d + 1))
    orientation, bulk = _orient(t, run)
    vertex, slot = (x.astype(t.across.dtype) for x in np.nonzero(t.across < 0))
    b = len(vertex)
    node_of = np.full((n, d + 1), -1, dtype=t.across.dtype)
    node_of[vertex, slot] = np.arange(b)
    pair = np.full((d + 1, d + 1), -1, dtype=np.int8)
    for number, (i, j) in enumerate(wedge_pairs(d)):
        pair[i, j] = pair[j, i] = number
    there = np.empty((b, d), dtype=t.across.dtype)
    rank = np.empty((b, d), dtype=np.uint8)
    sign, twist = np.empty((b, d), dtype=np.int8), np.empty((b, d), dtype=np.int8)
    run.split(
        walk_boundary,
        b,
        t.across.ravel(),
        t.rank.ravel(),
        tables.image.ravel(),
        tables.compose.ravel(),
        pair.ravel(),
        tables.sign,
        orientation,
        vertex,
        slot,
        node_of.ravel(),
        permutations_of(d - 1).ranks,
        there.ravel(),
        rank.ravel(),
        sign.ravel(),
        twist.ravel(),
        axes,
    )
    parent = np.arange(b, dtype=there.dtype)
    component = np.empty_like(parent)
    here = np.repeat(np.arange(b, dtype=there.dtype), d)
    run(join_pairs, here, there.ravel(), parent)
    run(number_classes, parent, component)
    induced = (orientation[vertex] * (1 - 2 * (slot % 2))).astype(np.int8)
    return BoundaryWalk(
        vertex, slot, induced, component, there, rank, sign, twist % 2, twist // 2, bulk[vertex]
    )


def boundary_of(
    triangulation: Triangulation, component: int | None = None, *, threads: int | None = None
) -> Triangulation:
    """The boundary of a triangulation as a triangulation of its own, with the induced orientation.

    Its simplices are the boundary facets in the order of the nodes of the foam.  Where labels name the
    simplices, the labels are matched anew; each facet counts as positive or negative as the orientation
    induces it, so that `dualize.build` gives the induced orientation wherever that is consistent.

    Parameters
    ----------
    triangulation : Triangulation
        Of dimension 3 or 4, with boundary.
    component : int, optional
        Only this component of the boundary, numbered by smallest node.
    threads : int, optional

    Raises
    ------
    TriangulationError
        If there is no boundary.
    InputError
        In dimension 2, where the boundary is a set of circles, or if there is no such component.

    Examples
    --------
    >>> t = Triangulation.from_facets([[0, 1, 2, 3, 4]])
    >>> boundary_of(t)
    <Triangulation 3D: 5 simplices, labelled, 0 boundary facets>
    """
    t, d = triangulation, triangulation.dimension
    if d == 2:
        raise InputError(
            "the boundary of a surface is a set of circles, and triangulations have dimension 2, 3 or 4",
            hint="take its boundary graph: dualize boundary --graph, Skeleton.boundary_graph()",
        )
    if not (t.across < 0).any():
        raise TriangulationError("the triangulation is closed: it has no boundary")
    w = walk(t, threads=threads)
    chosen = np.arange(len(w.vertex))
    if component is not None:
        parts = int(w.component.max()) + 1
        if not 0 <= component < parts:
            raise InputError(
                f"there is no boundary component {component}",
                hint=f"the boundary has {parts} component{'s' if parts > 1 else ''}, numbered from 0",
            )
        chosen = np.flatnonzero(w.component == component)
    corners = _others(d)[w.slot[chosen]]  # (B, D) corners of each facet in order
    vertex = w.vertex[chosen]
    charts = None
    if t.coordinates is not None:
        chart = t.coordinates.corner
        if chart is not None:
            chart = chart[vertex[:, None], corners]
        # rows of points belong to labels; without labels to classes of points, numbered otherwise here
        point = t.coordinates.point if t.corners is not None else None
        if chart is not None or point is not None:
            charts = Coordinates(point, chart, t.coordinates.period)
    labels = None if t.corners is None else t.corners[vertex[:, None], corners]
    if labels is not None and t.matched:
        try:
            matched = Triangulation.from_facets(
                labels, coordinates=charts, corner_names=t.corner_names, threads=threads
            )
        except TriangulationError:  # a pinched ridge that was kept: its label set belongs to several fans
            pass
        else:
            return _written(matched, w.orientation[chosen])
    number = np.full(len(w.vertex), -1, dtype=w.there.dtype)
    number[chosen] = np.arange(len(chosen))
    glued = Triangulation(
        across=number[w.there[chosen]],
        rank=w.rank[chosen],
        written=w.orientation[chosen],
        corners=labels,
        corner_names=t.corner_names,
        coordinates=charts,
    )
    return glued


def _written(t: Triangulation, signs: np.ndarray) -> Triangulation:
    return Triangulation(t.across, t.rank, signs, t.corners, t.corner_names, t.coordinates, t.matched)


def _others(d: int) -> np.ndarray:
    """The corners of the facet opposite each corner, ascending, shape (D + 1, D)."""
    return np.array([[c for c in range(d + 1) if c != i] for i in range(d + 1)])


def _orient(t: Triangulation, run: Engine) -> tuple[np.ndarray, np.ndarray]:
    orientation = np.zeros(len(t), dtype=np.int8)
    component, queue = np.empty(len(t), dtype=t.across.dtype), np.empty(len(t), dtype=t.across.dtype)
    run(
        spread_orientation,
        t.across.ravel(),
        t.rank.ravel(),
        permutations_of(t.dimension).sign,
        t.written,
        orientation,
        component,
        queue,
        tuple(range(t.dimension + 1)),
    )
    return orientation, component
