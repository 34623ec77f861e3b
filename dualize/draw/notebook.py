"""How triangulations, skeletons and reports show themselves in notebooks: small tables, all escaped."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from html import escape

from ..audit import Report, show
from ..skeleton import Skeleton
from ..triangulation import Triangulation

__all__ = ["report_table", "skeleton_table", "triangulation_table"]

SHOWN = 5  # simplices of a triangulation
MARKS = {"holds": "✓", "yes": "✓", "violated": "✗", "no": "\u2013", "undecided": "?", "not checked": "?"}


def triangulation_table(t: Triangulation) -> str:
    """The size of a triangulation, and its first simplices with the simplices behind their slots."""
    names: list[Sequence[object]] = []
    for s in range(min(SHOWN, len(t))):
        behind = ["-" if x < 0 else int(x) for x in t.across[s]]
        words = "" if t.corners is None else " ".join(map(str, t.named(t.corners[s])))
        names.append((s, words, " ".join(map(str, behind))))
    if len(t) > SHOWN:
        names.append(("…", "", ""))
    return _table(repr(t)[1:-1], ("simplex", "corners", "behind its slots"), names)


def skeleton_table(s: Skeleton) -> str:
    """The cells of a skeleton by kind."""
    c = s.counts
    turned = sum(not yes for yes in s.flags["orientable"])
    kind = "orientable" if not turned else f"{turned} of {c['components']} not orientable"
    rows = [
        ("vertices", c["vertices"], ""),
        ("edges", c["edges_internal"], c["edges_external"]),
        ("faces", c["faces_internal"], c["faces_external"]),
        ("nodes", "", c["nodes"]),
        ("links", "", c["links"]),
        ("components", c["components"], int(s["nodes/component"].max(initial=-1)) + 1),
    ]
    singular = ", singular ridges kept" if s.flags["singular"] else ""
    return _table(
        f"Foam skeleton of dimension {s.dimension}, {kind}{singular}", ("", "inside", "at the boundary"), rows
    )


def report_table(report: Report) -> str:
    """The findings of an audit with their verdicts."""
    rows = [(MARKS.get(f.verdict, ""), f.verdict, f.check, show(f.figure), f.where) for f in report]
    return _table(f"Audit: {report.title}", ("", "verdict", "check", "found", "where"), rows)


def _table(caption: str, heads: Sequence[str], rows: Iterable[Sequence[object]]) -> str:
    head = "".join(f'<th scope="col">{escape(x)}</th>' for x in heads)
    body = "".join("<tr>" + "".join(f"<td>{escape(str(x))}</td>" for x in row) + "</tr>" for row in rows)
    return (
        f"<table><caption>{escape(caption)}</caption><thead><tr>{head}</tr></thead>"
        f"<tbody>{body}</tbody></table>"
    )
