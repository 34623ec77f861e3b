"""Gluing along boundary facets, and the disjoint union."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from ..errors import InputError, TriangulationError
from ..triangulation import Triangulation
from .common import Changed, label_numbers, need_labels, number, show, simplex_number
from .joints import (
    Charts,
    charts_and_points,
    charts_of_both,
    finished,
    merged_labels,
    side_by_side,
    with_gluings,
)
from .tables import orientations

if TYPE_CHECKING:
    from ..match import Match
    from ..skeleton import Skeleton

__all__ = ["glue", "glue_facets", "union"]


def union(first: Triangulation, second: Triangulation) -> Changed:
    """The disjoint union; labels of the second complex that the first one uses too get new ones.

    Examples
    --------
    >>> t = Triangulation.from_facets([[0, 1, 2]])
    >>> union(t, t).triangulation.corners.tolist()
    [[0, 1, 2], [3, 4, 5]]
    """
    table, labels, words, notes, renamed = side_by_side(first, second, {})
    result = finished(table, labels, words, charts_of_both(first, second), np.arange(len(table)), notes)
    return _naming(result, renamed)


def glue(
    first: Triangulation,
    second: Triangulation | None = None,
    names: Mapping[Any, Any] | Match | None = None,
    *,
    found: bool = False,
    components: tuple[int, int] | None = None,
) -> Changed:
    """Glue two complexes, or one to itself, along boundary facets.

    Parameters
    ----------
    first : Triangulation
        A labelled complex; with `found` or a `Match` also a gluing table.
    second : Triangulation, optional
        Another one; without it `first` is glued to itself.
    names : mapping or Match, optional
        Label in `first` to which each label of `second` (of `first` itself) is glued.  Boundary facets all
        of whose labels it holds are glued to those with the labels it gives.  By default, of two complexes,
        equal labels.  Or a map of the whole boundary of `first` to that of `second`, as `dualize.match` finds
        it for their foams.
    found : bool
        Instead: glue the whole boundaries by an isomorphism that is looked for, one that reverses their
        orientations if there is one.
    components : (int, int), optional
        Instead: glue these two boundary components of `first` by an isomorphism that is looked for.

    Returns
    -------
    Changed
        With the labels and the orientation of `first`; other labels of `second` stay if `first` does not use
        them.  Where the result is no simplicial complex it is a gluing table.  `refined_from` counts the
        simplices of `second` behind those of `first`.

    Raises
    ------
    InputError
        If no facets are glued, a facet of the mapping has no partner, or points are to be identified that
        lie on no glued facet.

    Examples
    --------
    >>> a = Triangulation.from_facets([[0, 1, 2, 3]])
    >>> b = Triangulation.from_facets([[1, 2, 3, 4]])
    >>> glue(a, b).triangulation.across.tolist()
    [[1, -1, -1, -1], [-1, -1, -1, 0]]
    """
    if (names is not None) + found + (components is not None) > 1:
        raise InputError("a map of labels, a map to be found and components are different ways to glue")
    if components is not None:
        if second is not None:
            raise InputError("components are those of one complex, and two are given")
        return _glue_itself(first, _component_map(first, components))
    if second is None:
        if not isinstance(names, Mapping):
            raise InputError("gluing a complex to itself needs a map of labels, or two boundary components")
        return _glue_itself(first, names)
    if found:
        return _glue_found(first, second)
    if not isinstance(names, Mapping | None):
        return _glue_boundaries(first, second, names)
    one = need_labels(first, "gluing by labels")
    if second.dimension != first.dimension:
        raise InputError(
            f"complexes of different dimension, {first.dimension} and {second.dimension}, cannot be glued"
        )
    two = need_labels(second, "gluing by labels")
    if (first.corner_names is None) != (second.corner_names is None):
        raise InputError(
            "one complex has words as labels and the other numbers", hint="relabel one of them first"
        )
    used = np.unique(two)
    if names is None:
        mine = set(np.asarray(first.named(np.unique(one))).tolist())
        names = {x: x for x in second.named(used) if x in mine}
    target = dict(
        zip(label_numbers(second, list(names)), label_numbers(first, list(names.values())), strict=True)
    )
    table, labels, words, notes, renamed = side_by_side(first, second, target)
    facets = _boundary(first)
    there = {tuple(sorted(labels_)): (s, i) for (s, i), labels_ in facets}
    pairs = []
    lonely = []
    for (s, i), labels_ in _boundary(second):
        if all(x in target for x in labels_):
            partner = there.get(tuple(sorted(target[x] for x in labels_)))
            if partner is None:
                lonely.append(labels_)
            else:
                pairs.append((partner, (s + len(first), i)))
    _check_glued(second, len(first), pairs, lonely, target)
    return _naming(_join(first, table, labels, words, pairs, charts_of_both(first, second), notes), renamed)


def glue_facets(
    triangulation: Triangulation, pairs: Sequence[tuple[int, Sequence[int], int, Sequence[int]]]
) -> Changed:
    """Glue boundary facets of a complex or a gluing table to each other, corner by corner.

    Parameters
    ----------
    triangulation : Triangulation
    pairs : sequence of (simplex, corners, simplex, corners)
        The D corners of a boundary facet, and those to which they are glued, in the same order.

    Returns
    -------
    Changed
        A labelled complex where `triangulation` is one and the result still is; of labels that become one
        the smallest stays.

    Examples
    --------
    Two facets of a tetrahedron, folded together along their common segment:

    >>> t = Triangulation.from_gluings([[-1] * 4], [[[0] * 4] * 4])
    >>> glue_facets(t, [(0, [1, 2, 3], 0, [0, 2, 3])]).triangulation.across.tolist()
    [[0, 0, -1, -1]]
    """
    t, k = triangulation, triangulation.dimension + 1
    joined = []
    for pair in pairs:
        if len(pair) != 4:
            raise InputError(f"{pair!r} is no gluing", hint="give simplex, corners, simplex, corners")
        sides = []
        for s, corners in (pair[:2], pair[2:]):
            s = simplex_number(t, s)
            chosen = [number(c, "corner", 0, k - 1) for c in corners]
            if len(set(chosen)) != k - 1 or len(chosen) != k - 1:
                raise InputError(f"a facet has {k - 1} corners, and these are {chosen}", t.place(s))
            sides.append((s, chosen))
        joined.append((sides[0], sides[1]))
    table, done = with_gluings(t, joined)
    labels = t.corners if t.corners is not None and t.matched else None
    if labels is not None:
        labels = merged_labels(labels, done)
    words = None if t.corner_names is None else list(t.corner_names)
    return finished(table, labels, words, charts_and_points(t), np.arange(len(t)), [], orientations(t)[0])


# -- maps that are looked for ----------------------------------------------------------------------

MAPS = 5000  # isomorphisms that are looked at for one that reverses orientations


def _glue_found(first: Triangulation, second: Triangulation) -> Changed:
    from ..build import build
    from ..match import match

    a, b = build(first), build(second)
    if not a.counts["nodes"]:
        raise InputError("the first complex has no boundary to glue")
    maps = match(a, b, limit=MAPS, by="isomorphism")
    if not maps:
        raise TriangulationError("the boundaries are not isomorphic, so there is no map to glue them by")
    return _by_match(first, second, a, b, next((m for m in maps if (m.node_sign == -1).all()), maps[0]))


def _glue_boundaries(first: Triangulation, second: Triangulation, given: Match) -> Changed:
    from ..build import build
    from ..match import boundary_map

    a, b = build(first), build(second)
    return _by_match(first, second, a, b, boundary_map(a, b, given.nodes, given.places))


def _by_match(
    first: Triangulation, second: Triangulation, a: Skeleton, b: Skeleton, chosen: Match
) -> Changed:
    k = first.dimension + 1
    pairs = []
    for n, (s, i) in enumerate(zip(a["nodes/vertex"].tolist(), a["nodes/slot"].tolist(), strict=True)):
        there = int(chosen.nodes[n])
        u, j = int(b["nodes/vertex"][there]), int(b["nodes/slot"][there])
        mine, theirs = ([c for c in range(k) if c != x] for x in (i, j))
        pairs.append(((s, mine), (u + len(first), [theirs[p] for p in chosen.places[n].tolist()])))
    table, labels, words, notes, renamed = side_by_side(first, second, {})
    glued, joined = with_gluings(table, pairs)
    if labels is not None:
        labels = merged_labels(labels, joined)
    if not (chosen.node_sign == -1).all():
        notes.append("the map does not reverse the orientation of the boundary everywhere")
    one, _ = orientations(first)
    wanted = np.concatenate([one, orientations(glued)[0][len(first) :]])
    result = finished(
        glued, labels, words, charts_of_both(first, second), np.arange(len(glued)), notes, wanted
    )
    return _naming(result, renamed)


def _component_map(t: Triangulation, components: tuple[int, int]) -> dict:
    """Label of the second boundary component for each label of the first."""
    from ..boundary import boundary_of
    from ..build import build
    from ..match import match

    need_labels(t, "gluing boundary components")
    if t.dimension < 3:
        raise InputError(
            "boundary components can be matched in dimension 3 and 4 only", hint="give the map of labels"
        )
    if components[0] == components[1]:
        raise InputError(
            "a boundary component cannot be glued to itself as a whole", hint="give the map of labels"
        )
    a, b = (build(boundary_of(t, number(c, "component", 0))) for c in components)
    maps = match(a, b, limit=MAPS, whole=True, by="isomorphism")
    if not maps:
        raise TriangulationError("the boundary components are not isomorphic")
    chosen = next((m for m in maps if m.vertex_sign is not None and (m.vertex_sign == -1).all()), maps[0])
    assert chosen.vertices is not None and chosen.corners is not None
    mine = a["vertices/corners"]
    theirs = np.take_along_axis(
        b["vertices/corners"][chosen.vertices], chosen.corners.astype(np.int64), axis=1
    )
    sides = (np.asarray(s.named(rows)).ravel().tolist() for s, rows in ((a, mine), (b, theirs)))
    return dict(zip(*sides, strict=True))


# -- pieces of the above ---------------------------------------------------------------------------


def _boundary(t: Triangulation) -> list[tuple[tuple[int, int], list[int]]]:
    """((simplex, slot), labels in the order of the corners) of each boundary facet."""
    assert t.corners is not None
    return [((s, i), np.delete(t.corners[s], i).tolist()) for s, i in np.argwhere(t.across < 0).tolist()]


def _check_glued(
    second: Triangulation, offset: int, pairs: list, lonely: list, target: Mapping[int, int]
) -> None:
    if not pairs:
        raise InputError(
            "no boundary facet of one has the labels of a boundary facet of the other, so nothing is glued",
            hint="give the map of labels, or relabel one complex; `union` puts them side by side",
        )
    if lonely:
        raise InputError(
            f"{len(lonely)} boundary facet{'s' if len(lonely) > 1 else ''} of the second complex "
            "with labels to glue has no partner on the first",
            show(second, lonely[0]),
            "all facets on common labels must match; relabel what is not to be glued",
        )
    assert second.corners is not None
    glued = {x for _, (s, i) in pairs for x in np.delete(second.corners[s - offset], i).tolist()}
    if left := [x for x in target if x not in glued]:
        raise InputError(
            f"{len(left)} point{'s' if len(left) > 1 else ''} of the second complex would be identified "
            "with one of the first without lying on a glued facet",
            show(second, left[:10]),
            "relabel these points in one of the complexes",
        )


def _glue_itself(t: Triangulation, names: Mapping[Any, Any]) -> Changed:
    corners = need_labels(t, "gluing by labels")
    target = dict(zip(label_numbers(t, list(names)), label_numbers(t, list(names.values())), strict=True))
    facets = _boundary(t)
    there = {tuple(sorted(labels)): place for place, labels in facets}
    joined = []
    done: set[tuple[int, int]] = set()
    for (s, i), labels in facets:
        if (s, i) in done or not all(x in target for x in labels):
            continue
        image = [target[x] for x in labels]
        partner = there.get(tuple(sorted(image)))
        if partner is None:
            raise InputError(
                "a boundary facet is carried to labels that are no boundary facet",
                f"{show(t, labels)} to {show(t, image)}",
            )
        if partner == (s, i) or partner in done:
            raise TriangulationError(
                "a facet would be glued to itself, or to two others", f"{show(t, labels)} to {show(t, image)}"
            )
        done |= {(s, i), partner}
        row = corners[s].tolist()
        other = corners[partner[0]].tolist()
        joined.append(((s, [row.index(x) for x in labels]), (partner[0], [other.index(x) for x in image])))
    if not joined:
        raise InputError("the map holds all labels of no boundary facet, so nothing is glued")
    table, pairs = with_gluings(t, joined)
    labels_ = merged_labels(corners, pairs)
    words = None if t.corner_names is None else list(t.corner_names)
    return finished(table, labels_, words, charts_and_points(t), np.arange(len(t)), [], orientations(t)[0])


def _join(
    first: Triangulation,
    table: Triangulation,
    labels: np.ndarray | None,
    words: list[str] | None,
    pairs: list,
    chart: Charts,
    notes: list[str],
) -> Changed:
    """Glue the facets of two complexes in one table, the corners by equal labels."""
    assert labels is not None
    joined = []
    for (s, i), (u, j) in pairs:
        row, other = labels[s].tolist(), labels[u].tolist()
        mine = [c for c in range(len(row)) if c != i]
        theirs = [other.index(row[c]) for c in mine]
        if j in theirs:
            raise InputError(
                "a glued facet meets labels in another order than its own", f"labels {row} and {other}"
            )
        joined.append(((s, mine), (u, theirs)))
    glued, _ = with_gluings(table, joined)
    one, _ = orientations(first)
    wanted = np.concatenate([one, orientations(glued)[0][len(first) :]])
    return finished(glued, labels, words, chart, np.arange(len(table)), notes, wanted)


def _naming(result: Changed, renamed: list[tuple]) -> Changed:
    """The result with what is left of the labels that were renamed."""
    t = result.triangulation
    if t.corners is None:
        return result
    there = set(np.asarray(t.named(np.unique(t.corners))).tolist())
    left = [pair for pair in renamed if pair[1] in there]
    notes = result.notes
    if left:
        shown = ", ".join(f"{a} -> {b}" for a, b in left[:10])
        more = f" and {len(left) - 10} more" if len(left) > 10 else ""
        notes = (*notes, f"labels of the second complex renamed: {shown}{more}")
    return Changed(t, result.refined_from, [new for _, new in left], notes)
