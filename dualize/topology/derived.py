"""Barycentric subdivision of any gluing: what makes of a gluing table an honest simplicial complex.

The pieces of a simplex are the orders of its corners: corner `i` of a piece is the barycentre of the first
``i + 1`` of them.  Gluings carry barycentres to barycentres of the same dimension, so the pieces form a
coloured triangulation, the colour of a corner being that dimension: whatever was identified with itself is
cut where it folds, and every simplex has different points.  In the second subdivision the points of a
simplex moreover tell it from all others: a simplicial complex, which programs that know nothing of gluings
can read.

(J. R. Munkres, Elements of Algebraic Topology, 1984, sections 15 and 64; from memory.)
"""

from __future__ import annotations

import numpy as np

from ..kernels.permutations import permutations_of
from ..triangulation import Triangulation
from .classes import classes

__all__ = ["first_derived", "second_derived_facets"]


def first_derived(triangulation: Triangulation) -> Triangulation:
    """The barycentric subdivision as a coloured triangulation.

    Returns
    -------
    Triangulation
        With ``coloured`` set; piece ``s (D + 1)! + q`` lies in simplex `s` and belongs to the order of its
        corners of lexicographic rank `q`; orientations are those of the simplices.  Coordinates and labels
        are left out.

    Examples
    --------
    A tetrahedron glued to itself so that an edge is reversed: its pieces are glued as any others are.

    >>> across = [[-1, -1, 0, 0]]
    >>> t = Triangulation.from_gluings(across, [[[1, 0, 3, 2]] * 4])
    >>> first_derived(t)
    <Triangulation 3D: 24 simplices, coloured, 12 boundary facets>
    """
    t = triangulation
    n, k = t.across.shape
    tables = permutations_of(k - 1)
    images = tables.image.astype(np.int64)
    q = len(images)
    across = np.empty((n, q, k), dtype=np.int32 if n * q < 2**31 else np.int64)
    base = np.arange(n)[:, None] * q
    for i in range(k - 1):
        swapped = images.copy()
        swapped[:, [i, i + 1]] = swapped[:, [i + 1, i]]
        across[:, :, i] = base + tables.rank(swapped)
    last = images[:, -1]
    there = t.across[:, last].astype(np.int64)
    turned = tables.compose[t.rank[:, last], np.arange(q)]
    across[:, :, -1] = np.where(there >= 0, there * q + turned, -1)
    return Triangulation(
        across=across.reshape(-1, k),
        rank=np.zeros((n * q, k), dtype=np.uint8),
        written=(t.written[:, None] * tables.sign).ravel(),
        coloured=True,
    )


def second_derived_facets(triangulation: Triangulation, *, threads: int | None = None) -> np.ndarray:
    """The facets of the second barycentric subdivision, which is a simplicial complex.

    Returns
    -------
    ndarray of int64, shape (N (D + 1)!**2, D + 1)
        Labels are points, numbered from 0; column `c` holds the barycentres of dimension `c`.
    """
    twice = first_derived(first_derived(triangulation))
    return classes(twice, 1, threads=threads).number.astype(np.int64)
