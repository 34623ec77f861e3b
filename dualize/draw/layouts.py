"""Where the nodes of a graph go: planar where that is possible, else symmetric, else by springs.

All layouts are deterministic.  Unit of length: the distance of neighbours, about.

References
----------
W. T. Tutte, How to draw a graph, Proc. London Math. Soc. 13 (1963) 743-767.  T. Kamada, S. Kawai, An
algorithm for drawing general undirected graphs, Inform. Process. Lett. 31 (1989) 7-15.  Both from memory.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from itertools import combinations

import numpy as np

from .symmetry import best_rotation

__all__ = ["layout", "nearest", "neighbours_of"]

SYMMETRIC = 60  # nodes up to which symmetries are looked for
UNEVEN = 0.12  # a drawing without crossings that is more uneven is worse than one with some
RINGS = 4  # more rings than this are no clearer than springs


def neighbours_of(count: int, ends: np.ndarray) -> list[Counter[int]]:
    """How many links lead from each node to each other; `ends` has shape (links, 2)."""
    near: list[Counter[int]] = [Counter() for _ in range(count)]
    for a, b in ends.tolist():
        near[a][b] += 1
        if a != b:
            near[b][a] += 1
    return near


def nearest(near: Sequence[Counter[int]], start: int, most: int) -> list[int]:
    """The nodes nearest to `start`, at most so many, breadth first."""
    seen, order = {start}, [start]
    for v in order:
        for w in sorted(near[v]):
            if len(order) >= most:
                return order
            if w not in seen:
                seen.add(w)
                order.append(w)
    return order


def parts_of(near: Sequence[Counter[int]]) -> list[list[int]]:
    """The nodes of each connected component, by smallest node."""
    seen: set[int] = set()
    parts = []
    for v in range(len(near)):
        if v not in seen:
            part = sorted(nearest(near, v, len(near)))
            seen.update(part)
            parts.append(part)
    return parts


def layout(near: Sequence[Counter[int]], aspect: float = 1.0) -> tuple[np.ndarray, str]:
    """Positions of the nodes, shape (n, 2), and how they were found.

    Components are laid out one by one and put side by side.  `aspect` is the wanted width by height.

    Returns
    -------
    positions : ndarray of float64, shape (n, 2)
    how : str
        ``"symmetric"``, ``"planar"``, ``"springs"``, or several of them.
    """
    boxes, ways = [], []
    parts = parts_of(near)
    for part in parts:
        index = {v: k for k, v in enumerate(part)}
        at, how = _connected([Counter({index[w]: m for w, m in near[v].items()}) for v in part])
        boxes.append(at - at.min(axis=0))
        ways.append(how)
    out = np.zeros((len(near), 2))
    for part, at, corner in zip(parts, boxes, _packed(boxes, aspect), strict=True):
        out[part] = at + corner
    return out, " and ".join(sorted(set(ways)))


def _packed(boxes: list[np.ndarray], aspect: float) -> list[np.ndarray]:
    """The lower left corners of boxes in rows, from the top down."""
    sizes = [box.max(axis=0) + 1.0 for box in boxes]
    wanted = max(
        max((s[0] for s in sizes), default=0.0),
        float(np.sqrt(sum(s[0] * s[1] for s in sizes) * aspect)) * 1.15,
    )
    corners, x, y, row = [], 0.0, 0.0, 0.0
    for size in sizes:
        if x and x + size[0] > wanted:
            x, y, row = 0.0, y - row, 0.0
        corners.append(np.array([x, y - size[1]]))
        x, row = x + size[0], max(row, size[1])
    return corners


def _connected(near: list[Counter[int]]) -> tuple[np.ndarray, str]:
    n = len(near)
    if n <= 2:
        return np.array([[0.0, 0.0], [1.6, 0.0]])[:n], "symmetric"
    simple = sorted({(v, w) for v in range(n) for w in near[v] if v < w})
    ring = all(len([w for w in near[v] if w != v]) == 2 for v in range(n))
    planar = None if ring else _planar(n, simple)
    if planar is not None and n > 3:
        return _scaled(planar, simple), "planar"
    if n <= SYMMETRIC and (cycles := best_rotation(near)) is not None:
        rings = [c for c in cycles if len(c) > 1]
        if len(rings) <= RINGS:
            return _scaled(_rings(n, rings, simple), simple), "symmetric"
    return _scaled(_springs(n, simple), simple), "springs"


def _scaled(at: np.ndarray, simple: list[tuple[int, int]]) -> np.ndarray:
    """Positions with no two nodes nearer than 1, and the median link no shorter than 1.5."""
    pairs = np.array(simple)
    long = float(np.median(np.linalg.norm(at[pairs[:, 0]] - at[pairs[:, 1]], axis=1)))
    gaps = np.linalg.norm(at[:, None] - at[None], axis=2)[np.triu_indices(len(at), 1)]
    close = float(gaps.min())
    return at * max(1.0 / max(close, 1e-9), 1.5 / max(long, 1e-9)) if close > 1e-6 * long else at * 1.5 / long


# -- planar ----------------------------------------------------------------------------------------


def _planar(n: int, simple: list[tuple[int, int]]) -> np.ndarray | None:
    """Positions without crossings, evenly spread, or None if there are none or they cannot be spread."""
    import networkx

    graph = networkx.Graph()
    graph.add_nodes_from(range(n))
    graph.add_edges_from(simple)
    good, embedding = networkx.check_planarity(graph)
    if not good:
        return None
    if n > 3 and networkx.node_connectivity(graph) >= 3:
        flat = _barycentric(n, simple, embedding)
        return None if crossings(flat, simple) else flat
    # a loose graph: springs alone may do, else a drawing on a grid evened out by springs
    flat = _springs(n, simple)
    if not crossings(flat, simple):
        return flat
    grid = networkx.combinatorial_embedding_to_pos(embedding)
    flat = _loosened(np.array([grid[v] for v in range(n)], dtype=float), simple)
    return flat if _evenness(flat, simple) > UNEVEN and not crossings(flat, simple) else None


def _evenness(at: np.ndarray, simple: list[tuple[int, int]]) -> float:
    """The least distance of two nodes by the length of the longest link."""
    pairs = np.array(simple)
    gaps = np.linalg.norm(at[:, None] - at[None], axis=2)[np.triu_indices(len(at), 1)]
    return float(gaps.min() / np.linalg.norm(at[pairs[:, 0]] - at[pairs[:, 1]], axis=1).max())


def _barycentric(n: int, simple: list[tuple[int, int]], embedding: object) -> np.ndarray:
    """Tutte's layout with the longest face outside, the inside pulled apart."""
    faces: list[list[int]] = []
    seen: set[tuple[int, int]] = set()
    for v, w in embedding.edges():  # type: ignore[attr-defined]
        if (v, w) not in seen:
            faces.append(embedding.traverse_face(v, w, mark_half_edges=seen))  # type: ignore[attr-defined]
    outer = max(faces, key=lambda f: (len(f), [-x for x in sorted(f)]))
    angle = np.pi / 2 + 2 * np.pi * np.arange(len(outer)) / len(outer)
    rim = np.column_stack([np.cos(angle), np.sin(angle)])
    if len(outer) == 4:
        rim = np.array([[-1, 1], [-1, -1], [1, -1], [1, 1]], dtype=float)
    system, right = np.eye(n), np.zeros((n, 2))
    right[outer] = rim
    inside = sorted(set(range(n)) - set(outer))
    for v in inside:
        near = [w for pair in simple if v in pair for w in pair if w != v]
        system[v, near] = -1.0 / len(near)
    at: np.ndarray = np.linalg.solve(system, right)
    # pull the crowded middle outward, as far as nothing crosses
    radius = np.linalg.norm(at, axis=1, keepdims=True)
    for power in (0.5, 0.65, 0.8):
        spread = at * np.maximum(radius, 1e-9) ** (power - 1)
        if not crossings(spread, simple):
            return spread
    return at


def _loosened(at: np.ndarray, simple: list[tuple[int, int]]) -> np.ndarray:
    """A planar drawing evened out by springs, if that lets nothing cross."""
    span = at.max(axis=0) - at.min(axis=0)
    at = (at - at.min(axis=0)) / np.where(span > 0, span, 1.0)
    moved = _springs(len(at), simple, at)
    return at if crossings(moved, simple) else moved


def crossings(at: np.ndarray, simple: list[tuple[int, int]]) -> int:
    """How many pairs of straight links cross away from their ends."""
    if len(simple) < 2:
        return 0
    pairs = np.array(simple)
    one, two = np.array(list(combinations(range(len(pairs)), 2))).T
    apart = (pairs[one][:, :, None] != pairs[two][:, None, :]).all(axis=(1, 2))
    a, b = at[pairs[one[apart], 0]], at[pairs[one[apart], 1]]
    c, d = at[pairs[two[apart], 0]], at[pairs[two[apart], 1]]

    def side(p: np.ndarray, q: np.ndarray, r: np.ndarray) -> np.ndarray:
        u, v = q - p, r - p
        area: np.ndarray = u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0]
        return area

    across = (side(a, b, c) * side(a, b, d) < 0) & (side(c, d, a) * side(c, d, b) < 0)
    return int(across.sum())


# -- rings and springs -----------------------------------------------------------------------------


def _rings(n: int, rings: list[list[int]], simple: list[tuple[int, int]]) -> np.ndarray:
    """Concentric rings, turned and ordered so that the links are short."""
    size = len(rings[0])
    pairs = np.array(simple)
    best, chosen = np.inf, np.zeros((n, 2))
    steps = [q for q in range(1, size // 2 + 1) if np.gcd(q, size) == 1]
    for q in steps:
        turned = [[ring[q * k % size] for k in range(size)] for ring in rings]
        for order in (turned, turned[::-1]):
            at = np.zeros((n, 2))
            for k, ring in enumerate(order):
                radius = max(1.0, size / (2 * np.pi)) + 1.05 * (len(order) - 1 - k)
                # every turn by half a step is tried against the rings outside, which are in place
                done = [v for r in order[:k] for v in r]
                turns = np.arange(2 * size) if k else [0]
                costs = []
                for turn in turns:
                    at[ring] = _circle(size, radius, np.pi / 2 + turn * np.pi / size)
                    known = np.zeros(n, dtype=bool)
                    known[done + ring] = True
                    inner = pairs[known[pairs].all(axis=1)]
                    costs.append(np.linalg.norm(at[inner[:, 0]] - at[inner[:, 1]], axis=1).sum())
                turn = turns[int(np.argmin(np.round(costs, 9)))]
                at[ring] = _circle(size, radius, np.pi / 2 + turn * np.pi / size)
            cost = np.linalg.norm(at[pairs[:, 0]] - at[pairs[:, 1]], axis=1).sum()
            if cost < best - 1e-9:
                best, chosen = float(cost), at
    return chosen


def _circle(count: int, radius: float, start: float) -> np.ndarray:
    angle = start - 2 * np.pi * np.arange(count) / count
    return radius * np.column_stack([np.cos(angle), np.sin(angle)])


def _springs(n: int, simple: list[tuple[int, int]], start: np.ndarray | None = None) -> np.ndarray:
    """The layout of Kamada and Kawai, from a circle unless told otherwise."""
    import networkx

    graph = networkx.Graph()
    graph.add_nodes_from(range(n))
    graph.add_edges_from(simple)
    first = _circle(n, 1.0, np.pi / 2) if start is None else start
    # rounded, so that the last digits of a machine's arithmetic do not reach the picture
    found = networkx.kamada_kawai_layout(graph, pos={v: first[v] for v in range(n)})
    return np.round(np.array([found[v] for v in range(n)], dtype=float), 4)
