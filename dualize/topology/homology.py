"""Homology over the integers, with torsion, of any triangulation; absolute or relative to its boundary."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from ..kernels import engine
from ..kernels.reduction import flow_down, pair_cells
from ..triangulation import Triangulation
from .classes import Census, Classes, census, classes, corner_subsets
from .derived import first_derived
from .integral import invariant_factors
from .maps import simplex_maps

if TYPE_CHECKING:
    from scipy.sparse import csc_array

__all__ = ["Paired", "chain_homology", "integral_homology", "pair", "small_maps"]

BOUND = 2**40  # coefficients beyond this are followed in integers of any size


@dataclass(frozen=True, eq=False)
class Paired:
    """A chain complex whose cells are paired off, all but a few.

    Attributes
    ----------
    starts : list of int
        Number of the first cell of each dimension, and behind them the number of all cells.
    faces : csc_array of int64, shape (n, n)
        The boundary map of all cells.
    mate : ndarray of int64, shape (n,)
        Partner of each cell; the cell itself where it is set apart.
    order : ndarray of int64, shape (n,)
        The cells as they were removed.
    """

    starts: list[int]
    faces: csc_array
    mate: np.ndarray
    order: np.ndarray

    def apart(self, k: int) -> np.ndarray:
        """The cells of dimension `k` that are set apart, ascending."""
        cells = np.arange(self.starts[k], self.starts[k + 1])
        return cells[self.mate[cells] == cells]

    def in_order(self, k: int) -> np.ndarray:
        """The cells of dimension `k` as they were removed."""
        return self.order[(self.order >= self.starts[k]) & (self.order < self.starts[k + 1])]


def pair(maps: Sequence[csc_array]) -> Paired:
    """Pair the cells of a chain complex; those set apart span a small complex with the same homology.

    Parameters
    ----------
    maps : sequence of csc_array
        The boundary maps from dimension 1 to D.

    Notes
    -----
    A cell with a single face left, its coefficient +1 or -1, is removed together with that face: an
    elimination of a unit pivot that changes no other entry.  Where none is left, a cell of the lowest
    dimension is set apart (M. Mrozek, B. Batko, Coreduction homology algorithm, Discrete Comput. Geom. 41
    (2009) 96-118; the pairs are a discrete gradient, R. Forman, Morse theory for cell complexes, Adv. Math.
    134 (1998) 90-145; both from memory).  Linear in the number of entries.
    """
    from scipy.sparse import block_array, csc_array

    sizes = [maps[0].shape[0], *(m.shape[1] for m in maps)]
    starts = [0, *np.cumsum(sizes).tolist()]
    total = starts[-1]
    blocks = [[None] * len(sizes) for _ in sizes]
    for k, m in enumerate(maps):
        blocks[k][k + 1] = m
    for k, size in enumerate(sizes):
        blocks[k][k] = csc_array((size, size), dtype=np.int64)  # no entry, but the shape
    faces = csc_array(block_array(blocks, format="csc"))
    faces.eliminate_zeros()
    faces.sort_indices()
    across = faces.tocsr()
    left = np.diff(faces.indptr).astype(np.int64)
    mate = np.full(total, -1, dtype=np.int64)
    order = np.empty(total, dtype=np.int64)
    engine(sizes[-1])(
        pair_cells,
        faces.indptr.astype(np.int64),
        faces.indices.astype(np.int64),
        faces.data.astype(np.int64),
        across.indptr.astype(np.int64),
        across.indices.astype(np.int64),
        left,
        mate,
        order,
        np.empty(len(faces.data) + 1, dtype=np.int64),
        total,
    )
    return Paired(starts, faces, mate, order)


def small_maps(paired: Paired) -> list[list[dict[int, int]]]:
    """The boundary maps between the cells set apart, from dimension 1 to D, column by column.

    Rows are numbered within `Paired.apart`.
    """
    offsets, face, sign = (
        x.astype(np.int64) for x in (paired.faces.indptr, paired.faces.indices, paired.faces.data)
    )
    total = paired.starts[-1]
    run = engine(paired.starts[-1] - paired.starts[-2])
    value = np.zeros(total, dtype=np.int64)
    out_cell, out_value = np.empty(total, dtype=np.int64), np.empty(total, dtype=np.int64)
    place = np.zeros(total, dtype=np.int64)
    maps = []
    for k in range(1, len(paired.starts) - 1):
        order = paired.in_order(k - 1)
        place[order] = np.arange(len(order))
        number = {c: x for x, c in enumerate(paired.apart(k - 1).tolist())}
        columns = []
        for cell in paired.apart(k).tolist():
            table = (offsets, face, sign, paired.mate, order, place)
            count = run.here(flow_down, *table, value, out_cell, out_value, cell, BOUND)
            if count < 0:
                cells, values = _flow_of_any_size(table, total, cell)
                value[:] = 0
            else:
                cells, values = out_cell[:count].tolist(), out_value[:count].tolist()
            columns.append({number[c]: v for c, v in zip(cells, values, strict=True)})
        maps.append(columns)
    return maps


def _flow_of_any_size(table: tuple, total: int, cell: int) -> tuple[list[int], list[int]]:
    """`flow_down` in integers of any size."""
    cells, values = [0] * total, [0] * total
    arguments: list[Any] = [*(x.tolist() for x in table), [0] * total, cells, values, cell, float("inf")]
    count = flow_down(*arguments)
    return cells[:count], values[:count]


def chain_homology(maps: Sequence[csc_array]) -> list[list[int]]:
    """Homology of a chain complex of free abelian groups.

    Parameters
    ----------
    maps : sequence of csc_array of int64
        The boundary maps from dimension 1 to D.

    Returns
    -------
    list of list of int
        For each dimension the invariant factors, 0 for a free one.

    Examples
    --------
    One cell in each dimension, the upper attached with degree 2: a projective plane.

    >>> from scipy.sparse import csc_array
    >>> chain_homology([csc_array([[0]]), csc_array([[2]])])
    [[0], [2], []]
    """
    paired = pair(maps)
    sizes = [len(paired.apart(k)) for k in range(len(paired.starts) - 1)]
    forms = [invariant_factors(columns) for columns in small_maps(paired)]
    ranks = [0, *(rank for rank, _ in forms), 0]
    torsion = [*(factors for _, factors in forms), []]
    return [[0] * (n - ranks[k] - ranks[k + 1]) + torsion[k] for k, n in enumerate(sizes)]


def integral_homology(
    triangulation: Triangulation,
    *,
    relative: bool = False,
    counted: Census | None = None,
    facets: Classes | None = None,
    threads: int | None = None,
) -> list[list[int]]:
    """H_0 .. H_D of a triangulation over the integers.

    Parameters
    ----------
    triangulation : Triangulation
    relative : bool
        Homology of the pair (space, boundary).
    counted : Census, optional
        Of the triangulation, where the caller has it, and
    facets : Classes, optional
        the classes of its facets.
    threads : int, optional

    Returns
    -------
    list of list of int
        Invariant factors of each group: 0 for Z, k for Z_k, each dividing the next; `abelian_name` spells
        them out.

    Notes
    -----
    The space is the one that the gluings make: a set of labels with a disconnected link counts as several
    simplices, as it does for the foam.  Where a simplex is glued to itself, that of the barycentric
    subdivision is computed.

    Examples
    --------
    >>> integral_homology(Triangulation.from_facets([[0, 1, 2, 3]]))
    [[0], [], [], []]
    >>> integral_homology(Triangulation.from_facets([[0, 1, 2, 3]]), relative=True)
    [[], [], [], [0]]
    """
    t, d = triangulation, triangulation.dimension
    counted = census(t, threads=threads) if counted is None else counted
    facets = classes(t, d, threads=threads) if facets is None else facets
    if any(level.irregular.any() for level in counted.classes):
        return integral_homology(first_derived(t), relative=relative, threads=threads)
    maps = simplex_maps(t, counted, facets)
    if relative:
        kept = [~outer for outer in _on_boundary(t, [*counted.classes, facets])]
        kept.append(np.ones(len(t), dtype=bool))
        maps = [m[kept[k]][:, kept[k + 1]] for k, m in enumerate(maps)]
    return chain_homology(maps)


def _on_boundary(t: Triangulation, levels: Sequence[Classes]) -> list[np.ndarray]:
    """Which classes with 1 to D corners lie on the boundary."""
    d = t.dimension
    simplex, slot = np.nonzero(t.across < 0)
    out = []
    for m, level in enumerate(levels, 1):
        touched = np.zeros(level.count, dtype=bool)
        subsets = corner_subsets(d, m)
        for i in range(d + 1):
            inside = np.flatnonzero((subsets != i).all(axis=1))
            touched[level.number[simplex[slot == i][:, None], inside]] = True
        out.append(touched)
    return out
