"""Products by staircases: slabs, products of two complexes, mapping tori.

The product of two ordered simplices is cut into one simplex for every staircase from their first corners to
their last ones.  All the simplices of the product order their corners like the factors, so that neighbours
fit.
"""

from __future__ import annotations

from collections.abc import Mapping
from itertools import combinations

import numpy as np

from ..errors import InputError
from ..kernels.permutations import permutations_of
from ..triangulation import Coordinates, Triangulation
from .joins import fits
from .parts import Complex, Labelled, at_least, check_room, labelled, named, signed, table

__all__ = ["mapping_torus", "product", "slab"]


def product(first: Complex, second: Complex) -> Triangulation:
    """The product of two complexes, with the corners that pairs of theirs make and no others.

    Parameters
    ----------
    first, second : Triangulation or array_like
        Labelled; arrays of labels where the dimension is below 2 (`circle`, `interval`).  The dimensions add
        up to 2, 3 or 4.

    Returns
    -------
    Triangulation
        Corner (x, y) has the label ``x * n + y`` with n one more than the largest label of `second` (the
        words ``x,y``).  Where both have one chart for all, or none has a place, coordinates are put one after
        the other.

    References
    ----------
    S. Eilenberg, N. Steenrod, Foundations of Algebraic Topology (1952), chapter II, section 8 (from memory).

    Examples
    --------
    >>> from dualize.make import circle, simplex_boundary
    >>> product(simplex_boundary(3), circle(3))
    <Triangulation 4D: 60 simplices, labelled, 0 boundary facets>
    """
    a, b = labelled(first, "the first complex"), labelled(second, "the second complex")
    d, e = a.facets.shape[1] - 1, b.facets.shape[1] - 1
    fits(d + e, "product", "the dimensions of the factors are added")
    for part, which in ((a, "first"), (b, "second")):
        if int(part.facets.min()) < 0:
            raise InputError(f"the {which} complex has a negative label", hint="number its corners from 0")
    stairs = np.array([_stair(d, e, ups) for ups in combinations(range(d + e), e)])
    check_room(len(a.facets) * len(b.facets) * len(stairs), d + e)
    stride = b.stride
    left = a.facets[:, stairs[:, :, 0]][:, None]
    right = b.facets[:, stairs[:, :, 1]][None]
    facets = (left * stride + right).reshape(-1, d + e + 1)
    # a staircase is positive when its steps along the second factor can be brought behind the others evenly
    parity = [sum(step - place for place, step in enumerate(ups)) for ups in combinations(range(d + e), e)]
    turns = (-1) ** (d * e - np.array(parity))
    signs = a.written[:, None, None] * b.written[:, None] * turns
    word = None
    if a.names is not None or b.names is not None:
        one, two = (p.names or [str(x) for x in range(p.stride)] for p in (a, b))

        def word(x: int) -> str:
            return f"{one[x // stride]},{two[x % stride]}"

    coordinates = None
    x, y = (p.coordinates and p.coordinates.point for p in (a, b))
    if x is not None and y is not None:
        x, y = x[: a.stride], y[:stride]
        coordinates = Coordinates(np.hstack([np.repeat(x, stride, axis=0), np.tile(y, (len(x), 1))]))
    return named(signed(facets, signs.ravel()), word, coordinates)


def _stair(d: int, e: int, ups: tuple[int, ...]) -> list[tuple[int, int]]:
    place, out = [0, 0], [(0, 0)]
    for step in range(d + e):
        place[step in ups] += 1
        out.append((place[0], place[1]))
    return out


def slab(base: Complex, layers: int = 1) -> Triangulation:
    """The product of a complex with an interval, in so many layers: M x [0, 1] for transition amplitudes.

    Each layer cuts the prism over a simplex into D + 1 simplices (D the dimension of the slab's simplices,
    less one); simplex j of a prism has the bottom corners 0 to j and the top corners from j on.

    Parameters
    ----------
    base : Triangulation or array_like
        Of dimension 2 or 3 (an array: 1), closed or bounded; labelled, or a gluing table whose gluings keep
        the order of the shared corners.
    layers : int
        At least 1.

    Returns
    -------
    Triangulation
        In a labelled slab the corner x of level l = 0 .. layers has the label ``x + l * n``, n one more than
        the largest label of `base` (the word ``x``, above the bottom ``x.l``): both ends have the labels of
        the base, up to that shift.  The level is the first axis of the orientation, so that the top has the
        orientation of the base as written, and the bottom the opposite one.  Coordinates, where the base has
        some, get the level as one more axis, the last.

    Raises
    ------
    InputError
        If a gluing of a table does not keep the order of the shared corners.

    Examples
    --------
    >>> from dualize.make import simplex_boundary
    >>> slab(simplex_boundary(3))
    <Triangulation 4D: 20 simplices, labelled, 10 boundary facets>
    """
    at_least("layers", layers, 1)
    if isinstance(base, Triangulation) and (base.corners is None or not base.matched):
        fits(base.dimension + 1, "slab", "the base has one dimension less than the slab")
        check_room(len(base) * (base.dimension + 1) * layers, base.dimension + 1)
        return _slab_of_table(base, layers)
    part = labelled(base)
    k = part.facets.shape[1]
    fits(k, "slab", "the base has one dimension less than the slab")
    check_room(len(part.facets) * k * layers, k)
    corner, level = _prism(k)
    signs = _prism_signs(part.written, k, layers)
    n = part.stride
    bottom = part.facets[:, corner] + level * n
    facets = bottom[None] + (n * np.arange(layers))[:, None, None, None]
    word = None
    if (names := part.names) is not None:

        def word(x: int) -> str:
            return names[x % n] + (f".{x // n}" if x >= n else "")

    coordinates = _raised(part, layers)
    if coordinates is not None and coordinates.corner is not None:
        coordinates = coordinates._replace(corner=signed(coordinates.corner, signs))
    return named(signed(facets.reshape(-1, k + 1), signs), word, coordinates)


def _prism(k: int) -> tuple[np.ndarray, np.ndarray]:
    """Base corner and level (0, 1) of every corner of the k simplices over one simplex, shape (k, k + 1)."""
    corner = np.array([[*range(j + 1), *range(j, k)] for j in range(k)])
    level = np.array([[0] * (j + 1) + [1] * (k - j) for j in range(k)])
    return corner, level


def _prism_signs(written: np.ndarray, k: int, layers: int) -> np.ndarray:
    """Signs of the ascending simplices of a slab, of which the level is the first axis."""
    return np.tile(np.outer(written, (-1) ** np.arange(k)).ravel(), layers)


def _raised(part: Labelled, layers: int) -> Coordinates | None:
    """The coordinates of a slab, with the level as one more axis."""
    if part.coordinates is None:
        return None
    point, chart, period = part.coordinates
    if point is not None:
        rows = np.zeros((part.stride, point.shape[1]))
        rows[: min(len(rows), len(point))] = point[: len(rows)]
        point = np.vstack([np.hstack([rows, np.full((len(rows), 1), float(h))]) for h in range(layers + 1)])
    if chart is not None:
        corner, level = _prism(part.facets.shape[1])
        base = chart[:, corner]
        height = np.broadcast_to(level[None, :, :, None], (*base.shape[:3], 1))
        levels = [np.concatenate([base, height + float(h)], axis=3) for h in range(layers)]
        chart = np.concatenate(levels).reshape(-1, corner.shape[1], base.shape[3] + 1)
    return Coordinates(point, chart, None if period is None else np.append(period, 0.0))


def _slab_of_table(base: Triangulation, layers: int) -> Triangulation:
    n, k = base.across.shape
    tables = permutations_of(k - 1)
    inner = base.across >= 0
    there = np.where(inner, tables.image[base.rank, np.arange(k)], 0).astype(np.int64)
    wrong = inner & (base.rank != tables.keeping[np.arange(k), there])
    if wrong.any():
        s, i = np.argwhere(wrong)[0].tolist()
        raise InputError(
            "a gluing does not keep the order of the shared corners, so staircases do not fit there",
            f"simplex {s}, slot {i}: carry {base.carry[s, i].tolist()}",
            "subdivide the gluing table first: its barycentric subdivision keeps the order",
        )
    carry = base.carry.astype(np.int64)
    # simplex (l, s, j): position c <= j is the bottom corner c, position c > j the top corner c - 1
    across = np.full((layers, n, k, k + 1), -1, dtype=np.int64)
    image = np.zeros((layers, n, k, k + 1, k + 1), dtype=np.int64)
    row = (np.arange(layers) * n)[:, None]
    keep = np.arange(k + 1)
    for j in range(k):
        if j > 0:
            across[:, :, j, j] = (row + np.arange(n)) * k + j - 1
            across[:, :, j - 1, j] = (row + np.arange(n)) * k + j
            image[:, :, j, j], image[:, :, j - 1, j] = keep, keep
        for i in range(k):
            if i == j:
                continue
            s = np.flatnonzero(inner[:, i])
            p = carry[s, i]
            slot = i if i < j else i + 1
            onto = p[:, [*range(j + 1), *range(j, k)]]
            # the corner left out stands above or below the one that is doubled, here and there
            onto[:, j + 1 :] += 1
            onto[:, slot] = p[:, i] + (p[:, i] > p[:, j])
            across[:, s, j, slot] = (row + base.across[s, i]) * k + p[:, j]
            image[:, s, j, slot] = onto
    up, down = np.roll(keep, 1), np.roll(keep, -1)
    across[:-1, :, 0, 0] = (row[1:] + np.arange(n)) * k + k - 1
    across[1:, :, k - 1, k] = (row[:-1] + np.arange(n)) * k
    # the top of the first simplex of a prism is the bottom of the last one of the next: one position down
    image[:, :, 0, 0] = up
    image[:, :, k - 1, k] = down
    signs = _prism_signs(base.written, k, layers)
    return table(across.reshape(-1, k + 1), image.reshape(-1, k + 1, k + 1), signs)


def mapping_torus(base: Triangulation, symmetry: Mapping[int, int], layers: int = 3) -> Triangulation:
    """The slab of a complex, its top glued to its bottom along a symmetry: a bundle over the circle.

    Parameters
    ----------
    base : Triangulation
        Labelled, of dimension 2 or 3.
    symmetry : mapping of int to int
        Where labels go; a label that is not mentioned stays.  It must carry every simplex to a simplex.
    layers : int
        At least 3, so that the result is a simplicial complex.

    Returns
    -------
    Triangulation
        Labels and signs as in `slab`; corner x of the top is corner ``symmetry[x]`` of the bottom.  No
        coordinates.

    Raises
    ------
    InputError
        If `symmetry` is no symmetry of `base`.
    """
    at_least("layers", layers, 3)
    part = labelled(base)
    k = part.facets.shape[1]
    fits(k, "mapping torus", "the base has one dimension less than the torus")
    n = part.stride
    if int(part.facets.min()) < 0:
        raise InputError("the complex has a negative label", hint="number its corners from 0")
    check_room(len(part.facets) * k * layers, k)
    image = np.arange(n)
    used = np.zeros(n, dtype=bool)
    used[part.facets] = True
    for x, y in symmetry.items():
        for label in (x, y):
            if not (0 <= label < n and used[label]):
                raise InputError(f"the symmetry moves {label}, which is no label of the complex")
        image[x] = y
    if len(np.unique(image[used])) != used.sum():
        raise InputError("the symmetry sends two labels to the same one")
    moved = np.sort(image[part.facets], axis=1)
    missing = ~_contained(moved, part.facets)
    if missing.any():
        s = int(np.flatnonzero(missing)[0])
        raise InputError(
            f"the symmetry sends a simplex to {moved[s].tolist()}, which is none",
            base.place(s),
            f"{int(missing.sum())} of {len(moved)} simplices are not carried to simplices",
        )
    corner, level = _prism(k)
    height = level + np.arange(layers)[:, None, None]
    rows = part.facets[:, corner][None]
    top = (height == layers)[:, None]
    facets = np.where(top, image[rows], rows + height[:, None] * n).reshape(-1, k + 1)
    word = None
    if (names := part.names) is not None:

        def word(x: int) -> str:
            return names[x % n] + (f".{x // n}" if x >= n else "")

    # rows as the prism orders them: the image of a row under the symmetry need not ascend
    return named(signed(facets, _prism_signs(part.written, k, layers)), word)


def _contained(rows: np.ndarray, among: np.ndarray) -> np.ndarray:
    """Which rows are rows of `among`."""
    _, number = np.unique(np.vstack([among, rows]), axis=0, return_inverse=True)
    number = number.ravel()
    return np.isin(number[len(among) :], number[: len(among)])
