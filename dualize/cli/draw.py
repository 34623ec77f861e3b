"""``dualize draw``: a picture of a foam."""

from __future__ import annotations

import click

from ..errors import InputError
from .common import input_options, note, open_foam, output_options, quiet_option, threads_option, verb

__all__ = ["command"]


def _numbers(count: int | None, what: str, kind: type) -> object:
    def parse(ctx: click.Context, parameter: click.Parameter, value: str | None) -> tuple | None:
        if value is None:
            return None
        try:
            numbers = tuple(kind(x) for x in value.split(","))
        except ValueError:
            numbers = ()
        if not numbers or count not in (None, len(numbers)):
            raise InputError(f"{parameter.opts[0]} are {what}, not {value!r}")
        return numbers

    return parse


@verb(
    "draw",
    examples=(
        "dualize draw meshes/slab_4d.txt -o boundary.svg",
        "dualize draw meshes/room_3d.vtk --part space --most 12 -o room.pdf",
    ),
)
@input_options
@click.option(
    "--part",
    metavar="PART",
    help="boundary, dual, vertex, face, degrees or space; by default the boundary graph, or the dual graph "
    "where there is no boundary.",
)
@click.option(
    "--number",
    type=int,
    metavar="N",
    help="The vertex or face; or the node or vertex around which a large graph is drawn.",
)
@click.option("--component", type=int, metavar="N", help="boundary: this component only.")
@click.option(
    "--most", type=int, metavar="N", help="At most so many nodes or vertices (60 by default, in space 24)."
)
@click.option(
    "--axes",
    callback=_numbers(None, "numbers such as 0,1,3", int),
    metavar="A,B,C",
    help="space: the axes to show; by default the first three, the fourth drawn obliquely.",
)
@click.option(
    "--view",
    callback=_numbers(2, "two angles in degrees such as -60,22", float),
    metavar="TURN,HEIGHT",
    help="space: from where to look, in degrees.",
)
@output_options()
@threads_option
@quiet_option
def command(
    path: str,
    from_kind: str | None,
    dataset: str | None,
    part: str | None,
    number: int | None,
    component: int | None,
    most: int | None,
    axes: tuple | None,
    view: tuple | None,
    output: str,
    to_kind: str | None,
    force: bool,
    threads: int | None,
) -> None:
    """Draw a part of INPUT, a skeleton or a triangulation: its graphs, one cell, or the whole in space.

    The name of the output decides: svg, pdf, png, or tikz (also .tex), text for a LaTeX document that uses
    the package tikz. Of what is large a part is drawn, and the picture says which. Pictures are the same
    byte for byte whenever they are made. The part space needs coordinates.
    """
    from .. import draw

    _, foam = open_foam(path, from_kind=from_kind, dataset=dataset, threads=threads)
    made = draw.write(
        foam,
        output,
        part,
        force=force,
        kind=to_kind,
        number=number,
        component=component,
        most=most,
        axes=axes,
        view=view,
    )
    if made.note.startswith("Only a part"):
        note(f"note: {made.note[:1].lower()}{made.note[1:].split(';')[0].rstrip('.')}")
