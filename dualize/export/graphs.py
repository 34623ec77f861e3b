"""Dual graph and boundary graph as GraphML, node-link JSON and DOT.

The first two hold the graphs of `Skeleton.dual_graph` and `Skeleton.boundary_graph` with all attributes and
give them back.  Vertices are named ``v0``, ``v1``, ..., nodes ``n0``, ``n1``, ...  GraphML has no lists:
there they are JSON text. A dual graph says of every edge which faces pass it and how, but not in which
order a face passes its edges. DOT is for drawing: it keeps numbers, labels and directions only.
"""

from __future__ import annotations

import json
from collections.abc import Callable, Iterable, Iterator, Mapping
from typing import TYPE_CHECKING, Any

from ..errors import InputError
from ..skeleton import Skeleton

if TYPE_CHECKING:
    import networkx

__all__ = [
    "GRAPHS",
    "dot_lines",
    "from_graphml",
    "from_node_link",
    "graph_of",
    "graphml_lines",
    "node_link_lines",
]

GRAPHS = ("dual", "boundary")


def graph_of(skeleton: Skeleton, which: str) -> networkx.MultiDiGraph:
    """The dual graph or the boundary graph of a skeleton."""
    if which not in GRAPHS:
        raise InputError(f"there is no {which!r} graph", hint="known are: " + ", ".join(GRAPHS))
    return skeleton.dual_graph() if which == "dual" else skeleton.boundary_graph()


# -- names -----------------------------------------------------------------------------------------


def _mapped(
    graph: networkx.MultiDiGraph, node: Callable[[Any], Any], value: Callable[[Any], Any]
) -> networkx.MultiDiGraph:
    """The graph with other names of its nodes and other values of its attributes."""
    import networkx

    out = networkx.MultiDiGraph(**graph.graph)
    for name, attributes in graph.nodes(data=True):
        out.add_node(node(name), **{k: value(x) for k, x in attributes.items()})
    for source, target, key, attributes in graph.edges(keys=True, data=True):
        out.add_edge(node(source), node(target), key=key, **{k: value(x) for k, x in attributes.items()})
    return out


def _name(graph: networkx.MultiDiGraph) -> Callable[[Any], str]:
    if graph.graph["kind"] == "dual graph":
        return lambda x: f"n{x[1]}" if isinstance(x, tuple) else f"v{x}"
    return lambda x: f"n{x}"


def _number(graph: networkx.MultiDiGraph) -> Callable[[str], Any]:
    dual = graph.graph.get("kind") == "dual graph"

    def number(name: str) -> Any:
        kind, digits = name[:1], name[1:]
        if not digits.isdecimal() or kind not in ("vn" if dual else "n"):
            raise InputError(f"{name!r} is no name of a vertex or node of such a graph")
        return ("node", int(digits)) if dual and kind == "n" else int(digits)

    return number


def _tuples(value: Any) -> Any:
    return tuple(value) if isinstance(value, list) else value


# -- GraphML ---------------------------------------------------------------------------------------


def graphml_lines(graph: networkx.MultiDiGraph) -> Iterator[bytes]:
    """A graph as GraphML, a line for every node and every edge.

    Written here and not by networkx, which holds the whole text and a second graph in memory: 6 GB for the
    240,000 vertices of a lattice.
    """
    name = _name(graph)
    yield b"<?xml version='1.0' encoding='utf-8'?>\n<graphml xmlns=\"http://graphml.graphdrawing.org/xmlns\">\n"
    keys: dict[tuple[str, str], str] = {}
    first = {
        "graph": graph.graph,
        "node": _all_attributes(attributes for _, attributes in graph.nodes(data=True)),
        "edge": _all_attributes(attributes for *_, attributes in graph.edges(data=True)),
    }
    for kind, attributes in first.items():
        for attribute, value in attributes.items():
            number = keys[kind, attribute] = f"d{len(keys)}"
            width = "long" if isinstance(value, int) else "string"
            yield (
                f'<key id="{number}" for="{kind}" attr.name="{attribute}" attr.type="{width}"/>\n'
            ).encode()

    def data(kind: str, attributes: Mapping[str, Any]) -> str:
        return "".join(
            f'<data key="{keys[kind, attribute]}">{_plain(value)}</data>'
            for attribute, value in attributes.items()
        )

    yield f'<graph edgedefault="directed">{data("graph", graph.graph)}\n'.encode()
    for node, attributes in graph.nodes(data=True):
        yield f'<node id="{name(node)}">{data("node", attributes)}</node>\n'.encode()
    for source, target, key, attributes in graph.edges(keys=True, data=True):
        ends = f'source="{name(source)}" target="{name(target)}" id="{key}"'
        yield f"<edge {ends}>{data('edge', attributes)}</edge>\n".encode()
    yield b"</graph>\n</graphml>\n"


def _all_attributes(rows: Iterable[Mapping[str, Any]]) -> dict[str, Any]:
    """Every attribute that occurs, with one of its values."""
    out: dict[str, Any] = {}
    for row in rows:
        if not row.keys() <= out.keys():
            out.update(row)
    return out


def _plain(value: Any) -> str:
    """A value as XML text; the JSON text of a list escapes what XML cannot hold."""
    from xml.sax.saxutils import escape

    return escape(json.dumps(value) if isinstance(value, tuple) else str(value))


def from_graphml(data: bytes) -> networkx.MultiDiGraph:
    """The graph that `graphml_lines` wrote.

    Raises
    ------
    InputError
        If it is not one.
    """
    from io import BytesIO
    from xml.etree.ElementTree import ParseError

    import networkx

    try:
        flat = networkx.read_graphml(BytesIO(data), edge_key_type=int, force_multigraph=True)
        for defaults in ("node_default", "edge_default"):
            flat.graph.pop(defaults, None)
        number = _number(flat)
        return _mapped(flat, number, lambda x: tuple(json.loads(x)) if isinstance(x, str) else x)
    except (ParseError, networkx.NetworkXError, KeyError, TypeError, ValueError) as error:
        raise InputError(f"this is no GraphML of a foam: {error}") from None


# -- node-link JSON --------------------------------------------------------------------------------


def node_link_lines(graph: networkx.MultiDiGraph) -> Iterator[bytes]:
    """A graph as node-link JSON, a line for every node and every edge.

    An object with ``directed``, ``multigraph``, ``graph``, ``nodes`` (each with ``id``) and ``edges`` (each
    with ``source``, ``target`` and ``key``), as `networkx.node_link_graph` reads it with ``edges="edges"``.
    """
    name = _name(graph)
    head = json.dumps({"directed": True, "multigraph": True, "graph": graph.graph})
    yield (head[:-1] + ', "nodes": [').encode()
    for x, (node, attributes) in enumerate(graph.nodes(data=True)):
        yield ((",\n " if x else "\n ") + json.dumps({"id": name(node), **attributes})).encode()
    yield b'\n], "edges": ['
    for x, (source, target, key, attributes) in enumerate(graph.edges(keys=True, data=True)):
        entry = {"source": name(source), "target": name(target), "key": key, **attributes}
        yield ((",\n " if x else "\n ") + json.dumps(entry)).encode()
    yield b"\n]}\n"


def from_node_link(data: bytes) -> networkx.MultiDiGraph:
    """The graph that `node_link_lines` wrote.

    Raises
    ------
    InputError
        If it is not one.
    """
    import networkx

    try:
        tree = json.loads(data)
        flat = networkx.MultiDiGraph(**tree["graph"])
        for node in tree["nodes"]:
            flat.add_node(node["id"], **{k: x for k, x in node.items() if k != "id"})
        for edge in tree["edges"]:
            ends = edge["source"], edge["target"], edge["key"]
            flat.add_edge(*ends, **{k: x for k, x in edge.items() if k not in ("source", "target", "key")})
        return _mapped(flat, _number(flat), _tuples)
    except (AttributeError, KeyError, RecursionError, TypeError, ValueError) as error:
        raise InputError(f"this is no node-link JSON of a foam: {error!r}") from None


# -- DOT -------------------------------------------------------------------------------------------


def dot_lines(graph: networkx.MultiDiGraph) -> Iterator[bytes]:
    """A graph in the DOT language, for drawing: vertices as circles, nodes as boxes."""
    name = _name(graph)
    dual = graph.graph["kind"] == "dual graph"
    yield f"digraph {'dual' if dual else 'boundary'} {{\n".encode()
    for node, attributes in graph.nodes(data=True):
        shape = "box" if not dual or isinstance(node, tuple) else "circle"
        label = name(node)
        if "corners" in attributes:
            label += "\n" + " ".join(map(str, attributes["corners"]))
        yield f"  {name(node)} [shape={shape}, label={_quoted(label)}];\n".encode()
    for source, target, key, attributes in graph.edges(keys=True, data=True):
        style = ", style=dashed" if attributes["twist"] else ""
        letter = "e" if dual else "l"
        yield f"  {name(source)} -> {name(target)} [label={letter}{key}{style}];\n".encode()
    yield b"}\n"


def _quoted(text: str) -> str:
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"').replace("\n", "\\n") + '"'
