"""Boxes of cubes, cut into simplices: open, periodic, or closed up with a twist.

    variant          simplices per cube   how
    "paths"          2, 6, 24             the monotone paths from one corner of the cube to the opposite one
    "coned"          4, 12, 48            every side of the cube cut into paths, and coned from the centre
    "barycentric"    8, 48, 384           corner, middle of an edge, ..., centre of the cube

Corners have doubled integer coordinates in here, so that centres are integers too.  A periodic box is the
open one with its corners numbered by class; where periods are so small that simplices would share all their
labels, it comes out as a gluing table instead: the open box, its opposite sides glued.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import replace
from itertools import permutations, product
from typing import NamedTuple

import numpy as np

from ..errors import InputError
from ..kernels.permutations import permutations_of
from ..triangulation import Coordinates, Triangulation
from .parts import at_least, check_room

__all__ = ["AXES", "VARIANTS", "lattice"]

AXES = "xyzt"
VARIANTS = ("paths", "coned", "barycentric")
CHUNK = 1 << 18  # simplices worked on at a time


def lattice(
    *sizes: int,
    periodic: str = "",
    twist: str | None = None,
    variant: str = "paths",
    coordinates: bool = True,
) -> Triangulation:
    """A box of ``sizes[0] x sizes[1] x ...`` unit cubes cut into simplices.

    Parameters
    ----------
    *sizes : int
        Cubes along x, y, z, t: two, three or four numbers, each at least 1.
    periodic : str
        The periodic directions, such as ``"xy"``.
    twist : str, optional
        One periodic direction and what happens to the others at its seam: with ``"t=yzx"`` the corner
        (x, y, z) at the end of t is the corner (y, z, x) at its start, with ``"t=-x-y-z"`` all are reversed.
        The barycentric variant takes any signs, the others all signs alike: a reflection of a single axis
        does not keep their triangulation of the seam.
    variant : {"paths", "coned", "barycentric"}
    coordinates : bool
        One chart for all where nothing is periodic; else one chart per simplex and the periods (0 along a
        twisted direction, where no translation brings a point back).

    Returns
    -------
    Triangulation
        A labelled complex where every period is at least 3 (2 for ``"barycentric"``), else a gluing table.
        Simplices are in order of cubes, the last axis running fastest, and positive as they are written.

    Raises
    ------
    InputError
        If a parameter is out of its range, or a twist does not fit the box.
    LimitError
        If the result does not fit into the memory of this machine.

    Notes
    -----
    Time and memory in proportion to the number of simplices; little is held besides the result.

    References
    ----------
    H. Freudenthal, Simplizialzerlegungen von beschraenkter Flachheit, Ann. of Math. 43 (1942) 580-582;
    H. W. Kuhn, Some combinatorial lemmas in topology, IBM J. Res. Dev. 4 (1960) 518-524 (from memory).

    Examples
    --------
    >>> lattice(3, 3, 3, 3, periodic="xyzt")
    <Triangulation 4D: 1944 simplices, labelled, 0 boundary facets>
    """
    box = _box(sizes, periodic, twist, variant)
    template = _template(variant, len(sizes))
    cubes = int(np.prod(sizes, dtype=object))
    charts = coordinates and bool(periodic)
    check_room(cubes * len(template), len(sizes), len(sizes) if charts else 0)
    numbering = _Numbering(box)
    least = 2 if variant == "barycentric" else 3
    if all(n >= least for n, seam in zip(sizes, box.seams, strict=True) if seam is not None):
        classes = numbering.classes()
        t = Triangulation.from_facets(_facets(box, template, numbering, classes))
    else:
        classes = None
        t = _closed_up(Triangulation.from_facets(_facets(box, template, numbering, None)), numbering)
    if charts:
        # charts are made last, in the order of the sorted corners, so that they are held only once
        chart = _charts(box, template, numbering, classes)
        period = [
            0.0 if seam is None or seam.twisted else float(n)
            for n, seam in zip(sizes, box.seams, strict=True)
        ]
        t = replace(t, coordinates=Coordinates(corner=chart, period=np.array(period)))
    elif coordinates:
        t = replace(t, coordinates=Coordinates(point=numbering.positions() / 2))
    return t


# -- the box ---------------------------------------------------------------------------------------


class _Seam(NamedTuple):
    """At the end of an axis, the new coordinate `b` is ``sign[b]`` times the one of axis ``source[b]``."""

    source: tuple[int, ...]
    sign: tuple[int, ...]

    @property
    def twisted(self) -> bool:
        return self.source != tuple(range(len(self.source))) or -1 in self.sign


class _Box(NamedTuple):
    sizes: tuple[int, ...]
    seams: tuple[_Seam | None, ...]  # None for an open axis
    variant: str


def _box(sizes: tuple[int, ...], periodic: str, twist: str | None, variant: str) -> _Box:
    d = len(sizes)
    if d not in (2, 3, 4):
        raise InputError(
            f"the box has {d} sizes", hint="give the cubes along x, y, z and t: two to four numbers"
        )
    for axis, n in zip(AXES, sizes, strict=False):
        at_least(f"the size along {axis}", n, 1)
    axes = AXES[:d]
    if wrong := sorted(set(periodic) - set(axes)):
        raise InputError(
            f"there is no direction {wrong[0]!r}", hint=f"periodic directions are letters of {axes}"
        )
    if variant not in VARIANTS:
        raise InputError(f"there is no variant {variant!r}", hint="variants: " + ", ".join(VARIANTS))
    plain = _Seam(tuple(range(d)), (1,) * d)
    seams = [plain if axis in periodic else None for axis in axes]
    if twist is not None:
        a, seam = _parse_twist(twist, axes)
        if seams[a] is None:
            raise InputError(
                f"the twist {twist!r} is at the seam of an open direction", hint=f"make {axes[a]} periodic"
            )
        for b in range(d):
            c = seam.source[b]
            if sizes[b] != sizes[c] or (seams[b] is None) != (seams[c] is None):
                raise InputError(
                    f"the twist {twist!r} exchanges {axes[c]} and {axes[b]}, which are not alike",
                    f"sizes {sizes[c]} and {sizes[b]}",
                    "axes that are exchanged need the same size, and both open or both periodic",
                )
        signs = {s for b, s in enumerate(seam.sign) if b != a}
        if len(signs) > 1 and variant != "barycentric":
            raise InputError(
                f"the twist {twist!r} reverses some of the other directions and not all",
                hint="that does not keep this triangulation of the seam: take the variant barycentric",
            )
        seams[a] = seam
    return _Box(tuple(map(int, sizes)), tuple(seams), variant)


def _parse_twist(twist: str, axes: str) -> tuple[int, _Seam]:
    hint = f"write it as AXIS=IMAGES, say {axes[-1]}={axes[:-1][::-1]} or {axes[-1]}=" + "".join(
        f"-{x}" for x in axes[:-1]
    )
    match = re.fullmatch(rf"([{axes}])=((?:[+-]?[{axes}]){{{len(axes) - 1}}})", twist.replace(" ", ""))
    if not match:
        raise InputError(f"the twist {twist!r} cannot be read", hint=hint)
    a = axes.index(match[1])
    images = re.findall(rf"([+-]?)([{axes}])", match[2])
    others = [b for b in range(len(axes)) if b != a]
    if sorted(axes.index(x) for _, x in images) != others:
        raise InputError(f"the twist {twist!r} is no permutation of the other directions", hint=hint)
    source, sign = list(range(len(axes))), [1] * len(axes)
    for b, (minus, x) in zip(others, images, strict=True):
        source[b], sign[b] = axes.index(x), -1 if minus == "-" else 1
    return a, _Seam(tuple(source), tuple(sign))


def _template(variant: str, d: int) -> np.ndarray:
    """The simplices of one cube in doubled coordinates, each positively oriented, shape (T, d + 1, d)."""
    rows = []
    if variant == "paths":
        rows = [_path(order, [0] * d, 2) for order in permutations(range(d))]
    elif variant == "coned":
        for a, side in product(range(d), (0, 2)):
            start = [side if b == a else 0 for b in range(d)]
            rows += [
                [*_path(order, start, 2), [1] * d] for order in permutations(b for b in range(d) if b != a)
            ]
    else:
        for corner in product((0, 2), repeat=d):
            rows += [_path(order, list(corner), None) for order in permutations(range(d))]
    out = np.array(rows, dtype=np.int64)
    negative = np.linalg.det((out[:, 1:] - out[:, :1]).astype(float)) < 0
    out[negative, :2] = out[negative, 1::-1]
    return out


def _path(order: tuple[int, ...], start: list[int], step: int | None) -> list[list[int]]:
    """Corners from `start` on, axis by axis raised by `step` or, None, brought to the middle, 1."""
    point, out = list(start), [list(start)]
    for axis in order:
        point[axis] = 1 if step is None else point[axis] + step
        out.append(list(point))
    return out


# -- corners by number -----------------------------------------------------------------------------


class _Numbering:
    """Numbers of the corners of the open box, and of their classes under the seams.

    The number is ``weights @ position`` over a grid of step 2 (of step 1 in the barycentric variant); the
    coned variant numbers the centres of the cubes after the grid.
    """

    def __init__(self, box: _Box) -> None:
        self.box = box
        self.d = len(box.sizes)
        self.sizes = np.array(box.sizes, dtype=np.int64)
        self.step = 1 if box.variant == "barycentric" else 2
        self.sides = self.sizes * (2 // self.step) + 1
        self.weights = _weights(self.sides)
        self.cube_weights = _weights(self.sizes)
        self.grid = int(self.sides.prod())
        self.centres = int(self.sizes.prod()) if box.variant == "coned" else 0

    def __len__(self) -> int:
        return self.grid + self.centres

    def offsets(self, template: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """`start`, `weight` and `own`: a corner has the number ``start + weight * base + own * cube``.

        `base` is the number of the cube's first corner and `cube` that of the cube; centres have no weight.
        """
        centre = (template == 1).all(axis=2) if self.centres else np.zeros(template.shape[:2], dtype=bool)
        start = np.where(centre, self.grid, template // self.step @ self.weights)
        return start, np.where(centre, 0, 1), np.where(centre, 1, 0)

    def positions(self) -> np.ndarray:
        """Doubled coordinates of every number, shape (numbers, d)."""
        out = np.empty((len(self), self.d), dtype=np.int64)
        out[: self.grid] = self.unravel(np.arange(self.grid))
        if self.centres:
            out[self.grid :] = 2 * (np.arange(self.centres)[:, None] // self.cube_weights % self.sizes) + 1
        return out

    def unravel(self, number: np.ndarray) -> np.ndarray:
        """Doubled coordinates of grid corners, shape (..., d)."""
        return number[..., None] // self.weights % self.sides * self.step

    def across(self, axis: int, position: np.ndarray) -> np.ndarray:
        """Where a corner at the end of an axis is at its start, in doubled coordinates."""
        seam = self.box.seams[axis]
        assert seam is not None
        out = np.empty_like(position)
        for b in range(self.d):
            x = position[..., seam.source[b]]
            out[..., b] = x if seam.sign[b] > 0 else 2 * self.sizes[b] - x
        out[..., axis] = 0
        return out

    def classes(self) -> np.ndarray:
        """The label of every number, int64: periodic corners that are the same have the same."""
        position = self.unravel(np.arange(self.grid))
        # the twisted seam first: what it permutes is brought into its period afterwards
        axes = [a for a, seam in enumerate(self.box.seams) if seam is not None]
        for a in sorted(axes, key=lambda a: not self.box.seams[a].twisted):  # type: ignore[union-attr]
            end = position[:, a] == 2 * self.sizes[a]
            position[end] = self.across(a, position[end])
        sides = self.sides - np.array([seam is not None for seam in self.box.seams])
        labels = position // self.step @ _weights(sides)
        count = int(sides.prod())
        return np.concatenate([labels, count + np.arange(self.centres)])


def _weights(sides: np.ndarray) -> np.ndarray:
    return np.array([int(np.prod(sides[a + 1 :])) for a in range(len(sides))], dtype=np.int64)


def _chunks(
    box: _Box, template: np.ndarray, numbering: _Numbering
) -> Iterator[tuple[slice, np.ndarray, np.ndarray]]:
    """Ranges of simplices with their cubes (m, d) and the numbers of their corners (m, T, d + 1)."""
    cubes = int(numbering.sizes.prod())
    start, weight, own = numbering.offsets(template)
    size = max(1, CHUNK // len(template))
    for low in range(0, cubes, size):
        number = np.arange(low, min(low + size, cubes))
        cube = number[:, None] // numbering.cube_weights % numbering.sizes
        base = cube * (2 // numbering.step) @ numbering.weights
        corners = start + base[:, None, None] * weight + number[:, None, None] * own
        yield slice(low * len(template), (low + len(number)) * len(template)), cube, corners


def _facets(box: _Box, template: np.ndarray, numbering: _Numbering, classes: np.ndarray | None) -> np.ndarray:
    """Labels of all simplices as they are written, int64."""
    out = np.empty((int(numbering.sizes.prod()) * len(template), template.shape[1]), dtype=np.int64)
    for place, _, corners in _chunks(box, template, numbering):
        flat = corners.reshape(-1, template.shape[1])
        out[place] = flat if classes is None else classes[flat]
    return out


def _charts(box: _Box, template: np.ndarray, numbering: _Numbering, classes: np.ndarray | None) -> np.ndarray:
    """Where the corners of every simplex lie, in the order of their labels, float64."""
    k = template.shape[1]
    out = np.empty((int(numbering.sizes.prod()) * len(template), k, numbering.d))
    for place, cube, corners in _chunks(box, template, numbering):
        labels = corners if classes is None else classes[corners]
        order = np.argsort(labels, axis=2)[..., None]
        local = (
            np.take_along_axis(template[None], order, axis=2)
            if len(cube) == 1
            else np.take_along_axis(np.broadcast_to(template, (len(cube), *template.shape)), order, axis=2)
        )
        out[place] = (local / 2 + cube[:, None, None]).reshape(-1, k, numbering.d)
    return out


# -- small periods ---------------------------------------------------------------------------------


def _closed_up(t: Triangulation, numbering: _Numbering) -> Triangulation:
    """The gluing table that joins the opposite sides of an open box."""
    assert t.corners is not None
    k = numbering.d + 1
    across, rank = t.across.copy(), t.rank.copy()
    tables = permutations_of(numbering.d)
    simplex, slot = np.nonzero(t.across < 0)
    others = np.array([[c for c in range(k) if c != i] for i in range(k)])[slot]
    position = numbering.unravel(np.take_along_axis(t.corners[simplex], others, axis=1))
    for a, seam in enumerate(numbering.box.seams):
        if seam is None:
            continue
        end = np.flatnonzero((position[:, :, a] == 2 * numbering.sizes[a]).all(axis=1))
        start = np.flatnonzero((position[:, :, a] == 0).all(axis=1))
        # facets of both sides as ascending numbers at the start, in the same order
        here = numbering.across(a, position[end]) // numbering.step @ numbering.weights
        there = position[start] // numbering.step @ numbering.weights
        turn, back = np.argsort(here, axis=1), np.argsort(there, axis=1)
        one = np.lexsort(np.take_along_axis(here, turn, axis=1).T)
        two = np.lexsort(np.take_along_axis(there, back, axis=1).T)
        end, start, turn, back = end[one], start[two], turn[one], back[two]
        rows = np.arange(len(end))[:, None]
        image = np.empty((len(end), k), dtype=np.int64)
        image[rows, np.take_along_axis(others[end], turn, axis=1)] = np.take_along_axis(
            others[start], back, axis=1
        )
        image[rows[:, 0], slot[end]] = slot[start]
        number = tables.rank(image)
        across[simplex[end], slot[end]], rank[simplex[end], slot[end]] = simplex[start], number
        across[simplex[start], slot[start]], rank[simplex[start], slot[start]] = (
            simplex[end],
            tables.inverse[number],
        )
    return Triangulation(across=across, rank=rank, written=t.written)
