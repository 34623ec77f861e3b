"""The first cells of each kind in words, for readers without a script and for paper."""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

from ..skeleton import Skeleton

__all__ = ["SAMPLES", "Cells", "first_cells"]

SAMPLES = 12  # cells of each kind
STEPS = 24  # steps of one face


class Cells(NamedTuple):
    """The first cells of one kind: what each line tells, and the lines, each with its number."""

    kind: str
    tells: str
    total: int
    rows: list[tuple[int, str]]


def first_cells(skeleton: Skeleton) -> list[Cells]:
    """The first cells of every kind that there is."""
    s, c = skeleton, skeleton.counts
    kinds = [
        ("vertex", "orientation; edges by slot, + where they leave it; corners", c["vertices"], _vertices(s)),
        (
            "edge",
            "source and target; faces by place, + where they run along it",
            c["edges_internal"] + c["edges_external"],
            _edges(s),
        ),
        (
            "face",
            "its vertices and edges in order, + where it runs along an edge",
            c["faces_internal"] + c["faces_external"],
            _faces(s),
        ),
        ("node", "orientation; links by place, + where they start; corners", c["nodes"], _nodes(s)),
        ("link", "from node to node; its face", c["links"], _links(s)),
    ]
    return [
        Cells(kind, tells, total, [(k, next(rows)) for k in range(min(total, SAMPLES))])
        for kind, tells, total, rows in kinds
        if total
    ]


def _signed(sign: int, name: str) -> str:
    return f"{'+' if sign > 0 else '-'}{name}"


def _corners(s: Skeleton, table: str, row: int) -> str:
    return f"; {' '.join(map(str, s.named(s[table][row])))}" if table in s else ""


def _vertices(s: Skeleton) -> Iterator[str]:
    for v in range(s.counts["vertices"]):
        edges = " ".join(_signed(sign, f"e{e}") for e, sign in s.edges_at(v))
        yield f"{s['vertices/orientation'][v]:+d}; {edges}{_corners(s, 'vertices/corners', v)}"


def _edges(s: Skeleton) -> Iterator[str]:
    for e in range(len(s["edges/twist"])):
        ends = [
            f"v{v} slot {slot}" if v >= 0 else f"n{slot}"
            for v, slot in (s["edges/source"][e].tolist(), s["edges/target"][e].tolist())
        ]
        faces = " ".join(
            _signed(sign, f"f{f}")
            for f, sign in zip(s["edges/face"][e].tolist(), s["edges/face_sign"][e].tolist(), strict=True)
        )
        yield f"{ends[0]} to {ends[1]}; {faces}{'; twisted' if s['edges/twist'][e] else ''}"


def _faces(s: Skeleton) -> Iterator[str]:
    for f in range(len(s["faces/against"])):
        cells = s.face(f)
        steps = [f"v{n}" if kind == "vertex" else _signed(x, f"e{n}") for kind, n, x in cells[:STEPS]]
        yield " ".join(steps) + (" ..." if len(cells) > STEPS else "")


def _nodes(s: Skeleton) -> Iterator[str]:
    for n in range(s.counts["nodes"]):
        links = " ".join(
            _signed(sign, f"l{k}")
            for k, sign in zip(s["nodes/link"][n].tolist(), s["nodes/link_leaves"][n].tolist(), strict=True)
        )
        yield f"{s['nodes/orientation'][n]:+d}; {links}{_corners(s, 'nodes/corners', n)}"


def _links(s: Skeleton) -> Iterator[str]:
    for k in range(s.counts["links"]):
        yield f"n{s['links/source'][k]} to n{s['links/target'][k]}; f{s['links/face'][k]}"
