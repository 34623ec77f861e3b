"""Checks that count: cells against simplices, Euler characteristics, linear relations of f-vectors."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from ..audit import Finding
from ..kernels import engine
from ..kernels.classes import join_pairs, number_classes
from .subject import Subject

__all__ = ["check_counts", "check_euler", "check_relations", "euler"]


def euler(f: Sequence[int]) -> int:
    """The alternating sum of an f-vector."""
    return sum((-1) ** x * n for x, n in enumerate(f))


def check_counts(x: Subject) -> Iterator[Finding]:
    """Cells against simplices counted on their own; components; degrees of ridges."""
    s, d, c = x.s, x.d, x.s.counts
    f = x.census.f
    cells = [
        c["faces_internal"] + c["faces_external"],
        c["edges_internal"] + c["edges_external"],
        c["vertices"],
    ]
    names = ["faces and ridges", "edges and facets", "vertices and simplices"]
    named_by_labels = x.t.corners is not None and x.t.matched
    source = "different label sets" if named_by_labels else "classes of corners under the gluings"
    kept = x.twins or any(len(rows) for rows in x.census.scattered[d - 2 :])
    figure = {
        "sizes": dict(zip(names, cells, strict=True)),
        "wedges": len(s["faces/vertex"]),
    }
    if kept:
        yield Finding(
            "counts",
            "identity",
            "not checked",
            figure,
            "several cells share one label set: kept singular on request",
        )
    else:
        wrong = [
            f"{mine} cells for {theirs} {name.split(' and ')[1]}"
            for name, mine, theirs in zip(names, cells, f[d - 2 :], strict=True)
            if mine != theirs
        ]
        # both sides of 2 E_int + E_ext = (D + 1) V, and one visit of a face at every wedge
        if 2 * c["edges_internal"] + c["edges_external"] != (d + 1) * c["vertices"]:
            wrong.append("2 E_int + E_ext is not (D + 1) V")
        if 2 * c["links"] != d * c["nodes"]:
            wrong.append("2 L is not D B")
        if wrong:
            yield Finding("counts", "identity", "violated", wrong, source)
        else:
            yield Finding("counts", "identity", "holds", figure["sizes"], f"{source}; (D + 1) V; D B")
    yield _components(x)
    yield Finding("f-vector", "figure", "stated", list(f), source)
    yield Finding(
        "ridge-degrees", "figure", "stated", _degrees(x), "number of vertices of a face: how many faces"
    )


def _degrees(x: Subject) -> dict[str, dict[str, int]]:
    length = np.diff(x.s["faces/vertex_offsets"])
    interior = int(x.s.counts["faces_internal"])
    out = {}
    for kind, part in (("internal", length[:interior]), ("external", length[interior:])):
        if len(part):
            degree, often = np.unique(part, return_counts=True)
            out[kind] = {str(k): int(n) for k, n in zip(degree.tolist(), often.tolist(), strict=True)}
    return out


def _components(x: Subject) -> Finding:
    """Components of bulk and boundary by joining neighbours, against the tables."""
    run = engine(x.n, x.threads)
    across = x.t.across
    here = np.repeat(np.arange(x.n, dtype=across.dtype), x.d + 1)
    there = across.ravel()
    parent = np.arange(x.n, dtype=across.dtype)
    component = np.empty_like(parent)
    glued = there >= 0
    parts = run(join_pairs, here[glued], there[glued], parent) or run(number_classes, parent, component)
    against = "neighbours joined one by one"
    figure = {"bulk": int(parts), "boundary": int(x.walk.component.max()) + 1 if not x.closed else 0}
    if int(x.s.counts["components"]) != parts:
        what = f"counts say {x.s.counts['components']}, the gluings {parts}"
        return Finding("components", "identity", "violated", what, against)
    if not np.array_equal(component, x.s["vertices/component"]):
        v = int(np.argmax(component != x.s["vertices/component"]))
        what = f"vertex {v} lies in component {component[v]}, not {x.s['vertices/component'][v]}"
        return Finding("components", "identity", "violated", what, against)
    return Finding("components", "identity", "holds", figure, against)


def check_euler(x: Subject) -> Iterator[Finding]:
    """The Euler characteristic from own counts and from gudhi's."""
    own = euler(x.census.f)
    if x.tree is None or x.witness is None:
        yield Finding("euler", "identity", "not checked", own, f"own counts; gudhi: {x.no_witness}")
        return
    if x.irregular:
        reason = f"{x.irregular} simplices are glued to themselves, so counting does not give it"
        yield Finding("euler", "identity", "not checked", own, reason)
        return
    from ..topology.gudhi import simplices_per_dimension

    theirs = simplices_per_dimension(x.tree)
    if x.witness.same:
        against = "own simplex counts; gudhi's simplex tree, dimension by dimension"
        good = theirs == x.census.f
    else:
        against = f"own simplex counts; {x.witness.who}"
        good = euler(theirs) == own
    if good:
        yield Finding("euler", "identity", "holds", own, against)
    else:
        yield Finding("euler", "identity", "violated", f"own counts {x.census.f}, gudhi {theirs}", against)


def check_relations(x: Subject) -> Iterator[Finding]:
    """Linear relations of the numbers of simplices and cells, where they must hold."""
    yield _dehn_sommerville(x)
    yield _euler_dual(x)
    chi, edge = euler(x.census.f), euler(x.boundary_f)
    wanted = (1 - (-1) ** x.d) * chi
    against = f"{1 - (-1) ** x.d} times that of the whole"
    if x.link_trouble:
        yield Finding("euler-boundary", "identity", "not checked", edge, x.link_trouble)
    elif edge == wanted:
        yield Finding("euler-boundary", "identity", "holds", edge, against)
    else:
        yield Finding("euler-boundary", "identity", "violated", f"{edge}, not {wanted}", against)


def _dehn_sommerville(x: Subject) -> Finding:
    """M. Dehn 1905, D. M. Y. Sommerville 1927, V. Klee, Canad. J. Math. 16 (1964) 517-531 (from memory).

    A bounded complex through its double, which has 2 f(M) - f(boundary) simplices."""
    f = [2 * n - b for n, b in zip(x.census.f, [*x.boundary_f, 0], strict=True)]
    relations = {
        2: {"2 f1 - 3 f2": 2 * f[1] - 3 * f[2]},
        3: {"f2 - 2 f3": f[2] - 2 * f[-1], "f0 - f1 + f2 - f3": euler(f)},
        4: {
            "2 f3 - 5 f4": 2 * f[-2] - 5 * f[-1],
            "2 f1 - 3 f2 + 4 f3 - 5 f4": 2 * f[1] - 3 * f[2] + 4 * f[-2] - 5 * f[-1],
        },
    }[x.d]
    against = "zero in a manifold" if x.closed else "zero in the double of a manifold, 2 f - f(boundary)"
    if x.link_trouble:
        return Finding("dehn-sommerville", "identity", "not checked", relations, x.link_trouble)
    verdict = "violated" if any(relations.values()) else "holds"
    return Finding("dehn-sommerville", "identity", verdict, relations, against)


def _euler_dual(x: Subject) -> Finding:
    """Of the dual cells, those of the boundary included; above dimension 2 they are dual to few corners."""
    c, d = x.s.counts, x.d
    levels = [
        c["vertices"] + c["nodes"],
        c["edges_internal"] + c["edges_external"] + c["links"],
        c["faces_internal"] + c["faces_external"],
    ]
    f, edge = x.census.f, [*x.boundary_f, 0]
    # a simplex with m corners has a cell of dimension D + 1 - m, and one less in the boundary
    if d >= 3:
        levels[2] += edge[d - 3]
        levels.append(f[d - 3])
    if d == 4:
        levels[3] += edge[0]
        levels.append(f[0])
    chi, own = euler(levels), euler(f)
    against = "own simplex counts; tests the bookkeeping of the boundary cells"
    if x.link_trouble:
        return Finding(
            "euler-dual", "identity", "not checked", chi, f"{x.link_trouble}, so dual blocks are no cells"
        )
    if chi == own:
        return Finding("euler-dual", "identity", "holds", chi, against)
    return Finding("euler-dual", "identity", "violated", f"{chi}, not {own}", against)
