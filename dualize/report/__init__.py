"""The report: one page that holds everything about a foam, opens from disk and asks the network for nothing.

    dualize.report.write(s, "report.html", audit=dualize.audit(s))

What can be read without a program is plain HTML: summary, findings, counts, histograms, the boundary graph,
the plan. The cells themselves are in the page as packed arrays (`packing`); a script unpacks them when a
cell is asked for. Every text of the user is escaped by the template, or set as text by the script; a policy
in the page forbids any script but that one, and any request.
"""

from __future__ import annotations

import os
from base64 import b64encode
from functools import cache
from hashlib import sha256
from importlib.resources import files
from typing import TYPE_CHECKING, Any

from ..audit import Report, show
from ..draw import Histogram, histograms, sketch, svg
from ..draw.graphs import plural
from ..skeleton import Skeleton
from .packing import LIMIT, packed, sample_of
from .plan import plan_page
from .rows import SAMPLES, first_cells

if TYPE_CHECKING:
    from jinja2 import Template

    from ..plan import Plan

__all__ = ["LIMIT", "page", "write"]

MARKS = {"holds": "✓", "yes": "✓", "violated": "✗", "no": "\u2013", "undecided": "?", "not checked": "?"}
KINDS = {"identity": "Identities", "property": "Properties", "figure": "Figures"}
LARGEST_PICTURE = 60


def page(
    skeleton: Skeleton,
    *,
    audit: Report | None = None,
    plan: Plan | None = None,
    title: str | None = None,
    limit: int = LIMIT,
) -> str:
    """The report on a foam as an HTML document.

    Parameters
    ----------
    skeleton : Skeleton
    audit : Report, optional
        Its findings; without it the page says that nothing was checked.
    plan : Plan, optional
        The plan of a sum; without it, what the skeleton keeps of one among its further groups is shown.
    title : str, optional
        By default the name of the input in the provenance.
    limit : int
        Beyond so many vertices the page holds a sample of the cells, and says so.
    """
    s = skeleton
    sample = sample_of(s, limit)
    name = title or (s.provenance or {}).get("input") or "a foam made in memory"
    planned = plan_page(s, plan)
    meta, tables = packed(s, sample, planned)
    script, style = _part("page.js"), _part("page.css")
    return _template().render(
        title=name,
        facts=_facts(s),
        provenance=dict(s.provenance or {}),
        findings=_findings(audit),
        audit=audit,
        verdict=_verdict(audit),
        counts=_counts(s),
        histograms=[_bars(h) for h in histograms(s)],
        pictures=_pictures(s),
        plan=planned,
        cells=first_cells(s),
        samples=SAMPLES,
        sample=sample,
        limit=limit,
        meta=meta,
        tables=tables,
        script=script,
        style=style,
        script_hash=_hash(script),
        style_hash=_hash(style),
    )


def write(skeleton: Skeleton, path: str | os.PathLike[str], *, force: bool = False, **options: Any) -> None:
    """Write the report on a foam into a file, or to standard output (``"-"``); options are those of `page`.

    Raises
    ------
    InputError
        If the file exists and `force` is false, or it cannot be written.
    """
    from ..formats.target import replacing

    data = page(skeleton, **options).encode()
    name = os.fsdecode(path)
    if name == "-":
        import sys

        sys.stdout.flush()
        sys.stdout.buffer.write(data)
        sys.stdout.buffer.flush()
        return
    with replacing(name, force) as (stream, _):
        stream.write(data)


# -- the parts that need no script -----------------------------------------------------------------


def _facts(s: Skeleton) -> list[tuple[str, str]]:
    """The summary, name by value."""
    c = s.counts
    turned = sum(not yes for yes in s.flags["orientable"])
    if c["components"] == 1:
        kind = "not orientable" if turned else "orientable"
    else:
        kind = f"{c['components'] - turned} of them orientable"
    pieces = int(s["nodes/component"].max(initial=-1)) + 1
    boundary = "none: the foam is closed"
    if pieces:
        boundary = (
            f"{plural(pieces, 'component')}, {plural(c['nodes'], 'node')}, {plural(c['links'], 'link')}"
        )
    labels = "none"
    if "vertices/corners" in s:
        labels = "integers" if s.corner_names is None else "words"
    facts = [
        ("dimension", str(s.dimension)),
        ("vertices", f"{c['vertices']}, dual to the top simplices"),
        ("edges", f"{c['edges_internal']} internal, {c['edges_external']} external"),
        ("faces", f"{c['faces_internal']} internal, {c['faces_external']} external"),
        ("boundary", boundary),
        ("components", f"{c['components']}, {kind}"),
        ("twisted edges", str(int(s["edges/twist"].sum()))),
        ("places", "ascend at both ends of every edge" if s.flags["ordered"] else "do not always ascend"),
        ("labels", labels),
    ]
    if s.flags["singular"]:
        facts.append(("singular ridges", "kept: see faces/singular"))
    return facts


def _counts(s: Skeleton) -> list[tuple[str, int, int]]:
    c = s.counts
    return [
        ("edges", c["edges_internal"], c["edges_external"]),
        ("faces", c["faces_internal"], c["faces_external"]),
    ]


def _findings(report: Report | None) -> list[dict[str, Any]]:
    """The findings by kind, each with its mark."""
    out = []
    for kind, heading in KINDS.items():
        rows = [
            {
                "mark": MARKS.get(f.verdict, ""),
                "verdict": f.verdict,
                "tone": f.verdict.replace(" ", "-"),
                "check": f.check,
                "figure": show(f.figure),
                "against": f.against,
                "where": f.where,
            }
            for f in report or ()
            if f.kind == kind
        ]
        if rows:
            out.append({"heading": heading, "rows": rows})
    return out


def _verdict(report: Report | None) -> str:
    """The outcome of the audit in one sentence."""
    if report is None:
        return "Not audited: nothing on this page was checked beyond what reading and building check."
    bad = [f.check for f in report if f.verdict == "violated"]
    open_ones = sum(f.verdict in ("not checked", "undecided") for f in report)
    rest = f" {plural(open_ones, 'question')} left open." if open_ones else ""
    if bad:
        return f"Identities are violated: {', '.join(bad)}. This skeleton cannot be trusted.{rest}"
    return f"No identity is violated.{rest}"


def _bars(histogram: Histogram) -> dict[str, Any]:
    """A histogram as rows for a table, each with the length of its bar."""
    most = int(histogram.number.max())
    return {
        "title": histogram.title,
        "rows": [
            {"value": name, "number": int(n), "share": round(100 * int(n) / most, 1)}
            for name, n in zip(histogram.names(), histogram.number.tolist(), strict=True)
        ],
    }


def _pictures(s: Skeleton) -> list[dict[str, str]]:
    """The boundary graph, or the dual graph of a closed foam, and the first vertex and face."""
    wanted: list[tuple[str, str, dict[str, Any]]] = []
    if s.counts["nodes"]:
        wanted.append(("boundary", "The boundary graph", {"most": LARGEST_PICTURE}))
    if s.counts["vertices"]:
        if not s.counts["nodes"] or s.counts["vertices"] <= LARGEST_PICTURE:
            wanted.append(("dual", "The dual graph", {"most": LARGEST_PICTURE}))
        wanted.append(("vertex", "The first vertex", {}))
        wanted.append(("face", "The first face", {}))
    return [
        {"heading": heading, "svg": svg(sketch(s, part, **options), inline=True, linked=True)}
        for part, heading, options in wanted
    ]


# -- the template ----------------------------------------------------------------------------------


@cache
def _part(name: str) -> str:
    return (files(__package__) / "data" / name).read_text("utf-8")


@cache
def _template() -> Template:
    from jinja2 import Environment, StrictUndefined

    environment = Environment(
        autoescape=True, undefined=StrictUndefined, trim_blocks=True, lstrip_blocks=True
    )
    environment.filters["plural"] = plural
    return environment.from_string(_part("page.html"))


def _hash(text: str) -> str:
    return "sha256-" + b64encode(sha256(text.encode()).digest()).decode()
