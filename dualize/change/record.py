"""A record of bistellar moves: what was replaced by what, enough to replay and to undo it exactly."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from ..errors import InputError
from ..triangulation import Coordinates

__all__ = ["Moves"]

FORMAT = "bistellar-moves"


@dataclass(frozen=True, eq=False, repr=False)
class Moves:
    """Bistellar moves in order, as `walk`, `move` and `simplify` return them.

    A move puts (boundary of A) * B in the place of A * (boundary of B).  Simplices bear the numbers they had
    in the input, and every new one the next number.

    Attributes
    ----------
    dimension : int
    written : ndarray of int8, shape (N,)
        The signs of the input's N simplices.
    kind : ndarray of int8, shape (M,)
        How many simplices a move replaced, 1 to D + 1; it put D + 2 - kind in their place.
    labels : ndarray of int64, shape (M, D + 2), or None
        Labels of A, then of B (positions in `words` where labels are words); None for gluing tables.
    words : tuple of str, or None
    simplex : ndarray of int64, shape (M,)
        A simplex that had A as a face.
    corners : ndarray of int8, shape (M,)
        The corners of A in it, as bits.
    removed : ndarray of int64, shape (M, D + 1)
        Numbers of the simplices that were replaced, in the order of the points of B that they lack (by name
        where there are no labels), -1 behind the last.
    layout : ndarray of uint8, shape (M, D + 1)
        The order of their corners (a lexicographic rank); undoing needs it where there are no labels.
    coordinates : Coordinates, or None
    names : tuple of str, or None
        Coordinates and words of the input.
    """

    dimension: int
    written: np.ndarray
    kind: np.ndarray
    labels: np.ndarray | None
    words: tuple[str, ...] | None
    simplex: np.ndarray
    corners: np.ndarray
    removed: np.ndarray
    layout: np.ndarray
    coordinates: Coordinates | None = None
    names: tuple[str, ...] | None = None

    def __len__(self) -> int:
        return len(self.kind)

    def __iter__(self) -> Iterator[tuple[list, list]]:
        """(A, B) of each move as lists of labels; (simplex, corners of A) where there are no labels."""
        for m, kind in enumerate(self.kind.tolist()):
            if self.labels is None:
                mask = int(self.corners[m])
                yield [int(self.simplex[m])], [c for c in range(self.dimension + 1) if mask >> c & 1]
            else:
                row = self.labels[m].tolist()
                if self.words is not None:
                    row = [self.words[x] for x in row]
                cut = self.dimension + 2 - kind
                yield row[:cut], row[cut:]

    def __repr__(self) -> str:
        counts = ", ".join(f"{n} x {name}" for name, n in self.counts().items())
        return f"<Moves {self.dimension}D: {len(self)} moves ({counts or 'none'})>"

    def counts(self) -> dict[str, int]:
        """How often each kind of move occurs, as ``{"2-4": 7, ...}``."""
        kinds, numbers = np.unique(self.kind, return_counts=True)
        pairs = zip(kinds.tolist(), numbers.tolist(), strict=True)
        return {f"{kind}-{self.dimension + 2 - kind}": number for kind, number in pairs}

    def first_born(self) -> np.ndarray:
        """Number of the first new simplex of each move, and behind them the number after the last."""
        came = self.dimension + 2 - self.kind.astype(np.int64)
        return len(self.written) + np.concatenate([[0], np.cumsum(came)])

    def alive(self) -> np.ndarray:
        """Numbers of the simplices after all moves, ascending: those of the rows of the result."""
        there = np.ones(int(self.first_born()[-1]), dtype=bool)
        there[self.removed[self.removed >= 0]] = False
        return np.flatnonzero(there)

    def upto(self, count: int) -> Moves:
        """The first `count` moves."""
        parts = (self.kind, self.labels, self.simplex, self.corners, self.removed, self.layout)
        kind, labels, simplex, corners, removed, layout = (None if x is None else x[:count] for x in parts)
        assert kind is not None and simplex is not None and corners is not None
        assert removed is not None and layout is not None
        return Moves(
            self.dimension,
            self.written,
            kind,
            labels,
            self.words,
            simplex,
            corners,
            removed,
            layout,
            self.coordinates,
            self.names,
        )

    # -- as a document -----------------------------------------------------------------------------

    def to_dict(self) -> dict[str, Any]:
        """As a JSON document; `from_dict` reads it."""
        out: dict[str, Any] = {"format": FORMAT, "version": 1, "dimension": self.dimension}
        for name in ("written", "kind", "labels", "simplex", "corners", "removed", "layout"):
            array = getattr(self, name)
            out[name] = None if array is None else array.tolist()
        out["words"] = None if self.words is None else list(self.words)
        out["names"] = None if self.names is None else list(self.names)
        if self.coordinates is not None:
            parts = self.coordinates._asdict().items()
            out["coordinates"] = {key: value.tolist() for key, value in parts if value is not None}
        return out

    @classmethod
    def from_dict(cls, document: Any) -> Moves:
        """The record in a JSON document.

        Raises
        ------
        InputError
            If it is no such document, or its tables have wrong shapes or ranges.
        """
        if not isinstance(document, dict) or document.get("format") != FORMAT:
            raise InputError(
                "this is no record of moves", hint="`dualize change ... --record FILE` writes one"
            )
        if document.get("version") != 1:
            raise InputError(f"the record has version {document.get('version')!r}, and this program reads 1")
        d = document.get("dimension")
        if d not in (2, 3, 4):
            raise InputError(f"the record has dimension {d!r}, not 2, 3 or 4")
        kind = _table(document, "kind", np.int8, None, (1, d + 1))
        m = len(kind)
        words = _words(document, "words")
        highest = 2**63 - 1 if words is None else len(words) - 1
        lowest = -(2**63) if words is None else 0
        labels = None
        if document.get("labels") is not None:
            labels = _table(document, "labels", np.int64, (m, d + 2), (lowest, highest))
        coordinates = document.get("coordinates")
        if coordinates is not None:
            try:
                arrays = {key: np.array(value, dtype=np.float64) for key, value in coordinates.items()}
                coordinates = Coordinates(**arrays)
            except (AttributeError, TypeError, ValueError):
                raise InputError("the record's coordinates are no tables of numbers") from None
        return cls(
            d,
            _table(document, "written", np.int8, None, (-1, 1)),
            kind,
            labels,
            words,
            _table(document, "simplex", np.int64, (m,), (0, 2**31)),
            _table(document, "corners", np.int8, (m,), (1, 2 ** (d + 1) - 1)),
            _table(document, "removed", np.int64, (m, d + 1), (-1, 2**31)),
            _table(document, "layout", np.uint8, (m, d + 1), (0, 119)),
            coordinates,
            _words(document, "names"),
        )


def _table(
    document: dict, name: str, dtype: type, shape: tuple[int, ...] | None, span: tuple[int, int]
) -> np.ndarray:
    try:
        array = np.array(document.get(name))
    except (ValueError, OverflowError):
        array = np.array(None)
    if array.size == 0 and isinstance(document.get(name), list):
        array = np.empty(shape or (0,), dtype=np.int64)
    if array.dtype.kind not in "iu" or (array.ndim != 1 if shape is None else array.shape != shape):
        wanted = "a list" if shape is None else f"a table of shape {shape}"
        raise InputError(f"{name} in the record is not {wanted} of integers")
    if array.size and (int(array.min()) < span[0] or int(array.max()) > span[1]):
        raise InputError(f"{name} in the record has an entry outside {span[0]} to {span[1]}")
    return array.astype(dtype)


def _words(document: dict, name: str) -> tuple[str, ...] | None:
    words = document.get(name)
    if words is None:
        return None
    if not isinstance(words, list) or not all(isinstance(w, str) for w in words):
        raise InputError(f"{name} in the record is no list of words")
    return tuple(words)
