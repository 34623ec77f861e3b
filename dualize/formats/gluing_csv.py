"""Gluing tables as tidy CSV: a row for each slot.

    simplex,slot,across,image0,image1,image2,image3
    0,0,1,0,1,2,3
    0,1,-1,-1,-1,-1,-1

``across`` is the simplex behind the slot, ``image0 ... imageD`` are the corners there to which the corners
go.  One direction of a gluing is enough; where both are given they must agree.  Boundary slots have -1 (or
nothing) in ``across`` and the images, or no row at all.  Simplices are numbered from 0; there are as many
as the largest number says.  ``#`` begins a comment.

Written are all slots of all simplices in order, so that the columns are the tables `across` and `carry`.
CSV holds no labels, no coordinates and no orientation signs.
"""

from __future__ import annotations

import numpy as np

from ..errors import InputError
from ..kernels.permutations import permutations_of
from ..triangulation import Triangulation
from .registry import Content, Format, Options, dropping
from .source import Source
from .table import cells, header_of, integers, line_of
from .target import Target

__all__ = ["FORMAT"]

HEADERS = {k: ["simplex", "slot", "across", *(f"image{c}" for c in range(k))] for k in (3, 4, 5)}


def sniff(head: bytes) -> bool:
    """The header."""
    return header_of(head)[:3] == HEADERS[3][:3]


def read(source: Source, options: Options) -> tuple[Content, str]:
    """Read a gluing table."""
    data = source.take()
    header = header_of(data)
    if header not in HEADERS.values():
        raise InputError(
            "the first line is no header of a gluing table",
            f"line {line_of(data, -1)}: {','.join(header)[:80]}",
            "it reads simplex,slot,across,image0,image1,image2,image3 (image0 to image4 in dimension 4)",
        )
    rows = integers(data, len(header), blank_from=2)
    try:
        return _triangulation(data, rows), "CSV, gluing table"
    except _Wrong as wrong:
        places = "; ".join(f"line {line_of(data, row)}: {cells(data, row)}" for row in wrong.rows)
        raise InputError(wrong.what, places, wrong.hint) from None


class _Wrong(Exception):
    """Rows that are wrong, before their lines are known."""

    def __init__(self, rows: list[int], what: str, hint: str) -> None:
        self.rows, self.what, self.hint = rows, what, hint


def _triangulation(data: bytes, rows: np.ndarray) -> Triangulation:
    k = rows.shape[1] - 3
    if not len(rows):
        raise InputError("there is no row below the header", hint="write a row for each slot of each simplex")
    simplex, slot, across, images = rows[:, 0], rows[:, 1], rows[:, 2], rows[:, 3:]

    def refuse(bad: np.ndarray, what: str, hint: str) -> None:
        if bad.any():
            raise _Wrong([int(np.argmax(bad))], what, hint)

    refuse(simplex < 0, "there is no such simplex", "simplices are numbered from 0")
    refuse((slot < 0) | (slot >= k), "there is no such slot", f"slots are numbered 0 to {k - 1}")
    refuse(across < -1, "there is no such simplex across", "-1 stands for the boundary")
    inner = across >= 0
    refuse(
        ~inner & (images != -1).any(axis=1),
        "a boundary slot has images",
        "write -1 or nothing there, or name the simplex across",
    )
    refuse(
        inner & (np.sort(images, axis=1) != np.arange(k)).any(axis=1),
        "the images of the corners are no permutation",
        f"each of 0 to {k - 1} must occur once",
    )
    n = int(max(simplex.max(), across.max())) + 1
    named = np.unique(np.concatenate([simplex, across[inner]]))
    if len(named) < n:
        absent = int(np.argmax(named != np.arange(len(named))))
        refuse(
            np.maximum(simplex, across) > absent,
            f"simplices are numbered from 0 without gaps, and {absent} is missing",
            "number them anew; a simplex without gluings has a row of -1",
        )
    there = np.take_along_axis(images, slot[:, None], axis=1)[:, 0]
    refuse(
        inner & (across == simplex) & (there == slot),
        "a facet is glued to itself: there the two-complex folds",
        "glue it to another facet, or leave it in the boundary (across -1)",
    )
    # every gluing from both sides; whatever is said of one slot must be the same
    back = np.argsort(images[inner], axis=1)
    said = np.concatenate([simplex * k + slot, (across * k + there)[inner]])
    beyond = np.concatenate([across, simplex[inner]])
    carried = np.concatenate([images, back])
    order = np.argsort(said, kind="stable")
    same = said[order][1:] == said[order][:-1]
    differ = beyond[order][1:] != beyond[order][:-1]
    differ |= (carried[order][1:] != carried[order][:-1]).any(axis=1)
    if (same & differ).any():
        at = int(np.argmax(same & differ))
        origin = np.concatenate([np.arange(len(rows)), np.flatnonzero(inner)])
        both = sorted({int(origin[order[at]]), int(origin[order[at + 1]])})
        s, i = divmod(int(said[order[at]]), k)
        raise _Wrong(
            both,
            f"two rows say different things of slot {i} of simplex {s}",
            "the slot across must lead back, by the inverse permutation",
        )
    table = np.full((n, k), -1, dtype=np.int64)
    carry = np.full((n, k, k), -1, dtype=np.int64)
    table.reshape(-1)[said] = beyond
    carry.reshape(-1, k)[said] = carried
    return Triangulation.from_gluings(table, carry)


# -- writing ---------------------------------------------------------------------------------------


def write(content: Content, target: Target) -> None:
    """Write a gluing table, all slots of all simplices."""
    if not isinstance(content, Triangulation):
        raise InputError("a skeleton is no gluing table", hint="write .json, .h5 or .npz")
    t = content
    k = t.dimension + 1
    images = permutations_of(t.dimension).image
    target.stream.write((",".join(HEADERS[k]) + "\n").encode())
    for lo in range(0, len(t), 1 << 15):
        hi = min(len(t), lo + (1 << 15))
        across = t.across[lo:hi].reshape(-1, 1).astype(np.int64)
        simplex = np.repeat(np.arange(lo, hi), k)[:, None]
        slot = np.tile(np.arange(k), hi - lo)[:, None]
        carry = np.where(across >= 0, images[t.rank[lo:hi].ravel()], -1)
        block = np.concatenate([simplex, slot, across, carry], axis=1)
        target.stream.write("".join(",".join(map(str, row)) + "\n" for row in block.tolist()).encode())


def suits(content: Content) -> bool:
    """A triangulation that neither labels nor colours determine."""
    return isinstance(content, Triangulation) and not content.matched and not content.coloured


FORMAT = Format(
    name="gluing-csv",
    suffixes=(".csv",),
    holds="a gluing table, a row for each slot",
    sniff=sniff,
    read=read,
    write=write,
    packed=True,
    suits=suits,
    drops=dropping("the labels", "the coordinates", "the orientation signs", "that it is a coloured graph"),
)
