"""The formats in one table, and how one is chosen: by name, by suffix, by the first bytes.

To add a format write a module with a ``FORMAT`` and add it to `MODULES`.  Several formats may share a
suffix: the first whose `sniff` knows the first bytes is taken, else the last; put the particular first.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from importlib import import_module
from typing import NamedTuple

from ..errors import InputError
from ..skeleton import Skeleton
from ..triangulation import Triangulation
from .source import GZIP, Source
from .target import Target

__all__ = ["Content", "Format", "Options", "choose_reader", "choose_writer", "dropping", "formats"]

Content = Triangulation | Skeleton

# in the order in which their `sniff` is asked
MODULES = (
    "hdf5",
    "npz",
    "npy",
    "json",
    "coloured_graphml",
    "mesh",
    "gluing_csv",
    "coloured_csv",
    "labels_and_neighbours",
    "text",
)


class Options(NamedTuple):
    """What a reader may be told.

    Attributes
    ----------
    dataset : str or None
        Name of the array that holds the facets, where a file holds several.
    threads : int or None
    notes : callable
        Takes one line about something that was left out.
    suffix : str
        The suffix by which the format was chosen, in small letters, or the empty string.
    """

    dataset: str | None = None
    threads: int | None = None
    notes: Callable[[str], object] = lambda line: None
    suffix: str = ""


class Format(NamedTuple):
    """One file format.

    Attributes
    ----------
    name : str
        What ``kind`` and ``--from`` call it.
    suffixes : tuple of str
        In small letters, with the dot.
    holds : str
        What it can hold, in a few words for ``--help`` and errors.
    sniff : callable
        Whether these first bytes look like it.
    read : callable or None
        ``read(source, options)`` gives the content and says in a few words how it was read.
    write : callable or None
        ``write(content, target)``.
    packed : bool
        Whether ``.gz`` may follow the suffix.
    sure : bool
        Whether `sniff` knows every file of the format, so that "no" means another format.
    suits : callable
        Whether a content is best written so, where several formats share a suffix.
    drops : callable
        What of a content is not written, in a few words each.
    """

    name: str
    suffixes: tuple[str, ...]
    holds: str
    sniff: Callable[[bytes], bool]
    read: Callable[[Source, Options], tuple[Content, str]] | None
    write: Callable[[Content, Target], None] | None
    packed: bool = False
    sure: bool = True
    suits: Callable[[Content], bool] = lambda content: False
    drops: Callable[[Content], list[str]] = lambda content: []


LOSSES: dict[str, Callable[[Triangulation], bool]] = {
    "the labels": lambda t: t.corners is not None,
    "the coordinates": lambda t: t.coordinates is not None,
    "the orientation signs": lambda t: bool((t.written < 0).any()),
    "that it is a coloured graph": lambda t: t.coloured,
    "that labels name simplices": lambda t: t.matched,
}


def dropping(*what: str) -> Callable[[Content], list[str]]:
    """What a format leaves out of a triangulation, of the things that it cannot hold (see `LOSSES`)."""
    return lambda content: [x for x in what if isinstance(content, Triangulation) and LOSSES[x](content)]


@cache
def formats() -> dict[str, Format]:
    """All formats by name."""
    modules = [import_module(f".{name}", __package__) for name in MODULES]
    return {module.FORMAT.name: module.FORMAT for module in modules}


def choose_reader(source: Source, kind: str | None, hashed: bool) -> tuple[Format, str]:
    """The format that reads a source, and the suffix that chose it; unpacks gzip on the way.

    Raises
    ------
    InputError
        If no format is known by that name or suffix, or the content is plainly something else.
    """
    if source.size == 0:
        raise InputError("the file is empty")
    if kind is not None:
        candidates, suffix = by_kind(kind)
    elif source.path is not None:
        candidates, suffix = by_suffix(source.path)
    else:
        candidates, suffix = [], ""
    readers = [f for f in candidates if f.read is not None]
    if candidates and not readers:
        raise InputError(f"{candidates[0].name} can be written, not read")
    named_gz = source.name.lower().endswith(".gz")
    unpackable = not readers or any(f.packed for f in readers)
    if source.head.startswith(GZIP) and unpackable and (source.path is None or named_gz):
        source.unpack(hashed)
        if source.size == 0:
            raise InputError("the file is empty", hint="it holds nothing once it is unpacked")
    elif named_gz and source.path is not None and unpackable:
        raise InputError("the file is not compressed with gzip", hint="take .gz off its name")
    head = source.head
    known = [f for f in formats().values() if f.sniff(head)]
    matching = [f for f in readers if f in known]
    if matching:
        return matching[0], suffix
    if readers and not all(f.sure for f in readers):
        return [f for f in readers if not f.sure][-1], suffix
    if readers:
        raise _other_content(readers[-1], known, head)
    if known:
        return known[0], ""
    raise InputError(
        "the content is of no known kind" + _nature(head),
        hint="say what it is (--from KIND, kind=...): " + ", ".join(formats()),
    )


def choose_writer(path: str, kind: str | None, content: Content) -> tuple[Format, str]:
    """The format that writes to a path (``"-"`` for standard output), and the suffix.

    Raises
    ------
    InputError
    """
    if kind is not None:
        candidates, suffix = by_kind(kind)
    elif path == "-":
        plain = isinstance(content, Triangulation) and content.matched
        candidates, suffix = by_kind("text" if plain else "json")
    else:
        candidates, suffix = by_suffix(path, content)
    writers = [f for f in candidates if f.write is not None]
    if not writers:
        names = ", ".join(_writable(content))
        raise InputError(
            f"{suffix or candidates[0].name} can be read, not written", path, f"these can: {names}"
        )
    return next((f for f in writers if f.suits(content)), writers[-1]), suffix


def by_kind(kind: str) -> tuple[list[Format], str]:
    """The formats of a name such as ``json``, or of a suffix with or without its dot."""
    name = kind.lower()
    if name in formats():
        return [formats()[name]], ""
    suffix = name if name.startswith(".") else f".{name}"
    if found := [f for f in formats().values() if suffix in f.suffixes]:
        return found, suffix
    from difflib import get_close_matches

    near = get_close_matches(name, formats(), 1, 0.5)
    raise InputError(
        f"there is no format {kind}" + (f"; is it {near[0]}?" if near else ""),
        hint="known formats: " + ", ".join(f"{f.name} ({f.holds})" for f in formats().values()),
    )


def _writable(content: Content) -> list[str]:
    """The suffixes of the formats that hold such a content, each once."""
    able = [f for f in formats().values() if f.write is not None]
    if isinstance(content, Skeleton):
        able = [f for f in able if "skeleton" in f.holds]
    return list(dict.fromkeys(s for f in able for s in f.suffixes))


def by_suffix(path: str, content: Content | None = None) -> tuple[list[Format], str]:
    """The formats of a path's suffix, the longest suffix that is known; for writing `content`, if given."""
    base = path.replace("\\", "/").rsplit("/", 1)[-1].lower()
    dots = [i for i, c in enumerate(base) if c == "."]
    for dot in dots:
        suffix = base[dot:]
        if found := [f for f in formats().values() if suffix in f.suffixes]:
            return found, suffix
        plain = suffix.removesuffix(".gz")
        if plain != suffix and (found := [f for f in formats().values() if f.packed and plain in f.suffixes]):
            return found, plain
    from difflib import get_close_matches

    suffix = base[dots[-1] :] if dots and dots[-1] < len(base) - 1 else ""
    readable = [s for f in formats().values() if f.read is not None for s in f.suffixes]
    suffixes = list(dict.fromkeys(readable)) if content is None else _writable(content)
    near = get_close_matches(suffix, suffixes, 1, 0.6) if suffix else []
    what = f"no format has the suffix {suffix}" if suffix else "the name has no suffix that tells the format"
    option = "--from KIND" if content is None else "--to KIND"
    raise InputError(
        what + (f"; is it {near[0]}?" if near else ""),
        None if content is None else path,
        f"known suffixes: {', '.join(suffixes)}; or name the format: {option}, kind=...",
    )


def _other_content(wanted: Format, known: list[Format], head: bytes) -> InputError:
    if head.startswith(GZIP):
        what, hint = "it is compressed with gzip", "add .gz to its name"
    elif head.startswith((b"\xff\xfe", b"\xfe\xff")):
        what, hint = "it is UTF-16 text", "save it as UTF-8"
    elif known:
        what = f"it looks like {known[0].name} ({known[0].holds})"
        suffixes = ", ".join(known[0].suffixes[:3])
        hint = f"give it a suffix of that format ({suffixes}), or say --from {known[0].name}"
    else:
        what = "it is " + (_nature(head).strip(" :") or "something else")
        hint = "check that it is the right file, and whole"
    return InputError(f"this is no {wanted.name} file: {what}", hint=hint)


def _nature(head: bytes) -> str:
    return ": a binary file" if b"\0" in head else ""
