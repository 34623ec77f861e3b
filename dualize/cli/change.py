"""``dualize change``: a triangulation in, a changed one out."""

from __future__ import annotations

import os
from collections.abc import Callable, Sequence
from typing import Any

import click

from ..errors import InputError
from .beside import boundary_maps, label_map, moves_record, save_json
from .common import (
    SETTINGS,
    VerbGroup,
    dataset_option,
    from_option,
    note,
    open_input,
    output_options,
    quiet_option,
    verb,
    write_output,
)

__all__ = ["command"]

LIST = "dualize change --list shows all changes"


class Changes(VerbGroup):
    """The changes as commands behind the name of the input."""

    noun = "change"

    def parse_args(self, ctx: click.Context, args: list[str]) -> list[str]:
        """INPUT may be left out where only help or the list is wanted; then the first word is none."""
        if not args:
            raise InputError(f"{ctx.command_path} needs an input and a change", hint=LIST)
        if len(args) == 2 and args[0] in self.commands and args[1] in ctx.help_option_names:
            args = ["INPUT", *args]
        return super().parse_args(ctx, args)

    def collect_usage_pieces(self, ctx: click.Context) -> list[str]:
        """One line of use."""
        return ["[OPTIONS]", "INPUT", "CHANGE", "..."]


@verb(
    "change",
    cls=Changes,
    invoke_without_command=True,
    examples=(
        "dualize change meshes/slab_4d.txt move 2-4 --at random --seed 1 -o moved.txt",
        "dualize make lattice 3 3 3 3 --periodic xyzt | dualize change - walk 1000 --seed 1 -o walked.txt",
    ),
)
@click.argument("path", metavar="INPUT", required=False)
@from_option
@dataset_option
@click.option("--list", "changes", is_flag=True, is_eager=True, help="Show every change, one line each.")
@click.pass_context
def command(
    ctx: click.Context, path: str | None, from_kind: str | None, dataset: str | None, changes: bool
) -> None:
    """Change a triangulation: dualize change INPUT CHANGE ... [-o FILE].

    INPUT is never altered, and labels of what does not change stay; new labels are stated on standard error.
    Without -o the result goes to standard output: a list of labels, or JSON where it is a gluing table.
    Labels are separated by commas: 0,3,5,8. The options of a change: dualize change CHANGE --help.
    """
    if changes:
        group = ctx.command
        assert isinstance(group, click.Group)
        rows = []
        for name, made in group.commands.items():
            inner = click.Context(made, info_name=name, parent=ctx)
            pieces = [p for p in made.collect_usage_pieces(inner) if p != "[OPTIONS]"]
            rows.append((" ".join([name, *pieces]), made.get_short_help_str(90)))
        width = max(len(usage) for usage, _ in rows)
        for usage, summary in rows:
            click.echo(f"{usage:<{width}}  {summary}")
        ctx.exit()
    if path is None or ctx.invoked_subcommand is None:
        raise InputError(f"{ctx.command_path} needs an input and a change", hint=LIST)
    ctx.obj = {"path": path, "from_kind": from_kind, "dataset": dataset}


# -- reading and writing ---------------------------------------------------------------------------


def _triangulation(path: str, from_kind: str | None = None, dataset: str | None = None) -> Any:
    from ..skeleton import Skeleton

    given = open_input(path, from_kind=from_kind, dataset=dataset)
    if isinstance(given.content, Skeleton):
        raise InputError("this is a skeleton, and changes are made to triangulations", path)
    return given.content


def _write(result: Any, source: str, output: str, to_kind: str | None, force: bool) -> None:
    if output != "-" and source != "-" and os.path.exists(output) and os.path.samefile(source, output):
        raise InputError("the output is the input, which a change never alters", output, "write another file")
    write_output(result, output, to_kind=to_kind, force=force)


def _tell(result: Any, before: int) -> None:
    from ..triangulation import Triangulation

    t = result.triangulation
    assert isinstance(t, Triangulation)
    made = (
        "" if result.moves is None else f", {len(result.moves)} move{'s' if len(result.moves) != 1 else ''}"
    )
    note(f"{before} -> {len(t)} simplices{made}")
    if result.moves is not None and len(result.moves) > 1:
        note("moves: " + ", ".join(f"{n} x {kind}" for kind, n in result.moves.counts().items()))
    elif result.moves is not None and len(result.moves) == 1 and result.moves.labels is not None:
        [(gone, come)] = list(result.moves)
        note(f"replaced: {' '.join(map(str, gone))}; new simplex: {' '.join(map(str, come))}")
    if len(result.new_labels):
        shown = " ".join(map(str, result.new_labels[:20]))
        note(f"new labels: {shown}" + (" ..." if len(result.new_labels) > 20 else ""))
    for line in result.notes:
        note(f"note: {line}")


# changes whose files carry which simplex of the input each new one lies in
REFINEMENTS = ("stellar", "derived", "refine")


def _change(name: str, *, records: bool = False) -> Callable[[Callable[..., Any]], click.Command]:
    """Make a function from a triangulation and parameters to a `Changed` a command of the group."""

    def decorate(function: Callable[..., Any]) -> click.Command:
        @click.pass_context
        def run(
            ctx: click.Context,
            output: str,
            to_kind: str | None,
            force: bool,
            origin: str | None,
            record: str | None = None,
            **arguments: Any,
        ) -> None:
            t = _triangulation(**ctx.obj)
            result = function(t, **arguments)
            if record is not None and result.moves is None:
                raise InputError("this change makes no moves to record")
            outcome = result.refinement if name in REFINEMENTS else result.triangulation
            _write(outcome, ctx.obj["path"], output, to_kind, force)
            if record is not None:
                save_json(record, result.moves.to_dict(), force)
            if origin is not None:
                save_json(
                    origin,
                    {"refined_from": result.refined_from, "new_labels": list(result.new_labels)},
                    force,
                )
            _tell(result, len(t))

        run.__doc__ = function.__doc__
        made: Any = output_options(required=False)(run)
        made = click.option(
            "--origin",
            metavar="FILE",
            help="Also write which simplex of the input each new one lies in (refined_from, JSON).",
        )(made)
        if records:
            made = click.option(
                "--record", metavar="FILE", help="Also write the moves, for replay and undo."
            )(made)
        made = quiet_option(made)
        for option in reversed(getattr(function, "options", [])):
            made = option(made)
        group: Any = command
        built: click.Command = group.command(name, context_settings=SETTINGS)(made)
        return built

    return decorate


def _options(*options: Callable[[Any], Any]) -> Callable[[Callable[..., Any]], Callable[..., Any]]:
    def decorate(function: Callable[..., Any]) -> Callable[..., Any]:
        function.options = list(options)  # type: ignore[attr-defined]
        return function

    return decorate


_seed = click.option(
    "--seed", type=click.IntRange(min=0), default=0, show_default=True, help="Same seed, same result."
)
_label = click.option("--label", metavar="LABEL", help="Label of the new point.")
_labels_argument = click.argument("labels", metavar="LABELS", nargs=-1, required=True)
_record_argument = click.argument("record_file", metavar="RECORD")


def _split(words: Sequence[str] | str) -> list[str]:
    """Labels from words with commas."""
    words = [words] if isinstance(words, str) else words
    return [x for word in words for x in word.split(",") if x]


def _numbers(words: Sequence[str] | str, what: str) -> list[int]:
    out = []
    for word in _split(words):
        if not word.isdecimal():
            raise InputError(f"{word!r} is no {what}", hint="give numbers from 0")
        out.append(int(word))
    return out


# -- moves -----------------------------------------------------------------------------------------


@_change("move", records=True)
@_options(
    click.argument("kind", metavar="KIND"),
    click.option("--at", metavar="LABELS", help="The simplex to replace, or random (the default)."),
    click.option("--simplex", type=int, metavar="N", help="Instead: a simplex by its number"),
    click.option("--corners", metavar="C,C...", help="and the corners of it that are to be replaced."),
    _label,
    _seed,
)
def move(
    t: Any, kind: str, at: str | None, simplex: int | None, corners: str | None, label: str | None, seed: int
) -> Any:
    """One bistellar (Pachner) move: 1-4, 2-3, 3-2, 4-1; 1-5, 2-4, 3-3, 4-2, 5-1; 1-3, 2-2, 3-1."""
    from .. import change

    labels = None if at is None or at == "random" else _split(at)
    chosen = None if corners is None else _numbers(corners, "corner")
    return change.move(t, kind, labels, simplex=simplex, corners=chosen, seed=seed, label=label)


@_change("walk", records=True)
@_options(
    click.argument("moves", metavar="MOVES", type=click.IntRange(min=0)),
    click.option(
        "--target", type=click.IntRange(min=1), metavar="N", help="Number of simplices to be drawn to."
    ),
    click.option("--spread", type=click.IntRange(min=0), metavar="N", help="Distance from it that is free."),
    click.option("--kinds", metavar="KIND,...", help="Only these kinds of moves."),
    _seed,
    click.option(
        "--every", type=click.IntRange(min=1), metavar="N", help="Also write every Nth state to --states."
    ),
    click.option("--states", metavar="FILE", help="Name of these files, with {} for the number of moves."),
)
def walk(
    t: Any,
    moves: int,
    target: int | None,
    spread: int | None,
    kinds: str | None,
    seed: int,
    every: int | None,
    states: str | None,
) -> Any:
    """A random walk of bistellar moves."""
    from .. import change

    settings: dict[str, Any] = {"target": target, "spread": spread, "seed": seed}
    settings["kinds"] = None if kinds is None else _split(kinds)
    if (every is None) != (states is None):
        raise InputError("--every and --states go together")
    if every is None or states is None:
        return change.walk(t, moves, **settings)
    if "{}" not in states:
        raise InputError("the name of the states has no {} for the number of moves", states)
    result: Any = None
    for result in change.walk_states(t, moves, every=every, **settings):
        write_output(result.triangulation, states.replace("{}", str(len(result.moves))))
    return result


@_change("replay", records=True)
@_options(_record_argument)
def replay(t: Any, record_file: str) -> Any:
    """Make the moves of a record."""
    from .. import change

    return change.replay(t, moves_record(record_file))


@_change("undo")
@_options(
    _record_argument,
    click.option("--count", type=click.IntRange(min=0), metavar="N", help="Only the last N moves."),
)
def undo(t: Any, record_file: str, count: int | None) -> Any:
    """Take the moves of a record back, which restores their input."""
    from .. import change

    return change.undo(t, moves_record(record_file), count)


@_change("simplify", records=True)
@_options(
    _seed,
    click.option(
        "--budget", type=click.IntRange(min=0), default=100_000, show_default=True, help="Moves to try."
    ),
)
def simplify(t: Any, seed: int, budget: int) -> Any:
    """Make it small by bistellar moves, with the boundary of a simplex as the goal."""
    from .. import change

    return change.simplify(t, seed=seed, budget=budget)


@_change("attach")
@_options(_labels_argument, _label)
def attach(t: Any, labels: Sequence[str], label: str | None) -> Any:
    """Glue a simplex on at a boundary simplex: an elementary shelling backwards."""
    from .. import change

    return change.attach(t, _split(labels), label=label)


@_change("detach")
@_options(click.argument("simplex", metavar="SIMPLEX", type=int))
def detach(t: Any, simplex: int) -> Any:
    """Take a simplex off the boundary: an elementary shelling."""
    from .. import change

    return change.detach(t, simplex)


@_change("contract")
@_options(
    click.argument("labels", metavar="[LABEL,LABEL]", nargs=-1),
    click.option(
        "--all", "everything", is_flag=True, help="Segments at random, until none is left that can be."
    ),
    click.option("--budget", type=click.IntRange(min=0), metavar="N", help="With --all: at most so many."),
    _seed,
)
def contract(t: Any, labels: Sequence[str], everything: bool, budget: int | None, seed: int) -> Any:
    """Contract a segment to its first end, under the link condition."""
    from .. import change

    if everything == bool(labels):
        raise InputError("give the two labels of a segment, or --all")
    return (
        change.contract_all(t, seed=seed, budget=budget) if everything else change.contract(t, _split(labels))
    )


# -- subdivisions ----------------------------------------------------------------------------------


@_change("stellar")
@_options(_labels_argument, _label)
def stellar(t: Any, labels: Sequence[str], label: str | None) -> Any:
    """Subdivide a simplex, and all around it, by a point inside."""
    from .. import change

    return change.stellar(t, _split(labels), label=label)


@_change("derived")
@_options(click.argument("times", metavar="[TIMES]", type=click.IntRange(min=1), default=1))
def derived(t: Any, times: int) -> Any:
    """The barycentric subdivision, once or several times; a gluing table becomes a complex."""
    from .. import change

    return change.derived(t, times)


@_change("refine")
@_options(click.argument("factor", metavar="FACTOR", type=click.IntRange(min=1)))
def refine(t: Any, factor: int) -> Any:
    """The edgewise (Freudenthal) refinement: every segment in FACTOR parts."""
    from .. import change

    return change.refine(t, factor)


# -- gluing and cutting ----------------------------------------------------------------------------


@_change("union")
@_options(click.argument("other", metavar="OTHER"))
def union(t: Any, other: str) -> Any:
    """Put another triangulation beside it."""
    from .. import change

    return change.union(t, _triangulation(other))


@_change("glue")
@_options(
    click.argument("other", metavar="[OTHER]", required=False),
    click.option(
        "--map",
        "map_file",
        metavar="FILE",
        help="Lines of two labels, of OTHER (or INPUT) and of INPUT; "
        "or what dualize match INPUT OTHER --json prints.",
    ),
    click.option(
        "--which",
        type=click.IntRange(min=0),
        metavar="N",
        help="Of the maps of dualize match this one; by default the first that reverses orientations.",
    ),
    click.option("--found", is_flag=True, help="By an isomorphism of the boundaries that is looked for."),
    click.option("--components", metavar="M,N", help="Glue these two boundary components of INPUT."),
)
def glue(
    t: Any, other: str | None, map_file: str | None, which: int | None, found: bool, components: str | None
) -> Any:
    """Glue another one on along equal labels, by a map, or INPUT to itself."""
    from .. import change

    pair = None
    if components is not None:
        numbers = _numbers(components, "component")
        if len(numbers) != 2:
            raise InputError(f"two components are glued, and {len(numbers)} are given")
        pair = (numbers[0], numbers[1])
    second = None if other is None else _triangulation(other)
    names: Any = None
    if map_file is not None:
        maps = None if second is None else boundary_maps(map_file)
        names = label_map(map_file) if maps is None else _chosen(t, second, maps, which, map_file)
    if which is not None and (map_file is None or isinstance(names, dict)):
        raise InputError("--which goes with --map and the maps of dualize match --json")
    return change.glue(t, second, names, found=found, components=pair)


def _chosen(t: Any, second: Any, maps: list[dict], which: int | None, path: str) -> Any:
    """One of the maps between the boundaries."""
    from ..build import build
    from ..match import boundary_map

    if which is not None and which >= len(maps):
        raise InputError(f"there is no map {which}", path, f"it holds {len(maps)}, numbered from 0")
    foams = build(t), build(second)
    found = None
    for one in maps if which is None else maps[which : which + 1]:
        try:
            made = boundary_map(*foams, one["nodes"], one["places"])
        except InputError as error:
            raise error.at(path) from None
        found = made if found is None else found
        if (made.node_sign == -1).all():
            return made
    return found


@_change("cut")
@_options(click.argument("facets", metavar="FACET...", nargs=-1, required=True))
def cut(t: Any, facets: Sequence[str]) -> Any:
    """Cut along facets, each by its labels (1,2,3,4) or as simplex,slot in a gluing table."""
    from .. import change

    chosen: list[list] = [_split(facet) for facet in facets]
    if t.corners is None or not t.matched:
        chosen = [_numbers(facet, "number") for facet in facets]
    return change.cut(t, chosen)


# -- parts and names -------------------------------------------------------------------------------


@_change("keep")
@_options(click.argument("simplices", metavar="N...", nargs=-1, required=True))
def keep(t: Any, simplices: Sequence[str]) -> Any:
    """Only the simplices with these numbers."""
    from .. import change

    return change.keep(t, _numbers(simplices, "simplex number"))


@_change("remove")
@_options(click.argument("simplices", metavar="N...", nargs=-1, required=True))
def remove(t: Any, simplices: Sequence[str]) -> Any:
    """All but the simplices with these numbers."""
    from .. import change

    return change.remove(t, _numbers(simplices, "simplex number"))


@_change("around")
@_options(
    click.argument("simplex", metavar="N", type=int),
    click.argument("radius", metavar="RADIUS", type=click.IntRange(min=0)),
)
def around(t: Any, simplex: int, radius: int) -> Any:
    """The simplices within some steps of one."""
    from .. import change

    return change.around(t, simplex, radius)


@_change("component")
@_options(click.argument("which", metavar="N", type=int))
def component(t: Any, which: int) -> Any:
    """One connected component."""
    from .. import change

    return change.component(t, which)


@_change("relabel")
@_options(
    click.option("--map", "map_file", metavar="FILE", help="Lines of two labels, old and new."),
    click.option("--seed", type=click.IntRange(min=0), help="Instead: the numbers from 0, dealt at random."),
)
def relabel(t: Any, map_file: str | None, seed: int | None) -> Any:
    """Other labels: by a map, at random, or (by default) 0, 1, 2, ... in order."""
    from .. import change

    names: dict[str, Any] | None = None if map_file is None else dict(label_map(map_file))
    if names is not None and t.corner_names is None:
        words = [x for x in names.values() if not x.removeprefix("-").isdecimal()]
        if words and len(words) < len(names):
            raise InputError("the new labels are numbers and words", f"{words[0]!r} is a word")
        if not words:
            names = {key: int(value) for key, value in names.items()}
    return change.relabel(t, names, seed=seed)


@_change("reverse")
@_options()
def reverse(t: Any) -> Any:
    """The opposite orientation."""
    from .. import change

    return change.reverse(t)


@_change("double-cover")
@_options()
def double_cover(t: Any) -> Any:
    """The orientable double cover of a complex that is not orientable."""
    from .. import change

    return change.double_cover(t)
