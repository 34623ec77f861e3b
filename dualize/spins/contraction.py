"""The network of vertex tensors: in which order to contract it, and what that costs.

For fixed spins every vertex is a tensor with an axis for each slot; the axis belongs to the intertwiners of
the edge there.  Internal edges are summed, external ones stay open, or are closed by states of the nodes.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import prod
from typing import Any

import numpy as np

from ..errors import InputError, LimitError
from ..skeleton import Skeleton
from .counting import elimination_order
from .rules import intertwiner_dimension

__all__ = ["Network", "NetworkPlan", "SumOrder", "network", "plan_network", "sum_order"]


@dataclass(frozen=True, eq=False)
class Network:
    """A network of tensors as index arrays.

    Attributes
    ----------
    tensors : tuple of tuple of int
        The edges at the axes of each tensor: first the vertices by slot, then the nodes that have a state.
    output : tuple of int
        The edges that stay open, in the order of their nodes.
    sizes : ndarray of int64, shape (E,)
        Intertwiners of each edge.
    vertices : int
        How many of the tensors are vertices.
    """

    tensors: tuple[tuple[int, ...], ...]
    output: tuple[int, ...]
    sizes: np.ndarray
    vertices: int

    @property
    def einsum(self) -> str:
        """The network as einsum text, a letter for each edge; many edges take letters beyond the alphabet."""
        return _text(self.tensors, self.output)

    def operands(self, arrays: Sequence[np.ndarray]) -> list[Any]:
        """Arrays and index lists in turn, as `numpy.einsum` and `opt_einsum.contract` take them."""
        out: list[Any] = []
        for array, tensor in zip(arrays, self.tensors, strict=True):
            out += [array, list(tensor)]
        return [*out, list(self.output)]


@dataclass(frozen=True, eq=False)
class NetworkPlan:
    """How to contract a network.

    Attributes
    ----------
    network : Network
    path : tuple of tuple of int
        The pairs to contract, as positions in the list of tensors that are left; results go to its end.
    flops : int
        Floating-point operations, of all slices together.
    peak : int
        Entries of the largest tensor on the way, in one slice.
    sliced : tuple of int
        Edges whose intertwiners are taken one by one, so that the peak fits.
    slices : int
        How many slices there are.
    """

    network: Network
    path: tuple[tuple[int, ...], ...]
    flops: int
    peak: int
    sliced: tuple[int, ...]
    slices: int

    def __str__(self) -> str:
        text = f"{self.flops:.3g} operations, largest tensor {self.peak:,} entries ({8 * self.peak:,} bytes)"
        if self.sliced:
            edges = ", ".join(map(str, self.sliced))
            text += f", in {self.slices:,} slices over the edges {edges}"
        return text

    def to_dict(self) -> dict[str, Any]:
        """As plain values, with the network."""
        return {
            "einsum": self.network.einsum,
            "tensors": [list(t) for t in self.network.tensors],
            "vertices": self.network.vertices,
            "output": list(self.network.output),
            "sizes": self.network.sizes.tolist(),
            "path": [list(step) for step in self.path],
            "flops": self.flops,
            "peak_entries": self.peak,
            "peak_bytes": 8 * self.peak,
            "sliced": list(self.sliced),
            "slices": self.slices,
        }


def network(
    skeleton: Skeleton,
    sizes: np.ndarray | int | None = None,
    *,
    spins: np.ndarray | None = None,
    closed: Sequence[int] = (),
) -> Network:
    """The network of a foam.

    Parameters
    ----------
    skeleton : Skeleton
    sizes : array_like of int, shape (E,), or int, optional
        Intertwiners of each edge, or the most that any has.
    spins : array_like of int, shape (F,), optional
        Twice-spins of all faces, which give the sizes instead.
    closed : sequence of int
        Nodes that have a state, a vector each.

    Raises
    ------
    InputError
        If neither or both of sizes and spins are given, or they do not fit.

    Examples
    --------
    >>> from dualize import build, make
    >>> network(build(make.shared_pair(4)), 2).einsum
    'abcde,abcdf->ef'
    """
    edges = len(skeleton["edges/twist"])
    if (sizes is None) == (spins is None):
        raise InputError("a network takes either the sizes of the edges or the spins of the faces")
    if spins is not None:
        rows = np.asarray(spins, dtype=np.int64)
        if rows.shape != (len(skeleton["faces/against"]),):
            raise InputError(f"there are {len(skeleton['faces/against'])} faces, and {rows.size} spins")
        size = intertwiner_dimension(rows[skeleton["edges/face"]])
        if (size == 0).any():
            edge = int(np.flatnonzero(size == 0)[0])
            raise InputError("the spins admit no intertwiner", f"edge {edge}")
    else:
        size = np.broadcast_to(np.asarray(sizes, dtype=np.int64), (edges,)).copy()
        if (size < 1).any():
            raise InputError("every edge has at least one intertwiner")
    inner = skeleton.counts["edges_internal"]
    tensors = [tuple(row) for row in skeleton["vertices/edge"].tolist()]
    chosen = sorted({int(n) for n in closed})
    if chosen and not 0 <= chosen[0] <= chosen[-1] < skeleton.counts["nodes"]:
        raise InputError(f"there are {skeleton.counts['nodes']} nodes, numbered from 0")
    tensors += [(inner + n,) for n in chosen]
    output = tuple(e for e in range(inner, edges) if e - inner not in chosen)
    return Network(tuple(tensors), output, size, len(skeleton["vertices/edge"]))


def plan_network(net: Network, *, memory: int | None = None, optimize: str = "auto") -> NetworkPlan:
    """An order in which to contract a network, its cost, and slices that keep it within a memory limit.

    Parameters
    ----------
    net : Network
    memory : int, optional
        The largest tensor on the way has at most so many bytes (of 8 for each entry).
    optimize : str
        How opt_einsum looks for the order.

    Raises
    ------
    LimitError
        If no slicing fits: the open edges alone are too many.

    Notes
    -----
    The order is found by opt_einsum: D. G. A. Smith, J. Gray, J. Open Source Softw. 3 (2018) 753.  Slices are
    chosen one edge at a time: that whose slicing leaves the smallest peak, then the fewest operations.
    """
    sliced: list[int] = []
    best = _contract(net, sliced, optimize)
    while memory is not None and 8 * best[1] > memory:
        inside = {e for tensor in net.tensors for e in tensor} - set(sliced)
        candidates = sorted((e for e in inside if net.sizes[e] > 1), key=lambda e: (-int(net.sizes[e]), e))
        tried = [(e, _contract(net, [*sliced, e], "greedy")) for e in candidates[:CANDIDATES]]
        if not tried:
            raise LimitError(
                f"the contraction takes {8 * best[1]:,} bytes however it is sliced; {memory:,} are allowed"
            )
        edge, _ = min(tried, key=lambda item: (item[1][1], item[1][2], item[0]))
        sliced.append(edge)
        best = _contract(net, sliced, optimize)
    path, peak, flops = best
    slices = prod(int(net.sizes[e]) for e in sliced)
    return NetworkPlan(
        net, tuple(tuple(int(x) for x in step) for step in path), flops * slices, peak, tuple(sliced), slices
    )


def _text(tensors: Sequence[Sequence[int]], output: Sequence[int]) -> str:
    """Einsum text with the letter of its number for each edge."""
    from opt_einsum import get_symbol

    return ",".join("".join(map(get_symbol, t)) for t in tensors) + "->" + "".join(map(get_symbol, output))


CANDIDATES = 40  # edges that are tried for the next slice


def _contract(net: Network, sliced: Sequence[int], optimize: str) -> tuple[list, int, int]:
    """Path, entries of the largest tensor (inputs included), and operations, with some edges held fixed."""
    import opt_einsum

    gone = set(sliced)
    kept = [[e for e in tensor if e not in gone] for tensor in net.tensors]
    shapes = [tuple(int(net.sizes[e]) for e in tensor) for tensor in kept]
    inputs = [prod(shape) for shape in shapes]
    if len(net.tensors) == 1:  # nothing to contract with: a trace over self-loops, or nothing at all
        return [(0,)], inputs[0], inputs[0]
    text = _text(kept, [e for e in net.output if e not in gone])
    path, info = opt_einsum.contract_path(text, *shapes, shapes=True, optimize=optimize)
    return path, max(*inputs, int(info.largest_intermediate)), int(info.opt_cost)


@dataclass(frozen=True, eq=False)
class SumOrder:
    """An order in which to sum face spins and intertwiners.

    Attributes
    ----------
    order : tuple of (str, int)
        ``("face", number)`` or ``("edge", number)``.
    width : int
        The most of them in one table on the way.
    entries : int
        Entries of the largest such table, where every face has `values` spins and every edge `size`
        intertwiners.
    """

    order: tuple[tuple[str, int], ...]
    width: int
    entries: int

    def to_dict(self) -> dict[str, Any]:
        """As plain lists."""
        return {"order": [list(x) for x in self.order], "width": self.width, "entries": self.entries}


def sum_order(skeleton: Skeleton, values: int, size: int) -> SumOrder:
    """An order for the whole sum over internal faces and internal edges; the boundary is held fixed.

    Parameters
    ----------
    skeleton : Skeleton
    values : int
        How many spins a face has.
    size : int
        How many intertwiners an edge has; 1 in 3D.
    """
    inner, edges = skeleton.counts["faces_internal"], skeleton.counts["edges_internal"]
    sizes = [values] * inner + [size] * edges
    scopes = []
    for faces, at in zip(skeleton["wedges/face"].tolist(), skeleton["vertices/edge"].tolist(), strict=True):
        scopes.append(frozenset([f for f in faces if f < inner] + [inner + e for e in at if e < edges]))
    for e, faces in enumerate(skeleton["edges/face"][:edges].tolist()):
        scopes.append(frozenset([f for f in faces if f < inner] + [inner + e]))
    order, width = elimination_order(scopes, sizes)
    near: list[set[int]] = [set(s) for s in scopes]
    largest = 1
    for v in order:
        union: set[int] = set().union(*(s for s in near if v in s)) or {v}
        largest = max(largest, prod(sizes[u] for u in union))
        near = [s for s in near if v not in s] + [union - {v}]
    named = tuple(("face", v) if v < inner else ("edge", v - inner) for v in order)
    return SumOrder(named, width, largest)
