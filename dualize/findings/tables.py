"""Checks of the tables themselves, and of the chain complex that they describe."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ..audit import Finding
from ..kernels import engine
from ..kernels.audit import close_faces
from ..triangulation import Triangulation
from .subject import Subject, named

__all__ = ["check_chains", "check_tables"]

# tables that another identity reads: where that one is violated, it explains the contradiction
EXPLAINED = {
    "edges/twist": "twist",
    "faces/edge": "d1-d2",
    "faces/edge_sign": "d1-d2",
    "links/twist": "boundary-signs",
    "nodes/link": "boundary-cells",
    "nodes/link_leaves": "boundary-signs",
    "nodes/corners": "boundary-cells",
    "links/corners": "boundary-cells",
    "nodes/component": "boundary-cells",
    "vertices/component": "components",
    "counts/components": "components",
}


def check_tables(x: Subject) -> Iterator[Finding]:
    """Layout, agreement of the tables, and the gluings read back."""
    if x.layout_error is not None:
        yield Finding("layout", "identity", "violated", x.layout_error.what, where=x.layout_error.where or "")
        yield Finding("tables", "identity", "not checked", against="the layout is broken")
        yield Finding("gluings", "identity", "not checked", against="the layout is broken")
        yield Finding("cells", "figure", "not checked", against="the layout is broken")
        return
    what = f"{len(x.s.arrays)} tables: presence, shapes, widths, ranges, offsets"
    yield Finding("layout", "identity", "holds", what, "the layout of `dualize spec`")
    yield _tables(x)
    yield _gluings(x)
    yield Finding("cells", "figure", "stated", dict(x.s.counts))


def _tables(x: Subject) -> Finding:
    error = x.table_error
    if error is None:
        return Finding(
            "tables",
            "identity",
            "holds",
            "every entry agrees with the rest",
            "the rules of `dualize spec`, one by one",
        )
    table = (error.where or "").split("[")[0]
    other = EXPLAINED.get(table)
    if other is not None and x.obstacle is None and explains(x, other):
        reason = f"stops at {error.where}; see {other}"
        return Finding("tables", "identity", "not checked", error.what, reason)
    return Finding("tables", "identity", "violated", error.what, where=error.where or "")


def explains(x: Subject, name: str) -> bool:
    """Whether the identity of this name is violated."""
    from . import boundary, counting

    source = {
        "twist": check_chains,
        "d1-d2": check_chains,
        "components": counting.check_counts,
    }.get(name, boundary.check_boundary)
    return any(f.check == name and f.verdict == "violated" for f in source(x))


def _gluings(x: Subject) -> Finding:
    """The gluings that the edges describe, against the triangulation where there is one."""
    found, given = x.read_back, x.given
    if not isinstance(found, Triangulation):
        return Finding("gluings", "identity", "violated", found.what, where=found.where or "")
    if given is None:
        pairs = f"{x.s.counts['edges_internal']} gluings read from the edges"
        return Finding("gluings", "identity", "holds", pairs, "permutations, each slot met once")
    for name in ("across", "rank", "corners"):
        mine, theirs = getattr(found, name), getattr(given, name)
        if (mine is None) != (theirs is None):
            word = "has labels" if mine is not None else "has no labels"
            return Finding(
                "gluings", "identity", "violated", f"the skeleton {word}", "the triangulation given"
            )
        if mine is None:
            continue
        if mine.shape != theirs.shape:
            what = f"{len(mine)} simplices, the triangulation has {len(theirs)}"
            return Finding("gluings", "identity", "violated", what, "the triangulation given")
        differ = (mine != theirs).any(axis=1)
        if differ.any():
            rows = np.flatnonzero(differ)
            where = named([x.place(v) for v in rows[:10].tolist()], len(rows))
            what = "other labels" if name == "corners" else "other gluings"
            return Finding("gluings", "identity", "violated", what, "the triangulation given", where)
    if given.corner_names != found.corner_names:
        return Finding(
            "gluings", "identity", "violated", "other words for the labels", "the triangulation given"
        )
    pairs = f"{x.s.counts['edges_internal']} gluings read from the edges are those of the triangulation"
    return Finding("gluings", "identity", "holds", pairs, "the triangulation given")


def check_chains(x: Subject) -> Iterator[Finding]:
    """``d1 d2 = 0`` with nodes and links, and the twist as a cocycle."""
    s, interior = x.s, int(x.s.counts["faces_internal"])
    faces, links = len(s["faces/against"]), int(s.counts["links"])
    edge, sign = s["faces/edge"], s["faces/edge_sign"]
    offsets = s["faces/edge_offsets"]
    open_face = np.zeros(faces, dtype=np.uint8)
    engine(x.n, x.threads).split(
        close_faces,
        faces,
        offsets,
        edge,
        sign,
        s["edges/source"].ravel(),
        s["edges/target"].ravel(),
        s["links/source"],
        s["links/target"],
        open_face,
        (0,) * (x.d + 1),
        interior,
    )
    bad = np.flatnonzero(open_face)
    if len(bad):
        # a walk that does not close may still have boundary 0, so the matrices decide
        from ..topology.maps import foam_maps

        d1, d2 = foam_maps(s)
        product = (d1 @ d2).tocsc()
        product.eliminate_zeros()
        bad = np.flatnonzero(np.diff(product.indptr))
    against = "the signed edges of every face, plus its link, summed at vertices and nodes"
    if len(bad):
        where = named([f"face {f}" for f in bad[:10].tolist()], len(bad))
        yield Finding(
            "d1-d2", "identity", "violated", f"not 0 on {len(bad)} of {faces} faces", against, where
        )
    else:
        yield Finding(
            "d1-d2", "identity", "holds", f"0 on {faces} faces, {links} of them with a link", against
        )

    inner = offsets[interior]
    odd = np.zeros(interior, dtype=bool)
    if interior:
        odd = np.add.reduceat(s["edges/twist"][edge[:inner]], offsets[:interior], dtype=np.int64) % 2 == 1
    skipped = 0
    if "faces/singular" in s:
        turned = (s["faces/singular"][:interior] & 1) == 1
        skipped = int(turned.sum())
        odd &= ~turned
    bad = np.flatnonzero(odd)
    twists = int(s["edges/twist"].sum())
    left = f", {skipped} with a holonomy left out" if skipped else ""
    against = f"sums around {interior} internal faces{left}"
    if len(bad):
        where = named([f"face {f}" for f in bad[:10].tolist()], len(bad))
        yield Finding("twist", "identity", "violated", f"odd around {len(bad)} faces", against, where)
    else:
        yield Finding("twist", "identity", "holds", f"a cocycle, {twists} twisted edges", against)
