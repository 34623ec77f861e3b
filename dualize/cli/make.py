"""``dualize make``: a triangulation by a recipe."""

from __future__ import annotations

import os
import sys
from typing import Any

import click

from ..errors import InputError
from ..make.recipes import RECIPES, Parameter, Recipe, evaluate_any, recipe
from ..progress import progress
from .common import (
    SETTINGS,
    VerbGroup,
    json_option,
    note,
    open_input,
    output_options,
    quiet_option,
    verb,
    write_output,
)

__all__ = ["command"]


class Recipes(VerbGroup):
    """The recipes as commands, each with the parameters that its table lists."""

    noun = "recipe"

    def parse_args(self, ctx: click.Context, args: list[str]) -> list[str]:
        """Refuse an empty command line."""
        if not args:
            raise InputError(f"{ctx.command_path} needs a recipe", hint="dualize make --list shows all")
        return super().parse_args(ctx, args)

    def list_commands(self, ctx: click.Context) -> list[str]:
        """The names of the recipes, in the order of the table."""
        return list(RECIPES)

    def get_command(self, ctx: click.Context, name: str) -> click.Command | None:
        """The command of a recipe, None where there is none."""
        return _command(RECIPES[name]) if name in RECIPES else None

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        """The command that the first argument names; a near miss is suggested."""
        chosen = recipe(args[0])
        return chosen.name, _command(chosen), args[1:]


@verb(
    "make",
    cls=Recipes,
    invoke_without_command=True,
    examples=(
        "dualize make lattice 3 3 3 3 --periodic xyzt -o torus.json",
        "dualize make slab RP3 2 | dualize build - -o slab.json",
    ),
)
@click.option("--list", "recipes", is_flag=True, help="Show every recipe with its parameters, one line each.")
@click.option("--spaces", is_flag=True, help="Show every published space with its source, one line each.")
@json_option
@click.pass_context
def command(ctx: click.Context, recipes: bool, spaces: bool, as_json: bool) -> None:
    """Make a triangulation by a recipe: dualize make RECIPE ... [-o FILE].

    Where a recipe takes a complex, give a file, - (standard input), a published space such as CP2, or a
    recipe with its arguments: 'circle(5)', 'slab(S3, layers=2)', 'lattice(3, 3, 3, periodic=xyz)'.

    Without -o the result goes to standard output: a list of labels, or JSON where it is a gluing table.
    Coordinates need a format that holds them, such as JSON: -o FILE.json or --to json.
    """
    if recipes or spaces:
        _show(recipes, spaces, as_json)
    elif ctx.invoked_subcommand is None:
        raise InputError(f"{ctx.command_path} needs a recipe", hint="dualize make --list shows all")


def _show(recipes: bool, spaces: bool, as_json: bool) -> None:
    """Print the table of recipes, of published spaces, or both."""
    from ..make.catalogue import spaces as published

    if as_json:
        import orjson

        told: dict[str, Any] = {}
        if recipes:
            told["recipes"] = [
                {
                    "name": r.name,
                    "group": r.group,
                    "summary": r.summary,
                    "parameters": [
                        {
                            "name": p.name,
                            "kind": p.kind,
                            "meaning": p.meaning,
                            "required": p.default is ...,
                            "default": None if p.default is ... else p.default,
                            "range": p.range or None,
                        }
                        for p in r.parameters
                    ],
                }
                for r in RECIPES.values()
            ]
        if spaces:
            told["spaces"] = [entry._asdict() for entry in published()]
        print(orjson.dumps(told, option=orjson.OPT_INDENT_2).decode())
        return
    if recipes:
        width = max(len(r.usage) for r in RECIPES.values() if len(r.usage) < 60)
        for r in RECIPES.values():
            print(f"{r.usage:<{width}}  {r.summary}")
    if spaces:
        for entry in published():
            print(f"{entry.space:<14} {entry.vertices:>3} vertices  {entry.title}; {entry.source}")


def _command(chosen: Recipe) -> click.Command:
    """The command of a recipe: its parameters by order, those with a default also by name."""
    parameters: list[click.Parameter] = []
    for p in chosen.parameters:
        shown = p.meaning + (f" ({p.range})" if p.range else "")
        if p.default not in (..., None, "", False):
            shown += f" [{p.default}]"
        if not p.option:
            name = p.name.upper() + ("..." if p.kind == "integers" else "")
            parameters.append(
                click.Argument(
                    [f"given_{p.name}"],
                    required=p.default is ...,
                    metavar=name if p.default is ... else f"[{name}]",
                    type=str,
                    nargs=-1 if p.kind == "integers" else 1,
                )
            )
        if p.option or p.default is not ...:
            flag: dict[str, Any] = {"is_flag": True} if p.kind == "flag" else {"metavar": p.name.upper()}
            parameters.append(
                click.Option([f"--{p.name}", f"named_{p.name}"], help=shown, default=None, **flag)
            )
    needed = [
        f"{p.name.upper()}: {p.meaning}" + (f" ({p.range})" if p.range else "")
        for p in chosen.parameters
        if not p.option
    ]
    help_ = "\n\n".join(
        [chosen.summary[0].upper() + chosen.summary[1:] + ".", *(line + "." for line in needed)]
    )

    def run(output: str, to_kind: str | None, force: bool, **given: Any) -> None:
        _make(chosen, given, output, to_kind, force)

    made = click.Command(
        chosen.name,
        params=parameters,
        callback=run,
        help=help_,
        short_help=chosen.summary,
        context_settings=SETTINGS,
    )
    return quiet_option(output_options(required=False)(made))


def _make(chosen: Recipe, given: dict[str, Any], output: str, to_kind: str | None, force: bool) -> None:
    values: list[Any] = []
    named: dict[str, Any] = {}
    for p in chosen.parameters:
        value = given.get(f"given_{p.name}")
        if value not in (None, ()):
            values += list(value) if p.kind == "integers" else [_value(p, value)]
        value = given.get(f"named_{p.name}")
        if value not in (None, False):
            named[p.name] = value
    with progress(f"making {chosen.name}"):
        made = chosen.made(*values, **named)
    write_output(made, output, force=force, to_kind=to_kind)
    if output != "-":
        note(f"{output}: {made!r}".replace("<", "").replace(">", ""))


def _value(parameter: Parameter, text: str) -> Any:
    """What a text of the command line stands for: files are read here, the rest is left to the recipe."""
    if parameter.kind == "points":
        return _points(text)
    if parameter.kind != "complex":
        return text
    if text != "-" and "." not in text and os.sep not in text:
        if not os.path.isfile(text):
            return text
        try:
            return evaluate_any(text)  # a space or recipe of this name goes before a file
        except InputError:
            pass
    from ..triangulation import Triangulation

    content = open_input(text).content
    if not isinstance(content, Triangulation):
        raise InputError(
            "this is a skeleton, not a triangulation", text, f"{parameter.name} is a triangulation"
        )
    return content


def _points(path: str) -> Any:
    """The numbers of a file, one point a line; blanks or commas between them."""
    import numpy as np

    try:
        if path == "-":
            lines = sys.stdin.read().splitlines()
        else:
            with open(path, encoding="utf-8") as stream:
                lines = stream.read().splitlines()
    except (OSError, UnicodeDecodeError) as error:
        raise InputError(
            f"the points cannot be read: {getattr(error, 'strerror', None) or error}", path
        ) from None
    rows: list[list[float]] = []
    for number, line in enumerate(lines, 1):
        fields = line.split("#")[0].replace(",", " ").split()
        try:
            row = [float(x) for x in fields]
        except ValueError:
            raise InputError(
                "a point has something else than numbers", f"{path}, line {number}: {line[:60]}"
            ) from None
        if row and rows and len(row) != len(rows[0]):
            raise InputError(
                f"a point has {len(row)} coordinates and the first {len(rows[0])}", f"{path}, line {number}"
            )
        if row:
            rows.append(row)
    if not rows:
        raise InputError("there are no points", path)
    return np.array(rows)
