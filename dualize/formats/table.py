"""Tables of integers as text: read at once where nothing is wrong, else line by line, to say what is."""

from __future__ import annotations

import re
from collections.abc import Iterator
from io import BytesIO

import numpy as np

from ..errors import InputError

__all__ = ["INTEGER", "all_integers", "cells", "header_of", "integers", "line_of", "rows_of"]

BOM = b"\xef\xbb\xbf"
SMALL = 1 << 14  # bytes up to which lines are read one by one
INTEGER = re.compile(r"[+-]?[0-9]{1,18}", re.ASCII)


def rows_of(data: bytes) -> Iterator[tuple[int, list[str]]]:
    """Line number and cells of every line that has some; cells are separated by commas, or else by blanks.

    Raises
    ------
    InputError
        If it is no UTF-8 text.
    """
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = len(re.findall(rb"\r\n|\r|\n", data[: error.start])) + 1
        raise InputError("this is no UTF-8 text", f"line {line}", "save it as UTF-8") from None
    for line, content in enumerate(re.split(r"\r\n|\r|\n", text), 1):
        content = content.partition("#")[0].strip()
        if content:
            yield (
                line,
                [x.strip().strip('"') for x in content.split(",")] if "," in content else content.split(),
            )


def header_of(head: bytes) -> list[str]:
    """Cells of the first line that has some, in small letters; empty if there is none."""
    for line in re.split(rb"[\r\n]+", head.removeprefix(BOM)):
        content = line.partition(b"#")[0].strip().lower().decode("latin-1")
        if content:
            return [x.strip().strip('"') for x in content.split(",")]
    return []


def line_of(data: bytes, row: int) -> int:
    """Line number of a row below the header; -1 is the header itself."""
    return next(line for number, (line, _) in enumerate(rows_of(data), -1) if number == row)


def cells(data: bytes, row: int) -> str:
    """The cells of a row below the header, as an error shows them."""
    return _show(next(found for number, (_, found) in enumerate(rows_of(data), -1) if number == row))


def _show(row: list[str]) -> str:
    text = ",".join(row)
    text = text if text.isprintable() else repr(text)[1:-1]
    return text if len(text) <= 80 else text[:77] + "..."


def all_integers(
    data: bytes, width: int, header: bool = True, separator: str | None = ","
) -> np.ndarray | None:
    """The integers of a large file without fault, else None; see `integers`."""
    fractions = b"." in data or re.search(rb"[0-9][eE]", data)  # numpy would cut them off
    if fractions or len(data) < SMALL:
        return None
    try:
        table = np.loadtxt(
            BytesIO(data.removeprefix(BOM)),
            dtype=np.int64,
            delimiter=separator,
            comments="#",
            ndmin=2,
            skiprows=line_of(data[: 1 << 16], -1) if header else 0,
            encoding="utf-8",
        )
    except (ValueError, StopIteration, OverflowError, UnicodeError, InputError):
        return None
    return table if table.shape[1] == width and len(table) else None


def integers(
    data: bytes,
    width: int,
    *,
    header: bool = True,
    blank_from: int | None = None,
    separator: str | None = ",",
    words: int = 0,
) -> np.ndarray:
    """The integers below the header: int64, shape (rows, width).

    Parameters
    ----------
    data : bytes
    width : int
    header : bool
        Whether the first line holds no numbers.
    blank_from : int, optional
        From this column on an empty cell stands for -1.
    separator : str or None
        ``","``, or None for blanks.
    words : int
        So many columns at the left hold words, and are left out.

    Raises
    ------
    InputError
        Naming the first line that does not fit.
    """
    if not words and (table := all_integers(data, width, header, separator)) is not None:
        return table
    out: list[list[int]] = []
    for number, (line, row) in enumerate(rows_of(data), -1 if header else 0):
        if number < 0:
            continue
        if len(row) != width:
            count = f"{len(row)} cell{'s' if len(row) != 1 else ''}"
            raise InputError(f"there are {count} in this line, not {width}", f"line {line}: {_show(row)}")
        values = []
        for column, token in enumerate(row[words:], words):
            if not token and blank_from is not None and column >= blank_from:
                token = "-1"
            if not INTEGER.fullmatch(token):
                what = f"{token[:40]!r} is no integer" if token else "a cell is empty"
                raise InputError(what, f"line {line}: {_show(row)}", f"column {column + 1} holds integers")
            values.append(int(token))
        out.append(values)
    return np.array(out, dtype=np.int64).reshape(-1, width - words)
