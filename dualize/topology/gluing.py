"""The gluing table read back from a foam skeleton.

An edge of the foam knows the slots at its ends and, at every place, the corners there: that is the gluing of
one facet.  So a skeleton alone holds the whole triangulation, and everything that is asked of a triangulation
can be asked of a skeleton.
"""

from __future__ import annotations

import numpy as np

from ..errors import SkeletonError, TriangulationError
from ..kernels import engine
from ..kernels.audit import glue_edges
from ..kernels.permutations import permutations_of
from ..layout import wedge_pairs
from ..skeleton import Skeleton
from ..triangulation import Coordinates, Triangulation
from .classes import count_rows

__all__ = ["gluing_of"]


def gluing_of(skeleton: Skeleton, *, threads: int | None = None) -> Triangulation:
    """The triangulation to which a skeleton is dual.

    Its simplices are the vertices of the skeleton, in their order; it is written so that `dualize.build`
    gives the orientations of the skeleton again, where these follow the rules.

    Parameters
    ----------
    skeleton : Skeleton
        Shapes must be those of the layout; entries need not be trusted.
    threads : int, optional

    Raises
    ------
    SkeletonError
        If the edges are no gluing of facets: a slot outside the complex, or met twice or never, or corners
        that are no permutation.

    Examples
    --------
    >>> from dualize import Triangulation, build
    >>> t = Triangulation.from_facets([[0, 1, 2, 3], [1, 2, 3, 4]])
    >>> gluing_of(build(t)) == t
    True
    """
    s, d = skeleton, skeleton.dimension
    n, k = s["vertices/edge"].shape
    tables = permutations_of(d)
    run = engine(n, threads)
    across = np.full((n, k), -2, dtype=s["edges/source"].dtype)
    rank = np.zeros((n, k), dtype=np.uint8)
    interior, total = s.counts["edges_internal"], len(s["edges/twist"])
    bad = run(
        glue_edges,
        *(s[f"edges/{key}"].ravel() for key in ("source", "target", "source_corner", "target_corner")),
        tables.ranks,
        tables.inverse,
        across.ravel(),
        rank.ravel(),
        tuple(range(k)),
        interior,
        0,
        total,
    )
    if bad >= 0:
        raise SkeletonError(
            "an edge is no gluing of two free facets",
            f"edge {bad}: source {s['edges/source'][bad].tolist()} at corners "
            f"{s['edges/source_corner'][bad].tolist()}, target {s['edges/target'][bad].tolist()} at corners "
            f"{s['edges/target_corner'][bad].tolist()}",
        )
    if (across == -2).any():
        v, i = np.argwhere(across == -2)[0].tolist()
        raise SkeletonError("no edge ends at a slot", f"vertex {v}, slot {i}")
    labels = s.arrays.get("vertices/corners")
    charts = [s.arrays.get(f"coordinates/{key}") for key in ("point", "corner", "period")]
    return Triangulation(
        across=across,
        rank=rank,
        written=s["vertices/orientation"],
        corners=labels,
        corner_names=s.corner_names,
        coordinates=None if all(c is None for c in charts) else Coordinates(*charts),
        matched=labels is not None and not _told_apart(s, labels) and _matched(labels, across, rank, threads),
        coloured="colours/edge" in s and not rank[across >= 0].any(),
    )


def _told_apart(s: Skeleton, labels: np.ndarray) -> bool:
    """Whether simplices or faces share their labels and nothing was recorded: then labels do not name them.

    Where labels were matched, twins and pinched ridges are recorded as singular.
    """
    if s.flags["singular"]:
        return False
    slots = np.array(wedge_pairs(s.dimension))
    others = np.array([[c for c in range(s.dimension + 1) if c not in pair] for pair in slots.tolist()])
    first = s["faces/vertex_offsets"][:-1]
    if len(first) == 0 or first.min() < 0 or first.max() >= len(s["faces/vertex"]):
        return False
    vertex, wedge = s["faces/vertex"][first], s["faces/wedge"][first]
    if vertex.min() < 0 or vertex.max() >= len(labels) or wedge.min() < 0 or wedge.max() >= len(slots):
        return False
    ridges = np.sort(np.take_along_axis(labels[vertex], others[wedge], axis=1), axis=1)
    return count_rows(labels) < len(labels) or count_rows(ridges) < len(ridges)


def _matched(labels: np.ndarray, across: np.ndarray, rank: np.ndarray, threads: int | None) -> bool:
    """Whether these gluings are those that matching the labels gives."""
    if (labels[:, 1:] <= labels[:, :-1]).any():
        return False
    try:
        t = Triangulation.from_facets(labels, threads=threads)
    except TriangulationError:
        return False
    return bool(np.array_equal(t.across, across) and np.array_equal(t.rank, rank))
