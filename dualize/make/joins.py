"""Cones, suspensions, joins and connected sums."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np

from ..errors import InputError
from ..triangulation import Triangulation
from .parts import Complex, check_room, labelled, named, orientations, signed, table

__all__ = ["cone", "connected_sum", "join", "suspension"]


def cone(base: Complex) -> Triangulation:
    """The cone over a complex: one simplex for each of its simplices, and one new corner in all of them.

    Over a sphere it is a ball with that boundary; over another closed manifold it is a space with this
    boundary and one singular corner, as a no-boundary state asks for (the audit tells).  The new corner has
    the label ``largest + 1`` (the word ``tip``).

    Parameters
    ----------
    base : Triangulation or array_like
        Of dimension 2 or 3 (an array: 1), closed or bounded, labelled or a gluing table.

    Examples
    --------
    >>> from dualize.make import simplex_boundary
    >>> cone(simplex_boundary(3))
    <Triangulation 4D: 5 simplices, labelled, 5 boundary facets>
    """
    return _tips(base, 1)


def suspension(base: Complex) -> Triangulation:
    """Two cones over the same complex: the new corners are ``largest + 1`` and ``largest + 2``.

    Parameters
    ----------
    base : Triangulation or array_like
        Of dimension 2 or 3 (an array: 1), closed or bounded, labelled or a gluing table.  Over a sphere the
        result is a sphere, else both new corners are singular.
    """
    return _tips(base, 2)


def _tips(base: Complex, tips: int) -> Triangulation:
    if isinstance(base, Triangulation):
        if base.dimension == 4:
            raise InputError(
                "the complex is four-dimensional", hint="a cone over it would be five-dimensional"
            )
        check_room(len(base) * tips, base.dimension + 1)
        if base.corners is None or not base.matched:
            return _tips_of_table(base, tips)
    part = labelled(base)
    k = part.facets.shape[1]
    # row by row: a simplex with the first tip, then, of opposite sign, with the second
    facets = np.empty((len(part.facets), tips, k + 1), dtype=np.int64)
    facets[:, :, :-1] = part.facets[:, None]
    facets[:, :, -1] = part.facets.max() + 1 + np.arange(tips)
    signs = part.written[:, None] * np.array([1, -1])[:tips]
    word = None
    if part.names is not None:
        words = [*part.names, *(["tip"] if tips == 1 else ["tip.0", "tip.1"])]
        word = words.__getitem__
    return named(signed(facets.reshape(-1, k + 1), signs.ravel()), word)


def _tips_of_table(base: Triangulation, tips: int) -> Triangulation:
    n, k = base.across.shape
    copy = np.arange(tips)
    across = np.full((tips, n, k + 1), -1, dtype=np.int64)
    across[:, :, :k] = np.where(base.across < 0, -1, base.across + (copy * n)[:, None, None])
    image = np.empty((tips, n, k + 1, k + 1), dtype=np.int64)
    image[..., :k, :k] = base.carry
    image[..., k] = k
    image[..., k, :] = np.arange(k + 1)
    if tips == 2:
        across[0, :, k], across[1, :, k] = n + np.arange(n), np.arange(n)
    written = np.array([[1], [-1]])[:tips] * base.written
    return table(across.reshape(-1, k + 1), image.reshape(-1, k + 1, k + 1), written.ravel())


def join(first: Complex, second: Complex) -> Triangulation:
    """The join of two complexes: every simplex of one with every simplex of the other.

    The dimension is one more than the sum of both, so that at least one factor is an array: `points`,
    `interval` or `circle`.  The join of two circles is S3, of a circle and S2 it is S4.

    Parameters
    ----------
    first, second : Triangulation or array_like
        Labels of the second are shifted by ``largest + 1`` of the first; of words, ``.1`` is added to them.
    """
    a, b = labelled(first, "the first complex"), labelled(second, "the second complex")
    dimension = a.facets.shape[1] + b.facets.shape[1] - 1
    fits(dimension, "join", "a join has one dimension more than both together")
    check_room(len(a.facets) * len(b.facets), dimension)
    shift = a.stride - min(int(b.facets.min()), 0)
    left = np.repeat(a.facets, len(b.facets), axis=0)
    right = np.tile(b.facets + shift, (len(a.facets), 1))
    signs = np.outer(a.written, b.written).ravel()
    return named(signed(np.hstack([left, right]), signs), _two_names(a.names, b.names, shift))


def fits(dimension: int, what: str, hint: str) -> None:
    """Refuse a result whose dimension no triangulation here can have."""
    if not 2 <= dimension <= 4:
        raise InputError(
            f"the {what} would have the dimension {dimension}, and 2 to 4 are possible", hint=hint
        )


def _two_names(
    one: tuple[str, ...] | None, two: tuple[str, ...] | None, shift: int
) -> Callable[[int], str] | None:
    """The words of two complexes side by side, labels of the second shifted; None where both are numbers."""
    if one is None and two is None:
        return None

    def word(x: int) -> str:
        if x < shift:
            return str(x) if one is None else one[x]
        return (str(x - shift) if two is None else two[x - shift]) + ".1"

    return word


def connected_sum(
    first: Triangulation,
    second: Triangulation,
    *,
    reverse: bool = False,
    remove: Sequence[int] = (0, 0),
) -> Triangulation:
    """The connected sum: one simplex is taken out of each, and the spheres left behind are glued.

    The gluing reverses orientation, so that both orientations (that of the first simplex as written) extend
    over the sum; with `reverse` it is the sum with the second one's opposite, as in CP2 # -CP2.  In a
    component that is not orientable both are the same.

    Parameters
    ----------
    first, second : Triangulation
        Labelled, of the same dimension.
    reverse : bool
        Whether to reverse the orientation of the second.
    remove : pair of int
        The simplices to be taken out.

    Returns
    -------
    Triangulation
        The first one's labels stay; those of the second are shifted by ``largest + 1`` but for the corners of
        the simplex taken out, which become those of the first one's.  No coordinates.

    Raises
    ------
    InputError
        If the dimensions differ, one is not labelled, or there is no such simplex.
    """
    a, b = labelled(first, "the first complex"), labelled(second, "the second complex")
    if first.dimension != second.dimension:
        raise InputError(
            f"the complexes have the dimensions {first.dimension} and {second.dimension}",
            hint="a connected sum is of two complexes of the same dimension",
        )
    for t, s, which in ((first, remove[0], "first"), (second, remove[1], "second")):
        if not 0 <= s < len(t):
            raise InputError(
                f"the {which} complex has no simplex {s}", hint=f"it has {len(t)}, numbered from 0"
            )
    shift = a.stride - min(int(b.facets.min()), 0)
    here, there = a.facets[remove[0]], b.facets[remove[1]] + shift
    one, two = orientations(first), orientations(second)
    onto = here.copy()
    if (one[remove[0]] * two[remove[1]] > 0) != reverse:  # the map of the simplices must reverse orientation
        onto[:2] = here[1::-1]
    moved = b.facets + shift
    position = np.clip(np.searchsorted(there, moved), 0, len(there) - 1)
    moved = np.where(there[position] == moved, onto[position], moved)
    kept = np.delete(signed(a.facets, one), remove[0], axis=0)
    return named(np.vstack([kept, np.delete(moved, remove[1], axis=0)]), _two_names(a.names, b.names, shift))
