"""What the changes share: the result, fresh labels, places by labels, and the orientation that is kept."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from ..errors import InputError, LimitError
from ..triangulation import Coordinates, Triangulation
from .record import Moves

if TYPE_CHECKING:
    from ..skeleton import Skeleton

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
    new_labels: Sequence[int | str] = ()
    notes: tuple[str, ...] = ()
    moves: Moves | None = None

    def build(self, **settings: Any) -> Skeleton:
        """The foam skeleton of the result, with `refined_from` as a further group; see `dualize.build`."""
        from ..build import build

        return build(self.refinement, **settings)

    @property
    def refinement(self) -> Triangulation:
        """The triangulation with `refined_from` in it, so that files and skeletons carry it."""
        return replace(self.triangulation, refined_from=self.refined_from)

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
                raise InputError(
                    f"{word!r} is no label of this complex", hint="its labels are integers"
                ) from None
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


def with_fields(t: Triangulation, **fields: Any) -> Triangulation:
    """`t` with some of its fields exchanged."""
    return replace(t, **fields)


def new_label(t: Triangulation, label: int | str) -> int | str:
    assert t.corners is not None
    if t.corner_names is not None:
        if str(label) in t.corner_names:
            raise InputError(f"the label {label!r} is in use already", hint="the new point needs a new one")
        return str(label)
    try:
        value = int(label)
    except ValueError:
        raise InputError(
            f"the new label {label!r} is no integer", hint="the labels here are integers"
        ) from None
    if not -(2**63) <= value < 2**63:
        raise InputError(f"the new label {label} is beyond 64 bits")
    if (t.corners == value).any():
        raise InputError(f"the label {value} is in use already", hint="the new point needs a new one")
    return value


def new_labels_of(before: Triangulation, after: Triangulation) -> list:
    """Labels (or words) of `after` that `before` does not have."""
    if after.corners is None:
        return []
    old: set = set()
    if before.corners is not None:
        old = set(np.asarray(before.named(np.unique(before.corners))).tolist())
    return [x for x in after.named(np.unique(after.corners)) if x not in old]
