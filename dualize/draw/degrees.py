"""Histograms: how long faces are, and how many simplices lie around the points of the triangulation."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from ..skeleton import Skeleton
from .graphs import plural, sentence
from .looks import QUIET, TYPE
from .sketch import COLUMN, Area, Curve, Mark, Sketch, Words, finished, straight

__all__ = ["Histogram", "degree_histograms", "histograms"]

BARS = 24  # more different values than this are put into bins


class Histogram(NamedTuple):
    """How often each value occurs.

    Attributes
    ----------
    title : str
    low, high : ndarray of int64, shape (n,)
        The values in each bar, both ends included; equal where every value has a bar of its own.
    number : ndarray of int64, shape (n,)
        How often these values occur.
    look : str
    """

    title: str
    low: np.ndarray
    high: np.ndarray
    number: np.ndarray
    look: str

    def names(self) -> list[str]:
        """The values of each bar, such as ``6`` or ``6-9``."""
        return [str(a) if a == b else f"{a}-{b}" for a, b in zip(self.low, self.high, strict=True)]


def histograms(skeleton: Skeleton) -> list[Histogram]:
    """The histograms of a foam: lengths of internal and external faces, simplices at each point.

    The last needs labels or the table ``vertices/point``.  Values that do not occur have no bar; where
    there are many different ones, bars are bins of equal width.
    """
    s = skeleton
    inner = s.counts["faces_internal"]
    lengths = np.diff(s["faces/vertex_offsets"])
    out = []
    for title, values, look in (
        ("internal faces by their number of vertices", lengths[:inner], "bar"),
        ("external faces by their number of vertices", lengths[inner:], "open bar"),
    ):
        if len(values):
            out.append(_counted(title, values, look))
    points = s.arrays.get("vertices/corners", s.arrays.get("vertices/point"))
    if points is not None and points.size:
        # a point counts once for every corner that lies there
        _, around = np.unique(points, return_counts=True)
        title = f"points by their number of {'triangles' if s.dimension == 2 else 'top simplices'}"
        out.append(_counted(title, around, "plain bar"))
    return out


def _counted(title: str, values: np.ndarray, look: str) -> Histogram:
    value, count = np.unique(values.astype(np.int64), return_counts=True)
    if len(value) <= BARS:
        return Histogram(title, value, value, count, look)
    step = -(-int(value[-1] - value[0] + 1) // BARS)
    number = (value - value[0]) // step
    total = np.bincount(number, weights=count).astype(np.int64)
    low = value[0] + step * np.arange(len(total))
    return Histogram(title, low, low + step - 1, total, look)


def degree_histograms(skeleton: Skeleton) -> Sketch:
    """The histograms of a foam, one above the other, each bar with its count."""
    found = histograms(skeleton)
    marks: list[Mark] = []
    top = 0.0
    for histogram in found:
        marks += _bars(histogram, top)
        top -= 112.0
    s = skeleton
    faces = s.counts["faces_internal"] + s.counts["faces_external"]
    title = f"Degrees: {plural(faces, 'face')} of {plural(s.counts['vertices'], 'vertex')}"
    binned = any((h.low != h.high).any() for h in found)
    note = ["bars are bins of several values where there are many"] if binned else []
    return finished(marks, title, sentence(note), width=COLUMN)


def _bars(histogram: Histogram, top: float) -> list[Mark]:
    wide, tall = COLUMN - 24.0, 66.0
    base = top - 88.0
    n = len(histogram.number)
    pitch = min(wide / n, 34.0)
    most = float(histogram.number.max())
    left = (wide - pitch * n) / 2
    marks: list[Mark] = [Words(np.array([0.0, top - 4]), histogram.title, anchor="start")]
    names = histogram.names()
    # names under every bar that has room for one
    every = max(1, int(np.ceil(max(len(x) for x in names) * 4.2 / pitch)))
    for k, (name, count) in enumerate(zip(names, histogram.number.tolist(), strict=True)):
        x = left + pitch * k
        height = tall * count / most
        box = np.array([[0.1, 0], [0.9, 0], [0.9, 1], [0.1, 1]]) * [pitch, height] + [x, base]
        marks.append(Area(box, histogram.look))
        if pitch > 3.9 * len(str(count)):
            spot = np.array([x + pitch / 2, base + height + 4.5])
            marks.append(Words(spot, str(count), size=min(6.0, TYPE)))
        if k % every == 0:
            marks.append(Words(np.array([x + pitch / 2, base - 5.5]), name, colour=QUIET, size=6.0))
    marks.append(Curve(straight([0, base], [wide, base]), "axis"))
    return marks
