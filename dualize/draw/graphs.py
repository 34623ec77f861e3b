"""The boundary graph and the dual graph."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence

import numpy as np

from ..errors import InputError
from ..skeleton import Skeleton
from .layouts import layout, neighbours_of
from .sketch import CLEAR, COLUMN, PAGE, Badge, Curve, Mark, Sketch, finished, straight
from .wires import Wire, wired

__all__ = ["LARGEST", "boundary_graph", "dual_graph"]

LARGEST = 400  # badges in one picture
NUMBERED = 90  # lines up to which their numbers are written
HOW = {
    "symmetric": "drawn by a symmetry",
    "planar": "drawn without crossings",
    "springs": "drawn by springs",
}


def boundary_graph(
    skeleton: Skeleton, *, number: int | None = None, component: int | None = None, most: int = 60
) -> Sketch:
    """The boundary graph: nodes as squares with their numbers, links as arrows from source to target.

    Parameters
    ----------
    skeleton : Skeleton
    number : int, optional
        Where more than `most` nodes are there, draw those nearest to this node (the first by default).
    component : int, optional
        Draw this component of the boundary only.
    most : int
        At most so many nodes.

    Raises
    ------
    InputError
        If there is no boundary, or no such node or component.
    """
    s = skeleton
    count = s.counts["nodes"]
    if not count:
        raise InputError("there is no boundary to draw", hint="draw another part, such as dual or vertex")
    most = checked_most(most)
    parts = s["nodes/component"]
    pieces = int(parts.max()) + 1
    if component is not None and not 0 <= component < pieces:
        raise InputError(
            f"there is no boundary component {component}", hint=f"components are numbered 0 to {pieces - 1}"
        )
    if number is not None:
        checked_number(number, count, "node")
        if component is not None and parts[number] != component:
            raise InputError(f"node {number} is in component {parts[number]}, not {component}")
    among = np.arange(count) if component is None else np.flatnonzero(parts == component)
    ends = np.column_stack([s["links/source"], s["links/target"]])
    shown = chosen(among, ends, number, most)
    inside = np.isin(ends, shown)
    links = np.flatnonzero(inside.all(axis=1))
    cut = np.flatnonzero(inside.sum(axis=1) == 1)
    at, how, size = _placed(len(shown), np.searchsorted(shown, ends[links]))
    badges = [
        Badge(at[k], str(n), "node+" if s["nodes/orientation"][n] > 0 else "node-", ("node", n), size)
        for k, n in enumerate(shown.tolist())
    ]
    index = {n: k for k, n in enumerate(shown.tolist())}
    wires = [
        Wire(
            index[a],
            index[b],
            "twisted link" if s["links/twist"][link] else "link",
            ("link", link),
            str(link),
        )
        for link, (a, b) in zip(links.tolist(), ends[links].tolist(), strict=True)
    ]
    marks = [*_stubs(at, index, ends[cut], size), *wired(at, badges, wires, numbers=len(wires) <= NUMBERED)]
    total = f"{len(among)} nodes" + ("" if component is None else f" of component {component}")
    note = [f"{HOW.get(how, 'drawn by ' + how)}"]
    if len(shown) < len(among):
        start = number if number is not None else int(among[0])
        note.insert(
            0,
            f"Only a part: {len(shown)} of {total}, those nearest to node {start}, and the {len(links)} of "
            f"{s.counts['links']} links between them",
        )
    elif pieces > 1 and component is None:
        note.insert(0, f"{pieces} components")
    if len(wires) > NUMBERED:
        note.append("the numbers of the links are left out")
    which = "" if component is None else f", component {component}"
    title = f"Boundary graph{which}: {plural(len(among), 'node')}, "
    title += plural(int(np.isin(ends, among).all(axis=1).sum()), "link")
    return finished(marks, title, sentence(note), width=_width(len(shown)))


def dual_graph(skeleton: Skeleton, *, number: int | None = None, most: int = 60) -> Sketch:
    """The vertices and edges of the foam, with the nodes at which the external edges end.

    Parameters
    ----------
    skeleton : Skeleton
    number : int, optional
        Where more than `most` vertices are there, draw those nearest to this vertex (the first by default).
    most : int
        At most so many vertices.
    """
    s = skeleton
    count = s.counts["vertices"]
    most = checked_most(most)
    if number is not None:
        checked_number(number, count, "vertex")
    inner = s.counts["edges_internal"]
    ends = np.column_stack([s["edges/source"][:inner, 0], s["edges/target"][:inner, 0]])
    shown = chosen(np.arange(count), ends, number, most)
    inside = np.isin(ends, shown)
    edges = np.flatnonzero(inside.all(axis=1))
    cut = np.flatnonzero(inside.sum(axis=1) == 1)
    local = np.searchsorted(shown, ends[edges])
    nodes = np.flatnonzero(np.isin(s["nodes/vertex"], shown))
    homes = np.searchsorted(shown, s["nodes/vertex"][nodes])
    # spread the vertices when nodes have to fit in between
    crowd = 1.0 if not len(nodes) else 1.35
    at, how, size = _placed(len(shown), local, crowd, len(nodes))
    index = {v: k for k, v in enumerate(shown.tolist())}
    badges = [
        Badge(
            at[k], str(v), "vertex+" if s["vertices/orientation"][v] > 0 else "vertex-", ("vertex", v), size
        )
        for k, v in enumerate(shown.tolist())
    ]
    outer = _fanned(at, local, homes, size)
    places = np.concatenate([at, outer]) if len(outer) else at
    for at_node, n in zip(outer, nodes.tolist(), strict=True):
        look = "node+" if s["nodes/orientation"][n] > 0 else "node-"
        badges.append(Badge(at_node, str(n), look, ("node", n), max(4.6, 0.76 * size)))
    twist = s["edges/twist"]
    wires = [
        Wire(a, b, "twisted" if twist[e] else "edge", ("edge", e), str(e))
        for e, (a, b) in zip(edges.tolist(), local.tolist(), strict=True)
    ]
    for k, (n, home) in enumerate(zip(nodes.tolist(), homes.tolist(), strict=True)):
        e = inner + n
        a, b = (home, len(shown) + k) if s["edges/source"][e, 0] >= 0 else (len(shown) + k, home)
        wires.append(Wire(a, b, "external", ("edge", e), str(e)))
    numbers = len(wires) <= NUMBERED
    marks = [*_stubs(at, index, ends[cut], size), *wired(places, badges, wires, numbers=numbers)]
    note = [HOW.get(how, "drawn by " + how)]
    if len(shown) < count:
        note.insert(
            0,
            f"Only a part: {len(shown)} of {count} vertices, those nearest to vertex {number or 0}, and the "
            f"edges between them or to nodes, {len(wires)} of {len(twist)}",
        )
    if not numbers:
        note.append("the numbers of the edges are left out")
    outside = f"{inner} + {len(twist) - inner} edges" if len(twist) > inner else plural(inner, "edge")
    title = f"Dual graph: {plural(count, 'vertex')}, {outside}"
    return finished(marks, title, sentence(note), width=_width(len(shown) + len(nodes)))


# -- shared ----------------------------------------------------------------------------------------


def checked_most(most: int) -> int:
    """`most`, if a picture can hold so many."""
    if not 1 <= most <= LARGEST:
        raise InputError(
            f"a picture cannot show {most} cells of a kind", hint=f"choose a number from 1 to {LARGEST}"
        )
    return most


def checked_number(number: int, count: int, kind: str) -> int:
    """`number`, if there is such a cell."""
    if not 0 <= number < count:
        known = f"{kind} numbers run from 0 to {count - 1}" if count else f"it has no {plural(0, kind)[2:]}"
        raise InputError(f"there is no {kind} {number}", hint=known)
    return number


def plural(count: int, word: str) -> str:
    """``1 vertex``, ``2 vertices``."""
    words = {"vertex": "vertices", "simplex": "simplices"}
    return f"{count} {word if count == 1 else words.get(word, word + 's')}"


def sentence(parts: Sequence[str]) -> str:
    """Parts joined to a remark that begins with a capital letter."""
    text = "; ".join(p for p in parts if p)
    return text[:1].upper() + text[1:] + "." if text else ""


def _width(badges: int) -> float:
    return COLUMN if badges <= 26 else PAGE


def chosen(among: np.ndarray, ends: np.ndarray, number: int | None, most: int) -> np.ndarray:
    """The numbers that are drawn, ascending: all of `among`, or the nearest ones."""
    if len(among) <= most:
        return among
    start = int(among[0]) if number is None else number
    # a few rings around the start are enough; the whole graph may be large
    order = np.argsort(ends.ravel(), kind="stable")
    flat = ends.ravel()[order]
    seen, queue = {start}, [start]
    allowed = set(among.tolist())
    for v in queue:
        rows = order[np.searchsorted(flat, v) : np.searchsorted(flat, v, side="right")]
        for w in sorted(ends.ravel()[rows ^ 1].tolist()):
            if len(queue) >= most:
                return np.array(sorted(queue))
            if w >= 0 and w not in seen and w in allowed:
                seen.add(w)
                queue.append(w)
    for v in among.tolist():
        if len(queue) >= most:
            break
        if v not in seen:
            seen.add(v)
            queue.append(v)
    return np.array(sorted(queue))


def _placed(
    count: int, ends: np.ndarray, crowd: float = 1.0, guests: int = 0
) -> tuple[np.ndarray, str, float]:
    """Positions in points, how they were found, and the half-width of a badge."""
    wide = _width(count + guests)
    unit, how = layout(neighbours_of(count, ends), 1.0 if wide == COLUMN else 1.4)
    span = unit.max(axis=0) - unit.min(axis=0)
    room = np.array([wide - 2 * CLEAR - 16, wide * (1.0 if wide == COLUMN else 0.8)])
    scale = min(92.0 / crowd, float((room / np.maximum(span, 1e-9)).min()))
    size = float(np.clip(0.24 * scale, 5.2, 7.5))
    return (unit - unit.min(axis=0)) * scale, how, size


def _fanned(at: np.ndarray, ends: np.ndarray, homes: np.ndarray, size: float) -> np.ndarray:
    """Where nodes go: around their vertices, in the gaps between the internal edges."""
    near = neighbours_of(len(at), ends)
    outer = np.zeros((len(homes), 2))
    guests = Counter(homes.tolist())
    centre = at.mean(axis=0)
    for home, count in guests.items():
        taken = [float(np.arctan2(*(at[w] - at[home])[::-1])) for w in near[home] if w != home]
        away = at[home] - centre
        outward = float(np.arctan2(*away[::-1])) if np.linalg.norm(away) > 1 else np.pi / 2
        gaps = [float(np.linalg.norm(at[w] - at[home])) for w in range(len(at)) if w != home]
        reach = float(np.clip(0.42 * min(gaps), 2.2 * size + 9.0, 34.0)) if gaps else 62.0
        angles = _spread(taken, count, outward)
        outer[np.flatnonzero(homes == home)] = at[home] + reach * np.column_stack(
            [np.cos(angles), np.sin(angles)]
        )
    return outer


def _spread(taken: list[float], count: int, outward: float) -> np.ndarray:
    """`count` angles as far as possible from those that are taken, and from each other."""
    if not taken:
        return outward - 2 * np.pi * np.arange(count) / count
    ring = sorted(a % (2 * np.pi) for a in taken)
    gaps = [((ring[(k + 1) % len(ring)] - a) % (2 * np.pi)) or 2 * np.pi for k, a in enumerate(ring)]
    # how many go into each gap: always to the gap where they are the least crowded
    share = [0] * len(ring)
    for _ in range(count):
        middle = [(ring[k] + gaps[k] / 2 - outward + np.pi) % (2 * np.pi) - np.pi for k in range(len(ring))]
        room = [(round(gaps[k] / (share[k] + 1), 6), -round(abs(middle[k]), 6)) for k in range(len(ring))]
        share[room.index(max(room))] += 1
    return np.array(
        [ring[k] + gaps[k] * (q + 1) / (share[k] + 1) for k in range(len(ring)) for q in range(share[k])]
    )


def _stubs(at: np.ndarray, index: dict[int, int], ends: np.ndarray, size: float) -> list[Mark]:
    """Short dotted lines where a link or edge leads out of the part that is drawn."""
    centre = at.mean(axis=0)
    leaving = Counter(index[a] if a in index else index[b] for a, b in ends.tolist())
    marks: list[Mark] = []
    for k, count in sorted(leaving.items()):
        away = at[k] - centre
        start = float(np.arctan2(*away[::-1]))
        for q in range(count):
            angle = start + 0.5 * (q - (count - 1) / 2)
            tip = at[k] + 2.4 * size * np.array([np.cos(angle), np.sin(angle)])
            marks.append(Curve(straight(at[k], tip), "cut"))
    return marks
