"""What the recipes share: complexes as lists of labels, new labels, orientation, and the smallest factors.

A recipe that works on complexes takes a `Triangulation` or, since a triangulation has at least dimension 2,
for factors of lower dimension a plain array of labels, shape (N, d + 1), d = 0 or 1: see `points`, `interval`
and `circle`.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from itertools import combinations
from typing import NamedTuple

import numpy as np

from ..errors import InputError, LimitError
from ..kernels import engine
from ..kernels.orient import spread_orientation
from ..kernels.permutations import permutations_of
from ..memory import available_memory
from ..triangulation import Coordinates, Triangulation

__all__ = ["Complex", "circle", "interval", "points"]

Complex = Triangulation | np.ndarray


# -- factors of dimension 0 and 1 ------------------------------------------------------------------


def points(number: int) -> np.ndarray:
    """So many points, labels 0, 1, ...: a factor of a join.

    Parameters
    ----------
    number : int
        At least 1.

    Returns
    -------
    ndarray of int64, shape (number, 1)
    """
    at_least("number", number, 1)
    return np.arange(number, dtype=np.int64)[:, None]


def interval(segments: int = 1) -> np.ndarray:
    """A row of so many segments, labels 0, 1, ...: a factor of a product or a join.

    Parameters
    ----------
    segments : int
        At least 1.

    Returns
    -------
    ndarray of int64, shape (segments, 2)
    """
    at_least("segments", segments, 1)
    return np.arange(segments, dtype=np.int64)[:, None] + np.arange(2)


def circle(segments: int = 3) -> np.ndarray:
    """A ring of so many segments, labels 0, 1, ...: a factor of a product or a join.

    Parameters
    ----------
    segments : int
        At least 3.

    Returns
    -------
    ndarray of int64, shape (segments, 2)
    """
    at_least("segments", segments, 3)
    return interval(segments) % segments


# -- arguments -------------------------------------------------------------------------------------


def at_least(name: str, value: int, low: int, high: int | None = None) -> None:
    """Refuse a parameter out of its range."""
    if isinstance(value, bool) or not isinstance(value, int | np.integer):
        raise InputError(f"{name} is {value!r}, not an integer")
    if value < low or (high is not None and value > high):
        span = f"at least {low}" if high is None else f"between {low} and {high}"
        raise InputError(f"{name} is {value}", hint=f"{name} must be {span}")


def check_dimension(dimension: int, low: int = 2, high: int = 4, name: str = "dimension") -> None:
    """Refuse a dimension that a triangulation here cannot have."""
    at_least(name, dimension, low, high)


def check_room(simplices: int, dimension: int, axes: int = 0) -> None:
    """Refuse what does not fit into the memory of this machine, before work starts.

    `axes` is the number of axes of a chart of every simplex, 0 where there is none.
    """
    k = dimension + 1
    # labels, across, rank and written, and what matching facets takes besides (measured: 166 bytes in 4D)
    need = simplices * (k * (8 + 4 + 1) + 1 + k * 20 + k * axes * 8)
    there = available_memory()
    if (there is not None and need > there) or simplices >= 2**31:
        raise LimitError(
            f"{simplices} simplices need about {need / 2**30:.3g} GiB of memory",
            None if there is None else f"there are {there / 2**30:.3g} GiB",
            "make it smaller" + (", or leave out the coordinates" if axes else ""),
        )


class Labelled(NamedTuple):
    """A complex as lists of labels, ascending in each row; charts of coordinates follow them.

    `written` holds the sign with which each row was written.
    """

    facets: np.ndarray
    written: np.ndarray
    names: tuple[str, ...] | None
    coordinates: Coordinates | None

    @property
    def stride(self) -> int:
        """How far copies are apart: the labels of copy l are those of the complex plus l times this."""
        return int(self.facets.max()) + 1 - min(int(self.facets.min()), 0)


def labelled(complex_: Complex | Sequence[Sequence[int]], name: str = "the complex") -> Labelled:
    """The lists of labels of a complex, or the error that it has none."""
    if isinstance(complex_, Triangulation):
        if complex_.corners is None or not complex_.matched:
            raise InputError(
                f"{name} is a gluing table and not a labelled simplicial complex",
                hint="this recipe tells the corners apart by their labels; subdivide the gluing table first",
            )
        return Labelled(complex_.corners, complex_.written, complex_.corner_names, complex_.coordinates)
    facets = np.asarray(complex_)
    if facets.ndim != 2 or 0 in facets.shape or facets.dtype.kind not in "iu":
        raise InputError(f"{name} is no table of integer labels, shape (simplices, labels of each)")
    pairs = list(combinations(range(facets.shape[1]), 2))
    swaps = sum((facets[:, i] > facets[:, j] for i, j in pairs), np.zeros(len(facets), dtype=np.int64))
    facets = np.sort(facets.astype(np.int64), axis=1)
    if (twice := (facets[:, 1:] == facets[:, :-1]).any(axis=1)).any():
        s = int(np.flatnonzero(twice)[0])
        raise InputError(f"{name} repeats a label in a simplex", f"simplex {s}: {facets[s].tolist()}")
    return Labelled(facets, 1 - 2 * (swaps % 2), None, None)


def signed(rows: np.ndarray, signs: np.ndarray) -> np.ndarray:
    """A copy of `rows`, shape (N, K, ...), the first two entries exchanged where the sign is -1."""
    out = rows.copy()
    swap = np.flatnonzero(signs < 0)
    if rows.shape[1] > 1:
        out[swap, 0], out[swap, 1] = rows[swap, 1], rows[swap, 0]
    return out


def named(
    facets: np.ndarray, word: Callable[[int], str] | None, coordinates: Coordinates | None = None
) -> Triangulation:
    """The triangulation of these labels; with `word`, label ``x`` becomes the word ``word(x)``."""
    if word is None:
        return Triangulation.from_facets(facets, coordinates=coordinates)
    used, inverse = np.unique(facets, return_inverse=True)
    words = [word(x) for x in used.tolist()]
    order = sorted(range(len(words)), key=words.__getitem__)
    names = [words[i] for i in order]
    if twice := next((a for a, b in zip(names[1:], names[:-1], strict=True) if a == b), None):
        raise InputError(
            f"two corners would both be called {twice!r}", hint="rename the corners of the input"
        )
    position = np.empty(len(words), dtype=np.int64)
    position[order] = np.arange(len(words))
    if coordinates is not None and coordinates.point is not None:
        coordinates = coordinates._replace(point=coordinates.point[used[order]])
    return Triangulation.from_facets(
        position[inverse.reshape(facets.shape)], corner_names=names, coordinates=coordinates
    )


def orientations(t: Triangulation) -> np.ndarray:
    """+1 or -1 for every simplex, spread from the first of each component, int8, shape (N,)."""
    n, k = t.across.shape
    out = np.zeros(n, dtype=np.int8)
    component, queue = np.empty((2, n), dtype=t.across.dtype)
    sign = permutations_of(k - 1).sign
    flat = (t.across.ravel(), t.rank.ravel(), sign, t.written, out, component, queue)
    engine(n)(spread_orientation, *flat, tuple(range(k)))
    return out


def table(across: np.ndarray, images: np.ndarray, written: np.ndarray | None = None) -> Triangulation:
    """A gluing table from its carrying permutations, for tables that are right by construction.

    `images` is (N, K, K); rows of boundary slots are not read.  `written` are signs, +1 by default.
    """
    n, k = across.shape
    inner = across >= 0
    rank = permutations_of(k - 1).rank(np.where(inner[:, :, None], images, np.arange(k)))
    signs = np.ones(n, dtype=np.int8) if written is None else written.astype(np.int8)
    return Triangulation(across=_ids(across), rank=rank, written=signs)


def coloured(across: np.ndarray) -> Triangulation:
    """The coloured graph whose edge of colour c leads from vertex s to ``across[s, c]``, -1 for none."""
    n = len(across)
    rank = np.zeros(across.shape, dtype=np.uint8)  # the identity
    return Triangulation(across=_ids(across), rank=rank, written=np.ones(n, dtype=np.int8), coloured=True)


def _ids(across: np.ndarray) -> np.ndarray:
    return across.astype(np.int32 if len(across) < 2**31 else np.int64)
