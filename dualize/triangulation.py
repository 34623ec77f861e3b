"""The triangulation: a gluing table.

Simplex `s` has corners ``0 .. D``; slot `i` is its facet opposite corner `i`.  ``across[s, i]`` is the
simplex behind slot `i` (-1 on the boundary) and ``carry[s, i]`` the permutation that carries the corners of
`s` to those of that simplex.  A labelled simplicial complex becomes such a table by matching facets with
equal label sets; after that it is nothing special.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from .errors import InputError, LimitError, TriangulationError
from .kernels import Engine, engine, random_factors
from .kernels.labels import bucket_sizes, fill_buckets, match_buckets, number_labels, sort_rows
from .kernels.permutations import permutations_of
from .tables import (
    Coordinates,
    carry_labels,
    check_colours_kept,
    check_dimension,
    check_gluings,
    check_labels_kept,
    checked_coordinates,
    checked_names,
    integers,
    labels_of,
    show,
    sorted_charts,
)

if TYPE_CHECKING:
    from os import PathLike

    import networkx

__all__ = ["Coordinates", "Triangulation"]

TABLES = ("across", "rank", "written", "corners", "refined_from")
SHOWN = 10  # offenders of one kind that an error names


@dataclass(frozen=True, eq=False, repr=False)
class Triangulation:
    """A triangulation of dimension D as a gluing table.

    Make it with `from_facets` (labels), `from_gluings` (a table), or `from_neighbours` (labels and
    neighbours); `dualize.coloured` makes it of coloured graphs.

    Attributes
    ----------
    across : ndarray of int32 or int64, shape (N, D + 1)
        Simplex across each slot; -1 on the boundary.
    rank : ndarray of uint8, shape (N, D + 1)
        The carrying permutation of each slot by its lexicographic rank; 0 on the boundary.
    written : ndarray of int8, shape (N,)
        +1 or -1: the parity with which a labelled simplex was written.
    corners : ndarray of int64, shape (N, D + 1), or None
        Labels of the corners.
    corner_names : tuple of str, or None
        The words in order of code points, where labels are words; `corners` are positions in it.
    coordinates : Coordinates, or None
    matched : bool
        Whether the gluings were found by matching labels, so that a set of labels names one simplex.
    coloured : bool
        Whether it was given as a coloured graph: corner `c` has colour `c`, and every gluing keeps colours.
    refined_from : ndarray of int64, shape (N,), or None
        In a refinement the simplex of the coarser triangulation in which each one lies, -1 where in none; the
        skeleton carries it as the group `refined_from/simplex`.
    """

    across: np.ndarray
    rank: np.ndarray
    written: np.ndarray
    corners: np.ndarray | None = None
    corner_names: tuple[str, ...] | None = None
    coordinates: Coordinates | None = None
    matched: bool = False
    coloured: bool = False
    refined_from: np.ndarray | None = None

    def __post_init__(self) -> None:
        for name in TABLES:
            array = getattr(self, name)
            if array is not None:
                view = np.ascontiguousarray(array).view()
                view.flags.writeable = False
                object.__setattr__(self, name, view)

    # -- constructors ------------------------------------------------------------------------------

    @classmethod
    def from_facets(
        cls,
        facets: np.ndarray | Sequence[Sequence[int]] | Sequence[Sequence[str]],
        *,
        coordinates: Coordinates | np.ndarray | None = None,
        corner_names: Sequence[str] | None = None,
        threads: int | None = None,
    ) -> Triangulation:
        """The triangulation whose top simplices are these lists of labels.

        Parameters
        ----------
        facets : array_like of int or str, shape (N, D + 1)
            Labels of the corners of each simplex, in any order; D is 2, 3 or 4.
        coordinates : Coordinates or array_like of float, shape (P, A), optional
            With an array, its row ``p`` belongs to label ``p``.  Corner charts follow the order in which the
            labels are given here.
        corner_names : sequence of str, optional
            If given, `facets` are positions in it; it must be in order of code points.
        threads : int, optional

        Raises
        ------
        InputError
            If `facets` is no such table, or a label is repeated in a simplex.
        TriangulationError
            If three or more simplices share a facet.

        Notes
        -----
        Facets are matched in O(N log N) steps whatever the labels are.

        Examples
        --------
        >>> t = Triangulation.from_facets([[0, 1, 2, 3], [1, 2, 3, 4]])
        >>> t.across.tolist()
        [[1, -1, -1, -1], [-1, -1, -1, 0]]
        """
        labels, names = labels_of(facets)
        if corner_names is not None:
            names = checked_names(corner_names, labels)
        n, k = labels.shape
        run = engine(n, threads)
        axes = tuple(range(k))
        corners = np.empty_like(labels)
        written = np.empty(n, dtype=np.int8)
        bad = [s for s in run.split(sort_rows, n, labels.ravel(), corners.ravel(), written, axes) if s >= 0]
        if bad:
            row = labels[bad[0]]
            seen: set[int] = set()
            twice = next(x for x in row.tolist() if x in seen or seen.add(x))  # type: ignore[func-returns-value]
            raise InputError(
                f"label {show([twice], names)} is repeated in a simplex",
                f"simplex {bad[0]}: {show(row, names)}",
                f"the {k} corners of a simplex need {k} different labels",
            )
        across, rank = _match(corners, run)
        if (across == -2).any():
            raise _crowded(corners, across, names)
        return cls(
            across=across,
            rank=rank,
            written=written,
            corners=corners,
            corner_names=names,
            coordinates=sorted_charts(checked_coordinates(coordinates, n, k, labels), labels),
            matched=True,
        )

    @classmethod
    def from_gluings(
        cls,
        across: np.ndarray | Sequence[Sequence[int]],
        carry: np.ndarray | Sequence[Sequence[Sequence[int]]],
        *,
        written: np.ndarray | Sequence[int] | None = None,
        corners: np.ndarray | Sequence[Sequence[int]] | None = None,
        corner_names: Sequence[str] | None = None,
        coordinates: Coordinates | None = None,
        matched: bool = False,
        coloured: bool = False,
    ) -> Triangulation:
        """The triangulation with this gluing table.

        Parameters
        ----------
        across : array_like of int, shape (N, D + 1)
            Simplex across each slot, -1 on the boundary.
        carry : array_like of int, shape (N, D + 1, D + 1)
            ``carry[s, i, c]`` is the corner of ``across[s, i]`` to which corner `c` of `s` is carried, and
            ``carry[s, i, i]`` the slot there.  Rows of boundary slots are not read.
        written : array_like of int, shape (N,), optional
            +1 or -1 (default +1): whether a simplex counts as positive as it stands.
        corners : array_like of int, shape (N, D + 1), optional
            Labels; gluings must carry equal labels to each other.
        corner_names, coordinates : optional
        matched : bool
            Say that these are the gluings that matching the labels gives, the corners in ascending order; it
            is checked.  Then a set of labels names one simplex, as in a list of facets.
        coloured : bool
            Say that corner `c` has colour `c`, and every gluing keeps colours; it is checked.

        Raises
        ------
        InputError
            Naming the first wrong row: range, no permutation, inverse missing or different, a facet glued
            to itself, labels or colours that a gluing does not keep.
        """
        table = integers(across, "across", 2)
        n, k = table.shape
        check_dimension(k, "across")
        images = integers(carry, "carry", 3)
        if images.shape != (n, k, k):
            raise InputError(f"carry has the shape {images.shape}, not {(n, k, k)} as across asks for")
        signs = np.ones(n, dtype=np.int8)
        if written is not None:
            given = integers(written, "written", 1)
            if given.shape != (n,):
                raise InputError(f"written has {given.size} entries for {n} simplices")
            if (wrong := np.flatnonzero((given != 1) & (given != -1))).size:
                raise InputError(f"written is {given[wrong[0]]}, not +1 or -1", f"simplex {wrong[0]}")
            signs = given.astype(np.int8)
        rank = check_gluings(table, images)
        labels = None
        if corners is not None:
            labels, names = labels_of(corners)
            corner_names = names if corner_names is None else checked_names(corner_names, labels)
            if labels.shape != (n, k):
                raise InputError(f"corners has the shape {labels.shape}, not {(n, k)} as across asks for")
            check_labels_kept(table, rank, labels)
        if coloured:
            check_colours_kept(table, rank)
        if matched:
            _check_matched(table, rank, labels)
        return cls(
            across=table.astype(_id_dtype(n)),
            rank=rank,
            written=signs,
            corners=labels,
            corner_names=None if corner_names is None else tuple(corner_names),
            coordinates=checked_coordinates(coordinates, n, k, labels),
            matched=matched,
            coloured=coloured,
        )

    @classmethod
    def from_neighbours(
        cls,
        corners: np.ndarray | Sequence[Sequence[int]] | Sequence[Sequence[str]],
        across: np.ndarray | Sequence[Sequence[int]],
        *,
        written: np.ndarray | Sequence[int] | None = None,
        corner_names: Sequence[str] | None = None,
        coordinates: Coordinates | None = None,
    ) -> Triangulation:
        """The triangulation of labelled simplices and their neighbours, as lattice simulations store it.

        Two simplices may share several facets, or have the same labels, and a simplex may have a label twice:
        the neighbours say what is glued to what, the labels of the shared facet how.

        Parameters
        ----------
        corners : array_like of int or str, shape (N, D + 1)
            Labels of the corners; their order is kept.
        across : array_like of int, shape (N, D + 1)
            The simplex opposite each corner, -1 on the boundary.
        written, corner_names, coordinates : see `from_gluings`

        Raises
        ------
        InputError
            Naming the first slot whose gluing the labels do not determine (a label twice on a facet, two
            slots that would do) or contradict (the simplex across has no such facet, or does not lead back).

        Examples
        --------
        The boundary of a tetrahedron: triangle `s` lacks label `s`.

        >>> rows = [[1, 2, 3], [0, 2, 3], [0, 1, 3], [0, 1, 2]]
        >>> t = Triangulation.from_neighbours(rows, rows)
        >>> t.carry[0].tolist()
        [[0, 1, 2], [1, 0, 2], [1, 2, 0]]
        """
        labels, names = labels_of(corners)
        table = integers(across, "across", 2)
        if table.shape != labels.shape:
            raise InputError(f"across has the shape {table.shape}, not {labels.shape} as the labels ask for")
        names = names if corner_names is None else checked_names(corner_names, labels)
        return cls.from_gluings(
            table,
            carry_labels(labels, table, names),
            written=written,
            corners=labels,
            corner_names=names,
            coordinates=coordinates,
        )

    @classmethod
    def from_coloured_graph(cls, graph: networkx.Graph, *, dimension: int | None = None) -> Triangulation:
        """The triangulation of a coloured graph; see `dualize.coloured.from_coloured_graph`."""
        from .coloured import from_coloured_graph

        return from_coloured_graph(graph, dimension=dimension)

    # -- what it is --------------------------------------------------------------------------------

    @property
    def dimension(self) -> int:
        """D, the dimension of the simplices."""
        return self.across.shape[1] - 1

    def __len__(self) -> int:
        """Number of top simplices."""
        return len(self.across)

    @property
    def carry(self) -> np.ndarray:
        """The carrying permutations in full, int8, shape (N, D + 1, D + 1); -1 at boundary slots."""
        images = permutations_of(self.dimension).image[self.rank]
        images[self.across < 0] = -1
        return images

    def boundary(self, component: int | None = None, *, threads: int | None = None) -> Triangulation:
        """The boundary, or one component of it, with the induced orientation; see `dualize.boundary`.

        Raises
        ------
        TriangulationError
            If there is no boundary.
        InputError
            In dimension 2, where it is a set of circles, or if there is no such component.
        """
        from .boundary import boundary_of

        return boundary_of(self, component, threads=threads)

    def coloured_graph(self) -> networkx.MultiGraph:
        """The coloured graph of a triangulation whose gluings keep colours; see `dualize.coloured`."""
        from .coloured import coloured_graph

        return coloured_graph(self)

    @property
    def keeps_colours(self) -> bool:
        """Whether every gluing carries each corner to the one of the same number: a coloured graph."""
        return not bool((self.rank[self.across >= 0] != 0).any())

    def named(self, labels: np.ndarray) -> list:
        """Labels as nested lists, as words where the triangulation was written in words."""
        if self.corner_names is None:
            return labels.tolist()
        return np.asarray(self.corner_names, dtype=object)[labels].tolist()

    def place(self, simplex: int) -> str:
        """How an error names a simplex: its number, and its labels where it has some."""
        if self.corners is None:
            return f"simplex {simplex}"
        return f"simplex {simplex}: {show(self.corners[simplex], self.corner_names)}"

    def __eq__(self, other: object) -> bool:
        """Equal when the tables, labels, names and coordinates are, and how they were meant."""
        if not isinstance(other, Triangulation):
            return NotImplemented
        mine, theirs = self.coordinates or Coordinates(), other.coordinates or Coordinates()
        pairs = [(getattr(self, x), getattr(other, x)) for x in TABLES]
        pairs += list(zip(mine, theirs, strict=True))
        mine_meant = (self.corner_names, self.matched, self.coloured)
        return mine_meant == (other.corner_names, other.matched, other.coloured) and all(
            a is b or (a is not None and b is not None and a.shape == b.shape and bool(np.array_equal(a, b)))
            for a, b in pairs
        )

    __hash__ = None  # type: ignore[assignment]

    def __repr__(self) -> str:
        free = int((self.across < 0).sum())
        kind = "coloured" if self.coloured else "unlabelled" if self.corners is None else "labelled"
        return (
            f"<Triangulation {self.dimension}D: {len(self)} simplices, {kind}, "
            f"{free} boundary facet{'' if free == 1 else 's'}>"
        )

    def _repr_html_(self) -> str:
        """A small table, for notebooks."""
        from .draw.notebook import triangulation_table

        return triangulation_table(self)

    def write(self, path: str | PathLike[str], *, force: bool = False, kind: str | None = None) -> None:
        """Write the triangulation as a file; see `dualize.formats.write`."""
        from .formats import write

        write(self, path, force=force, kind=kind)


# -- matching --------------------------------------------------------------------------------------


def _id_dtype(n: int) -> type:
    return np.int32 if n < 2**31 else np.int64


def _compact(corners: np.ndarray, run: Engine) -> tuple[np.ndarray, int]:
    """The labels as numbers from 0, int32, and how many numbers that takes."""
    low, high = int(corners.min()), int(corners.max())
    if high - low <= 2 * corners.size:  # a table over the whole range is no larger than the labels themselves
        return (corners - low).astype(np.int32), high - low + 1
    if corners.size >= 2**31:
        raise LimitError(f"{len(corners)} simplices with labels up to {high} are more than this can number")
    points = np.empty(corners.shape, dtype=np.int32)
    factors = random_factors(6)
    progress = np.zeros(1, dtype=np.int64)
    bits = 12
    while True:
        keys = np.empty(1 << bits, dtype=np.int64)
        numbers = np.full(1 << bits, -1, dtype=np.int32)
        if run(number_labels, corners.ravel(), factors, keys, numbers, 62 - bits, points.ravel(), progress):
            return points, int(progress[0])
        bits += 2


def _match(corners: np.ndarray, run: Engine) -> tuple[np.ndarray, np.ndarray]:
    """`across` and `rank` of sorted labels; -2 marks facets of three or more simplices."""
    n, k = corners.shape
    axes = tuple(range(k))
    points, count = _compact(corners, run)
    flat = points.ravel()
    degree = np.bincount(flat, minlength=count).astype(np.int32)
    bucket = np.empty(2 * n, dtype=np.int8)
    entry = np.empty(n * k, dtype=_id_dtype(n * k))
    choose = (bucket_sizes, flat, degree, bucket, axes)
    start = run.bucketed(n, count, choose, (fill_buckets, flat, bucket, entry, axes))
    across: np.ndarray = np.empty((n, k), dtype=_id_dtype(n))
    rank = np.empty((n, k), dtype=np.uint8)
    # ranges of buckets with about equal numbers of half-facets
    parts = len(run.ranges(n))
    cuts = [0, *np.searchsorted(start, [n * k * p // parts for p in range(1, parts)]).tolist(), count]
    calls = []
    for lo, hi in pairwise(cuts):
        room = 2 * int(np.diff(start[lo : hi + 1]).max(initial=0))
        work = (np.empty(room, np.int64), np.empty(room, np.int64), np.empty(room, np.int64))
        keeping = permutations_of(k - 1).keeping.ravel()
        calls.append((flat, start, entry, keeping, across.ravel(), rank.ravel(), *work, axes, lo, hi))
    run.each(match_buckets, calls)
    return across, rank


def _crowded(corners: np.ndarray, across: np.ndarray, names: tuple[str, ...] | None) -> TriangulationError:
    """The error for facets that three or more simplices share, naming the first ten."""
    k = corners.shape[1]
    groups: dict[tuple[int, ...], list[int]] = {}
    for s, i in np.argwhere(across == -2).tolist():
        groups.setdefault(tuple(np.delete(corners[s], i).tolist()), []).append(s)
    shown = [
        f"facet {show(labels, names)} of simplices {', '.join(map(str, where[:SHOWN]))}"
        + (f" and {len(where) - SHOWN} more" if len(where) > SHOWN else "")
        for labels, where in list(groups.items())[:SHOWN]
    ]
    more = f"; and {len(groups) - SHOWN} more facets" if len(groups) > SHOWN else ""
    count = "a facet lies" if len(groups) == 1 else f"{len(groups)} facets lie"
    return TriangulationError(
        f"{count} in three or more simplices, so there is no dual two-complex",
        "; ".join(shown) + more,
        f"every facet ({k - 1} labels) may belong to one or two simplices; remove or relabel the others",
    )


def _check_matched(across: np.ndarray, rank: np.ndarray, labels: np.ndarray | None) -> None:
    """Refuse gluings that are not those that matching the labels gives."""
    hint = "leave matched out, or give the facets alone"
    if labels is None:
        raise InputError("matched says that labels were matched, and there are none", hint=hint)
    if (falling := (labels[:, 1:] <= labels[:, :-1]).any(axis=1)).any():
        s = int(np.argmax(falling))
        raise InputError(
            "matched asks for corners in ascending order", f"simplex {s}: {labels[s].tolist()}", hint
        )
    t = Triangulation.from_facets(labels)
    wrong = np.argwhere((t.across != across) | (t.rank != rank))
    if len(wrong):
        s, i = wrong[0].tolist()
        raise InputError(
            "matched is true, but these are not the gluings that matching the labels gives",
            f"simplex {s}, slot {i}: across {across[s, i]}, by labels {t.across[s, i]}",
            hint,
        )
