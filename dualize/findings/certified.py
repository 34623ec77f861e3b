"""What the links make of the space, with certificates; and whether it is a sphere or a ball."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from ..audit import Finding
from ..certificates import BALL, NEITHER, SPHERE, UNDECIDED, space_kind
from .space import SIMPLEX
from .subject import LINK_LIMIT, Subject, named

__all__ = ["check_certificates", "check_recognised"]

WORDS = {SPHERE: "spheres", BALL: "balls", NEITHER: "neither", UNDECIDED: "undecided"}


def check_certificates(x: Subject) -> Iterator[Finding]:
    """The verdicts on links by dimension, the certificates, and the kind of space."""
    if (reason := x.over(LINK_LIMIT)) is not None:
        yield Finding("certificates", "figure", "not checked", against=reason)
        yield Finding("space", "figure", "not checked", against=reason)
        return
    verdicts = x.verdicts
    figure: dict[str, Any] = {}
    for m, kind in enumerate(verdicts.kind, 1):
        tally = {word: int((kind == code).sum()) for code, word in WORDS.items()}
        figure[f"{SIMPLEX[m]}s"] = {word: n for word, n in tally.items() if n}
    against = "circles and arcs by the gluings, surfaces by their Euler characteristics"
    where = ""
    if x.d == 4:
        times = np.bincount(verdicts.which[verdicts.which >= 0], minlength=len(verdicts.certificates))
        figure["different links of points"] = len(verdicts.certificates)
        figure["moves"] = sum(c.moves for c in verdicts.certificates)
        against += (
            "; links of points reduced by bistellar moves to the boundary of a 4-simplex, equal ones once"
        )
        rows = []
        for number, certificate in enumerate(verdicts.certificates):
            first = int(np.argmax(verdicts.which == number))
            who = x.simplex_name(1, x.census.classes[0].first[first])
            word = f"{certificate.verdict}, {certificate.reason}"
            rows.append(
                f"point {who} and {times[number] - 1} more: {certificate.simplices} tetrahedra, {word}"
            )
        where = named(rows)
    yield Finding("certificates", "figure", "stated", figure or "circles and arcs", against, where)
    yield _space(x)


def _space(x: Subject) -> Finding:
    verdicts = x.verdicts
    offenders = []
    for m, kind in enumerate(verdicts.kind, 1):
        for code in (NEITHER, UNDECIDED):
            for y in np.flatnonzero(kind == code).tolist():
                who = x.simplex_name(m, x.census.classes[m - 1].first[y])
                word = "link neither sphere nor ball" if code == NEITHER else "link undecided"
                offenders.append(f"{SIMPLEX[m]} {who}: {word}, {verdicts.reason(m, y)}")
    if x.twins:
        what = "none: several simplices have the same labels"
    elif any(len(rows) for rows in x.census.scattered):
        what = "pseudomanifold: a simplex has a link in several pieces"
    elif x.irregular:
        what = "pseudomanifold: a simplex is glued to itself"
    else:
        what = space_kind(verdicts, x.closed)
    if what == "undecided":
        what = "undecided: a homology manifold, some links of points neither shown to be spheres nor excluded"
    elif "manifold" in what and (parts := int(x.s.counts["components"])) > 1:
        what += f", {parts} components"
    against = "links of all simplices"
    return Finding("space", "figure", "stated", what, against, named(offenders), tuple(offenders))


def check_recognised(x: Subject) -> Iterator[Finding]:
    """Is the whole a sphere, or a ball?"""
    if (reason := x.over(LINK_LIMIT)) is not None:
        for name in ("sphere", "ball"):
            yield Finding(name, "property", "undecided", "not checked", reason)
        return
    found = x.recognised
    against = "bistellar moves, homology, the group"
    for name, possible in (("sphere", x.closed), ("ball", not x.closed)):
        if not possible:
            yield Finding(name, "property", "no", "it is closed" if x.closed else "it has a boundary")
        elif found.verdict == name:
            yield Finding(name, "property", "yes", found.reason, against)
        else:
            verdict = "no" if found.verdict == "neither" else "undecided"
            yield Finding(name, "property", verdict, found.reason, against)
