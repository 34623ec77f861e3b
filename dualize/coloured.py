"""Coloured graphs: the graphs of coloured tensor models and of crystallisations, as triangulations and back.

In a (D + 1)-coloured graph every vertex is a simplex of dimension D whose corners have the colours
``0 .. D``, and an edge of colour `c` glues the two facets opposite corner `c` so that the corners keep their
colours.  At every vertex there is at most one edge of each colour; a vertex without an edge of colour `c` has
a boundary facet there.  So a coloured graph is a gluing table in which every carrying permutation is the
identity.

         0
      ┌──1──┐      two vertices joined by edges of the colours 0, 1, 2: two triangles glued along all
    s ┼──2──┼ t    three sides, a sphere.  Its points are the connected sub-graphs of two colours.

    graph           vertex     edge     connected sub-graph of n colours
    triangulation   simplex    facet    simplex with D + 1 - n corners; of two colours: a ridge

(R. Gurau, Colored group field theory, Commun. Math. Phys. 304 (2011) 69-93; M. Ferri, C. Gagliardi,
L. Grasselli, A graph-theoretical representation of PL-manifolds, Aequationes Math. 31 (1986) 121-141.  Both
from memory.)
"""

from __future__ import annotations

import re
from collections.abc import Callable, Hashable, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from .errors import InputError
from .triangulation import Triangulation

if TYPE_CHECKING:
    import networkx

__all__ = [
    "coloured_edges",
    "coloured_graph",
    "from_coloured_edges",
    "from_coloured_graph",
    "order_of_vertices",
]

INTEGER = re.compile(r"[+-]?[0-9]{1,18}", re.ASCII)
ATTRIBUTES = ("colour", "color")


def from_coloured_edges(
    vertices: int,
    edges: np.ndarray | Sequence[Sequence[int]],
    *,
    dimension: int | None = None,
    name: Callable[[int], str] = str,
    place: Callable[[int], str] | None = None,
) -> Triangulation:
    """The triangulation of a coloured graph with vertices ``0 .. vertices - 1``.

    Parameters
    ----------
    vertices : int
    edges : array_like of int, shape (M, 3)
        Two vertices and a colour in each row.
    dimension : int, optional
        D, where the graph has the colours ``0 .. D``; by default the largest colour of an edge.
    name : callable, optional
        How an error names a vertex.
    place : callable, optional
        How an error names a row of `edges`.

    Returns
    -------
    Triangulation
        With ``coloured`` set: simplex `v` is vertex `v`, its corner `c` has colour `c`.

    Raises
    ------
    InputError
        Naming the first loop, unknown colour, or vertex with two edges of one colour.

    Examples
    --------
    Two vertices joined by edges of all colours are a sphere:

    >>> t = from_coloured_edges(2, [[0, 1, c] for c in range(5)])
    >>> t
    <Triangulation 4D: 2 simplices, coloured, 0 boundary facets>
    """
    rows = np.asarray(edges, dtype=np.int64).reshape(-1, 3)
    source, target, colour = rows[:, 0], rows[:, 1], rows[:, 2]
    if vertices < 1:
        raise InputError("the graph has no vertex", hint="every vertex is a simplex; give at least one")

    def where(row: int) -> str:
        a, b, c = rows[row].tolist()
        return place(row) if place else f"edge {row}: {name(a)} - {name(b)}, colour {c}"

    def refuse(bad: Any, what: str, hint: str) -> None:
        if len(found := np.flatnonzero(bad)):
            more = f" and {len(found) - 1} more" if len(found) > 1 else ""
            raise InputError(what, where(int(found[0])) + more, hint)

    refuse(
        ((rows[:, :2] < 0) | (rows[:, :2] >= vertices)).any(axis=1),
        "an edge ends at a vertex that does not exist",
        f"vertices are numbered 0 to {vertices - 1}",
    )
    if dimension is None:
        dimension = int(colour.max(initial=0))
        if dimension < 2:
            raise InputError(
                "the edges do not tell the dimension: no edge has a colour above 1",
                hint="say how many colours there are: dimension D means the colours 0 to D",
            )
        dimension = min(dimension, 4)
    elif dimension not in (2, 3, 4):
        raise InputError(f"the dimension is {dimension}, not 2, 3 or 4")
    refuse(
        (colour < 0) | (colour > dimension),
        f"there is no such colour in dimension {dimension}",
        f"the colours of {dimension}-simplices are 0 to {dimension}",
    )
    refuse(
        source == target, "an edge is a loop", "it would glue a facet to itself; a boundary facet has no edge"
    )
    k = dimension + 1
    ends = np.concatenate([source * k + colour, target * k + colour])
    order = np.argsort(ends, kind="stable")
    again = np.flatnonzero(ends[order][1:] == ends[order][:-1])
    if len(again):
        vertex, c = divmod(int(ends[order[again[0]]]), k)
        one, two = sorted(int(x) % len(rows) for x in order[again[0] : again[0] + 2])
        more = f" and {len(again) - 1} more" if len(again) > 1 else ""
        raise InputError(
            f"vertex {name(vertex)} has two edges of colour {c}",
            f"{where(one)}; {where(two)}{more}",
            "a facet is glued to one other; a vertex has at most one edge of each colour",
        )
    across = np.full((vertices, k), -1, dtype=np.int32 if vertices < 2**31 else np.int64)
    across.ravel()[ends] = np.concatenate([target, source])
    return Triangulation(
        across=across,
        rank=np.zeros(across.shape, dtype=np.uint8),
        written=np.ones(vertices, dtype=np.int8),
        coloured=True,
    )


def coloured_edges(triangulation: Triangulation) -> np.ndarray:
    """The edges of a coloured graph: int64, shape (M, 3), rows ``source < target, colour``, ascending.

    Raises
    ------
    InputError
        If a gluing does not keep the colours of the corners.
    """
    t = triangulation
    if not t.keeps_colours:
        s, i = np.argwhere((t.across >= 0) & (t.rank != 0))[0].tolist()
        raise InputError(
            "this is no coloured graph: a gluing does not keep the colours of the corners",
            f"simplex {s}, slot {i}: corners go to {t.carry[s, i].tolist()}",
            "subdivide it barycentrically: then the dimensions of the simplices are colours",
        )
    source, colour = np.nonzero(t.across > np.arange(len(t))[:, None])
    return np.stack([source, t.across[source, colour].astype(np.int64), colour], axis=1)


def coloured_graph(triangulation: Triangulation) -> networkx.MultiGraph:
    """The coloured graph of a triangulation whose gluings keep colours.

    Returns
    -------
    networkx.MultiGraph
        Nodes ``0 .. N - 1``; edges with the attribute ``colour``, which is their key too; the graph has the
        attribute ``dimension``.

    Raises
    ------
    InputError
        If a gluing does not keep the colours of the corners.
    """
    import networkx

    edges = coloured_edges(triangulation)
    graph = networkx.MultiGraph(dimension=triangulation.dimension)
    graph.add_nodes_from(range(len(triangulation)))
    graph.add_edges_from((a, b, c, {"colour": c}) for a, b, c in edges.tolist())
    return graph


def from_coloured_graph(graph: networkx.Graph, *, dimension: int | None = None) -> Triangulation:
    """The triangulation of a coloured graph.

    Parameters
    ----------
    graph : networkx graph
        Edges have an attribute ``colour`` (or ``color``), an integer from 0; directions do not count.  Where
        all nodes are integers, simplices are numbered in their ascending order, else in that of the graph.
    dimension : int, optional
        D, where the colours are ``0 .. D``; by default the graph's attribute ``dimension``, else the largest
        colour of an edge.

    Returns
    -------
    Triangulation
        With ``coloured`` set.

    Raises
    ------
    InputError
        Naming the first loop, missing or unknown colour, or vertex with two edges of one colour.

    Examples
    --------
    >>> import networkx
    >>> g = networkx.MultiGraph()
    >>> g.add_edges_from(("white", "black", {"colour": c}) for c in range(4))
    [0, 1, 2, 3]
    >>> from_coloured_graph(g)
    <Triangulation 3D: 2 simplices, coloured, 0 boundary facets>
    """
    names, number = order_of_vertices(list(graph.nodes))
    rows = []
    for a, b, data in graph.edges(data=True):
        given = [data[key] for key in ATTRIBUTES if key in data]
        if len(given) != 1:
            what = "an edge has no colour" if not given else "an edge has both a colour and a color"
            raise InputError(
                what, f"edge {a} - {b}", "give each edge the attribute colour, an integer from 0"
            )
        rows.append((number[a], number[b], colour_number(given[0], f"edge {a} - {b}")))
    if dimension is None and "dimension" in graph.graph:
        dimension = colour_number(graph.graph["dimension"], "the graph's attribute dimension")
    return from_coloured_edges(
        len(names), np.array(rows, dtype=np.int64), dimension=dimension, name=lambda v: str(names[v])
    )


def order_of_vertices(names: Sequence[Hashable]) -> tuple[list, dict]:
    """Different names in the order of their simplices: ascending where all are integers, else as they come.

    Returns
    -------
    names : list
    number : dict
        From name to number.
    """
    if all(isinstance(x, int | np.integer) or (isinstance(x, str) and INTEGER.fullmatch(x)) for x in names):
        names = sorted(names, key=_integer)
    return list(names), {name: number for number, name in enumerate(names)}


def _integer(name: Hashable) -> int:
    return int(str(name))


def colour_number(value: Any, where: str) -> int:
    """A colour as an integer, from an integer or text.

    Raises
    ------
    InputError
    """
    if isinstance(value, int | np.integer) and not isinstance(value, bool):
        return min(max(int(value), -1), 2**31)  # far off is as wrong as near by
    if isinstance(value, str) and INTEGER.fullmatch(value.strip()):
        return int(value)
    raise InputError(f"the colour {value!r} is no integer", where, "the colours of D-simplices are 0 to D")
