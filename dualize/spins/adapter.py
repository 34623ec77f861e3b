"""From a user's own table of vertex amplitudes to the vertices of a foam.

A vertex amplitude of SU(2) is a network of D + 1 nodes, every two of them linked; the symbol has a spin for
each link and an intertwiner for each node.  How a table is indexed is a choice: which node comes first, in
which order its legs stand, which way links run, how legs are contracted, in which basis intertwiners are.
`VertexTable` declares the choices of the user, `adapters` works out what carries entries of such a table into
a foam:

    A[k_0, ..., k_D] = (-1)**odd * sum_x  M_0[k_0, x_0] ... M_D[k_D, x_D]  T[x_..., in the user's order]

where A has the conventions of the foam: legs in the order of the places, pairing (0 1)(2 3) of 3jm symbols,
an epsilon at every wedge from the slot by which the face enters to the one by which it leaves.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import sqrt
from typing import Any

import numpy as np

from ..errors import InputError
from ..layout import wedge_pairs
from ..skeleton import Skeleton
from .recoupling import overlap, recoupling_spins
from .work import leg_corners

__all__ = ["VertexAdapter", "VertexTable", "adapters", "vertex_table"]

FORMAT, VERSION = "vertex-table", 1
CONTRACTIONS = ("epsilon", "delta")
NORMS = ("orthonormal", "symbols")
PHASES = ("symbols", "coupled")


@dataclass(frozen=True)
class VertexTable:
    """How a user's table of vertex amplitudes is indexed.

    Attributes
    ----------
    legs : tuple of tuple of int
        For each of the D + 1 nodes the other nodes, in the order of its legs.
    links : tuple of (int, int)
        The direction of each link, from one node to another, in the order in which the table has the spins.
    nodes : tuple of int
        The slot of a foam's vertex to which each node belongs.
    pairing : tuple of tuple of int
        4D: for each node the positions of its legs in the order ((a b)(c d)) of the recoupling.
    contraction : str
        ``"epsilon"``: ``epsilon[m, -m] = (-1)**(j-m)`` from the source of a link to its target;
        ``"delta"``: the leg at the target is lowered by ``|m> -> (-1)**(j-m) <-m|`` first.
    norm : str
        ``"orthonormal"``, or ``"symbols"``: the product of two 3jm symbols without the factor sqrt(2k+1).
    phase : str
        ``"symbols"`` or ``"coupled"``, as in `overlap`.
    """

    legs: tuple[tuple[int, ...], ...]
    links: tuple[tuple[int, int], ...]
    nodes: tuple[int, ...]
    pairing: tuple[tuple[int, ...], ...]
    contraction: str = "epsilon"
    norm: str = "orthonormal"
    phase: str = "symbols"

    @property
    def dimension(self) -> int:
        """D, the number of legs of a node."""
        return len(self.legs) - 1

    def to_dict(self) -> dict[str, Any]:
        """The declaration as a document."""
        return {
            "format": FORMAT,
            "version": VERSION,
            "nodes": list(self.nodes),
            "legs": [list(x) for x in self.legs],
            "links": [list(x) for x in self.links],
            "pairing": [list(x) for x in self.pairing],
            "contraction": self.contraction,
            "norm": self.norm,
            "phase": self.phase,
        }


def vertex_table(document: Mapping[str, Any] | None = None, *, dimension: int = 4) -> VertexTable:
    """A declaration from a document; what is left out is as in a foam with ascending places.

    Parameters
    ----------
    document : mapping, optional
        The attributes of `VertexTable` as lists; `pairing` may be one row for all nodes.
    dimension : int
        D, where the document does not tell by its legs.

    Raises
    ------
    InputError
        Naming the entry.
    """
    given = dict(document or {})
    unknown = set(given) - {*VertexTable.__dataclass_fields__, "format", "version", "about"}
    if unknown:
        raise InputError(
            f"the declaration of a vertex table has no entry {min(map(str, unknown))!r}", hint=HINT
        )
    if given.get("format", FORMAT) != FORMAT or given.get("version", VERSION) != VERSION:
        what = f"{given.get('format')!r}, version {given.get('version')!r}"
        raise InputError(f"this is {what}, and not {FORMAT!r}, version {VERSION}")
    k = _length(given["legs"], "legs") if "legs" in given else dimension + 1
    if not 3 <= k <= 5:
        raise InputError(f"a vertex has 3, 4 or 5 nodes, not {k}", "legs")
    legs = _rows(given.get("legs", [[x for x in range(k) if x != n] for n in range(k)]), "legs", k - 1)
    for n, row in enumerate(legs):
        if sorted(row) != [x for x in range(k) if x != n]:
            raise InputError(
                f"the legs of node {n} go to the other nodes, each once, not to {list(row)}", "legs"
            )
    links = _rows(given.get("links", [list(p) for p in wedge_pairs(k - 1)]), "links", 2)
    if sorted(tuple(sorted(x)) for x in links) != wedge_pairs(k - 1):
        raise InputError("every two nodes are linked, once", "links")
    nodes = _rows([given.get("nodes", list(range(k)))], "nodes", k)[0]
    if sorted(nodes) != list(range(k)):
        raise InputError(
            f"the nodes belong to the slots 0 .. {k - 1}, each once, not to {list(nodes)}", "nodes"
        )
    pairing = given.get("pairing", list(range(k - 1)))
    if isinstance(pairing, list) and pairing and not isinstance(pairing[0], list):
        pairing = [pairing] * k
    rows = _rows(pairing, "pairing", k - 1)
    if len(rows) != k or any(sorted(row) != list(range(k - 1)) for row in rows):
        raise InputError(f"a pairing orders the positions 0 .. {k - 2} of the legs of a node", "pairing")
    words = {}
    for key, known in (("contraction", CONTRACTIONS), ("norm", NORMS), ("phase", PHASES)):
        words[key] = given.get(key, known[0])
        if words[key] not in known:
            raise InputError(f"there is no {key} {words[key]!r}", key, "known are: " + ", ".join(known))
    return VertexTable(legs, tuple((a, b) for a, b in links), nodes, rows, **words)


HINT = "known are: " + ", ".join(VertexTable.__dataclass_fields__)


def _length(value: Any, key: str) -> int:
    if not isinstance(value, list):
        raise InputError("this is no list", key)
    return len(value)


def _rows(value: Any, key: str, width: int) -> tuple[tuple[int, ...], ...]:
    """Rows of integers of one width."""
    if not isinstance(value, list) or not all(isinstance(row, list) and len(row) == width for row in value):
        raise InputError(f"this is no list of rows with {width} entries each", key)
    if not all(type(x) is int for row in value for x in row):
        raise InputError("the entries are integers", key)
    return tuple(tuple(row) for row in value)


@dataclass(frozen=True, eq=False)
class VertexAdapter:
    """What carries entries of a user's table into one vertex of a foam.

    Attributes
    ----------
    vertex : int
    wedges : tuple of int
        The wedge of the vertex for each link of the table, in its order: where its spins come from.
    axes : tuple of int
        The slot for each node of the table: axis n of the table becomes axis ``axes[n]``.
    odd : tuple of int
        How often the twice-spin of each wedge counts in the exponent of the sign, 0 or 1.
    table : VertexTable
    legs : tuple of tuple of int
        The wedge at each leg of each slot, in the order of the places of the foam.
    """

    vertex: int
    wedges: tuple[int, ...]
    axes: tuple[int, ...]
    odd: tuple[int, ...]
    table: VertexTable
    legs: tuple[tuple[int, ...], ...]
    _positions: tuple[tuple[int, ...], ...]

    def link_spins(self, spins: Sequence[int]) -> list[int]:
        """Twice-spins of the links in the order of the table, from those of the wedges."""
        return [int(spins[w]) for w in self.wedges]

    def sign_exponent(self, spins: Sequence[int]) -> int:
        """0 or 1: the exponent of the sign for these twice-spins of the wedges."""
        return sum(int(s) * o for s, o in zip(spins, self.odd, strict=True)) % 2

    def basis(self, slot: int, spins: Sequence[int]) -> np.ndarray:
        """The change of basis at a slot, (foam's, user's intertwiners), for twice-spins of the wedges."""
        at = tuple(int(spins[w]) for w in self.legs[slot])
        return _basis(at, self._positions[slot], self.table.norm, self.table.phase)

    def carry(self, tensor: np.ndarray, spins: Sequence[int]) -> np.ndarray:
        """The amplitude of this vertex from the entries of the table for the spins `link_spins`.

        Parameters
        ----------
        tensor : ndarray, one axis for each node of the table
            Intertwiners by ascending recoupling spin of the user's pairing.
        spins : sequence of int, length W
            Twice-spins of the wedges.

        Returns
        -------
        ndarray, one axis for each slot
            By ascending recoupling spin in pairing 0 of the places.
        """
        out = np.transpose(tensor, np.argsort(self.axes))
        for slot in range(out.ndim):
            matrix = self.basis(slot, spins)
            if matrix.shape[1] != out.shape[slot]:
                raise InputError(
                    f"the table has {out.shape[slot]} intertwiners at slot {slot}, and the spins there "
                    f"have {matrix.shape[1]}"
                )
            out = np.moveaxis(np.tensordot(matrix, out, axes=(1, slot)), 0, slot)
        result: np.ndarray = -out if self.sign_exponent(spins) else out
        return result

    def to_dict(self) -> dict[str, Any]:
        """As plain lists; the changes of basis depend on spins and are left to `basis`."""
        return {
            "vertex": self.vertex,
            "wedges": list(self.wedges),
            "axes": list(self.axes),
            "odd": list(self.odd),
            "places": [list(x) for x in self._positions],
        }


@lru_cache(maxsize=1 << 14)
def _basis(spins: tuple[int, ...], order: tuple[int, ...], norm: str, phase: str) -> np.ndarray:
    """Rows are the foam's intertwiners, columns the user's; `order`: the user's places ((a b)(c d))."""
    # user = sum_foam <user | foam> foam, and the other way round by the transpose
    matrix = overlap(spins, order, list(range(len(spins))), phase).T
    if norm == "symbols" and len(spins) == 4:
        matrix = matrix * np.array([sqrt(k + 1) for k in recoupling_spins(spins, order)])
    matrix.flags.writeable = False
    return matrix


def adapters(skeleton: Skeleton, table: VertexTable) -> list[VertexAdapter]:
    """What carries entries of a user's table into every vertex of a foam.

    Parameters
    ----------
    skeleton : Skeleton
    table : VertexTable

    Raises
    ------
    InputError
        If the table has vertices of another dimension.

    Notes
    -----
    Both amplitudes are one network with equal nodes and links, so they differ by the choice of a basis at
    each node, and by (-1)**(2j) for each link that runs the other way; a lowered leg is a link that runs the
    other way.
    """
    d = skeleton.dimension
    if table.dimension != d:
        raise InputError(f"the table has vertices of {table.dimension}D foams, and this foam is {d}D")
    pairs = wedge_pairs(d)
    number = {frozenset(p): w for w, p in enumerate(pairs)}
    node_at = [table.nodes.index(slot) for slot in range(d + 1)]
    wedges, forward = [], [0] * len(pairs)
    for a, b in table.links:
        i, j = table.nodes[a], table.nodes[b]
        w = number[frozenset((i, j))]
        wedges.append(w)
        forward[w] = 1 if i < j else -1
    if table.contraction == "delta":
        forward = [-x for x in forward]
    corners = leg_corners(skeleton).tolist()
    out = []
    for v, (rows, direction) in enumerate(zip(corners, skeleton["wedges/direction"].tolist(), strict=True)):
        legs, positions = [], []
        for slot, row in enumerate(rows):
            legs.append(tuple(number[frozenset((slot, c))] for c in row))
            node = node_at[slot]
            theirs = [row.index(table.nodes[other]) for other in table.legs[node]]
            positions.append(tuple(theirs[p] for p in table.pairing[node]))
        odd = tuple(int(x != y) for x, y in zip(forward, direction, strict=True))
        out.append(VertexAdapter(v, tuple(wedges), table.nodes, odd, table, tuple(legs), tuple(positions)))
    return out
