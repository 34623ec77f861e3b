"""Coloured graphs as GraphML: edges with an attribute ``colour`` (or ``color``), an integer from 0.

Every vertex is a simplex, an edge of colour `c` glues the facets opposite corner `c`; see
`dualize.coloured`. Simplices are numbered in ascending order of the ids where all are integers, else in the
order of the nodes in the file.  An attribute ``dimension`` of the graph tells the dimension, else the
largest colour does.  Directions of edges do not count, other attributes are not read.

The file is read with the standard library's parser, not with networkx: that makes up a vertex where an edge
names one that does not exist, and joins edges of the same id.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from ..coloured import ATTRIBUTES, colour_number, coloured_edges, from_coloured_edges, order_of_vertices
from ..errors import InputError
from ..triangulation import Triangulation
from .coloured_csv import DROPS, note_absent
from .registry import Content, Format, Options
from .source import Source
from .target import Target

if TYPE_CHECKING:
    from xml.etree import ElementTree

__all__ = ["FORMAT"]

OPENING = """<?xml version="1.0" encoding="UTF-8"?>
<graphml xmlns="http://graphml.graphdrawing.org/xmlns">
  <key id="dimension" for="graph" attr.name="dimension" attr.type="int"/>
  <key id="colour" for="edge" attr.name="colour" attr.type="int"/>
  <graph edgedefault="undirected">
    <data key="dimension">{}</data>
"""
EDGE = '    <edge source="{}" target="{}"><data key="colour">{}</data></edge>\n'


def sniff(head: bytes) -> bool:
    """An XML file whose first bytes hold the element graphml."""
    return head.removeprefix(b"\xef\xbb\xbf").lstrip().startswith(b"<") and b"<graphml" in head


def read(source: Source, options: Options) -> tuple[Content, str]:
    """Read a coloured graph."""
    from xml.etree import ElementTree

    try:
        root = ElementTree.fromstring(source.take())
    except ElementTree.ParseError as error:
        line, column = error.position
        what = str(error).split(":")[0]
        place = f"line {line}, column {column + 1}"
        raise InputError(f"this is no XML: {what}", place, "is the file whole?") from None
    graphs = [x for x in root if _tag(x) == "graph"]
    if _tag(root) != "graphml" or len(graphs) != 1:
        raise InputError(f"it holds {len(graphs)} graphs, not one", hint="write one coloured graph in a file")
    keys: dict[tuple[str, str], list[tuple[str, str | None]]] = {}  # (element, attribute): ids and defaults
    for key in root:
        if _tag(key) == "key":
            default = next((x.text for x in key if _tag(x) == "default"), None)
            for kind in ("edge", "graph") if key.get("for") == "all" else (key.get("for", ""),):
                keys.setdefault((kind, key.get("attr.name", "")), []).append((key.get("id", ""), default))

    def values(element: ElementTree.Element, kind: str, name: str) -> list[str]:
        found = []
        for wanted, default in keys.get((kind, name), []):
            given = [x.text or "" for x in element if _tag(x) == "data" and x.get("key") == wanted]
            found += given or ([default] if default is not None else [])
        return found

    ids: dict[str, None] = {}
    edges: list[tuple[str, str, int]] = []
    places: list[str] = []
    for element in graphs[0]:
        tag = _tag(element)
        if tag == "node":
            name = _attribute(element, "id", "a node")
            if name in ids:
                raise InputError("two nodes have the same id", f"node {name}")
            if any(_tag(x) == "graph" for x in element):
                raise InputError("a node holds a graph of its own", f"node {name}", "write one plain graph")
            ids[name] = None
        elif tag == "edge":
            a, b = (_attribute(element, end, f"edge {len(edges)}") for end in ("source", "target"))
            place = f"edge {len(edges)}: {a} - {b}"
            given = [x for name in ATTRIBUTES for x in values(element, "edge", name)]
            if len(given) != 1:
                what = "an edge has no colour" if not given else "an edge has more than one colour"
                raise InputError(what, place, "give every edge the attribute colour, an integer from 0")
            edges.append((a, b, colour_number(given[0], place)))
            places.append(f"{place}, colour {edges[-1][2]}")
        elif tag == "hyperedge":
            raise InputError("it holds a hyperedge, and coloured graphs have none")
    for (a, b, _), place in zip(edges, places, strict=True):
        for name in (a, b):
            if name not in ids:
                raise InputError(f"there is no node {name}", place, "is its name spelt as in its node?")
    names, at = order_of_vertices(list(ids))
    stated = values(graphs[0], "graph", "dimension")
    t = from_coloured_edges(
        len(names),
        np.array([(at[a], at[b], c) for a, b, c in edges], dtype=np.int64),
        dimension=colour_number(stated[0], "the graph's attribute dimension") if stated else None,
        name=names.__getitem__,
        place=places.__getitem__,
    )
    note_absent(t, options)
    return t, "GraphML, coloured graph"


def _tag(element: ElementTree.Element) -> str:
    """The element's name without its namespace."""
    return str(element.tag).rpartition("}")[2]


def _attribute(element: ElementTree.Element, name: str, place: str) -> Any:
    value = element.get(name)
    if value is None:
        raise InputError(f"the attribute {name} is missing", place)
    return value


# -- writing ---------------------------------------------------------------------------------------


def write(content: Content, target: Target) -> None:
    """Write a coloured graph."""
    if not isinstance(content, Triangulation):
        raise InputError("a skeleton is no coloured graph", hint="write .json, .h5 or .npz")
    edges = coloured_edges(content).tolist()
    target.stream.write(OPENING.format(content.dimension).encode())
    for lo in range(0, len(content), 1 << 16):
        nodes = range(lo, min(len(content), lo + (1 << 16)))
        target.stream.write("".join(f'    <node id="{v}"/>\n' for v in nodes).encode())
    for lo in range(0, len(edges), 1 << 16):
        target.stream.write("".join(EDGE.format(*edge) for edge in edges[lo : lo + (1 << 16)]).encode())
    target.stream.write(b"  </graph>\n</graphml>\n")


def suits(content: Content) -> bool:
    """A triangulation: no other format of the suffix holds one."""
    return isinstance(content, Triangulation)


FORMAT = Format(
    name="coloured-graphml",
    suffixes=(".graphml",),
    holds="a coloured graph",
    sniff=sniff,
    read=read,
    write=write,
    packed=True,
    suits=suits,
    drops=DROPS,
)
