"""``dualize export``: a skeleton in an open form, for programs that do not know this one."""

from __future__ import annotations

import click

from ..errors import InputError
from ..export import KINDS, export
from ..progress import progress
from ..skeleton import Skeleton
from .common import force_option, from_option, note, open_input, quiet_option, verb

__all__ = ["command"]


def _axes(ctx: click.Context, parameter: click.Parameter, value: str | None) -> list[int] | None:
    if value is None:
        return None
    try:
        return [int(x) for x in value.split(",")]
    except ValueError:
        raise InputError(f"--axes are numbers such as 0,1,3, not {value!r}") from None


@verb(
    "export",
    examples=(
        "dualize build meshes/slab_4d.txt -o - | dualize export - --as tables -o slab",
        "dualize build meshes/slab_4d.txt -o - | dualize export - --as graphml --of boundary -o -",
    ),
)
@click.argument("path", metavar="FOAM")
@from_option
@click.option("--as", "kind", required=True, metavar="KIND", help=", ".join(KINDS) + ".")
@click.option(
    "-o",
    "--output",
    required=True,
    metavar="PATH",
    help="Where to write; - is standard output (graphs only).",
)
@click.option("--of", "graph", metavar="GRAPH", help="Which graph: dual (by default) or boundary.")
@click.option("--axes", callback=_axes, metavar="A,B,C", help="vtk: the axes to show (0,1,2 by default).")
@click.option(
    "--projection",
    metavar="FILE",
    help="vtk: a text file of 3 rows with a number for each axis, applied to the coordinates.",
)
@force_option
@quiet_option
def command(
    path: str,
    from_kind: str | None,
    kind: str,
    output: str,
    graph: str | None,
    axes: list[int] | None,
    projection: str | None,
    force: bool,
) -> None:
    """Write a skeleton as tables, matrices, a graph or a mesh, for other programs.

    tables is a directory of CSV files that holds everything; matrices is a directory with the boundary maps
    as Matrix Market files; graphml, node-link and dot are one of the graphs; vtk is a mesh of the dual one-
    and two-skeleton, where the corners have coordinates. What a form leaves out is said on standard error.
    """
    if kind not in KINDS:
        raise InputError(f"there is no export as {kind!r}", hint="known are: " + ", ".join(KINDS))
    turn = None
    if projection is not None:
        import numpy as np

        try:
            turn = np.loadtxt(projection, ndmin=2)
        except (OSError, ValueError) as error:
            raise InputError(f"the projection cannot be read: {error}", projection) from None
    foam = open_input(path, from_kind=from_kind).content
    if not isinstance(foam, Skeleton):
        raise InputError(
            "this is a triangulation, not a skeleton", path, "build its skeleton first: dualize build"
        )
    with progress(f"writing {output}"):
        export(foam, output, kind, force=force, graph=graph, axes=axes, projection=turn)
    if KINDS[kind].drops:
        note(f"note: left out {KINDS[kind].drops}")
