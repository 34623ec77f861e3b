"""List admissible labellings in chunks, by layers of equal largest spin, from any position on."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from ..errors import InputError
from ..kernels import COMPILE_FROM, engine
from ..kernels.spins import fill_labellings
from .bounds import propagated
from .rules import Rules

MANY = 20_000  # labellings that the interpreted search lists in about a tenth of a second

__all__ = ["Chunk", "Position", "face_order", "list_labellings"]


@dataclass(frozen=True)
class Position:
    """Where a listing stands: after `last` in the part `part` of a layer.

    Attributes
    ----------
    layer : int
        Largest twice-spin of the internal faces.
    part : int
        Which face, in the order of the search, is the first that has it.
    last : tuple of int or None
        The last labelling that was listed, in the order of the search; None at the beginning of the part.
    """

    layer: int = 0
    part: int = 0
    last: tuple[int, ...] | None = None

    def to_dict(self) -> dict[str, Any]:
        """As plain values."""
        return {
            "layer": self.layer,
            "part": self.part,
            "last": None if self.last is None else list(self.last),
        }

    @classmethod
    def from_dict(cls, document: dict[str, Any]) -> Position:
        """From plain values.

        Raises
        ------
        InputError
        """
        try:
            last = document["last"]
            layer, part = document["layer"], document["part"]
            if not all(type(x) is int and x >= 0 for x in (layer, part, *(last or ()))):
                raise TypeError
            return cls(layer, part, None if last is None else tuple(last))
        except (KeyError, TypeError):
            raise InputError("this is no position of a listing", hint="it has layer, part and last") from None


@dataclass(frozen=True, eq=False)
class Chunk:
    """Labellings of the internal faces, and where the listing stands after them.

    Attributes
    ----------
    spins : ndarray of int32, shape (n, F_int)
        Twice-spins.
    position : Position
        Hand it to `list_labellings` to go on after these.
    """

    spins: np.ndarray
    position: Position

    @property
    def layers(self) -> np.ndarray:
        """The largest twice-spin of each labelling, ascending, (n,)."""
        result: np.ndarray = self.spins.max(axis=1, initial=0)
        return result


def face_order(rules: Rules) -> list[int]:
    """The internal faces in the order of the search: each closes as many edges as possible."""
    members: list[list[int]] = [[] for _ in range(len(rules.face))]
    at: list[list[int]] = [[] for _ in range(rules.internal)]
    for e, f in zip(rules.edge_of_member.tolist(), rules.member.tolist(), strict=True):
        members[e].append(f)
        at[f].append(e)
    left = [len(m) for m in members]
    done = [False] * rules.internal
    order: list[int] = []
    touched: set[int] = set()
    while len(order) < rules.internal:
        pool = touched or {next(f for f in range(rules.internal) if not done[f])}
        best = max(
            pool, key=lambda f: (sum(left[e] == 1 for e in at[f]), sum(4 - left[e] for e in at[f]), -f)
        )
        order.append(best)
        done[best] = True
        touched.discard(best)
        for e in at[best]:
            left[e] -= 1
            touched.update(f for f in members[e] if not done[f])
    return order


def list_labellings(
    rules: Rules,
    most: int,
    *,
    chunk: int = 100_000,
    start: Position | None = None,
    least: int = 0,
) -> Iterator[Chunk]:
    """All labellings whose internal twice-spins are at most `most`, each once, layer by layer.

    Parameters
    ----------
    rules : Rules
    most : int
        The largest twice-spin.
    chunk : int
        At most so many labellings at a time.
    start : Position, optional
        Go on after this position, as an earlier chunk told it.
    least : int
        Without `start`, the first layer.

    Yields
    ------
    Chunk
        Never empty; in ascending layers, within a layer in a fixed order.

    Raises
    ------
    InputError
        If the cutoff is negative, or the position is none of these rules.

    Notes
    -----
    Depth-first search with bounds from the edges whose other spins are known.  The layer of the largest spin
    m is listed in parts: the first face, in the order of the search, that has spin m.

    Examples
    --------
    >>> from dualize import build, make
    >>> from dualize.spins import rules_of
    >>> r = rules_of(build(make.move_side(4, 3)), 1)
    >>> [c.spins.tolist() for c in list_labellings(r, 10)]
    [[[1], [3]]]
    """
    if most < 0:
        raise InputError(f"the largest twice-spin is not negative, as {most} is")
    if chunk < 1:
        raise InputError(f"a chunk has at least 1 labelling, not {chunk}")
    n = rules.internal
    if not n:
        good = bool(rules.hold(np.zeros(0, dtype=np.int64)))
        if good and least == 0 and (start is None or start.last is None):
            yield Chunk(np.zeros((1, 0), dtype=np.int32), Position(0, 0, ()))
        return
    if not rules.hold_outside():
        return
    order = face_order(rules)
    back = np.argsort(order)
    place = start or Position(least)
    if place.last is not None:
        spins = np.array(place.last)[back] if len(place.last) == n else None
        first = [x for x, spin in enumerate(place.last) if spin == place.layer][:1]
        if spins is None or not rules.hold(spins) or first != [place.part] or max(place.last) != place.layer:
            raise InputError("the position belongs to another sum: it is no labelling of this one")
    for rows in _Search(rules, order, most).run(place, most, chunk):
        last = tuple(rows[-1].tolist())
        layer = max(last)
        yield Chunk(np.ascontiguousarray(rows[:, back]), Position(layer, last.index(layer), last))


class _Search:
    """The tables of the kernel for one order of the faces."""

    def __init__(self, rules: Rules, order: list[int], most: int) -> None:
        self.rules = rules
        least, greatest = propagated(rules, greatest=np.full(rules.internal, most))
        self.low, self.high = least[order], greatest[order]
        depth = np.empty(rules.internal, dtype=np.int64)
        depth[order] = np.arange(rules.internal)
        closing: list[list[int]] = [[] for _ in order]
        spans = list(zip(rules.offsets[:-1].tolist(), rules.offsets[1:].tolist(), strict=True))
        for e, (a, b) in enumerate(spans):
            if a < b:
                closing[int(depth[rules.member[a:b]].max())].append(e)
        close, start = [0], [0]
        others: list[int] = []
        times: list[int] = []
        edges: list[int] = []
        for d, edges_here in enumerate(closing):
            for e in edges_here:
                for x in range(*spans[e]):
                    if depth[rules.member[x]] == d:
                        times.append(int(rules.times[x]))
                    else:
                        others += [int(depth[rules.member[x]])] * int(rules.times[x])
                start.append(len(others))
                edges.append(e)
            close.append(len(edges))
        integers = [close, start, others, times, rules.total[edges], rules.largest[edges]]
        self.tables = [np.array(x, dtype=np.int64) for x in integers]

    def run(self, place: Position, most: int, chunk: int) -> Iterator[np.ndarray]:
        """The labellings after a position, in the order of the search."""
        n = self.rules.internal
        if (self.low > self.high).any():
            return
        value = np.zeros(n, dtype=np.int64)
        top = np.zeros(2 * n, dtype=np.int64)
        # as large as a foam for which compiling is worth while, where there may be much to list
        run = engine(COMPILE_FROM if (most + 1) ** min(n, 8) > MANY else 0, 1)
        first = -(-place.layer // self.rules.step) * self.rules.step
        state = np.array([-1, 0, first, -1], dtype=np.int64)
        tables = (*self.tables, self.low, self.high, self.rules.step, most)
        if place.last is not None:
            # entering a depth with no room for labellings works out its bounds and stops before the next
            for d, spin in enumerate(place.last):
                state[:] = d, 1, place.layer, place.part
                nowhere = np.zeros(1, dtype=np.int32)
                run(fill_labellings, *tables, value, top, state, nowhere, 0, d + 1)
                value[d] = spin
            state[:] = n - 1, 0, place.layer, place.part
        while state[2] <= most:
            out = np.empty(chunk * n, dtype=np.int32)
            count = run(fill_labellings, *tables, value, top, state, out, chunk, n)
            if count:
                yield out[: count * n].reshape(count, n)
