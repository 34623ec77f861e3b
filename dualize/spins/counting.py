"""Count admissible labellings exactly, and draw them uniformly, without listing them.

The number of labellings is a sum over the internal spins of a product of edge factors, 1 where the rule
holds (or the number of intertwiners).  Spins are summed one after the other along a good order, so that the
tables on the way stay small; R. Dechter, "Bucket elimination", Artificial Intelligence 113 (1999) 41-85 (from
memory).  Numbers are exact: residues modulo primes, put together by the Chinese remainder theorem.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import log2, prod

import numpy as np

from ..errors import InputError, LimitError
from ..progress import progress
from .bounds import propagated
from .rules import Rules, intertwiner_dimension

__all__ = ["Cost", "Sampler", "count_labellings", "counting_cost", "elimination_order"]

# entries of a table on the way, and of all steps, beyond which counting is refused
LARGEST_TABLE = 1 << 26
MOST_STEPS = 20_000_000_000


@dataclass(frozen=True)
class Cost:
    """What counting takes.

    Attributes
    ----------
    width : int
        The most internal faces in one table.
    largest : int
        Entries of the largest table.
    steps : int
        Entries of all tables together, times the number of primes.
    bytes : int
        About the most memory in use.
    """

    width: int
    largest: int
    steps: int
    bytes: int

    def __str__(self) -> str:
        return (
            f"tables over at most {self.width} faces, {self.largest:,} entries, about "
            f"{self.bytes / 2**20:,.1f} MiB, {self.steps:.3g} steps"
        )


def elimination_order(scopes: Sequence[frozenset[int]], sizes: Sequence[int]) -> tuple[list[int], int]:
    """An order in which to sum the variables of a product of factors, and its width.

    Parameters
    ----------
    scopes : sequence of frozenset of int
        The variables of each factor.
    sizes : sequence of int
        How many values each variable has.

    Returns
    -------
    order : list of int
        Next is always the variable whose factors together have the fewest entries.
    width : int
        The most variables in one table on the way, the summed one included.
    """
    near: dict[int, set[int]] = {v: {v} for v in range(len(sizes))}
    for scope in scopes:
        for v in scope:
            near[v] |= scope
    logs = [log2(max(1, n)) for n in sizes]
    weight = {v: sum(logs[u] for u in near[v]) for v in near}
    order, width = [], 0
    while near:
        v = min(near, key=lambda u: (weight[u], u))
        order.append(v)
        width = max(width, len(near[v]))
        others = near.pop(v) - {v}
        del weight[v]
        for u in others:
            near[u] |= others
            near[u].discard(v)
            weight[u] = sum(logs[w] for w in near[u])
    return order, width


class _Sum:
    """The factors of a count, the values of each spin, and the order of the sums."""

    def __init__(self, rules: Rules, most: int, intertwiners: bool) -> None:
        if most < 0:
            raise InputError(f"the largest twice-spin is not negative, as {most} is")
        self.rules, self.intertwiners = rules, intertwiners
        least, greatest = propagated(rules, greatest=np.full(rules.internal, most))
        self.values = [
            np.arange(-(-int(a) // rules.step) * rules.step, int(b) + 1, rules.step)
            for a, b in zip(least, greatest, strict=True)
        ]
        bounds = zip(rules.offsets[:-1].tolist(), rules.offsets[1:].tolist(), strict=True)
        self.scopes = [frozenset(rules.member[a:b].tolist()) for a, b in bounds]
        self.sizes = [len(v) for v in self.values]
        self.order, self.width = elimination_order(self.scopes, self.sizes)
        bits = sum(log2(max(1, n)) for n in self.sizes) + 1
        if intertwiners and rules.face.shape[1] == 4:
            bits += len(rules.face) * log2(most + 2 + int(rules.boundary.max(initial=0)))
        self.primes = _primes(bits)
        self.tables = self._tables()

    def _tables(self) -> list[tuple[int, ...]]:
        """The scope of the table of each sum, the summed variable last."""
        scopes = [set(s) for s in self.scopes]
        out = []
        for v in self.order:
            mine = [s for s in scopes if v in s]
            union: set[int] = set().union(*mine) if mine else {v}
            out.append((*sorted(union - {v}), v))
            scopes = [s for s in scopes if v not in s] + [union - {v}]
        return out

    def cost(self, keep: bool = False) -> Cost:
        """What it takes; with `keep`, all tables are kept."""
        entries = [prod(self.sizes[u] for u in scope) for scope in self.tables]
        largest = max(entries, default=1)
        memory = 8 * (sum(entries) * len(self.primes) if keep else 3 * largest)
        return Cost(self.width, largest, sum(entries) * len(self.primes), memory)

    def check(self, keep: bool = False) -> None:
        """Refuse what is too large."""
        cost = self.cost(keep)
        if cost.largest > LARGEST_TABLE or cost.steps > MOST_STEPS or cost.bytes > 1 << 33:
            raise LimitError(
                f"counting would take {cost}",
                hint="lower the largest twice-spin, or fix the spins of some faces",
            )

    def factor(self, edge: int) -> tuple[tuple[int, ...], np.ndarray]:
        """The table of an edge over its distinct internal faces."""
        faces = self.rules.face[edge].tolist()
        scope = tuple(sorted(self.scopes[edge]))
        columns = []
        for f in faces:
            if f < self.rules.internal:
                shape = [-1 if u == f else 1 for u in scope]
                columns.append(self.values[f].reshape(shape))
            else:
                columns.append(
                    np.array(self.rules.boundary[f - self.rules.internal]).reshape([1] * len(scope))
                )
        rows = np.stack(np.broadcast_arrays(*columns), axis=-1)
        table = intertwiner_dimension(rows)
        return scope, table if self.intertwiners else (table > 0).astype(np.int64)

    def eliminate(self, prime: int | None, keep: list[np.ndarray] | None = None) -> int:
        """The count modulo a prime (None: without), tables before each sum appended to `keep`."""
        factors = [self.factor(e) for e in range(len(self.scopes))]
        for scope in self.tables:
            v = scope[-1]
            mine = [f for f in factors if v in f[0]]
            factors = [f for f in factors if v not in f[0]]
            table = np.ones([1] * len(scope), dtype=np.int64)
            for names, entries in mine:
                # axes in the order of the scope, length 1 for those that the factor lacks
                order = sorted(range(len(names)), key=lambda x: scope.index(names[x]))
                shape = [len(self.values[u]) if u in names else 1 for u in scope]
                table = table * np.transpose(entries, order).reshape(shape)
                if prime is not None:
                    table %= prime
            table = np.broadcast_to(table, [len(self.values[u]) for u in scope])
            if keep is not None:
                keep.append(table)
            summed = table.sum(axis=-1)
            factors.append((scope[:-1], summed if prime is None else summed % prime))
        total = 1
        for _, entries in factors:
            total *= int(entries)
            if prime is not None:
                total %= prime
        return total


def counting_cost(rules: Rules, most: int, *, intertwiners: bool = False) -> Cost:
    """What `count_labellings` will take, worked out without doing it."""
    return _Sum(rules, most, intertwiners).cost()


def count_labellings(rules: Rules, most: int, *, intertwiners: bool = False) -> int:
    """Exact number of admissible labellings with all internal twice-spins at most `most`.

    Parameters
    ----------
    rules : Rules
    most : int
        The largest twice-spin of an internal face.
    intertwiners : bool
        Count spins and the intertwiners of the internal edges together.

    Raises
    ------
    InputError
        If the cutoff is negative.
    LimitError
        If it would take too much, with the figures.

    Examples
    --------
    Metrics on five points with even perimeters and distances at most 1, from the star of a point of five
    4-simplices: one for each of the 16 parity sectors.

    >>> from dualize import build, make
    >>> from dualize.spins import rules_of
    >>> count_labellings(rules_of(build(make.move_side(4, 5))), 1)
    16
    """
    task = _Sum(rules, most, intertwiners)
    task.check()
    residues = []
    with progress("counting", total=len(task.primes)) as step:
        for prime in task.primes:
            residues.append(task.eliminate(prime))
            step(1)
    return _lift(residues, task.primes)


class Sampler:
    """Draw admissible labellings, each with the same probability, exactly.

    Parameters
    ----------
    rules : Rules
    most : int
        The largest twice-spin of an internal face.
    intertwiners : bool
        Draw spins and intertwiners together: a labelling of the spins then comes as often as it has
        intertwiners.
    seed : int

    Raises
    ------
    InputError, LimitError
        As `count_labellings`; or if there is no labelling.
    """

    def __init__(self, rules: Rules, most: int, *, intertwiners: bool = False, seed: int = 0) -> None:
        import random

        self._task = _Sum(rules, most, intertwiners)
        self._task.check(keep=True)
        self._random = random.Random(seed)
        self._kept: list[list[np.ndarray]] = []
        residues = []
        for prime in self._task.primes:
            kept: list[np.ndarray] = []
            residues.append(self._task.eliminate(prime, kept))
            self._kept.append(kept)
        self.count = _lift(residues, self._task.primes)
        if not self.count:
            raise InputError(f"there is no admissible labelling up to {most}")

    def draw(self, number: int = 1) -> np.ndarray:
        """So many labellings, independent of each other, int64 (number, F_int)."""
        task = self._task
        out = np.zeros((number, task.rules.internal), dtype=np.int64)
        for row in out:
            index = [0] * task.rules.internal
            for x in range(len(task.tables) - 1, -1, -1):
                scope = task.tables[x]
                at = tuple(index[u] for u in scope[:-1])
                columns = [kept[x][at] for kept in self._kept]
                weights = [_lift([int(c[y]) for c in columns], task.primes) for y in range(len(columns[0]))]
                chosen = self._random.randrange(sum(weights))
                y = 0
                while chosen >= weights[y]:
                    chosen -= weights[y]
                    y += 1
                index[scope[-1]] = y
                row[scope[-1]] = task.values[scope[-1]][y]
        return out


def _lift(residues: list[int], primes: Sequence[int | None]) -> int:
    """The number below the product of the primes with these residues."""
    if primes[0] is None:
        return residues[0]
    value, modulus = 0, 1
    for residue, prime in zip(residues, primes, strict=True):
        assert prime is not None
        value += modulus * ((residue - value) * pow(modulus, -1, prime) % prime)
        modulus *= prime
    return value


def _primes(bits: float) -> Sequence[int | None]:
    """Primes below 2**31 whose product exceeds 2**bits; none where int64 holds everything."""
    if bits < 62:
        return [None]
    out: list[int] = []
    candidate = (1 << 31) - 1
    while 30.9 * len(out) < bits + 1:
        if all(candidate % p for p in range(3, 46342, 2)):
            out.append(candidate)
        candidate -= 2
    return list(out)
