"""From labellings to work: which vertex amplitudes and which half-edge coefficients are needed, each once."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from ..errors import InputError, LimitError
from ..layout import wedge_pairs
from ..skeleton import Skeleton
from .recoupling import overlap
from .rules import intertwiner_dimension

__all__ = ["HalfEdges", "WorkList", "half_edges", "leg_corners", "work_list"]

LARGEST_WORK = 1 << 32  # bytes of the keys


@dataclass(frozen=True, eq=False)
class WorkList:
    """The distinct vertex amplitudes of some labellings.

    Attributes
    ----------
    spins : ndarray of int64, shape (n, W)
        Twice-spins at the wedges (i, j), in their order.
    order : ndarray of int8, shape (n, D + 1, D)
        The corner at each leg of each slot: leg k of slot i goes through wedge {i, order[i, k]}.
        Ascending where symmetries are used.
    direction : ndarray of int8, shape (n, W), or None
        Of the faces at the wedges, +1 from i to j; None where they are reduced to signs.
    leaves : ndarray of int8, shape (n, D + 1), or None
        Likewise, +1 where the edge begins at the vertex.
    entry : ndarray of int64, shape (labellings, V)
        The amplitude of each vertex in each labelling.
    odd : ndarray of int8, shape (labellings, V)
        1 where the amplitude is minus that of the entry: directions were turned around.
    symmetry : ndarray of int64, shape (labellings, V)
        The number of the symmetry that carries the vertex to its entry; 0 is the identity.
    dimensions : ndarray of int64, shape (n, D + 1)
        Intertwiners at each slot of each entry.
    legs : ndarray of int8, shape (V, D + 1, D)
        The corner at each leg of each slot of the vertices of the foam.
    group : list of tuple of int
        The symmetries by their numbers, as permutations of the slots.
    """

    spins: np.ndarray
    order: np.ndarray
    direction: np.ndarray | None
    leaves: np.ndarray | None
    entry: np.ndarray
    odd: np.ndarray
    symmetry: np.ndarray
    dimensions: np.ndarray
    legs: np.ndarray
    group: list[tuple[int, ...]]

    def __len__(self) -> int:
        return len(self.spins)

    @property
    def elements(self) -> int:
        """Numbers in all tensors together, one axis per slot."""
        return sum(int(np.prod(row.astype(object))) for row in self.dimensions)

    @property
    def bytes(self) -> int:
        """Bytes of all tensors in double precision."""
        return 8 * self.elements

    def carry(self, labelling: int, vertex: int, tensor: np.ndarray) -> np.ndarray:
        """The amplitude of a vertex in a labelling from the tensor of its entry.

        Parameters
        ----------
        labelling, vertex : int
        tensor : ndarray, one axis for each slot of the entry
            With directions reduced to signs: legs in the order `order`, an epsilon from i to j at every
            wedge (i, j).

        Returns
        -------
        ndarray, one axis for each slot of the vertex
            Legs in the order of the places.
        """
        if self.direction is not None:
            return tensor
        entry = int(self.entry[labelling, vertex])
        g = self.group[int(self.symmetry[labelling, vertex])]
        out = np.transpose(tensor, g)
        wedge = _wedge_table(len(g) - 1)
        for slot, row in enumerate(self.legs[vertex].tolist()):
            renamed = [g[c] for c in row]
            theirs = self.order[entry, g[slot]].tolist()
            at = [renamed.index(c) for c in theirs]
            if at != list(range(len(row))):
                spins = [int(self.spins[entry, wedge[g[slot], c]]) for c in renamed]
                matrix = overlap(spins, range(len(row)), at)
                out = np.moveaxis(np.tensordot(matrix, out, axes=(1, slot)), 0, slot)
        result: np.ndarray = -out if self.odd[labelling, vertex] else out
        return result

    def __str__(self) -> str:
        return f"{len(self):,} vertex amplitudes, {self.elements:,} tensor elements, {self.bytes:,} bytes"


def leg_corners(skeleton: Skeleton) -> np.ndarray:
    """The corner at each leg of each slot, in the order of the places of its edge, int8 (V, D + 1, D)."""
    edge, leaves = skeleton["vertices/edge"], skeleton["vertices/leaves"]
    source, target = skeleton["edges/source_corner"][edge], skeleton["edges/target_corner"][edge]
    return np.where(leaves[:, :, None] > 0, source, target).astype(np.int8)


def work_list(
    skeleton: Skeleton,
    labellings: np.ndarray,
    boundary: np.ndarray,
    *,
    signs: bool = True,
    symmetries: Sequence[Sequence[int]] = (),
) -> WorkList:
    """The distinct vertex amplitudes that labellings need, and where each is needed.

    Parameters
    ----------
    skeleton : Skeleton
    labellings : array_like of int, shape (n, F_int)
        Twice-spins of the internal faces.
    boundary : array_like of int, shape (L,)
        Twice-spins of the links.
    signs : bool
        Reduce the directions of the faces at a vertex to a sign, as SU(2) allows: with an epsilon from i to j
        at every wedge, a face that passes from j to i costs (-1)**(2j).  If false, directions and leaves
        stay in the key.
    symmetries : sequence of permutations of the slots
        Amplitudes that differ by these, or their products, are counted once, and `WorkList.symmetry` says
        which one was used.  Any permutation is one of SU(2), up to the order of the legs: entries then have
        ascending legs, and `WorkList.carry` changes the basis.

    Raises
    ------
    InputError
        If the labellings do not fit the foam, or a symmetry is no permutation.
    LimitError
        If the keys would not fit into memory; hand over fewer labellings at a time.

    Examples
    --------
    >>> from dualize import build, make
    >>> s = build(make.move_side(4, 3))
    >>> str(work_list(s, [[1], [3]], [1] * 18))
    '2 vertex amplitudes, 40 tensor elements, 320 bytes'
    """
    d, k = skeleton.dimension, skeleton.dimension + 1
    rows, spins = _all_spins(skeleton, labellings, boundary)
    vertices, w = skeleton["wedges/face"].shape
    group = slot_group(d, symmetries)
    legs = leg_corners(skeleton)
    width = w + k * d + (0 if signs else w + k)
    need = len(rows) * vertices * width * 8 * (3 if len(group) == 1 else 5)
    if need > LARGEST_WORK:
        raise LimitError(
            f"the keys of {len(rows) * vertices:,} vertices take {need / 2**30:.1f} GiB",
            hint="hand over fewer labellings at a time",
        )
    at = spins[:, skeleton["wedges/face"]].reshape(-1, w)
    direction = np.tile(skeleton["wedges/direction"], (len(rows), 1)).astype(np.int64)
    # a symmetry changes the order of the legs: entries then have ascending ones
    fixed = np.broadcast_to(_ascending(k), legs.shape) if len(group) > 1 else legs
    order = np.tile(fixed.reshape(vertices, k * d), (len(rows), 1)).astype(np.int64)
    odd = (np.where(direction < 0, at, 0).sum(axis=1) % 2).astype(np.int8)
    parts = [at, order]
    if not signs:
        parts += [direction, np.tile(skeleton["vertices/leaves"], (len(rows), 1)).astype(np.int64)]
        odd[:] = 0
    given = np.concatenate(parts, axis=1)
    key = given.copy()
    used = np.zeros(len(key), dtype=np.int64)
    for number, g in enumerate(group[1:], start=1):
        image, flips = _permuted(given, g, d, signs)
        first = _less(image, key)
        key[first] = image[first]
        used[first] = number
        if signs:
            odd[first] = (odd_of(at, direction) + flips)[first] % 2
    unique, inverse = np.unique(key, axis=0, return_inverse=True)
    shape = (len(rows), vertices)
    entry_order = unique[:, w : w + k * d].reshape(-1, k, d)
    wedge_of = _wedge_table(d)
    at_legs = np.take_along_axis(
        unique[:, None, :w], wedge_of[np.arange(k)[:, None], entry_order].reshape(-1, 1, k * d), axis=2
    ).reshape(-1, k, d)
    return WorkList(
        spins=unique[:, :w],
        order=entry_order.astype(np.int8),
        direction=None if signs else unique[:, w + k * d : 2 * w + k * d].astype(np.int8),
        leaves=None if signs else unique[:, 2 * w + k * d :].astype(np.int8),
        entry=inverse.reshape(shape),
        odd=odd.reshape(shape),
        symmetry=used.reshape(shape),
        dimensions=intertwiner_dimension(at_legs),
        legs=legs,
        group=group,
    )


def _all_spins(
    skeleton: Skeleton, labellings: np.ndarray, boundary: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """Labellings, and the twice-spins of all faces in each, checked against the foam."""
    rows = np.asarray(labellings, dtype=np.int64)
    outer = np.asarray(boundary, dtype=np.int64)
    if rows.ndim != 2 or rows.shape[1] != skeleton.counts["faces_internal"]:
        raise InputError(
            f"labellings have a row for each and {skeleton.counts['faces_internal']} columns, "
            f"not the shape {rows.shape}"
        )
    if outer.shape != (skeleton.counts["links"],):
        raise InputError(f"there are {skeleton.counts['links']} links, and {outer.size} boundary spins")
    return rows, np.concatenate([rows, np.broadcast_to(outer, (len(rows), len(outer)))], axis=1)


def _ascending(k: int) -> np.ndarray:
    """The other corners of each slot, ascending, (K, K - 1)."""
    return np.array([[c for c in range(k) if c != slot] for slot in range(k)], dtype=np.int8)


def odd_of(spins: np.ndarray, direction: np.ndarray) -> np.ndarray:
    """Parity of the twice-spins of the wedges that a face passes from j to i."""
    result: np.ndarray = np.where(direction < 0, spins, 0).sum(axis=1) % 2
    return result


def slot_group(dimension: int, generators: Sequence[Sequence[int]]) -> list[tuple[int, ...]]:
    """The permutations of the slots that some generate, the identity first, then in lexicographic order."""
    k = dimension + 1
    identity = tuple(range(k))
    steps = []
    for g in generators:
        if sorted(g) != list(identity):
            raise InputError(f"a symmetry of the slots is a permutation of 0 .. {dimension}, not {list(g)}")
        steps.append(tuple(int(x) for x in g))
    found, new = {identity}, [identity]
    while new:
        p = new.pop()
        for g in steps:
            q = tuple(g[x] for x in p)
            if q not in found:
                found.add(q)
                new.append(q)
    return sorted(found)


def _wedge_table(dimension: int) -> np.ndarray:
    """The number of the wedge {i, j}, (K, K); 0 on the diagonal."""
    k = dimension + 1
    table = np.zeros((k, k), dtype=np.int64)
    for n, (i, j) in enumerate(wedge_pairs(dimension)):
        table[i, j] = table[j, i] = n
    return table


def _permuted(key: np.ndarray, g: tuple[int, ...], d: int, signs: bool) -> tuple[np.ndarray, np.ndarray]:
    """Keys with slot i renamed g[i] (legs stay ascending), and the sum of twice-spins of turned wedges."""
    pairs = wedge_pairs(d)
    k, w = d + 1, len(pairs)
    table = _wedge_table(d)
    image = key.copy()
    flips = np.zeros(len(key), dtype=np.int64)
    for n, (i, j) in enumerate(pairs):
        to = table[g[i], g[j]]
        image[:, to] = key[:, n]
        turned = g[i] > g[j]
        if turned:
            flips += key[:, n]
        if not signs:
            image[:, w + k * d + to] = -key[:, w + k * d + n] if turned else key[:, w + k * d + n]
    if not signs:
        base = 2 * w + k * d
        for i in range(k):
            image[:, base + g[i]] = key[:, base + i]
    return image, flips


def _less(a: np.ndarray, b: np.ndarray) -> np.ndarray:
    """Whether rows of `a` come before those of `b` in lexicographic order."""
    differ = a != b
    first = differ.argmax(axis=1)
    rows = np.arange(len(a))
    result: np.ndarray = differ.any(axis=1) & (a[rows, first] < b[rows, first])
    return result


@dataclass(frozen=True, eq=False)
class HalfEdges:
    """The coefficients of a model that splits into SU(2) symbols and one coefficient for each half-edge.

    Attributes
    ----------
    vertex, slot : ndarray of int64, shape (n,)
        The half-edges: all but the redundant one of each vertex.
    fixed : ndarray of int64, shape (V, D)
        The wedges of each vertex at the redundant slot, where the auxiliary spin l is j.
    auxiliary : ndarray of int64, shape (V, W - D)
        The other wedges, with an auxiliary spin l >= j each.
    truncation : int
        The largest l - j.
    spins : ndarray of int64, shape (m, D)
        Twice-spins of the distinct coefficients by place.
    held : ndarray of int64, shape (m,)
        The place at which l = j.
    entry : ndarray of int64, shape (labellings, n)
        The coefficient of each half-edge in each labelling.
    symbols, coefficients, elements : int
        SU(2) symbols, one for each set of auxiliary spins at a vertex of the labellings; coefficients, one
        for each set of auxiliary spins at a distinct half-edge; and numbers in these, the matrices from the
        intertwiners of the j to those of the l.
    """

    vertex: np.ndarray
    slot: np.ndarray
    fixed: np.ndarray
    auxiliary: np.ndarray
    truncation: int
    spins: np.ndarray
    held: np.ndarray
    entry: np.ndarray
    symbols: int
    coefficients: int
    elements: int

    def to_dict(self) -> dict[str, Any]:
        """The counts."""
        return {
            "half_edges": len(self.vertex),
            "truncation": self.truncation,
            "distinct_half_edges": len(self.spins),
            "symbols": self.symbols,
            "coefficients": self.coefficients,
            "elements": self.elements,
        }


def half_edges(
    skeleton: Skeleton,
    labellings: np.ndarray,
    boundary: np.ndarray,
    *,
    truncation: int = 0,
    slot: np.ndarray | int = 0,
) -> HalfEdges:
    """The half-edge coefficients that labellings need in a Lorentzian model that factors.

    Parameters
    ----------
    skeleton : Skeleton
        Of dimension 4.
    labellings, boundary
        As for `work_list`.
    truncation : int
        The largest l - j, a number of integer steps.
    slot : int or ndarray of int, shape (V,)
        The redundant slot, as `gauge` gives it.

    Raises
    ------
    InputError
        If the foam is not 4D, or the truncation is negative.

    References
    ----------
    S. Speziale, "Boosting Wigner's nj-symbols", J. Math. Phys. 58 (2017) 032501 (from memory).
    """
    if skeleton.dimension != 4:
        raise InputError("half-edge coefficients belong to 4D foams")
    if truncation < 0:
        raise InputError(f"the truncation is not negative, as {truncation} is")
    vertices = len(skeleton["vertices/orientation"])
    chosen = np.broadcast_to(np.asarray(slot, dtype=np.int64), (vertices,))
    table = _wedge_table(4)
    fixed = np.array([[table[r, c] for c in range(5) if c != r] for r in chosen.tolist()]).reshape(-1, 4)
    auxiliary = np.array([np.setdiff1d(np.arange(10), row) for row in fixed]).reshape(-1, 6)
    vertex, at = np.nonzero(np.arange(5)[None, :] != chosen[:, None])
    legs = leg_corners(skeleton)[vertex, at].astype(np.int64)
    held = (legs == chosen[vertex][:, None]).argmax(axis=1)
    rows, every = _all_spins(skeleton, labellings, boundary)
    faces = skeleton["wedges/face"][vertex[:, None], table[at[:, None], legs]]
    spins = every[:, faces]
    key = np.concatenate([spins, np.broadcast_to(held[None, :, None], (*spins.shape[:2], 1))], axis=2)
    unique, inverse = np.unique(key.reshape(-1, 5), axis=0, return_inverse=True)
    coefficients, elements = 0, 0
    shifts = np.array(np.meshgrid(*[np.arange(truncation + 1)] * 3, indexing="ij")).reshape(3, -1).T
    for row in unique.tolist():
        j, place = row[:4], row[4]
        l_spins = np.tile(j, (len(shifts), 1))
        l_spins[:, [p for p in range(4) if p != place]] += 2 * shifts
        sizes = intertwiner_dimension(l_spins)
        coefficients += int((sizes > 0).sum())
        elements += int(sizes.sum()) * int(intertwiner_dimension(j))
    return HalfEdges(
        vertex=vertex,
        slot=at,
        fixed=fixed,
        auxiliary=auxiliary,
        truncation=truncation,
        spins=unique[:, :4],
        held=unique[:, 4],
        entry=inverse.reshape(len(rows), len(vertex)),
        symbols=len(rows) * vertices * (truncation + 1) ** 6,
        coefficients=coefficients,
        elements=elements,
    )
