"""The intersection form of a closed oriented 4-manifold, by cup products on ordered simplices."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import Any

import numpy as np

from ..errors import LimitError, TriangulationError
from ..kernels import engine
from ..kernels.orient import spread_orientation
from ..kernels.permutations import permutations_of
from ..kernels.reduction import pull_back
from ..triangulation import Triangulation
from .classes import census, classes, corner_subsets
from .derived import first_derived
from .homology import Paired, pair, small_maps
from .integral import left_kernel
from .maps import simplex_maps

__all__ = ["IntersectionForm", "intersection_form"]

BOUND = 2**30  # of the values of cochains, so that their products and sums fit in 64 bits


@dataclass(frozen=True)
class IntersectionForm:
    """A symmetric bilinear form over the integers.

    Attributes
    ----------
    matrix : tuple of tuple of int
        On a basis of H^2 modulo torsion.
    rank, determinant : int
    signature : int
        Changes its sign with the orientation.
    parity : str
        ``"even"`` where every square is even, else ``"odd"``.
    """

    matrix: tuple[tuple[int, ...], ...]
    rank: int
    determinant: int
    signature: int
    parity: str

    def to_dict(self) -> dict[str, Any]:
        """The invariants, without the matrix."""
        return {key: getattr(self, key) for key in ("rank", "determinant", "signature", "parity")}


def intersection_form(triangulation: Triangulation, *, threads: int | None = None) -> IntersectionForm:
    """The form (a, b) -> <a cup b, fundamental class> on H^2 modulo torsion.

    Parameters
    ----------
    triangulation : Triangulation
        Closed and oriented, of dimension 4; all its components together.  Links are not looked at: for a
        space that is no homology manifold the determinant need not be +1 or -1.
    threads : int, optional

    Raises
    ------
    TriangulationError
        If the dimension is not 4, there is a boundary, or a component is not orientable.
    LimitError
        If values of cochains exceed 30 bits.

    Notes
    -----
    Cochains are multiplied by front and back faces of ordered simplices (J. R. Munkres, Elements of Algebraic
    Topology, 1984, section 48; from memory): a labelled complex has such an order, and the barycentric
    subdivision of any gluing has one.  Cocycles are pulled back from the few cells that `pair` sets apart.
    The signature counts signs of the characteristic polynomial (Descartes' rule, exact because all roots are
    real).

    Examples
    --------
    >>> from itertools import combinations
    >>> sphere = Triangulation.from_facets(list(combinations(range(6), 5)))
    >>> intersection_form(sphere).rank
    0
    """
    t = triangulation
    if t.dimension != 4:
        raise TriangulationError(f"an intersection form belongs to dimension 4, and this has {t.dimension}")
    if (t.across < 0).any():
        raise TriangulationError(
            "the intersection form of a space with boundary is not computed", hint="its double has none"
        )
    orientation = _orientation(t)
    if not _keeps_order(t):
        fine = first_derived(t)
        pieces = permutations_of(4).sign
        return _form(fine, (orientation[:, None] * pieces).ravel(), threads)
    return _form(t, orientation, threads)


def _orientation(t: Triangulation) -> np.ndarray:
    """Signs of the simplices that fit across every facet."""
    n, k = t.across.shape
    tables = permutations_of(k - 1)
    out = np.zeros(n, dtype=np.int8)
    component, queue = np.empty((2, n), dtype=t.across.dtype)
    flat = (t.across.ravel(), t.rank.ravel(), tables.sign, t.written, out, component, queue)
    engine(n)(spread_orientation, *flat, tuple(range(k)))
    if (out[t.across] * tables.sign[t.rank] == out[:, None]).any():
        raise TriangulationError(
            "the complex is not orientable, so it has no intersection form over the integers",
            hint="its orientable double cover has one: dualize change INPUT double-cover",
        )
    return out


def _keeps_order(t: Triangulation) -> bool:
    """Whether every gluing keeps the order of the corners of its facet."""
    tables = permutations_of(t.dimension)
    there = tables.image[t.rank, np.arange(t.dimension + 1)]
    return bool((tables.keeping[np.arange(t.dimension + 1), there] == t.rank).all())


def _form(t: Triangulation, orientation: np.ndarray, threads: int | None) -> IntersectionForm:
    from flint import fmpz_mat

    counted = census(t, threads=threads)
    triangles = counted.classes[2]
    paired = pair(simplex_maps(t, counted, classes(t, 4, threads=threads)))
    value = _pull_back(paired)
    n2 = value.shape[1]
    # gluings keep the order, so a triangle has the orientation of its class in every simplex
    subsets = corner_subsets(4, 3).tolist()
    front = value[triangles.number[:, subsets.index([0, 1, 2])]]
    back = value[triangles.number[:, subsets.index([2, 3, 4])]]
    product = (front * orientation[:, None].astype(np.int64)).T @ back
    boundary = np.zeros((n2, len(paired.apart(3))), dtype=object)
    for x, column in enumerate(small_maps(paired)[2]):
        for c, v in column.items():
            boundary[c, x] = v
    if boundary.shape[1]:
        cocycles, _ = left_kernel(boundary.tolist())
    else:
        cocycles = [[int(x == y) for y in range(n2)] for x in range(n2)]
    if not cocycles:
        return IntersectionForm((), 0, 1, 0, "even")
    chosen = fmpz_mat(cocycles)
    gram = chosen * fmpz_mat(product.tolist()) * chosen.transpose()
    _, rest = left_kernel([[int(e) for e in row] for row in gram.tolist()])
    if not rest:
        return IntersectionForm((), 0, 1, 0, "even")
    basis = fmpz_mat(rest)
    form = basis * gram * basis.transpose()
    matrix = tuple(tuple(int(e) for e in row) for row in form.tolist())
    assert all(matrix[x][y] == matrix[y][x] for x in range(len(matrix)) for y in range(x))
    signs = [int(c > 0) - int(c < 0) for c in form.charpoly().coeffs()]
    flipped = [s * (-1) ** x for x, s in enumerate(signs)]
    return IntersectionForm(
        matrix,
        len(matrix),
        int(form.det()),
        _variations(signs) - _variations(flipped),
        "even" if all(matrix[x][x] % 2 == 0 for x in range(len(matrix))) else "odd",
    )


def _variations(signs: list[int]) -> int:
    """How often the sign changes along a list, zeros left out."""
    there = [s for s in signs if s]
    return sum(a != b for a, b in pairwise(there))


def _pull_back(paired: Paired) -> np.ndarray:
    """The cochain of every 2-cell that is set apart, on all 2-cells, int64, shape (cells, apart).

    They are pulled back along the projection that sends the lower cell of a pair to what the boundary of the
    upper one has besides, and the upper one to 0.
    """
    start, apart = paired.starts[2], paired.apart(2)
    value = np.zeros((paired.starts[3] - start, len(apart)), dtype=np.int64)
    value[apart - start, np.arange(len(apart))] = 1
    table = (x.astype(np.int64) for x in (paired.faces.indptr, paired.faces.indices, paired.faces.data))
    run = engine(paired.starts[5] - paired.starts[4])
    flat = value.ravel()
    if run(pull_back, *table, paired.mate, paired.in_order(2), flat, start, len(apart), BOUND):
        raise LimitError(f"values of a cochain exceed {BOUND}", hint="simplify the triangulation first")
    return value
