"""The files beside a change: records of moves, origins, maps of labels and boundaries."""

from __future__ import annotations

import os
from typing import Any

import orjson

from ..errors import InputError

__all__ = ["boundary_maps", "label_map", "moves_record", "save_json"]


def save_json(path: str, document: dict, force: bool) -> None:
    """Write a document, whole or not at all."""
    if os.path.exists(path) and not force:
        raise InputError("the file exists already", path, "--force overwrites it")
    temporary = f"{path}.{os.getpid()}.part"
    try:
        with open(temporary, "xb") as stream:
            stream.write(orjson.dumps(document, option=orjson.OPT_SERIALIZE_NUMPY) + b"\n")
        os.replace(temporary, path)
    finally:
        if os.path.exists(temporary):
            os.remove(temporary)


def _text(path: str, what: str) -> str:
    try:
        with open(path, encoding="utf-8") as stream:
            return stream.read()
    except OSError as error:
        raise InputError(f"the {what} cannot be read: {error.strerror}", path) from None
    except UnicodeDecodeError:
        raise InputError(f"the {what} cannot be read: it is no text in UTF-8", path) from None


def _json(text: str, path: str) -> Any:
    try:
        return orjson.loads(text)
    except orjson.JSONDecodeError as error:
        raise InputError(f"this is no JSON: {error}", path) from None


def moves_record(path: str) -> Any:
    """The moves that ``--record`` has written."""
    from ..change import Moves

    document = _json(_text(path, "record"), path)
    try:
        return Moves.from_dict(document)
    except InputError as error:
        raise error.at(path) from None


def label_map(path: str) -> dict[str, str]:
    """A map of labels: lines of two labels, or a JSON object."""
    text = _text(path, "map")
    if text.lstrip().startswith("{"):
        return {str(key): str(value) for key, value in _json(text, path).items()}
    out: dict[str, str] = {}
    for n, line in enumerate(text.splitlines(), 1):
        words = line.split("#")[0].split()
        if not words:
            continue
        if len(words) != 2:
            raise InputError("a line of the map has not two labels", f"{path}, line {n}: {line.strip()}")
        if words[0] in out:
            raise InputError(f"the label {words[0]} is mapped twice", f"{path}, line {n}")
        out[words[0]] = words[1]
    return out


def boundary_maps(path: str) -> list[dict] | None:
    """The maps that ``dualize match --json`` has written, or None where the file is something else."""
    text = _text(path, "map")
    document = _json(text, path) if text.lstrip().startswith("{") else None
    if not isinstance(document, dict) or not isinstance(document.get("maps"), list):
        return None
    if not all(isinstance(m, dict) and {"nodes", "places"} <= set(m) for m in document["maps"]):
        raise InputError(
            "a map has no nodes or no places", path, "dualize match INPUT OTHER --json writes maps"
        )
    if not document["maps"]:
        raise InputError("the file holds no map: the boundaries do not match", path)
    return document["maps"]
