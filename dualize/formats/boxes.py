"""Large JSON text: boxes of integers straight into arrays, the rest by the JSON library.

A list that stands as the value of an object, or is the whole text, and holds integers only, is read by a
kernel and replaced by a mark before the library sees the text: no Python object for every number, a tenth of
the time and of the room.  Lists of anything else stay as they are.  A string may hold what looks like such a
list; the mark then breaks the string, and the text is read again in the plain way.
"""

from __future__ import annotations

import re
from typing import Any

import numpy as np

from ..kernels import engine
from .scan import parse_box

__all__ = ["LARGE", "loads"]

LARGE = 1 << 21  # bytes from which it pays
SHORTEST = 64  # entries that are worth a mark
OPENING = re.compile(rb"(?::|\A)\s*(\[)")
MARK = "\0"
ESCAPED = rb"\u0000"


def loads(data: bytes) -> Any:
    """What JSON text holds, boxes of integers as arrays of int64 where that is quicker.

    Raises
    ------
    orjson.JSONDecodeError
    """
    import orjson

    if len(data) < LARGE or ESCAPED in data:
        return orjson.loads(data)
    rest, boxes = _take_boxes(data)
    if boxes:
        try:
            return _put_back(orjson.loads(rest), boxes)
        except orjson.JSONDecodeError:
            pass  # faulty text, or a box inside a string: the plain way knows, and names the right place
    return orjson.loads(data)


def _take_boxes(data: bytes) -> tuple[bytes, list[np.ndarray]]:
    """The text with its boxes replaced by marks, and the boxes."""
    run = engine(len(data))
    text = np.frombuffer(data, dtype=np.uint8)
    out = np.empty(
        data.count(b",") + data.count(b"]"), dtype=np.int64
    )  # every entry is followed by one of them
    side = np.zeros(3, dtype=np.int64)
    pieces: list[bytes] = []
    boxes: list[np.ndarray] = []
    used = done = at = 0
    while (opening := OPENING.search(data, at)) is not None:
        begin = opening.start(1)
        at = begin + 1
        if data.find(b'"', begin, begin + 2 * SHORTEST) >= 0:
            continue  # too short a list
        end = run.here(parse_box, text, out, side, used, begin, len(data))
        if end < 0:
            continue
        shape = [n for n in side.tolist() if n]
        size = int(np.prod(shape))
        at = end
        if size >= SHORTEST:
            pieces += [data[done:begin], b'{"%s":%d}' % (ESCAPED, len(boxes))]
            boxes.append(out[used : used + size].reshape(shape))
            used += size
            done = end
    return b"".join([*pieces, data[done:]]), boxes


def _put_back(value: Any, boxes: list[np.ndarray]) -> Any:
    if isinstance(value, dict):
        if value.keys() == {MARK}:
            return boxes[value[MARK]]
        return {key: _put_back(inner, boxes) for key, inner in value.items()}
    return value
