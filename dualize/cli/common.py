"""What the verbs share: options, opening and writing files, and how things that went wrong are told."""

from __future__ import annotations

import os
import signal
import sys
import traceback
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from difflib import get_close_matches
from typing import TYPE_CHECKING, Any, NoReturn, TypeVar

import click

from ..errors import DualizeError, InputError

if TYPE_CHECKING:
    from ..formats import Opened
    from ..skeleton import Skeleton
    from ..triangulation import Triangulation

__all__ = [
    "SETTINGS",
    "Verb",
    "VerbGroup",
    "dataset_option",
    "force_option",
    "from_option",
    "guarded",
    "input_argument",
    "input_options",
    "json_option",
    "naming",
    "note",
    "open_foam",
    "open_input",
    "output_options",
    "quiet_option",
    "threads_option",
    "to_option",
    "verb",
    "write_output",
]

F = TypeVar("F", bound=Callable[..., Any])

SETTINGS: dict[str, Any] = {"help_option_names": ["-h", "--help"], "max_content_width": 100}


# -- verbs and their options -----------------------------------------------------------------------


class Verb(click.Command):
    """A command whose help ends with examples that run as they stand beside ``meshes/``."""

    def __init__(self, *args: Any, examples: Sequence[str] = (), **settings: Any) -> None:
        super().__init__(*args, **settings)
        self.examples = tuple(examples)

    def collect_usage_pieces(self, ctx: click.Context) -> list[str]:
        """The line of use, with the options that must be given."""
        needed = [p for p in self.params if isinstance(p, click.Option) and p.required]
        return super().collect_usage_pieces(ctx) + [f"{p.opts[0]} {p.make_metavar(ctx)}" for p in needed]

    def format_epilog(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """The examples, one command a line and never folded."""
        with formatter.section("Examples"):
            for line in self.examples:
                formatter.write(f"{'':>{formatter.current_indent}}{line}\n")


class VerbGroup(Verb, click.Group):
    """A verb that has verbs of its own, or whatever `noun` calls them."""

    noun = "verb"

    def __init__(self, *args: Any, **settings: Any) -> None:
        super().__init__(*args, no_args_is_help=False, **settings)
        self.subcommand_metavar = f"{self.noun.upper()} ..."

    def parse_args(self, ctx: click.Context, args: list[str]) -> list[str]:
        """Refuse an empty command line; the parser of the base would print the help as an error."""
        if not args:
            names = ", ".join(self.list_commands(ctx))
            raise InputError(f"{ctx.command_path} needs a {self.noun}", hint=f"known {self.noun}s: {names}")
        return super().parse_args(ctx, args)

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """What there is, a line each."""
        commands = [(name, self.get_command(ctx, name)) for name in self.list_commands(ctx)]
        with formatter.section(f"{self.noun.capitalize()}s"):
            formatter.write_dl([(name, c.get_short_help_str(80)) for name, c in commands if c is not None])

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        """The command that the first argument names; a near miss is suggested."""
        name = args[0]
        command = self.get_command(ctx, name)
        if command is not None:
            return name, command, args[1:]
        names = self.list_commands(ctx)
        near = get_close_matches(name.lower(), names, 1, 0.5)
        raise InputError(
            f"{ctx.command_path} has no {self.noun} {name}" + (f"; is it {near[0]}?" if near else ""),
            hint=f"known {self.noun}s: {', '.join(names)}",
        )


def verb(name: str, *, examples: Sequence[str], **settings: Any) -> Callable[[Callable[..., Any]], Verb]:
    """Make a function the command of a verb: its docstring is the help, its value the exit status (None: 0).

    With ``cls=VerbGroup`` it is a verb with verbs of its own.
    """
    cls = settings.pop("cls", Verb)
    return click.command(name, cls=cls, examples=examples, context_settings=SETTINGS, **settings)


input_argument = click.argument("path", metavar="INPUT")

from_option = click.option(
    "--from", "from_kind", metavar="KIND", help="Format of the input, where its name does not tell."
)
dataset_option = click.option(
    "--dataset", metavar="NAME", help="Which array of the input holds the simplices, where it holds several."
)
threads_option = click.option(
    "--threads",
    type=click.IntRange(min=1),
    metavar="N",
    help="At most so many threads (also DUALIZE_THREADS; all cores by default).",
)
to_option = click.option(
    "--to", "to_kind", metavar="KIND", help="Format of the output, where its name does not tell."
)
force_option = click.option("--force", is_flag=True, help="Overwrite the output where it exists.")
json_option = click.option("--json", "as_json", is_flag=True, help="Print JSON.")


def _hush(ctx: click.Context, parameter: click.Parameter, value: bool) -> bool:
    if value:
        from ..progress import silence

        silence()
        ctx.meta["dualize.quiet"] = True
    return value


quiet_option = click.option(
    "--quiet",
    "-q",
    is_flag=True,
    is_eager=True,
    expose_value=False,
    callback=_hush,
    help="Say nothing but errors on standard error.",
)


def input_options(function: F) -> F:
    """INPUT with ``--from``, ``--dataset``: the parameters `path`, `from_kind`, `dataset`."""
    return input_argument(from_option(dataset_option(function)))


def output_options(required: bool = True, metavar: str = "FILE") -> Callable[[F], F]:
    """``-o``, ``--to``, ``--force``: the parameters `output` (``"-"`` by default), `to_kind`, `force`."""
    settings: dict[str, Any] = {"required": True} if required else {"default": "-"}
    output = click.option(
        "-o",
        "--output",
        metavar=metavar,
        help="Where to write; - is standard output" + ("." if required else " (the default)."),
        **settings,
    )

    def decorate(function: F) -> F:
        return output(to_option(force_option(function)))

    return decorate


# -- files -----------------------------------------------------------------------------------------


def note(line: str) -> None:
    """Say something on standard error, unless ``--quiet``."""
    context = click.get_current_context(silent=True)
    if context is None or "dualize.quiet" not in context.meta:
        print(line, file=sys.stderr)


def _noted(line: str) -> None:
    note(f"note: {line}")


def open_input(
    path: str, *, from_kind: str | None = None, dataset: str | None = None, threads: int | None = None
) -> Opened:
    """Read a file of any kind; what the reader left out is said on standard error.

    Raises
    ------
    DualizeError
    """
    from ..formats import open_any
    from ..progress import progress

    with progress(f"reading {os.path.basename(path)}"):
        return open_any(path, kind=from_kind, dataset=dataset, threads=threads, notes=_noted)


@contextmanager
def naming(path: str) -> Iterator[None]:
    """Errors within name the file that they are about."""
    try:
        yield
    except DualizeError as error:
        raise error.at(path) from None


def open_foam(
    path: str, *, from_kind: str | None = None, dataset: str | None = None, threads: int | None = None
) -> tuple[Opened, Skeleton]:
    """A file that is to be shown, and its skeleton: of a triangulation it is built, with points and segments.

    Singular ridges are kept, as nothing is computed from what is only looked at.

    Raises
    ------
    DualizeError
    """
    from dataclasses import replace

    from ..build import build
    from ..progress import progress
    from ..skeleton import Skeleton

    given = open_input(path, from_kind=from_kind, dataset=dataset, threads=threads)
    if isinstance(given.content, Skeleton):
        return given, given.content
    with progress("building"), naming(path):
        foam = build(given.content, keep_singular=True, points=True, threads=threads)
    return given, replace(foam, provenance=given.provenance())


def write_output(
    content: Triangulation | Skeleton,
    path: str,
    *,
    force: bool = False,
    to_kind: str | None = None,
    compress: bool = False,
) -> None:
    """Write a triangulation or a skeleton; ``"-"`` is standard output, where a skeleton is written as JSON.

    Raises
    ------
    InputError
        If the file exists and `force` is false, the format is not known, or the file cannot be written.
    """
    from ..formats import write
    from ..progress import progress

    with progress(f"writing {os.path.basename(path)}"):
        write(content, path, force=force, kind=to_kind, compress=compress, notes=_noted)


# -- what went wrong -------------------------------------------------------------------------------


class _Closed:
    """Stands for standard input or output where it was closed before the program started."""

    closed = False

    def __init__(self, name: str) -> None:
        self._name = name

    def flush(self) -> None:
        """Nothing waits here."""

    def __getattr__(self, attribute: str) -> NoReturn:
        raise InputError(f"standard {self._name} is closed", "-", "open it, or name a file")


def _open_standard_streams() -> None:
    """Closed streams are None to Python: using them would be a fault, and errors would go into the data."""
    if sys.stdin is None:
        sys.stdin = _Closed("input")
    if sys.stdout is None:
        sys.stdout = _Closed("output")
    if sys.stderr is None:
        sys.stderr = open(os.devnull, "w")  # noqa: SIM115


class Terminated(BaseException):
    """The signal SIGTERM, so that what is half done is undone on the way out."""


def guarded(work: Callable[[], int | None]) -> NoReturn:
    """Run `work` and exit with its status; any failure is told in one or two lines on standard error."""
    try:
        signal.signal(signal.SIGTERM, _terminate)
        _open_standard_streams()
        status = work() or 0
        sys.stdout.flush()
    except BaseException as error:
        if os.environ.get("DUALIZE_DEBUG") == "1":
            traceback.print_exc()
        lines, status = tell(error)
        for line in lines:
            print("".join(c if c.isprintable() else repr(c)[1:-1] for c in line), file=sys.stderr)
        if status > 128:
            # threads may still be in a kernel, and standard output may be a closed pipe: wait for neither
            os._exit(status)
    sys.exit(status)


def _terminate(number: int, frame: object) -> NoReturn:
    raise Terminated


def tell(error: BaseException) -> tuple[list[str], int]:
    """The lines that report an error, and the exit status."""
    if isinstance(error, DualizeError):
        return _lines(str(error), error.hint), 2
    if isinstance(error, KeyboardInterrupt | click.Abort):
        return ["interrupted"], 130
    if isinstance(error, Terminated):
        return ["terminated"], 143
    if isinstance(error, BrokenPipeError):
        return [], 141
    if isinstance(error, click.ClickException):
        return _lines(*_usage(error)), 2
    if isinstance(error, MemoryError):
        return _lines("there is not enough memory for this", "use a larger machine, or a smaller input"), 2
    if isinstance(error, OSError) and error.errno is not None:
        what = f"{error.filename or 'the output'}: {error.strerror}"
        return _lines(what, "check that there is room, and that it may be read and written"), 2
    if isinstance(error, SystemExit):
        return [], error.code if isinstance(error.code, int) else 2
    home = os.path.dirname(os.path.dirname(__file__))
    frames = [f for f in traceback.extract_tb(error.__traceback__) if f.filename.startswith(home)]
    place = f"{os.path.basename(frames[-1].filename)}:{frames[-1].lineno}" if frames else "outside dualize"
    told = f"{type(error).__name__}: {error}" if str(error) else type(error).__name__
    return [
        "error: a fault in dualize itself; please report it with the command and its input: "
        f"{told} ({place}; DUALIZE_DEBUG=1 shows more)"
    ], 2


def _lines(what: str, hint: str | None) -> list[str]:
    return [f"error: {what}"] + ([f"hint: {hint}"] if hint else [])


def _usage(error: click.ClickException) -> tuple[str, str | None]:
    """What is wrong with a command line, and the way out, from what the parser says."""
    context: click.Context | None = getattr(error, "ctx", None)
    command = "dualize" if context is None else context.command_path
    hint = f"{command} --help lists what it takes"
    if isinstance(error, click.NoSuchOption):
        known = [] if context is None else _options(context)
        near = get_close_matches(error.option_name, known, 1, 0.6)
        what = f"{command} has no option {error.option_name}"
        return what + (f"; is it {near[0]}?" if near else ""), hint
    if isinstance(error, click.MissingParameter) and error.param is not None and context is not None:
        name = str(error.param.metavar or error.param.name)
        if isinstance(error.param, click.Option):
            name = f"{error.param.opts[0]} {name}"
        return f"{command} needs {name}", " ".join(context.get_usage().split()).replace("Usage:", "usage:")
    return error.format_message().rstrip("."), hint


def _options(context: click.Context) -> list[str]:
    """The options of a command as they are written."""
    return [o for p in context.command.get_params(context) if isinstance(p, click.Option) for o in p.opts]
