"""Random walks of bistellar moves, their replay, and their undoing."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from ..errors import InputError, TriangulationError
from ..kernels import moves as kernel
from ..triangulation import Triangulation
from .charts import moved_coordinates, rows_in_order
from .common import Changed, new_labels_of, number, with_fields
from .given import backward, forward
from .record import Moves
from .state import Given, State

__all__ = ["kinds_of_moves", "replay", "undo", "walk", "walk_states"]

# Places looked at for each move that is wanted, before a walk is called stuck.
PATIENCE = 20_000


def kinds_of_moves(dimension: int) -> list[str]:
    """The names of the bistellar moves: ``1-5``, ``2-4``, ``3-3``, ``4-2``, ``5-1`` for dimension 4."""
    return [f"{kind}-{dimension + 2 - kind}" for kind in range(1, dimension + 2)]


def walk(
    triangulation: Triangulation,
    moves: int,
    *,
    seed: int = 0,
    target: int | None = None,
    spread: int | None = None,
    kinds: Sequence[str] | None = None,
) -> Changed:
    """A random walk of bistellar moves, which keeps the manifold and the boundary and changes the rest.

    Parameters
    ----------
    triangulation : Triangulation
        Labelled or a gluing table; closed or bounded.  The boundary stays as it is.
    moves : int
        How many moves to make.
    seed : int
        The walk is the same for the same seed.
    target : int, optional
        Number of simplices to which the walk is drawn; by default the present one.
    spread : int, optional
        Within this distance of `target` moves of all kinds are free; outside, those that lead further away
        are taken once in 16 times, in 256 at twice the distance, and so on.  By default a quarter of
        `target`, at least 2 D.
    kinds : sequence of str, optional
        The kinds of moves, all by default; one that is given twice is tried twice as often.

    Returns
    -------
    Changed
        `moves` is the record; `refined_from` the number of the simplex in the input, -1 for new ones.

    Raises
    ------
    InputError
        If the arguments are out of range.
    TriangulationError
        If the walk gets stuck: no move found at many places in a row.

    Notes
    -----
    Each step draws a kind, a simplex and a face of it, all uniformly, and makes the move if it can be made.
    No claim is made that the walk samples triangulations with known weights.  A few microseconds a move,
    whatever the size.

    References
    ----------
    U. Pachner, P.L. homeomorphic manifolds are equivalent by elementary shellings, European J. Combin. 12
    (1991) 129-145: two closed combinatorial manifolds are PL homeomorphic exactly if such moves connect them.

    Examples
    --------
    >>> from itertools import combinations
    >>> sphere = Triangulation.from_facets(list(combinations(range(6), 5)))
    >>> walk(sphere, 100, seed=1, target=60).moves
    <Moves 4D: 100 moves (...)>
    """
    *_, last = walk_states(
        triangulation, moves, every=max(1, moves), seed=seed, target=target, spread=spread, kinds=kinds
    )
    return last


def walk_states(
    triangulation: Triangulation,
    moves: int,
    *,
    every: int = 1,
    seed: int = 0,
    target: int | None = None,
    spread: int | None = None,
    kinds: Sequence[str] | None = None,
) -> Iterator[Changed]:
    """The states of a `walk`: the first after `every` moves, and so on; the last after all of them.

    The moves are those of `walk` with the same arguments.  Each state costs time in proportion to its size,
    and its record holds all moves from the start.
    """
    t = triangulation
    number(moves, "moves", 0)
    number(every, "every", 1)
    number(seed, "seed", 0)
    d = t.dimension
    goal = len(t) if target is None else number(target, "target", 1)
    free = max(2 * d, goal // 4) if spread is None else number(spread, "spread", 0)
    lottery = _kinds(d, kinds)
    state = State(t, work=moves, seed=seed)
    made = 0
    while True:
        want = min(every, moves - made)
        done = state.random(lottery, want, PATIENCE * want + 100 * len(state), goal, free)
        made += done
        if done < want:
            raise TriangulationError(
                f"the walk is stuck after {made} of {moves} moves: no further one was found",
                f"{len(state)} simplices; kinds {', '.join(sorted(set(kinds or kinds_of_moves(d))))}",
                "allow more kinds of moves, or a target that can be reached",
            )
        yield changed(state)
        if made >= moves:
            return


def replay(triangulation: Triangulation, moves: Moves) -> Changed:
    """Make the moves of a record on the triangulation from which it started.

    Raises
    ------
    TriangulationError
        If a move cannot be made: the record belongs to another triangulation.
    """
    _check(triangulation, moves, len(moves.written))
    state = State(triangulation, work=len(moves), labels=_names(moves))
    return _given(state, moves, forward(state, moves))


def undo(triangulation: Triangulation, moves: Moves, count: int | None = None) -> Changed:
    """Take back the last `count` moves of a record, all by default, from the triangulation they led to.

    When all are taken back the input of the moves is restored exactly: its simplices in their order, their
    labels and signs, and its coordinates.

    Raises
    ------
    TriangulationError
        If a move cannot be undone: the record belongs to another triangulation.
    """
    count = len(moves) if count is None else number(count, "count", 0, len(moves))
    _check(triangulation, moves, len(moves.alive()))
    state = State(triangulation, work=count, past=moves, labels=_names(moves))
    result = _given(state, moves, backward(state, moves, count))
    t = result.triangulation
    if count == len(moves):
        t = with_fields(t, coordinates=moves.coordinates)
        if moves.names is not None and t.corner_names != moves.names:
            t = _renamed(t, moves.names)
    return Changed(t, result.refined_from, result.new_labels, result.notes)


def changed(state: State) -> Changed:
    """The result of the moves that a state has made."""
    t = state.t
    moves = state.moves()
    coordinates, notes = moved_coordinates(t, moves)
    result = state.triangulation()
    if coordinates is not None:
        result = with_fields(result, coordinates=rows_in_order(result, moves, coordinates))
    births = state.births()
    return Changed(
        result,
        np.where(births < len(t), births, -1),
        new_labels_of(t, result),
        notes,
        moves,
    )


# -- coordinates -----------------------------------------------------------------------------------


def _renamed(t: Triangulation, names: tuple[str, ...]) -> Triangulation:
    """`t` with its words as positions in `names`, which holds them all in order."""
    assert t.corner_names is not None and t.corners is not None
    place = {word: x for x, word in enumerate(names)}
    if any(word not in place for word in t.corner_names):
        return t
    position = np.array([place[word] for word in t.corner_names], dtype=np.int64)
    return with_fields(t, corners=position[t.corners], corner_names=names)


# -- places of a record ----------------------------------------------------------------------------


def _kinds(dimension: int, kinds: Sequence[str] | None) -> list[int]:
    names = kinds_of_moves(dimension)
    chosen = names if kinds is None else list(kinds)
    for kind in chosen:
        if kind not in names:
            raise InputError(
                f"there is no move {kind!r} in dimension {dimension}", hint=f"moves: {', '.join(names)}"
            )
    if not chosen:
        raise InputError("a walk needs at least one kind of move", hint=f"moves: {', '.join(names)}")
    return [names.index(kind) + 1 for kind in chosen]


def _check(t: Triangulation, moves: Moves, simplices: int) -> None:
    labelled = t.corners is not None and t.matched
    if moves.dimension != t.dimension or simplices != len(t) or labelled != (moves.labels is not None):
        kind = "labelled" if moves.labels is not None else "unlabelled"
        raise TriangulationError(
            "the record of moves belongs to another triangulation",
            f"it is about {simplices} {kind} simplices of dimension {moves.dimension}, and this is {t!r}",
        )
    if (t.corner_names is not None) != (moves.words is not None) and moves.labels is not None:
        raise TriangulationError(
            "the record of moves belongs to another triangulation", "words in one, numbers in the other"
        )


def _names(moves: Moves) -> tuple:
    if moves.labels is None:
        return ()
    if moves.words is not None:
        return moves.words
    return tuple(np.unique(moves.labels).tolist())


def _given(state: State, moves: Moves, places: Given) -> Changed:
    made = state.given(places)
    if made < len(places.kind):
        raise TriangulationError(
            f"move {made} of the record cannot be made here: {REASONS[state.reason]}",
            hint="the record belongs to another triangulation, or simplices were put in another order",
        )
    return changed(state)


REASONS = {
    kernel.BOUNDARY: "the simplex to replace is on the boundary",
    kernel.DEGREE: "the simplices around the one to replace are not as many as the move needs",
    kernel.EXISTS: "the new simplex exists already",
    kernel.PINCHED: "the simplices around the one to replace are in several pieces: no manifold",
    kernel.UNKNOWN: "it names a simplex that is not there",
}
