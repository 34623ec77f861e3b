"""Single cells: a vertex with its edges, wedges and the boundary graph around it; a face as a polygon."""

from __future__ import annotations

from itertools import pairwise

import numpy as np

from ..layout import wedge_pairs
from ..skeleton import Skeleton
from .graphs import checked_number, plural, sentence
from .looks import BLUE, GREEN, MINUS, ORANGE, QUIET
from .sketch import COLUMN, Area, Badge, Curve, Mark, Sketch, Words, along, arrow, bent, finished, straight
from .wires import Wire, wired

__all__ = ["face_polygon", "vertex_pattern"]

CORNERS = 36  # corners of a polygon; a longer face is drawn with a gap


def vertex_pattern(skeleton: Skeleton, number: int = 0) -> Sketch:
    """A vertex with its D + 1 edges, one at each slot, and its wedges between them.

    The slots with the wedges are the boundary graph of the vertex: that of one simplex alone, the complete
    graph on D + 1 nodes.  A wedge is drawn from the slot by which its face enters to the slot by which it
    leaves.
    """
    s, d = skeleton, skeleton.dimension
    v = checked_number(number, s.counts["vertices"], "vertex")
    k = d + 1
    angle = np.pi / 2 - 2 * np.pi * np.arange(k) / k
    way = np.column_stack([np.cos(angle), np.sin(angle)])
    rim = 86.0 if k > 3 else 74.0
    at = np.concatenate([np.zeros((1, 2)), way * rim])
    sign = "vertex+" if s["vertices/orientation"][v] > 0 else "vertex-"
    badges = [Badge(at[0], str(v), sign, ("vertex", v), 9.0)]
    marks: list[Mark] = []
    wires: list[Wire] = []
    for slot, (e, leaves) in enumerate(s.edges_at(v)):
        name, kind, far = _far_end(s, e, v, slot)
        look = "twisted" if s["edges/twist"][e] else "edge" if kind == "vertex" else "external"
        badges.append(Badge(at[1 + slot], str(slot), "slot", None, 6.0))
        a, b = (0, 1 + slot) if leaves > 0 else (1 + slot, 0)
        wires.append(Wire(a, b, look, ("edge", e), f"e{e}"))
        out = at[1 + slot] + way[slot] * 17
        marks.append(Curve(straight(at[1 + slot], at[1 + slot] + way[slot] * 14), look, None))
        side = "middle" if abs(way[slot][0]) < 0.2 else "start" if way[slot][0] > 0 else "end"
        colour = BLUE if kind == "vertex" else ORANGE
        lift = np.array([0, 3.5 * np.sign(way[slot][1]) if side == "middle" else 0])
        marks.append(Words(out + lift, name, colour=colour, anchor=side, cell=(kind, far)))
    for w, (i, j) in enumerate(wedge_pairs(d)):
        face, direction = int(s["wedges/face"][v, w]), int(s["wedges/direction"][v, w])
        a, b = (1 + i, 1 + j) if direction > 0 else (1 + j, 1 + i)
        wires.append(Wire(a, b, "wedge", ("face", face), f"f{face}", _chord(at[a], at[b], k)))
    corners = ""
    if "vertices/corners" in s:
        corners = " ".join(map(str, s.named(s["vertices/corners"][v])))
    note = ["numbers in circles are slots; e are edges, f faces, v and n what lies at the other end"]
    if corners:
        note.append(f"corners {corners}, slot i is opposite the i-th of them, counted from 0")
    title = f"Vertex {v} and its boundary graph"
    return finished([*marks, *wired(at, badges, wires)], title, sentence(note), width=COLUMN)


def _far_end(s: Skeleton, edge: int, vertex: int, slot: int) -> tuple[str, str, int]:
    """What lies at the other end of an edge: its name, kind and number."""
    ends = [s["edges/source"][edge].tolist(), s["edges/target"][edge].tolist()]
    here = [vertex, slot]
    other = ends[1] if ends[0] == here else ends[0]
    if other[0] < 0:
        return f"n{other[1]}", "node", other[1]
    return f"v{other[0]}, slot {other[1]}", "vertex", other[0]


def _chord(a: np.ndarray, b: np.ndarray, k: int) -> np.ndarray:
    """From slot to slot, bowed away from the vertex in the middle."""
    middle = (a + b) / 2
    length = float(np.linalg.norm(b - a))
    left = np.array([-(b - a)[1], (b - a)[0]])
    away = float(np.dot(left, middle))
    side = 1.0 if away >= -1e-9 else -1.0
    share = 0.1 if k == 5 else 0.16
    if np.linalg.norm(middle) < 1.0:  # opposite slots of a tetrahedron: around the middle
        share = 0.3
        side = 1.0 if (a[0], a[1]) > (b[0], b[1]) else -1.0
    return bent(a, b, side * share * length)


def face_polygon(skeleton: Skeleton, number: int = 0) -> Sketch:
    """A face as a polygon: its vertices and edges in order, the sign of each edge, and the wedges it passes.

    Arrowheads give the directions of the edges themselves; the sign tells whether the face runs along (+) or
    against it.  An external face is closed by its link, which runs from the node at its end to that at its
    beginning.
    """
    s = skeleton
    inner = s.counts["faces_internal"]
    f = checked_number(number, inner + s.counts["faces_external"], "face")
    closed = f < inner
    cells = s.face(f)
    visits = [(n, w) for kind, n, w in cells if kind == "vertex"]
    edges = [(e, sign) for kind, e, sign in cells if kind == "edge"]
    ring: list[tuple[str, int, int]] = [("vertex", n, w) for n, w in visits]
    if not closed:
        link = f - inner
        first, last = int(s["links/target"][link]), int(s["links/source"][link])
        ring = [("node", first, -1), *ring, ("node", last, -1)]
    total = len(ring)
    gap = total > CORNERS
    shown = ring[: CORNERS - 2] if gap else ring
    count = len(shown) + (2 if gap else 0)
    at, sides = _polygon(count)
    middle = at.mean(axis=0)
    badges = []
    marks: list[Mark] = [Area(_outline(sides), "face", ("face", f))]
    words: list[Words] = []
    small = 7.5 if count <= 14 else 6.0
    pairs = wedge_pairs(s.dimension)
    for k, (kind, n, w) in enumerate(shown):
        sign = s["vertices/orientation" if kind == "vertex" else "nodes/orientation"][n]
        badges.append(Badge(at[k], str(n), f"{kind}{'+' if sign > 0 else '-'}", (kind, n), small))
        if w >= 0 and count <= 14:
            inward = _unit(middle - at[k]) if count > 1 else np.array([0.0, -1.0])
            spot = at[k] + inward * (small + 9.5)
            words.append(Words(spot, "{}→{}".format(*_passed(s, n, w, pairs)), colour=QUIET, size=5.6))
    curves: list[Mark] = []
    heads: list[Mark] = []
    for k in range(count if closed and not gap else count - 1):
        if gap and k >= len(shown) - 1:
            continue
        e, sign = edges[k]
        course = sides[k] if sign > 0 else sides[k][::-1]
        look = "twisted" if s["edges/twist"][e] else "edge" if e < s.counts["edges_internal"] else "external"
        curves.append(Curve(course, look, ("edge", e)))
        heads.append(arrow(course, 0.5, look, ("edge", e), 6.0 if count <= 20 else 4.5))
        text = f"{'+' if sign > 0 else MINUS}e{e}"
        words.append(_side_words(sides[k], middle, text, BLUE, ("edge", e), count))
    if gap:
        for k in (len(shown) - 1, len(shown), len(shown) + 1):
            if k < len(sides):
                curves.append(Curve(sides[k], "cut"))
    elif not closed:
        look = "twisted link" if s["links/twist"][link] else "link"
        curves.append(Curve(sides[-1], look, ("link", link)))
        heads.append(arrow(sides[-1], 0.5, look, ("link", link)))
        words.append(_side_words(sides[-1], middle, f"l{link}", ORANGE, ("link", link), count))
    marks += [*curves, *heads, *words, *badges, *_turning(middle, at, f)]
    note = ["the sign of an edge is + where the face runs along it"]
    if count <= 14:
        note.append("beside each vertex the slots by which the face enters and leaves")
    if gap:
        note.insert(0, f"only a part: the first {len(shown)} of {total} corners")
    what = f"{'internal' if closed else 'external'}, {plural(len(visits), 'vertex')}"
    if not closed:
        what += f", closed by link {f - inner}"
    labels = _ridge_labels(s, visits[0])
    title = f"Face {f} ({what}{', dual to ' + labels if labels else ''})"
    return finished(marks, title, sentence(note), width=COLUMN)


def _passed(s: Skeleton, vertex: int, wedge: int, pairs: list[tuple[int, int]]) -> tuple[int, int]:
    """The slots by which the face enters and leaves at a wedge."""
    i, j = pairs[wedge]
    return (i, j) if s["wedges/direction"][vertex, wedge] > 0 else (j, i)


def _ridge_labels(s: Skeleton, visit: tuple[int, int]) -> str:
    """The labels of the ridge to which a face is dual."""
    if "vertices/corners" not in s:
        return ""
    v, w = visit
    without = s.wedge(w)
    names = s.named(s["vertices/corners"][v])
    return " ".join(str(x) for c, x in enumerate(names) if c not in without)


def _polygon(count: int) -> tuple[np.ndarray, list[np.ndarray]]:
    """Corners, clockwise from the top left, and the sides as curves from each to the next."""
    if count == 1:
        at = np.array([[0.0, 40.0]])
        return at, [np.array([[0, 40], [95, 10], [-95, 10], [0, 40]])[[0, 1, 2, 3]] * [1.0, -1.0] + [0, 80]]
    if count == 2:
        at = np.array([[-62.0, 0.0], [62.0, 0.0]])
        return at, [bent(at[0], at[1], 44.0), bent(at[1], at[0], 44.0)]
    radius = max(66.0, count * (40.0 if count <= 14 else 30.0) / (2 * np.pi))
    radius = min(radius, 98.0) if count <= 14 else min(radius, 180.0)
    angle = np.pi / 2 + np.pi / count - 2 * np.pi * np.arange(count) / count
    at = radius * np.column_stack([np.cos(angle), np.sin(angle)])
    return at, [straight(at[k], at[(k + 1) % count]) for k in range(count)]


def _outline(sides: list[np.ndarray]) -> np.ndarray:
    return np.concatenate([along(side, np.linspace(0, 1, 24, endpoint=False))[0] for side in sides])


def _side_words(
    side: np.ndarray, middle: np.ndarray, text: str, colour: str, cell: tuple[str, int], count: int
) -> Words:
    at, way = along(side, 0.5)
    normal = np.array([-way[1], way[0]])
    if np.dot(normal, at - middle) < 0:
        normal = -normal
    half = np.array([0.31 * 7 * len(text), 3.5])
    away = 6.0 + float(np.abs(normal) @ half)
    size = 7.0 if count <= 20 else 5.6
    return Words(at + normal * away, text, colour=colour, size=size, halo=True, cell=cell)


def _turning(middle: np.ndarray, at: np.ndarray, face: int) -> list[Mark]:
    """An arc in the middle that turns as the face does, with the number of the face."""
    if len(at) == 1:
        middle = np.array([0.0, 70.0])
    radius = 17.0
    start, stop = np.radians(215), np.radians(-35)
    cuts = np.linspace(start, stop, 4)
    chain = [np.array([[np.cos(cuts[0]), np.sin(cuts[0])]])]
    for a, b in pairwise(cuts):
        h = 4 / 3 * np.tan((b - a) / 4)
        p, q = np.array([np.cos(a), np.sin(a)]), np.array([np.cos(b), np.sin(b)])
        chain.append(np.array([p + h * np.array([-p[1], p[0]]), q - h * np.array([-q[1], q[0]]), q]))
    points = middle + radius * np.concatenate(chain)
    return [
        Curve(points, "direction", ("face", face)),
        arrow(points[-4:], 0.97, "direction", ("face", face)),
        Words(middle, f"f{face}", colour=GREEN, bold=True, cell=("face", face)),
    ]


def _unit(vector: np.ndarray) -> np.ndarray:
    unit: np.ndarray = vector / max(float(np.linalg.norm(vector)), 1e-9)
    return unit
