"""What an audit looks at: a skeleton, its triangulation, and what is computed from them once."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from functools import cached_property
from math import factorial
from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np

from ..audit import SHOWN
from ..boundary import BoundaryWalk, walk
from ..certificates import (
    NEITHER,
    TRIES,
    UNDECIDED,
    Certificate,
    LinkVerdicts,
    certify_links,
    recognise,
)
from ..check import check_skeleton
from ..errors import SkeletonError
from ..form import check_form
from ..skeleton import Skeleton
from ..topology.classes import Census, Classes, census, classes, f_vector
from ..topology.derived import first_derived
from ..topology.gluing import gluing_of
from ..topology.groups import foam_groups
from ..topology.homology import integral_homology
from ..topology.links import Links, link_figures
from ..topology.presentation import Presentation
from ..triangulation import Triangulation

if TYPE_CHECKING:
    from gudhi import SimplexTree

__all__ = ["GROUP_LIMIT", "GUDHI_LIMIT", "INTEGRAL_LIMIT", "LINK_LIMIT", "Subject", "named"]

# Simplices up to which the costly checks run without --full: about ten seconds of gudhi, two of links.
GUDHI_LIMIT = 20_000
PIECES_LIMIT = 30_000  # of a second derived subdivision: 52 tetrahedra, 2 four-simplices
LINK_LIMIT = 400_000
INTEGRAL_LIMIT = 200_000  # seconds of homology over the integers
GROUP_LIMIT = 200_000
DIFFERENT_LINKS = 200  # links of points in dimension 4 that are reduced; equal ones count once
REDUCED_LIMIT = 3_000  # a whole space is reduced by moves up to this size


class Witness(NamedTuple):
    """A simplicial complex that gudhi can hold.

    Attributes
    ----------
    facets, boundary : ndarray of int64, shape (N, D + 1), (B, D)
        Labels of its facets and of its boundary facets.
    same : bool
        Whether its simplices are those of the triangulation.
    who : str
    """

    facets: np.ndarray
    boundary: np.ndarray
    same: bool
    who: str


class Subject:
    """A skeleton under audit; everything derived from it is computed when first asked for.

    Parameters
    ----------
    skeleton : Skeleton
    given : Triangulation or None
        The triangulation from which it was made, where the caller has it.
    full : bool
        Lift the limits.
    threads : int or None
    """

    def __init__(
        self, skeleton: Skeleton, given: Triangulation | None, full: bool, threads: int | None
    ) -> None:
        self.s = skeleton
        self.given = given
        self.full = full
        self.threads = threads
        self.seconds: dict[str, float] = {}
        self.betti: tuple[dict[int, list[int]], str] | None = None  # found by `homology`

    # -- can it be read? ---------------------------------------------------------------------------

    @cached_property
    def layout_error(self) -> SkeletonError | None:
        """What is wrong with presence, shapes, ranges or offsets."""
        try:
            check_form(self.s)
        except SkeletonError as error:
            return error
        return None

    @cached_property
    def table_error(self) -> SkeletonError | None:
        """The first entry that another table contradicts, where the layout is sound."""
        try:
            check_skeleton(self.s, threads=self.threads)
        except SkeletonError as error:
            return error
        return None

    @cached_property
    def read_back(self) -> Triangulation | SkeletonError:
        """The triangulation read from the edges, or why that fails."""
        try:
            found = gluing_of(self.s, threads=self.threads)
        except SkeletonError as error:
            return error
        # a skeleton does not say whether its labels were matched, the triangulation does
        return found if self.given is None else replace(found, matched=found.matched and self.given.matched)

    @cached_property
    def obstacle(self) -> str | None:
        """Why nothing else can be checked, or None."""
        if self.layout_error is not None:
            return "the layout is broken"
        if not isinstance(self.read_back, Triangulation):
            return "the gluings cannot be read back"
        return None

    @cached_property
    def t(self) -> Triangulation:
        """The triangulation that is audited: the one read back."""
        found = self.read_back
        assert isinstance(found, Triangulation)
        return found

    @property
    def d(self) -> int:
        return int(self.s.dimension)

    @property
    def n(self) -> int:
        return int(self.s.counts["vertices"])

    @property
    def closed(self) -> bool:
        return int(self.s.counts["nodes"]) == 0

    @cached_property
    def orientable(self) -> list[bool]:
        """Whether each component is orientable: it has no twisted edge."""
        s = self.s
        twisted = np.flatnonzero(s["edges/twist"][: s.counts["edges_internal"]])
        parts = set(s["vertices/component"][s["edges/source"][twisted, 0]].tolist())
        return [k not in parts for k in range(s.counts["components"])]

    @cached_property
    def title(self) -> str:
        s = self.s
        try:
            labels = "labelled" if "vertices/corners" in s else "unlabelled"
            n = s.counts["vertices"]
            out = f"Audit of {n} {'simplex' if n == 1 else 'simplices'} of dimension {s.dimension}, {labels}"
        except (KeyError, TypeError):
            return "Audit of a damaged skeleton"
        name = (s.provenance or {}).get("input") if isinstance(s.provenance, dict) else None
        return out + (f", from {name}" if isinstance(name, str) else "")

    def over(self, limit: int) -> str | None:
        """Why a costly check is left out, or None."""
        if self.full or self.n <= limit:
            return None
        return f"{self.n} simplices, limit {limit}; --full"

    # -- the simplices -----------------------------------------------------------------------------

    @cached_property
    def census(self) -> Census:
        return census(self.t, threads=self.threads)

    @cached_property
    def facet_classes(self) -> Classes:
        return classes(self.t, self.d, threads=self.threads)

    @cached_property
    def twins(self) -> bool:
        """Whether several simplices have the same labels, where labels name them."""
        return self.t.corners is not None and self.t.matched and self.census.f[-1] < self.n

    @cached_property
    def labels(self) -> np.ndarray | None:
        """Labels that make this a simplicial complex, (N, D + 1), ascending; None where there are none."""
        if self.t.corners is not None and self.t.matched:
            return None if self.twins else self.t.corners
        points = np.sort(self.census.classes[0].number, axis=1).astype(np.int64)
        if (points[:, 1:] == points[:, :-1]).any() or f_vector(points) != self.census.f:
            return None
        return points

    @cached_property
    def witness(self) -> Witness | None:
        """A simplicial complex with this space for gudhi: its own simplices, or those of a subdivision."""
        if self.no_witness is not None:
            return None
        matched = self.t.corners is not None and self.t.matched
        if self.labels is not None:
            points = self.t.corners if matched else self.census.classes[0].number
            assert points is not None
            return Witness(self.labels, _boundary_facets(self.t, points), True, "gudhi")
        fine = first_derived(first_derived(self.t))
        points = classes(fine, 1, threads=self.threads).number
        facets = points.astype(np.int64)
        return Witness(
            facets, _boundary_facets(fine, points), False, "gudhi on the second derived subdivision"
        )

    @cached_property
    def no_witness(self) -> str | None:
        """Why gudhi is not asked, or None."""
        if (reason := self.over(GUDHI_LIMIT)) is not None:
            return reason
        if self.twins:
            return "several simplices have the same labels"
        pieces = factorial(self.d + 1) ** 2
        if self.labels is None and not self.full and self.n * pieces > PIECES_LIMIT:
            return (
                f"no simplicial complex, and the second derived subdivision has {self.n * pieces} simplices, "
                f"limit {PIECES_LIMIT}; --full"
            )
        return None

    @cached_property
    def irregular(self) -> int:
        """How many simplices are glued to themselves other than by the identity."""
        return sum(int(level.irregular.sum()) for level in self.census.classes)

    @cached_property
    def walk(self) -> BoundaryWalk:
        return walk(self.t, threads=self.threads)

    @cached_property
    def boundary(self) -> Triangulation | None:
        """The boundary built on its own; None where there is none, or in dimension 2."""
        return None if self.closed or self.d == 2 else self.t.boundary(threads=self.threads)

    @cached_property
    def boundary_f(self) -> list[int]:
        """f-vector of the boundary."""
        if self.closed:
            return [0] * self.d
        if self.boundary is not None:
            return census(self.boundary, threads=self.threads).f
        return [len(self.walk.vertex)] * 2  # circles

    @cached_property
    def links(self) -> Links | None:
        """Figures of all links, None beyond the limit."""
        return None if self.over(LINK_LIMIT) else link_figures(self.t, self.census, threads=self.threads)

    @cached_property
    def link_trouble(self) -> str | None:
        """Why the links are not all known to be homology spheres or balls; None when they are."""
        if (reason := self.over(LINK_LIMIT)) is not None:
            return f"links not checked: {reason}"
        if any(len(rows) for rows in self.census.scattered) or self.twins:
            return "some links are disconnected"
        if self.irregular:
            return "some simplices are glued to themselves"
        assert self.links is not None
        if any(self.links.wrong(m).any() for m in range(1, self.d - 1)) or any(self.links.homology.values()):
            return "some links are no homology spheres or balls"
        return None

    @cached_property
    def verdicts(self) -> LinkVerdicts:
        """Verdicts on all links, with certificates; `links` must not be None."""
        most = None if self.full else DIFFERENT_LINKS
        return certify_links(self.t, counted=self.census, figures=self.links, most=most, threads=self.threads)

    @cached_property
    def recognised(self) -> Certificate:
        """Whether the whole is a sphere or a ball."""
        if self.torn or self.twins:
            return Certificate(
                "neither", "a simplex has a link in several pieces, or two simplices one name", self.n
            )
        bad = any((kind == NEITHER).any() for kind in self.verdicts.kind) or self.irregular > 0
        unknown = any((kind == UNDECIDED).any() for kind in self.verdicts.kind)
        limit = self.over(REDUCED_LIMIT)
        found = recognise(
            self.t,
            manifold=False if bad else None if unknown else True,
            homology=None if self.no_integers else self.integral,
            threads=self.threads,
            tries=TRIES if limit is None else (),
        )
        if found.verdict == "undecided" and limit is not None:
            return Certificate("undecided", f"moves not tried: {limit}", self.n)
        return found

    # -- over the integers -------------------------------------------------------------------------

    @cached_property
    def torn(self) -> bool:
        """Whether a label set names a simplex with a link in several pieces."""
        return any(len(rows) for rows in self.census.scattered)

    @cached_property
    def no_integers(self) -> str | None:
        """Why homology over the integers is left out, or None."""
        pieces = self.n * (factorial(self.d + 1) if self.irregular else 1)
        if self.full or pieces <= INTEGRAL_LIMIT:
            return None
        return f"{pieces} simplices, limit {INTEGRAL_LIMIT}; --full"

    def _homology(self, relative: bool) -> list[list[int]]:
        return integral_homology(
            self.t,
            relative=relative,
            counted=self.census,
            facets=self.facet_classes,
            threads=self.threads,
        )

    @cached_property
    def integral(self) -> list[list[int]]:
        """H_0 .. H_D over the integers."""
        return self._homology(False)

    @cached_property
    def relative(self) -> list[list[int]]:
        """The same relative to the boundary."""
        return self._homology(True)

    @cached_property
    def groups(self) -> list[Presentation]:
        """The fundamental group of each component, from the foam."""
        return foam_groups(self.s, threads=self.threads)

    @cached_property
    def tree(self) -> SimplexTree | None:
        """gudhi's simplex tree of the witness."""
        from ..topology.gudhi import simplex_tree

        return None if self.witness is None else simplex_tree(self.witness.facets)

    # -- naming ------------------------------------------------------------------------------------

    def simplex_name(self, m: int, first: int) -> str:
        """A simplex with `m` corners by its first occurrence: labels, or corners of a top simplex."""
        from ..topology.classes import corner_subsets

        subsets = corner_subsets(self.d, m)
        simplex, subset = divmod(int(first), len(subsets))
        corners = subsets[subset]
        if self.t.corners is not None:
            return " ".join(map(str, self.t.named(self.t.corners[simplex, corners])))
        word = "corner" if m == 1 else "corners"
        return f"{word} {' '.join(map(str, corners.tolist()))} of simplex {simplex}"

    def place(self, vertex: int) -> str:
        return self.t.place(int(vertex))


def named(items: Sequence[Any], total: int | None = None) -> str:
    """The first ten of `items`, and how many more there are of `total`."""
    total = len(items) if total is None else total
    more = f"; and {total - SHOWN} more" if total > SHOWN else ""
    return "; ".join(str(x) for x in items[:SHOWN]) + more


def _boundary_facets(t: Triangulation, points: np.ndarray) -> np.ndarray:
    """The boundary facets by the points at their corners, ascending, int64, shape (B, D)."""
    vertex, slot = np.nonzero(t.across < 0)
    others = np.array([[c for c in range(t.dimension + 1) if c != i] for i in range(t.dimension + 1)])
    return np.sort(points[vertex[:, None], others[slot]], axis=1).astype(np.int64)
