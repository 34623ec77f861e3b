"""Lines between badges: parallel ones kept apart, loops opened, arrowheads where there is room."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from .looks import LOOKS, TYPE
from .sketch import Badge, Curve, Head, Mark, Words, along, arrow, bent, straight, text_width

__all__ = ["Wire", "wired"]

SAMPLES = np.linspace(0.04, 0.96, 24)
STOPS = (0.5, 0.42, 0.58, 0.34, 0.66, 0.27, 0.73)  # where arrowheads may be, as parameters of a curve


class Wire(NamedTuple):
    """A line from one badge to another, directed.

    `curve` overrides the course, a Bézier curve of shape (4, 2).
    """

    source: int
    target: int
    look: str
    cell: tuple[str, int]
    text: str = ""
    curve: np.ndarray | None = None


def wired(
    at: np.ndarray, badges: Sequence[Badge], wires: Sequence[Wire], *, numbers: bool = True
) -> list[Mark]:
    """The marks of wires between badges that lie at `at` (points), badges on top.

    `numbers` puts the text of each wire beside its arrowhead.
    """
    radius = np.array([b.radius for b in badges])
    courses = _courses(at, radius, wires)
    curves: list[Mark] = [Curve(c, w.look, w.cell) for c, w in zip(courses, wires, strict=True)]
    heads, words = _furnished(at, radius, wires, courses, numbers)
    return [*curves, *heads, *words, *badges]


def _courses(at: np.ndarray, radius: np.ndarray, wires: Sequence[Wire]) -> list[np.ndarray]:
    together: dict[tuple[int, int], list[int]] = defaultdict(list)
    for k, wire in enumerate(wires):
        together[min(wire.source, wire.target), max(wire.source, wire.target)].append(k)
    out: list[np.ndarray] = [np.zeros((4, 2))] * len(wires)
    ways = _directions(at, wires)
    for (a, b), group in together.items():
        for place, k in enumerate(group):
            wire = wires[k]
            if wire.curve is not None:
                out[k] = wire.curve
            elif a == b:
                out[k] = _loop(at[a], ways[a], place, len(group), radius[a])
            elif len(group) == 1:
                out[k] = _clear_course(at, radius, a, b)
            else:
                gap = max(16.0, min(30.0, 0.28 * float(np.linalg.norm(at[b] - at[a]))))
                out[k] = bent(at[a], at[b], gap * (place - (len(group) - 1) / 2))
            if a != b and wire.curve is None and wire.source != a:
                out[k] = out[k][::-1]
    return out


def _directions(at: np.ndarray, wires: Sequence[Wire]) -> list[float]:
    """For every badge the angle in the middle of the widest gap between its lines."""
    angles: list[list[float]] = [[] for _ in at]
    for wire in wires:
        if wire.source != wire.target:
            for a, b in ((wire.source, wire.target), (wire.target, wire.source)):
                angles[a].append(float(np.arctan2(*(at[b] - at[a])[::-1])))
    out = []
    for near in angles:
        if not near:
            out.append(np.pi / 2)
            continue
        ring = sorted(near)
        gaps = [(ring[(k + 1) % len(ring)] - x) % (2 * np.pi) or 2 * np.pi for k, x in enumerate(ring)]
        k = int(np.argmax(np.round(gaps, 6)))
        out.append(ring[k] + gaps[k] / 2)
    return out


def _loop(at: np.ndarray, way: float, place: int, count: int, radius: float) -> np.ndarray:
    """A drop that leaves a badge and comes back; several are fanned out."""
    angle = way + (place - (count - 1) / 2) * min(1.2, 2 * np.pi / count)
    wide = min(0.55, 1.2 / count + 0.1)
    reach = 4.6 * radius
    ends = [np.array([np.cos(angle + s * wide), np.sin(angle + s * wide)]) for s in (-1, 1)]
    return np.array([at, at + reach * ends[0], at + reach * ends[1], at])


def _clear_course(at: np.ndarray, radius: np.ndarray, a: int, b: int) -> np.ndarray:
    """A straight line, or the flattest curve that keeps off all other badges."""
    others = np.ones(len(at), dtype=bool)
    others[[a, b]] = False
    line = straight(at[a], at[b])
    if not others.any():
        return line
    length = float(np.linalg.norm(at[b] - at[a]))
    best, chosen = -np.inf, line
    for share in (0.0, 0.12, -0.12, 0.2, -0.2, 0.3, -0.3):
        course = bent(at[a], at[b], share * length)
        points, _ = along(course, SAMPLES)
        room = float((np.linalg.norm(points[:, None] - at[None, others], axis=2) - radius[others]).min())
        if room > 3.5:
            return course
        if room > best + 0.5:
            best, chosen = room, course
    return chosen


def _furnished(
    at: np.ndarray, radius: np.ndarray, wires: Sequence[Wire], courses: list[np.ndarray], numbers: bool
) -> tuple[list[Head], list[Words]]:
    """Arrowheads and numbers, one wire after the other, each where it is least in the way."""
    points = np.array([along(c, SAMPLES)[0] for c in courses]).reshape(len(courses), -1, 2)
    taken: list[tuple[float, float, float]] = [(x, y, r) for (x, y), r in zip(at, radius, strict=True)]
    heads: list[Head] = []
    words: list[Words] = []
    small = 5.0 if len(wires) > 60 else 6.0
    for k, (wire, course) in enumerate(zip(wires, courses, strict=True)):
        foreign = np.delete(points, k, axis=0).reshape(-1, 2)
        own = points[k]
        used = np.array(taken)
        costs = []
        for rank, t in enumerate(STOPS):
            spot, _ = along(course, t)
            cost = 0.02 * rank
            if LOOKS[wire.look].head:
                cost += _crowd(spot, small * 0.7, foreign) + _overlap(spot, small * 0.7, used)
            costs.append(cost)
        t = STOPS[int(np.argmin(np.round(costs, 6)))]
        spot, _ = along(course, t)
        if LOOKS[wire.look].head:
            heads.append(arrow(course, t, wire.look, wire.cell, small))
            taken.append((*spot, small * 0.7))
        if not (numbers and wire.text):
            continue
        used = np.array(taken)
        half = np.array([text_width(wire.text, TYPE - 0.5) / 2, TYPE * 0.45])
        options = []
        for rank, (u, side, far) in enumerate(
            (u, side, far) for far in (1.0, 1.6) for u in (t, *STOPS) for side in (1, -1)
        ):
            base, along_way = along(course, u)
            normal = side * np.array([-along_way[1], along_way[0]])
            offset = (3.6 if LOOKS[wire.look].head and abs(u - t) < 0.06 else 1.8) * far
            centre = base + normal * (offset + float(np.abs(normal) @ half))
            cost = 0.04 * rank + 2.5 * (far - 1)
            cost += _inside(centre, half + 0.8, foreign) * 0.5 + _inside(centre, half, own) * 0.5
            cost += _boxed(centre, half, used)
            options.append((round(cost, 6), rank, centre))
        _, _, centre = min(options, key=lambda option: option[:2])
        colour = LOOKS[wire.look].colour
        words.append(Words(centre, wire.text, colour=colour, size=TYPE - 0.5, halo=True, cell=wire.cell))
        for x in np.linspace(-1, 1, max(1, round(half[0] / half[1]))) if half[0] > half[1] else [0.0]:
            taken.append((centre[0] + x * (half[0] - half[1]), centre[1], half[1]))
    return heads, words


def _crowd(spot: np.ndarray, radius: float, points: np.ndarray) -> float:
    """How many points of other lines are within a radius."""
    if not len(points):
        return 0.0
    return float((np.linalg.norm(points - spot, axis=1) < radius + 1.5).sum())


def _overlap(spot: np.ndarray, radius: float, used: np.ndarray) -> float:
    """How deep a disc lies in discs that are taken."""
    gap = np.linalg.norm(used[:, :2] - spot, axis=1) - used[:, 2] - radius
    return float(np.maximum(0, 1.0 - gap).sum())


def _inside(centre: np.ndarray, half: np.ndarray, points: np.ndarray) -> float:
    """How many points lie in a box."""
    if not len(points):
        return 0.0
    return float((np.abs(points - centre) < half).all(axis=1).sum())


def _boxed(centre: np.ndarray, half: np.ndarray, used: np.ndarray) -> float:
    """How deep a box lies in discs that are taken."""
    off = np.maximum(np.abs(used[:, :2] - centre) - half, 0)
    gap = np.linalg.norm(off, axis=1) - used[:, 2]
    return float(np.maximum(0, 1.0 - gap).sum() * 2)
