"""The layout of a foam skeleton as data: every table's name, shape, kind and meaning, said once.

The prose of the conventions is `data/layout.md` (``dualize spec``); this module is what programs read.
Shapes are written with the letters

    V vertices   E edges   F faces   B nodes   L links   D dimension   K = D + 1   W = D (D + 1) / 2
    VS, ES       total number of vertex and edge visits of all faces
    P points     A axes of the coordinates

and kinds name the width and the range of the entries:

    vertex, edge, face, node, link, ...   ids, int32 while every id is below 2**31, else int64
    offset, label                         int64
    the rest                              int8, but for coordinates (float64)
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

__all__ = ["FORMAT", "ID_KINDS", "TABLES", "VERSION", "Table", "dtype_of", "id_dtype", "sizes", "wedge_pairs"]

FORMAT = "foam-skeleton"
VERSION = 1


class Table(NamedTuple):
    """One array of the layout."""

    name: str
    shape: tuple[str | int, ...]
    kind: str
    presence: str  # "always", "labels" (labelled input only), "singular", "coloured", or "asked"
    meaning: str


TABLES: dict[str, Table] = {
    t.name: t
    for t in [
        Table("vertices/corners", ("V", "K"), "label", "labels", "labels of the corners in local order"),
        Table("vertices/orientation", ("V",), "sign", "always", "+1 or -1"),
        Table("vertices/component", ("V",), "component", "always", "component, numbered by smallest vertex"),
        Table("vertices/edge", ("V", "K"), "edge", "always", "edge at each slot"),
        Table("vertices/leaves", ("V", "K"), "sign", "always", "+1 the edge begins here, -1 it ends here"),
        Table("wedges/face", ("V", "W"), "face", "always", "face through wedge (i, j)"),
        Table("wedges/direction", ("V", "W"), "sign", "always", "+1 the face passes from i to j, -1 back"),
        Table("edges/source", ("E", 2), "end", "always", "(vertex, slot) or (-1, node)"),
        Table("edges/target", ("E", 2), "end", "always", "(vertex, slot) or (-1, node)"),
        Table("edges/twist", ("E",), "bit", "always", "1 where both ends cannot be oriented alike"),
        Table("edges/face", ("E", "D"), "face", "always", "the face at each place"),
        Table("edges/face_sign", ("E", "D"), "sign", "always", "+1 the face runs along the edge, -1 against"),
        Table("edges/source_corner", ("E", "D"), "corner", "always", "source corner at each place, or -1"),
        Table("edges/target_corner", ("E", "D"), "corner", "always", "target corner at each place, or -1"),
        Table("faces/vertex_offsets", ("F+1",), "offset", "always", "where each face's vertices begin"),
        Table("faces/vertex", ("VS",), "vertex", "always", "vertices of each face in order"),
        Table("faces/wedge", ("VS",), "wedge", "always", "the wedge at each visit"),
        Table("faces/edge_offsets", ("F+1",), "offset", "always", "where each face's edges begin"),
        Table("faces/edge", ("ES",), "edge", "always", "edges of each face in order"),
        Table("faces/edge_sign", ("ES",), "sign", "always", "+1 along the edge, -1 against"),
        Table("faces/place", ("ES",), "place", "always", "the place of the face at each visit of an edge"),
        Table("faces/singular", ("F",), "singular", "singular", "0 regular, 1 holonomy, 2 pinched, 3 both"),
        Table("faces/against", ("F",), "bit", "always", "internal edges run against, mod 2"),
        Table("nodes/edge", ("B",), "edge", "always", "the external edge of each node"),
        Table("nodes/vertex", ("B",), "vertex", "always", "the vertex at its other end"),
        Table("nodes/slot", ("B",), "slot", "always", "the slot there"),
        Table("nodes/orientation", ("B",), "sign", "always", "+1 the edge runs to the node, -1 from it"),
        Table("nodes/component", ("B",), "boundary", "always", "boundary component, by smallest node"),
        Table("nodes/link", ("B", "D"), "link", "always", "link at each place"),
        Table("nodes/link_leaves", ("B", "D"), "sign", "always", "+1 the link starts here, -1 it ends here"),
        Table("nodes/corners", ("B", "D"), "label", "labels", "labels in reference order"),
        Table("links/source", ("L",), "node", "always", "node at which the link starts"),
        Table("links/target", ("L",), "node", "always", "node at which the link ends"),
        Table("links/face", ("L",), "face", "always", "the external face"),
        Table("links/twist", ("L",), "bit", "always", "twists along the external face, mod 2"),
        Table("links/corners", ("L", "D-1"), "label", "labels", "labels of the ridge, ascending"),
        Table("vertices/point", ("V", "K"), "point", "asked", "class of the triangulation's vertices"),
        Table("vertices/segment", ("V", "W"), "segment", "asked", "class of each 1-simplex, pairs in order"),
        Table("vertices/segment_sign", ("V", "W"), "segment_sign", "asked", "+1, -1 against the first, or 0"),
        Table("colours/edge", ("E",), "slot", "coloured", "colour of each edge: the slot at either end"),
        Table("colours/face", ("F", 2), "slot", "coloured", "the two colours of each face, ascending"),
        Table("coordinates/point", ("P", "A"), "coordinate", "asked", "one chart for all"),
        Table("coordinates/corner", ("V", "K", "A"), "coordinate", "asked", "one chart per simplex"),
        Table("coordinates/period", ("A",), "coordinate", "asked", "period of each axis, 0 = none"),
    ]
}

# Tables whose entries number cells and so have the id width.
ID_KINDS = frozenset(
    ["vertex", "edge", "face", "node", "link", "end", "component", "boundary", "point", "segment"]
)

COUNTS = (
    "vertices",
    "edges_internal",
    "edges_external",
    "faces_internal",
    "faces_external",
    "nodes",
    "links",
    "components",
)
FLAGS = ("orientable", "ordered", "singular")


def sizes(dimension: int, counts: dict[str, int]) -> dict[str, int]:
    """The letters of the shapes as numbers, as far as `counts` determines them."""
    d = dimension
    faces = counts["faces_internal"] + counts["faces_external"]
    return {
        "V": counts["vertices"],
        "E": counts["edges_internal"] + counts["edges_external"],
        "F": faces,
        "F+1": faces + 1,
        "B": counts["nodes"],
        "L": counts["links"],
        "D": d,
        "D-1": d - 1,
        "K": d + 1,
        "W": d * (d + 1) // 2,
        # every wedge is visited once; an external face has one edge more than vertices
        "VS": counts["vertices"] * (d * (d + 1) // 2),
        "ES": counts["vertices"] * (d * (d + 1) // 2) + counts["faces_external"],
    }


def id_dtype(counts: dict[str, int]) -> np.dtype:
    """Width of the ids: int32 while every id of these counts is below 2**31, else int64."""
    largest = max(
        counts["vertices"],
        counts["edges_internal"] + counts["edges_external"],
        counts["faces_internal"] + counts["faces_external"],
    )
    return np.dtype(np.int32 if largest <= 2**31 else np.int64)


def dtype_of(table: Table, ids: np.dtype) -> np.dtype:
    """Width of the entries of `table` where ids have the width `ids`."""
    if table.kind in ID_KINDS:
        return ids
    if table.kind in ("offset", "label"):
        return np.dtype(np.int64)
    if table.kind == "coordinate":
        return np.dtype(np.float64)
    return np.dtype(np.int8)


def wedge_pairs(dimension: int) -> list[tuple[int, int]]:
    """The slot pairs (i, j), i < j, in the order in which the wedges of a simplex are numbered."""
    k = dimension + 1
    return [(i, j) for i in range(k) for j in range(i + 1, k)]
