"""Triangulations that a rule builds: bundles over the circle, tori, lens spaces, Kummer varieties."""

from __future__ import annotations

from itertools import permutations
from math import gcd

import numpy as np

from ..errors import InputError
from ..triangulation import Triangulation
from .parts import at_least, check_dimension, check_room, table

__all__ = ["ball_bundle", "kummer_variety", "lens_space", "projective_plane", "sphere_bundle", "torus"]


def ball_bundle(dimension: int = 4, vertices: int | None = None) -> Triangulation:
    """A ball bundle over the circle, a ring of n simplices: ``i, i + 1, ..., i + D`` mod n.

    Parameters
    ----------
    dimension : int
        D = 2, 3 or 4; the ball has the dimension D - 1.
    vertices : int, optional
        n, at least 2 D + 1 (the default); the bundle is a product exactly when (D - 1) n is even.

    References
    ----------
    W. Kuehnel, Higherdimensional analogues of Csaszar's torus, Results Math. 9 (1986) 95-106 (from memory).
    """
    check_dimension(dimension)
    n = 2 * dimension + 1 if vertices is None else vertices
    at_least("vertices", n, 2 * dimension + 1)
    check_room(n, dimension)
    return Triangulation.from_facets((np.arange(n)[:, None] + np.arange(dimension + 1)) % n)


def sphere_bundle(dimension: int = 4, vertices: int | None = None) -> Triangulation:
    """A sphere bundle over the circle, the boundary of a ring of (D + 1)-simplices on n corners.

    The facets are ``i, i + 1, ..., i + D + 1`` mod n without one of the entries between the first and the
    last.

    Parameters
    ----------
    dimension : int
        D = 2, 3 or 4; the sphere has the dimension D - 1.
    vertices : int, optional
        n, at least 2 D + 3 (the default); the bundle is the product exactly when D n is even, and not
        orientable otherwise.

    Notes
    -----
    f_0 = n, f_1 = (D + 1) n, and D n simplices.

    References
    ----------
    W. Kuehnel, Higherdimensional analogues of Csaszar's torus, Results Math. 9 (1986) 95-106; W. Kuehnel,
    G. Lassmann, Permuted difference cycles and triangulated sphere bundles, Discrete Math. 162 (1996) 215-227
    (from memory).
    """
    check_dimension(dimension)
    d = dimension
    n = 2 * d + 3 if vertices is None else vertices
    at_least("vertices", n, 2 * d + 3)
    check_room(d * n, d)
    steps = np.array([[x for x in range(d + 2) if x != gone] for gone in range(1, d + 1)])
    return Triangulation.from_facets((np.arange(n)[:, None, None] + steps).reshape(-1, d + 1) % n)


def torus(dimension: int = 3) -> Triangulation:
    """The torus of dimension D with ``2**(D + 1) - 1`` corners and their cyclic symmetry.

    The facets are all ``x, x + a, x + a + b, ...``, where a, b, ... are ``1, 2, 4, ..., 2**D`` in any order.

    Parameters
    ----------
    dimension : int
        D = 2 (7 corners), 3 (15) or 4 (31).

    References
    ----------
    W. Kuehnel, G. Lassmann, Combinatorial d-tori with a large symmetry group, Discrete Comput. Geom. 3 (1988)
    169-176 (from memory).
    """
    check_dimension(dimension)
    n = 2 ** (dimension + 1) - 1
    # the last step leads back to the start; a facet is written once, from where the longest step leads to
    steps = [[0, *np.cumsum(order)] for order in permutations(2**i for i in range(dimension))]
    return Triangulation.from_facets(
        (np.arange(n)[:, None, None] + np.array(steps)).reshape(-1, dimension + 1) % n
    )


def projective_plane() -> Triangulation:
    """The projective plane with six corners: half of an icosahedron, a factor of products.

    References
    ----------
    Common practice; the unique triangulation of the projective plane with the fewest corners.
    """
    ring = np.arange(5)[:, None]
    inner = np.hstack([np.zeros_like(ring), ring + 1, (ring + 1) % 5 + 1])
    outer = np.hstack([ring + 1, (ring + 1) % 5 + 1, (ring + 3) % 5 + 1])
    return Triangulation.from_facets(np.vstack([inner, outer]))


def kummer_variety(dimension: int = 4) -> Triangulation:
    """The quotient of the torus by ``x -> -x``: a pseudomanifold with ``2**D`` corners, all of them singular.

    Parameters
    ----------
    dimension : int
        D = 3 (corners that look like cones over RP2) or 4 (over RP3).

    References
    ----------
    W. Kuehnel, Minimal triangulations of Kummer varieties, Abh. Math. Sem. Univ. Hamburg 57 (1987) 7-20 (from
    memory): the path simplices of the 2-periodic grid, as sets of corners.
    """
    check_dimension(dimension, 3)
    bits = 2 ** np.arange(dimension)
    paths = np.array([[0, *np.cumsum(bits[list(order)])] for order in permutations(range(dimension))])
    # stepping along an axis of period 2 flips one bit
    facets = np.sort((np.arange(2**dimension)[:, None, None] ^ paths).reshape(-1, dimension + 1), axis=1)
    return Triangulation.from_facets(np.unique(facets, axis=0))


def lens_space(p: int, q: int, simplicial: bool = False) -> Triangulation:
    """The lens space L(p, q).

    Parameters
    ----------
    p : int
        At least 1; L(1, q) is S3, L(2, 1) is RP3.
    q : int
        Coprime to p.
    simplicial : bool
        False: a gluing table of p tetrahedra in a ring around an axis, whose upper sides are glued to the
        lower ones turned by q.  True: a simplicial complex of 96 p tetrahedra, the barycentric subdivision of
        the join of two circles of 2 p segments each, divided by a common rotation.

    Raises
    ------
    InputError
        If p and q have a common factor.

    References
    ----------
    H. Seifert, W. Threlfall, Lehrbuch der Topologie (1934), section 60 (from memory).

    Examples
    --------
    >>> lens_space(5, 2)
    <Triangulation 3D: 5 simplices, unlabelled, 0 boundary facets>
    """
    at_least("p", p, 1)
    if gcd(p, q) != 1:
        raise InputError(
            f"{p} and {q} have the common factor {gcd(p, q)}", hint="L(p, q) needs coprime numbers"
        )
    return _lens_complex(p, q % p) if simplicial else _lens_table(p, q % p)


def _lens_table(p: int, q: int) -> Triangulation:
    """Tetrahedron i is (north, south, e_i, e_(i+1)); its side (north, e_i, .) meets (south, e_(i+q), .)."""
    check_room(p, 3)
    i = np.arange(p)
    across = np.stack([(i - q) % p, (i + q) % p, (i + 1) % p, (i - 1) % p], axis=1)
    turned, beside = [1, 0, 2, 3], [0, 1, 3, 2]
    return table(across, np.broadcast_to([turned, turned, beside, beside], (p, 4, 4)))


def _lens_complex(p: int, q: int) -> Triangulation:
    """Flags of faces of (C_2p * C_2p) / Z_p; a face of the join is a face of either circle, or none, each.

    Position 2 i of a circle is corner i, position 2 i + 1 the segment from it, and the generator turns the
    first circle by two corners, the second one by 2 q.  (Two corners per turn are the least for which no
    simplex of the quotient meets itself, which a barycentric subdivision needs.)
    """
    check_room(96 * p, 3)
    round_ = 4 * p
    inverse = 4
    i, j = (x.ravel() for x in np.meshgrid(np.arange(2), np.arange(2 * p), indexing="ij"))
    empty = round_
    flags = []
    for order in permutations(range(4)):
        # corners 0, 1 are those of a segment of the first circle, 2, 3 of the second
        chain = []
        for size in range(1, 5):
            face = set(order[:size])
            first = np.full_like(i, empty) if not face & {0, 1} else 2 * i + _part(face & {0, 1}, 0)
            second = np.full_like(j, empty) if not face & {2, 3} else 2 * j + _part(face & {2, 3}, 2)
            chain.append(_orbit(first, second, round_, inverse, q))
        flags.append(np.stack(chain, axis=1))
    facets = np.vstack(flags)
    _, labels = np.unique(facets, return_inverse=True)
    return Triangulation.from_facets(labels.reshape(facets.shape))


def _part(face: set[int], base: int) -> int:
    """Where a face of the segment from corner 0 to corner 1 is on its circle: 0, 2, or 1 for the segment."""
    return 1 if len(face) == 2 else 2 * (min(face) - base)


def _orbit(first: np.ndarray, second: np.ndarray, size: int, turn: int, q: int) -> np.ndarray:
    """One number for each orbit of pairs of positions under ``(a + turn, b + turn q)`` mod `size`."""
    p = size // turn
    a, b = first % size, second % size
    if first[0] < size:  # turn the first position into the range 0 .. turn - 1
        steps = a // turn
        out_a, out_b = a % turn, (b - steps * turn * q) % size
        if second[0] >= size:
            out_b = np.full_like(b, size)
    else:  # only the second: q is invertible, so that it may be turned anywhere with its remainder
        out_a, out_b = np.full_like(a, size), b % turn if p > 1 else b
    return out_a * (size + 1) + out_b
