"""First foams for a new amplitude: single simplices, melons, rings, and both sides of moves."""

from __future__ import annotations

import numpy as np

from ..triangulation import Triangulation
from .parts import at_least, check_dimension, check_room, signed, table
from .products import slab

__all__ = ["dipole_slab", "move_side", "ridge_ring", "shared_pair", "simplex", "simplex_pair"]


def simplex(dimension: int = 4) -> Triangulation:
    """One simplex: a vertex, its D + 1 edges to the nodes, and the complete graph as boundary.

    Parameters
    ----------
    dimension : int
        D = 2, 3 or 4.
    """
    return move_side(dimension, 1)


def simplex_pair(dimension: int = 4) -> Triangulation:
    """Two simplices that share a facet, labels 0 .. D + 1: one internal edge.

    Parameters
    ----------
    dimension : int
        D = 2, 3 or 4.
    """
    return move_side(dimension, 2)


def ridge_ring(number: int = 3, dimension: int = 4) -> Triangulation:
    """So many simplices in a ring around one ridge: one internal face.

    The ridge has the labels 0 .. D - 2, the ring those after it.

    Parameters
    ----------
    number : int
        At least 3 (two simplices around a ridge are `shared_pair` with two shared facets).
    dimension : int
        D = 2, 3 or 4.
    """
    check_dimension(dimension)
    at_least("number", number, 3)
    check_room(number, dimension)
    ring = np.arange(number)
    ridge = np.broadcast_to(np.arange(dimension - 1), (number, dimension - 1))
    return Triangulation.from_facets(
        np.column_stack([ridge, ring + dimension - 1, (ring + 1) % number + dimension - 1])
    )


def move_side(dimension: int, simplices: int, opposite: bool = False) -> Triangulation:
    """One side of the Pachner move from k to D + 2 - k simplices.

    The side has the facets of the (D + 1)-simplex 0 .. D + 1 that lack label 0, 1, ..., k - 1; the opposite
    one has the others.  Both have the same boundary, labels and orientation included.

    Parameters
    ----------
    dimension : int
        D = 2, 3 or 4.
    simplices : int
        k, from 1 to D + 1.
    opposite : bool
        The other side, of D + 2 - k simplices.

    References
    ----------
    U. Pachner, P.L. homeomorphic manifolds are equivalent by elementary shellings, European J. Combin. 12
    (1991) 129-145 (from memory).
    """
    check_dimension(dimension)
    at_least("simplices", simplices, 1, dimension + 1)
    d = dimension
    rows = np.array([[c for c in range(d + 2) if c != gone] for gone in range(d + 2)])
    signs = (-1) ** np.arange(d + 2)  # those of the boundary of the (D + 1)-simplex
    side = slice(simplices, None) if opposite else slice(simplices)
    # the two sides induce opposite orientations on their common boundary: turn the opposite one around
    return Triangulation.from_facets(signed(rows, -signs if opposite else signs)[side])


def shared_pair(shared: int = 4, dimension: int = 4) -> Triangulation:
    """Two simplices that share so many of their facets, corner on corner, as a gluing table.

    With D shared facets it is the melon or self-energy foam, whose boundary graph has two nodes and D links;
    with all D + 1 it is the closed edge-coloured graph with two vertices, a sphere.

    Parameters
    ----------
    shared : int
        From 1 to D + 1: the facets opposite the corners 0, 1, ...
    dimension : int
        D = 2, 3 or 4.

    Examples
    --------
    >>> shared_pair(4)
    <Triangulation 4D: 2 simplices, unlabelled, 2 boundary facets>
    """
    check_dimension(dimension)
    at_least("shared", shared, 1, dimension + 1)
    k = dimension + 1
    across = np.where(np.arange(k) < shared, [[1], [0]], -1)
    return table(across, np.broadcast_to(np.arange(k), (2, k, k)))


def dipole_slab(layers: int = 1) -> Triangulation:
    """The slab S3 x [0, 1] whose boundary is the graph with two nodes and four links, at either end.

    S3 is made of two tetrahedra that share all four facets, and each layer has four 4-simplices above each.

    Parameters
    ----------
    layers : int
        At least 1.

    References
    ----------
    C. Rovelli, F. Vidotto, Stepping out of homogeneity in loop quantum cosmology, Class. Quantum Grav. 25
    (2008) 225024: the two-node graph (from memory).
    """
    return slab(shared_pair(4, 3), layers)
