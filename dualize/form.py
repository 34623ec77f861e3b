"""The form of a skeleton: what must hold before any of its entries may be used as an index.

Counts that fit each other, tables that are there and have their shapes and widths, entries in the range of
their kind, offsets that rise from 0 to the end.  Nothing is allocated that is larger than the tables.
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

import numpy as np

from .errors import SkeletonError
from .layout import COUNTS, FLAGS, TABLES, Table, dtype_of, id_dtype, sizes
from .skeleton import Skeleton

__all__ = ["COLOURS", "LABELS", "POINTS", "check_form", "compare", "entry", "wrong"]

LABELS = ("vertices/corners", "nodes/corners", "links/corners")
POINTS = ("vertices/point", "vertices/segment", "vertices/segment_sign")
COLOURS = ("colours/edge", "colours/face")


def check_form(skeleton: Skeleton) -> None:
    """Check counts, flags, presence, shapes, widths, ranges and offsets.

    Raises
    ------
    SkeletonError
        Naming the first wrong entry.
    """
    _check_header(skeleton)
    _check_tables(skeleton)
    _check_ranges(skeleton)
    _check_offsets(skeleton)


def wrong(what: str, where: str) -> SkeletonError:
    return SkeletonError(
        what, where, "the file is damaged, or was not written by the rules of `dualize spec`"
    )


def entry(skeleton: Skeleton, name: str, flat: int, why: str) -> SkeletonError:
    """The error that names an entry of a table by its index and value."""
    table = skeleton[name]
    index = ", ".join(str(int(x)) for x in np.unravel_index(flat, table.shape))
    return wrong(f"it is {table.ravel()[flat]}, but {why}", f"{name}[{index}]")


def compare(skeleton: Skeleton, name: str, wanted: np.ndarray, why: str) -> None:
    """Raise for the first entry of a table that differs from `wanted`."""
    differ = skeleton[name] != wanted
    if differ.any():
        flat = int(np.argmax(differ))
        raise entry(
            skeleton, name, flat, why.format(wanted=np.broadcast_to(wanted, differ.shape).ravel()[flat])
        )


# -- step by step ----------------------------------------------------------------------------------


def _check_header(skeleton: Skeleton) -> None:
    d, counts, flags = skeleton.dimension, skeleton.counts, skeleton.flags
    if not _is_integer(d) or d not in (2, 3, 4):
        raise wrong(f"it is {d!r}, but a triangulation has dimension 2, 3 or 4", "dimension")
    for kind, mapping, keys in (("counts", counts, COUNTS), ("flags", flags, FLAGS)):
        if absent := [key for key in keys if key not in mapping]:
            raise wrong("it is missing", f"{kind}/{absent[0]}")
        if unknown := sorted(str(key) for key in mapping if key not in keys):
            raise wrong(f"this version knows no such entry of {kind}", f"{kind}/{unknown[0]}")
    for key in COUNTS:
        if not _is_integer(counts[key]) or counts[key] < 0:
            raise wrong(f"it is {counts[key]!r}, but a count is an integer from 0", f"counts/{key}")
    v, nodes, links = counts["vertices"], counts["nodes"], counts["links"]
    relations = [
        ("vertices", v >= 1, "there is at least one vertex"),
        (
            "edges_external",
            counts["edges_external"] == nodes,
            f"there are {nodes} nodes, one at each external edge",
        ),
        (
            "faces_external",
            counts["faces_external"] == links,
            f"there are {links} links, one in each external face",
        ),
        (
            "edges_internal",
            2 * counts["edges_internal"] + nodes == v * (d + 1),
            f"{v} vertices with {d + 1} slots have {v * (d + 1)} ends of edges, {nodes} of them external",
        ),
        (
            "links",
            2 * links == nodes * d,
            f"{nodes} nodes with {d} places each have {nodes * d} ends of links",
        ),
        ("components", 1 <= counts["components"] <= v, f"there are {v} vertices"),
    ]
    for key, holds, why in relations:
        if not holds:
            raise wrong(f"it is {counts[key]}, but {why}", f"counts/{key}")
    for key in ("ordered", "singular"):
        if not _is_truth(flags[key]):
            raise wrong(f"it is {flags[key]!r}, not true or false", f"flags/{key}")
    orientable = flags["orientable"]
    if not isinstance(orientable, list | tuple) or not all(map(_is_truth, orientable)):
        raise wrong("it is no list of true and false", "flags/orientable")
    if len(orientable) != counts["components"]:
        raise wrong(
            f"it has {len(orientable)} entries for {counts['components']} components", "flags/orientable"
        )
    names = skeleton.corner_names
    if names is not None:
        if not isinstance(names, list | tuple) or not all(isinstance(word, str) for word in names):
            raise wrong("it is no list of words", "corner_names")
        for x in range(1, len(names)):
            if names[x - 1] >= names[x]:
                raise wrong(f"it is {names[x]!r}, but words ascend, each once", f"corner_names[{x}]")


def _is_integer(value: Any) -> bool:
    return isinstance(value, int | np.integer) and not isinstance(value, bool)


def _is_truth(value: Any) -> bool:
    return isinstance(value, bool | np.bool_)


def _check_tables(skeleton: Skeleton) -> None:
    """Presence, shapes and widths."""
    _check_presence(skeleton)
    counts = {key: int(skeleton.counts[key]) for key in COUNTS}
    letters = sizes(int(skeleton.dimension), counts)
    ids = id_dtype(counts)
    have = [table for name, table in TABLES.items() if name in skeleton]
    for table in have:
        array = skeleton[table.name]
        if array.ndim == len(table.shape):  # the number of points and of axes is free, but one for all
            for letter, length in zip(table.shape, array.shape, strict=True):
                if letter in ("P", "A"):
                    letters.setdefault(letter, length)
        shape = tuple(x if isinstance(x, int) else letters.get(x, -1) for x in table.shape)
        if array.shape != shape:
            asked = ", ".join("any" if x < 0 else str(x) for x in shape)
            raise wrong(
                f"its shape is {array.shape}, but the counts and the layout ask for ({asked})", table.name
            )
    for table in have:
        array, width = skeleton[table.name], dtype_of(table, ids)
        if array.dtype != width:
            raise wrong(f"its entries are {array.dtype}, but {width} in this layout", table.name)


def _check_presence(skeleton: Skeleton) -> None:
    have = set(skeleton.arrays)
    if unknown := sorted(have - TABLES.keys()):
        raise wrong("the layout has no such table; further groups are kept apart from it", unknown[0])
    if twice := sorted(TABLES.keys() & set(skeleton.extra)):
        raise wrong("a further group has the name of a table of the layout", twice[0])

    def together(names: Iterable[str], wanted: bool, yes: str, no: str) -> None:
        for name in names:
            if wanted and name not in have:
                raise wrong(f"the table is missing, though {yes}", name)
            if not wanted and name in have:
                raise wrong(f"the table is there, though {no}", name)

    always = [t.name for t in TABLES.values() if t.presence == "always"]
    together(always, True, "every skeleton has it", "")
    together(LABELS, any(name in have for name in LABELS), "there are labels", "")
    together(POINTS, any(name in have for name in POINTS), "there are points or segments", "")
    together(COLOURS, any(name in have for name in COLOURS), "there are colours", "")
    together(
        ["faces/singular"],
        bool(skeleton.flags["singular"]),
        "flags/singular is true",
        "flags/singular is false",
    )
    if "coordinates/period" in have and not {"coordinates/point", "coordinates/corner"} & have:
        raise wrong("there is a period and there are no coordinates", "coordinates/period")
    if skeleton.corner_names is not None and "vertices/corners" not in have:
        raise wrong("there are words for labels and there are no labels", "corner_names")


def _check_ranges(skeleton: Skeleton) -> None:
    """The range of every entry by the kind of its table."""
    d = int(skeleton.dimension)
    size = sizes(d, dict(skeleton.counts))
    names = skeleton.corner_names
    limits = {
        "vertex": (0, size["V"] - 1),
        "edge": (0, size["E"] - 1),
        "face": (0, size["F"] - 1),
        "node": (0, size["B"] - 1),
        "link": (0, size["L"] - 1),
        "component": (0, skeleton.counts["components"] - 1),
        "boundary": (0, size["B"] - 1),
        "point": (0, size["V"] * size["K"] - 1),
        "segment": (0, size["V"] * size["W"] - 1),
        "segment_sign": (-1, 1),
        "sign": (-1, 1),
        "bit": (0, 1),
        "singular": (0, 3),
        "corner": (-1, d),
        "slot": (0, d),
        "place": (0, d - 1),
        "wedge": (0, size["W"] - 1),
    }
    if names is not None:
        limits["label"] = (0, len(names) - 1)
    for name, table in TABLES.items():
        if name not in skeleton or not skeleton[name].size:
            continue
        if table.kind == "end":
            _check_ends(skeleton, name, size)
        elif table.kind in limits:
            _check_limits(skeleton, table, *limits[table.kind])


def _check_limits(skeleton: Skeleton, table: Table, low: int, high: int) -> None:
    array: np.ndarray = skeleton[table.name].ravel()
    if array.min() < low or array.max() > high:
        flat = int(np.argmax((array < low) | (array > high)))
        raise entry(skeleton, table.name, flat, f"a {table.kind.replace('_', ' ')} is from {low} to {high}")
    if table.kind == "sign" and not array.all():
        raise entry(skeleton, table.name, int(np.argmin(array != 0)), "a sign is +1 or -1")


def _check_ends(skeleton: Skeleton, name: str, size: dict[str, int]) -> None:
    """The rows of edge ends: ``(vertex, slot)`` or ``(-1, node)``."""
    vertex, second = skeleton[name].T
    if vertex.min() < -1 or vertex.max() >= size["V"]:
        row = int(np.argmax((vertex < -1) | (vertex >= size["V"])))
        raise entry(skeleton, name, 2 * row, f"a vertex is from 0 to {size['V'] - 1}; -1 stands for a node")
    wrong = (second < 0) | (second > np.where(vertex < 0, size["B"] - 1, size["D"]))
    if wrong.any():
        row = int(np.argmax(wrong))
        kind, high = ("node", size["B"] - 1) if vertex[row] < 0 else ("slot", size["D"])
        why = f"a {kind} is from 0 to {high}" if high >= 0 else f"there is no {kind}"
        raise entry(skeleton, name, 2 * row + 1, why)


def _check_offsets(skeleton: Skeleton) -> None:
    vertex = skeleton["faces/vertex_offsets"]
    for name, ends in (
        ("faces/vertex_offsets", skeleton["faces/vertex"]),
        ("faces/edge_offsets", skeleton["faces/edge"]),
    ):
        offsets = skeleton[name]
        if offsets[0] != 0:
            raise entry(skeleton, name, 0, "offsets start at 0")
        if (fall := offsets[1:] <= offsets[:-1]).any():
            raise entry(skeleton, name, int(np.argmax(fall)) + 1, "offsets grow: no face is empty")
        if offsets[-1] != len(ends):
            raise entry(skeleton, name, len(offsets) - 1, f"offsets end at the number of visits, {len(ends)}")
    internal = int(skeleton.counts["faces_internal"])
    wanted = vertex + np.maximum(np.arange(len(vertex)) - internal, 0)
    compare(
        skeleton,
        "faces/edge_offsets",
        wanted,
        "it must be {wanted}: an internal face has as many edges as vertices, an external one more",
    )
