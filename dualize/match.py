"""Identify the boundaries of two foams, or two foams as a whole.

Numbers of nodes and links are those of one complex, so cells of two complexes are matched by their labels, or
by an isomorphism of the complexes: a map of simplices, and of the corners of each, that keeps all gluings.
An isomorphism of a connected complex is known once it is known at one simplex, so every image of that one is
tried and followed through the gluings.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import islice
from typing import Any, NamedTuple

import numpy as np

from .boundary import walk
from .errors import InputError
from .kernels.permutations import Permutations, permutations_of
from .layout import wedge_pairs
from .skeleton import Skeleton
from .topology.gluing import gluing_of

__all__ = ["Match", "boundary_map", "match"]


@dataclass(frozen=True, eq=False)
class Match:
    """One map from a foam A, or its boundary, to a foam B.

    Attributes
    ----------
    by : str
        ``"labels"`` or ``"isomorphism"``.
    nodes, node_sign : ndarray, shape (B,)
        Node of B for each node of A; +1 where the map keeps the induced orientations of the two facets.
    places : ndarray, shape (B, D)
        Place at that node of B for each place of A.
    links, link_sign : ndarray, shape (L,)
        Link of B for each link of A; +1 where the map takes its source to the source.
    vertices, vertex_sign, corners : ndarray or None
        Of a map of the whole: the vertices, the signs against their orientations, the corners (V, D + 1).
    edges, edge_sign, faces, face_sign : ndarray or None
        Likewise, with the signs against the directions of edges and faces.
    """

    by: str
    nodes: np.ndarray
    node_sign: np.ndarray
    places: np.ndarray
    links: np.ndarray
    link_sign: np.ndarray
    vertices: np.ndarray | None = None
    vertex_sign: np.ndarray | None = None
    corners: np.ndarray | None = None
    edges: np.ndarray | None = None
    edge_sign: np.ndarray | None = None
    faces: np.ndarray | None = None
    face_sign: np.ndarray | None = None

    def to_dict(self) -> dict[str, Any]:
        """The map as plain lists; what a map of boundaries lacks is left out."""
        return {
            key: value.tolist() if isinstance(value, np.ndarray) else value
            for key, value in vars(self).items()
            if value is not None
        }

    def __str__(self) -> str:
        """A table: a line for every vertex of a whole, for every node, and for every link."""
        lines = [f"by {self.by}"]

        def sign(x: int) -> str:
            return "+" if x > 0 else "-"

        def rows(
            kind: str, images: np.ndarray, signs: np.ndarray, orders: np.ndarray | None, what: str
        ) -> None:
            for x, (y, s) in enumerate(zip(images.tolist(), signs.tolist(), strict=True)):
                order = "" if orders is None else f"  {what} {' '.join(map(str, orders[x].tolist()))}"
                lines.append(f"{kind} {x} -> {y}  {sign(s)}{order}")

        if self.vertices is not None and self.vertex_sign is not None:
            rows("vertex", self.vertices, self.vertex_sign, self.corners, "corners")
            for kind, images, signs in (
                ("edge", self.edges, self.edge_sign),
                ("face", self.faces, self.face_sign),
            ):
                if images is not None and signs is not None:
                    rows(kind, images, signs, None, "")
        rows("node", self.nodes, self.node_sign, self.places, "places")
        rows("link", self.links, self.link_sign, None, "")
        return "\n".join(lines)


class _Glued(NamedTuple):
    """Simplices with corners, gluings and names: a foam or its boundary."""

    across: np.ndarray
    rank: np.ndarray
    names: list[tuple] | None  # names of the corners of each simplex
    tables: Permutations


def match(
    a: Skeleton,
    b: Skeleton,
    *,
    limit: int = 1,
    whole: bool = False,
    by: str | None = None,
) -> list[Match]:
    """Maps that identify the boundary of `a` with that of `b`, or the whole of `a` with the whole of `b`.

    Parameters
    ----------
    a, b : Skeleton
    limit : int
        At most so many maps; labels give at most one.
    whole : bool
        Map the foams themselves, not only their boundaries.
    by : str, optional
        ``"labels"`` or ``"isomorphism"``; by default labels where both have the same ones, else isomorphism.

    Returns
    -------
    list of Match
        In a fixed order; empty if there is none.

    Raises
    ------
    InputError
        If the dimensions differ, or labels are asked for and not there.

    Notes
    -----
    Maps keep all gluings of the boundary triangulations, which is more than an isomorphism of graphs: the
    cycles of links around the corners of the boundary go to such cycles.

    Examples
    --------
    >>> from dualize import Triangulation, build
    >>> s = build(Triangulation.from_facets([[0, 1, 2, 3]]))
    >>> len(match(s, s, limit=1000, by="isomorphism"))
    24
    """
    if a.dimension != b.dimension:
        raise InputError(f"the foams have the dimensions {a.dimension} and {b.dimension}")
    if by not in (None, "labels", "isomorphism"):
        raise InputError(f"there is no way {by!r} to match", hint="ways: labels, isomorphism")
    ours, theirs = _glued(a, whole), _glued(b, whole)
    if by != "isomorphism":
        named = _by_names(ours, theirs) if ours.names is not None and theirs.names is not None else None
        if by == "labels" and (ours.names is None or theirs.names is None):
            raise InputError("one of the foams has no labels", hint="match by isomorphism")
        if named is not None and limit > 0:
            return [_made("labels", a, b, named, whole)]
        if by == "labels":
            return []
    found = islice(_isomorphisms(ours, theirs), max(0, limit))
    return [_made("isomorphism", a, b, maps, whole) for maps in found]


def boundary_map(a: Skeleton, b: Skeleton, nodes: Any, places: Any, by: str = "given") -> Match:
    """The map of boundaries with these nodes and places, as `match` finds them and files keep them.

    Parameters
    ----------
    a, b : Skeleton
    nodes : array_like of int, shape (B,)
        Node of `b` for each node of `a`.
    places : array_like of int, shape (B, D)
        Place there of each place.
    by : str
        What to say of its origin.

    Raises
    ------
    InputError
        If this is no map that identifies the boundaries.
    """
    n, d = len(a["nodes/edge"]), a.dimension
    hint = "maps lead from the boundary of the first foam to that of the second: dualize match FIRST SECOND"
    u, p = np.array(nodes), np.array(places)
    if n == 0 or len(b["nodes/edge"]) != n or b.dimension != d or u.shape != (n,) or p.shape != (n, d):
        raise InputError(
            "the map is about other boundaries",
            f"{n} and {len(b['nodes/edge'])} nodes, {len(u)} mapped",
            hint,
        )
    for x, what in ((u, "nodes"), (p, "places")):
        size = x.shape[-1]
        if x.dtype.kind not in "iu" or (np.sort(x, axis=-1) != np.arange(size)).any():
            raise InputError(f"the {what} of the map are no rearrangement of 0 to {size - 1}", hint=hint)
    ours, theirs = _glued(a, False), _glued(b, False)
    maps = u.tolist(), ours.tables.rank(p).tolist()
    if not _keeps_gluings(ours, theirs, *maps):
        raise InputError("the map does not carry links to links", hint=hint)
    return _made(by, a, b, maps, False)


def _glued(s: Skeleton, whole: bool) -> _Glued:
    if whole:
        t = gluing_of(s)
        names = None if t.corners is None else [tuple(row) for row in t.named(t.corners)]
        return _Glued(t.across, t.rank, names, permutations_of(s.dimension))
    w = walk(gluing_of(s))
    names = [tuple(row) for row in s.named(s["nodes/corners"])] if "nodes/corners" in s else None
    return _Glued(w.there, w.rank, names, permutations_of(s.dimension - 1))


Maps = tuple[list[int], list[int]]  # image of each simplex, rank of the map of its corners


def _by_names(a: _Glued, b: _Glued) -> Maps | None:
    """The map of equal names, where every simplex of either has just one partner and the gluings agree."""
    assert a.names is not None and b.names is not None
    there = {frozenset(row): x for x, row in enumerate(b.names)}
    if len(there) != len(b.names) or len(a.names) != len(b.names):
        return None
    image, rank = [], []
    for row in a.names:
        y = there.get(frozenset(row))
        if y is None:
            return None
        image.append(y)
        rank.append(int(a.tables.rank(np.array([b.names[y].index(name) for name in row]))))
    if len(set(image)) != len(image):
        return None
    return (image, rank) if _keeps_gluings(a, b, image, rank) else None


def _keeps_gluings(a: _Glued, b: _Glued, image: Sequence[int], rank: Sequence[int]) -> bool:
    """Whether the map followed by a gluing of `b` is the gluing of `a` followed by the map."""
    u, p = np.array(image, dtype=np.int64), np.array(rank, dtype=np.int64)
    k = a.across.shape[1]
    slots = np.arange(k)
    there_b = b.across[u[:, None], a.tables.image[p][:, slots]]
    rank_b = b.rank[u[:, None], a.tables.image[p][:, slots]]
    inner = a.across >= 0
    if ((there_b >= 0) != inner).any():
        return False
    if (there_b[inner] != u[a.across[inner]]).any():
        return False
    mine = a.tables.compose[p[np.where(inner, a.across, 0)], a.rank]
    other = a.tables.compose[rank_b, p[:, None]]
    return not (mine[inner] != other[inner]).any()


def _isomorphisms(a: _Glued, b: _Glued) -> Iterator[Maps]:
    """All isomorphisms, by the images of the first simplex of each component in order."""
    n, k = a.across.shape
    if b.across.shape != (n, k):
        return
    across_a, rank_a, across_b, rank_b = (x.tolist() for x in (a.across, a.rank, b.across, b.rank))
    image, inverse, compose = (x.tolist() for x in (a.tables.image, a.tables.inverse, a.tables.compose))
    target, turn = [-1] * n, [0] * n
    used = [False] * n

    def follow(start: int, u: int, p: int) -> list[int] | None:
        """Map the component of `start`; the simplices mapped, or None with all undone."""
        target[start], turn[start], used[u] = u, p, True
        queue = [start]
        good = True
        for s in queue:
            u, p = target[s], turn[s]
            for i in range(k):
                t, slot = across_a[s][i], image[p][i]
                v = across_b[u][slot]
                if (t < 0) != (v < 0):
                    good = False
                    break
                if t < 0:
                    continue
                q = compose[compose[rank_b[u][slot]][p]][inverse[rank_a[s][i]]]
                if target[t] < 0 and not used[v]:
                    target[t], turn[t], used[v] = v, q, True
                    queue.append(t)
                elif target[t] != v or turn[t] != q:
                    good = False
                    break
            if not good:
                break
        if good:
            return queue
        undo(queue)
        return None

    def undo(queue: list[int]) -> None:
        for s in queue:
            used[target[s]] = False
            target[s] = -1

    def extend() -> Iterator[Maps]:
        start = next((s for s in range(n) if target[s] < 0), None)
        if start is None:
            yield list(target), list(turn)
            return
        for u in range(n):
            if used[u]:
                continue
            for p in range(len(image)):
                queue = follow(start, u, p)
                if queue is not None:
                    yield from extend()
                    undo(queue)

    yield from extend()


def _made(by: str, a: Skeleton, b: Skeleton, maps: Maps, whole: bool) -> Match:
    """The maps of all cells that a map of simplices and corners brings with it."""
    d = a.dimension
    u, p = np.array(maps[0], dtype=np.int64), np.array(maps[1], dtype=np.int64)
    if not whole:
        return Match(by, **_boundary_maps(a, b, u, permutations_of(d - 1).image[p].astype(np.int64)))
    tables = permutations_of(d)
    corner = tables.image[p].astype(np.int64)
    vertex_sign = a["vertices/orientation"] * b["vertices/orientation"][u] * tables.sign[p]
    edges, edge_sign = _gathered(
        a["vertices/edge"],
        b["vertices/edge"][u[:, None], corner],
        len(a["edges/twist"]),
        a["vertices/leaves"] * b["vertices/leaves"][u[:, None], corner],
    )
    pairs = np.array(wedge_pairs(d))
    wedge = np.zeros((d + 1, d + 1), dtype=np.int64)
    wedge[pairs[:, 0], pairs[:, 1]] = wedge[pairs[:, 1], pairs[:, 0]] = np.arange(len(pairs))
    i, j = corner[:, pairs[:, 0]], corner[:, pairs[:, 1]]
    along = a["wedges/direction"] * b["wedges/direction"][u[:, None], wedge[i, j]] * np.where(i < j, 1, -1)
    faces, face_sign = _gathered(
        a["wedges/face"], b["wedges/face"][u[:, None], wedge[i, j]], len(a["faces/against"]), along
    )
    # nodes by their vertices and slots, places by the corners
    slot = corner[a["nodes/vertex"], a["nodes/slot"]]
    number = np.full(b["vertices/edge"].shape, -1, dtype=np.int64)
    number[b["nodes/vertex"], b["nodes/slot"]] = np.arange(len(b["nodes/edge"]))
    nodes = number[u[a["nodes/vertex"]], slot]
    others = np.array([[c for c in range(d + 1) if c != x] for x in range(d + 1)])
    there = corner[a["nodes/vertex"][:, None], others[a["nodes/slot"]]]
    places = there - (there > slot[:, None])
    return Match(
        by,
        **_boundary_maps(a, b, nodes, places),
        vertices=u,
        vertex_sign=vertex_sign.astype(np.int8),
        corners=corner,
        edges=edges,
        edge_sign=edge_sign,
        faces=faces,
        face_sign=face_sign,
    )


def _boundary_maps(a: Skeleton, b: Skeleton, nodes: np.ndarray, places: np.ndarray) -> dict[str, np.ndarray]:
    """Nodes, their signs, places, links, their signs."""
    tables = permutations_of(a.dimension - 1)
    sign = tables.sign[tables.rank(places)] if len(nodes) else np.empty(0, dtype=np.int8)
    node_sign = (a["nodes/orientation"] * b["nodes/orientation"][nodes] * sign).astype(np.int8)
    links, link_sign = _gathered(
        a["nodes/link"],
        b["nodes/link"][nodes[:, None], places],
        len(a["links/face"]),
        a["nodes/link_leaves"] * b["nodes/link_leaves"][nodes[:, None], places],
    )
    return {
        "nodes": nodes,
        "node_sign": node_sign,
        "places": places,
        "links": links,
        "link_sign": link_sign,
    }


def _gathered(
    mine: np.ndarray, theirs: np.ndarray, count: int, signs: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """The map of cells that sends ``mine`` to ``theirs`` wherever they are met, and its signs."""
    image, sign = np.full(count, -1, dtype=np.int64), np.zeros(count, dtype=np.int8)
    image[mine], sign[mine] = theirs, signs
    return image, sign
