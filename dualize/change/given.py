"""The places of a record of moves as the kernel reads them, forward and backward."""

from __future__ import annotations

import numpy as np

from ..kernels.permutations import permutations_of
from .record import Moves
from .state import Given, State

__all__ = ["backward", "forward"]


def _points(state: State, moves: Moves) -> np.ndarray:
    """The labels of a record as points of a state."""
    assert moves.labels is not None
    number_of = state.point_numbers()
    if moves.words is not None:
        table = np.array([number_of[w] for w in moves.words], dtype=np.int64)
        return table[moves.labels]
    labels, inverse = np.unique(moves.labels, return_inverse=True)
    table = np.array([number_of[x] for x in labels.tolist()], dtype=np.int64)
    return table[inverse.reshape(moves.labels.shape)] if len(labels) else moves.labels


def forward(state: State, moves: Moves) -> Given:
    k = moves.dimension + 1
    row = np.empty(0, np.int64) if moves.labels is None else _points(state, moves).ravel()
    return Given(
        moves.simplex,
        moves.corners.astype(np.int64),
        moves.kind.astype(np.int64),
        row,
        np.empty(len(moves) * k, np.int64),
        np.empty(len(moves) * k, np.uint8),
        False,
    )


def backward(state: State, moves: Moves, count: int) -> Given:
    """The inverse moves, last first, with the numbers and corner orders that the simplices had."""
    d, m = moves.dimension, len(moves)
    k, v = d + 1, d + 2
    back = slice(m - count, m)
    birth = moves.first_born()[:-1][back][::-1].copy()
    kind = (v - moves.kind.astype(np.int64))[back][::-1].copy()
    new = moves.removed[back][::-1].copy()
    if moves.labels is not None:
        points = _points(state, moves)[back][::-1]
        # B first, then A: the place of A among the columns depends on the kind
        turn = (np.arange(v) + kind[:, None]) % v
        row = np.take_along_axis(points, turn, axis=1).ravel()
        mask = np.zeros(count, dtype=np.int64)
        layout = np.zeros((count, k), dtype=np.uint8)
        return Given(birth, mask, kind, row, new.ravel(), layout.ravel(), True)
    masks, layouts = [], []
    known: dict[tuple[int, int, bytes], tuple[int, list[int]]] = {}
    rows = zip(moves.kind[back], moves.corners[back], moves.layout[back], strict=True)
    for forward, corners, order in rows:
        key = (int(forward), int(corners), order.tobytes())
        if key not in known:
            known[key] = _inverse(d, int(forward), int(corners), order.tolist())
        masks.append(known[key][0])
        layouts.append(known[key][1])
    mask = np.array(masks[::-1], dtype=np.int64)
    layout = np.array(layouts[::-1], dtype=np.uint8).reshape(count, k)
    return Given(birth, mask, kind, np.empty(0, np.int64), new.ravel(), layout.ravel(), True)


def _inverse(d: int, kind: int, corners: int, order: list[int]) -> tuple[int, list[int]]:
    """Place of the inverse of a move, seen from its first new simplex, and the layouts it must make."""
    k, v = d + 1, d + 2
    tables = permutations_of(d)
    ball = [x for x in range(v) if not corners >> x & 1]  # names in B
    seen_from = next(a for a in range(k) if corners >> a & 1)
    corner_of = {y: y - (y > seen_from) for y in range(v) if y != seen_from} | {seen_from: k}
    mask = sum(1 << corner_of[x] for x in ball)
    layouts = [0] * k
    for x, rank in zip(ball, order, strict=False):
        image = tables.image[rank].tolist()
        images = [0] * k
        for y in range(v):
            if y != x:
                mine, omitted = corner_of[y], corner_of[x]
                images[mine - (mine > omitted)] = image[y - (y > x)]
        layouts[sorted(ball, key=corner_of.__getitem__).index(x)] = int(tables.rank(np.array(images)))
    return mask, layouts
