"""Labels and neighbours as text, as lattice simulations store their configurations: a line for each simplex.

    # labels    neighbours opposite them
    1 2 3       1 2 3
    0 2 3       0 2 3
    0 1 3       0 1 3
    0 1 2       0 1 2

First the D + 1 labels of a simplex (integers, or words), then the D + 1 simplices opposite its corners,
numbered from 0 in the order of the lines, -1 for the boundary.  Two simplices may share several facets or
have the same labels: those of the shared facet say how it is glued; where they do not, the slot is named.
``#`` begins a comment.

Nothing in the text tells it from a list of numbers, so its name must be given: ``--from
labels-and-neighbours``.
"""

from __future__ import annotations

import numpy as np

from ..errors import InputError
from ..triangulation import Triangulation
from .registry import Content, Format, Options, dropping
from .source import Source
from .table import INTEGER, all_integers, integers, rows_of
from .target import Target
from .text import check_words, number_words, reads_as_number

__all__ = ["FORMAT"]

HOW = "text, labels and neighbours"


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
    k = len(row) // 2
    separator = "," if b"," in data[:4096].partition(b"\n")[0] else None
    rows = all_integers(data, len(row), False, separator)
    if rows is None and any(not INTEGER.fullmatch(x) for _, cells in rows_of(data) for x in cells[:k]):
        across = integers(data, len(row), header=False, words=k)
        corners, names = _words(data, k)
        return Triangulation.from_neighbours(corners, across, corner_names=names), f"{HOW}, labels are words"
    if rows is None:
        rows = integers(data, len(row), header=False)
    return Triangulation.from_neighbours(rows[:, :k], rows[:, k:]), HOW


def _words(data: bytes, k: int) -> tuple[np.ndarray, tuple[str, ...]]:
    """Labels that are words, as positions in their list; a word that reads as a number is refused."""
    tokens: list[str] = []
    for line, cells in rows_of(data):
        for token in cells[:k]:
            if reads_as_number(token) and not INTEGER.fullmatch(token):
                raise InputError(
                    "a label is a number but no integer within 64 bits",
                    f"line {line}: {token[:40]}",
                    "labels are integers, or words that do not read as numbers",
                )
        check_words(cells[:k], f"line {line}")
        tokens.extend(cells[:k])
    return number_words(tokens, k)


# -- writing ---------------------------------------------------------------------------------------


def write(content: Content, target: Target) -> None:
    """Write labels and neighbours, if they say it all."""
    if not isinstance(content, Triangulation) or content.corners is None:
        raise InputError(
            "there are no labels to write", hint="write a gluing table: .json, .h5, .npz or .csv"
        )
    if content.corner_names is not None and not _plain(content.corner_names):
        raise InputError(
            "a label holds a blank, a comma or #, or reads as a number, and would not come back from text",
            hint="write it as .json",
        )
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
    for lo in range(0, len(content), 1 << 15):
        labels = content.named(content.corners[lo : lo + (1 << 15)])
        across = content.across[lo : lo + (1 << 15)].tolist()
        lines = (" ".join(map(str, [*a, *b])) + "\n" for a, b in zip(labels, across, strict=True))
        target.stream.write("".join(lines).encode())


def _plain(words: tuple[str, ...]) -> bool:
    """Whether words come back from text as they are."""
    whole = [INTEGER.fullmatch(word) is not None for word in words]
    return not all(whole) and not any(
        word.split() != [word] or set(word) & set(',#"') or (reads_as_number(word) and not integer)
        for word, integer in zip(words, whole, strict=True)
    )


FORMAT = Format(
    name="labels-and-neighbours",
    suffixes=(),
    holds="labels and neighbours of the simplices as text",
    sniff=sniff,
    read=read,
    write=write,
    packed=True,
    sure=False,
    drops=dropping("the coordinates", "the orientation signs", "that labels name simplices"),
)
