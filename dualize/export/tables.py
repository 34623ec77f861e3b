"""Tables: a directory of CSV files, a row for every cell, and ``about.json`` with the meaning of the columns.

    vertices.csv  wedges.csv  edges.csv  nodes.csv  links.csv
    faces.csv                       one row per face; offsets say where its rows of the next two begin
    face_vertices.csv  face_edges.csv
    segments.csv  coordinates_point.csv  coordinates_corner.csv     where the skeleton has them

Columns are named as the tables of the layout: ``face`` of ``edges/face``, or ``face.0``, ``face.1``, ...
where a row has several.  The first columns number the cell.  Nothing is lost: further groups stand in
``about.json``, and `decode` gives the same skeleton back, whatever the order of the rows.
"""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from typing import Any, NamedTuple

import numpy as np

from ..errors import InputError
from ..formats.document import HEADER, skeleton_document, skeleton_of
from ..layout import TABLES, sizes, wedge_pairs
from ..skeleton import Skeleton

__all__ = ["ABOUT", "NAMES", "decode", "encode"]

ABOUT = "about.json"
KIND = "foam-skeleton-tables"
CHUNK = 1 << 16  # rows that are turned into text at a time


class Sheet(NamedTuple):
    """One CSV file: the columns that number its rows, and the tables of the layout in it."""

    keys: tuple[str, ...]
    tables: tuple[str, ...]


def _group(name: str, *keys: str) -> tuple[str, ...]:
    return tuple(f"{name}/{key}" for key in keys)


SHEETS = {
    "vertices.csv": Sheet(
        ("vertex",), _group("vertices", "orientation", "component", "edge", "leaves", "corners", "point")
    ),
    "wedges.csv": Sheet(("vertex", "wedge"), _group("wedges", "face", "direction")),
    "edges.csv": Sheet(
        ("edge",),
        _group("edges", "source", "target", "twist", "face", "face_sign", "source_corner", "target_corner"),
    ),
    "faces.csv": Sheet(("face",), _group("faces", "vertex_offsets", "edge_offsets", "against", "singular")),
    "face_vertices.csv": Sheet(("face", "step"), _group("faces", "vertex", "wedge")),
    "face_edges.csv": Sheet(("face", "step"), _group("faces", "edge", "edge_sign", "place")),
    "nodes.csv": Sheet(
        ("node",),
        _group(
            "nodes", "edge", "vertex", "slot", "orientation", "component", "link", "link_leaves", "corners"
        ),
    ),
    "links.csv": Sheet(("link",), _group("links", "source", "target", "face", "twist", "corners")),
    "segments.csv": Sheet(("vertex", "pair"), _group("vertices", "segment", "segment_sign")),
    "coordinates_point.csv": Sheet(("point",), ("coordinates/point",)),
    "coordinates_corner.csv": Sheet(("vertex", "corner"), ("coordinates/corner",)),
    "coordinates_period.csv": Sheet(("axis",), ("coordinates/period",)),
}
NAMES = frozenset([ABOUT, *SHEETS])
OFFSETS = {"face_vertices.csv": "faces/vertex_offsets", "face_edges.csv": "faces/edge_offsets"}
KEY_MEANING = {
    "wedge": "number of the slot pair",
    "pair": "number of the corner pair",
    "step": "position in the face",
    "corner": "corner of the vertex",
    "axis": "axis of the coordinates",
}


# -- writing ---------------------------------------------------------------------------------------


def encode(skeleton: Skeleton) -> Iterator[tuple[str, Iterator[bytes]]]:
    """Names and contents of the files; ``about.json`` comes last.

    Notes
    -----
    Takes time in proportion to the size of the skeleton, and memory for one table at a time.
    """
    sheets = {
        name: present
        for name, sheet in SHEETS.items()
        if (present := tuple(table for table in sheet.tables if table in skeleton.arrays))
    }
    for name, tables in sheets.items():
        yield name, _lines(skeleton, name, tables)
    yield ABOUT, iter([_about(skeleton, sheets)])


def _lines(skeleton: Skeleton, name: str, tables: tuple[str, ...]) -> Iterator[bytes]:
    import orjson

    keys = SHEETS[name].keys
    columns, rows = list(keys), _numbers(skeleton, name, tables)
    blocks = []
    for table in tables:
        array = skeleton[table]
        if table.endswith("_offsets"):
            array = array[:-1]  # where each face begins; the last one ends with the file
        width = (
            1 if name in OFFSETS or array.ndim == 1 or TABLES[table].shape[1:] == ("W",) else array.shape[-1]
        )
        columns += _columns(table, width)
        blocks.append(array.reshape(len(rows), width))
    yield (",".join(columns) + "\n").encode()
    floats = any(block.dtype.kind == "f" for block in blocks)
    for lo in range(0, len(rows), CHUNK):
        parts = [rows[lo : lo + CHUNK], *(block[lo : lo + CHUNK] for block in blocks)]
        if floats:  # the numbers of cells stay integers beside coordinates
            listed = zip(*(part.tolist() for part in parts), strict=True)
            lines = (",".join(repr(x) for part in row for x in part) for row in listed)
            yield ("\n".join(lines) + "\n").encode()
        else:
            # [[1,2],[3,4]] is a table once the brackets are gone, and by far the quickest way to one
            text = orjson.dumps(np.concatenate(parts, axis=1), option=orjson.OPT_SERIALIZE_NUMPY)
            yield text[2:-2].replace(b"],[", b"\n") + b"\n"


def _columns(table: str, width: int) -> list[str]:
    """The names of the columns of a table; several have numbers."""
    key = table.split("/")[1]
    shape = TABLES[table].shape
    single = len(shape) == 1 or (len(shape) == 2 and shape[1] == "W")  # a wedge has a row of its own
    return [key] if single else [f"{key}.{k}" for k in range(width)]


def _numbers(skeleton: Skeleton, name: str, tables: tuple[str, ...]) -> np.ndarray:
    """The columns that number the rows of a sheet."""
    if name in OFFSETS:
        offsets = skeleton[OFFSETS[name]]
        length = np.diff(offsets)
        step = np.arange(offsets[-1]) - np.repeat(offsets[:-1], length)
        return np.stack([np.repeat(np.arange(len(length)), length), step], axis=1)
    array = skeleton[tables[0]]
    rows = len(array) - tables[0].endswith("_offsets")
    if len(SHEETS[name].keys) == 1:
        return np.arange(rows)[:, None]
    return np.stack(np.divmod(np.arange(rows * array.shape[1]), array.shape[1]), axis=1)


def _about(skeleton: Skeleton, sheets: Mapping[str, tuple[str, ...]]) -> bytes:
    document = skeleton_document(skeleton)
    head = {name: document[name] for name in HEADER if name in document}
    files: dict[str, Any] = {}
    for name, tables in sheets.items():
        meaning = {key: KEY_MEANING.get(key, f"number of the {key}") for key in SHEETS[name].keys}
        for table in tables:
            about = TABLES[table]
            shape = skeleton[table].shape
            for k, column in enumerate(_columns(table, shape[-1])):
                meaning[column] = about.meaning + (f" [{k}]" if column.endswith(f".{k}") else "")
        files[name] = meaning
    pairs = wedge_pairs(skeleton.dimension)
    about_file = {
        "kind": KIND,
        **head,
        "pairs": {"meaning": "pairs (i, j), i < j, that wedges and segments are numbered by", "pairs": pairs},
        "files": files,
        "further": {
            name: _boxed(value)
            for name, value in document.items()
            if name not in TABLES and name not in HEADER
        },
    }
    return (json.dumps(about_file, indent=1, allow_nan=False) + "\n").encode()


def _boxed(value: Any) -> dict[str, Any]:
    """A further entry with what JSON cannot say of an array: its width and shape, infinities and the like."""
    if not isinstance(value, np.ndarray):
        return {"value": value}
    flat = value.ravel()
    if flat.dtype.kind == "c":
        flat = np.stack([flat.real, flat.imag], axis=1).ravel()
    entries = [str(x) if x != x or abs(x) == np.inf else x for x in flat.tolist()]
    return {"dtype": value.dtype.str, "shape": list(value.shape), "entries": entries}


# -- reading ---------------------------------------------------------------------------------------


def decode(files: Mapping[str, bytes]) -> Skeleton:
    """The skeleton in the files of a directory; whether its tables agree is not checked.

    Raises
    ------
    InputError
        If a file is missing, has other columns, an entry that is no number, or rows missing or twice.
    SkeletonError
        If what they hold is no skeleton.
    """
    if ABOUT not in files:
        raise InputError(f"there is no {ABOUT}", hint="give the directory of an export as tables")
    try:
        about = json.loads(files[ABOUT])
    except (ValueError, RecursionError) as error:
        raise InputError(f"this is no JSON: {error}", ABOUT) from None
    if not isinstance(about, dict) or about.get("kind") != KIND or not isinstance(about.get("files"), dict):
        raise InputError("this does not describe tables of a skeleton", ABOUT)
    document = {name: about[name] for name in HEADER if name in about}
    for name in about["files"]:
        if name not in SHEETS:
            raise InputError(f"it names a file of another kind: {name!r}", ABOUT)
        if name not in files:
            raise InputError("the file is missing", name)
        document.update(_sheet(name, files[name], about))
    further = about.get("further", {})
    try:
        document.update({name: _unboxed(value) for name, value in further.items()})
    except (AttributeError, KeyError, TypeError, ValueError) as error:
        raise InputError(f"a further entry is damaged: {error}", ABOUT) from None
    return skeleton_of(document)


def _sheet(name: str, data: bytes, about: Mapping[str, Any]) -> dict[str, np.ndarray]:
    """The tables in a CSV file."""
    sheet = SHEETS[name]
    header, _, body = data.partition(b"\n")
    columns = header.decode("utf-8", "replace").strip().lstrip("\ufeff").split(",")
    if columns != list(about["files"][name]):
        raise InputError(f"the columns are not those that {ABOUT} lists", f"{name}, line 1")
    rows = _parse(name, body, len(columns), "coordinates/" in sheet.tables[0])
    keys = rows[:, : len(sheet.keys)].astype(np.int64)
    order = np.lexsort(keys.T[::-1])
    keys, rows = keys[order], rows[order]
    if (keys[1:] == keys[:-1]).all(axis=1).any():
        twice = keys[1:][(keys[1:] == keys[:-1]).all(axis=1)][0]
        raise InputError(f"a row occurs twice: {_named(sheet.keys, twice)}", name)
    _complete(name, sheet.keys, keys)

    tables, column = {}, len(sheet.keys)
    for table in sheet.tables:
        key = table.split("/")[1]
        width = sum(c == key or c.startswith(key + ".") for c in columns[column:])
        if not width:
            continue
        if columns[column : column + width] != _columns(table, width):
            raise InputError(f"the columns of {table} are not in order", f"{name}, line 1")
        block = rows[:, column : column + width]
        column += width
        if len(TABLES[table].shape) == 1:
            block = block[:, 0]
        if name in ("wedges.csv", "segments.csv", "coordinates_corner.csv"):
            width = int(keys[:, 1].max(initial=-1)) + 1
            block = block.reshape(-1, width, *([] if TABLES[table].shape[1:] == ("W",) else block.shape[1:]))
        tables[table] = block
    if column != len(columns):
        raise InputError(f"there is no column {columns[column]!r} in this file", f"{name}, line 1")
    if name == "faces.csv":
        letters = sizes(about["dimension"], about["counts"]) if _counted(about) else {}
        for table, total in (("faces/vertex_offsets", "VS"), ("faces/edge_offsets", "ES")):
            if table in tables:
                tables[table] = np.append(tables[table], letters.get(total, 0))
    return tables


def _counted(about: Mapping[str, Any]) -> bool:
    """Whether dimension and counts can be used; what is wrong with them is told by `skeleton_of`."""
    try:
        return all(type(n) is int for n in sizes(about["dimension"], about["counts"]).values())
    except (KeyError, TypeError):
        return False


def _parse(name: str, body: bytes, width: int, floats: bool) -> np.ndarray:
    """The entries of a CSV file below its header."""
    import io

    dtype = np.float64 if floats else np.int64
    if not body.strip():
        return np.zeros((0, width), dtype=dtype)
    try:
        rows = np.loadtxt(
            io.BytesIO(body), dtype=dtype, delimiter=",", ndmin=2, comments=None, encoding="utf-8"
        )
    except (ValueError, OverflowError) as error:
        for number, line in enumerate(body.decode("utf-8", "replace").splitlines(), start=2):
            entries = line.split(",")
            if len(entries) != width:
                what = f"the line has {len(entries)} entries, and the header {width}"
                raise InputError(what, f"{name}, line {number}") from None
            for entry in entries:
                try:
                    dtype(entry)
                except (ValueError, OverflowError):
                    what = f"{entry[:40]!r} is no {'number' if floats else 'integer'}"
                    raise InputError(what, f"{name}, line {number}") from None
        raise InputError(f"it cannot be read: {error}", name) from None
    if rows.shape[1] != width:
        raise InputError(f"the lines have {rows.shape[1]} entries, and the header {width}", f"{name}, line 2")
    return rows


def _complete(name: str, names: tuple[str, ...], keys: np.ndarray) -> None:
    """Refuse sorted numbers of rows that leave one out; those beyond the last are missed by `skeleton_of`."""
    rows = np.arange(len(keys))
    if len(names) == 1:
        wanted = rows[:, None]
    elif name in OFFSETS:  # steps count from 0 within each face
        first = np.diff(keys[:, 0], prepend=-1) != 0
        wanted = np.stack([keys[:, 0], rows - np.maximum.accumulate(np.where(first, rows, 0))], axis=1)
    else:
        wanted = np.stack(np.divmod(rows, int(keys[:, 1].max(initial=0)) + 1), axis=1)
    wrong = (keys != wanted).any(axis=1)
    if wrong.any():
        raise InputError(f"a row is missing before {_named(names, keys[wrong][0])}", name)


def _named(keys: tuple[str, ...], numbers: Any) -> str:
    return ", ".join(f"{key} {number}" for key, number in zip(keys, numbers, strict=True))


def _unboxed(value: dict[str, Any]) -> Any:
    if "value" in value:
        return value["value"]
    dtype = np.dtype(value["dtype"])
    if dtype.kind not in "biufc":
        raise ValueError(f"no width {value['dtype']!r}")
    if dtype.kind == "c":
        flat = np.array([float(x) for x in value["entries"]]).reshape(-1, 2)
        return (flat[:, 0] + 1j * flat[:, 1]).astype(dtype).reshape(value["shape"])
    entries = value["entries"]
    if dtype.kind == "f":
        entries = [float(x) for x in entries]
    return np.array(entries, dtype=dtype).reshape(value["shape"])
