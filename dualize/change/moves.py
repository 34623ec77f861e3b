"""One bistellar (Pachner) move at a named place or at random, or the reason why it cannot be made."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations
from typing import Any

import numpy as np

from ..errors import InputError, TriangulationError
from ..kernels import moves as kernel
from ..triangulation import Triangulation
from .common import Changed, label_numbers, need_labels, new_label, number, rows_with, show, simplex_number
from .state import Given, State
from .walks import REASONS, changed, kinds_of_moves

__all__ = ["move", "places"]


def move(
    triangulation: Triangulation,
    kind: str,
    at: Sequence[Any] | None = None,
    *,
    simplex: int | None = None,
    corners: Sequence[int] | None = None,
    seed: int = 0,
    label: int | str | None = None,
) -> Changed:
    """Replace A * (boundary of B) by (boundary of A) * B: one bistellar move.

    Parameters
    ----------
    triangulation : Triangulation
        Labelled or a gluing table, closed or bounded; the boundary stays as it is.
    kind : str
        ``"1-5"``, ``"2-4"``, ``"3-3"``, ``"4-2"``, ``"5-1"`` in dimension 4, likewise ``"1-4"`` to ``"4-1"``
        in dimension 3 and ``"1-3"``, ``"2-2"``, ``"3-1"`` in dimension 2: simplices before and after.
    at : sequence of labels, optional
        The simplex A that goes: D + 2 - k labels of a move that replaces k simplices; its facets remain.
    simplex : int, optional
        Instead: the number of a simplex, and with it
    corners : sequence of int, optional
        which of its corners are A (all of them for 1-4 and 1-5).
    seed : int
        Without a place, the move is made at a random one, the same for the same seed.
    label : int or str, optional
        Label of the new point of 1-3, 1-4, 1-5; by default the number after the largest label, or ``new0``.

    Raises
    ------
    InputError
        If the place is not one.
    TriangulationError
        If the move cannot be made there (the simplex is on the boundary, lies in another number of simplices,
        or the new simplex is there already), or at random, if it can be made nowhere.

    References
    ----------
    U. Pachner, European J. Combin. 12 (1991) 129-145.

    Examples
    --------
    >>> t = Triangulation.from_facets([[0, 1, 2, 3], [1, 2, 3, 4]])
    >>> move(t, "2-3", [1, 2, 3]).triangulation.corners.tolist()
    [[0, 2, 3, 4], [0, 1, 3, 4], [0, 1, 2, 4]]
    """
    t = triangulation
    names = kinds_of_moves(t.dimension)
    if kind not in names:
        raise InputError(
            f"there is no move {kind!r} in dimension {t.dimension}", hint=f"moves: {', '.join(names)}"
        )
    before = names.index(kind) + 1
    if at is None and simplex is None:
        if label is not None:
            raise InputError(
                "a label is given for a move at random", hint="name the place, or leave the label out"
            )
        return _random(t, before, seed)
    if at is not None and simplex is not None:
        raise InputError("a place is given twice, by labels and by a simplex number", hint="give one of them")
    s, mask = _place(t, kind, before, at, simplex, corners)
    if t.corners is not None and t.matched:
        return _labelled(t, kind, before, s, mask, label)
    if label is not None:
        raise InputError("a gluing table has no labels, and one is given for the new point")
    state = State(t)
    k = t.dimension + 1
    row = np.empty(0, np.int64)
    if not state.given(_single(s, mask, before, row, k)):
        raise TriangulationError(f"the move {kind} cannot be made: {REASONS[state.reason]}", t.place(s))
    return changed(state)


def places(triangulation: Triangulation, kind: str) -> list[list]:
    """All places at which a move can be made, as labels of A (simplex number and corners in a gluing table).

    Looks at every face of every simplex; meant for complexes of up to some thousands of simplices.

    Examples
    --------
    >>> t = Triangulation.from_facets([[0, 1, 2, 3], [1, 2, 3, 4]])
    >>> places(t, "2-3")
    [[1, 2, 3]]
    """

    t = triangulation
    names = kinds_of_moves(t.dimension)
    if kind not in names:
        raise InputError(
            f"there is no move {kind!r} in dimension {t.dimension}", hint=f"moves: {', '.join(names)}"
        )
    before = names.index(kind) + 1
    size = t.dimension + 2 - before
    found: dict[tuple, list] = {}
    for s in range(len(t)):
        for chosen in combinations(range(t.dimension + 1), size):
            if t.corners is not None and t.matched:
                key = tuple(t.named(t.corners[s, list(chosen)]))
                if key in found:
                    continue
                place: list = list(key)
            else:
                place, key = [s, list(chosen)], (s, *chosen)
            try:
                move(t, kind, simplex=s, corners=chosen)
            except TriangulationError:
                continue
            found[key] = place
    return list(found.values())


def _random(t: Triangulation, before: int, seed: int) -> Changed:
    number(seed, "seed", 0)
    kind = kinds_of_moves(t.dimension)[before - 1]
    state = State(t, seed=seed)
    # some tries at random, and only if all fail a look at every place
    if not state.random([before], 1, 1000, len(t), 10 * len(t) + 100) and not state.sweep(before, 1):
        raise TriangulationError(
            f"the move {kind} can be made nowhere in this complex",
            f"{len(t)} simplices",
            "other moves may make room for it",
        )
    return changed(state)


def _single(s: int, mask: int, before: int, row: np.ndarray, k: int) -> Given:
    one, two, three = (np.array([x], dtype=np.int64) for x in (s, mask, before))
    return Given(one, two, three, row, np.empty(k, np.int64), np.empty(k, np.uint8), False)


def _place(
    t: Triangulation,
    kind: str,
    before: int,
    at: Sequence[Any] | None,
    simplex: int | None,
    corners: Sequence[int] | None,
) -> tuple[int, int]:
    """The place as a simplex and the corners of A in it, as bits."""
    d = t.dimension
    size = d + 2 - before
    what = f"the move {kind} replaces a simplex of {size} label{'s' if size > 1 else ''}"
    if at is not None:
        table = need_labels(t, "a place named by labels")
        labels = label_numbers(t, list(at))
        if len(labels) != size:
            raise InputError(f"{what}, and {len(labels)} are given", show(t, labels))
        rows = rows_with(table, labels)
        if not len(rows):
            raise InputError("these labels are no simplex of the complex", show(t, labels))
        s = int(rows[0])
        return s, int(sum(1 << c for c in range(d + 1) if table[s, c] in labels))
    s = simplex_number(t, simplex)
    if corners is None:
        if size != d + 1:
            raise InputError(
                f"{what}: say which corners of simplex {s} are meant", hint="corners are numbered from 0"
            )
        corners = range(d + 1)
    chosen = [number(c, "corner", 0, d) for c in corners]
    if len(set(chosen)) != size:
        raise InputError(f"{what}, and the corners {chosen} are given")
    return s, sum(1 << c for c in chosen)


def _labelled(
    t: Triangulation, kind: str, before: int, s: int, mask: int, label: int | str | None
) -> Changed:
    table = need_labels(t, "a move")
    k = t.dimension + 1
    a = [int(table[s, c]) for c in range(k) if mask >> c & 1]
    star = rows_with(table, a)
    where = f"{show(t, a)} of simplices {', '.join(map(str, star[:10].tolist()))}"
    inside = np.isin(table[star], a)
    if (t.across[star][~inside] < 0).any():
        raise TriangulationError(
            f"the move {kind} cannot be made: the simplex to replace is on the boundary",
            where,
            "glue a simplex on, or take one off, to move the boundary",
        )
    if len(star) != before:
        raise TriangulationError(
            f"the move {kind} cannot be made: it replaces {before} simplices, and here are {len(star)}", where
        )
    b = sorted(set(table[star].ravel().tolist()) - set(a))
    new: tuple = ()
    if before == 1:
        if label is not None:
            new = (new_label(t, label),)
    else:
        if len(b) != before:
            raise TriangulationError(
                f"the move {kind} cannot be made: "
                f"the complex is no manifold there, for {len(b)} further corners lie around, not {before}",
                where,
            )
        if len(there := rows_with(table, b)):
            raise TriangulationError(
                f"the move {kind} cannot be made: the new simplex exists already",
                f"{show(t, b)} in simplex {there[0]}",
            )
    state = State(t, labels=new, look=False)
    numbers = state.point_numbers()
    words = t.named(np.array(a + b)) if before > 1 else t.named(np.array(a))
    row = [numbers[x] for x in words]
    if before == 1:
        row.append(numbers[new[0]] if new else int(state.state[kernel.NEXT_POINT]))
        if not new:
            state.state[kernel.NEXT_POINT] += 1
    if not state.given(_single(s, mask, before, np.array(row, dtype=np.int64), k)):
        raise TriangulationError(f"the move {kind} cannot be made: {REASONS[state.reason]}", where)
    return changed(state)
