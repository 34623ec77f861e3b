"""Good skeletons to damage, and tools that damage them: single entries, or several tables alike.

A consistent change (cells renumbered, a face reversed in every table) leaves the tables in agreement and
breaks one rule of the conventions only.
"""

from functools import cache

import numpy as np
import reference
from catalogue import CATALOGUE
from reference import Table, glue_by_labels, reference_skeleton
from specimens import (
    GLUED,
    HOLONOMY,
    LABELLED,
    SINGULAR,
    around_ridge,
    disjoint,
    kuhn_torus,
    scrambled,
    simplex,
    sphere,
    twisted_solid_torus,
)

import dualize
from dualize.coloured import from_coloured_edges
from dualize.layout import TABLES, dtype_of, id_dtype, sizes
from dualize.skeleton import Skeleton


def triangulation(table):
    """The package's triangulation of a reference table."""
    k = table.dimension + 1
    carry = [[[-1] * k if p is None else list(p) for p in row] for row in table.carry]
    return dualize.Triangulation.from_gluings(
        table.across, carry, written=table.written, corners=table.corners
    )


def in_words(facets):
    return [[f"corner {x}" for x in facet] for facet in facets]


def with_coordinates():
    points = np.arange(12.0).reshape(4, 3) ** 2
    chart = dualize.Coordinates(point=points, corner=points[None], period=np.array([0.0, 0.0, 9.0]))
    return dualize.Triangulation.from_facets(simplex(3), coordinates=chart)


def coloured():
    """Three simplices in a row, joined by edges of the colours 0 and 1, then 2."""
    return from_coloured_edges(3, [[0, 1, 0], [0, 1, 1], [1, 2, 2]], dimension=3)


# name -> (how to get its triangulation, options of build)
SPECIMENS = {
    "closed orientable 4D": (lambda: dualize.Triangulation.from_facets(sphere(4)), {}),
    "bounded 4D": (lambda: dualize.Triangulation.from_facets(around_ridge(4, 4)), {}),
    "one simplex 4D": (lambda: dualize.Triangulation.from_facets(simplex(4)), {"points": True}),
    "bounded 3D": (lambda: dualize.Triangulation.from_facets(CATALOGUE["solid_torus_7"].facets), {}),
    "bounded non-orientable 3D": (
        lambda: dualize.Triangulation.from_facets(LABELLED["3d-moebius-slab"]),
        {"points": True},
    ),
    "bounded non-orientable 4D": (lambda: dualize.Triangulation.from_facets(twisted_solid_torus(4, 9)), {}),
    "closed non-orientable 2D": (lambda: dualize.Triangulation.from_facets(LABELLED["projective-plane"]), {}),
    "moebius band": (lambda: dualize.Triangulation.from_facets(LABELLED["moebius-band"]), {"points": True}),
    "one triangle glued to itself": (lambda: triangulation(GLUED["2d-moebius-triangle"]), {"points": True}),
    "one tetrahedron glued to itself": (lambda: triangulation(GLUED["3d-snapped-tetrahedron"]), {}),
    "one twisted 4-simplex": (lambda: triangulation(GLUED["4d-twisted-simplex"]), {"points": True}),
    "table with scrambled corners": (
        lambda: triangulation(scrambled(kuhn_torus((2, 1, 1)), seed=5)),
        {"points": True},
    ),
    "labelled table with scrambled corners": (
        lambda: triangulation(scrambled(glue_by_labels(around_ridge(4, 3)), seed=2)),
        {"points": True},
    ),
    "words": (lambda: dualize.Triangulation.from_facets(in_words(around_ridge(3, 3))), {"points": True}),
    "several components": (
        lambda: dualize.Triangulation.from_facets(
            disjoint(sphere(3), twisted_solid_torus(3, 7), simplex(3), around_ridge(3, 3))
        ),
        {},
    ),
    "pinched": (
        lambda: dualize.Triangulation.from_facets(SINGULAR["3d-ring-and-chain"][0]),
        {"keep_singular": True, "points": True},
    ),
    "twins": (
        lambda: dualize.Triangulation.from_facets(SINGULAR["3d-twins-and-more"][0]),
        {"keep_singular": True},
    ),
    "holonomy": (
        lambda: triangulation(HOLONOMY["4d-reflected-triangle"]),
        {"keep_singular": True, "points": True},
    ),
    "coordinates": (with_coordinates, {"points": True}),
    "coloured": (coloured, {}),
}


@cache
def specimen(name):
    make, options = SPECIMENS[name]
    return dualize.build(make(), **options)


# -- putting skeletons together --------------------------------------------------------------------


def remade(skeleton, arrays=None, **changes):
    """The skeleton with some tables, counts, flags or other parts replaced."""
    parts = {
        name: getattr(skeleton, name)
        for name in ("dimension", "counts", "flags", "corner_names", "provenance", "extra")
    }
    for name in ("counts", "flags"):
        parts[name] = {**parts[name], **changes.pop(name, {})}
    parts |= changes
    return Skeleton(arrays={**skeleton.arrays, **(arrays or {})}, **parts)


def without(skeleton, *names, **changes):
    """The skeleton without some tables."""
    whole = remade(skeleton, **changes)
    kept = {name: table for name, table in whole.arrays.items() if name not in names}
    return Skeleton(
        whole.dimension, whole.counts, whole.flags, kept, whole.corner_names, whole.provenance, whole.extra
    )


def with_entry(skeleton, name, index, value):
    """The skeleton with one entry changed."""
    table = skeleton[name].copy()
    table[index] = value
    return remade(skeleton, {name: table})


def by_reference(table, orientation=None, **options):
    """The skeleton that the slow reference writes, or would write with another orientation."""
    kept = reference.orient
    try:
        if orientation is not None:
            reference.orient = lambda t: (list(orientation), kept(t)[1])
        tables = reference_skeleton(table, **options)
    finally:
        reference.orient = kept
    counts, flags = tables.pop("counts"), tables.pop("flags")
    letters = sizes(table.dimension, counts)
    ids = id_dtype(counts)
    arrays = {
        name: np.array(tables[name], dtype=dtype_of(t, ids)).reshape([letters.get(x, x) for x in t.shape])
        for name, t in TABLES.items()
        if name in tables
    }
    return Skeleton(table.dimension, counts, flags, arrays)


# -- consistent changes ----------------------------------------------------------------------------


def renumbered(skeleton, kind, one, two):
    """Two cells of a kind (edge, node, face, link) exchange their numbers in every table."""
    letter = {"edge": "E", "node": "B", "face": "F", "link": "L"}[kind]

    def swapped(numbers):
        return np.where(numbers == one, two, np.where(numbers == two, one, numbers)).astype(numbers.dtype)

    arrays = {}
    for name, array in skeleton.arrays.items():
        table, new = TABLES[name], array.copy()
        if table.kind == kind:
            new = swapped(new)
        if table.kind == "end" and kind == "node":
            new[:, 1] = np.where(new[:, 0] < 0, swapped(new[:, 1]), new[:, 1])
        if table.shape[0] == letter:
            new[[one, two]] = new[[two, one]]
        if kind == "face" and table.shape[0] in ("VS", "ES"):
            offsets = skeleton["faces/vertex_offsets" if table.shape[0] == "VS" else "faces/edge_offsets"]
            here, there = (slice(offsets[f], offsets[f + 1]) for f in (one, two))
            new[here], new[there] = array[there], array[here]
        arrays[name] = new
    return remade(skeleton, arrays)


def turned_ring(skeleton, face, by=1):
    """The list of an internal face begins `by` visits later."""
    arrays = {}
    for name in ("vertex", "wedge", "edge", "edge_sign", "place"):
        table = skeleton[f"faces/{name}"].copy()
        first, last = skeleton["faces/vertex_offsets"][face : face + 2]
        table[first:last] = np.roll(table[first:last], -by)
        arrays[f"faces/{name}"] = table
    return remade(skeleton, arrays)


def reversed_face(skeleton, face):
    """A face listed against its direction, in every table of faces, wedges, edges, nodes and links."""
    s = skeleton
    a = {name: array.copy() for name, array in s.arrays.items()}
    first, last = s["faces/vertex_offsets"][face : face + 2]
    start, end = s["faces/edge_offsets"][face : face + 2]
    external = face >= s.counts["faces_internal"]
    begin = first if external else first + 1  # an internal face still begins at its smallest wedge
    for name in ("faces/vertex", "faces/wedge"):
        a[name][begin:last] = s[name][begin:last][::-1]
    for name in ("faces/edge", "faces/edge_sign", "faces/place"):
        a[name][start:end] = s[name][start:end][::-1]
    a["faces/edge_sign"][start:end] *= -1
    a["edges/face_sign"][s["edges/face"] == face] *= -1
    a["wedges/direction"][s["wedges/face"] == face] *= -1
    inside = a["faces/edge"][start:end] < s.counts["edges_internal"]
    a["faces/against"][face] = int((a["faces/edge_sign"][start:end][inside] < 0).sum()) % 2
    if external:
        link = face - s.counts["faces_internal"]
        a["nodes/link_leaves"][s["nodes/link"] == link] *= -1
        a["links/source"][link], a["links/target"][link] = s["links/target"][link], s["links/source"][link]
    return remade(s, a)


def reversed_edge(skeleton, edge):
    """An edge that runs the other way, in every table."""
    s = skeleton
    a = {name: array.copy() for name, array in s.arrays.items()}
    for one, two in (("edges/source", "edges/target"), ("edges/source_corner", "edges/target_corner")):
        a[one][edge], a[two][edge] = s[two][edge], s[one][edge]
    a["vertices/leaves"][s["vertices/edge"] == edge] *= -1
    a["edges/face_sign"][edge] *= -1
    a["faces/edge_sign"][s["faces/edge"] == edge] *= -1
    if edge < s.counts["edges_internal"]:
        for face in s["edges/face"][edge]:  # a face that meets the edge twice changes twice
            a["faces/against"][face] ^= 1
    else:
        a["nodes/orientation"][edge - s.counts["edges_internal"]] *= -1
    return remade(s, a)


def unlabelled_table(facets):
    table = glue_by_labels(facets)
    return Table(table.across, table.carry, table.written)


def cut_ring(skeleton, face, length):
    """An internal face of a closed skeleton ends after `length` visits; the rest becomes the last face."""
    s, new = skeleton, skeleton.counts["faces_internal"]
    first, last = s["faces/vertex_offsets"][face : face + 2]
    rest, after = slice(first + length, last), slice(last, None)
    a = {name: array.copy() for name, array in s.arrays.items()}
    for name in ("vertex", "wedge", "edge", "edge_sign", "place"):
        table = s[f"faces/{name}"]
        a[f"faces/{name}"] = np.concatenate([table[: first + length], table[after], table[rest]])
    lengths = [*np.diff(s["faces/vertex_offsets"]), last - first - length]
    lengths[face] = length
    for name in ("faces/vertex_offsets", "faces/edge_offsets"):
        a[name] = np.concatenate([[0], np.cumsum(lengths)]).astype(np.int64)
    a["wedges/face"][s["faces/vertex"][rest], s["faces/wedge"][rest]] = new
    a["edges/face"][s["faces/edge"][rest], s["faces/place"][rest]] = new
    against = int((s["faces/edge_sign"][rest] < 0).sum()) % 2
    a["faces/against"] = np.append(s["faces/against"], against).astype(np.int8)
    a["faces/against"][face] ^= against
    return remade(s, a, counts={"faces_internal": new + 1})
