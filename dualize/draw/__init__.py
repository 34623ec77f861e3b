"""Pictures of foams: the same conventions in all of them, in every format.

    s.draw()                                   # a matplotlib figure of the boundary graph, or the dual graph
    dualize.draw.write(s, "face.svg", "face", number=3)
    dualize.draw.sketch(s, "vertex", number=0) # the marks themselves, each with the cell it shows

A part of the foam becomes a `Sketch`, marks in points with the cells they show; `figure`, `svg` and `tikz`
turn a sketch into a matplotlib figure, SVG, or text for a LaTeX document.  `dualize.draw.looks` says how
things look.
"""

from __future__ import annotations

import os
from collections.abc import Callable
from difflib import get_close_matches
from io import BytesIO
from typing import TYPE_CHECKING, Any

from ..errors import InputError
from ..skeleton import Skeleton
from .cells import face_polygon, vertex_pattern
from .degrees import Histogram, degree_histograms, histograms
from .figure import figure
from .graphs import boundary_graph, dual_graph
from .sketch import Sketch
from .space import foam_in_space
from .svg import svg
from .tikz import tikz

if TYPE_CHECKING:
    from matplotlib.figure import Figure

__all__ = [
    "KINDS",
    "PARTS",
    "Histogram",
    "Sketch",
    "encode",
    "figure",
    "histograms",
    "picture",
    "sketch",
    "svg",
    "tikz",
    "write",
]

# part: (function, what it shows, options it takes)
PARTS: dict[str, tuple[Callable[..., Sketch], str, tuple[str, ...]]] = {
    "boundary": (boundary_graph, "the boundary graph", ("number", "component", "most")),
    "dual": (dual_graph, "the dual graph", ("number", "most")),
    "vertex": (vertex_pattern, "one vertex with its edges, wedges and boundary graph", ("number",)),
    "face": (face_polygon, "one face as a polygon", ("number",)),
    "degrees": (degree_histograms, "histograms of the degrees", ()),
    "space": (
        foam_in_space,
        "triangulation and dual in space",
        ("number", "most", "axes", "projection", "view"),
    ),
}
KINDS = ("svg", "pdf", "png", "tikz")
SUFFIXES = {".svg": "svg", ".pdf": "pdf", ".png": "png", ".tikz": "tikz", ".tex": "tikz"}
DOTS = 300  # per inch, of a PNG file


def sketch(skeleton: Skeleton, part: str | None = None, **options: Any) -> Sketch:
    """A picture of a part of a foam, as marks.

    Parameters
    ----------
    skeleton : Skeleton
    part : str, optional
        ``boundary``, ``dual``, ``vertex``, ``face``, ``degrees`` or ``space``; by default the boundary
        graph, or the dual graph where there is no boundary.
    **options
        ``number`` (the vertex or face; the node or vertex around which a large graph is drawn), ``most``
        (cells that are drawn at most), ``component`` (of the boundary), ``axes``, ``projection``, ``view``
        (space). None is as good as left out.

    Raises
    ------
    InputError
        If the part, an option or a cell does not exist, or there are no coordinates to draw in space.
    """
    if part is None:
        part = "boundary" if skeleton.counts["nodes"] else "dual"
    if part not in PARTS:
        near = get_close_matches(part, PARTS, 1, 0.5)
        raise InputError(
            f"there is no part {part!r} to draw" + (f"; is it {near[0]}?" if near else ""),
            hint=f"parts: {', '.join(PARTS)}",
        )
    function, _, known = PARTS[part]
    given = {name: value for name, value in options.items() if value is not None}
    for name in given:
        if name not in known:
            raise InputError(
                f"a picture of the part {part} has no option {name}",
                hint=f"options: {', '.join(known)}" if known else "it has no options",
            )
    return function(skeleton, **given)


def picture(skeleton: Skeleton, part: str | None = None, **options: Any) -> Figure:
    """A picture of a part of a foam as a matplotlib figure; `sketch` lists parts and options."""
    return figure(sketch(skeleton, part, **options))


def encode(made: Sketch, kind: str) -> bytes:
    """A sketch as the bytes of a file: ``svg``, ``pdf``, ``png`` or ``tikz``; the same ones every time.

    Raises
    ------
    InputError
        If the kind is not known.
    """
    if kind == "svg":
        return svg(made).encode()
    if kind == "tikz":
        return tikz(made).encode()
    if kind not in KINDS:
        raise InputError(f"there are no pictures of the kind {kind!r}", hint=f"kinds: {', '.join(KINDS)}")
    out = BytesIO()
    about = {"Title": made.title}
    if kind == "pdf":
        from matplotlib import rc_context

        # 42: glyphs as outlines of the font, so that text can be searched and copied
        with rc_context({"pdf.fonttype": 42}):
            figure(made).savefig(out, format="pdf", metadata={**about, "CreationDate": None})
    else:
        figure(made).savefig(out, format="png", dpi=DOTS, metadata=about)
    return out.getvalue()


def write(
    skeleton: Skeleton,
    path: str | os.PathLike[str],
    part: str | None = None,
    *,
    force: bool = False,
    kind: str | None = None,
    **options: Any,
) -> Sketch:
    """Draw a part of a foam into a file; the suffix (or `kind`) decides: svg, pdf, png, tikz (.tex).

    ``"-"`` is standard output, where SVG is written unless told otherwise.

    Returns
    -------
    Sketch
        What was drawn.

    Raises
    ------
    InputError
        If the file exists and `force` is false, the kind is not known, or `sketch` refuses.
    """
    from ..formats.target import replacing

    name = os.fsdecode(path)
    suffix = os.path.splitext(name)[1].lower()
    chosen = kind or ("svg" if name == "-" else SUFFIXES.get(suffix))
    if chosen is None:
        raise InputError(
            f"the name does not say what kind of picture to write{f', {suffix!r} is none' if suffix else ''}",
            name,
            f"let it end with {', '.join(SUFFIXES)}, or give the kind: --to, kind=",
        )
    made = sketch(skeleton, part, **options)
    data = encode(made, chosen)
    if name == "-":
        import sys

        sys.stdout.flush()
        sys.stdout.buffer.write(data)
        sys.stdout.buffer.flush()
    else:
        with replacing(name, force) as (stream, _):
            stream.write(data)
    return made
