r"""A sketch as a TikZ picture: plain ``\draw`` and ``\node`` commands, no libraries but TikZ itself.

Comments name the cell of every mark, so that a picture can be finished by hand.
"""

from __future__ import annotations

import numpy as np

from .looks import INK, LOOKS, MINUS
from .sketch import Area, Badge, Curve, Head, Mark, Sketch, Words
from .svg import badge_type, number_text

__all__ = ["tikz"]

SPECIAL = {
    "\\": r"\textbackslash{}",
    "{": r"\{",
    "}": r"\}",
    "$": r"\$",
    "&": r"\&",
    "#": r"\#",
    "_": r"\_",
    "%": r"\%",
    "~": r"\textasciitilde{}",
    "^": r"\textasciicircum{}",
    MINUS: "$-$",
    "→": r"$\to$",
    "…": r"\dots{}",
    "<": "$<$",
    ">": "$>$",
    "|": "$|$",
    '"': r"\textquotedbl{}",
}
ANCHOR = {"start": "west", "middle": "center", "end": "east"}


def tikz(sketch: Sketch) -> str:
    """The sketch as a ``tikzpicture`` environment, to be read in by a document that uses the package tikz."""
    colours = {INK, "#ffffff"}
    for mark in sketch.marks:
        if isinstance(mark, Words):
            colours.add(mark.colour)
        else:
            colours |= {LOOKS[mark.look].colour, LOOKS[mark.look].fill or "#ffffff"}
    lines = [f"% {_comment(sketch.title)}", r"% needs \usepackage{tikz} in the preamble"]
    lines += [rf"\definecolor{{{_colour(c)}}}{{HTML}}{{{c[1:].upper()}}}" for c in sorted(colours)]
    lines.append(
        r"\begin{tikzpicture}[x=1bp,y=1bp,inner sep=0pt,outer sep=0pt,font=\sffamily,line join=round]"
    )
    for mark in sketch.marks:
        said = "" if mark.cell is None else f" % {mark.cell[0]} {mark.cell[1]}"
        lines.append(_mark(mark) + said)
    lines.append(r"\end{tikzpicture}")
    return "\n".join(lines) + "\n"


def _mark(mark: Mark) -> str:
    if isinstance(mark, Curve):
        p = mark.points
        path = _p(p[0]) + "".join(
            f" .. controls {_p(p[k])} and {_p(p[k + 1])} .. {_p(p[k + 2])}" for k in range(1, len(p), 3)
        )
        return rf"\draw[{_line(mark.look)}] {path};"
    if isinstance(mark, Head):
        look = LOOKS[mark.look]
        fill = "#ffffff" if look.head == "hollow" else look.colour
        options = f"draw={_colour(look.colour)},fill={_colour(fill)},line width=0.9bp"
        return rf"\filldraw[{options}] {_polygon(mark.corners())};"
    if isinstance(mark, Area):
        fill = LOOKS[mark.look].fill or "#ffffff"
        return rf"\filldraw[fill={_colour(fill)},{_line(mark.look)}] {_polygon(mark.points)};"
    if isinstance(mark, Badge):
        look = LOOKS[mark.look]
        options = f"fill={_colour(look.fill or '#ffffff')},{_line(mark.look)}"
        x, y, r = *mark.at, mark.radius
        shape = (
            f"{_p(mark.at)} circle ({number_text(r)}bp)"
            if look.shape == "disc"
            else f"{_p((x - r, y - r))} rectangle {_p((x + r, y + r))}"
        )
        text = _text(mark.at, mark.text, INK, badge_type(mark)) if mark.text else ""
        return rf"\filldraw[{options}] {shape};{text}"
    return _text(mark.at, mark.text, mark.colour, mark.size, mark.anchor, mark.bold, mark.halo).lstrip()


def _text(
    at: np.ndarray,
    text: str,
    colour: str,
    size: float,
    anchor: str = "middle",
    bold: bool = False,
    halo: bool = False,
) -> str:
    options = f"anchor={ANCHOR[anchor]},text={_colour(colour)}"
    if halo:
        options += f",fill={_colour('#ffffff')},inner sep=0.6bp"
    font = rf"\fontsize{{{number_text(size)}bp}}{{{number_text(1.2 * size)}bp}}\selectfont" + (
        r"\bfseries" if bold else ""
    )
    return rf" \node[{options}] at {_p(at)} {{{font} {_escaped(text)}}};"


def _escaped(text: str) -> str:
    """Text as LaTeX reads it; what is no printable ASCII goes through as it is, for a UTF-8 document."""
    return "".join(SPECIAL.get(c, c if c.isprintable() else "?") for c in text)


def _comment(text: str) -> str:
    return "".join(c if c.isprintable() else "?" for c in text)


def _colour(colour: str) -> str:
    return f"foam{colour[1:].upper()}"


def _line(name: str) -> str:
    look = LOOKS[name]
    pattern = ""
    if look.dashes:
        steps = zip(look.dashes[::2], look.dashes[1::2], strict=True)
        pattern = ",dash pattern=" + " ".join(
            f"on {number_text(a)}bp off {number_text(b)}bp" for a, b in steps
        )
    return f"draw={_colour(look.colour)},line width={look.width}bp{pattern}"


def _polygon(points: np.ndarray) -> str:
    return " -- ".join(_p(p) for p in points) + " -- cycle"


def _p(point: np.ndarray | tuple[float, float]) -> str:
    return f"({number_text(point[0])},{number_text(point[1])})"
