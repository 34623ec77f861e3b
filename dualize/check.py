"""Is this skeleton whole?  Every entry that the rest of a skeleton determines is compared with the rest.

First what makes the tables safe to read (`dualize.form`): presence, shapes, widths, ranges, offsets.  Then
the edges, from which the gluings are read back; components and the spreading of the orientation; the
faces, followed through the gluings from one visit to the next, so that every signed edge ends where the next
cell begins and ``d1 d2 = 0`` with nodes and links included; boundary, labels, flags, and the optional groups.
Nothing is compared with a second build: the rules of ``dualize spec`` are checked one by one.

What a file cannot contradict is not noticed: a consistent renaming of labels, the words behind them,
coordinates, provenance, and the sign with which the first simplex of a component was written, where every
table that depends on it agrees.
"""

from __future__ import annotations

import numpy as np

from .form import COLOURS, POINTS, check_form, compare, entry, wrong
from .kernels import checks as rules
from .kernels import engine
from .kernels.permutations import permutations_of
from .layout import COUNTS, sizes, wedge_pairs
from .skeleton import Skeleton

__all__ = ["check_skeleton"]

# The kernels' rules in words: the table they read, and what is wrong with its entry.
RULES: dict[int, tuple[str, str]] = {
    rules.SOURCE_IS_NODE: ("edges/source", "an internal edge has a vertex at either end"),
    rules.TARGET_IS_NODE: (
        "edges/target",
        "only one end of an external edge is a node, of an internal one none",
    ),
    rules.TARGET_IS_SOURCE: ("edges/target", "it is the same slot as the edge's source"),
    rules.TARGET_NOT_NODE: ("edges/target", "one end of an external edge is a node (-1, node)"),
    rules.SOURCE_NODE: (
        "edges/source",
        "the external edges end on the nodes in order, this one on node {wanted}",
    ),
    rules.TARGET_NODE: (
        "edges/target",
        "the external edges end on the nodes in order, this one on node {wanted}",
    ),
    rules.EDGE_AT_SOURCE: ("vertices/edge", "edges/source says that edge {wanted} starts at this slot"),
    rules.LEAVES_AT_SOURCE: ("vertices/leaves", "edges/source says that an edge starts at this slot"),
    rules.EDGE_AT_TARGET: ("vertices/edge", "edges/target says that edge {wanted} ends at this slot"),
    rules.LEAVES_AT_TARGET: ("vertices/leaves", "edges/target says that an edge ends at this slot"),
    rules.SOURCE_CORNER_NODE: ("edges/source_corner", "the source is a node, which has no corners: -1"),
    rules.SOURCE_CORNERS: ("edges/source_corner", "the corners at a vertex are all but the slot, each once"),
    rules.SOURCE_CORNER_ORDER: ("edges/source_corner", "the corners ascend at an edge's smallest half-edge"),
    rules.TARGET_CORNER_NODE: ("edges/target_corner", "the target is a node, which has no corners: -1"),
    rules.TARGET_CORNERS: ("edges/target_corner", "the corners at a vertex are all but the slot, each once"),
    rules.TARGET_CORNER_ORDER: ("edges/target_corner", "the corners ascend at an edge's smallest half-edge"),
    rules.TWIST: ("edges/twist", "the orientations of its vertices and its corners make it {wanted}"),
    rules.SOURCE_ARRIVES: ("edges/source", "by the orientation of the vertex the edge arrives there"),
    rules.TWISTED_SOURCE: (
        "edges/source",
        "a twisted edge starts at its smallest half-edge, at vertex {wanted}",
    ),
    rules.TARGET_LEAVES: ("edges/target", "by the orientation of the vertex the edge leaves there"),
    rules.FACE_VERTEX: ("faces/vertex", "the edge before leads to vertex {wanted}"),
    rules.FACE_WEDGE: ("faces/wedge", "the face comes here through wedge {wanted}"),
    rules.WEDGE_DIRECTION: ("wedges/direction", "the face comes through the wedge the other way"),
    rules.WEDGE_FACE: ("wedges/face", "faces/vertex and faces/wedge give this wedge to face {wanted}"),
    rules.FACE_START: (
        "faces/vertex",
        "an external face begins at the boundary, and here it enters by an internal edge",
    ),
    rules.FACE_EDGE: ("faces/edge", "the face passes here through edge {wanted}"),
    rules.FACE_EDGE_SIGN: ("faces/edge_sign", "the face passes the edge with sign {wanted}"),
    rules.FACE_PLACE: (
        "faces/place",
        "the face passes the edge at the place of the vertex's corner {wanted}",
    ),
    rules.EDGE_FACE: ("edges/face", "faces/edge and faces/place put face {wanted} there"),
    rules.EDGE_FACE_SIGN: ("edges/face_sign", "the face passes the edge with sign {wanted}"),
    rules.FACE_ENDS_INSIDE: (
        "faces/vertex",
        "the face leaves this vertex by an external edge, and its list goes on",
    ),
    rules.FACE_GOES_ON: (
        "faces/vertex",
        "the face leaves this vertex by an internal edge, and its list ends",
    ),
    rules.FACE_NOT_FIRST: (
        "faces/vertex",
        "an internal face begins at its smallest wedge, and meets it once",
    ),
    rules.DIRECTION_RULE: (
        "wedges/direction",
        "at a face's smallest wedge the orientation makes it {wanted}",
    ),
    rules.AGAINST: ("faces/against", "the face runs against {wanted} internal edges mod 2"),
    rules.TARGET_LABEL: ("vertices/corners", "an edge carries this corner to one with label {wanted}"),
    rules.NODE_LABEL: ("nodes/corners", "the corner at the vertex has label {wanted}"),
}


def check_skeleton(skeleton: Skeleton, *, threads: int | None = None) -> None:
    """Check a skeleton: shapes, ranges, offsets, that all tables agree, and ``d1 d2 = 0``.

    Parameters
    ----------
    skeleton : Skeleton
    threads : int, optional

    Raises
    ------
    SkeletonError
        Naming the first wrong entry: its table, index and value, and what it contradicts.  Where two tables
        disagree, the one named need not be the one that was changed.

    Notes
    -----
    Takes time in proportion to the size of the tables.  No entry is used as an index before its range is
    known, and nothing is allocated that is larger than the tables themselves.

    Examples
    --------
    >>> from dualize import Triangulation, build
    >>> skeleton = build(Triangulation.from_facets([[0, 1, 2, 3], [0, 1, 2, 4]]))
    >>> check_skeleton(skeleton)
    >>> tables = dict(skeleton.arrays)
    >>> tables["faces/against"] = 1 - tables["faces/against"]
    >>> broken = Skeleton(skeleton.dimension, skeleton.counts, skeleton.flags, tables)
    >>> check_skeleton(broken)
    Traceback (most recent call last):
    ...
    dualize.errors.SkeletonError: it is 1, but the face runs against 0 internal edges mod 2 (faces/against[0])
    """
    check_form(skeleton)
    work = _Work(skeleton, threads)
    _check_edges(work)
    _check_components(work)
    _check_faces(work)
    _check_boundary(work)
    _check_labels(work)
    _check_singular(work)
    _check_points(work)
    _check_colours(work)


# -- the tables against each other -----------------------------------------------------------------


class _Work:
    """The skeleton with what the steps hand on to each other."""

    across: np.ndarray  # (V K,) the vertex behind every slot, -1 at a node
    rank: np.ndarray  # (V K,) the permutation that carries the corners there
    edge_twists: np.ndarray  # (F,) twists along each face, mod 2
    holonomy: np.ndarray  # (F,) whether an internal face comes back permuted

    def __init__(self, skeleton: Skeleton, threads: int | None) -> None:
        self.skeleton = skeleton
        self.counts = {key: int(skeleton.counts[key]) for key in COUNTS}
        self.d = int(skeleton.dimension)
        self.k = self.d + 1
        self.axes = tuple(range(self.k))
        self.size = sizes(self.d, self.counts)
        self.interior = self.counts["edges_internal"]
        self.internal = self.counts["faces_internal"]
        self.run = engine(self.counts["vertices"], threads)
        self.tables = permutations_of(self.d)
        self.image = self.tables.image.ravel()
        self.slots = np.array(wedge_pairs(self.d), dtype=np.int8)
        pair = np.full((self.k, self.k), -1, dtype=np.int8)
        for number, (i, j) in enumerate(self.slots.tolist()):
            pair[i, j] = pair[j, i] = number
        self.pair = pair.ravel()
        # wide enough for every vertex, half-edge, wedge and directed segment
        self.ids = np.int32 if 2 * self.size["V"] * max(self.size["W"], self.k) < 2**31 else np.int64

    def __getitem__(self, name: str) -> np.ndarray:
        return self.skeleton[name]

    def flat(self, *names: str) -> list[np.ndarray]:
        return [self.skeleton[name].ravel() for name in names]

    def judge(self, verdicts: list[tuple[int, int, int]]) -> None:
        """Raise for the first range in which a kernel found a broken rule."""
        for rule, index, wanted in verdicts:
            if rule:
                name, why = RULES[rule]
                raise entry(self.skeleton, name, index, why.format(wanted=wanted))


def _check_edges(work: _Work) -> None:
    size, k = work.size, work.k
    work.across = np.empty(size["V"] * k, dtype=work.ids)
    work.rank = np.empty(size["V"] * k, dtype=np.uint8)
    smallest = np.empty(size["E"], dtype=work.ids)
    scrambled = np.empty(size["E"], dtype=np.int8)
    verdicts = work.run.split(
        rules.check_edges,
        size["E"],
        *work.flat(
            "edges/source", "edges/target", "edges/source_corner", "edges/target_corner", "edges/twist"
        ),
        *work.flat("vertices/edge", "vertices/leaves", "vertices/orientation"),
        work.tables.ranks,
        k ** np.arange(k - 1, -1, -1),
        work.across,
        work.rank,
        smallest,
        scrambled,
        work.axes,
        work.interior,
    )
    work.judge(verdicts)
    for first, last, kind in ((0, work.interior, "internal"), (work.interior, size["E"], "external")):
        if (fall := np.diff(smallest[first:last]) < 0).any():
            e = first + 1 + int(np.argmax(fall))
            s, i = divmod(int(smallest[e]), k)
            end = "source" if tuple(work["edges/source"][e]) == (s, i) else "target"
            why = f"{kind} edges are numbered by smallest half-edges, and the one before has a larger"
            raise entry(work.skeleton, f"edges/{end}", 2 * e, why)
    ordered = not scrambled.any()
    if bool(work.skeleton.flags["ordered"]) != ordered:
        e = int(np.argmax(scrambled))
        why = (
            "the corners ascend at both ends of every edge"
            if ordered
            else f"the corners of edge {e} do not ascend"
        )
        raise wrong(f"it is {not ordered}, but {why}", "flags/ordered")


def _check_components(work: _Work) -> None:
    """Components, and that the orientation was spread breadth first: the edges it went over have no twist."""
    v = work.size["V"]
    component, queue = np.full(v, -1, dtype=work.ids), np.empty(v, dtype=work.ids)
    via: np.ndarray = np.empty(v, dtype=work.ids)
    parts = work.run(rules.breadth_first, work.across, component, via, queue, work.axes)
    compare(
        work.skeleton,
        "vertices/component",
        component,
        "the edges put this vertex into component {wanted}, counted by smallest vertices",
    )
    if parts != work.counts["components"]:
        raise wrong(f"it is {work.counts['components']}, but the edges make it {parts}", "counts/components")
    twist = work["edges/twist"]
    tree: np.ndarray = work["vertices/edge"].ravel()[via[via >= 0]]
    if twist[tree].any():
        e = int(tree[twist[tree] != 0].min())
        why = "the orientation is spread over this edge, breadth first from the component's smallest vertex"
        raise entry(work.skeleton, "edges/twist", e, why)
    orientable = np.ones(parts, dtype=bool)
    twisted = np.flatnonzero(twist[: work.interior])
    orientable[component[work["edges/source"][twisted, 0]]] = False
    for part, (have, holds) in enumerate(zip(work.skeleton.flags["orientable"], orientable, strict=True)):
        if bool(have) != holds:
            why = "has no twisted edge" if holds else "has a twisted edge"
            raise wrong(f"it is {bool(have)}, but the component {why}", f"flags/orientable[{part}]")


def _check_faces(work: _Work) -> None:
    faces = work.size["F"]
    smallest = np.empty(faces, dtype=work.ids)
    work.edge_twists = np.empty(faces, dtype=np.int8)
    work.holonomy = np.zeros(faces, dtype=np.int8)
    verdicts = work.run.split(
        rules.check_faces,
        faces,
        *work.flat("faces/vertex_offsets", "faces/edge_offsets", "faces/vertex", "faces/wedge"),
        *work.flat("faces/edge", "faces/edge_sign", "faces/place", "faces/against"),
        *work.flat("wedges/face", "wedges/direction", "edges/face", "edges/face_sign"),
        *work.flat("vertices/edge", "vertices/leaves", "edges/source_corner", "edges/target_corner"),
        *work.flat("edges/twist", "vertices/orientation"),
        work.across,
        work.rank,
        work.image,
        work.tables.compose.ravel(),
        work.pair,
        work.slots.ravel(),
        smallest,
        work.edge_twists,
        work.holonomy,
        work.axes,
        work.internal,
        int(work.skeleton.flags["ordered"]),
    )
    work.judge(verdicts)
    for first, last, kind in ((0, work.internal, "internal"), (work.internal, faces, "external")):
        if (fall := np.diff(smallest[first:last]) < 0).any():
            f = first + 1 + int(np.argmax(fall))
            why = f"{kind} faces are numbered by smallest wedges, and the face before has a larger one"
            raise entry(work.skeleton, "faces/vertex", int(work["faces/vertex_offsets"][f]), why)


def _check_boundary(work: _Work) -> None:
    """Nodes against edges, links against faces, nodes against links."""
    s, inner, internal = work.skeleton, work.interior, work.internal
    nodes, links = work.size["B"], work.size["L"]
    source, target = work["edges/source"][inner:], work["edges/target"][inner:]
    leaving = source[:, 0] >= 0
    half = np.where(leaving[:, None], source, target)
    compare(
        s,
        "nodes/edge",
        inner + np.arange(nodes),
        "the external edges come in the order of the nodes: {wanted}",
    )
    compare(s, "nodes/vertex", half[:, 0], "the external edge there starts or ends at vertex {wanted}")
    compare(s, "nodes/slot", half[:, 1], "the external edge there starts or ends at slot {wanted}")
    compare(
        s,
        "nodes/orientation",
        np.where(leaving, 1, -1),
        "the direction of the external edge makes it {wanted}",
    )

    offsets = work["faces/edge_offsets"]
    first, last = offsets[internal:-1], offsets[internal + 1 :] - 1
    start, end = work["faces/edge"][first] - inner, work["faces/edge"][last] - inner
    compare(s, "links/source", end, "the external face ends at node {wanted}, and there its link starts")
    compare(s, "links/target", start, "the external face starts at node {wanted}, and there its link ends")
    compare(
        s,
        "links/face",
        internal + np.arange(links),
        "the external faces come in the order of the links: {wanted}",
    )
    compare(
        s, "links/twist", work.edge_twists[internal:], "the twists along the external face add up to {wanted}"
    )
    link, leaves = np.full((nodes, work.d), -1), np.zeros((nodes, work.d), dtype=np.int8)
    # the visits of external edges are as many as places at nodes, and no two at one place (`check_faces`)
    for node, visit, sign in ((end, last, 1), (start, first, -1)):
        link[node, work["faces/place"][visit]] = np.arange(links)
        leaves[node, work["faces/place"][visit]] = sign
    compare(s, "nodes/link", link, "the external face at this place has link {wanted}")
    compare(s, "nodes/link_leaves", leaves, "the link at this place starts (+1) or ends (-1) there: {wanted}")

    neighbour = np.where(leaves > 0, start[link], end[link]).astype(work.ids, copy=False)
    component, via, queue = (
        np.full(nodes, -1, dtype=work.ids),
        np.empty(nodes, work.ids),
        np.empty(nodes, work.ids),
    )
    work.run(rules.breadth_first, neighbour.ravel(), component, via, queue, tuple(range(work.d)))
    compare(
        s,
        "nodes/component",
        component,
        "the links put this node into component {wanted} of the boundary, counted by smallest nodes",
    )


def _check_labels(work: _Work) -> None:
    if "vertices/corners" not in work.skeleton:
        return
    verdicts = work.run.split(
        rules.check_labels,
        work.size["E"],
        *work.flat("edges/source", "edges/target", "edges/source_corner", "edges/target_corner"),
        *work.flat("vertices/corners", "nodes/corners"),
        work.axes,
        work.interior,
    )
    work.judge(verdicts)
    wanted = np.sort(_ridges(work, work.internal), axis=1)
    compare(work.skeleton, "links/corners", wanted, "the labels of the ridge, ascending, have {wanted} there")
    if "coordinates/point" in work.skeleton:
        labels: np.ndarray = work["vertices/corners"]
        rows = len(work["coordinates/point"])
        if labels.min() < 0 or labels.max() >= rows:
            flat = int(np.argmax((labels < 0) | (labels >= rows)))
            raise entry(
                work.skeleton, "vertices/corners", flat, f"coordinates/point has {rows} rows, one per label"
            )


def _ridges(work: _Work, first_face: int) -> np.ndarray:
    """Labels of the ridges of the faces from `first_face` on, in the order of the corners, (faces, D - 1)."""
    visit = work["faces/vertex_offsets"][first_face:-1]
    others = np.array([[c for c in work.axes if c not in pair] for pair in work.slots.tolist()])
    corners = work["vertices/corners"][work["faces/vertex"][visit]]
    return np.take_along_axis(corners, others[work["faces/wedge"][visit]], axis=1)


def _check_singular(work: _Work) -> None:
    """Holonomies are read from the gluings; pinched ridges and twins exist where labels were matched.

    A file does not say whether its labels were matched, so the pinched bits may also be all 0.
    """
    s = work.skeleton
    if not s.flags["singular"]:
        if work.holonomy.any():
            face = int(np.argmax(work.holonomy))
            raise wrong(f"it is False, but face {face} has a holonomy", "flags/singular")
        return
    pinched = work["faces/singular"] & 2
    repeated = np.zeros(work.size["F"], dtype=bool)
    twins = False
    if "vertices/corners" in s:
        repeated = _repeated(np.sort(_ridges(work, 0), axis=1))
        twins = bool(_repeated(np.sort(work["vertices/corners"], axis=1)).any())
    wanted = work.holonomy + 2 * (repeated if pinched.any() else np.zeros_like(repeated))
    compare(s, "faces/singular", wanted, "the gluings and the labels of the ridges make it {wanted}")
    if not wanted.any() and not twins:
        raise wrong(
            "it is True, but no face is singular and no two vertices have the same labels", "flags/singular"
        )


def _repeated(rows: np.ndarray) -> np.ndarray:
    """Which rows occur more than once."""
    _, group, size = np.unique(rows, axis=0, return_inverse=True, return_counts=True)
    return size[group.ravel()] > 1


# -- points and segments ---------------------------------------------------------------------------


def _check_points(work: _Work) -> None:
    """Classes of points and segments: by labels where those were matched, else by the gluings.

    A file does not say whether its labels were matched, so either is good where the tables agree with it.
    """
    s = work.skeleton
    if "vertices/point" not in s:
        return
    if "vertices/corners" in s:
        named = _named_points(work)
        if all(np.array_equal(s[name], wanted) for name, wanted in named.items()):
            return
    for name, wanted in _glued_points(work).items():
        why = "the gluings make it {wanted}, numbered by first occurrence"
        if name == "vertices/segment_sign":
            why = "the gluings make it {wanted} against the first segment of its class"
        compare(s, name, wanted, why)
    if "coordinates/point" in s and "vertices/corners" not in s:
        rows = len(work["coordinates/point"])
        if (missing := work["vertices/point"] >= rows).any():
            why = f"coordinates/point has {rows} rows, one per class of points"
            raise entry(s, "vertices/point", int(np.argmax(missing)), why)


def _named_points(work: _Work) -> dict[str, np.ndarray]:
    """A point is a label, a segment a pair of them, with the sign +1."""
    v, w = work.size["V"], work.size["W"]
    point = _first_occurrence(work["vertices/corners"].reshape(-1, 1)).reshape(v, work.k)
    segment = _first_occurrence(point[:, work.slots.astype(np.intp)].reshape(-1, 2)).reshape(v, w)
    return dict(zip(POINTS, (point, segment, np.ones((v, w), dtype=np.int8)), strict=True))


def _first_occurrence(rows: np.ndarray) -> np.ndarray:
    """Number equal rows by the order in which they first occur."""
    _, first, group = np.unique(rows, axis=0, return_index=True, return_inverse=True)
    return np.argsort(np.argsort(first))[group.ravel()]


def _glued_points(work: _Work) -> dict[str, np.ndarray]:
    v, k, w, ids = work.size["V"], work.k, work.size["W"], work.ids
    gluings = (work.across, work.rank, work.image)
    point, queue = np.full(v * k, -1, dtype=ids), np.empty(v * k, dtype=ids)
    work.run(rules.spread_points, *gluings, point, queue, work.axes)
    segment, queue = np.full(v * w, -1, dtype=ids), np.empty(2 * v * w, dtype=ids)
    reached = np.zeros(v * w, dtype=np.int8)
    work.run(
        rules.spread_segments, *gluings, work.pair, work.slots.ravel(), segment, reached, queue, work.axes
    )
    sign = np.array([0, 1, -1, 0], dtype=np.int8)[reached]  # upwards, downwards, both ways
    tables = point.reshape(v, k), segment.reshape(v, w), sign.reshape(v, w)
    return dict(zip(POINTS, tables, strict=True))


# -- colours ---------------------------------------------------------------------------------------


def _check_colours(work: _Work) -> None:
    """Colours are the numbers of slots and corners, which every gluing then keeps."""
    s = work.skeleton
    if COLOURS[0] not in s:
        return
    turned = np.flatnonzero((work.across >= 0) & (work.rank != 0))
    if len(turned):
        edge = int(s["vertices/edge"].ravel()[turned[0]])
        raise entry(s, "colours/edge", edge, "in a coloured skeleton every edge keeps the corners' numbers")
    source, target = s["edges/source"], s["edges/target"]
    slot = np.where(source[:, 0] >= 0, source[:, 1], target[:, 1])
    compare(s, "colours/edge", slot, "the edge lies at slot {wanted}")
    wedge = s["faces/wedge"][s["faces/vertex_offsets"][:-1]]
    compare(s, "colours/face", work.slots[wedge], "by the wedges of the face it is {wanted}")
