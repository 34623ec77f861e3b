"""Parity sectors: which spins are integers and which are half-integers.

The sums of twice-spins at the edges are even: linear equations over the field of two elements, one for each
internal edge, with the parities of the internal faces as unknowns.  Their solutions are the *sectors*.
With boundary spins 0 they are the closed surfaces of the foam mod 2.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from .rules import Rules

__all__ = ["Sectors", "parity_sectors"]

BATCH = 2048  # vectors of a basis that are worked out together


@dataclass(frozen=True, eq=False)
class Sectors:
    """All solutions of the parity conditions: a particular one plus any combination of a basis.

    Attributes
    ----------
    exponent : int
        There are ``2**exponent`` sectors, if there is any.
    particular : ndarray of int8, shape (F_int,), or None
        One solution, 1 where the spin is a half-integer; None if there is none.
    contradiction : tuple of int or None
        If there is no solution, edges whose conditions add up to 0 = 1: every internal face meets them an
        even number of times, and the boundary spins at them have an odd sum.
    """

    exponent: int
    particular: np.ndarray | None
    contradiction: tuple[int, ...] | None
    faces: int
    _peeled: _Peeled | None

    @property
    def feasible(self) -> bool:
        """Whether there is a sector."""
        return self.particular is not None

    def __repr__(self) -> str:
        return f"<Sectors: {f'2**{self.exponent}' if self.feasible else 'none'}>"

    def batches(self) -> Iterator[tuple[int, list[int]]]:
        """The basis, so many vectors at a time: how many, and for each face their entries as bits."""
        if self._peeled is not None:
            for low in range(0, self.exponent, BATCH):
                high = min(low + BATCH, self.exponent)
                yield high - low, self._peeled.vectors(low, high)

    def basis(self, limit: int | None = None) -> list[np.ndarray]:
        """The vectors of a basis, each as the faces where it is 1, ascending; at most `limit` of them."""
        out: list[list[int]] = []
        for count, bits in self.batches():
            vectors: list[list[int]] = [[] for _ in range(count)]
            for face, mask in enumerate(bits):
                while mask:
                    low = mask & -mask
                    vectors[low.bit_length() - 1].append(face)
                    mask ^= low
            out += vectors
            if limit is not None and len(out) >= limit:
                break
        return [np.array(v, dtype=np.int64) for v in out[:limit]]

    @cached_property
    def loose(self) -> np.ndarray:
        """Whether each face has either parity, (F_int,) bool: in half of the sectors each."""
        found = np.zeros(self.faces, dtype=bool)
        for _, bits in self.batches():
            found |= np.fromiter((mask != 0 for mask in bits), dtype=bool, count=self.faces)
        return found

    def sector(self, choice: int) -> np.ndarray:
        """The sector in which basis vector n is added where bit n of `choice` is set, (F_int,) int8."""
        if self.particular is None:
            raise ValueError("there is no sector")
        parity = self.particular.copy()
        low = 0
        for count, bits in self.batches():
            part = (choice >> low) & ((1 << count) - 1)
            if part:
                parity ^= np.fromiter(
                    ((mask & part).bit_count() & 1 for mask in bits), dtype=np.int8, count=self.faces
                )
            low += count
        return parity


def parity_sectors(rules: Rules) -> Sectors:
    """Solve the parity conditions.

    Parameters
    ----------
    rules : Rules

    Returns
    -------
    Sectors

    Notes
    -----
    Structured elimination: faces are given free parities one by one, and whenever all faces but one at an
    edge have theirs, that edge determines the last.  The edges that determine none are few beside a forest,
    whose conditions follow from the others because the conditions around a vertex add up to nothing; only
    what is left goes through dense elimination.  Time grows with the size of the foam as long as what is
    left stays small; memory is that of the tables.
    """
    if rules.step % 2 == 0:  # all spins are integers
        return Sectors(0, np.zeros(rules.internal, dtype=np.int8), None, rules.internal, None)
    peeled = _Peeled(rules)
    particular, contradiction = peeled.solve((rules.total % 2).tolist())
    return Sectors(peeled.exponent, particular, contradiction, rules.internal, peeled)


class _Peeled:
    """The elimination: which edge determines which face, and what the other edges demand."""

    def __init__(self, rules: Rules) -> None:
        odd = rules.times % 2 == 1
        member, edge = rules.member[odd], rules.edge_of_member[odd]
        self.count = rules.internal
        self.rows: list[list[int]] = [[] for _ in range(len(rules.face))]
        for e, f in zip(edge.tolist(), member.tolist(), strict=True):
            self.rows[e].append(f)
        self.order, self.free, rest = self._peel()
        self.rest = rest
        self._close(self._outside_forest(rules, rest))

    def _peel(self) -> tuple[list[tuple[int, int]], list[int], list[int]]:
        """The (edge, face) determined in order, the free faces, and the edges that determine nothing."""
        rows = self.rows
        at: list[list[int]] = [[] for _ in range(self.count)]
        for e, row in enumerate(rows):
            for f in row:
                at[f].append(e)
        left = [len(row) for row in rows]
        ready = deque(e for e, n in enumerate(left) if n == 1)
        nearly: deque[int] = deque(e for e, n in enumerate(left) if n == 2)
        known, used = [False] * self.count, [False] * len(rows)
        order: list[tuple[int, int]] = []
        free: list[int] = []

        def settle(face: int) -> None:
            known[face] = True
            for e in at[face]:
                left[e] -= 1
                if left[e] == 1:
                    ready.append(e)
                elif left[e] == 2:
                    nearly.append(e)

        lowest = 0
        while True:
            while ready:
                e = ready.popleft()
                if left[e] == 1:
                    face = next(f for f in rows[e] if not known[f])
                    used[e] = True
                    order.append((e, face))
                    settle(face)
            while nearly and left[nearly[0]] != 2:
                nearly.popleft()
            if nearly:  # a face next to those that have their parity keeps expressions short
                face = next(f for f in rows[nearly[0]] if not known[f])
            else:
                while lowest < self.count and known[lowest]:
                    lowest += 1
                if lowest == self.count:
                    return order, free, [e for e, done in enumerate(used) if not done]
                face = lowest
            free.append(face)
            settle(face)

    def _outside_forest(self, rules: Rules, rest: list[int]) -> list[int]:
        """Those of the edges `rest` that close a circle with earlier ones.

        The conditions at all edges of a vertex add up to nothing, as a face that enters a vertex leaves it
        again.  So the condition at an edge of a forest is that of the others in a cut of the graph, which
        can be chosen to hold no other edge of the forest.
        """
        ends = rules.ends.tolist()
        parent = list(range(max((v for pair in ends for v in pair), default=-1) + 1))

        def root(v: int) -> int:
            while parent[v] != v:
                parent[v] = parent[parent[v]]
                v = parent[v]
            return v

        closing = []
        for e in rest:
            a, b = map(root, ends[e])
            if a == b:
                closing.append(e)
            else:
                parent[a] = b
        return closing

    def _close(self, rest: list[int]) -> None:
        """What the conditions at `rest` say about the free faces."""
        need = self._over_free(rest)
        number = {f: x for x, f in enumerate(self.free)}
        demand = [0] * len(rest)
        for f in self.free:
            mask, bit = need[f], 1 << number[f]
            while mask:
                low = mask & -mask
                demand[low.bit_length() - 1] |= bit
                mask ^= low
        # reduced echelon form: {bit of the pivot: (row, combination of `rest`)}
        pivots: dict[int, tuple[int, int]] = {}
        self.idle: list[int] = []  # combinations of `rest` that demand nothing of the free faces
        for x, row in enumerate(demand):
            combination = 1 << x
            for bit, (other, mix) in pivots.items():
                if row >> bit & 1:
                    row ^= other
                    combination ^= mix
            if not row:
                self.idle.append(combination)
                continue
            lead = row.bit_length() - 1
            for bit, (other, mix) in list(pivots.items()):
                if other >> lead & 1:
                    pivots[bit] = other ^ row, mix ^ combination
            pivots[lead] = row, combination
        self.pivots = pivots
        self.checked = rest
        self.parameters = [x for x in range(len(self.free)) if x not in pivots]
        self.exponent = len(self.parameters)

    def _over_free(self, edges: list[int], used: list[tuple[int, int]] | None = None) -> list[int]:
        """The conditions at `edges` in terms of the free faces: for each face, the edges as bits.

        With `used`, the determined edges that were brought in are listed with their bits.
        """
        need = [0] * self.count
        for x, e in enumerate(edges):
            for f in self.rows[e]:
                need[f] ^= 1 << x
        for e, face in reversed(self.order):
            mask = need[face]
            if mask:
                for f in self.rows[e]:
                    need[f] ^= mask
                if used is not None:
                    used.append((e, mask))
        return need

    def _spread(self, parity: list[int], right: list[int] | None) -> list[int]:
        """Determine all faces from the free ones; entries may hold many solutions as bits."""
        for e, face in self.order:
            value = right[e] if right is not None else 0
            for f in self.rows[e]:
                if f != face:
                    value ^= parity[f]
            parity[face] = value
        return parity

    def solve(self, right: list[int]) -> tuple[np.ndarray | None, tuple[int, ...] | None]:
        """A solution for a right-hand side, or the edges that contradict."""
        parity = self._spread([0] * self.count, right)
        lack = [self._sum(e, parity) ^ right[e] for e in self.checked]
        for bit, (_, mix) in self.pivots.items():
            parity[self.free[bit]] = self._mixed(mix, lack)
        self._spread(parity, right)
        for mix in self.idle:
            if self._mixed(mix, lack):
                return None, self._contradiction(self._edges_of(mix))
        for e in self.rest:  # those of the forest agree, unless the boundary breaks the rule of a node
            if self._sum(e, parity) != right[e]:
                need, mix = self._over_free([e]), 0
                for bit, (_, other) in self.pivots.items():
                    if need[self.free[bit]]:
                        mix ^= other
                return None, self._contradiction([e, *self._edges_of(mix)])
        return np.array(parity, dtype=np.int8), None

    def _contradiction(self, edges: list[int]) -> tuple[int, ...]:
        """The edges that, with determined ones, add up to nothing on the faces."""
        count = dict.fromkeys(edges, 1)
        used: list[tuple[int, int]] = []
        self._over_free(edges, used)
        for e, mask in used:
            count[e] = count.get(e, 0) ^ (mask.bit_count() & 1)
        return tuple(sorted(e for e, odd in count.items() if odd))

    def _edges_of(self, mix: int) -> list[int]:
        """The edges of a combination."""
        return [e for x, e in enumerate(self.checked) if mix >> x & 1]

    def _sum(self, edge: int, parity: list[int]) -> int:
        value = 0
        for f in self.rows[edge]:
            value ^= parity[f]
        return value

    @staticmethod
    def _mixed(mix: int, values: list[int]) -> int:
        total = 0
        while mix:
            low = mix & -mix
            total ^= values[low.bit_length() - 1]
            mix ^= low
        return total

    def vectors(self, low: int, high: int) -> list[int]:
        """Vectors low .. high - 1 of the basis of homogeneous solutions, as bits for each face."""
        parity = [0] * self.count
        chosen = 0
        for x, parameter in enumerate(self.parameters[low:high]):
            parity[self.free[parameter]] = 1 << x
            chosen |= 1 << parameter
        for bit, (row, _) in self.pivots.items():
            mask, value = row & chosen, 0
            while mask:
                lowest = mask & -mask
                value ^= parity[self.free[lowest.bit_length() - 1]]
                mask ^= lowest
            parity[self.free[bit]] = value
        return self._spread(parity, None)
