"""Coloured graphs: what the graph says of itself against the skeleton, jackets, degree, melons."""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial
from typing import Any

import numpy as np

from ..audit import SHOWN, Finding
from ..layout import wedge_pairs
from ..topology.coloured import bipartite, faces_by_degree, jackets, melon_removals, sub_graph_counts
from .subject import Subject, named

__all__ = ["check_coloured", "is_coloured"]


def is_coloured(x: Subject) -> bool:
    """Whether the skeleton was made of a coloured graph."""
    return "colours/edge" in x.s and x.t.keeps_colours


def check_coloured(x: Subject) -> Iterator[Finding]:
    """Two routes to orientability and to the numbers of simplices; jackets, degree, melons."""
    counts = sub_graph_counts(x.t)
    yield _bipartite(x)
    yield from _sub_graphs(x, counts)
    if not x.closed:
        reason = "the graph has a boundary"
        yield Finding("face-formula", "identity", "not checked", against=reason)
        yield Finding("melonic-degree", "identity", "not checked", against=reason)
        yield Finding("jackets", "figure", "not checked", against=reason)
        yield Finding("degree", "figure", "not checked", against=reason)
        yield Finding("melonic", "property", "undecided", "not checked", reason)
        return
    found = jackets(x.t)
    degree = sum(jacket.genus for jacket in found)
    genera = {" ".join(map(str, jacket.cycle)): _plain(jacket.genus) for jacket in found}
    orientable = all(x.s.flags["orientable"])
    meaning = "genera" if orientable else "genera, half the cross-caps where a component is not orientable"
    yield Finding("jackets", "figure", "stated", genera, f"cycles of colours: {meaning}")
    yield Finding("degree", "figure", "stated", _plain(degree), "sum of the genera of the jackets")
    faces = int(x.s.counts["faces_internal"])
    wanted = faces_by_degree(x.d, x.n, int(x.s.counts["components"]), degree)
    against = "D (D - 1) / 4 p + D c - 2 degree / (D - 1)!, p vertices in c components"
    if faces == wanted:
        yield Finding("face-formula", "identity", "holds", faces, against)
    else:
        yield Finding("face-formula", "identity", "violated", f"{faces}, not {_plain(wanted)}", against)
    yield from _melons(x, degree)


def _plain(value: float) -> Any:
    return int(value) if value == int(value) else value


def _bipartite(x: Subject) -> Finding:
    ours = list(map(bool, x.s.flags["orientable"]))
    theirs = bipartite(x.t)
    finding = partial(Finding, "bipartite", "identity")
    against = "components without a twist against the double cover of the graph"
    if ours == theirs:
        return finding(
            "holds", f"{sum(theirs)} of {len(theirs)} components bipartite and orientable", against
        )
    wrong = [f"component {c}" for c, (a, b) in enumerate(zip(ours, theirs, strict=False)) if a != b]
    return finding("violated", f"{sum(theirs)} bipartite, {sum(ours)} orientable", against, named(wrong))


def _sub_graphs(x: Subject, counts: dict[tuple[int, ...], int]) -> Iterator[Finding]:
    """Simplices of every dimension, faces of every pair of colours, against connected sub-graphs."""
    figure = {" ".join(map(str, c)): n for c, n in counts.items() if 2 <= len(c) <= x.d}
    yield Finding(
        "colour-sets", "figure", "stated", figure, "connected sub-graphs of the edges of these colours"
    )
    pairs = np.array(wedge_pairs(x.d))
    code = x.s["colours/face"].astype(np.int64) @ [x.d + 1, 1]
    faces = np.bincount(code, minlength=(x.d + 1) ** 2)[pairs @ [x.d + 1, 1]]
    wrong = [
        f"{n} faces of colours {i} {j}, {counts[i, j]} sub-graphs"
        for (i, j), n in zip(pairs.tolist(), faces.tolist(), strict=True)
        if n != counts[i, j]
    ]
    levels = [sum(n for c, n in counts.items() if len(c) == x.d - m) for m in range(x.d + 1)]
    if levels != x.census.f:
        wrong.append(f"sub-graphs {levels}, simplices {x.census.f}")
    against = "faces of each pair of colours, simplices of each dimension"
    if wrong:
        yield Finding("sub-graphs", "identity", "violated", wrong[:SHOWN], against)
    else:
        yield Finding("sub-graphs", "identity", "holds", levels, against)


def _melons(x: Subject, degree: float) -> Iterator[Finding]:
    removals = melon_removals(x.t)
    melonic = removals is not None
    if removals is not None:
        shown = [f"{v}-{w}" + (f" on colour {c}" if c >= 0 else " last") for v, w, c in removals]
        figure = f"{sum(c >= 0 for *_, c in removals)} melons removed one after the other"
        yield Finding("melonic", "property", "yes", figure, "the removals are the certificate", named(shown))
    else:
        yield Finding("melonic", "property", "no", "melons were removed until none was left", "in any order")
    against = "from dimension 3 on a graph is melonic exactly when its degree is 0"
    if x.d < 3:
        yield Finding("melonic-degree", "identity", "not checked", against="dimension 2")
    elif melonic == (degree == 0):
        yield Finding("melonic-degree", "identity", "holds", f"degree {_plain(degree)}", against)
    else:
        what = f"degree {_plain(degree)}, " + ("melonic" if melonic else "not melonic")
        yield Finding("melonic-degree", "identity", "violated", what, against)
