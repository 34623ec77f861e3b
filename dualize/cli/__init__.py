"""The command line: one verb, one module.

``dualize VERB`` is `dualize.cli.VERB.command`, a `click.Command` made with `dualize.cli.common.verb`; it
parses, calls the API and prints.  Its module is imported only when the verb is used, and a verb is listed
when its module is there.  A verb returns its exit status, None for 0:

    0    good
    1    an identity is violated, or a required property does not hold
    2    the command or its input was wrong
    130  interrupted (143 terminated, 141 the reader of a pipe went away)

Standard output is for data, standard error for talk.
"""

from __future__ import annotations

import sys
from collections.abc import Sequence
from importlib import import_module
from importlib.util import find_spec

import click

from .. import __version__
from .common import SETTINGS, VerbGroup, guarded

__all__ = ["VERBS", "main", "run"]

# verb -> what it does; the module has the verb's name
VERBS = {
    "build": "make the foam skeleton of a triangulation",
    "audit": "check a triangulation or a skeleton",
    "describe": "tell what is in a file",
    "boundary": "write the boundary of a triangulation or a skeleton",
    "match": "find the maps that identify two boundaries, or two foams",
    "make": "make a triangulation by a recipe",
    "change": "move, subdivide, glue or cut a triangulation",
    "plan": "tell what is to be summed and what it costs",
    "export": "write a skeleton as tables, graphs, matrices or tensor networks",
    "draw": "draw a foam or its boundary graph",
    "report": "write a report as one page",
    "spec": "print the conventions and the layout of the files",
}

EXAMPLES = (
    "dualize build meshes/slab_4d.txt -o foam.json",
    "dualize describe meshes/slab_4d.txt",
)


class Verbs(VerbGroup):
    """The verbs, each imported when it is asked for."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """The verbs whose modules are there, in the order of the table."""
        return [verb for verb in VERBS if find_spec(f"{__name__}.{verb}") is not None]

    def get_command(self, ctx: click.Context, name: str) -> click.Command | None:
        """The command of a verb, None where there is none."""
        if name not in self.list_commands(ctx):
            return None
        command: click.Command = import_module(f"{__name__}.{name}").command
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """The verbs and what they do, without importing them."""
        with formatter.section("Verbs"):
            formatter.write_dl([(verb, VERBS[verb]) for verb in self.list_commands(ctx)])


@click.command(
    cls=Verbs,
    examples=EXAMPLES,
    context_settings=SETTINGS,
    help="From a triangulation to its oriented dual two-complex with boundary graph. "
    "`dualize VERB --help` explains a verb.",
)
@click.version_option(
    __version__, prog_name="dualize", message="%(prog)s %(version)s", help="Print the version."
)
def group() -> None:
    """The verbs."""


def run(arguments: Sequence[str]) -> int | None:
    """Run one command line; its exit status.  Errors come out as exceptions."""
    try:
        with group.make_context("dualize", list(arguments)) as context:
            status: int | None = group.invoke(context)
    except click.exceptions.Exit as end:
        status = end.exit_code
    return status


def main(arguments: Sequence[str] | None = None) -> None:
    """The program: run the command line, say what went wrong in one line, and exit."""
    guarded(lambda: run(sys.argv[1:] if arguments is None else arguments))
