"""A picture before it has a format: marks in points (1/72 inch, y upwards), each with the cell it shows.

Whatever draws makes a `Sketch`; `dualize.draw.figure`, `svg` and `tikz` turn it into a matplotlib figure,
into SVG and into text for papers.  So all formats show the same, and a test can compare the marks with the
skeleton.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np

from .looks import INK, LOOKS, QUIET, TYPE

__all__ = [
    "COLUMN",
    "Area",
    "Badge",
    "Curve",
    "Head",
    "Mark",
    "Sketch",
    "Words",
    "along",
    "arrow",
    "bent",
    "finished",
    "straight",
    "text_width",
]

COLUMN = 244.0  # 8.6 cm, the width of a column in many journals
PAGE = 504.0  # 17.8 cm, both columns
CLEAR = 8.0  # margin
Cell = tuple[str, int]
Pair = Sequence[float] | np.ndarray


@dataclass(frozen=True, eq=False)
class Curve:
    """A chain of cubic Bézier curves: `points` has shape (3 n + 1, 2)."""

    points: np.ndarray
    look: str
    cell: Cell | None = None


@dataclass(frozen=True, eq=False)
class Head:
    """An arrowhead with its tip at `tip`, pointing in the direction of `way` (a unit vector)."""

    tip: np.ndarray
    way: np.ndarray
    look: str
    cell: Cell | None = None
    size: float = 6.0

    def corners(self) -> np.ndarray:
        """The three corners of the triangle, shape (3, 2)."""
        side = np.array([-self.way[1], self.way[0]])
        back = self.tip - self.size * self.way
        return np.array([self.tip, back + 0.42 * self.size * side, back - 0.42 * self.size * side])


@dataclass(frozen=True, eq=False)
class Area:
    """A filled polygon, shape (n, 2)."""

    points: np.ndarray
    look: str
    cell: Cell | None = None


@dataclass(frozen=True, eq=False)
class Badge:
    """A disc or a square of half-width `radius` with a text in it."""

    at: np.ndarray
    text: str
    look: str
    cell: Cell | None = None
    radius: float = 7.0


@dataclass(frozen=True, eq=False)
class Words:
    """A line of text; `anchor` is ``start``, ``middle`` or ``end``, the height is centred.

    `halo` clears what is under it.
    """

    at: np.ndarray
    text: str
    colour: str = INK
    size: float = TYPE
    anchor: str = "middle"
    bold: bool = False
    halo: bool = False
    cell: Cell | None = None


Mark = Curve | Head | Area | Badge | Words


@dataclass(frozen=True, eq=False)
class Sketch:
    """A finished picture.

    Attributes
    ----------
    width, height : float
        In points; marks lie in ``0 .. width`` and ``0 .. height``.
    marks : tuple
        In the order of drawing.
    title : str
        What is shown.
    note : str
        Which part is shown, and what the picture leaves out; empty when it shows all.
    """

    width: float
    height: float
    marks: tuple[Mark, ...]
    title: str
    note: str = ""

    def of(self, kind: str, mark: type | None = None) -> Iterator[Mark]:
        """The marks of the cells of a kind, or only those of one class."""
        for m in self.marks:
            if m.cell is not None and m.cell[0] == kind and (mark is None or isinstance(m, mark)):
                yield m


# -- curves ----------------------------------------------------------------------------------------


def straight(a: Pair, b: Pair) -> np.ndarray:
    """A straight line as a Bézier curve, shape (4, 2)."""
    a, b = np.asarray(a, dtype=float), np.asarray(b, dtype=float)
    return np.array([a, a + (b - a) / 3, b - (b - a) / 3, b])


def bent(a: Pair, b: Pair, height: float) -> np.ndarray:
    """A curve from `a` to `b` that rises by about `height` to the left of the line between them."""
    line = straight(a, b)
    step = line[3] - line[0]
    length = float(np.hypot(*step)) or 1.0
    line[1:3] += np.array([-step[1], step[0]]) / length * height * 4 / 3
    return line


def along(points: np.ndarray, t: np.ndarray | float) -> tuple[np.ndarray, np.ndarray]:
    """Points and unit tangents of one Bézier curve (4, 2) at the parameters `t`."""
    p = np.asarray(points, dtype=float)
    t = np.asarray(t, dtype=float)[..., None]
    at = (1 - t) ** 3 * p[0] + 3 * (1 - t) ** 2 * t * p[1] + 3 * (1 - t) * t**2 * p[2] + t**3 * p[3]
    way = (1 - t) ** 2 * (p[1] - p[0]) + 2 * (1 - t) * t * (p[2] - p[1]) + t**2 * (p[3] - p[2])
    size = np.linalg.norm(way, axis=-1, keepdims=True)
    return at, way / np.where(size > 0, size, 1.0)


def arrow(points: np.ndarray, t: float, look: str, cell: Cell | None, size: float = 6.0) -> Head:
    """An arrowhead on a curve, its middle at the parameter `t`."""
    at, way = along(points, t)
    return Head(at + way * size * 0.5, way, look, cell, size)


# -- finishing -------------------------------------------------------------------------------------


def text_width(text: str, size: float = TYPE, bold: bool = False) -> float:
    """A generous guess at the width of a text, in points."""
    narrow = sum(0.36 if c in "iljtf,.:;'|! ()" else 0.9 if c in "mwMW" else 0.62 for c in text) * size
    return narrow * 1.13 if bold else narrow


def wrapped(text: str, width: float, size: float = TYPE) -> list[str]:
    """A text in lines of at most `width` points; a word that is too long is cut."""
    lines: list[str] = []
    for word in text.split():
        while text_width(word, size) > width and len(word) > 4:
            word = word[:-2].rstrip("…") + "…"
        if lines and text_width(f"{lines[-1]} {word}", size) <= width:
            lines[-1] += f" {word}"
        else:
            lines.append(word)
    return lines


def finished(
    marks: Sequence[Mark],
    title: str,
    note: str = "",
    *,
    width: float | None = None,
    legend: Sequence[str] | None = None,
) -> Sketch:
    """Marks with a title above, a legend of the looks in use and the note below, all inside the picture.

    Parameters
    ----------
    marks : sequence of marks, anywhere
    title, note : str
    width : float, optional
        At least so many points; the marks are centred.
    legend : sequence of str, optional
        Names of looks; by default those that are used and mean something.
    """
    low, high = _bounds(marks)
    size = high - low
    full = max(size[0] + 2 * CLEAR, width or 0.0, 140.0)
    inner = full - 2 * CLEAR
    used = {m.look for m in marks if not isinstance(m, Words)}
    names = [n for n in LOOKS if n in used and LOOKS[n].means] if legend is None else list(legend)
    heading = wrapped(title, inner / 1.13, TYPE + 1)
    remarks = wrapped(note, inner)
    entries, below = _legend(names, inner)
    line = TYPE * 1.35
    notes = line * len(remarks) + (4 if remarks else 0)
    head = (TYPE + 1) * 1.3 * len(heading)
    height = CLEAR + notes + below + (8 if below else 2) + size[1] + 8 + head + CLEAR
    shift = np.array([(full - size[0]) / 2, CLEAR + notes + below + (8 if below else 2)]) - low
    out: list[Mark] = [moved(m, shift) for m in marks]
    for k, text in enumerate(heading):
        y = height - CLEAR - (TYPE + 1) * (0.65 + 1.3 * k)
        out.append(Words(np.array([CLEAR, y]), text, size=TYPE + 1, anchor="start", bold=True))
    out += [moved(m, np.array([CLEAR, CLEAR + notes])) for m in entries]
    for k, text in enumerate(remarks):
        y = CLEAR + line * (len(remarks) - k - 0.5)
        out.append(Words(np.array([CLEAR, y]), text, colour=QUIET, anchor="start"))
    return Sketch(float(full), float(height), tuple(out), title, note)


def _legend(names: Sequence[str], width: float) -> tuple[list[Mark], float]:
    """The marks of a legend of this width, from (0, 0) upwards, and its height."""
    if not names:
        return [], 0.0
    cell = max(text_width(LOOKS[n].means) for n in names) + 30
    columns = max(1, min(len(names), int(width // cell)))
    rows = -(-len(names) // columns)
    pitch = TYPE * 1.6
    out: list[Mark] = []
    for k, name in enumerate(names):
        look = LOOKS[name]
        x, y = (k // rows) * (width / columns), (rows - 1 - k % rows + 0.5) * pitch
        if look.shape:
            out.append(Badge(np.array([x + 10, y]), "", name, radius=4.0))
        elif look.fill:
            box = np.array([[x, y - 3.5], [x + 20, y - 3.5], [x + 20, y + 3.5], [x, y + 3.5]])
            out.append(Area(box, name))
        else:
            line = straight([x, y], [x + 20, y])
            out.append(Curve(line, name))
            if look.head:
                out.append(arrow(line, 0.55, name, None, 5.0))
        out.append(Words(np.array([x + 25, y]), look.means, anchor="start"))
    return out, rows * pitch


def moved(mark: Mark, shift: np.ndarray) -> Mark:
    """The same mark elsewhere."""
    if isinstance(mark, Curve | Area):
        return replace(mark, points=mark.points + shift)
    if isinstance(mark, Head):
        return replace(mark, tip=mark.tip + shift)
    return replace(mark, at=mark.at + shift)


def extent(mark: Mark) -> np.ndarray:
    """Two corners of a box around a mark, shape (2, 2)."""
    if isinstance(mark, Curve):
        t = np.linspace(0, 1, 9)
        points = np.concatenate(
            [along(mark.points[k : k + 4], t)[0] for k in range(0, len(mark.points) - 1, 3)]
        )
    elif isinstance(mark, Area):
        points = mark.points
    elif isinstance(mark, Head):
        points = mark.corners()
    elif isinstance(mark, Badge):
        points = np.array([mark.at - mark.radius - 1, mark.at + mark.radius + 1])
    else:
        wide = text_width(mark.text, mark.size, mark.bold)
        left = {"start": 0.0, "middle": wide / 2, "end": wide}[mark.anchor]
        half = mark.size * 0.6
        x, y = mark.at
        points = np.array([[x - left, y - half], [x + wide - left, y + half]])
    return np.array([points.min(axis=0), points.max(axis=0)])


def _bounds(marks: Sequence[Mark]) -> tuple[np.ndarray, np.ndarray]:
    if not marks:
        return np.zeros(2), np.zeros(2)
    boxes = np.array([extent(m) for m in marks])
    return boxes[:, 0].min(axis=0), boxes[:, 1].max(axis=0)
