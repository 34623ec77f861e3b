"""Coloured graphs as CSV: a row for each edge.

    source,target,colour
    0,1,0
    0,1,1

Every vertex is a simplex, an edge of colour `c` glues the facets opposite corner `c`; see
`dualize.coloured`. Vertices are integers or words; simplices are numbered in ascending order of integers,
else in the order in which the words occur.  A row with a source only (``7,,``) names a vertex without
edges.  The header may say ``color``; ``#`` begins a comment.

The largest colour tells the dimension, so a graph in which no edge has it cannot be written; labels,
coordinates and orientation signs are not written.
"""

from __future__ import annotations

import numpy as np

from ..coloured import colour_number, coloured_edges, from_coloured_edges, order_of_vertices
from ..errors import InputError
from ..triangulation import Triangulation
from .registry import Content, Format, Options, dropping
from .source import Source
from .table import all_integers, cells, header_of, line_of, rows_of
from .target import Target

__all__ = ["DROPS", "FORMAT", "note_absent"]

DROPS = dropping("the labels", "the coordinates", "the orientation signs")

HEADERS = (["source", "target", "colour"], ["source", "target", "color"])


def sniff(head: bytes) -> bool:
    """The header."""
    return header_of(head) in HEADERS


def read(source: Source, options: Options) -> tuple[Content, str]:
    """Read a coloured graph."""
    data = source.take()
    rows = all_integers(data, 3) if header_of(data) in HEADERS else None
    t = _of_words(data) if rows is None else _of_integers(data, rows)
    note_absent(t, options)
    return t, "CSV, coloured graph"


def _of_integers(data: bytes, rows: np.ndarray) -> Triangulation:
    names, ends = np.unique(rows[:, :2], return_inverse=True)
    edges = np.column_stack([ends.reshape(-1, 2), rows[:, 2]])
    return from_coloured_edges(
        len(names),
        edges,
        name=lambda vertex: str(names[vertex]),
        place=lambda row: f"line {line_of(data, row)}: {cells(data, row)}",
    )


def _of_words(data: bytes) -> Triangulation:
    seen: dict[str, None] = {}
    edges: list[tuple[str, str, int]] = []
    lines: list[str] = []
    for number, (line, row) in enumerate(rows_of(data)):
        place = f"line {line}: {','.join(row)[:80]}"
        if number == 0:
            if [x.lower() for x in row] not in HEADERS:
                raise InputError(
                    "the first line is no header of a coloured graph", place, "it reads source,target,colour"
                )
            continue
        if len(row) != 3 or not row[0] or bool(row[1]) != bool(row[2]):
            raise InputError(
                "a row holds two vertices and a colour", place, "or one vertex alone, which has no edges: 7,,"
            )
        seen[row[0]] = None
        if row[1]:
            seen[row[1]] = None
            edges.append((row[0], row[1], colour_number(row[2], place)))
            lines.append(place)
    names, at = order_of_vertices(list(seen))
    rows = np.array([(at[a], at[b], c) for a, b, c in edges], dtype=np.int64)
    return from_coloured_edges(len(names), rows, name=names.__getitem__, place=lines.__getitem__)


def note_absent(t: Triangulation, options: Options) -> None:
    """Say which colours no edge has: a slip in counting colours from 1 would show like this."""
    absent = np.flatnonzero((t.across < 0).all(axis=0)).tolist()
    if absent:
        options.notes(
            f"no edge has colour {', '.join(map(str, absent))}: each simplex has a boundary facet there "
            f"(the colours are 0 to {t.dimension})"
        )


# -- writing ---------------------------------------------------------------------------------------


def write(content: Content, target: Target) -> None:
    """Write a coloured graph."""
    if not isinstance(content, Triangulation):
        raise InputError("a skeleton is no coloured graph", hint="write .json, .h5 or .npz")
    edges = coloured_edges(content)
    if not (edges[:, 2] == content.dimension).any():
        raise InputError(
            f"no edge has colour {content.dimension}, so the rows would not tell the dimension",
            hint="write GraphML, or a gluing table",
        )
    target.stream.write(b"source,target,colour\n")
    lonely = np.flatnonzero((content.across < 0).all(axis=1)).tolist()
    target.stream.write("".join(f"{v},,\n" for v in lonely).encode())
    for lo in range(0, len(edges), 1 << 16):
        block = edges[lo : lo + (1 << 16)].tolist()
        target.stream.write("".join(f"{a},{b},{c}\n" for a, b, c in block).encode())


def suits(content: Content) -> bool:
    """A triangulation that was given as a coloured graph."""
    return isinstance(content, Triangulation) and content.coloured


FORMAT = Format(
    name="coloured-csv",
    suffixes=(".csv",),
    holds="a coloured graph, a row for each edge",
    sniff=sniff,
    read=read,
    write=write,
    packed=True,
    suits=suits,
    drops=DROPS,
)
