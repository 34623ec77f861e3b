"""From a triangulation to its foam skeleton: orient, edges, faces, boundary, each step one call.

The rules are those of ``dualize spec``; the numbering of every cell is fixed by them, so the result is the
same on every run and for every number of threads.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from .errors import TriangulationError
from .kernels import Engine, engine
from .kernels.classes import join_pairs, join_points, join_segments, number_classes, number_segments
from .kernels.faces import fill_edge_faces, fill_faces, walk_ridges
from .kernels.orient import count_edges, fill_edges, spread_orientation
from .kernels.permutations import Permutations, permutations_of
from .layout import id_dtype, wedge_pairs
from .skeleton import Skeleton
from .triangulation import SHOWN, Triangulation

__all__ = ["build"]


def build(
    triangulation: Triangulation,
    *,
    keep_singular: bool = False,
    points: bool = False,
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
    threads : int, optional
        At most so many threads; the result does not depend on it.

    Raises
    ------
    TriangulationError
        If the complex is singular in one of these ways and `keep_singular` is false; the places are named.

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
    walks = _walk(work, orientation, edges.ordered)
    ridges = _ridges(work, walks) if t.corners is not None else None
    singular = _singular(work, walks, ridges, keep_singular)
    arrays, twist_along = _faces(work, edges, walks)
    boundary = _boundary(work, edges, arrays, twist_along, walks.internal, ridges)

    v, interior, nodes = len(t), edges.interior, len(edges.arrays["nodes/vertex"])
    external = len(walks.vertex_offsets) - 1 - walks.internal
    counts = {
        "vertices": v,
        "edges_internal": interior,
        "edges_external": nodes,
        "faces_internal": walks.internal,
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
        **arrays,
        **boundary,
    }
    if t.corners is not None:
        tables["vertices/corners"] = t.corners
    if kept:
        tables["faces/singular"] = (
            np.zeros(len(walks.vertex_offsets) - 1, dtype=np.int8) if singular is None else singular
        )
    if points:
        tables |= _points(work)
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


class _Walks(NamedTuple):
    vertex: np.ndarray  # simplex of each passage, faces one after the other, internal ones first
    code: np.ndarray  # 2 * wedge + direction
    vertex_offsets: np.ndarray
    holonomy: np.ndarray  # one per internal face
    internal: int


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
        calls.append(
            (work.across, work.rank, work.image, work.tables.sign, orientation, *flat, work.axes)
            + (interior, next_edge, next_node, lo, hi)
        )
        next_edge += inner
        next_node += outer
    work.run.each(fill_edges, calls)
    return _Edges(a, interior, scrambled == 0)


def _walk(work: _Work, orientation: np.ndarray, ordered: bool) -> _Walks:
    """Walk all ridges; the passages of internal faces first, then those of external ones."""
    n, w, ids = work.n, work.w, work.ids
    ranges = work.run.ranges(n)
    seen = np.zeros(n * w, dtype=np.uint8)
    room = n * w if len(ranges) == 1 else n * w // len(ranges) + 1024
    states: list[_Walker] = [_Walker(room, ids, lo * w) for lo, _ in ranges]
    pending = list(range(len(ranges)))
    while pending:
        done = work.run.each(
            walk_ridges,
            [
                (work.across, work.rank, work.image, work.tables.compose.ravel(), work.pair, orientation, seen)
                + states[r].buffers
                + (work.axes, int(ordered), *ranges[r])
                for r in pending
            ],
        )
        for r, state in zip(pending, done, strict=True):
            states[r].empty(larger=state < 0)
        pending = [r for r, state in zip(pending, done, strict=True) if state != 1]
    rings = [chunk for s in states for chunk in s.rings]
    chains = [chunk for s in states for chunk in s.chains]
    length = np.concatenate([c.length for c in rings] + [c.length for c in chains])
    offsets = np.zeros(len(length) + 1, dtype=np.int64)
    np.cumsum(length, out=offsets[1:])
    return _Walks(
        vertex=_joined([c.vertex for c in rings + chains]),
        code=_joined([c.code for c in rings + chains]),
        vertex_offsets=offsets,
        holonomy=_joined([c.holonomy for c in rings]),
        internal=sum(len(c.length) for c in rings),
    )


class _Chunk(NamedTuple):
    vertex: np.ndarray
    code: np.ndarray
    length: np.ndarray
    holonomy: np.ndarray


class _Walker:
    """The buffers of one range of `walk_ridges`, and the chunks emptied from them."""

    def __init__(self, room: int, ids: type, first_wedge: int) -> None:
        self.ids = ids
        self.rings: list[_Chunk] = []
        self.chains: list[_Chunk] = []
        self.progress = np.array([first_wedge, 0, 0, 0, 0], dtype=np.int64)
        self._allocate(room)

    def _allocate(self, room: int) -> None:
        self.room = room
        self.ring = _Chunk(*(np.empty(room, dtype=t) for t in (self.ids, np.int8, self.ids, np.int8)))
        self.chain = _Chunk(*(np.empty(room, dtype=t) for t in (self.ids, np.int8, self.ids, np.int8)))

    @property
    def buffers(self) -> tuple[np.ndarray, ...]:
        return (*self.ring, *self.chain[:3], self.progress)

    def empty(self, larger: bool) -> None:
        """Move what was recorded into a chunk; make the buffers `larger` where one face alone needs it."""
        _, passages, rings, chain_passages, chains = self.progress.tolist()
        for chunks, buffer, visits, faces in (
            (self.rings, self.ring, passages, rings),
            (self.chains, self.chain, chain_passages, chains),
        ):
            chunks.append(
                _Chunk(
                    buffer.vertex[:visits].copy(),
                    buffer.code[:visits].copy(),
                    buffer.length[:faces].copy(),
                    buffer.holonomy[:faces].copy(),
                )
            )
        self.progress[1:] = 0
        if larger:
            self._allocate(2 * self.room)


def _joined(parts: list[np.ndarray]) -> np.ndarray:
    return parts[0] if len(parts) == 1 else np.concatenate(parts)


def _faces(work: _Work, edges: _Edges, walks: _Walks) -> tuple[dict[str, np.ndarray], np.ndarray]:
    """All tables of wedges and faces, and the places of the faces on the edges."""
    n, k, w, d, ids = work.n, work.k, work.w, work.d, work.ids
    offsets = walks.vertex_offsets
    faces = len(offsets) - 1
    # an external face has one edge more than vertices
    edge_offsets = offsets + np.maximum(np.arange(faces + 1) - walks.internal, 0)
    visits, steps = int(offsets[-1]), int(edge_offsets[-1])
    total = len(edges.arrays["edges/twist"])
    a = {
        "faces/wedge": np.empty(visits, dtype=np.int8),
        "wedges/face": np.empty((n, w), dtype=ids),
        "wedges/direction": np.empty((n, w), dtype=np.int8),
        "faces/edge": np.empty(steps, dtype=ids),
        "faces/edge_sign": np.empty(steps, dtype=np.int8),
        "faces/place": np.empty(steps, dtype=np.int8),
        "faces/against": np.empty(faces, dtype=np.int8),
    }
    twist_along = np.empty(faces, dtype=np.int8)
    flat = [table.ravel() for table in a.values()]
    e = edges.arrays
    work.run.split(
        fill_faces,
        faces,
        walks.vertex,
        walks.code,
        offsets,
        edge_offsets,
        work.across,
        work.rank,
        work.image,
        work.tables.place.ravel(),
        work.slots.ravel(),
        e["vertices/edge"].ravel(),
        e["vertices/leaves"].ravel(),
        e["edges/twist"],
        *flat,
        twist_along,
        work.axes,
        walks.internal,
    )
    a["faces/vertex_offsets"] = offsets
    a["faces/vertex"] = walks.vertex
    a["faces/edge_offsets"] = edge_offsets
    a["edges/face"] = np.empty((total, d), dtype=ids)
    a["edges/face_sign"] = np.empty((total, d), dtype=np.int8)
    work.run.split(
        fill_edge_faces,
        total,
        e["edges/source"].ravel(),
        e["edges/target"].ravel(),
        e["edges/source_corner"].ravel(),
        e["edges/target_corner"].ravel(),
        work.pair,
        a["wedges/face"].ravel(),
        a["wedges/direction"].ravel(),
        a["edges/face"].ravel(),
        a["edges/face_sign"].ravel(),
        work.axes,
    )
    return a, twist_along


def _boundary(
    work: _Work,
    edges: _Edges,
    arrays: dict[str, np.ndarray],
    twist_along: np.ndarray,
    internal: int,
    ridges: np.ndarray | None,
) -> dict[str, np.ndarray]:
    """The tables of nodes and links.  A link runs from the node where its face ends to where it starts."""
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
        "links/twist": twist_along[internal:],
    }
    if work.t.corners is not None and ridges is not None:
        others = np.array([[c for c in range(work.k) if c != i] for i in range(work.k)])
        out["nodes/corners"] = np.take_along_axis(work.t.corners[vertex], others[slot], axis=1)
        out["links/corners"] = np.sort(ridges[internal:], axis=1)
    return out


def _ridges(work: _Work, walks: _Walks) -> np.ndarray:
    """Labels of the ridge of every face, shape (F, D - 1), read at its first passage."""
    assert work.t.corners is not None
    first = walks.vertex_offsets[:-1]
    others = np.array([[c for c in range(work.k) if c not in pair] for pair in work.slots.tolist()])
    return np.take_along_axis(
        work.t.corners[walks.vertex[first]], others[walks.code[first] // 2], axis=1
    )


# -- what is refused, or kept on request ---------------------------------------------------------


def _twins(t: Triangulation) -> np.ndarray:
    """The lower simplex of every pair with the same labels, where labels were matched."""
    if t.corners is None or not t.matched:
        return np.empty(0, dtype=np.int64)
    # equal labels share every facet, so the twin of a simplex is behind its slot 0
    there = t.across[:, 0]
    lower = np.flatnonzero(there > np.arange(len(t)))
    return lower[(t.corners[there[lower]] == t.corners[lower]).all(axis=1)]


def _singular(
    work: _Work, walks: _Walks, ridges: np.ndarray | None, keep_singular: bool
) -> np.ndarray | None:
    """``faces/singular``, None where every face is regular; refused unless kept on request."""
    singular = np.zeros(len(walks.vertex_offsets) - 1, dtype=np.int8)
    singular[: walks.internal] = walks.holonomy
    if ridges is not None and work.t.matched:
        singular[_repeated(ridges)] += 2
    if not singular.any():
        return None
    if keep_singular:
        return singular
    first = walks.vertex_offsets[:-1]

    def place(face: int) -> str:
        s, wedge = int(walks.vertex[first[face]]), int(walks.code[first[face]]) // 2
        i, j = work.slots[wedge].tolist()
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


def _repeated(rows: np.ndarray) -> np.ndarray:
    """Which rows of labels occur more than once, bool, shape (F,)."""
    low = int(rows.min())
    span = int(rows.max()) - low + 1
    if span ** rows.shape[1] < 2**63:
        key = np.zeros(len(rows), dtype=np.int64)
        for column in rows.T:
            key = key * span + (column - low)
        ordered = np.sort(key)
        if not (ordered[1:] == ordered[:-1]).any():
            return np.zeros(len(rows), dtype=bool)
    _, group, size = np.unique(rows, axis=0, return_inverse=True, return_counts=True)
    return size[group.ravel()] > 1


def _labels(t: Triangulation, labels: np.ndarray) -> str:
    return " ".join(map(str, t.named(labels)))


# -- points and segments -------------------------------------------------------------------------


def _points(work: _Work) -> dict[str, np.ndarray]:
    """Classes of the triangulation's vertices and 1-simplices, numbered by first occurrence."""
    n, k, w, ids, t = work.n, work.k, work.w, work.ids, work.t
    if t.corners is not None and t.matched:
        # in a labelled complex a point is a label, and a segment a pair of them, in the same direction everywhere
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
