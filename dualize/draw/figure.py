"""A sketch as a matplotlib figure, for notebooks, PDF and PNG."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from .looks import INK, LOOKS
from .sketch import Area, Badge, Curve, Head, Mark, Sketch, Words
from .svg import badge_type

if TYPE_CHECKING:
    from matplotlib.artist import Artist
    from matplotlib.figure import Figure

__all__ = ["figure"]


def figure(sketch: Sketch) -> Figure:
    """The sketch as a figure of its own size; it belongs to no window and need not be closed.

    Every artist has the cell it shows as its ``gid``, such as ``"link 3"``, and none where it shows no cell.

    Returns
    -------
    matplotlib.figure.Figure
    """
    from matplotlib.figure import Figure

    made = Figure(figsize=(sketch.width / 72, sketch.height / 72), dpi=144, facecolor="white")
    axes = made.add_axes((0, 0, 1, 1))
    axes.set_xlim(0, sketch.width)
    axes.set_ylim(0, sketch.height)
    axes.set_axis_off()
    for order, mark in enumerate(sketch.marks):
        for artist in _artists(mark):
            artist.set_zorder(order)
            if mark.cell is not None:
                artist.set_gid(f"{mark.cell[0]} {mark.cell[1]}")
            axes.add_artist(artist)
    return made


def _artists(mark: Mark) -> list[Artist]:
    from matplotlib.patches import Circle, FancyBboxPatch, PathPatch, Polygon
    from matplotlib.path import Path
    from matplotlib.patheffects import withStroke
    from matplotlib.text import Text

    def text(
        at: np.ndarray, words: str, size: float, colour: str, anchor: str = "middle", bold: bool = False
    ) -> Text:
        side = {"start": "left", "middle": "center", "end": "right"}[anchor]
        weight = "bold" if bold else "normal"
        # a font that cannot be missing, and no markup in labels; the baseline is that of the other formats
        return Text(
            at[0],
            at[1] - 0.36 * size,
            "".join(c if c.isprintable() else "\ufffd" for c in words),
            fontsize=size,
            color=colour,
            ha=side,
            va="baseline",
            weight=weight,
            family="DejaVu Sans",
            parse_math=False,
        )

    if isinstance(mark, Words):
        made = text(mark.at, mark.text, mark.size, mark.colour, mark.anchor, mark.bold)
        if mark.halo:
            made.set_path_effects([withStroke(linewidth=2.4, foreground="white")])
        return [made]
    look = LOOKS[mark.look]
    line: dict[str, Any] = {"edgecolor": look.colour, "linewidth": look.width, "joinstyle": "round"}
    if look.dashes:
        line |= {"linestyle": (0, tuple(x / look.width for x in look.dashes)), "capstyle": "butt"}
    if isinstance(mark, Curve):
        codes = [Path.MOVETO] + [Path.CURVE4] * (len(mark.points) - 1)
        return [PathPatch(Path(mark.points, codes), facecolor="none", **line)]
    if isinstance(mark, Head):
        fill = "white" if look.head == "hollow" else look.colour
        return [
            Polygon(mark.corners(), facecolor=fill, edgecolor=look.colour, linewidth=0.9, joinstyle="round")
        ]
    if isinstance(mark, Area):
        return [Polygon(mark.points, facecolor=look.fill, **line)]
    assert isinstance(mark, Badge)
    x, y, r = *mark.at, mark.radius
    if look.shape == "disc":
        shape: Artist = Circle((x, y), r, facecolor=look.fill, **line)
    else:
        style = "round,pad=0,rounding_size=1.5"
        shape = FancyBboxPatch((x - r, y - r), 2 * r, 2 * r, boxstyle=style, facecolor=look.fill, **line)
    if not mark.text:
        return [shape]
    return [shape, text(mark.at, mark.text, badge_type(mark), INK)]
