"""The edge rule: which spins may meet at an edge, and how many intertwiners they have.

All spins are *twice-spins*, integers 2j; the group is SU(2).  The D spins at an edge of the foam admit an
invariant when their sum is even and the largest is at most the sum of the others.  A face that meets an edge
several times counts as often.

D. M. Brink, G. R. Satchler, *Angular Momentum* (1962), chapter 3, for three and four spins (from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..errors import InputError
from ..skeleton import Skeleton

__all__ = ["PAIRINGS", "Rules", "admissible", "intertwiner_dimension", "recoupling_range", "rules_of"]

# the three pairings of the four places, by number; each is the order ((p0 p1)(p2 p3))
PAIRINGS = ((0, 1, 2, 3), (0, 2, 1, 3), (0, 3, 1, 2))

# no bound: larger than any spin, and small enough to be added up
NO_BOUND = 1 << 40


def admissible(spins: np.ndarray) -> np.ndarray:
    """Whether the spins at an edge admit an invariant.

    Parameters
    ----------
    spins : array_like of int, shape (..., D)
        Twice-spins, none negative.

    Returns
    -------
    ndarray of bool, shape (...)

    Examples
    --------
    >>> admissible([[1, 1, 2], [1, 1, 1], [0, 0, 2]]).tolist()
    [True, False, False]
    """
    rows = np.asarray(spins, dtype=np.int64)
    total = rows.sum(axis=-1)
    result: np.ndarray = (total % 2 == 0) & (2 * rows.max(axis=-1) <= total)
    return result


def intertwiner_dimension(spins: np.ndarray) -> np.ndarray:
    """Dimension of the space of invariants in the product of the spins at an edge.

    Parameters
    ----------
    spins : array_like of int, shape (..., D)
        Twice-spins; D is 2, 3 or 4.

    Returns
    -------
    ndarray of int64, shape (...)
        For four spins 1 + min(2 min j, sum j - 2 max j); 0 where there is none.

    Examples
    --------
    >>> intertwiner_dimension([[1, 1, 1, 1], [2, 2, 2, 4], [0, 0, 1, 3]]).tolist()
    [2, 2, 0]
    """
    rows = np.asarray(spins, dtype=np.int64)
    good = admissible(rows)
    if rows.shape[-1] < 4:
        return good.astype(np.int64)
    most = np.minimum(rows.min(axis=-1), (rows.sum(axis=-1) - 2 * rows.max(axis=-1)) // 2)
    return np.where(good, 1 + most, 0)


def recoupling_range(spins: np.ndarray, pairing: int = 0) -> tuple[np.ndarray, np.ndarray]:
    """Least and greatest recoupling spin of four spins; it goes in steps of 2.

    Parameters
    ----------
    spins : array_like of int, shape (..., 4)
        Twice-spins by place.
    pairing : int
        0: (0 1)(2 3), 1: (0 2)(1 3), 2: (0 3)(1 2).

    Returns
    -------
    least, greatest : ndarray of int64, shape (...)
        Twice-spins; where there is no invariant, `greatest` is less than `least`.

    Examples
    --------
    >>> [[int(x) for x in recoupling_range([1, 2, 2, 3], p)] for p in range(3)]
    [[1, 3], [1, 3], [2, 4]]
    """
    rows = np.asarray(spins, dtype=np.int64)
    a, b, c, d = (rows[..., place] for place in PAIRINGS[pairing])
    least = np.maximum(np.abs(a - b), np.abs(c - d))
    greatest = np.minimum(a + b, c + d)
    odd = (rows.sum(axis=-1) % 2 != 0) | ((least - greatest) % 2 != 0)
    return least, np.where(odd | (greatest < least), least - 2, greatest)


@dataclass(frozen=True, eq=False)
class Rules:
    """The edge rules of one foam for given boundary spins: what its internal spins have to fulfil.

    Attributes
    ----------
    face : ndarray of int64, shape (E_int, D)
        The face at each place of each internal edge; numbers from `internal` on are external faces.
    ends : ndarray of int64, shape (E_int, 2)
        The vertices at the two ends of each internal edge.
    internal : int
        How many internal faces there are.
    boundary : ndarray of int64, shape (L,)
        Twice-spin of each link.
    step : int
        Spins are multiples of it: 1, or 2 for integer spins.
    offsets, member, times : ndarray of int64
        The distinct internal faces at each edge, ``member[offsets[e] : offsets[e + 1]]``, and how often each
        is there.
    total, largest : ndarray of int64, shape (E_int,)
        Sum and maximum of the boundary spins at each edge.
    """

    face: np.ndarray
    ends: np.ndarray
    internal: int
    boundary: np.ndarray
    step: int
    offsets: np.ndarray
    member: np.ndarray
    times: np.ndarray
    total: np.ndarray
    largest: np.ndarray

    def __repr__(self) -> str:
        return f"<Rules: {len(self.face)} internal edges, {self.internal} internal faces, step {self.step}>"

    @property
    def edge_of_member(self) -> np.ndarray:
        """The edge of each entry of `member`."""
        return np.repeat(np.arange(len(self.face)), np.diff(self.offsets))

    def spins(self, labelling: np.ndarray) -> np.ndarray:
        """Twice-spins at the places of the internal edges, (..., F_int) -> (..., E_int, D)."""
        inner = np.asarray(labelling, dtype=np.int64)
        outer = np.broadcast_to(self.boundary, (*inner.shape[:-1], len(self.boundary)))
        return np.concatenate([inner, outer], axis=-1)[..., self.face]

    def hold(self, labelling: np.ndarray) -> np.ndarray:
        """Whether labellings of the internal faces fulfil the rules, (..., F_int) -> (...)."""
        fits = (np.asarray(labelling) % self.step == 0).all(axis=-1)
        result: np.ndarray = admissible(self.spins(labelling)).all(axis=-1) & fits
        return result

    def hold_outside(self) -> bool:
        """Whether the edges that meet no internal face admit an invariant."""
        bare = np.diff(self.offsets) == 0
        spins = np.append(self.boundary, 0)[self.face[bare] - self.internal]
        return bool(admissible(spins).all())


def rules_of(skeleton: Skeleton, boundary: np.ndarray | int | None = None, *, step: int = 1) -> Rules:
    """The edge rules of a foam.

    Parameters
    ----------
    skeleton : Skeleton
    boundary : array_like of int, shape (L,), or int, optional
        Twice-spin of each link, or one for all; 0 by default.
    step : int
        Spins are multiples of it: 2 for integer spins.

    Raises
    ------
    InputError
        If the boundary spins do not fit the links, are no multiples of the step, or admit no invariant at a
        node; the node is named.
    """
    if step < 1:
        raise InputError(f"the step is at least 1, not {step}")
    spins = link_spins(skeleton, 0 if boundary is None else boundary)
    if (spins % step).any():
        link = int(np.flatnonzero(spins % step)[0])
        raise InputError(
            f"the twice-spin {spins[link]} is no multiple of {step}",
            place(skeleton, "link", link),
            "integer spins have even twice-spins",
        )
    check_nodes(skeleton, spins)
    inner_edges, inner = skeleton.counts["edges_internal"], skeleton.counts["faces_internal"]
    face = skeleton["edges/face"][:inner_edges].astype(np.int64)
    d = face.shape[1]
    outside = face >= inner
    met = np.where(outside, np.append(spins, 0)[np.where(outside, face - inner, -1)], 0)
    ordered = np.sort(face, axis=1)
    first = np.ones(ordered.shape, dtype=bool)
    first[:, 1:] = ordered[:, 1:] != ordered[:, :-1]
    first &= ordered < inner
    times = (ordered[:, :, None] == ordered[:, None, :]).sum(axis=2)
    return Rules(
        face=face,
        ends=np.stack(
            [skeleton[f"edges/{end}"][:inner_edges, 0] for end in ("source", "target")], axis=1
        ).astype(np.int64),
        internal=inner,
        boundary=spins,
        step=step,
        offsets=np.concatenate([[0], np.cumsum(first.sum(axis=1))]).astype(np.int64),
        member=ordered[first],
        times=times[first].astype(np.int64),
        total=met.sum(axis=1),
        largest=met.max(axis=1) if d else np.zeros(0, dtype=np.int64),
    )


def link_spins(skeleton: Skeleton, spins: np.ndarray | int) -> np.ndarray:
    """Twice-spins of the links as an array, from an array or one number for all."""
    links = skeleton.counts["links"]
    given = np.asarray(spins)
    if given.dtype.kind not in "iu" and given.size:
        raise InputError("twice-spins are integers")
    if given.ndim == 0:
        given = np.full(links, int(given))
    if given.shape != (links,):
        shape = f"{len(given)}" if given.ndim == 1 else f"an array of shape {given.shape}"
        raise InputError(
            f"{shape} spins are given, and there are {links} links", hint="give one for each, or one for all"
        )
    given = given.astype(np.int64)
    if (given < 0).any():
        link = int(np.flatnonzero(given < 0)[0])
        raise InputError(f"a twice-spin is not negative, as {given[link]} is", place(skeleton, "link", link))
    if (given > LARGEST_SPIN).any():
        link = int(np.argmax(given))
        raise InputError(f"the twice-spin {given[link]} is too large", place(skeleton, "link", link))
    return given


LARGEST_SPIN = 1 << 30


def check_nodes(skeleton: Skeleton, spins: np.ndarray) -> None:
    """Refuse boundary spins that admit no invariant at a node."""
    if not skeleton.counts["nodes"]:
        return
    rows = spins[skeleton["nodes/link"]]
    bad = np.flatnonzero(~admissible(rows))
    if len(bad):
        n = int(bad[0])
        row = rows[n].tolist()
        why = "their sum is odd" if sum(row) % 2 else "one exceeds the sum of the others"
        others = f"; {len(bad)} nodes are so" if len(bad) > 1 else ""
        raise InputError(
            f"the twice-spins {', '.join(map(str, row))} admit no intertwiner: {why}{others}",
            place(skeleton, "node", n),
            "the spins at a node have an even sum of twice-spins, and none exceeds the sum of the others",
        )


def place(skeleton: Skeleton, kind: str, number: int) -> str:
    """A node or link by its number, and by its labels where there are some."""
    name = f"{kind} {number}"
    table = f"{kind}s/corners"
    if table in skeleton:
        labels = skeleton.named(skeleton[table][number])
        name += f", corners {' '.join(map(str, labels))}"
    return name
