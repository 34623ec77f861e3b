"""``dualize match``: the maps that identify two boundaries, or two foams."""

from __future__ import annotations

import click

from ..build import build
from ..match import match
from ..progress import progress
from ..skeleton import Skeleton
from .common import json_option, note, open_input, quiet_option, threads_option, verb

__all__ = ["command"]


@verb(
    "match",
    examples=(
        "dualize match meshes/harbour_inside.txt meshes/harbour_inside.txt",
        "dualize match meshes/slab_4d.txt meshes/slab_4d.txt --by isomorphism --all 3 --json",
    ),
)
@click.argument("first", metavar="A")
@click.argument("second", metavar="B")
@click.option("--all", "limit", type=click.IntRange(min=1), metavar="N", help="All maps, up to N of them.")
@click.option("--whole", is_flag=True, help="Match the foams themselves, not only their boundaries.")
@click.option(
    "--by",
    type=click.Choice(["labels", "isomorphism"]),
    help="How to match; by default labels where they agree, else isomorphism.",
)
@json_option
@threads_option
@quiet_option
def command(
    first: str,
    second: str,
    limit: int | None,
    whole: bool,
    by: str | None,
    as_json: bool,
    threads: int | None,
) -> int:
    """Find the maps that identify the boundary of A with the boundary of B.

    A map says for every node of A the node of B, +1 where the orientations agree, and the place
    there of every place; and for every link the link, +1 where the directions agree. The status is 1 if there
    is no map.
    """
    foams = []
    for path in (first, second):
        content = open_input(path, threads=threads).content
        foams.append(content if isinstance(content, Skeleton) else build(content, threads=threads))
    with progress("matching"):
        found = match(foams[0], foams[1], limit=limit or 1, whole=whole, by=by)
    if as_json:
        import json

        click.echo(json.dumps({"maps": [m.to_dict() for m in found]}))
    else:
        for number, one in enumerate(found):
            click.echo(f"map {number}, {one}")
    if not found:
        note(f"no map identifies the {'foams' if whole else 'boundaries'}")
    return 0 if found else 1
