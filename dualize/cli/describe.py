"""``dualize describe``: what is in a file."""

from __future__ import annotations

import click

from ..describe import describe
from ..progress import progress
from .common import input_options, json_option, open_input, quiet_option, threads_option, verb

__all__ = ["command"]


@verb(
    "describe",
    examples=("dualize describe meshes/slab_4d.txt", "dualize describe meshes/figure_eight_knot.json --json"),
)
@input_options
@json_option
@threads_option
@quiet_option
def command(
    path: str, from_kind: str | None, dataset: str | None, as_json: bool, threads: int | None
) -> None:
    """Tell what is in INPUT, a triangulation or a skeleton: counts, components, boundary, some of its cells.

    A skeleton is validated on the way; of a triangulation the dual is built, and its cells are counted.
    """
    given = open_input(path, from_kind=from_kind, dataset=dataset, threads=threads)
    with progress("describing"):
        found = describe(given.content, threads=threads)
    if as_json:
        import json

        origin = {"name": given.name, "format": given.kind, "read_as": given.how, "sha256": given.sha256}
        click.echo(json.dumps({"file": origin, **found.to_dict()}, indent=1, ensure_ascii=False))
    else:
        click.echo(f"{given.name} ({given.how}): {found}")
