"""The boundary of the dual against the dual of the boundary.

The boundary triangulation is made from the triangulation alone (labels matched anew, or walks around the
ridges) and built on its own; then its vertices are the nodes, its edges the links, matched through
node and place.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ..audit import Finding
from ..build import build
from .subject import Subject, named

__all__ = ["check_boundary"]


def check_boundary(x: Subject) -> Iterator[Finding]:
    """Cells, then signs; and the boundary's own figures."""
    if x.closed:
        yield Finding("boundary-cells", "identity", "holds", "closed: no nodes, no links", "the gluings")
        yield Finding("boundary-signs", "identity", "holds", "closed: no nodes, no links", "the gluings")
        yield Finding("boundary", "figure", "stated", "closed")
        return
    matched = x.boundary is not None and x.boundary.matched
    how = "labels matched anew" if matched else "walks around the ridges"
    if x.boundary is not None:
        how += ", built on its own"
    for name, check in (("boundary-cells", _cells), ("boundary-signs", _signs)):
        what, wrong = check(x)
        if wrong:
            yield Finding(name, "identity", "violated", wrong[0], how, named(wrong[1:]) if wrong[1:] else "")
        else:
            yield Finding(name, "identity", "holds", what, how)
    parts = int(x.walk.component.max()) + 1
    figure = {"components": parts, "f-vector": x.boundary_f}
    yield Finding("boundary", "figure", "stated", figure, "the boundary triangulation")


def _cells(x: Subject) -> tuple[str, list[str]]:
    """Nodes, links, places, labels, components."""
    s, w, d = x.s, x.walk, x.d
    link, leaves = s["nodes/link"], s["nodes/link_leaves"]
    b, links = len(w.vertex), int(s.counts["links"])
    wrong = []

    def places(bad: np.ndarray, say: str) -> None:
        for n, k in np.argwhere(bad)[:10].tolist():
            wrong.append(f"node {n}, place {k}: {say}")

    if not (np.array_equal(w.vertex, s["nodes/vertex"]) and np.array_equal(w.slot, s["nodes/slot"])):
        wrong.append("the nodes are not the boundary facets in order")
    places(link[w.there, w.place_there] != link, "another link at the other end of the walk")
    if len(np.unique(link)) != links:
        wrong.append(f"{len(np.unique(link))} of {links} links meet a node")
    end = np.where(leaves > 0, s["links/source"][link], s["links/target"][link])
    places(end != np.arange(b)[:, None], "the link there has other ends")
    for n in np.flatnonzero(w.component != s["nodes/component"])[:10].tolist():
        wrong.append(f"node {n}: component {s['nodes/component'][n]}, not {w.component[n]}")
    if x.t.corners is not None and "nodes/corners" in s and not wrong:
        wrong += _labels(x)
    own = x.boundary
    if own is not None and not wrong:
        if own.matched and not (np.array_equal(own.across, w.there) and np.array_equal(own.rank, w.rank)):
            bad = (own.across != w.there) | (own.rank != w.rank)
            places(bad, "matching the labels leads elsewhere than walking around the ridge")
        dual = build(own, keep_singular=True, threads=x.threads)
        edge = dual["vertices/edge"]
        of_edge = np.full(len(dual["edges/twist"]), -1)
        of_edge[edge] = link
        places(of_edge[edge] != link, "one edge of the boundary's own dual, several links")
        if len(np.unique(of_edge)) != links or dual.counts["nodes"]:
            wrong.append(f"the boundary's own dual has {len(of_edge)} edges for {links} links")
        if not np.array_equal(dual["vertices/component"], s["nodes/component"]):
            wrong.append("the boundary's own dual has other components")
    return f"{b} nodes, {links} links, {b * d} places", wrong


def _labels(x: Subject) -> list[str]:
    """Labels of nodes and links against those of the corners of the simplices."""
    s, w, d = x.s, x.walk, x.d
    assert x.t.corners is not None
    others = np.array([[c for c in range(d + 1) if c != i] for i in range(d + 1)])
    nodes = x.t.corners[w.vertex[:, None], others[w.slot]]
    wrong = [
        f"node {n}: other labels" for n in np.flatnonzero((nodes != s["nodes/corners"]).any(axis=1))[:10]
    ]
    rest = np.array([[c for c in range(d) if c != k] for k in range(d)])
    ridges = np.sort(nodes[:, rest], axis=2)  # (B, D, D - 1): the labels of the ridge at each place
    bad = (s["links/corners"][s["nodes/link"]] != ridges).any(axis=2)
    return wrong + [f"link {s['nodes/link'][n, k]}: other labels" for n, k in np.argwhere(bad)[:10].tolist()]


def _signs(x: Subject) -> tuple[str, list[str]]:
    """Orientations of nodes, directions of links, and ``links/twist``."""
    s, w, d = x.s, x.walk, x.d
    wrong = []
    for n in np.flatnonzero(w.orientation != s["nodes/orientation"])[:10].tolist():
        wrong.append(f"node {n}: orientation {s['nodes/orientation'][n]}, induced {w.orientation[n]}")
    rule = w.orientation[:, None] * (1 - 2 * (np.arange(d) % 2)) * w.ridge_sign * (1 - 2 * w.bent)
    for n, k in np.argwhere(s["nodes/link_leaves"] != rule)[:10].tolist():
        wrong.append(f"node {n}, place {k}: direction {s['nodes/link_leaves'][n, k]}, induced {rule[n, k]}")
    # the boundary's own twist, for the induced orientation of its facets
    from ..kernels.permutations import permutations_of

    sign = permutations_of(d - 1).sign[w.rank]
    twist = (s["nodes/orientation"][w.there] != -s["nodes/orientation"][:, None] * sign).astype(np.int8)
    for n, k in np.argwhere(s["links/twist"][s["nodes/link"]] != twist)[:10].tolist():
        link = s["nodes/link"][n, k]
        wrong.append(f"link {link}: twist {s['links/twist'][link]}, induced {twist[n, k]}")
    if x.boundary is not None and not wrong:
        wrong += _own_signs(x)
    kept = int((s["links/twist"] == 0).sum())
    return (
        f"equal at {len(w.vertex)} nodes; {kept} links untwisted, {len(s['links/twist']) - kept} twisted",
        wrong,
    )


def _own_signs(x: Subject) -> list[str]:
    """Where the bulk component is orientable, the boundary's own dual has the same signs."""
    s, w = x.s, x.walk
    assert x.boundary is not None
    dual = build(x.boundary, keep_singular=True, threads=x.threads)
    orientable = np.asarray(x.orientable)[w.bulk]
    wrong = []
    for n in np.flatnonzero(orientable & (dual["vertices/orientation"] != s["nodes/orientation"]))[
        :10
    ].tolist():
        wrong.append(
            f"node {n}: orientation {s['nodes/orientation'][n]}, the boundary's own dual has the other"
        )
    if x.boundary.matched:
        bad = orientable[:, None] & (dual["vertices/leaves"] != s["nodes/link_leaves"])
        for n, k in np.argwhere(bad)[:10].tolist():
            wrong.append(
                f"node {n}, place {k}: the link there runs against the edge of the boundary's own dual"
            )
    return wrong
