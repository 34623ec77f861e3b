"""``dualize spec``: the conventions and the layout of the files."""

from __future__ import annotations

import click

from .common import quiet_option, verb

__all__ = ["command"]


@verb("spec", examples=("dualize spec", "dualize spec --schema"))
@click.option("--schema", "as_schema", is_flag=True, help="Print the JSON Schema of a foam skeleton instead.")
@quiet_option
def command(as_schema: bool) -> None:
    """Print the conventions that every number in a foam skeleton keeps, and the tables of its files."""
    from ..spec import prose, schema

    if as_schema:
        import json

        click.echo(json.dumps(schema(), indent=1, ensure_ascii=False))
    else:
        click.echo(prose().rstrip("\n"))
