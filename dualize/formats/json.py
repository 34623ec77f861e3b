"""JSON: skeletons, facet lists, gluing tables.

A skeleton is an object per group (``/`` nests), arrays as nested lists.  A triangulation is a list of facets,
or an object with ``facets`` (and ``coordinates``), or one with ``across`` and ``carry`` (and ``written``,
``corners``, ``corner_names``, ``coordinates``).  Coordinates are a list with a row for every label, an object
from label to row, or an object with ``point``, ``corner``, ``period``.

JSON has no widths and no empty shapes: the tables of the layout get theirs back on reading; in further groups
a box of numbers comes back as int64 or float64, anything else as plain lists and objects.  It has no NaN.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from ..errors import InputError
from ..layout import TABLES
from ..skeleton import Skeleton
from ..triangulation import Triangulation
from .boxes import loads
from .document import HEADER, content_of, document_of, flatten, table_of
from .registry import Content, Format, Options
from .source import Source
from .target import Target

__all__ = ["FORMAT"]

BOM = b"\xef\xbb\xbf"


def sniff(head: bytes) -> bool:
    """An object or a list."""
    return head.removeprefix(BOM).lstrip().startswith((b"{", b"["))


def read(source: Source, options: Options) -> tuple[Content, str]:
    """Read JSON."""
    tree = _loads(source.take().removeprefix(BOM))
    if isinstance(tree, list | np.ndarray):
        tree = {"facets": tree}
    if not isinstance(tree, dict):
        raise InputError("it is neither an object nor a list of facets")
    if "format" in tree or isinstance(tree.get("vertices"), dict):
        tree = flatten(tree, keep=("counts", "flags", "provenance"))
        tree = {name: _value(name, tree[name]) for name in tree}
    content, how = content_of(tree, options.threads, options.notes)
    return content, f"JSON, {how}"


def _loads(data: bytes) -> Any:
    import orjson

    try:
        return loads(data)
    except orjson.JSONDecodeError as error:
        if "UTF-8" in error.msg:
            try:
                data.decode()
            except UnicodeDecodeError as wrong:
                line = data.count(b"\n", 0, wrong.start) + 1
                raise InputError("this is no UTF-8 text", f"line {line}", "save it as UTF-8") from None
        cut = "end of data" in error.msg or error.pos >= len(error.doc.rstrip())
        what = "the JSON text ends in the middle" if cut else f"this is no JSON: {error.msg.split(':')[0]}"
        place = f"line {error.lineno}, column {error.colno}"
        raise InputError(what, place, "is the file whole?" if cut else None) from None


def _value(name: str, value: Any) -> Any:
    """Further entries of a skeleton: boxes of numbers as arrays, the rest as it is."""
    if name in TABLES or name in HEADER or not isinstance(value, list) or not value:
        return value
    try:
        array = table_of(value, name)
    except InputError:
        return value
    return array if array.size else value


# -- writing ---------------------------------------------------------------------------------------


def write(content: Content, target: Target) -> None:
    """Write JSON, one table in each line."""
    for piece in json_pieces(content, target.gluing):
        target.stream.write(piece)


def json_pieces(content: Content, gluing: bool = False) -> Iterator[bytes]:
    """JSON text in pieces."""
    document = document_of(content, gluing)
    if isinstance(content, Triangulation):
        document = _words_in_place(content, document)
    yield from _object(_nest(document), 0, isinstance(content, Skeleton))
    yield b"\n"


def _words_in_place(t: Triangulation, document: dict[str, Any]) -> dict[str, Any]:
    """Words as the labels themselves, rather than their positions in a list."""
    if t.corner_names is None:
        return document
    out = {name: value for name, value in document.items() if name != "corner_names"}
    for name in ("facets", "corners"):
        if name in out:
            out[name] = t.named(out[name])
    return out


def _nest(document: dict[str, Any]) -> dict[str, Any]:
    tree: dict[str, Any] = {}
    for name, value in document.items():
        *groups, last = name.split("/")
        place = tree
        for group in groups:
            place = place.setdefault(group, {})
        place[last] = value
    return tree


def _object(tree: dict[str, Any], depth: int, nested: bool) -> Iterator[bytes]:
    """An object, its entries in a line each; groups of tables are opened, other mappings are not."""
    yield b"{\n"
    pad = b"  " * (depth + 1)
    last = len(tree) - 1
    for number, (name, value) in enumerate(tree.items()):
        yield pad + _dumps(name) + b": "
        if isinstance(value, dict) and value and not (depth == 0 and name in HEADER):
            yield from _object(value, depth + 1, nested)
        else:
            yield _dumps(value, name)
        yield b",\n" if number < last else b"\n"
    yield b"  " * depth + b"}"


def _dumps(value: Any, name: str = "") -> bytes:
    import orjson

    if isinstance(value, np.ndarray):
        if value.dtype.kind == "c":
            raise InputError("JSON has no complex numbers", name, "write HDF5 or NPZ")
        if value.dtype.kind == "f":
            if not np.isfinite(value).all():
                raise InputError("JSON has no infinity and no NaN", name, "write HDF5 or NPZ")
            value = value.astype(np.float32 if value.dtype.itemsize == 4 else np.float64)
        value = np.ascontiguousarray(value.astype(value.dtype.newbyteorder("="), copy=False))
        if value.ndim == 0:
            value = value.item()
    try:
        return orjson.dumps(value, option=orjson.OPT_SERIALIZE_NUMPY)
    except (orjson.JSONEncodeError, TypeError) as error:
        raise InputError(f"it cannot be written as JSON: {error}", name) from None


FORMAT = Format(
    name="json",
    suffixes=(".json",),
    holds="a triangulation or a skeleton",
    sniff=sniff,
    read=read,
    write=write,
    packed=True,
)
