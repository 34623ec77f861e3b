"""``dualize boundary``: the boundary as a triangulation, or as a graph."""

from __future__ import annotations

import sys
from collections.abc import Iterator

import click

from ..boundary import boundary_of
from ..build import build
from ..errors import InputError, TriangulationError
from ..skeleton import Skeleton
from ..topology.gluing import gluing_of
from .common import (
    input_options,
    note,
    open_input,
    output_options,
    quiet_option,
    threads_option,
    verb,
    write_output,
)

__all__ = ["command"]


@verb(
    "boundary",
    examples=(
        "dualize boundary meshes/slab_4d.txt -o boundary.txt",
        "dualize boundary meshes/slab_4d.txt --component 1 --graph graphml -o graph.graphml",
    ),
)
@input_options
@output_options()
@click.option(
    "--component", type=click.IntRange(min=0), metavar="K", help="Only this component of the boundary."
)
@click.option(
    "--graph",
    type=click.Choice(["graphml", "node-link"]),
    help="Write the graph of nodes and links, with orders and directions, instead of the triangulation; "
    "graphml for an output FILE.graphml.",
)
@threads_option
@quiet_option
def command(
    path: str,
    output: str,
    from_kind: str | None,
    dataset: str | None,
    to_kind: str | None,
    force: bool,
    component: int | None,
    graph: str | None,
    threads: int | None,
) -> None:
    """Write the boundary of INPUT, a triangulation or a skeleton.

    The triangulation comes as a list of facets, labels in the order of the induced orientation, or, where
    labels do not name the simplices, as a gluing table. The nodes of the graph keep their numbers.
    """
    given = open_input(path, from_kind=from_kind, dataset=dataset, threads=threads)
    content = given.content
    if graph is None and to_kind is None and output.lower().endswith(".graphml"):
        graph = "graphml"
    if graph is not None:
        if to_kind is not None:
            raise InputError("--graph names the format already", hint="leave --to out")
        skeleton = content if isinstance(content, Skeleton) else build(content, threads=threads)
        count = _write_graph(skeleton, component, graph, output, force)
        note(f"{given.name} -> {output}: {count} nodes of the boundary graph")
        return
    triangulation = gluing_of(content, threads=threads) if isinstance(content, Skeleton) else content
    found = boundary_of(triangulation, component, threads=threads)
    write_output(found, output, force=force, to_kind=to_kind)
    note(f"{given.name} -> {output}: {len(found)} simplices of the boundary")


def _write_graph(skeleton: Skeleton, component: int | None, kind: str, output: str, force: bool) -> int:
    """Write the boundary graph, or one component of it; how many nodes it has."""
    from ..export.graphs import graphml_lines, node_link_lines
    from ..formats.target import replacing

    if not skeleton.counts["nodes"]:
        raise TriangulationError("the triangulation is closed: it has no boundary")
    whole = skeleton.boundary_graph()
    part = whole
    if component is not None:
        parts = int(skeleton["nodes/component"].max()) + 1
        if component >= parts:
            raise InputError(
                f"there is no boundary component {component}",
                hint=f"the boundary has {parts} component{'s' if parts > 1 else ''}, numbered from 0",
            )
        part = whole.subgraph(
            [n for n, k in enumerate(skeleton["nodes/component"].tolist()) if k == component]
        )
    lines: Iterator[bytes] = (graphml_lines if kind == "graphml" else node_link_lines)(part)
    if output == "-":
        sys.stdout.flush()
        sys.stdout.buffer.writelines(lines)
        sys.stdout.buffer.flush()
    else:
        with replacing(output, force) as (stream, _):
            stream.writelines(lines)
    return len(part)
