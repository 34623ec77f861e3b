"""Certificates: is this link, or this space, a sphere or a ball?  Moves that show it, or what excludes it.

A triangulation that bistellar moves bring to the boundary of a simplex is a PL sphere, for every move keeps
the PL type (U. Pachner, European J. Combin. 12 (1991) 129-145); the moves are kept and can be replayed.  One
with a boundary is a PL ball where a cone over its boundary makes it a PL sphere: what is left of a PL sphere
outside the star of a point is a PL ball (M. H. A. Newman, 1926; J. F. P. Hudson, Piecewise Linear Topology,
1969, chapter 1).  Homology, the fundamental group and its homomorphisms to small groups show that something
is no sphere.  Where neither works the verdict is *undecided*.  (Citations from memory.)
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from math import factorial
from typing import Any, NamedTuple

import numpy as np

from .build import build
from .change.record import Moves
from .change.simplification import simplify
from .change.tables import labels_name_simplices
from .change.walks import replay
from .errors import LimitError, TriangulationError
from .topology.classes import Census, census, classes, corner_subsets
from .topology.derived import first_derived
from .topology.groups import foam_groups
from .topology.homology import integral_homology
from .topology.homomorphisms import count_homomorphisms
from .topology.integral import abelian_name
from .topology.linkage import Forms, all_point_links, point_links, ridge_lengths
from .topology.links import Links, link_figures
from .triangulation import Triangulation

__all__ = [
    "BALL",
    "NEITHER",
    "SPHERE",
    "TRIES",
    "UNDECIDED",
    "Certificate",
    "LinkVerdicts",
    "Stage",
    "as_complex",
    "certify_links",
    "recognise",
    "space_kind",
]

UNDECIDED, SPHERE, BALL, NEITHER = range(4)
WORDS = ("undecided", "sphere", "ball", "neither")
PIECES = 6_000  # simplices of a subdivision that is still reduced
TRIES = ((0, 3_000), (1, 20_000), (2, 20_000))  # seeds and budgets of the reductions, the first before groups
TESTS = ("A5", "PSL(2,7)")  # perfect groups have no image in smaller ones


class Stage(NamedTuple):
    """Moves on one triangulation; the next stage begins on a subdivision of the result.

    Attributes
    ----------
    start : Triangulation
    moves : Moves
    """

    start: Triangulation
    moves: Moves


@dataclass(frozen=True, eq=False)
class Certificate:
    """The verdict on one triangulation.

    Attributes
    ----------
    verdict : str
        ``"sphere"``, ``"ball"``, ``"neither"`` or ``"undecided"``.
    reason : str
    simplices : int
        How many the triangulation has.
    stages : tuple of Stage
        The moves, where moves are the reason.
    coned : bool
        Whether the moves begin on the triangulation with a cone over its boundary.
    """

    verdict: str
    reason: str
    simplices: int
    stages: tuple[Stage, ...] = ()
    coned: bool = False

    @property
    def moves(self) -> int:
        """How many moves the certificate has."""
        return sum(len(stage.moves) for stage in self.stages)

    def replay(self) -> Triangulation:
        """Make the moves again, and check that each stage continues the one before and all end in a sphere.

        Returns
        -------
        Triangulation
            The boundary of a simplex.

        Raises
        ------
        TriangulationError
            If that is not where they end, or there are none.
        """
        end: Triangulation | None = None
        for stage in self.stages:
            if end is not None:
                again = as_complex(end, 2**31)
                if again is None or _coned(again) != stage.start:
                    raise TriangulationError("a stage of the certificate does not continue the one before")
            end = replay(stage.start, stage.moves).triangulation
        if end is None or not _is_simplex_boundary(end):
            raise TriangulationError("the moves of the certificate do not end in the boundary of a simplex")
        return end

    def to_dict(self) -> dict[str, Any]:
        """The verdict as plain values; moves are counted."""
        out: dict[str, Any] = {"verdict": self.verdict, "reason": self.reason, "simplices": self.simplices}
        if self.stages:
            counts: dict[str, int] = {}
            for stage in self.stages:
                for kind, times in stage.moves.counts().items():
                    counts[kind] = counts.get(kind, 0) + times
            out["moves"] = counts
        return out


# -- one triangulation -----------------------------------------------------------------------------


def recognise(
    triangulation: Triangulation,
    *,
    manifold: bool | None = None,
    homology: list[list[int]] | None = None,
    pieces: int = PIECES,
    tries: Iterable[tuple[int, int]] = TRIES,
    threads: int | None = None,
) -> Certificate:
    """Is this triangulation, of dimension 2, 3 or 4, a sphere or a ball?

    Parameters
    ----------
    triangulation : Triangulation
    manifold : bool, optional
        Whether its links are known to be spheres or balls, or known not to be.  In dimension 3 it is looked
        up; in dimension 4 nothing is concluded from the group unless it is true.
    homology : list of list of int, optional
        Over the integers, where the caller has it.
    pieces : int
        A gluing table that is no simplicial complex is subdivided up to so many simplices.
    tries : iterable of (int, int)
        Seeds and budgets of the reductions by moves.
    threads : int, optional

    Returns
    -------
    Certificate

    Notes
    -----
    In dimension 3 a closed manifold with trivial group is a sphere also where no reduction is found (G.
    Perelman, 2002-2003).  In dimension 4 it is homeomorphic to one if its homology is (M. H. Freedman, 1982),
    but whether it is a PL sphere stays undecided.

    Examples
    --------
    >>> from itertools import combinations
    >>> recognise(Triangulation.from_facets(list(combinations(range(6), 4))[:1])).verdict
    'ball'
    >>> recognise(Triangulation.from_facets(list(combinations(range(5), 4)))).reason
    '0 moves to the boundary of a simplex'
    """
    t, d = triangulation, triangulation.dimension
    closed = bool((t.across >= 0).all())
    goal = "sphere" if closed else "ball"

    def no(reason: str) -> Certificate:
        return Certificate("neither", reason, len(t))

    if d == 2:
        return _surface(t, closed)
    if d == 3 and manifold is None:
        counted = census(t, threads=threads)
        if any(level.irregular.any() for level in counted.classes):
            return no("a segment is glued to itself")
        figures = link_figures(t, counted, threads=threads)
        if (wrong := figures.wrong(1)).any():
            return no(f"the link of a point has Euler characteristic {figures.euler[0][wrong][0]}")
        manifold = True
    if manifold is False:
        return no("a link is no sphere or ball")
    tries = list(tries)
    groups = integral_homology(t, threads=threads) if homology is None else homology
    if (k := _not_as_a_point(groups, closed)) is not None:
        return no(f"H_{k} = {abelian_name(groups[k])}")
    if not closed:
        edge = recognise(t.boundary(), pieces=pieces, tries=tries, threads=threads)
        if edge.verdict == "neither":
            return no(f"its boundary is no sphere: {edge.reason}")
    for seed, budget in tries[:1]:
        if (stages := _reduce(t, seed, budget, pieces)) is not None:
            return _by_moves(goal, t, stages, closed)
    excluded, trivial = _group(t, threads)
    if excluded:
        return no(excluded)
    for seed, budget in tries[1:]:
        if (stages := _reduce(t, seed, budget, pieces)) is not None:
            return _by_moves(goal, t, stages, closed)
    if trivial and manifold and d == 3:
        return Certificate(goal, "trivial fundamental group, by the Poincaré theorem; no moves found", len(t))
    reason = "no moves to the boundary of a simplex found"
    if trivial and manifold and closed:
        reason += "; homeomorphic to a sphere by Freedman's theorem, PL type not decided"
    elif not trivial:
        reason += ", and the group is not seen to be trivial"
    return Certificate("undecided", reason, len(t))


def _by_moves(goal: str, t: Triangulation, stages: list[Stage], closed: bool) -> Certificate:
    made = sum(len(stage.moves) for stage in stages)
    reason = f"{made} move{'s' if made != 1 else ''} to the boundary of a simplex"
    reason += "" if closed else ", its boundary coned off"
    return Certificate(goal, reason, len(t), tuple(stages), not closed)


def _surface(t: Triangulation, closed: bool) -> Certificate:
    """Dimension 2: the Euler characteristic decides, for a connected surface."""
    points = classes(t, 1).count
    edges = (t.across.size + int((t.across < 0).sum())) // 2
    chi = points - edges + len(t)
    parts = integral_homology(t)[0]
    if len(parts) > 1:
        return Certificate("neither", f"{len(parts)} components", len(t))
    verdict = "sphere" if closed and chi == 2 else "ball" if not closed and chi == 1 else "neither"
    return Certificate(verdict, f"Euler characteristic {chi}, {'closed' if closed else 'bounded'}", len(t))


def _not_as_a_point(groups: list[list[int]], closed: bool) -> int | None:
    """The first dimension in which homology is not that of a sphere, or of a point; None if there is none."""
    wanted = [[0], *([] for _ in groups[1:])]
    if closed:
        wanted[-1] = [0]
    return next((k for k, (x, y) in enumerate(zip(groups, wanted, strict=True)) if x != y), None)


def _group(t: Triangulation, threads: int | None) -> tuple[str, bool]:
    """What the group shows: why this is no sphere, or nothing; and whether the group is trivial.

    A nontrivial group of the foam excludes a PL sphere or ball also where links are not known: if it were
    one, its links would be spheres or balls, and the group that of the space.
    """
    group = foam_groups(build(t, keep_singular=True, threads=threads), threads=threads)[0]
    if group.trivial:
        return "", True
    if factors := group.abelianisation():
        return f"its group, without singular points, abelianises to {abelian_name(factors)}", False
    for name in TESTS:
        try:
            count = count_homomorphisms(group, name)
        except LimitError:
            continue
        if count > 1:
            return f"its group has {count} homomorphisms to {name}", False
    return "", False


# -- reduction by moves ----------------------------------------------------------------------------


def as_complex(t: Triangulation, pieces: int) -> Triangulation | None:
    """A simplicial complex with this space: itself, or its first or second barycentric subdivision.

    None where that has more than `pieces` simplices.
    """
    if t.corners is not None and t.matched and labels_name_simplices(t, t.corners):
        return t
    for _ in range(3):
        points = classes(t, 1).number.astype(np.int64)
        if labels_name_simplices(t, points):
            return Triangulation.from_facets(points)
        if len(t) * factorial(t.dimension + 1) > pieces:
            break
        t = first_derived(t)
    return None


def _coned(t: Triangulation) -> Triangulation:
    """A labelled complex with a cone over its boundary."""
    assert t.corners is not None
    simplex, slot = np.nonzero(t.across < 0)
    if not len(simplex):
        return t
    rows = t.corners[simplex].copy()
    rows[np.arange(len(rows)), slot] = int(t.corners.max()) + 1
    return Triangulation.from_facets(np.concatenate([t.corners, rows]))


def _reduce(t: Triangulation, seed: int, budget: int, pieces: int) -> list[Stage] | None:
    """Moves to the boundary of a simplex, or None."""
    stages = []
    points = classes(t, 1).number
    named = t.corners is not None and t.matched and labels_name_simplices(t, t.corners)
    if not named and not labels_name_simplices(t, points):
        # as a gluing table it becomes much smaller, and then its subdivision is
        first = simplify(t, seed=seed, budget=budget)
        assert first.moves is not None
        stages.append(Stage(t, first.moves))
        t = first.triangulation
    whole = as_complex(t, pieces)
    if whole is None:
        return None
    start = _coned(whole)
    last = simplify(start, seed=seed, budget=budget + 20 * len(start))
    assert last.moves is not None
    if not _is_simplex_boundary(last.triangulation):
        return None
    return [*stages, Stage(start, last.moves)]


def _is_simplex_boundary(t: Triangulation) -> bool:
    return (
        len(t) == t.dimension + 2
        and t.corners is not None
        and t.matched
        and bool((t.across >= 0).all())
        and len(np.unique(t.corners)) == t.dimension + 2
    )


# -- links -----------------------------------------------------------------------------------------


@dataclass(frozen=True, eq=False)
class LinkVerdicts:
    """Verdicts on the links of all simplices with 1 to D - 2 corners.

    Attributes
    ----------
    kind : list of ndarray of int8
        For m = 1 .. D - 2 and each class: `UNDECIDED`, `SPHERE`, `BALL` or `NEITHER`.
    figures : Links
    which : ndarray of int64, shape (points,)
        D = 4: number of the certificate of each point, -1 where there is none.
    certificates : list of Certificate
        D = 4: one for each link, up to isomorphism.
    """

    kind: list[np.ndarray]
    figures: Links
    which: np.ndarray
    certificates: list[Certificate] = field(default_factory=list)

    def reason(self, m: int, y: int) -> str:
        """Why class `y` of the simplices with `m` corners has its verdict."""
        if m == 1 and len(self.which) and self.which[y] >= 0:
            return self.certificates[self.which[y]].reason
        chi = int(self.figures.euler[m - 1][y])
        if self.figures.wrong(m)[y] or m > 1 or not len(self.which):
            return f"Euler characteristic {chi}"
        if self.kind[0][y] == NEITHER:
            return "it lies on a simplex with a link that is no sphere or ball"
        if self.kind[0][y] == UNDECIDED:
            return "not reduced, beyond the limit of different links"
        return "trivial fundamental group, by the Poincaré theorem"


def certify_links(
    triangulation: Triangulation,
    *,
    counted: Census | None = None,
    figures: Links | None = None,
    most: int | None = None,
    threads: int | None = None,
) -> LinkVerdicts:
    """Verdicts on all links: spheres and balls with certificates, what is neither, what is undecided.

    Parameters
    ----------
    triangulation : Triangulation
    counted : Census, optional
    figures : Links, optional
        From `census` and `link_figures`, where the caller has them.
    most : int, optional
        Reduce at most so many different links of points in dimension 4; the others count as spheres or balls
        where their group is seen to be trivial.
    threads : int, optional

    Notes
    -----
    Links of dimension 2 are told by their Euler characteristics.  Links of points in dimension 4 are
    compared up to isomorphism, and each one is reduced once.

    Examples
    --------
    >>> verdicts = certify_links(Triangulation.from_facets([[0, 1, 2, 3, 4], [1, 2, 3, 4, 5]]))
    >>> [(c.verdict, c.moves) for c in verdicts.certificates]
    [('ball', 0), ('ball', 1)]
    """
    t, d = triangulation, triangulation.dimension
    counted = census(t, threads=threads) if counted is None else counted
    figures = link_figures(t, counted, threads=threads) if figures is None else figures
    kind = []
    for m in range(1, d - 1):
        good = np.where(figures.boundary[m - 1], BALL, SPHERE)
        bad = figures.wrong(m) | counted.classes[m - 1].irregular
        kind.append(np.where(bad, NEITHER, good).astype(np.int8))
    if d < 4:
        return LinkVerdicts(kind, figures, np.empty(0, dtype=np.int64))
    number = counted.classes[0].number
    simplex, subset = np.divmod(counted.classes[1].first[kind[1] == NEITHER], 10)
    kind[0][number[simplex[:, None], corner_subsets(4, 2)[subset]]] = NEITHER
    which, certificates = _certify_points(t, number, kind[0], figures, most, threads)
    return LinkVerdicts(kind, figures, which, certificates)


def _certify_points(
    t: Triangulation,
    number: np.ndarray,
    kind: np.ndarray,
    figures: Links,
    most: int | None,
    threads: int | None,
) -> tuple[np.ndarray, list[Certificate]]:
    """Fill in `kind` of the points; the number of the certificate of each, and the certificates."""
    assert figures.simply_connected is not None
    lengths = ridge_lengths(all_point_links(t))
    order = np.argsort(number.ravel(), kind="stable")
    which = np.full(len(kind), -1, dtype=np.int64)
    certificates: list[Certificate] = []
    forms = Forms()
    seen: list[int] = []  # certificate of each form, -1 where none was made
    done = 0
    for point, piece in point_links(t, number):
        rows = order[done : done + len(piece)]
        done += len(piece)
        if kind[point] == NEITHER:
            continue
        form, new = forms.find(piece, lengths[rows])
        if new:
            if most is not None and len(certificates) >= most:
                seen.append(-1)
            else:
                seen.append(len(certificates))
                certificates.append(recognise(piece, manifold=True, threads=threads))
        which[point] = seen[form]
        if seen[form] >= 0:
            kind[point] = WORDS.index(certificates[seen[form]].verdict)
        elif not figures.simply_connected[point]:
            kind[point] = NEITHER if figures.homology.get(point) else UNDECIDED
    return which, certificates


def space_kind(verdicts: LinkVerdicts, closed: bool) -> str:
    """What the links make of the space, as far as gluings without several simplices of one name go.

    Returns
    -------
    str
        ``"closed manifold"``, ``"manifold with boundary"``, ``"manifold but for non-spherical vertices"``,
        ``"pseudomanifold"`` or ``"undecided"``.
    """
    if any((kind == NEITHER).any() for kind in verdicts.kind[1:]):
        return "pseudomanifold"
    if verdicts.kind and (verdicts.kind[0] == NEITHER).any():
        return "manifold but for non-spherical vertices"
    if any((kind == UNDECIDED).any() for kind in verdicts.kind):
        return "undecided"
    return "closed manifold" if closed else "manifold with boundary"
