"""Labels and neighbours as text, as lattice simulations store their configurations: a line for each simplex.

    # labels    neighbours opposite them
    1 2 3       1 2 3
    0 2 3       0 2 3
    0 1 3       0 1 3
    0 1 2       0 1 2

First the D + 1 labels of a simplex (integers), then the D + 1 simplices opposite its corners, numbered from
0 in the order of the lines, -1 for the boundary.  Two simplices may share several facets or have the same
labels: the labels of the shared facet say how it is glued; where they do not, the slot is named.  ``#``
begins a comment.

Nothing in the text tells it from a list of numbers, so its name must be given: ``--from
labels-and-neighbours``.
"""

from __future__ import annotations

import numpy as np

from ..errors import InputError
from ..triangulation import Triangulation
from .registry import Content, Format, Options
from .source import Source
from .table import integers, rows_of
from .target import Target

__all__ = ["FORMAT"]


def sniff(head: bytes) -> bool:
    """Never: it is read where it is asked for."""
    return False


def read(source: Source, options: Options) -> tuple[Content, str]:
    """Read labels and neighbours."""
    data = source.take()
    first = next(rows_of(data), None)
    if first is None:
        raise InputError(
            "there is no simplex in the file", hint="write the labels and neighbours of one in each line"
        )
    line, row = first
    if len(row) not in (6, 8, 10):
        raise InputError(
            f"there are {len(row)} numbers in this line, not 6, 8 or 10",
            f"line {line}: {' '.join(row)[:80]}",
            "a line holds the D + 1 labels of a simplex and its D + 1 neighbours",
        )
    separator = "," if b"," in data[:4096].partition(b"\n")[0] else None
    rows = integers(data, len(row), header=False, separator=separator)
    k = len(row) // 2
    return Triangulation.from_neighbours(rows[:, :k], rows[:, k:]), "text, labels and neighbours"


# -- writing ---------------------------------------------------------------------------------------


def write(content: Content, target: Target) -> None:
    """Write labels and neighbours, if they say it all."""
    if not isinstance(content, Triangulation) or content.corners is None:
        raise InputError(
            "there are no labels to write", hint="write a gluing table: .json, .h5, .npz or .csv"
        )
    if content.corner_names is not None:
        raise InputError("the labels are words, and this text holds integers", hint="write .json")
    try:
        again = Triangulation.from_neighbours(content.corners, content.across)
        told = bool(np.array_equal(again.rank, content.rank))
    except InputError:
        told = False
    if not told:
        raise InputError(
            "labels and neighbours do not determine these gluings",
            hint="write a gluing table: .json, .h5, .npz or .csv",
        )
    rows = np.concatenate([content.corners, content.across.astype(np.int64)], axis=1)
    for lo in range(0, len(rows), 1 << 15):
        block = rows[lo : lo + (1 << 15)].tolist()
        target.stream.write("".join(" ".join(map(str, row)) + "\n" for row in block).encode())


def drops(content: Content) -> list[str]:
    """What is not written."""
    if not isinstance(content, Triangulation):
        return []
    lost = {
        "the coordinates": content.coordinates is not None,
        "the orientation signs": bool((content.written < 0).any()),
        "that labels name simplices": content.matched,
    }
    return [what for what, there in lost.items() if there]


FORMAT = Format(
    name="labels-and-neighbours",
    suffixes=(),
    holds="labels and neighbours of the simplices as text",
    sniff=sniff,
    read=read,
    write=write,
    packed=True,
    sure=False,
    drops=drops,
)
