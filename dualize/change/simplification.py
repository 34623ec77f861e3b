"""Bistellar simplification: moves that make a closed manifold small, and often show that it is a sphere."""

from __future__ import annotations

import numpy as np

from ..kernels import COMPILE_FROM, engine
from ..triangulation import Triangulation
from .common import Changed, number
from .state import State
from .walks import changed, replay

__all__ = ["simplify"]


def simplify(triangulation: Triangulation, *, seed: int = 0, budget: int = 100_000) -> Changed:
    """Make a triangulation small by bistellar moves: a schedule of shrinking, sideways and heating moves.

    Parameters
    ----------
    triangulation : Triangulation
        Labelled or a gluing table.  A boundary stays as it is.
    seed : int
        The result is the same for the same seed and budget.
    budget : int
        At most so many moves are made in the search; every shake counts as ten more.

    Returns
    -------
    Changed
        The smallest triangulation met; `moves` leads to it from the input, and can be replayed.  A closed
        complex with D + 2 simplices on D + 2 labels is the boundary of a simplex: then the input was a PL
        sphere, provably, for every move keeps the PL type.  Ending elsewhere proves nothing.

    Notes
    -----
    Whenever a move that takes simplices away can be made it is made, those that take away most first.  When
    none is left, moves 2-3 or 2-4 and then sideways moves (3-3, 2-2) at random places shake the complex, the
    more the longer nothing was gained.

    References
    ----------
    A. Björner, F. H. Lutz, Simplicial manifolds, bistellar flips and a 16-vertex triangulation of the
    Poincaré homology 3-sphere, Experiment. Math. 9 (2000) 275-289.

    Examples
    --------
    >>> from itertools import product
    >>> octahedron = Triangulation.from_facets(list(product([0, 1], [2, 3], [4, 5])))
    >>> len(simplify(octahedron).triangulation)
    4
    """
    t, d = triangulation, triangulation.dimension
    number(budget, "budget", 0)
    number(seed, "seed", 0)
    state = State(t, seed=seed, work=20 * len(t))  # about so many places in a sweep
    rng = np.random.default_rng(seed)
    shrinking = [kind for kind in range(d + 1, 0, -1) if 2 * kind > d + 2]
    sideways = [kind for kind in range(1, d + 2) if 2 * kind == d + 2]
    floor = d + 2 if (t.across >= 0).all() and t.corners is not None else 1
    best, best_at, made, calm, shakes = len(t), 0, 0, 0, 0
    while True:
        made += _shrink(state, shrinking, budget - made)
        if len(state) < best:
            best, best_at, calm = len(state), made, 0
        else:
            calm += 1
        if made + 10 * shakes >= budget or len(state) <= floor:
            break
        before = made
        shakes += 1
        # up first, then sideways, or the way down would only take back the way up
        heat = min(calm, 4 + len(state) // 8)
        made += _shake(state, [2], min(int(rng.integers(heat + 1)) + (not sideways), budget - made))
        made += _shake(state, sideways, min(1 + int(rng.integers(4 + len(state) // 2)), budget - made))
        if made == before:
            made += _shake(state, [1, 2], min(1, budget - made))
            if made == before:
                break
        if made > 200:
            state.run = engine(COMPILE_FROM)  # more is to come: compiled kernels are worth their loading
    result = changed(state)
    assert result.moves is not None
    if best_at == len(result.moves):
        return result
    return replay(t, result.moves.upto(best_at))


def _shrink(state: State, kinds: list[int], budget: int) -> int:
    """Moves of these kinds, the first ones first, until none can be made."""
    made = 0
    step = 1
    while step and made < budget:
        step = 0
        for kind in kinds:
            step += state.sweep(kind, budget - made - step)
        made += step
    return made


def _shake(state: State, kinds: list[int], want: int) -> int:
    return (
        state.random(kinds, want, 50 * want + 10 * len(state), len(state), 2**31) if want > 0 and kinds else 0
    )
