"""The specification that ships with the package: the conventions as prose, the files as JSON Schema."""

from __future__ import annotations

from importlib.resources import files
from typing import Any

from .layout import COUNTS, FLAGS, FORMAT, TABLES, VERSION, Table

__all__ = ["gluing_schema", "prose", "schema"]

DRAFT = "https://json-schema.org/draft/2020-12/schema"

# How the prose names widths; the rest is int8.
WIDTHS = {
    "vertex": "id",
    "edge": "id",
    "face": "id",
    "node": "id",
    "link": "id",
    "end": "id",
    "component": "id",
    "boundary": "id",
    "point": "id",
    "segment": "id",
    "offset": "int64",
    "label": "int64",
    "coordinate": "float64",
}
PRESENCE = {
    "always": "",
    "labels": "labels only",
    "singular": "singular only",
    "coloured": "coloured only",
    "asked": "optional",
}


def prose() -> str:
    """The conventions and the layout as Markdown text.

    Returns
    -------
    str
        What ``dualize spec`` prints; the table of tables is made from `dualize.layout.TABLES`.
    """
    text = files("dualize").joinpath("data/layout.md").read_text(encoding="utf-8")
    rows = ["| name | shape | width | | meaning |", "| --- | --- | --- | --- | --- |"]
    for t in TABLES.values():
        shape = ", ".join(map(str, t.shape)) + ("," if len(t.shape) == 1 else "")
        width, presence = WIDTHS.get(t.kind, "int8"), PRESENCE[t.presence]
        rows.append(f"| `{t.name}` | ({shape}) | {width} | {presence} | {t.meaning} |")
    return text.replace("<!-- tables -->", "\n".join(rows))


def schema() -> dict[str, Any]:
    """The JSON Schema (draft 2020-12) of a foam skeleton in JSON.

    Returns
    -------
    dict
        It fixes names, nesting, the length of rows and the range of entries as far as the dimension
        determines them.  That tables agree is more than a schema can say: `dualize.load` checks it.
    """
    groups: dict[str, list[Table]] = {}
    for table in TABLES.values():
        groups.setdefault(table.name.split("/")[0], []).append(table)
    always = [g for g, tables in groups.items() if any(t.presence == "always" for t in tables)]
    return {
        "$schema": DRAFT,
        "title": "Foam skeleton",
        "description": "The oriented dual two-complex of a triangulation, with its boundary graph.",
        "type": "object",
        "properties": {
            "format": {"const": FORMAT},
            "version": {"const": VERSION},
            "dimension": {"enum": [2, 3, 4]},
            "counts": {
                "type": "object",
                "properties": {key: {"type": "integer", "minimum": 0} for key in COUNTS},
                "required": list(COUNTS),
                "additionalProperties": False,
            },
            "flags": {
                "type": "object",
                "properties": {
                    key: {"type": "array", "items": {"type": "boolean"}, "minItems": 1}
                    if key == "orientable"
                    else {"type": "boolean"}
                    for key in FLAGS
                },
                "required": list(FLAGS),
                "additionalProperties": False,
            },
            "provenance": {"type": ["object", "null"]},
            "corner_names": {"type": "array", "items": {"type": "string"}, "uniqueItems": True},
            **{group: {"type": "object"} for group in groups},
        },
        "required": ["format", "version", "dimension", "counts", "flags", *always],
        # the length of a row depends on the dimension
        "allOf": [
            {
                "if": {"properties": {"dimension": {"const": d}}, "required": ["dimension"]},
                "then": {"properties": {g: _group(tables, d) for g, tables in groups.items()}},
            }
            for d in (2, 3, 4)
        ]
        + [
            {
                "if": {"properties": {"flags": {"properties": {"singular": {"const": singular}}}}},
                "then": {"properties": {"faces": words}},
            }
            for singular, words in (
                (True, {"required": ["singular"]}),
                (False, {"not": {"required": ["singular"]}}),
            )
        ]
        + [
            _together("vertices", "corners", {"nodes": ["corners"], "links": ["corners"]}),
            _together("nodes", "corners", {"vertices": ["corners"]}),
            _together("links", "corners", {"vertices": ["corners"]}),
            {
                "if": {"required": ["corner_names"]},
                "then": {"properties": {"vertices": {"required": ["corners"]}}},
            },
        ],
    }


def gluing_schema() -> dict[str, Any]:
    """The JSON Schema (draft 2020-12) of a triangulation in JSON, given as a gluing table.

    Returns
    -------
    dict
        That every gluing has its inverse is more than a schema can say: `dualize.read` checks it.
    """

    def by_dimension(d: int) -> dict[str, Any]:
        k = d + 1
        return {
            "across": _nested({"type": "integer", "minimum": -1}, (None, k)),
            "carry": _nested({"type": "integer", "minimum": -1, "maximum": d}, (None, k, k)),
            "corners": {"anyOf": [_nested({"type": x}, (None, k)) for x in ("integer", "string")]},
        }

    return {
        "$schema": DRAFT,
        "title": "Gluing table",
        "description": "A triangulation: the simplex behind every slot and the permutation of corners.",
        "type": "object",
        "properties": {
            "written": {"type": "array", "items": {"enum": [1, -1]}},
            "corner_names": {"type": "array", "items": {"type": "string"}, "uniqueItems": True},
            "coordinates": {"type": "object"},
            "matched": {"type": "boolean"},
            "coloured": {"type": "boolean"},
        },
        "required": ["across"],
        "allOf": [{"anyOf": [{"required": ["carry"]}, {"required": ["corners"]}]}],
        "anyOf": [{"properties": by_dimension(d)} for d in (2, 3, 4)],
    }


def _together(group: str, name: str, others: dict[str, list[str]]) -> dict[str, Any]:
    return {
        "if": {"properties": {group: {"required": [name]}}},
        "then": {"properties": {g: {"required": names} for g, names in others.items()}},
    }


def _group(tables: list[Table], d: int) -> dict[str, Any]:
    """The schema of one group in dimension `d`."""
    names = {t.name: t.name.split("/")[1] for t in tables}
    asked = [names[t.name] for t in tables if t.presence == "asked"]
    out: dict[str, Any] = {
        "properties": {names[t.name]: _table(t, d) for t in tables},
        "required": [names[t.name] for t in tables if t.presence in ("always", "coloured")],
    }
    if tables[0].name.startswith("vertices/"):
        out["dependentRequired"] = {name: [x for x in asked if x != name] for name in asked}
    if tables[0].name.startswith("coordinates/"):
        out["anyOf"] = [{"required": ["point"]}, {"required": ["corner"]}]
    return out


def _table(table: Table, d: int) -> dict[str, Any]:
    """The schema of one table in dimension `d`: nested arrays of its entries."""
    letters: dict[str | int, int] = {"D": d, "D-1": d - 1, "K": d + 1, "W": d * (d + 1) // 2, 2: 2}
    lengths = tuple(letters.get(x) for x in table.shape)
    if table.kind == "end":
        slot = {"prefixItems": [{"minimum": 0}, {"minimum": 0, "maximum": d}]}
        node = {"prefixItems": [{"const": -1}, {"minimum": 0}]}
        row = {**_nested({"type": "integer"}, lengths[1:]), "anyOf": [slot, node]}
        out = {"type": "array", "items": row}
    else:
        out = _nested(_entry(table.kind, d), lengths)
    return {"description": table.meaning, **out}


def _nested(entry: dict[str, Any], lengths: tuple[int | None, ...]) -> dict[str, Any]:
    """The schema of arrays in arrays, of these lengths (None: any)."""
    for length in reversed(lengths):
        entry = {"type": "array", "items": entry}
        if length is not None:
            entry |= {"minItems": length, "maxItems": length}
    return entry


def _entry(kind: str, d: int) -> dict[str, Any]:
    """The schema of an entry of this kind."""
    if kind == "coordinate":
        return {"type": "number"}
    if kind == "label":
        return {"type": "integer", "minimum": -(2**63), "maximum": 2**63 - 1}
    if kind == "sign":
        return {"enum": [1, -1]}
    if kind == "segment_sign":
        return {"enum": [1, -1, 0]}
    highest = {
        "bit": 1,
        "singular": 3,
        "corner": d,
        "slot": d,
        "place": d - 1,
        "wedge": d * (d + 1) // 2 - 1,
    }
    entry: dict[str, Any] = {"type": "integer", "minimum": -1 if kind == "corner" else 0}
    if kind in highest:
        entry["maximum"] = highest[kind]
    return entry
