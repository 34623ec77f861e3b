"""What HDF5 and NPZ have in common: which arrays are read, and JSON text in strings."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from ..errors import InputError

__all__ = ["choose", "further", "unpack_strings"]


def choose(
    names: list[str], dataset: str | None, shape: Callable[[str], tuple[tuple[int, ...], str]]
) -> dict[str, str]:
    """The arrays to read, each with its name in the document.

    Parameters
    ----------
    names : list of str
        All arrays of the file.
    dataset : str or None
        The one that holds the facets, where the user said so.
    shape : callable
        Shape and dtype kind of an array.

    Raises
    ------
    InputError
        If it is not clear which array holds the facets.
    """
    if dataset is not None:
        wanted = dataset.strip("/")
        if wanted not in names:
            raise InputError(
                f"there is no array {dataset}", hint="the file holds " + (_list(names) or "no array")
            )
        return {wanted: "facets"}
    if "format" in names or "vertices/orientation" in names or "across" in names or "facets" in names:
        return {name: name for name in names}
    tables = []
    for name in names:
        sides, kind = shape(name)
        if len(sides) == 2 and sides[1] in (3, 4, 5) and kind in "iuU":
            tables.append(name)
    if len(tables) == 1:
        return {tables[0]: "facets"}
    if tables:
        raise InputError(
            f"{len(tables)} arrays could hold the facets: {_list(tables)}",
            hint="name the one that does: --dataset NAME, dataset=...",
        )
    raise InputError(
        "no array could hold facets" + (f", among {_list(names)}" if names else ": the file holds none"),
        hint="the labels of the facets are an array of integers or words with 3, 4 or 5 columns",
    )


def _list(names: list[str]) -> str:
    return ", ".join(names[:12]) + (f" and {len(names) - 12} more" if len(names) > 12 else "")


def further(name: str, value: Any) -> str:
    """A JSON value as text."""
    import orjson

    try:
        return orjson.dumps(value, option=orjson.OPT_SERIALIZE_NUMPY).decode()
    except (orjson.JSONEncodeError, TypeError) as error:
        raise InputError(f"it cannot be written as JSON text: {error}", name) from None


def unpack_strings(document: dict[str, Any]) -> dict[str, Any]:
    """The document with JSON text read, arrays of strings as lists, and single integers as such."""
    import orjson

    out: dict[str, Any] = {}
    for name, array in document.items():
        value: Any = array
        if array.dtype.kind in "US":
            try:
                words = array.tolist() if array.dtype.kind == "U" else np.char.decode(array, "utf-8").tolist()
                value = words
                if array.ndim == 0 and name != "format":
                    value = orjson.loads(words)
            except (UnicodeDecodeError, UnicodeEncodeError, orjson.JSONDecodeError) as error:
                raise InputError(f"this string is no JSON text: {error}", name) from None
        elif name in ("version", "dimension") and array.ndim == 0 and array.dtype.kind in "iu":
            value = int(array)
        out[name] = value
    return out
