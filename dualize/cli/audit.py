"""``dualize audit``: can this file be trusted, and what space is it dual to?"""

from __future__ import annotations

import os
import sys
from typing import TYPE_CHECKING

import click

from ..audit import audit, checked_names
from ..form import check_form
from ..progress import progress
from ..skeleton import Skeleton
from .common import input_options, json_option, note, quiet_option, threads_option, verb

if TYPE_CHECKING:
    from ..formats import Opened

__all__ = ["command"]

COLOURS = {"holds": "green", "yes": "green", "violated": "red", "no": "yellow"}


@verb(
    "audit",
    examples=(
        "dualize audit meshes/slab_4d.txt",
        "dualize audit meshes/cp2_9.txt --require closed,orientable,manifold",
    ),
)
@input_options
@click.option(
    "--require",
    metavar="NAMES",
    default="",
    help="Properties or identities, joined by commas, that must hold; undecided counts as not.",
)
@click.option("--full", is_flag=True, help="Lift the size limits of the costly checks.")
@click.option("--keep-singular", is_flag=True, help="Audit also triangulations with a singular ridge.")
@json_option
@threads_option
@quiet_option
def command(
    path: str,
    from_kind: str | None,
    dataset: str | None,
    require: str,
    full: bool,
    keep_singular: bool,
    as_json: bool,
    threads: int | None,
) -> int:
    """Check INPUT, a triangulation or a skeleton: identities, then what kind of space it is dual to.

    Identities hold, are violated, or are not checked for a reason; properties are answered yes, no, or
    undecided. Every line gives the figure and what it was compared with. The status is 1 where an identity is
    violated or a required property is not there, and 2 where there is nothing to audit: a file that cannot
    be read, or a triangulation without a dual.
    """
    names = [name.strip() for name in require.split(",") if name.strip()]
    checked_names(names)
    given = _open(path, from_kind, dataset, threads)
    with progress("auditing"):
        report = audit(given.content, full=full, require=names, keep_singular=keep_singular, threads=threads)
    if as_json:
        import json

        origin = {"name": given.name, "format": given.kind, "read_as": given.how, "sha256": given.sha256}
        click.echo(json.dumps({"file": origin, **report.to_dict()}, indent=1, ensure_ascii=False))
    else:
        plain = not sys.stdout.isatty() or "NO_COLOR" in os.environ
        click.echo("\n".join(report.lines(None if plain else _coloured)))
    failures = report.fails(names)
    for finding in failures:
        note(f"{finding.check}: {finding.verdict}")
    return 1 if failures else 0


def _open(path: str, kind: str | None, dataset: str | None, threads: int | None) -> Opened:
    """Open a file.  Tables that contradict each other are left to the audit; a broken form is an error."""
    from ..errors import DualizeError
    from ..formats import open_any

    with progress(f"reading {os.path.basename(path)}"):
        given = open_any(
            path,
            kind=kind,
            dataset=dataset,
            threads=threads,
            notes=lambda line: note(f"note: {line}"),
            check=False,
        )
    if isinstance(given.content, Skeleton):
        try:
            check_form(given.content)
        except DualizeError as error:
            raise error.at(given.name) from None
    return given


def _coloured(verdict: str, text: str) -> str:
    return click.style(text, fg=COLOURS.get(verdict), bold=verdict == "violated")
