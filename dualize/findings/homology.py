"""Homology: of the triangulation by gudhi, of the foam by its own chain complex, and what must agree."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

import numpy as np

from ..audit import Finding
from ..errors import TriangulationError
from ..topology.gudhi import PRIMES, betti_numbers, cone_off, simplex_tree
from .counting import euler
from .subject import GUDHI_LIMIT, Subject

if TYPE_CHECKING:
    from scipy.sparse import csc_array

__all__ = ["check_betti", "check_foam", "check_orientability", "find_betti"]


def _name(prime: int) -> str:
    return f"Z_{prime}"


def find_betti(x: Subject) -> tuple[dict[int, list[int]], str]:
    """Betti numbers of the triangulation over each field and who found them; empty with the reason.

    Computed once; gudhi where it can hold the complex, else the chain complex of the classes of simplices.
    """
    if x.betti is None:
        x.betti = _find_betti(x)
    return x.betti


def _find_betti(x: Subject) -> tuple[dict[int, list[int]], str]:
    if x.tree is not None and x.witness is not None:
        return {p: betti_numbers(x.tree, p) for p in PRIMES}, x.witness.who
    if x.twins or x.over(GUDHI_LIMIT):
        return {}, str(x.no_witness)
    from ..topology.maps import simplex_maps
    from ..topology.rank import betti_numbers as own_betti

    try:
        maps = simplex_maps(x.t, x.census, x.facet_classes)
    except TriangulationError as error:
        return {}, error.what
    source = f"own chain complex of the simplex classes; gudhi: {x.no_witness}"
    return {p: own_betti(maps, p) for p in PRIMES}, source


def check_betti(x: Subject) -> Iterator[Finding]:
    """Betti numbers over two fields, of the whole and of its boundary, and what they must satisfy."""
    betti, source = find_betti(x)
    if not betti:
        yield Finding("betti", "figure", "not checked", against=source)
        yield Finding("euler-betti", "identity", "not checked", against=source)
        yield Finding("duality", "identity", "not checked", against=source)
    else:
        yield Finding("betti", "figure", "stated", {_name(p): b for p, b in betti.items()}, source)
        chi = euler(x.census.f)
        sums = {_name(p): euler(b) for p, b in betti.items()}
        against = f"alternating sums against {chi} from own counts"
        verdict = "holds" if all(v == chi for v in sums.values()) else "violated"
        if x.irregular:
            verdict, against = "not checked", f"{x.irregular} simplices are glued to themselves: no count"
        yield Finding("euler-betti", "identity", verdict, sums, against)
        yield _duality(x, betti)
    if x.closed:
        yield Finding("boundary-betti", "figure", "stated", "closed")
    elif x.witness is None:
        yield Finding("boundary-betti", "figure", "not checked", against=str(x.no_witness))
    else:
        tree = simplex_tree(x.witness.boundary)
        found = {_name(p): betti_numbers(tree, p) for p in PRIMES}
        yield Finding("boundary-betti", "figure", "stated", found, x.witness.who)


def _duality(x: Subject, betti: dict[int, list[int]]) -> Finding:
    """Poincaré duality b_k = b_(D-k) of a closed homology manifold; over odd fields of an orientable one."""
    if not x.closed:
        return Finding("duality", "identity", "not checked", against="not closed")
    if x.link_trouble:
        return Finding("duality", "identity", "not checked", against=x.link_trouble)
    fields = [p for p in betti if p == 2 or all(x.orientable)]
    names = ", ".join(map(_name, fields))
    wrong = [_name(p) for p in fields if betti[p] != betti[p][::-1]]
    against = "Poincaré duality, b_k = b_(D-k)"
    if wrong:
        return Finding("duality", "identity", "violated", f"not over {', '.join(wrong)}", against)
    return Finding("duality", "identity", "holds", f"over {names}", against)


def check_orientability(x: Subject) -> Iterator[Finding]:
    """Components without a twist against the top Betti number relative to the boundary."""
    mine = sum(x.orientable)
    name, field = "orientability", PRIMES[-1]
    if (reason := x.over(GUDHI_LIMIT)) is not None:
        yield Finding(name, "identity", "not checked", f"{mine} orientable components", reason)
        return
    if x.witness is not None:
        coned = simplex_tree(cone_off(x.witness.facets, x.witness.boundary))
        theirs = betti_numbers(coned, field)[x.d]
        against = f"{x.witness.who}: top Betti number over {_name(field)}" + (
            "" if x.closed else ", boundary coned off"
        )
    else:
        # top chains are numbers on the simplices; those whose boundary misses all inner facets are cycles
        from ..topology.rank import rank_mod

        theirs = x.n - rank_mod(_top_map(x), field)
        against = f"own top Betti number over {_name(field)} relative to the boundary; gudhi: {x.no_witness}"
    if theirs == mine:
        yield Finding(
            name, "identity", "holds", f"{mine} of {x.s.counts['components']} components orientable", against
        )
    else:
        yield Finding(
            name, "identity", "violated", f"{mine} components without a twist, {theirs} cycles", against
        )


def _top_map(x: Subject) -> csc_array:
    """The boundary map of the top simplices into the inner facets."""
    from scipy.sparse import coo_array

    from ..kernels.permutations import permutations_of

    facets, d = x.facet_classes, x.d
    slot = np.arange(d, -1, -1)  # subset number y leaves out corner d - y
    inner = x.t.across[:, slot] >= 0
    sign = permutations_of(d - 1).sign[facets.turn].astype(np.int64) * (1 - 2 * (slot % 2))
    column = np.broadcast_to(np.arange(x.n)[:, None], inner.shape)
    shape = (facets.count, x.n)
    return coo_array((sign[inner], (facets.number[inner], column[inner])), shape=shape).tocsc()


def check_foam(x: Subject) -> Iterator[Finding]:
    """b_0 and b_1 of the foam's chain complex against those of the triangulation."""
    names = ("foam-b0", "foam-b1")
    if (reason := x.over(GUDHI_LIMIT)) is not None:
        for name in names:
            yield Finding(name, "identity", "not checked", against=reason)
        return
    from ..topology.maps import foam_maps
    from ..topology.rank import foam_betti

    d1, d2 = foam_maps(x.s)
    foam = {p: foam_betti(d1, d2, p) for p in PRIMES}
    betti, source = find_betti(x)
    scattered = x.twins or any(len(rows) for rows in x.census.scattered)
    for k, name in enumerate(names):
        mine = {_name(p): foam[p][k] for p in PRIMES}
        if not betti:
            yield Finding(name, "identity", "not checked", mine, source)
            continue
        theirs = {_name(p): betti[p][k] for p in PRIMES}
        obstacle = None
        if k == 0 and scattered:
            obstacle = "some links are disconnected: the foam takes their fans apart"
        elif k == 1 and x.link_trouble:
            obstacle = f"{x.link_trouble}: the foam sees the space without its singular points"
        against = (
            f"b_{k} of the chain complex of vertices, edges, faces, nodes, links; triangulation by {source}"
        )
        if obstacle:
            figure = {"foam": mine, "triangulation": theirs}
            yield Finding(name, "identity", "not checked", figure, obstacle)
        elif mine == theirs:
            yield Finding(name, "identity", "holds", mine, against)
        else:
            yield Finding(name, "identity", "violated", {"foam": mine, "triangulation": theirs}, against)
