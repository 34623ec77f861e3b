"""Power counting: how a sum grows with its cutoff, by rules whose range of validity is stated.

For BF theory of a group of dimension n the degree is n times Omega near the trivial flat connection.  For
other models there is an estimate from the cone of growing spins.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from ..errors import LimitError
from ..skeleton import Skeleton
from ..topology.integral import abelian_group
from ..topology.maps import foam_maps
from .rules import Rules
from .unbounded import growth, growth_rays

__all__ = ["Estimate", "estimate", "interior_group", "interior_homology", "interior_rank", "omega"]


def interior_rank(skeleton: Skeleton) -> int:
    """Rank over Q of the boundary map from the internal faces to the internal edges, exact."""
    return skeleton.counts["edges_internal"] - interior_group(skeleton).count(0)


def interior_group(skeleton: Skeleton) -> list[int]:
    """The cokernel of the boundary map from internal faces to internal edges, as invariant factors.

    Notes
    -----
    Integer elimination with unit pivots, then the Smith normal form of what is left.  The factors other than
    0 are the torsion of H_1 of the foam's interior.
    """
    matrix = interior_map(skeleton)
    columns: list[dict[int, int]] = []
    for a, b in zip(matrix.indptr[:-1].tolist(), matrix.indptr[1:].tolist(), strict=True):
        rows, values = matrix.indices[a:b].tolist(), matrix.data[a:b].tolist()
        columns.append({r: v for r, v in zip(rows, values, strict=True) if v})
    return abelian_group(matrix.shape[0], columns)


def interior_homology(skeleton: Skeleton, group: list[int]) -> list[int]:
    """H_1 of the foam's interior as invariant factors, 0 for a free one, from `interior_group`.

    Edges that bound nothing are cycles up to the rank of the graph, that is the number of vertices less that
    of the components (of the dual graph of internal edges).
    """
    free = group.count(0) - (skeleton.counts["vertices"] - skeleton.counts["components"])
    return [0] * free + [x for x in group if x != 0]


def interior_map(skeleton: Skeleton) -> Any:
    """The boundary map from internal faces to internal edges, csc_array of int64."""
    _, d2 = foam_maps(skeleton)
    inner = d2.tocsr()[: skeleton.counts["edges_internal"]].tocsc()[:, : skeleton.counts["faces_internal"]]
    return inner.tocsc()


def omega(skeleton: Skeleton) -> int:
    """Omega: the number of internal faces minus the rank of their boundary map over Q.

    The BF sum of a group of dimension n with the cutoff delta_L diverges as delta_L(1)**Omega near the
    trivial flat connection; for SU(2) delta_L(1) grows as L**3.  Where the fundamental group of the foam is
    not trivial, other flat connections can dominate.

    References
    ----------
    V. Bonzom, M. Smerlak, "Bubble divergences from cellular cohomology", Lett. Math. Phys. 93 (2010) 295-305
    (from memory).

    Examples
    --------
    >>> from dualize import build, make
    >>> [omega(build(make.move_side(4, k))) for k in (3, 4, 5)]
    [0, 1, 4]
    """
    return skeleton.counts["faces_internal"] - interior_rank(skeleton)


@dataclass(frozen=True)
class Estimate:
    """A degree of divergence by the stated estimate, not a theorem.

    Attributes
    ----------
    degree : float
        The largest over the faces of the cone.
    dimension : int
        Of the face of the cone where it is reached.
    growing : tuple of int
        The internal faces whose spins grow there.
    edges : int
        How many 4D edges have four growing spins, none equal to the sum of the rest.
    exponents : float
        What the exponents given by the user contribute.
    cone_faces : int
        How many faces of the cone were compared.
    """

    degree: float
    dimension: int
    growing: tuple[int, ...]
    edges: int
    exponents: float
    cone_faces: int


CONE_FACES = 200_000


def estimate(
    rules: Rules,
    power: float = 1.0,
    exponents: Mapping[frozenset[int], float] | Callable[[frozenset[int]], float] | None = None,
) -> Estimate:
    """Estimate how the sum of a model grows with the cutoff of its spins.

    Parameters
    ----------
    rules : Rules
    power : float
        The weight of a face is (2j + 1) to this power.
    exponents : mapping or callable, optional
        Further exponents by the set of growing faces: of a mapping, every entry counts whose faces all grow;
        a callable gets the set of growing faces.

    Returns
    -------
    Estimate
        The largest, over the faces of the recession cone, of: the dimension of the face, plus `power` for
        each growing spin, plus the exponents, plus 1 for each edge all of whose four spins grow with none
        equal to the sum of the rest (its intertwiners grow in number).

    Raises
    ------
    LimitError
        If the cone has too many rays or faces to compare them.

    Notes
    -----
    Counting of powers only: signs and oscillations, which lower the degree of an actual amplitude, are not
    looked at.  Without exponents and with ``power >= 0`` the whole cone is the largest.
    """
    found = growth(rules)
    if not found.dimension:
        return Estimate(0.0, 0, (), 0, 0.0, 1)
    if exponents is None and power >= 0:
        interior = found.unbounded.astype(np.int64)
        return _value(rules, interior, found.dimension, power, exponents, 1)
    rays = growth_rays(rules, 5000)
    if not rays.complete:
        raise LimitError(
            "the cone has too many rays to compare its faces", hint="use power >= 0 and no exponents"
        )
    best: Estimate | None = None
    faces = _cone_faces(rules, rays.vectors)
    for face, dimension in faces.items():
        chosen = [x for x in range(len(rays.vectors)) if face >> x & 1]
        interior = rays.vectors[chosen].sum(axis=0) if chosen else np.zeros(rules.internal, dtype=np.int64)
        value = _value(rules, interior, dimension, power, exponents, len(faces))
        if best is None or value.degree > best.degree:
            best = value
    assert best is not None
    return best


def _value(
    rules: Rules, point: np.ndarray, dimension: int, power: float,
    exponents: Mapping[frozenset[int], float] | Callable[[frozenset[int]], float] | None, faces: int,
) -> Estimate:  # fmt: skip
    """The estimate at a face of the cone, from a point inside it."""
    growing = frozenset(np.flatnonzero(point > 0).tolist())
    edges = 0
    if rules.face.shape[1] == 4 and len(rules.face):
        rows = np.append(point, np.zeros(len(rules.boundary), dtype=np.int64))[rules.face]
        edges = int(((rows > 0).all(axis=1) & (2 * rows.max(axis=1) < rows.sum(axis=1))).sum())
    extra = 0.0
    if callable(exponents):
        extra = float(exponents(growing))
    elif exponents is not None:
        extra = float(sum(value for faces_, value in exponents.items() if faces_ <= growing))
    degree = dimension + power * len(growing) + extra + edges
    return Estimate(degree, dimension, tuple(sorted(growing)), edges, extra, faces)


def _cone_faces(rules: Rules, rays: np.ndarray) -> dict[int, int]:
    """All faces of the cone, as sets of rays in bits, with their dimensions."""
    spins = np.concatenate([rays, np.zeros((len(rays), len(rules.boundary)), dtype=np.int64)], axis=1)
    rows = spins[:, rules.face]  # (rays, E, D)
    slack = (rows.sum(axis=2, keepdims=True) - 2 * rows).reshape(len(rays), -1)
    tight = np.concatenate([slack == 0, rays == 0], axis=1)
    facets = {sum(1 << x for x in np.flatnonzero(column).tolist()) for column in tight.T}
    whole = (1 << len(rays)) - 1
    faces, new = {whole}, [whole]
    while new:
        face = new.pop()
        for facet in facets:
            part = face & facet
            if part not in faces:
                faces.add(part)
                new.append(part)
                if len(faces) > CONE_FACES:
                    raise LimitError(f"the cone has more than {CONE_FACES:,} faces", hint="use power >= 0")
    out = {}
    for face in faces:
        chosen = [x for x in range(len(rays)) if face >> x & 1]
        out[face] = int(np.linalg.matrix_rank(rays[chosen].astype(float))) if chosen else 0
    return out
