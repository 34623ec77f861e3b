"""What kind of space the foam is dual to: links, manifolds, orientation, coordinates."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ..audit import Finding
from ..certificates import NEITHER, UNDECIDED
from ..topology.geometry import shapes
from ..topology.integral import abelian_name
from .subject import LINK_LIMIT, Subject, named

__all__ = ["check_coordinates", "check_links", "check_space"]

SIMPLEX = {1: "point", 2: "segment", 3: "triangle"}


def _offenders(x: Subject) -> list[str]:
    """Simplices whose links are known to be wrong, the worst first."""
    out: list[tuple[float, str]] = []
    for m, rows in enumerate(x.census.scattered, 1):
        for row in rows.tolist():
            text = " ".join(map(str, x.t.named(np.array(row))))
            out.append((-100.0, f"{SIMPLEX[m]} {text}: disconnected link"))
    for m, level in enumerate(x.census.classes, 1):
        for y in np.flatnonzero(level.irregular).tolist():
            out.append((-99.0, f"{SIMPLEX[m]} {x.simplex_name(m, level.first[y])}: glued to itself"))
    links = x.links
    assert links is not None
    for m in range(1, x.d - 1):
        for y in np.flatnonzero(links.wrong(m)).tolist():
            chi, right = int(links.euler[m - 1][y]), int(links.expected[m - 1][y])
            kind = "ball" if links.boundary[m - 1][y] else "sphere"
            who = x.simplex_name(m, x.census.classes[m - 1].first[y])
            out.append((-abs(chi - right), f"{SIMPLEX[m]} {who}: chi {chi}, not {right} as of a {kind}"))
    for y, factors in links.homology.items():
        if factors:
            who = x.simplex_name(1, x.census.classes[0].first[y])
            out.append((-len(factors), f"point {who}: H_1 = {abelian_name(factors)}"))
    return [text for _, text in sorted(out, key=lambda pair: pair[0])]


def check_links(x: Subject) -> Iterator[Finding]:
    """Links of interior simplices as spheres, of boundary simplices as balls."""
    links = x.links
    if links is None:
        reason = x.over(LINK_LIMIT) or ""
        yield Finding("homology-manifold", "property", "undecided", "not checked", reason)
        yield Finding("manifold", "property", "undecided", "not checked", reason)
        yield Finding("links", "figure", "not checked", against=reason)
        return
    bad = _offenders(x)
    if x.twins:
        bad.insert(0, "several simplices have the same labels")
    where = named(bad)
    source = {
        2: "links of points: circles and arcs, by the gluings",
        3: "Euler characteristics and connectedness, which classify surfaces",
        4: "Euler characteristics and connectedness of all links, H_1 over the integers at points",
    }[x.d]
    if bad:
        what = f"{len(bad)} links are no homology spheres or balls"
        every = tuple(bad)
        yield Finding("homology-manifold", "property", "no", what, source, where, every)
        yield Finding("manifold", "property", "no", what, source, where, every)
    else:
        yield Finding(
            "homology-manifold", "property", "yes", "all links are homology spheres or balls", source
        )
        yield _manifold(x)
    figure: dict[str, object] = {}
    for m in range(1, x.d - 1):
        touched = links.boundary[m - 1]
        tally = {
            "inside": int((~touched).sum()),
            "on the boundary": int(touched.sum()),
            "wrong Euler characteristic": int(links.wrong(m).sum()),
        }
        if m == 1 and links.simply_connected is not None:
            tally |= {
                "link simply connected": int(links.simply_connected.sum()),
                "H_1 = 0, group not decided": sum(not f for f in links.homology.values()),
                "H_1 not 0": sum(bool(f) for f in links.homology.values()),
            }
        figure[f"{SIMPLEX[m]}s"] = {key: value for key, value in tally.items() if value}
    yield Finding(
        "links", "figure", "stated", figure or "circles and arcs", "2 a sphere, 0 an odd sphere, 1 a ball"
    )


def _manifold(x: Subject) -> Finding:
    """A homology manifold: is it a manifold?"""
    name, kind = "manifold", "property"
    if x.d < 4:
        what = "all links are spheres or balls"
        return Finding(name, kind, "yes", what, "decided in this dimension by homology")
    verdicts = x.verdicts
    for code, verdict in ((NEITHER, "no"), (UNDECIDED, "undecided")):
        points = np.flatnonzero(verdicts.kind[0] == code).tolist()
        if not points:
            continue
        who = [
            f"point {x.simplex_name(1, x.census.classes[0].first[y])}: {verdicts.reason(1, y)}"
            for y in points
        ]
        if code == NEITHER:
            what = f"{len(points)} links are homology spheres or balls, but no spheres or balls"
            against = "fundamental groups of the links; homology alone does not tell"
        else:
            what = f"{len(points)} links are homology spheres or balls, neither shown to be more nor excluded"
            against = "bistellar moves, fundamental groups and their homomorphisms to A5 and PSL(2,7)"
        return Finding(name, kind, verdict, what, against, named(who), tuple(who))
    by_moves = np.array([bool(c.stages) for c in verdicts.certificates] + [False])[verdicts.which]
    what = (
        f"all links are spheres or balls, {int(by_moves.sum())} of {len(by_moves)} shown by bistellar moves"
    )
    if not by_moves.all():
        what += ", the others by their trivial groups (Poincaré theorem)"
    return Finding(name, kind, "yes", what, "certificates of the links of points; surfaces are classified")


def check_space(x: Subject) -> Iterator[Finding]:
    """Connected, closed, orientable, and how far the gluings are a simplicial complex."""
    s, c = x.s, x.s.counts

    def answer(name: str, yes: bool, figure: object, against: str = "", where: str = "") -> Finding:
        return Finding(name, "property", "yes" if yes else "no", figure, against, where)

    parts = int(c["components"])
    yield answer(
        "connected", parts == 1, f"{parts} component{'' if parts == 1 else 's'}", "neighbours across facets"
    )
    yield answer("closed", x.closed, f"{c['nodes']} boundary facets")
    flags = x.orientable
    bad = [f"component {k}" for k, good in enumerate(flags) if not good]
    yield answer(
        "orientable",
        not bad,
        f"{sum(flags)} of {parts} components",
        "no twisted edge",
        named(bad) if bad else "",
    )
    named_by_labels = x.t.corners is not None and x.t.matched
    if x.labels is not None:
        how = "labels" if named_by_labels else "classes of points"
        yield answer("simplicial", True, f"the {how} of its points name every simplex")
    else:
        what = "two simplices have the same labels" if x.twins else "the points of a simplex do not name it"
        yield answer("simplicial", False, what)
    yield _regular(x)
    yield answer(
        "ordered",
        bool(s.flags["ordered"]),
        "corners ascend at both ends of every edge"
        if s.flags["ordered"]
        else "a change of basis at some edges",
    )


def _regular(x: Subject) -> Finding:
    s = x.s
    if "faces/singular" not in s:
        return Finding("regular", "property", "yes", "no holonomy, no pinched ridge, no twins", "the gluings")
    singular = s["faces/singular"]
    faces = np.flatnonzero(singular)
    figure = {
        "holonomy": int((singular & 1).sum()),
        "pinched": int((singular >> 1).sum()),
        "twins": int(x.twins),
    }
    return Finding(
        "regular", "property", "no", figure, "kept on request", named([f"face {f}" for f in faces.tolist()])
    )


def check_coordinates(x: Subject) -> Iterator[Finding]:
    """Volumes of simplices, and the sides of facets on which neighbours lie."""
    points = None
    if x.t.coordinates is not None and x.t.coordinates.corner is None and x.t.corners is None:
        points = x.census.classes[0].number
    found = shapes(x.t, points)
    if found is None:
        reason = "no coordinates" if x.t.coordinates is None else "fewer axes than dimensions"
        yield Finding("volumes", "property", "undecided", "not checked", reason)
        yield Finding("sides", "property", "undecided", "not checked", reason)
        return
    against = f"{found.axes} axes, differences within a simplex"
    flat = found.flat.tolist()
    if flat:
        where = named([x.place(v) for v in flat[:10]], len(flat))
        yield Finding("volumes", "property", "no", f"{len(flat)} simplices of zero volume", against, where)
    else:
        figure = f"from {found.smallest:.3g} to {found.largest:.3g}"
        yield Finding("volumes", "property", "yes", figure, against)
    if len(found.apart):
        where = named([f"slot {i} of {x.place(v)}" for v, i in found.apart[:10].tolist()], len(found.apart))
        what = f"{len(found.apart)} facets have different edges in their two charts"
        yield Finding("sides", "property", "no", what, against, where)
    elif found.folded is None:
        what = f"{found.axes} axes for {x.d} dimensions: a facet has no two sides"
        yield Finding("sides", "property", "undecided", "not checked", what)
    elif len(found.folded):
        where = named([f"slot {i} of {x.place(v)}" for v, i in found.folded[:10].tolist()], len(found.folded))
        what = f"{len(found.folded)} facets have both neighbours on one side"
        yield Finding("sides", "property", "no", what, against, where)
    elif len(found.turned):
        where = named([f"slot {i} of {x.place(v)}" for v, i in found.turned[:10].tolist()], len(found.turned))
        what = (
            f"opposite, but {len(found.turned)} facets lie in charts turned against each other, as at a twist"
        )
        yield Finding("sides", "property", "undecided", what, against, where)
    elif flat:
        yield Finding("sides", "property", "undecided", "opposite wherever there is a volume", against)
    else:
        yield Finding("sides", "property", "yes", "neighbours on opposite sides of every facet", against)
