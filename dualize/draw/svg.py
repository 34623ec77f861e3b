"""A sketch as SVG: text stays text, every mark says which cell it shows, no dates, no ids that clash."""

from __future__ import annotations

from html import escape

import numpy as np

from .looks import INK, LOOKS
from .sketch import Area, Badge, Curve, Head, Mark, Sketch

__all__ = ["badge_type", "number_text", "svg"]

FONT = "'DejaVu Sans', Verdana, Helvetica, Arial, sans-serif"


def svg(sketch: Sketch, *, inline: bool = False, linked: bool = False) -> str:
    """The sketch as an SVG document, or as an element for a page.

    Parameters
    ----------
    sketch : Sketch
    inline : bool
        Leave out the XML declaration, title and background: the page has them.
    linked : bool
        Make the marks of a cell links to ``#kind-number``.
    """
    w, h = sketch.width, sketch.height
    wide, tall = number_text(w), number_text(h)
    head = [] if inline else ['<?xml version="1.0" encoding="UTF-8"?>']
    head.append(
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{wide}pt" height="{tall}pt" '
        f'viewBox="0 0 {wide} {tall}" role="{"group" if linked else "img"}" '
        f'aria-label="{escape(_said(sketch.title))}" font-family="{FONT}">'
    )
    if not inline:
        head.append(f"<title>{escape(_said(sketch.title))}</title>")
        head.append(f"<desc>{escape(_said(sketch.note))}</desc>" if sketch.note else "")
        head.append(f'<rect width="{number_text(w)}" height="{number_text(h)}" fill="#ffffff"/>')
    body: list[str] = []
    named: set[tuple[str, int]] = set()
    for mark in sketch.marks:
        text = _mark(mark, h)
        if mark.cell is not None:
            kind, number = mark.cell
            text = f'<g data-cell="{kind} {number}" data-mark="{type(mark).__name__.lower()}">{text}</g>'
            if linked:
                # one stop of the tab key for each cell; its other marks are for the pointer
                stop = ' tabindex="-1"' if mark.cell in named or not isinstance(mark, Badge) else ""
                named.add(mark.cell)
                text = f'<a href="#{kind}-{number}" aria-label="{kind} {number}"{stop}>{text}</a>'
        body.append(text)
    return "\n".join([x for x in head if x] + body + ["</svg>"]) + "\n"


def _mark(mark: Mark, h: float) -> str:
    if isinstance(mark, Curve):
        p = _flip(mark.points, h)
        d = f"M{_p(p[0])}" + "".join(
            f"C{_p(p[k])} {_p(p[k + 1])} {_p(p[k + 2])}" for k in range(1, len(p), 3)
        )
        return f'<path d="{d}" fill="none" {_line(mark.look)}/>'
    if isinstance(mark, Head):
        look = LOOKS[mark.look]
        fill = "#ffffff" if look.head == "hollow" else look.colour
        d = _polygon(mark.corners(), h)
        return (
            f'<path d="{d}" fill="{fill}" stroke="{look.colour}" stroke-width="0.9" stroke-linejoin="round"/>'
        )
    if isinstance(mark, Area):
        return f'<path d="{_polygon(mark.points, h)}" fill="{LOOKS[mark.look].fill}" {_line(mark.look)}/>'
    if isinstance(mark, Badge):
        look = LOOKS[mark.look]
        x, y = _flip(mark.at, h)
        r = mark.radius
        if look.shape == "disc":
            shape = f'<circle cx="{number_text(x)}" cy="{number_text(y)}" r="{number_text(r)}"'
        else:
            left, top, side = (number_text(z) for z in (x - r, y - r, 2 * r))
            shape = f'<rect x="{left}" y="{top}" width="{side}" height="{side}" rx="1.5"'
        shape += f' fill="{look.fill}" {_line(mark.look)}/>'
        return shape + (_text(x, y, mark.text, INK, badge_type(mark), "middle") if mark.text else "")
    x, y = _flip(mark.at, h)
    return _text(x, y, mark.text, mark.colour, mark.size, mark.anchor, mark.bold, mark.halo)


def badge_type(badge: Badge) -> float:
    """The size of the type that fits into a badge."""
    return min(7.0, 2.6 * badge.radius / max(1.4, 0.62 * len(badge.text) + 0.7))


def _text(
    x: float,
    y: float,
    text: str,
    colour: str,
    size: float,
    anchor: str,
    bold: bool = False,
    halo: bool = False,
) -> str:
    more = ' font-weight="bold"' if bold else ""
    if halo:
        more += ' stroke="#ffffff" stroke-width="2.4" stroke-linejoin="round" paint-order="stroke"'
    # a third of the size below the middle: not every program knows dominant-baseline
    left, base = number_text(x), number_text(y + 0.36 * size)
    return (
        f'<text x="{left}" y="{base}" font-size="{number_text(size)}" text-anchor="{anchor}" '
        f'fill="{colour}"{more}>{escape(_said(text))}</text>'
    )


def _said(text: str) -> str:
    """A text without characters that XML cannot hold."""
    return "".join(c if c.isprintable() else "\ufffd" for c in text)


def _line(name: str) -> str:
    look = LOOKS[name]
    dashes = f' stroke-dasharray="{" ".join(map(number_text, look.dashes))}"' if look.dashes else ""
    return f'stroke="{look.colour}" stroke-width="{look.width}" stroke-linejoin="round"{dashes}'


def _flip(points: np.ndarray, h: float) -> np.ndarray:
    flipped: np.ndarray = np.asarray(points, dtype=float) * [1, -1] + [0, h]
    return flipped


def _polygon(points: np.ndarray, h: float) -> str:
    return "M" + "L".join(_p(p) for p in _flip(points, h)) + "Z"


def _p(point: np.ndarray) -> str:
    return f"{number_text(point[0])} {number_text(point[1])}"


def number_text(x: float) -> str:
    """A number with at most two digits behind the point; never ``-0``."""
    text = f"{x:.2f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text
