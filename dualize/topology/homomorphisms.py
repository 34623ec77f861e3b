"""Homomorphisms from a finitely presented group to a small finite group, counted by backtracking."""

from __future__ import annotations

import re
from collections.abc import Sequence
from functools import cache
from itertools import pairwise
from typing import NamedTuple

import numpy as np

from ..errors import InputError, LimitError
from .presentation import Presentation

__all__ = ["FiniteGroup", "count_homomorphisms", "finite_group", "group_of_permutations"]

LARGEST = 2520  # elements of a group that is tabulated
STEPS = 300_000  # partial homomorphisms after which a search gives up


class FiniteGroup(NamedTuple):
    """A finite group by its table; element 0 is the identity.

    Attributes
    ----------
    name : str
    product : ndarray of int16, shape (n, n)
    inverse : ndarray of int16, shape (n,)
    """

    name: str
    product: np.ndarray
    inverse: np.ndarray


def group_of_permutations(generators: Sequence[Sequence[int]], name: str = "") -> FiniteGroup:
    """The group that permutations of 0 .. n - 1, given by their images, generate.

    Examples
    --------
    >>> len(group_of_permutations([[1, 0, 2], [1, 2, 0]]).inverse)
    6
    """
    rows = [tuple(map(int, g)) for g in generators]
    if not rows or any(sorted(g) != list(range(len(rows[0]))) for g in rows):
        raise InputError("a generator is no permutation of 0 .. n - 1")
    elements = [tuple(range(len(rows[0])))]
    seen = set(elements)
    for x in elements:  # grows while it is read
        for g in rows:
            y = tuple(x[i] for i in g)
            if y not in seen:
                if len(elements) == LARGEST:
                    raise LimitError(f"the group has more than {LARGEST} elements")
                seen.add(y)
                elements.append(y)
    number = {x: i for i, x in enumerate(elements)}
    product = np.array([[number[tuple(x[i] for i in y)] for y in elements] for x in elements], dtype=np.int16)
    return FiniteGroup(name, product, np.argmin(product, axis=1).astype(np.int16))


@cache
def finite_group(name: str) -> FiniteGroup:
    """A group by name: Z2, Z3, ... cyclic, S3 ... S6 symmetric, A3 ... A6 alternating, Q8, PSL(2,7).

    Raises
    ------
    InputError
        If there is no such name.
    """
    cyclic = re.fullmatch(r"Z_?([1-9]\d{0,2})", name)
    if cyclic:
        n = int(cyclic[1])
        return group_of_permutations([[(i + 1) % n for i in range(n)]], name)
    letters = re.fullmatch(r"([SA])_?([3-6])", name)
    if letters:
        n = int(letters[2])
        if letters[1] == "S":
            swap = [1, 0, *range(2, n)]
            return group_of_permutations([swap, [*range(1, n), 0]], name)
        return group_of_permutations([_three_cycle(n, c) for c in range(2, n)], name)
    if name == "Q8":  # 1, i, j, k, -1, -i, -j, -k, multiplied from the left
        return group_of_permutations([[1, 4, 3, 6, 5, 0, 7, 2], [2, 7, 4, 1, 6, 3, 0, 5]], name)
    if name == "PSL(2,7)":  # x + 1, 2 x, -1 / x on the projective line over the field of 7, infinity last
        inverse = [7, *(-pow(x, -1, 7) % 7 for x in range(1, 7)), 0]
        shift, double = [*range(1, 7), 0, 7], [*(2 * x % 7 for x in range(7)), 7]
        return group_of_permutations([shift, double, inverse], name)
    raise InputError(
        f"there is no group {name!r}", hint="groups: Z2, Z3, ..., S3 to S6, A3 to A6, Q8, PSL(2,7)"
    )


def _three_cycle(n: int, c: int) -> list[int]:
    images = list(range(n))
    images[0], images[1], images[c] = 1, c, 0
    return images


def count_homomorphisms(presentation: Presentation, group: FiniteGroup | str, *, steps: int = STEPS) -> int:
    """How many homomorphisms there are from a presented group to a finite one.

    Parameters
    ----------
    presentation : Presentation
        A short one: see `dualize.topology.presentation.simplified`.
    group : FiniteGroup or str
    steps : int
        Partial homomorphisms after which the search gives up.

    Raises
    ------
    LimitError
        If the search gives up.

    Notes
    -----
    Generators get their images one after the other, all images of one at a time; a relator is tested as soon
    as its letters have images.  The first image runs over classes of conjugate elements only, generators
    without common relators are counted apart, and what an unfinished assignment leaves to count is remembered
    by the images that later relators read.

    Examples
    --------
    >>> torus = Presentation(2, ((1, 2, -1, -2),))
    >>> count_homomorphisms(torus, "S3")
    18
    """
    g = finite_group(group) if isinstance(group, str) else group
    total = 1
    budget = [steps]
    for letters, relators in _parts(presentation):
        total *= _Search(g, letters, relators, budget).count()
    return total


def _parts(p: Presentation) -> list[tuple[list[int], list[tuple[int, ...]]]]:
    """Generators that hang together by relators, and these."""
    root = list(range(p.generators + 1))

    def find(x: int) -> int:
        while root[x] != x:
            x = root[x]
        return x

    for r in p.relators:
        for x, y in pairwise(r):
            root[find(abs(x))] = find(abs(y))
    parts: dict[int, tuple[list[int], list[tuple[int, ...]]]] = {}
    for x in range(1, p.generators + 1):
        parts.setdefault(find(x), ([], []))[0].append(x)
    for r in p.relators:
        if r:
            parts[find(abs(r[0]))][1].append(r)
    return list(parts.values())


class _Search:
    """The search for one part of a presentation."""

    def __init__(
        self, group: FiniteGroup, letters: list[int], relators: list[tuple[int, ...]], budget: list[int]
    ) -> None:
        self.group = group
        self.budget = budget
        self.order = self._order(letters, relators)
        step = {x: n for n, x in enumerate(self.order)}
        self.tests: list[list[tuple[int, ...]]] = [[] for _ in self.order]
        for r in relators:
            self.tests[max(step[abs(x)] for x in r)].append(r)
        # what relators from a step on read of the images before it
        self.read: list[list[int]] = []
        for n in range(len(self.order)):
            later = {abs(x) for tests in self.tests[n:] for r in tests for x in r}
            self.read.append([x for x in self.order[:n] if x in later])
        self.known: list[dict[tuple[int, ...], int]] = [{} for _ in self.order]
        self.image: dict[int, int] = {}

    @staticmethod
    def _order(letters: list[int], relators: list[tuple[int, ...]]) -> list[int]:
        """Generators so that relators are complete soon: always one that leaves the fewest letters open."""
        left = [{abs(x) for x in r} for r in relators]
        out: list[int] = []
        rest = set(letters)
        while rest:
            open_sets = [s for s in left if s]
            shortest = min(map(len, open_sets), default=0)
            near = [s for s in open_sets if len(s) == shortest] or [rest]
            times = {x: sum(x in s for s in near) for s in near for x in s}
            best = max(times, key=lambda x: (times[x], sum(x in s for s in open_sets), -x))
            out.append(best)
            rest.discard(best)
            for s in left:
                s.discard(best)
        return out

    def count(self) -> int:
        every = np.arange(len(self.group.inverse))
        seen = np.zeros(len(every), dtype=bool)
        total = 0
        product, inverse = self.group.product, self.group.inverse
        for x in every.tolist():
            if seen[x]:
                continue
            conjugates = np.unique(product[product[every, x], inverse])
            seen[conjugates] = True
            total += len(conjugates) * self._from(0, np.array([x]))
        return total

    def _from(self, n: int, candidates: np.ndarray) -> int:
        """Ways to go on from step `n`, whose generator takes one of the candidates."""
        good = self._passing(n, candidates)
        if n + 1 == len(self.order):
            return len(good)
        total = 0
        for x in good.tolist():
            self.budget[0] -= 1
            if self.budget[0] < 0:
                raise LimitError("the search for homomorphisms took too many steps")
            self.image[self.order[n]] = x
            key = tuple(self.image[y] for y in self.read[n + 1])
            if key not in self.known[n + 1]:
                self.known[n + 1][key] = self._from(n + 1, np.arange(len(self.group.inverse)))
            total += self.known[n + 1][key]
        return total

    def _passing(self, n: int, candidates: np.ndarray) -> np.ndarray:
        product, inverse = self.group.product, self.group.inverse
        mine = self.order[n]
        for r in self.tests[n]:
            turned = inverse[candidates]
            value = np.zeros(len(candidates), dtype=np.int16)
            for x in r:
                if abs(x) == mine:
                    value = product[value, candidates if x > 0 else turned]
                else:
                    y = self.image[abs(x)]
                    value = product[value, y if x > 0 else inverse[y]]
            candidates = candidates[value == 0]
        return candidates
