"""From a triangulation to its foam skeleton: orient, edges, faces, boundary, each step one call.

The rules are those of ``dualize spec``; the numbering of every cell is fixed by them, so the result is the
same on every run and for every number of threads.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import NamedTuple

import numpy as np

from .errors import TriangulationError
from .kernels import Engine, engine
from .kernels.classes import join_pairs, join_points, join_segments, number_classes, number_segments
from .kernels.faces import (
    fill_edge_faces,
    label_nodes,
    label_ridges,
    pack_rows,
    place_faces,
    walk_ridges,
)
from .kernels.orient import count_edges, fill_edges, spread_orientation
from .kernels.permutations import Permutations, permutations_of
from .kernels.repeats import mix_ridges
from .layout import id_dtype, wedge_pairs
from .memory import check_memory
from .skeleton import Skeleton
from .triangulation import SHOWN, Triangulation

__all__ = ["build"]

WEIGHED_FROM = 100_000  # simplices from which memory is estimated before the work


def build(
    triangulation: Triangulation,
    *,
    keep_singular: bool = False,
    points: bool = False,
    any_size: bool = False,
    threads: int | None = None,
) -> Skeleton:
    """The oriented dual two-complex of a triangulation, with its boundary graph.

    Parameters
    ----------
    triangulation : Triangulation
        Of dimension 2, 3 or 4; closed or bounded, orientable or not, connected or not.
    keep_singular : bool
        Build also where a ridge has a holonomy, or, in labelled input, where two simplices have the same
        labels or a ridge is pinched; recorded in ``faces/singular``.
    points : bool
        Add the classes of the triangulation's own vertices and 1-simplices: ``vertices/point``,
        ``vertices/segment`` and ``vertices/segment_sign``.
    any_size : bool
        Begin even if there does not seem to be enough memory.
    threads : int, optional
        At most so many threads; the result does not depend on it.

    Raises
    ------
    TriangulationError
        If the complex is singular in one of these ways and `keep_singular` is false; the places are named.
    LimitError
        If there is not enough memory, with the figures, unless `any_size`.

    Notes
    -----
    Takes time and memory in proportion to the number of simplices.  Singular simplices of lower dimension
    (vertex links that are no spheres, and so on) are built without a word: the audit tells.

    Examples
    --------
    >>> from dualize import Triangulation, build
    >>> build(Triangulation.from_facets([[0, 1, 2, 3, 4]]))
    <Skeleton 4D: 1 vertices, 0+5 edges, 0+10 faces, 5 nodes, 10 links, 1 component(s)>
    """
    t = triangulation
    if not any_size and len(t) >= WEIGHED_FROM:
        check_memory(len(t), int((t.across < 0).sum()), t.dimension, t.corners is not None)
    work = _Work(t, engine(len(t), threads))
    twins = _twins(t)
    if len(twins) and not keep_singular:
        raise _refuse(
            "two simplices have the same labels",
            [f"simplices {s} and {t.across[s, 0]}: {_labels(t, t.corners[s])}" for s in twins[:SHOWN]],  # type: ignore[index]
            len(twins),
        )
    orientation, component, parts = _orient(work)
    edges = _edges(work, orientation)
    faces = _faces(work, orientation, edges)
    singular = _singular(work, faces, keep_singular)
    boundary = _boundary(work, edges, faces)

    v, interior, nodes = len(t), edges.interior, len(edges.arrays["nodes/vertex"])
    external = len(faces.twists) - faces.internal
    counts = {
        "vertices": v,
        "edges_internal": interior,
        "edges_external": nodes,
        "faces_internal": faces.internal,
        "faces_external": external,
        "nodes": nodes,
        "links": external,
        "components": parts,
    }
    orientable = np.ones(parts, dtype=bool)
    source = edges.arrays["edges/source"][:interior]
    orientable[component[source[edges.arrays["edges/twist"][:interior] == 1, 0]]] = False
    kept = bool(len(twins)) or singular is not None
    flags = {"orientable": orientable.tolist(), "ordered": edges.ordered, "singular": kept}

    tables = {
        "vertices/orientation": orientation,
        "vertices/component": component,
        **edges.arrays,
        **faces.arrays,
        **boundary,
    }
    if t.corners is not None:
        tables["vertices/corners"] = t.corners
    if kept:
        tables["faces/singular"] = (
            np.zeros(len(faces.twists), dtype=np.int8) if singular is None else singular
        )
    if points:
        tables |= _points(work)
    if t.coloured:
        tables |= _colours(work, tables)
    if t.coordinates is not None:
        for name in ("point", "corner", "period"):
            if (array := getattr(t.coordinates, name)) is not None:
                tables[f"coordinates/{name}"] = array
    ids = id_dtype(counts)
    return Skeleton(
        dimension=t.dimension,
        counts=counts,
        flags=flags,
        arrays=_in_layout_order(tables, ids),
        corner_names=t.corner_names,
        extra={} if t.refined_from is None else {"refined_from/simplex": t.refined_from},
    )


class _Work:
    """What every step needs: the triangulation as flat arrays, its permutations, and the engine."""

    def __init__(self, t: Triangulation, run: Engine) -> None:
        self.t = t
        self.run = run
        self.n = len(t)
        self.d = t.dimension
        self.k = t.dimension + 1
        self.w = self.k * self.d // 2
        self.axes = tuple(range(self.k))
        self.across = t.across.ravel()
        self.rank = t.rank.ravel()
        self.tables: Permutations = permutations_of(t.dimension)
        self.image = self.tables.image.ravel()
        self.slots = np.array(wedge_pairs(self.d), dtype=np.int8)
        pair = np.full((self.k, self.k), -1, dtype=np.int8)
        for number, (i, j) in enumerate(self.slots.tolist()):
            pair[i, j] = pair[j, i] = number
        self.pair = pair.ravel()
        # ids of this complex never exceed the number of wedges
        self.ids = np.int32 if self.n * self.w <= 2**31 else np.int64


class _Edges(NamedTuple):
    arrays: dict[str, np.ndarray]
    interior: int
    ordered: bool


class _Faces(NamedTuple):
    arrays: dict[str, np.ndarray]
    internal: int
    holonomy: np.ndarray  # bool, one per internal face
    twists: np.ndarray  # mod 2, one per face


def _orient(work: _Work) -> tuple[np.ndarray, np.ndarray, int]:
    orientation = np.zeros(work.n, dtype=np.int8)
    component = np.empty(work.n, dtype=work.ids)
    queue = np.empty(work.n, dtype=work.ids)
    parts = work.run(
        spread_orientation,
        work.across,
        work.rank,
        work.tables.sign,
        work.t.written,
        orientation,
        component,
        queue,
        work.axes,
    )
    return orientation, component, parts


def _edges(work: _Work, orientation: np.ndarray) -> _Edges:
    n, k, d, ids = work.n, work.k, work.d, work.ids
    counted = work.run.split(
        count_edges, n, work.across, work.rank, work.image, work.tables.keeping.ravel(), work.axes
    )
    interior, nodes, scrambled = (sum(column) for column in zip(*counted, strict=True))
    total = interior + nodes
    a = {
        "vertices/edge": np.empty((n, k), dtype=ids),
        "vertices/leaves": np.empty((n, k), dtype=np.int8),
        "edges/source": np.empty((total, 2), dtype=ids),
        "edges/target": np.empty((total, 2), dtype=ids),
        "edges/twist": np.empty(total, dtype=np.int8),
        "edges/source_corner": np.empty((total, d), dtype=np.int8),
        "edges/target_corner": np.empty((total, d), dtype=np.int8),
        "nodes/vertex": np.empty(nodes, dtype=ids),
        "nodes/slot": np.empty(nodes, dtype=np.int8),
        "nodes/orientation": np.empty(nodes, dtype=np.int8),
    }
    calls = []
    next_edge = next_node = 0
    for (lo, hi), (inner, outer, _) in zip(work.run.ranges(n), counted, strict=False):
        flat = [table.ravel() for table in a.values()]
        given = (work.across, work.rank, work.image, work.tables.sign, orientation)
        calls.append((*given, *flat, work.axes, interior, next_edge, next_node, lo, hi))
        next_edge += inner
        next_node += outer
    work.run.each(fill_edges, calls)
    return _Edges(a, interior, scrambled == 0)


class _Part(NamedTuple):
    """Faces as `walk_ridges` recorded them, rings or chains."""

    vertex: np.ndarray
    code: np.ndarray
    edge: np.ndarray
    sign: np.ndarray
    place: np.ndarray
    length: np.ndarray
    bits: np.ndarray

    @classmethod
    def empty(cls, room: int, ids: type) -> _Part:
        return cls(*(np.empty(room, dtype=t) for t in (ids, np.int8, ids, np.int8, np.int8, ids, np.int8)))

    def cut(self, visits: int, faces: int, lead: int) -> _Part:
        steps = visits + lead * faces
        ends = (visits, visits, steps, steps, steps, faces, faces)
        return _Part(*(array[:end] for array, end in zip(self, ends, strict=True)))


def _walk(work: _Work, orientation: np.ndarray, edges: _Edges) -> tuple[list[_Part], list[_Part]]:
    """Walk all ridges: the rings and the chains, each in the order of their smallest wedges."""
    n, w, ids, run = work.n, work.w, work.ids, work.run
    width = np.dtype(ids).itemsize
    # rows begin on cache lines
    room = np.empty(n * 16 * width + 64, dtype=np.uint8)
    octets = room[-room.ctypes.data % 64 :][: n * 16 * width]
    words = octets.view(ids)
    e = edges.arrays
    edge, leaves = e["vertices/edge"].ravel(), e["vertices/leaves"].ravel()
    run.split(
        pack_rows, n, work.across, work.rank, edge, leaves, e["edges/twist"], words, octets, width, work.axes
    )

    def walk(lo: int, hi: int) -> tuple[list[_Part], list[_Part]]:
        rings, chains = [], []
        progress = np.array([lo * w, 0, 0, 0, 0, 0], dtype=np.int64)
        room = min(n * w, max(4 * (hi - lo) * w, 1 << 16)) + 1
        state = 0
        while state != 1:
            ring, chain = _Part.empty(room, ids), _Part.empty(2 * room, ids)
            progress[1:] = 0
            state = run.here(
                walk_ridges,
                words,
                octets,
                width,
                work.image,
                work.tables.compose.ravel(),
                work.tables.place.ravel(),
                work.pair,
                work.slots.ravel(),
                orientation,
                *ring,
                *chain,
                progress,
                work.axes,
                int(edges.ordered),
                hi,
            )
            _, passages, ring_count, chain_passages, chain_count, _ = progress.tolist()
            rings.append(ring.cut(passages, ring_count, 0))
            chains.append(chain.cut(chain_passages, chain_count, 1))
            if state < 0:
                room *= 4
        return rings, chains

    # small ranges, taken in order: most walks then find no mark that is still to come
    run.prepare(walk_ridges)
    blocks = run.ranges(n, 1 if run.threads == 1 else min(8 * run.threads, max(run.threads, n // 50_000)))
    walked = run.tasks([partial(walk, lo, hi) for lo, hi in blocks])
    return [part for rings, _ in walked for part in rings], [part for _, chains in walked for part in chains]


def _faces(work: _Work, orientation: np.ndarray, edges: _Edges) -> _Faces:
    """All tables of wedges and faces, and the faces at each edge."""
    n, w, d, ids, run = work.n, work.w, work.d, work.ids, work.run
    rings, chains = _walk(work, orientation, edges)
    internal = sum(len(part.length) for part in rings)
    faces = internal + sum(len(part.length) for part in chains)
    visits, steps = n * w, n * w + faces - internal
    total = len(edges.arrays["edges/twist"])
    a: dict[str, np.ndarray] = {
        "faces/vertex_offsets": np.zeros(faces + 1, dtype=np.int64),
        "faces/edge_offsets": np.zeros(faces + 1, dtype=np.int64),
        "faces/vertex": np.empty(visits, dtype=ids),
        "faces/wedge": np.empty(visits, dtype=np.int8),
        "faces/edge": np.empty(steps, dtype=ids),
        "faces/edge_sign": np.empty(steps, dtype=np.int8),
        "faces/place": np.empty(steps, dtype=np.int8),
        "faces/against": np.empty(faces, dtype=np.int8),
    }
    twists = np.empty(faces, dtype=np.int8)
    wedge_face = np.empty((n, w), dtype=ids)
    wedge_direction = np.empty((n, w), dtype=np.int8)
    holonomy = np.concatenate([part.bits for part in rings]) & 1 == 1
    out = (*a.values(), twists, wedge_face.ravel(), wedge_direction.ravel(), w)
    calls: list[Callable[[], None]] = []
    face = visit = step = 0
    for lead, parts in ((0, rings), (1, chains)):
        for number, part in enumerate(parts):
            calls.append(partial(_place, run, parts, number, out, face, visit, step, lead))
            face += len(part.length)
            visit += len(part.vertex)
            step += len(part.edge)
    del part  # every part is let go of once it is in place
    run.prepare(place_faces)
    run.tasks(calls)
    a["wedges/face"], a["wedges/direction"] = wedge_face, wedge_direction
    a["edges/face"] = np.empty((total, d), dtype=ids)
    a["edges/face_sign"] = np.empty((total, d), dtype=np.int8)
    e = edges.arrays
    run.split(
        fill_edge_faces,
        total,
        e["edges/source"].ravel(),
        e["edges/target"].ravel(),
        e["edges/source_corner"].ravel(),
        e["edges/target_corner"].ravel(),
        work.pair,
        wedge_face.ravel(),
        wedge_direction.ravel(),
        a["edges/face"].ravel(),
        a["edges/face_sign"].ravel(),
        work.axes,
    )
    return _Faces(a, internal, holonomy, twists)


def _place(
    run: Engine, parts: list, number: int, out: tuple, face: int, visit: int, step: int, lead: int
) -> None:
    part = parts[number]
    run.here(place_faces, *part, *out, len(part.length), face, visit, step, lead)
    parts[number] = None


def _boundary(work: _Work, edges: _Edges, faces: _Faces) -> dict[str, np.ndarray]:
    """The tables of nodes and links.  A link runs from the node where its face ends to where it starts."""
    arrays, internal = faces.arrays, faces.internal
    vertex, slot = edges.arrays["nodes/vertex"], edges.arrays["nodes/slot"]
    nodes = len(vertex)
    inner = edges.interior
    offsets = arrays["faces/edge_offsets"]
    source = arrays["faces/edge"][offsets[internal + 1 :] - 1] - work.ids(inner)
    target = arrays["faces/edge"][offsets[internal:-1]] - work.ids(inner)
    parent = np.arange(nodes, dtype=work.ids)
    component = np.empty(nodes, dtype=work.ids)
    work.run(join_pairs, source, target, parent)
    work.run(number_classes, parent, component)
    out = {
        "nodes/edge": np.arange(inner, inner + nodes, dtype=work.ids),
        "nodes/component": component,
        "nodes/link": arrays["edges/face"][inner:] - work.ids(internal),
        "nodes/link_leaves": edges.arrays["nodes/orientation"][:, None] * arrays["edges/face_sign"][inner:],
        "links/source": source,
        "links/target": target,
        "links/face": np.arange(internal, internal + len(source), dtype=work.ids),
        "links/twist": faces.twists[internal:],
    }
    if work.t.corners is not None:
        out["nodes/corners"] = np.empty((nodes, work.d), dtype=np.int64)
        arguments = (work.t.corners.ravel(), vertex, slot, out["nodes/corners"].ravel(), work.axes)
        work.run.split(label_nodes, nodes, *arguments)
        out["links/corners"] = _ridges(work, faces, internal)
    return out


def _ridges(work: _Work, faces: _Faces, begin: int = 0) -> np.ndarray:
    """Labels of the ridges of the faces from `begin` on, ascending, int64, shape (F, D - 1)."""
    assert work.t.corners is not None
    a = faces.arrays
    offsets = a["faces/vertex_offsets"][begin:-1]
    labels = np.empty((len(offsets), work.d - 1), dtype=np.int64)
    tables = (work.t.corners.ravel(), a["faces/vertex"], a["faces/wedge"], offsets, work.slots.ravel())
    work.run.split(label_ridges, len(offsets), *tables, labels.ravel(), work.axes)
    return labels


# -- what is refused, or kept on request ---------------------------------------------------------


def _twins(t: Triangulation) -> np.ndarray:
    """The lower simplex of every pair with the same labels, where labels were matched."""
    if t.corners is None or not t.matched:
        return np.empty(0, dtype=np.int64)
    # equal labels share every facet, so the twin of a simplex is behind its slot 0
    there = t.across[:, 0]
    lower = np.flatnonzero(there > np.arange(len(t)))
    return lower[(t.corners[there[lower]] == t.corners[lower]).all(axis=1)]


def _singular(work: _Work, faces: _Faces, keep_singular: bool) -> np.ndarray | None:
    """``faces/singular``, None where every face is regular; refused unless kept on request."""
    pinches = work.t.matched and _has_pinches(work, faces)
    if not pinches and not faces.holonomy.any():
        return None
    singular = np.zeros(len(faces.twists), dtype=np.int8)
    singular[: faces.internal] = faces.holonomy
    ridges = _ridges(work, faces) if work.t.corners is not None else None
    if pinches and ridges is not None:
        _, group, size = np.unique(ridges, axis=0, return_inverse=True, return_counts=True)
        singular[size[group.ravel()] > 1] += 2
    if keep_singular:
        return singular
    first = faces.arrays["faces/vertex_offsets"]

    def place(face: int) -> str:
        s = int(faces.arrays["faces/vertex"][first[face]])
        i, j = work.slots[faces.arrays["faces/wedge"][first[face]]].tolist()
        if ridges is None:
            return f"simplex {s}, slots {i} and {j}"
        return f"ridge {_labels(work.t, ridges[face])} at simplex {s}"

    turned = np.flatnonzero(singular & 1)
    if len(turned):
        raise _refuse(
            "a ridge has a holonomy: walked around once, it comes back permuted",
            [place(f) for f in turned[:SHOWN].tolist()],
            len(turned),
        )
    pinched = np.flatnonzero(singular & 2)
    assert ridges is not None
    _, lead = np.unique(ridges[pinched], axis=0, return_index=True)
    lead.sort()
    raise _refuse(
        "a ridge is pinched: its simplices form several fans, so one label set belongs to several faces",
        [place(f) for f in pinched[lead[:SHOWN]].tolist()],
        len(lead),
    )


def _refuse(what: str, places: list[str], count: int) -> TriangulationError:
    more = f"; and {count - SHOWN} more" if count > SHOWN else ""
    tally = f" [{count} in all]" if count > 1 else ""
    return TriangulationError(
        what + tally,
        "; ".join(places) + more,
        "mend the input, or keep it on request: --keep-singular, keep_singular=True",
    )


def _has_pinches(work: _Work, faces: _Faces) -> bool:
    """Whether one set of ridge labels belongs to several faces."""
    assert work.t.corners is not None
    n, a = len(faces.twists), faces.arrays
    tables = (a["faces/vertex"], a["faces/wedge"], a["faces/vertex_offsets"])
    mix = (mix_ridges, work.t.corners.ravel(), *tables, work.slots.ravel())
    if not work.run.repeats(n, work.d - 1, work.axes, mix):
        return False
    # equal keys are equal ridges but for an accident
    return len(np.unique(_ridges(work, faces), axis=0)) < n


def _labels(t: Triangulation, labels: np.ndarray) -> str:
    return " ".join(map(str, t.named(labels)))


def _colours(work: _Work, tables: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    """The tables of colours; gluings keep slots, so one end of an edge tells, and one wedge of a face."""
    source, target = tables["edges/source"], tables["edges/target"]
    first = tables["faces/vertex_offsets"][:-1]
    return {
        "colours/edge": np.where(source[:, 0] >= 0, source[:, 1], target[:, 1]),
        "colours/face": work.slots[tables["faces/wedge"][first]],
    }


# -- points and segments -------------------------------------------------------------------------


def _points(work: _Work) -> dict[str, np.ndarray]:
    """Classes of the triangulation's vertices and 1-simplices, numbered by first occurrence."""
    n, k, w, ids, t = work.n, work.k, work.w, work.ids, work.t
    if t.corners is not None and t.matched:
        # in a labelled complex a point is a label, and a segment a pair of them with one direction
        point = _first_occurrence(t.corners.reshape(-1, 1)).reshape(n, k)
        ends = point[:, [[i, j] for i, j in work.slots.tolist()]].reshape(-1, 2)
        segment = _first_occurrence(ends).reshape(n, w)
        return {
            "vertices/point": point.astype(ids),
            "vertices/segment": segment.astype(ids),
            "vertices/segment_sign": np.ones((n, w), dtype=np.int8),
        }
    parent = np.arange(n * k, dtype=work.ids)
    point = np.empty((n, k), dtype=ids)
    work.run(join_points, work.across, work.rank, work.image, parent, work.axes, n)
    work.run(number_classes, parent, point.ravel())
    parent = np.arange(n * w, dtype=work.ids)
    flip, folded = np.zeros(n * w, dtype=np.int8), np.zeros(n * w, dtype=np.int8)
    segment, sign = np.empty((n, w), dtype=ids), np.empty((n, w), dtype=np.int8)
    work.run(join_segments, work.across, work.rank, work.image, work.pair, parent, flip, folded, work.axes, n)
    work.run(number_segments, parent, flip, folded, segment.ravel(), sign.ravel())
    return {"vertices/point": point, "vertices/segment": segment, "vertices/segment_sign": sign}


def _first_occurrence(rows: np.ndarray) -> np.ndarray:
    """Number equal rows by the order in which they first occur, int64, shape (rows,)."""
    _, first, group = np.unique(rows, axis=0, return_index=True, return_inverse=True)
    number = np.empty(len(first), dtype=np.int64)
    number[np.argsort(first)] = np.arange(len(first))
    return number[group.ravel()]


def _in_layout_order(tables: dict[str, np.ndarray], ids: np.dtype) -> dict[str, np.ndarray]:
    from .layout import TABLES, dtype_of

    return {
        name: tables[name].astype(dtype_of(table, ids), copy=False)
        for name, table in TABLES.items()
        if name in tables
    }
