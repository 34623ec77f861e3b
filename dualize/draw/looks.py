"""How things look, said once: the same in every picture, on paper, on a screen and in print without colour.

Colour is always doubled by shape, line style or the kind of arrowhead.  The colours are darkened from the
set that M. Okabe and K. Ito proposed for readers with any kind of colour vision (Color Universal Design,
2008; from memory), so that thin lines and small type keep a contrast of at least 4.5 with white.
"""

from __future__ import annotations

from typing import NamedTuple

__all__ = ["INK", "LOOKS", "MINUS", "QUIET", "TYPE", "Look"]

INK = "#1f2328"  # text
MINUS = "\u2212"
QUIET = "#6b7178"  # notes, and what is only there for orientation
BLUE, BLUE_TINT = "#005f94", "#cfe4f3"
ORANGE, ORANGE_TINT = "#a84600", "#fbdcc6"
GREEN, GREEN_TINT = "#00694c", "#e3f3ec"
PURPLE = "#8a2f6b"
TYPE = 7.0  # size of the type, in points


class Look(NamedTuple):
    """One way in which a mark is drawn.

    Attributes
    ----------
    colour : str
        Of the line, or the outline.
    width : float
        Of the line, in points.
    dashes : tuple of float
        Lengths of dashes and gaps in points; empty for a solid line.
    fill : str or None
        Of a closed shape.
    head : str
        Arrowhead: ``"full"``, ``"hollow"``, or none.
    shape : str
        Of a badge: ``"disc"`` or ``"square"``.
    means : str
        What the legend says.
    """

    colour: str
    width: float
    dashes: tuple[float, ...] = ()
    fill: str | None = None
    head: str = ""
    shape: str = ""
    means: str = ""


LOOKS: dict[str, Look] = {
    "vertex+": Look(BLUE, 1.6, fill=BLUE_TINT, shape="disc", means="vertex, orientation +1"),
    "vertex-": Look(BLUE, 0.8, fill="#ffffff", shape="disc", means=f"vertex, orientation {MINUS}1"),
    "node+": Look(ORANGE, 1.6, fill=ORANGE_TINT, shape="square", means="node, orientation +1"),
    "node-": Look(ORANGE, 0.8, fill="#ffffff", shape="square", means=f"node, orientation {MINUS}1"),
    "slot": Look(QUIET, 0.8, (1.5, 1.2), fill="#ffffff", shape="disc", means="slot of the vertex"),
    "edge": Look(BLUE, 1.3, head="full", means="edge, from source to target"),
    "external": Look(BLUE, 1.3, (4, 2), head="full", means="external edge"),
    "twisted": Look(PURPLE, 1.3, (5, 1.6, 1.2, 1.6), head="full", means="twisted edge"),
    "link": Look(ORANGE, 1.0, head="hollow", means="link, from source to target"),
    "twisted link": Look(PURPLE, 1.0, (5, 1.6, 1.2, 1.6), head="hollow", means="twisted link"),
    "wedge": Look(GREEN, 1.0, (2.6, 1.3), head="hollow", means="wedge, the way its face passes"),
    "face": Look(GREEN, 0.6, (1, 1.4), fill=GREEN_TINT, means="face"),
    "direction": Look(GREEN, 1.0, (1, 1.2), head="hollow", means="direction of the face"),
    "segment": Look("#8a9097", 0.7, means="segment of the triangulation"),
    "far segment": Look("#c4c9ce", 0.5),  # behind the middle
    "cut": Look(QUIET, 0.8, (1, 2), means="goes on outside the picture"),
    "axis": Look(QUIET, 0.6),
    "bar": Look(BLUE, 0.8, fill=BLUE_TINT),
    "open bar": Look(ORANGE, 0.8, fill=ORANGE_TINT),
    "plain bar": Look(QUIET, 0.8, fill="#eceef0"),
}
