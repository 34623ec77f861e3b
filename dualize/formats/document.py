"""Triangulations and skeletons as documents: flat mappings of names to arrays and JSON values.

A document is what every container (JSON, HDF5, NPZ) stores in its own way.  A skeleton's document has
``format``, ``version``, ``dimension``, ``counts``, ``flags``, ``provenance``, ``corner_names`` (where labels
are words), the tables of the layout, and whatever further groups the skeleton carries.  A triangulation's
document is one of

    facets, with coordinates and corner_names where there are some
    corners and across, where the labels say how the shared facets are glued
    across, carry, written, with corners, corner_names and coordinates where there are some, and
    ``matched`` or ``coloured`` (true) where the triangulation is

Arrays may come as nested lists; nothing that comes in is trusted.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from itertools import chain, pairwise
from typing import Any

import numpy as np

from ..errors import InputError, SkeletonError
from ..layout import COUNTS, FORMAT, TABLES, VERSION, Table, dtype_of, id_dtype, sizes
from ..skeleton import Skeleton
from ..triangulation import Coordinates, Triangulation
from .text import as_written, check_words, number_words

__all__ = [
    "HEADER",
    "content_of",
    "document_of",
    "flatten",
    "skeleton_document",
    "skeleton_of",
    "table_of",
    "triangulation_document",
    "triangulation_of",
]

# entries of a skeleton that are no tables
HEADER = ("format", "version", "dimension", "counts", "flags", "provenance", "corner_names")

TRIANGULATION_ENTRIES = (
    "facets",
    "across",
    "carry",
    "written",
    "corners",
    "corner_names",
    "coordinates",
    "matched",
    "coloured",
    "refined_from",
)

# what a gluing table may say of itself; `Triangulation` checks it
MARKS = ("matched", "coloured")

# the largest count that is taken seriously: tables of it would not fit into 2**63 bytes
LARGEST = 2**48


def document_of(content: Triangulation | Skeleton, gluing: bool = False) -> dict[str, Any]:
    """The document of any content."""
    if isinstance(content, Skeleton):
        return skeleton_document(content)
    return triangulation_document(content, gluing)


def content_of(
    document: Mapping[str, Any], threads: int | None = None, notes: Callable[[str], object] | None = None
) -> tuple[Triangulation | Skeleton, str]:
    """What a document holds, and in a few words which kind of document it is.

    Raises
    ------
    InputError, SkeletonError, TriangulationError
    """
    if "format" in document or "vertices/orientation" in document:
        return skeleton_of(document), "skeleton"
    return triangulation_of(document, threads, notes)


# -- skeletons -------------------------------------------------------------------------------------


def skeleton_document(skeleton: Skeleton) -> dict[str, Any]:
    """The document of a skeleton, in the order of the layout, further groups last and sorted."""
    s = skeleton
    document: dict[str, Any] = {
        "format": FORMAT,
        "version": VERSION,
        "dimension": int(s.dimension),
        "counts": dict(s.counts),
        "flags": dict(s.flags),
        "provenance": None if s.provenance is None else dict(s.provenance),
    }
    if s.corner_names is not None:
        document["corner_names"] = list(s.corner_names)
    document.update((name, s.arrays[name]) for name in TABLES if name in s.arrays)
    further = flatten(s.extra)
    for name in sorted(further):
        _check_name(name, document)
        document[name] = _plain(further[name])
    return document


def skeleton_of(document: Mapping[str, Any]) -> Skeleton:
    """The skeleton of a document: widths and shapes by the layout; whether the tables agree is not checked.

    Raises
    ------
    SkeletonError
        Naming the first entry that does not fit.
    """
    kind, version = document.get("format"), document.get("version")
    if not isinstance(kind, str) or kind != FORMAT:
        raise SkeletonError(f"the format is {_name_of(kind)}, not {FORMAT!r}", "format")
    if type(version) is not int or version != VERSION:
        raise SkeletonError(
            f"this is version {_name_of(version)} of the layout, and this program reads version {VERSION}",
            "version",
            "read it with the program that wrote it, or a newer one",
        )
    dimension = document.get("dimension")
    if type(dimension) is not int or dimension not in (2, 3, 4):
        raise SkeletonError(f"the dimension is {_name_of(dimension)}, not 2, 3 or 4", "dimension")
    counts, flags = document.get("counts"), document.get("flags")
    if not isinstance(counts, dict) or not isinstance(flags, dict):
        name = "flags" if isinstance(counts, dict) else "counts"
        raise SkeletonError(f"{name} is missing, or no mapping", name)
    for name in COUNTS:
        if type(counts.get(name)) is not int or not 0 <= counts[name] < LARGEST:
            raise SkeletonError(f"{_name_of(counts.get(name))} is no number of cells", f"counts/{name}")
    orientable = flags.get("orientable")
    if not isinstance(orientable, list) or any(type(x) is not bool for x in orientable):
        raise SkeletonError("this is no list of truth values, one for each component", "flags/orientable")
    for name in ("ordered", "singular"):
        if type(flags.get(name)) is not bool:
            raise SkeletonError(f"it is {_name_of(flags.get(name))}, not true or false", f"flags/{name}")
    names = document.get("corner_names")
    if names is not None and not (isinstance(names, list) and all(type(x) is str for x in names)):
        raise SkeletonError("this is no list of words", "corner_names")
    provenance = document.get("provenance")
    if provenance is not None and not isinstance(provenance, dict):
        raise SkeletonError("this is no mapping", "provenance")

    letters = sizes(dimension, counts)
    ids = id_dtype(counts)
    arrays = {}
    for name, table in TABLES.items():
        if name in document:
            try:
                arrays[name] = _fit(document[name], table, letters, ids)
            except InputError as error:
                raise SkeletonError(error.what, error.where, error.hint) from None
    return Skeleton(
        dimension=dimension,
        counts=counts,
        flags=flags,
        arrays=arrays,
        corner_names=None if names is None else tuple(names),
        provenance=provenance,
        extra={k: v for k, v in document.items() if k not in TABLES and k not in HEADER},
    )


def _fit(value: Any, table: Table, letters: dict[str, int], ids: np.dtype) -> np.ndarray:
    """A table in its width and shape; sizes that occur for the first time are noted in `letters`."""
    shape = tuple(letters.get(x, -1) if isinstance(x, str) else x for x in table.shape)
    array = table_of(value, table.name)
    if array.size == 0 and 0 in shape and array.ndim <= len(shape):
        array = array.reshape([max(n, 0) for n in shape])
    if array.ndim != len(shape) or any(n not in (m, -1) for m, n in zip(array.shape, shape, strict=False)):
        wanted = ", ".join(str(n) if n >= 0 else str(x) for n, x in zip(shape, table.shape, strict=True))
        raise InputError(f"the shape is {array.shape}, and the counts ask for ({wanted})", table.name)
    for letter, n in zip(table.shape, array.shape, strict=True):
        if isinstance(letter, str):
            letters[letter] = n
    return _cast(array, dtype_of(table, ids), table.name)


def _cast(array: np.ndarray, dtype: np.dtype, name: str) -> np.ndarray:
    """The array in another width, if every entry fits."""
    if array.dtype == dtype and dtype.kind != "f":
        return array
    if array.dtype.kind not in ("iuf" if dtype.kind == "f" else "iu"):
        wanted = "numbers" if dtype.kind == "f" else "integers"
        raise InputError(f"the entries are {array.dtype}, not {wanted}", name)
    if dtype.kind == "f":
        result = array.astype(dtype, copy=False)
        bad = ~np.isfinite(result)
    else:
        info = np.iinfo(dtype)
        low, high = (int(array.min()), int(array.max())) if array.size else (0, 0)
        if info.min <= low and high <= info.max:
            return array.astype(dtype, copy=False)
        bad = (array < max(info.min, _least(array.dtype))) | (array > min(info.max, _most(array.dtype)))
        result = array
    if bad.any():
        at = tuple(int(x) for x in np.argwhere(bad)[0])
        raise InputError(f"{array[at]} is out of range", f"{name}[{', '.join(map(str, at))}]")
    return result


def _least(dtype: np.dtype) -> int:
    return int(np.iinfo(dtype).min)


def _most(dtype: np.dtype) -> int:
    return int(np.iinfo(dtype).max)


# -- names and values ------------------------------------------------------------------------------


def flatten(tree: Mapping[str, Any], keep: tuple[str, ...] = ()) -> dict[str, Any]:
    """Nested mappings as one, names joined by ``/``; the entries `keep` and empty mappings stay as they are.

    Raises
    ------
    InputError
        If two entries have the same name, or a name is empty.
    """
    flat: dict[str, Any] = {}
    stack: list[tuple[str, Any]] = [(key, value) for key, value in reversed(list(tree.items()))]
    while stack:
        name, value = stack.pop()
        if not isinstance(name, str) or not all(name.split("/")):
            raise InputError("an entry has an empty name", repr(name))
        if isinstance(value, Mapping) and value and name not in keep:
            stack.extend((f"{name}/{key}", inner) for key, inner in reversed(list(value.items())))
        elif name in flat:
            raise InputError("two entries have the same name", name)
        else:
            flat[name] = value
    return flat


def _check_name(name: str, taken: Mapping[str, Any]) -> None:
    """Refuse a further group's name that a file cannot hold beside the others."""
    parts = name.split("/")
    prefixes = {"/".join(parts[:n]) for n in range(1, len(parts))}
    if any(part in (".", "..") for part in parts) or "\0" in name or name in TABLES or parts[0] in HEADER:
        raise InputError("a further entry of the skeleton cannot have this name", repr(name))
    if name in taken or prefixes & taken.keys():
        raise InputError("a further entry of the skeleton has the name of another, or of a group", name)


def _plain(value: Any) -> Any:
    """A further entry as an array of numbers or a JSON value."""
    if isinstance(value, np.generic):
        value = np.asarray(value)
    if isinstance(value, np.ndarray):
        if value.dtype.kind in "US":
            return value.astype(str).tolist()
        if value.dtype.kind not in "biufc":
            raise InputError(
                f"an array of {value.dtype} cannot be written", hint="give numbers, or JSON values"
            )
        return value
    return value


def table_of(value: Any, name: str) -> np.ndarray:
    """Nested lists as an array of bool, int64 or float64; arrays as they are.

    Raises
    ------
    InputError
        If the lists are ragged, or hold anything but numbers, or numbers beyond 64 bits.
    """
    if isinstance(value, np.ndarray):
        return value
    if not isinstance(value, list):
        raise InputError(f"it is {_name_of(value)}, not a table", name)
    shape, flat = _leaves(value, name)
    kinds = set(map(type, flat))
    try:
        if kinds <= {int}:
            return np.fromiter(flat, dtype=np.int64, count=len(flat)).reshape(shape)
        if kinds == {bool}:
            return np.array(flat, dtype=bool).reshape(shape)
        if kinds <= {int, float}:
            return np.array(flat, dtype=np.float64).reshape(shape)
    except OverflowError:
        at = next(i for i, x in enumerate(flat) if not -(2**63) <= x < 2**63)
        raise InputError(f"{flat[at]} is beyond 64 bits", _at(name, at, shape)) from None
    at = next(i for i, x in enumerate(flat) if type(x) not in (int, float))
    raise InputError(f"{_name_of(flat[at])} is no number", _at(name, at, shape))


def _leaves(value: list, name: str) -> tuple[tuple[int, ...], list]:
    """Shape and entries of nested lists that form a box."""
    shape = [len(value)]
    level = value
    while level and type(level[0]) is list:
        if set(map(type, level)) != {list}:
            at = next(i for i, x in enumerate(level) if type(x) is not list)
            raise InputError(f"{_name_of(level[at])} stands among lists", _at(name, at, tuple(shape)))
        lengths = set(map(len, level))
        if len(lengths) > 1:
            at = next(i for i, x in enumerate(level) if len(x) != len(level[0]))
            raise InputError(
                f"this row has {len(level[at])} entries, and the first has {len(level[0])}",
                _at(name, at, tuple(shape)),
                "all rows of a table have the same length",
            )
        shape.append(len(level[0]))
        level = list(chain.from_iterable(level))
    if any(type(x) is list for x in level):
        at = next(i for i, x in enumerate(level) if type(x) is list)
        raise InputError("a list stands among single entries", _at(name, at, tuple(shape)))
    return tuple(shape), level


def _at(name: str, flat: int, shape: tuple[int, ...]) -> str:
    index = np.unravel_index(flat, shape)
    return f"{name}[{', '.join(str(int(i)) for i in index)}]"


def _name_of(value: Any) -> str:
    if isinstance(value, str):
        return repr(value[:40])
    if isinstance(value, dict):
        return "a mapping"
    if isinstance(value, list):
        return "a list"
    if isinstance(value, np.ndarray):
        return f"an array of {value.dtype}"
    return {"None": "null", "True": "true", "False": "false"}.get(str(value), repr(value)[:40])


# -- triangulations --------------------------------------------------------------------------------


def triangulation_document(t: Triangulation, gluing: bool = False) -> dict[str, Any]:
    """The document of a triangulation: facets where labels say it all, else (or on request) gluings."""
    document: dict[str, Any]
    coordinates = t.coordinates or Coordinates()
    chart = coordinates.corner
    if t.matched and t.corners is not None and not gluing:
        document = {"facets": as_written(t)}
        if chart is not None:
            chart = chart.copy()
            turned = t.written < 0
            chart[turned, -2:] = chart[turned, -2:][:, ::-1]
    else:
        document = {"across": t.across, "carry": t.carry, "written": t.written}
        if t.corners is not None:
            document["corners"] = t.corners
        document.update((name, True) for name in MARKS if getattr(t, name))
    if t.corner_names is not None:
        document["corner_names"] = list(t.corner_names)
    for name, array in (("point", coordinates.point), ("corner", chart), ("period", coordinates.period)):
        if array is not None:
            document[f"coordinates/{name}"] = array
    if t.refined_from is not None:
        document["refined_from/simplex"] = t.refined_from
    return document


def triangulation_of(
    document: Mapping[str, Any], threads: int | None = None, notes: Callable[[str], object] | None = None
) -> tuple[Triangulation, str]:
    """The triangulation of a document, and which kind of document it is.

    Raises
    ------
    InputError, TriangulationError
    """
    unread = [name for name in document if name.split("/")[0] not in TRIANGULATION_ENTRIES]
    if unread and notes is not None and ("across" in document or "facets" in document):
        more = f" and {len(unread) - 8} more" if len(unread) > 8 else ""
        notes(f"ignored {', '.join(unread[:8])}{more}: no entries of a triangulation")
    if "across" in document and "facets" in document:
        raise InputError(
            "there are both facets and a gluing table (across), and either makes a triangulation",
            hint="keep one of them in the file",
        )
    if "across" in document:
        t = _with_origin(_gluings(document), document)
        return t, "gluing table" if "carry" in document else "labels and neighbours"
    if "facets" not in document:
        known = ", ".join(list(document)[:8]) or "nothing"
        raise InputError(
            f"there are neither facets nor a gluing table, only {known}",
            hint="give facets (a list of label lists), or across and carry",
        )
    labels, names = _labels(document["facets"], "facets", document.get("corner_names"))
    coordinates = _coordinates(document, labels, names)
    content = Triangulation.from_facets(labels, coordinates=coordinates, corner_names=names, threads=threads)
    content = _with_origin(content, document)
    return content, "facets, labels are " + ("integers" if names is None else "words")


def _with_origin(t: Triangulation, document: Mapping[str, Any]) -> Triangulation:
    """With the simplices of the coarser triangulation that the document names."""
    name = "refined_from/simplex"
    nested = document.get("refined_from")
    given = nested.get("simplex") if isinstance(nested, dict) else document.get(name)
    if given is None:
        return t
    origin = table_of(given, name)
    if origin.shape != (len(t),) or origin.dtype.kind not in "iu" or (origin < -1).any():
        raise InputError(
            f"it is no list of {len(t)} simplex numbers", name, "give one for each simplex, -1 for none"
        )
    return replace(t, refined_from=origin.astype(np.int64))


def _gluings(document: Mapping[str, Any]) -> Triangulation:
    across = table_of(document["across"], "across")
    corners = names = None
    if document.get("corners") is not None:
        corners, names = _labels(document["corners"], "corners", document.get("corner_names"))
    written = document.get("written")
    signs = None if written is None else table_of(written, "written")
    coordinates = _coordinates(document, corners, names)
    if "carry" in document:
        t = Triangulation.from_gluings(
            across,
            table_of(document["carry"], "carry"),
            written=signs,
            corners=corners,
            corner_names=names,
            coordinates=coordinates,
            **{name: _mark(document.get(name), name) for name in MARKS},
        )
    elif corners is None:
        raise InputError(
            "there is across but neither carry nor corners",
            hint="carry[s][i] lists the images of the corners of s; or give corners, the labels",
        )
    else:
        t = Triangulation.from_neighbours(
            corners, across, written=signs, corner_names=names, coordinates=coordinates
        )
    c = t.coordinates
    if c is not None and c.corner is not None and c.corner.shape[:2] != t.across.shape:
        raise InputError(
            f"corner coordinates have the shape {c.corner.shape}, not {(*t.across.shape, 'axes')}",
            "coordinates/corner",
        )
    return t


def _mark(value: Any, name: str) -> bool:
    if value is None or isinstance(value, bool | np.bool_):
        return bool(value)
    if isinstance(value, np.ndarray) and value.dtype.kind == "b" and value.ndim == 0:
        return bool(value)
    raise InputError(f"it is {_name_of(value)}, not true or false", name)


def _labels(value: Any, name: str, names: Any) -> tuple[np.ndarray, tuple[str, ...] | None]:
    """A table of labels, int64, and the words where labels are words."""
    if isinstance(value, np.ndarray) and value.dtype.kind == "U":
        value = value.tolist()
    if isinstance(value, list):
        shape, flat = _leaves(value, name)
        kinds = set(map(type, flat))
        if kinds == {str}:
            if names is not None:
                raise InputError("with corner_names the labels are positions in it, not words", name)
            if len(shape) != 2 or shape[1] not in (3, 4, 5):
                raise _bad_shape(shape, name)
            labels, words = number_words(flat, shape[1])
            check_words(words, name)
            return labels, words
        if not kinds <= {int}:
            wanted = str if kinds - {int, float} == {str} and type(flat[0]) is str else int
            at = next(i for i, x in enumerate(flat) if type(x) is not wanted)
            row = at // shape[-1] if len(shape) == 2 else at
            meant = "word" if wanted is str else "integer within 64 bits"
            raise InputError(
                f"the label {_name_of(flat[at])} is no {meant}",
                f"{name}[{row}]",
                "labels are all integers, or all words; a mixture is written as words throughout",
            )
    array = table_of(value, name)
    if array.dtype.kind not in "iu":
        raise InputError(f"labels are integers or words, and these are {array.dtype}", name)
    if array.ndim != 2 or array.shape[0] == 0 or array.shape[1] not in (3, 4, 5):
        raise _bad_shape(array.shape, name)
    labels = _cast(array, np.dtype(np.int64), name)
    if names is None:
        return labels, None
    if isinstance(names, np.ndarray):
        names = names.tolist()
    if not isinstance(names, list) or any(type(x) is not str for x in names):
        raise InputError("this is no list of words", "corner_names")
    check_words(names, "corner_names")
    if any(a >= b for a, b in pairwise(names)):
        raise InputError("the words are not in order of code points, or one is repeated", "corner_names")
    if labels.min() < 0 or labels.max() >= len(names):
        raise InputError(f"a label is no position in the {len(names)} words of corner_names", name)
    return labels, tuple(names)


def _bad_shape(shape: tuple[int, ...], name: str) -> InputError:
    return InputError(
        f"the table has the shape {shape}, not (simplices, 3, 4 or 5)",
        name,
        "give at least one simplex, each as the list of its 3, 4 or 5 labels",
    )


def _coordinates(
    document: Mapping[str, Any], labels: np.ndarray | None, names: tuple[str, ...] | None
) -> Coordinates | None:
    given = document.get("coordinates")
    parts = {key: document.get(f"coordinates/{key}") for key in ("point", "corner", "period")}
    if isinstance(given, dict) and given.keys() <= parts.keys():
        parts, given = {key: given.get(key) for key in parts}, None
    if given is None and all(value is None for value in parts.values()):
        return None
    if isinstance(given, dict):
        return _by_label(given, labels, names)
    if given is not None:
        parts = {"point": given}
        if names is not None:
            raise InputError(
                "rows of coordinates cannot be found by words",
                "coordinates",
                'give a mapping from label to row: {"a": [0.0, 1.5], ...}',
            )
    arrays = {
        key: _cast(table_of(value, f"coordinates/{key}"), np.dtype(np.float64), f"coordinates/{key}")
        for key, value in parts.items()
        if value is not None
    }
    for key, ndim in (("point", 2), ("corner", 3), ("period", 1)):
        if key in arrays and arrays[key].ndim != ndim:
            raise InputError(
                f"the shape is {arrays[key].shape}, not of {ndim} dimensions", f"coordinates/{key}"
            )
    axes = {arrays[key].shape[-1] for key in arrays}
    if len(axes) > 1 or not arrays.keys() - {"period"}:
        raise InputError("point, corner and period do not fit together", "coordinates")
    return Coordinates(**arrays)


def _by_label(rows: dict[str, Any], labels: np.ndarray | None, names: tuple[str, ...] | None) -> Coordinates:
    """Coordinates given by label: one chart where labels can number rows, else one chart per simplex."""
    if labels is None:
        raise InputError(
            "coordinates by label need labels", "coordinates", "give corners, or coordinates/corner"
        )
    keys = np.array(list(range(len(names)))) if names is not None else np.unique(labels)
    table = _cast(table_of(list(rows.values()), "coordinates"), np.dtype(np.float64), "coordinates")
    if table.ndim != 2:
        raise InputError("every label needs one list of numbers", "coordinates")
    place = {key: row for row, key in enumerate(rows)}
    words = [names[k] for k in keys.tolist()] if names is not None else [str(k) for k in keys.tolist()]
    absent = [word for word in words if word not in place]
    if absent:
        more = f", nor for {len(absent) - 1} more" if len(absent) > 1 else ""
        raise InputError(f"there are no coordinates for label {absent[0]}{more}", "coordinates")
    found = table[[place[word] for word in words]]
    if names is None and keys[0] == 0 and keys[-1] == len(keys) - 1:
        return Coordinates(point=found)
    return Coordinates(corner=found[np.searchsorted(keys, labels)])
