"""A triangulation in motion: the flat arrays on which bistellar moves are made, and the way back."""

from __future__ import annotations

from functools import cache
from itertools import combinations
from typing import NamedTuple

import numpy as np

from ..errors import LimitError
from ..kernels import engine
from ..kernels import moves as kernel
from ..kernels.permutations import permutations_of
from ..topology.classes import classes, corner_subsets
from ..triangulation import Triangulation
from .common import fresh_words, need_labels, with_fields
from .record import Moves
from .tables import by_labels, orientations, oriented_as

__all__ = ["State"]

CHUNK = 1 << 16  # moves between two looks at the room that is left
PARTS = ("birth", "mask", "kind", "row", "removed", "layout")


class Given(NamedTuple):
    """Places of a record: what `walk_moves` reads in the mode GIVEN."""

    birth: np.ndarray
    mask: np.ndarray
    kind: np.ndarray
    row: np.ndarray
    new: np.ndarray
    layout: np.ndarray
    replay: bool  # births and layouts are given too


class State:
    """The arrays of `dualize.kernels.moves` for one triangulation.

    Parameters
    ----------
    t : Triangulation
        Of any dimension; a labelled complex must not have two simplices with the same labels.
    work : int
        About how many places will be looked at: much work is worth compiled kernels.
    seed : int
    past : Moves, optional
        The moves that made `t` of an earlier input, if they are to be undone.
    labels : sequence, optional
        Further labels (words where `t` has words) that the moves to come will bring.
    look : bool
        Whether to keep the table of simplices, which a labelled complex needs to see whether one is there.
    """

    def __init__(
        self,
        t: Triangulation,
        *,
        work: int = 0,
        seed: int = 0,
        past: Moves | None = None,
        labels: tuple = (),
        look: bool = True,
    ) -> None:
        n, k = t.across.shape
        self.t = t
        self.k = k
        self.run = engine(max(n, work))
        self.labelled = t.corners is not None and t.matched
        self.start = t.written if past is None else past.written
        births = np.arange(n) if past is None else past.alive()
        self.next_birth = n if past is None else int(past.first_born()[-1])
        self.orientation0, _ = orientations(t)
        room = n + 64
        self.across = _padded(t.across.astype(np.int32).ravel(), room * k)
        self.rank = _padded(t.rank.ravel(), room * k)
        self.birth = _padded(births.astype(np.int32), room)
        self.orientation = _padded(self.orientation0, room)
        self.slot_of = np.full(self.next_birth + 64, -1, dtype=np.int32)
        self.slot_of[births] = np.arange(n)
        self.names: list = []
        self.corner = np.empty(0, dtype=np.int32)
        if self.labelled:
            need_labels(t, "a move")
            ids = self._number_labels(labels)
            self.corner = _padded(ids.astype(np.int32).ravel(), room * k)
        self.state = np.zeros(kernel.STATE, dtype=np.int64)
        self.state[kernel.COUNT] = n
        self.state[kernel.NEXT_BIRTH] = self.next_birth
        self.state[kernel.NEXT_POINT] = len(self.names)
        self.state[kernel.LABELLED] = self.labelled
        self.state[kernel.LOOK] = self.labelled and look
        self.state[kernel.SEED] = _seed(seed)
        self.key_hi = self.key_lo = np.zeros(1, dtype=np.int64)
        self.mark = np.zeros(1, dtype=np.int8)
        self.pins = self._pinched() if self.state[kernel.LOOK] else None
        if self.state[kernel.LOOK]:
            self._fill()
        self.work = np.zeros(512, dtype=np.int64)
        self.log: dict[str, list[np.ndarray]] = {name: [] for name in PARTS}

    # -- moving ------------------------------------------------------------------------------------

    def __len__(self) -> int:
        return int(self.state[kernel.COUNT])

    @property
    def reason(self) -> int:
        """Why the last place was refused: a constant of `dualize.kernels.moves`, 0 if it was not."""
        return int(self.state[kernel.REASON])

    def random(self, kinds: list[int], want: int, tries: int, target: int, spread: int) -> int:
        """Make `want` moves of kinds drawn from the list, at random places; the number that were made."""
        self.state[kernel.TARGET] = target
        self.state[kernel.SPREAD] = spread
        return self._moves(kernel.RANDOM, kinds, want, tries)

    def sweep(self, kind: int, want: int) -> int:
        """Make moves of one kind at every place where one can be made, but at most `want`."""
        seed = int(self.state[kernel.SEED])
        self.state[kernel.TARGET] = seed % max(1, len(self))
        self.state[kernel.SINCE] = 0
        return self._moves(kernel.SWEEP, [kind], want, 2**62)

    def given(self, places: Given) -> int:
        """Make the moves of a record; stops at the first that cannot be made."""
        self.state[kernel.REPLAY] = places.replay
        made = self._moves(kernel.GIVEN, [1], len(places.kind), 2**62, places)
        self.state[kernel.REPLAY] = 0
        return made

    def _moves(self, mode: int, kinds: list[int], want: int, tries: int, places: Given | None = None) -> int:
        state, k = self.state, self.k
        tables = permutations_of(k - 1)
        subset, starts = _subsets(k - 1)
        state[kernel.MODE] = mode
        state[kernel.TRIED] = 0
        state[kernel.TRIES] = tries
        made = 0
        while made < want:
            # a sweep seldom makes many moves
            chunk = min(want - made, CHUNK if mode != kernel.SWEEP else len(self) // 4 + 16)
            part = _none(k) if places is None else _slice(places, made, made + chunk, k)
            out: dict[str, np.ndarray] = {
                "birth": np.empty(chunk, np.int32),
                "mask": np.empty(chunk, np.int8),
                "kind": np.empty(chunk, np.int8),
                "row": np.empty(chunk * (k + 1) if self.labelled else 0, np.int32),
                "removed": np.full(chunk * k, -1, np.int32),
                "layout": np.zeros(chunk * k, np.uint8),
            }
            state[kernel.DONE] = 0
            state[kernel.WANT] = chunk
            while True:
                end = self.run(
                    kernel.walk_moves,
                    self.corner,
                    self.across,
                    self.rank,
                    self.birth,
                    self.orientation,
                    self.slot_of,
                    self.key_hi,
                    self.key_lo,
                    self.mark,
                    tables.image.ravel(),
                    tables.ranks,
                    tables.inverse,
                    tables.sign,
                    _bits(),
                    subset,
                    starts,
                    np.array(kinds, dtype=np.int64),
                    *part,
                    *out.values(),
                    self.work,
                    state,
                    tuple(range(k)),
                )
                if end != kernel.FULL:
                    break
                self._grow()
            done = int(state[kernel.DONE])
            for name, array in out.items():
                self.log[name].append(array[: done * (len(array) // chunk)])
            made += done
            if done < chunk:
                break
        return made

    # -- room --------------------------------------------------------------------------------------

    def _grow(self) -> None:
        room = 2 * len(self.birth)
        if room * self.k >= 2**31 or int(self.state[kernel.NEXT_BIRTH]) > 2**30:
            raise LimitError("the walk has made more simplices than can be numbered in 32 bits")
        if len(self) + self.k > len(self.birth):
            for name, width in (("across", self.k), ("rank", self.k), ("birth", 1), ("orientation", 1)):
                setattr(self, name, _padded(getattr(self, name), room * width))
            if self.labelled:
                self.corner = _padded(self.corner, room * self.k)
        if int(self.state[kernel.NEXT_BIRTH]) + self.k > len(self.slot_of):
            more = np.full(len(self.slot_of), -1, dtype=np.int32)
            self.slot_of = np.concatenate([self.slot_of, more])
        if self.state[kernel.LOOK] and 2 * (int(self.state[kernel.USED]) + 64) > len(self.key_hi):
            self._fill()

    def _fill(self) -> None:
        """The table of simplices anew, in at least three times the room it needs."""
        n, k = len(self), self.k
        corner = np.sort(self.corner[: n * k].reshape(n, k), axis=1).ravel()
        used = -1
        room = 1 << int(np.ceil(np.log2(3 * max(int(self.state[kernel.USED]), 4 * n) + 256)))
        while used < 0:
            self.key_hi, self.key_lo = np.zeros((2, room), dtype=np.int64)
            self.mark = np.zeros(room, dtype=np.int8)
            axes = tuple(range(k))
            used = self.run(kernel.fill_simplices, corner, self.key_hi, self.key_lo, _bits(), axes, n)
            room *= 2
        if self.pins is not None:
            used += self.run(kernel.pin_simplices, *self.pins, self.key_hi, self.key_lo, self.mark)
            self.state[kernel.PINS] = 1
        self.state[kernel.USED] = used

    def _pinched(self) -> tuple[np.ndarray, np.ndarray] | None:
        """Words of the simplices of 1 to D - 1 points around which the complex falls into several pieces.

        A move never makes such a simplex: inside the ball that it exchanges, what contains a given simplex
        of its boundary is in one piece before and after.
        """
        t, k = self.t, self.k
        ids = self.corner[: len(t) * k].reshape(len(t), k).astype(np.int64)
        ids.sort(axis=1)
        words: list[tuple[np.ndarray, np.ndarray]] = []
        for m in range(1, k - 1):
            # one row for each class of simplices under the gluings: labels that occur twice are pinched
            first = classes(t, m).first
            subsets = corner_subsets(k - 1, m)
            row, column = np.divmod(first, len(subsets))
            points = np.take_along_axis(ids[row], subsets[column], axis=1) + 1
            hi = points[:, 0] if m == 1 else (points[:, 0] << 31) | points[:, 1]
            lo = points[:, 2] if m == 3 else np.zeros_like(hi)
            order = np.lexsort((lo, hi)) if m == 3 else np.argsort(hi)
            hi, lo = hi[order], lo[order]
            twice = np.flatnonzero((hi[1:] == hi[:-1]) & (lo[1:] == lo[:-1]))
            if len(twice):
                words.append((hi[twice], lo[twice]))
        if not words:
            return None
        return np.concatenate([w[0] for w in words]), np.concatenate([w[1] for w in words])

    # -- labels ------------------------------------------------------------------------------------

    def _number_labels(self, more: tuple) -> np.ndarray:
        """Points instead of labels; `names` tells the label (or word) of a point."""
        t = self.t
        assert t.corners is not None
        if t.corner_names is not None:
            self.names = list(t.corner_names)
            there = set(self.names)
            self.names += [w for w in dict.fromkeys(more) if w not in there]
            return t.corners
        used, ids = np.unique(t.corners, return_inverse=True)
        self.names = used.tolist()
        there = set(self.names)
        self.names += [x for x in dict.fromkeys(more) if x not in there]
        return ids.reshape(t.corners.shape)

    def point_numbers(self) -> dict:
        """Point of each label."""
        return {name: x for x, name in enumerate(self.names)}

    def all_names(self) -> list:
        """The labels of all points, new ones included."""
        new = int(self.state[kernel.NEXT_POINT]) - len(self.names)
        if new <= 0:
            return self.names
        if self.t.corner_names is not None:
            return self.names + fresh_words(self.names, new)
        first = max(0, max(self.names) + 1)
        if self.t.coordinates is not None and self.t.coordinates.point is not None:
            first = max(first, len(self.t.coordinates.point))
        if first + new >= 2**63:
            raise LimitError(
                "no 64-bit label is left behind the largest one", hint="relabel the complex first"
            )
        return self.names + list(range(first, first + new))

    # -- the way back ------------------------------------------------------------------------------

    def moves(self) -> Moves:
        """The record of the moves made so far."""
        k = self.k
        part = {name: np.concatenate([np.empty(0, np.int32), *self.log[name]]) for name in PARTS}
        labels = words = None
        if self.labelled:
            names = self.all_names()
            rows = part["row"].reshape(-1, k + 1)
            if self.t.corner_names is not None:
                words, labels = tuple(names), rows.astype(np.int64)
            else:
                labels = np.array(names, dtype=np.int64)[rows]
        return Moves(
            k - 1,
            self.t.written,
            part["kind"].astype(np.int8),
            labels,
            words,
            part["birth"].astype(np.int64),
            part["mask"].astype(np.int8),
            part["removed"].reshape(-1, k).astype(np.int64),
            part["layout"].reshape(-1, k).astype(np.uint8),
            self.t.coordinates,
            self.t.corner_names,
        )

    def births(self) -> np.ndarray:
        """Numbers of the simplices in the order of `triangulation`."""
        return np.sort(self.birth[: len(self)]).astype(np.int64)

    def triangulation(self) -> Triangulation:
        """The triangulation as it is now; simplices by their number, so what stayed keeps its order."""
        n, k = len(self), self.k
        order = np.argsort(self.birth[:n])
        row_of = np.empty(n, dtype=np.int64)
        row_of[order] = np.arange(n)
        across = self.across[: n * k].reshape(n, k)[order].astype(np.int64)
        inner = across >= 0
        across[inner] = row_of[across[inner]]
        rank = self.rank[: n * k].reshape(n, k)[order]
        orientation = self.orientation[:n][order]
        births = self.birth[:n][order]
        known = births < len(self.start)
        if self.labelled:
            points = self.corner[: n * k].reshape(n, k)[order].astype(np.int64)
            names = self.all_names()
            if self.t.corner_names is None:
                labels = np.array(names, dtype=np.int64)[points]
                out = by_labels(across, rank, orientation, labels, None)
            else:
                out = by_labels(across, rank, orientation, points, names)
        else:
            out = Triangulation(across.astype(np.int32), rank, orientation)
        # the signs of the simplices of the input stay as they were written, the others fit to them
        written = np.where(known, self.start[np.where(known, births, 0)], out.written).astype(np.int8)
        result = with_fields(out, written=written)
        return result if known.all() else oriented_as(result, out.written)


def _padded(array: np.ndarray, length: int) -> np.ndarray:
    out = np.zeros(length, dtype=array.dtype)
    out[: len(array)] = array
    return out


def _seed(seed: int) -> int:
    """A state of the generator in `walk_moves`."""
    return 1 + int(np.random.SeedSequence(seed).generate_state(1, np.uint64)[0]) % (698769069 * 2**32 - 2)


@cache
def _bits() -> np.ndarray:
    return np.array([bin(m).count("1") for m in range(64)], dtype=np.int8)


@cache
def _subsets(dimension: int) -> tuple[np.ndarray, np.ndarray]:
    """The subsets of corners that each kind of move can replace, as bits, and where each kind begins."""
    rows: list[int] = []
    starts = [0, 0]
    for kind in range(1, dimension + 2):
        size = dimension + 2 - kind
        rows += [sum(1 << c for c in chosen) for chosen in combinations(range(dimension + 1), size)]
        starts.append(len(rows))
    return np.array(rows, dtype=np.int64), np.array(starts, dtype=np.int64)


def _none(k: int) -> tuple[np.ndarray, ...]:
    return (
        np.empty(0, np.int64),
        np.empty(0, np.int64),
        np.empty(0, np.int64),
        np.empty(0, np.int64),
        np.empty(0, np.int64),
        np.empty(0, np.uint8),
    )


def _slice(places: Given, lo: int, hi: int, k: int) -> tuple[np.ndarray, ...]:
    return (
        places.birth[lo:hi],
        places.mask[lo:hi],
        places.kind[lo:hi],
        places.row[lo * (k + 1) : hi * (k + 1)],
        places.new[lo * k : hi * k],
        places.layout[lo * k : hi * k],
    )
