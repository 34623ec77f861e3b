"""``dualize build``: a triangulation in, its foam skeleton out."""

from __future__ import annotations

from dataclasses import replace

import click

from ..build import build
from ..errors import InputError
from ..formats.target import check_target
from ..progress import progress
from ..skeleton import Skeleton
from .common import (
    input_options,
    naming,
    note,
    open_input,
    output_options,
    quiet_option,
    threads_option,
    verb,
    write_output,
)

__all__ = ["command", "summary"]


@verb(
    "build",
    examples=(
        "dualize build meshes/slab_4d.txt -o foam.json",
        "dualize build meshes/harbour_inside.txt --points -o foam.h5",
    ),
)
@input_options
@output_options(metavar="FOAM")
@click.option("--keep-singular", is_flag=True, help="Build also where a ridge is singular, and record it.")
@click.option("--points", is_flag=True, help="Add the triangulation's own vertices and 1-simplices.")
@click.option("--any-size", is_flag=True, help="Begin even if there does not seem to be enough memory.")
@click.option("--compress", is_flag=True, help="Compress the arrays of an HDF5 or NPZ file.")
@threads_option
@quiet_option
def command(
    path: str,
    output: str,
    from_kind: str | None,
    dataset: str | None,
    to_kind: str | None,
    force: bool,
    keep_singular: bool,
    points: bool,
    any_size: bool,
    compress: bool,
    threads: int | None,
) -> None:
    """Make the foam skeleton of a triangulation: its oriented dual two-complex with boundary graph.

    INPUT lists top simplices (text, JSON, NPY, NPZ, HDF5, mesh formats) or is a gluing table; - is standard
    input. FOAM is written as JSON, HDF5 or NPZ by its suffix; - is standard output, as JSON. A summary goes
    to standard error.
    """
    if output != "-":
        check_target(output, force)
    given = open_input(path, from_kind=from_kind, dataset=dataset, threads=threads)
    if isinstance(given.content, Skeleton):
        raise InputError(
            "this is a skeleton already", path, "give the triangulation; dualize describe tells more"
        )
    with progress("building"), naming(path):
        skeleton = build(
            given.content, keep_singular=keep_singular, points=points, any_size=any_size, threads=threads
        )
    write_output(
        replace(skeleton, provenance=given.provenance()),
        output,
        force=force,
        to_kind=to_kind,
        compress=compress,
    )
    note(summary(skeleton, given.name, output))


def summary(skeleton: Skeleton, source: str, target: str) -> str:
    """The five lines that tell what was built."""
    c, flags = skeleton.counts, skeleton.flags
    turned = sum(not yes for yes in flags["orientable"])
    parts = "1 component" if c["components"] == 1 else f"{c['components']} components"
    if turned == 0:
        kind = "orientable"
    elif c["components"] == 1:
        kind = "not orientable"
    else:
        kind = f"{turned} of them not orientable"
    boundary = int(skeleton["nodes/component"].max(initial=-1)) + 1
    pieces = "closed" if boundary == 0 else f"{boundary} boundary component{'s' if boundary > 1 else ''}"
    kept = ", singular ridges kept" if flags["singular"] else ""
    return "\n".join(
        [
            f"{source} -> {target}: dimension {skeleton.dimension}, {parts}, {kind}, {pieces}{kept}",
            f"vertices  {c['vertices']}",
            f"edges     {c['edges_internal']} internal, {c['edges_external']} external",
            f"faces     {c['faces_internal']} internal, {c['faces_external']} external",
            f"boundary  {c['nodes']} nodes, {c['links']} links",
        ]
    )
