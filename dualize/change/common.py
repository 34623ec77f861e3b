"""What the changes share: the result, fresh labels, places by labels, and the orientation that is kept."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from ..errors import InputError, LimitError
from ..kernels import engine
from ..kernels.orient import spread_orientation
from ..kernels.permutations import permutations_of
from ..topology.classes import classes, corner_subsets
from ..triangulation import Coordinates, Triangulation

if TYPE_CHECKING:
    from .record import Moves

__all__ = ["Changed"]


@dataclass(frozen=True, eq=False, repr=False)
class Changed:
    """What a change made of a triangulation.

    Attributes
    ----------
    triangulation : Triangulation
    refined_from : ndarray of int64, shape (N,)
        For every simplex the one of the input in which it lies (or which it is); -1 where there is none.
        Of two inputs, the simplices of the second are counted on from those of the first.
    new_labels : list of int or str
        Labels that the input did not have.
    notes : tuple of str
        What else is to be known: labels that were split or renamed, coordinates that were dropped.
    moves : Moves, or None
        The bistellar moves that lead from the input to the result.
    """

    triangulation: Triangulation
    refined_from: np.ndarray
    new_labels: Sequence[int] | Sequence[str] = ()
    notes: tuple[str, ...] = ()
    moves: Moves | None = None

    def __repr__(self) -> str:
        parts = [repr(self.triangulation)]
        if self.moves is not None:
            parts.append(f"{len(self.moves)} move(s)")
        if len(self.new_labels):
            parts.append(f"{len(self.new_labels)} new label(s)")
        return f"<Changed: {', '.join([*parts, *self.notes])}>"


# -- arguments -------------------------------------------------------------------------------------


def need_labels(t: Triangulation, what: str) -> np.ndarray:
    """The corners of a labelled complex, or the error that it has none."""
    if t.corners is None or not t.matched:
        raise InputError(
            f"{what} needs a labelled complex, and this is a gluing table",
            hint="subdivide it first: its second barycentric subdivision is a labelled complex (derived 2)",
        )
    twice = np.flatnonzero((t.across[:, 0] >= 0) & (t.across[:, 0] == t.across[:, 1]))
    if len(twice):
        s = int(twice[0])
        raise InputError(
            f"{what} needs a simplicial complex, and two simplices have the same labels",
            f"simplices {s} and {t.across[s, 0]}",
        )
    return t.corners


def number(value: Any, name: str, low: int, high: int | None = None) -> int:
    """An integer argument within its range."""
    if isinstance(value, bool) or not isinstance(value, int | np.integer):
        raise InputError(f"{name} is {value!r}, not an integer")
    if value < low or (high is not None and value > high):
        span = f"at least {low}" if high is None else f"between {low} and {high}"
        raise InputError(f"{name} is {value}", hint=f"{name} must be {span}")
    return int(value)


def simplex_number(t: Triangulation, value: Any) -> int:
    """The number of a simplex of `t`."""
    return number(value, "simplex", 0, len(t) - 1)


def simplex_numbers(t: Triangulation, values: Any) -> np.ndarray:
    """Numbers of simplices of `t`, each once, int64, ascending."""
    array = np.atleast_1d(np.asarray(values))
    if array.ndim != 1 or (array.size and array.dtype.kind not in "iu"):
        raise InputError("simplex numbers are no list of integers")
    bad = array[(array < 0) | (array >= len(t))]
    if len(bad):
        raise InputError(f"there is no simplex {bad[0]}", hint=f"simplices are numbered 0 to {len(t) - 1}")
    return np.unique(array.astype(np.int64))


def label_numbers(t: Triangulation, words: Sequence[Any], *, unknown: bool = False) -> list[int]:
    """Labels as the integers that stand for them in `t.corners`; each must occur there.

    With `unknown`, a label that does not occur is let through as it is.
    """
    out: list[int] = []
    names = None if t.corner_names is None else {w: i for i, w in enumerate(t.corner_names)}
    for word in words:
        if names is not None:
            x = names.get(str(word), -1)
            there = x >= 0
        else:
            try:
                x = int(word)
            except ValueError:
                raise InputError(f"{word!r} is no label of this complex", hint="its labels are integers") from None
            there = bool(t.corners is not None and (t.corners == x).any())
        if not there and not unknown:
            raise InputError(f"no simplex has the label {word!r}", hint="see the labels of the input")
        if x in out:
            raise InputError(f"the label {word!r} is given twice")
        out.append(x)
    return out


def show(t: Triangulation, labels: Any) -> str:
    """Labels for a message."""
    return " ".join(map(str, t.named(np.asarray(labels, dtype=np.int64))))


def rows_with(corners: np.ndarray, labels: Sequence[int]) -> np.ndarray:
    """Numbers of the simplices that have all these labels."""
    inside = np.ones(len(corners), dtype=bool)
    for x in labels:
        inside &= (corners == x).any(axis=1)
    return np.flatnonzero(inside)


def check_room(simplices: int, dimension: int) -> None:
    """Refuse what cannot be numbered or would be absurdly large, before work starts."""
    if simplices * (dimension + 1) >= 2**31:
        raise LimitError(
            f"that makes {simplices} simplices, more than can be numbered in 32 bits",
            hint="start from fewer simplices, or refine less",
        )


# -- labels ----------------------------------------------------------------------------------------


def fresh_labels(t: Triangulation, count: int) -> np.ndarray:
    """`count` integer labels that `t` does not use, ascending: those behind its largest label.

    Coordinates in one chart are rows by label, so new labels start behind the last row as well.
    """
    assert t.corners is not None
    first = int(t.corners.max()) + 1
    if t.coordinates is not None and t.coordinates.point is not None:
        first = max(first, len(t.coordinates.point))
    first = max(first, 0)
    if first + count > np.iinfo(np.int64).max:
        raise LimitError("no 64-bit label is left behind the largest one", hint="relabel the complex first")
    return np.arange(first, first + count, dtype=np.int64)


def fresh_words(used: Sequence[str], count: int) -> list[str]:
    """Words ``new0``, ``new1``, ... that `used` does not hold."""
    taken = set(used)
    out: list[str] = []
    n = 0
    while len(out) < count:
        if (word := f"new{n}") not in taken:
            out.append(word)
        n += 1
    return out


def labelled(
    facets: np.ndarray, words: Sequence[str] | None, coordinates: Coordinates | None = None
) -> Triangulation:
    """The labelled complex of these facets; with `words`, label x stands for ``words[x]``, in any order."""
    if words is None:
        return Triangulation.from_facets(facets, coordinates=coordinates)
    used, inverse = np.unique(facets, return_inverse=True)
    names = [words[x] for x in used.tolist()]
    order = sorted(range(len(names)), key=names.__getitem__)
    position = np.empty(len(names), dtype=np.int64)
    position[order] = np.arange(len(names))
    if coordinates is not None and coordinates.point is not None:
        coordinates = coordinates._replace(point=coordinates.point[used[order]])
    return Triangulation.from_facets(
        position[inverse.reshape(facets.shape)],
        corner_names=[names[i] for i in order],
        coordinates=coordinates,
    )


def as_written(t: Triangulation, corners: np.ndarray | None = None) -> np.ndarray:
    """The corners of `t` (or these, in the same places) in an order that has the parity `t.written`."""
    out = np.array(t.corners if corners is None else corners, dtype=np.int64)
    swap = np.flatnonzero(t.written < 0)
    out[swap, 0], out[swap, 1] = out[swap, 1].copy(), out[swap, 0].copy()
    return out


def as_written_chart(t: Triangulation, chart: np.ndarray) -> np.ndarray:
    """Corner coordinates in the order of `as_written`."""
    out = np.array(chart)
    swap = np.flatnonzero(t.written < 0)
    out[swap, 0], out[swap, 1] = out[swap, 1].copy(), out[swap, 0].copy()
    return out


def labels_name_simplices(t: Triangulation, labels: np.ndarray) -> bool:
    """Whether simplices of `t`, as classes under its gluings, are told apart by these labels of the corners.

    The labels (N, D + 1) must agree across gluings.  If they do, `t` is the simplicial complex on them.
    """
    k = t.dimension + 1
    ordered = np.sort(labels, axis=1)
    if (ordered[:, 1:] == ordered[:, :-1]).any():
        return False
    sort = np.argsort(labels, axis=1)
    place = np.argsort(sort, axis=1)
    for m in [k, *range(1, k)]:
        if m == k:
            rows = ordered
        else:
            first = classes(t, m).first
            subsets = corner_subsets(k - 1, m)
            row, column = np.divmod(first, len(subsets))
            chosen = np.sort(np.take_along_axis(place[row], subsets[column], axis=1), axis=1)
            rows = np.take_along_axis(ordered[row], chosen, axis=1)
        rows = rows[np.lexsort(rows.T[::-1])]
        if (rows[1:] == rows[:-1]).all(axis=1).any():
            return False
    return True


def by_labels(
    across: np.ndarray,
    rank: np.ndarray,
    written: np.ndarray,
    labels: np.ndarray,
    words: Sequence[str] | None,
    point: np.ndarray | None = None,
    period: np.ndarray | None = None,
) -> Triangulation:
    """The labelled complex of a gluing table whose simplices these labels tell apart.

    The corners are sorted, and the gluings with them.  With `words`, label x stands for ``words[x]``.  Row x
    of `point` belongs to label x.
    """
    k = labels.shape[1]
    tables = permutations_of(k - 1)
    names = None
    if words is not None:
        used = np.unique(labels)
        order = sorted(used.tolist(), key=words.__getitem__)
        position = np.zeros(len(words), dtype=np.int64)
        position[order] = np.arange(len(order))
        names = tuple(words[x] for x in order)
        labels = position[labels]
        point = None if point is None else point[order]
    inner = across >= 0
    sort = np.argsort(labels, axis=1)
    if np.array_equal(sort, np.broadcast_to(np.arange(k), sort.shape)):
        there = tables.image[rank, np.arange(k)]
    else:
        place = np.argsort(sort, axis=1)
        there = place[np.where(inner, across, 0), tables.image[rank, np.arange(k)].astype(np.int64)]
        across, there, labels = (np.take_along_axis(x, sort, axis=1) for x in (across, there, labels))
        written = written * tables.sign[tables.rank(sort)]
    return Triangulation(
        across=across.astype(np.int32),
        rank=np.where(across >= 0, tables.keeping[np.arange(k), there], 0).astype(np.uint8),
        written=written.astype(np.int8),
        corners=labels.astype(np.int64),
        corner_names=names,
        coordinates=None if point is None else Coordinates(point=point, period=period),
        matched=True,
    )


def pruned(t: Triangulation) -> Triangulation:
    """`t` without the words that no corner bears any more."""
    if t.corner_names is None or t.corners is None:
        return t
    used, inverse = np.unique(t.corners, return_inverse=True)
    if len(used) == len(t.corner_names):
        return t
    coordinates = t.coordinates
    if coordinates is not None and coordinates.point is not None:
        coordinates = coordinates._replace(point=coordinates.point[used])
    return with_fields(
        t,
        corners=inverse.reshape(t.corners.shape).astype(np.int64),
        corner_names=tuple(t.corner_names[x] for x in used.tolist()),
        coordinates=coordinates,
    )


# -- orientation -----------------------------------------------------------------------------------


def orientations(t: Triangulation) -> tuple[np.ndarray, np.ndarray]:
    """Orientation and component of every simplex, as `build` finds them."""
    n, k = t.across.shape
    out = np.zeros(n, dtype=np.int8)
    component, queue = np.empty((2, n), dtype=t.across.dtype)
    sign = permutations_of(k - 1).sign
    flat = (t.across.ravel(), t.rank.ravel(), sign, t.written, out, component, queue)
    engine(n)(spread_orientation, *flat, tuple(range(k)))
    return out, component


def oriented_as(t: Triangulation, wanted: np.ndarray) -> Triangulation:
    """`t` with the first simplex of each component written so that it has the orientation `wanted` there."""
    _, component = orientations(t)
    first = np.unique(component, return_index=True)[1]
    if np.array_equal(t.written[first], wanted[first]):
        return t
    written = t.written.copy()
    written[first] = wanted[first]
    return with_fields(t, written=written)


def with_fields(t: Triangulation, **fields: Any) -> Triangulation:
    """`t` with some of its fields exchanged."""
    import dataclasses

    return dataclasses.replace(t, **fields)


# -- coordinates -----------------------------------------------------------------------------------


def charts(t: Triangulation) -> np.ndarray | None:
    """Coordinates of the corners of every simplex, (N, D + 1, A), the images nearest to its first corner."""
    c = t.coordinates
    if c is None:
        return None
    if c.corner is not None:
        return c.corner
    assert c.point is not None
    labels = t.corners if t.corners is not None else classes(t, 1).number
    rows = c.point[labels]
    if c.period is None or not (c.period > 0).any():
        return rows
    step = rows - rows[:, :1]
    length = np.where(c.period > 0, c.period, 1.0)
    return rows[:, :1] + np.where(c.period > 0, step - length * np.round(step / length), step)


def averages(rows: np.ndarray, period: np.ndarray | None) -> np.ndarray:
    """Averages over the second last axis, (..., m, A) to (..., A); of nearest images where there is a period."""
    if period is None or not (period > 0).any():
        return rows.mean(axis=-2)
    step = rows - rows[..., :1, :]
    length = np.where(period > 0, period, 1.0)
    step = np.where(period > 0, step - length * np.round(step / length), step)
    return rows[..., 0, :] + step.mean(axis=-2)
