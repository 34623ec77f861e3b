"""Boundary maps as sparse matrices: of the foam, and of a triangulation by the classes of its simplices."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from ..errors import TriangulationError
from ..kernels.permutations import permutations_of
from ..skeleton import Skeleton
from ..triangulation import Triangulation
from .classes import Census, Classes, corner_subsets

if TYPE_CHECKING:
    from scipy.sparse import csc_array

__all__ = ["foam_maps", "simplex_maps"]


def foam_maps(skeleton: Skeleton) -> tuple[csc_array, csc_array]:
    """The boundary maps d1 and d2 of the foam with its boundary cells.

    Rows of d1 are vertices and then nodes, its columns edges and then links; columns of d2 are faces.

    Returns
    -------
    d1 : csc_array of int64, shape (V + B, E + L)
    d2 : csc_array of int64, shape (E + L, F)

    Examples
    --------
    >>> from dualize import Triangulation, build
    >>> d1, d2 = foam_maps(build(Triangulation.from_facets([[0, 1, 2, 3]])))
    >>> d1.shape, d2.shape, abs(d1 @ d2).sum().item()
    ((5, 10), (10, 6), 0)
    """
    from scipy.sparse import coo_array

    s = skeleton
    v, e = len(s["vertices/orientation"]), len(s["edges/twist"])
    b, links = len(s["nodes/edge"]), len(s["links/face"])
    faces = len(s["faces/against"])

    def cell(ends: np.ndarray) -> np.ndarray:
        return np.where(ends[:, 0] >= 0, ends[:, 0], v + ends[:, 1].astype(np.int64))

    row = np.concatenate(
        [cell(s["edges/target"]), v + s["links/target"], cell(s["edges/source"]), v + s["links/source"]]
    )
    column = np.tile(np.arange(e + links), 2)
    sign = np.repeat(np.array([1, -1], dtype=np.int64), e + links)
    d1 = coo_array((sign, (row, column)), shape=(v + b, e + links)).tocsc()
    length = np.diff(s["faces/edge_offsets"])
    row = np.concatenate([s["faces/edge"], e + np.arange(links)])
    column = np.concatenate([np.repeat(np.arange(faces), length), s["links/face"]])
    sign = np.concatenate([s["faces/edge_sign"], np.ones(links, dtype=np.int8)]).astype(np.int64)
    return d1, coo_array((sign, (row, column)), shape=(e + links, faces)).tocsc()


def simplex_maps(triangulation: Triangulation, census: Census, facets: Classes) -> list[csc_array]:
    """The boundary maps of a triangulation, its simplices being the classes under the gluings.

    Parameters
    ----------
    triangulation : Triangulation
    census : Census
    facets : Classes
        The classes of the simplices with D corners.

    Returns
    -------
    list of csc_array of int64
        From dimension 1 to D; every class has the orientation of its first occurrence.

    Raises
    ------
    TriangulationError
        If a class is irregular, that is identified with itself other than by the identity.

    Notes
    -----
    The chain complex of the cell complex that the gluings make of the simplices (A. Hatcher, Algebraic
    Topology, 2002, section 2.1, Delta-complexes with the orders of the corners let loose; from memory).
    """
    from scipy.sparse import coo_array

    t, d = triangulation, triangulation.dimension
    levels = [*census.classes, facets]
    for m, level in enumerate(levels, 1):
        if level.irregular.any():
            raise TriangulationError(
                f"{int(level.irregular.sum())} simplices with {m} corners are glued to themselves, other "
                "than by the identity, so they carry no chain"
            )
    maps = []
    for m in range(2, d + 2):
        subsets = corner_subsets(d, m)
        code = {tuple(row): x for x, row in enumerate(corner_subsets(d, m - 1).tolist())}
        parts = np.array([[code[tuple(np.delete(row, x))] for x in range(m)] for row in subsets.tolist()])
        if m == d + 1:
            simplex, subset = np.arange(len(t)), np.zeros(len(t), dtype=np.int64)
        else:
            simplex, subset = np.divmod(levels[m - 1].first, len(subsets))
        below = levels[m - 2]
        inside = parts[subset]
        row = below.number[simplex[:, None], inside]
        sign = permutations_of(m - 2).sign[below.turn[simplex[:, None], inside]].astype(np.int64)
        sign *= 1 - 2 * (np.arange(m) % 2)
        column = np.repeat(np.arange(len(simplex)), m)
        shape = (below.count, len(simplex))
        maps.append(coo_array((sign.ravel(), (row.ravel(), column)), shape=shape).tocsc())
    return maps
