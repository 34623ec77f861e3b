"""Boundaries of convex polytopes: triangulated spheres with the coordinates of their corners.

Here `dimension` is that of the sphere, one less than that of the polytope, as everywhere in this package.
"""

from __future__ import annotations

from itertools import combinations, permutations, product

import numpy as np

from ..triangulation import Triangulation
from .parts import at_least, check_dimension, check_room

__all__ = ["cell_24", "cell_600", "cross_polytope", "cyclic_polytope", "simplex_boundary"]


def simplex_boundary(dimension: int = 4) -> Triangulation:
    """The boundary of the (D + 1)-simplex: the sphere with the fewest simplices, D + 2.

    Parameters
    ----------
    dimension : int
        D = 2, 3 or 4.

    Examples
    --------
    >>> simplex_boundary(3)
    <Triangulation 3D: 5 simplices, labelled, 0 boundary facets>
    """
    check_dimension(dimension)
    facets = np.array(list(combinations(range(dimension + 2), dimension + 1)))
    return Triangulation.from_facets(facets, coordinates=np.eye(dimension + 2))


def cross_polytope(dimension: int = 3) -> Triangulation:
    """The boundary of the (D + 1)-dimensional cross-polytope; corners 2 i and 2 i + 1 are opposite.

    Parameters
    ----------
    dimension : int
        D = 2 (octahedron), 3 (16-cell) or 4.

    References
    ----------
    H. S. M. Coxeter, Regular Polytopes, 3rd ed. (1973), section 7.2 (from memory).
    """
    check_dimension(dimension)
    facets = np.array(list(product((0, 1), repeat=dimension + 1))) + 2 * np.arange(dimension + 1)
    axes = np.eye(dimension + 1)
    return Triangulation.from_facets(
        facets, coordinates=np.stack([axes, -axes], axis=1).reshape(-1, dimension + 1)
    )


def cyclic_polytope(vertices: int, dimension: int = 3) -> Triangulation:
    """The boundary of the cyclic polytope C(n, D + 1), its n corners on the moment curve.

    Parameters
    ----------
    vertices : int
        n, at least D + 2.
    dimension : int
        D = 2, 3 or 4.

    Notes
    -----
    By Gale's evenness condition the facets of C(n, 2 m) are the unions of m disjoint pairs of neighbours on a
    ring of n, and those of C(n, 2 m + 1) the first or the last corner with m disjoint pairs of neighbours on
    the row of the others.  In even dimensions the corners lie on a circle's curve (cos t, sin t, cos 2t,
    ...), else at (t, t^2, ...) with t from -1 to 1.

    References
    ----------
    D. Gale, Neighborly and cyclic polytopes, Proc. Sympos. Pure Math. 7 (1963) 225-232 (from memory).
    """
    check_dimension(dimension)
    at_least("vertices", vertices, dimension + 2)
    n, even = vertices, (dimension + 1) % 2 == 0
    pairs = (dimension + 1) // 2
    check_room(n**pairs, dimension)
    if even:
        facets = _neighbours(n, pairs, ring=True)
        angle = 2 * np.pi * np.arange(n) / n
        where = np.stack([f(m * angle) for m in range(1, pairs + 1) for f in (np.cos, np.sin)], axis=1)
    else:
        rows = _neighbours(n - 1, pairs, ring=False)
        first = np.hstack([np.zeros((len(rows), 1), dtype=np.int64), rows + 1])
        last = np.hstack([rows, np.full((len(rows), 1), n - 1)])
        facets = np.vstack([first, last])
        where = np.linspace(-1, 1, n)[:, None] ** np.arange(1, dimension + 2)
    return Triangulation.from_facets(facets, coordinates=where)


def _neighbours(n: int, pairs: int, ring: bool) -> np.ndarray:
    """All unions of one or two disjoint pairs of neighbours among 0 .. n - 1, shape (M, 2 pairs)."""
    starts = np.arange(n if ring else n - 1)
    if pairs == 1:
        chosen = starts[:, None]
    else:
        one, two = np.triu_indices(len(starts), 2)
        apart = ~((one == 0) & (two == n - 1)) if ring else np.ones(len(one), dtype=bool)
        chosen = np.stack([one[apart], two[apart]], axis=1)
    return (chosen[:, :, None] + np.arange(2)).reshape(len(chosen), -1) % n


def cell_24() -> Triangulation:
    """The boundary of the 24-cell, each of its 24 octahedra cut into four tetrahedra around a diagonal.

    Returns
    -------
    Triangulation
        S3 with 24 corners, edges of length sqrt(2) and diagonals of length 2, and 96 tetrahedra.  Diagonals
        lie inside the octahedra, so that any choice of them fits: it is the one through the smallest label.

    References
    ----------
    H. S. M. Coxeter, Regular Polytopes, 3rd ed. (1973), section 8.2 (from memory).
    """
    corners = np.array(sorted({p for a, b in product((1, -1), repeat=2) for p in permutations((a, b, 0, 0))}))
    axes = np.vstack([np.eye(4), -np.eye(4)])
    normals = np.vstack([axes, np.array(list(product((0.5, -0.5), repeat=4)))])
    facets = []
    for row in np.isclose(normals @ corners.T, 1):
        octahedron = np.flatnonzero(row)
        top = octahedron[0]
        apart = ((corners[octahedron] - corners[top]) ** 2).sum(axis=1)
        bottom = octahedron[np.argmax(apart)]
        for a, b in combinations(octahedron[apart == 2], 2):
            if ((corners[a] - corners[b]) ** 2).sum() == 2:
                facets.append([top, bottom, a, b])
    return Triangulation.from_facets(np.array(facets), coordinates=corners.astype(float))


def cell_600() -> Triangulation:
    """The boundary of the 600-cell: S3 with 120 corners, 600 regular tetrahedra, five around every edge.

    References
    ----------
    H. S. M. Coxeter, Regular Polytopes, 3rd ed. (1973), section 8.7: the coordinates (from memory).
    """
    golden = (1 + 5**0.5) / 2
    even = [
        p for p in permutations(range(4)) if sum(p[i] > p[j] for i, j in combinations(range(4), 2)) % 2 == 0
    ]
    rows = [p for s in (1, -1) for p in set(permutations((float(s), 0.0, 0.0, 0.0)))]
    rows += list(product((0.5, -0.5), repeat=4))
    for a, b, c in product((0.5, -0.5), repeat=3):
        values = (a * golden, b, c / golden, 0.0)
        rows += [tuple(values[i] for i in p) for p in even]
    corners = np.array(sorted(rows))
    near = np.isclose(corners @ corners.T, golden / 2)
    tetrahedra = []
    for a in range(120):
        nearby = np.flatnonzero(near[a, a + 1 :]) + a + 1
        for b, c, e in combinations(nearby.tolist(), 3):
            if near[b, c] and near[b, e] and near[c, e]:
                tetrahedra.append((a, b, c, e))
    return Triangulation.from_facets(np.array(tetrahedra), coordinates=corners)
