"""Symmetries of small graphs, for layouts that show them.

A symmetry of a connected graph is found by following the graph outward from one node: the image of every
further node is a neighbour of an image already known.  The search has a budget of steps and not of time, so
the same graph has the same picture on every machine.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator

__all__ = ["best_rotation", "cycles_of", "symmetries"]

STEPS = 200_000
TRIED = 2_000


def symmetries(neighbours: list[Counter[int]], steps: int = STEPS) -> Iterator[list[int]]:
    """Permutations of the nodes that keep the numbers of links between them, as far as the budget reaches.

    Parameters
    ----------
    neighbours : list of Counter
        How many links lead from each node to each other one (loops to itself); symmetric, connected.
    steps : int
        At most so many images are tried.
    """
    n = len(neighbours)
    colour = _refined(neighbours)
    rarity = Counter(colour)
    start = min(range(n), key=lambda v: (rarity[colour[v]], v))
    order, parent = [start], {start: -1}
    for v in order:
        for w in sorted(neighbours[v]):
            if w not in parent:
                parent[w] = v
                order.append(w)
    rank = {v: k for k, v in enumerate(order)}
    # those neighbours of each node that have an image before it has
    before = [[w for w in neighbours[v] if rank[w] < rank[v]] for v in order]
    image = [-1] * n
    used = [False] * n

    def candidates(k: int) -> Iterator[int]:
        v = order[k]
        pool = range(n) if k == 0 else sorted(neighbours[image[parent[v]]])
        for x in pool:
            if used[x] or colour[x] != colour[v] or neighbours[x].get(x, 0) != neighbours[v].get(v, 0):
                continue
            if all(neighbours[x].get(image[w], 0) == neighbours[v][w] for w in before[k]):
                yield x

    stack = [candidates(0)]
    while stack:
        k = len(stack) - 1
        v = order[k]
        if image[v] >= 0:
            used[image[v]] = False
            image[v] = -1
        x = next(stack[-1], -1)
        steps -= 1
        if steps < 0:
            return
        if x < 0:
            stack.pop()
            continue
        image[v], used[x] = x, True
        if k + 1 == n:
            yield list(image)
        else:
            stack.append(candidates(k + 1))


def cycles_of(permutation: list[int]) -> list[list[int]]:
    """The cycles of a permutation, each from its smallest element, in the order of these."""
    seen = [False] * len(permutation)
    out = []
    for v in range(len(permutation)):
        if not seen[v]:
            cycle = []
            while not seen[v]:
                seen[v] = True
                cycle.append(v)
                v = permutation[v]
            out.append(cycle)
    return out


def best_rotation(neighbours: list[Counter[int]]) -> list[list[int]] | None:
    """The cycles of a symmetry that can be drawn as a rotation of order 3 or more, or None.

    All cycles have the same length, but for at most one fixed node, which goes to the middle.  Long cycles
    are preferred, and then those that step to a neighbour, so that the ring is drawn as one.
    """
    best: tuple[int, int] | None = None
    chosen = None
    for k, permutation in enumerate(symmetries(neighbours)):
        if k >= TRIED:
            break
        cycles = cycles_of(permutation)
        lengths = Counter(map(len, cycles))
        fixed = lengths.pop(1, 0)
        if len(lengths) != 1 or fixed > 1:
            continue
        (length,) = lengths
        if length < 3:
            continue
        steps = sum(1 for c in cycles if len(c) > 1 and neighbours[c[0]].get(c[1], 0))
        if best is None or (length, steps) > best:
            best, chosen = (length, steps), cycles
    return chosen


def _refined(neighbours: list[Counter[int]]) -> list[int]:
    """Colours that every symmetry keeps: degrees, refined by those of the neighbours until stable."""
    colour = [0] * len(neighbours)
    while True:
        seen = [
            (colour[v], tuple(sorted((colour[w], m, w == v) for w, m in near.items())))
            for v, near in enumerate(neighbours)
        ]
        number = {key: k for k, key in enumerate(sorted(set(seen)))}
        new = [number[key] for key in seen]
        if len(number) == len(set(colour)):
            return new
        colour = new
