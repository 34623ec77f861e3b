"""What is in a triangulation or a skeleton, in a few lines: counts, components, boundary, some of its cells.

Nothing is checked here beyond what building checks; the audit does that.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from .build import build
from .layout import TABLES
from .skeleton import Skeleton
from .triangulation import Triangulation

__all__ = ["Description", "describe"]

SAMPLES = 3  # cells of each kind that are shown
NAMES = {"triangulation": "triangulation", "skeleton": "foam skeleton"}
WIDEST = 8  # lengths of faces, and steps of one face, that are shown


@dataclass(frozen=True)
class Description:
    """What `describe` found; ``print`` it, or take `to_dict`.

    Attributes
    ----------
    kind : str
        ``"triangulation"`` or ``"skeleton"``.
    facts : mapping
        What is known, by name: numbers, texts, lists and mappings, as JSON has them.
    samples : tuple of str
        The first cells of each kind, one a line.
    """

    kind: str
    facts: Mapping[str, Any] = field(default_factory=dict)
    samples: tuple[str, ...] = ()

    def to_dict(self) -> dict[str, Any]:
        """The facts and samples as JSON values."""
        return {"kind": self.kind, **self.facts, "samples": list(self.samples)}

    def __str__(self) -> str:
        rows = _triangulation_rows if self.kind == "triangulation" else _skeleton_rows
        lines = [f"{NAMES[self.kind]} of dimension {self.facts['dimension']}"]
        lines += [f"  {name:<12}{text}" for name, text in rows(self.facts)]
        return "\n".join([*lines, *(f"  {line}" for line in self.samples)])


def describe(content: Triangulation | Skeleton, *, threads: int | None = None) -> Description:
    """Tell what a triangulation or a skeleton is.

    Parameters
    ----------
    content : Triangulation or Skeleton
        Of a triangulation the dual is built (singular ridges are kept) to count its cells and components.
    threads : int, optional

    Returns
    -------
    Description

    Examples
    --------
    >>> from dualize import Triangulation
    >>> found = describe(Triangulation.from_facets([[0, 1, 2, 3], [1, 2, 3, 4]]))
    >>> found.facts["facets"]
    {'glued': 1, 'boundary': 6}
    """
    if isinstance(content, Skeleton):
        return Description("skeleton", _skeleton_facts(content), tuple(_skeleton_samples(content)))
    return Description(
        "triangulation", _triangulation_facts(content, threads), tuple(_triangulation_samples(content))
    )


# -- triangulations --------------------------------------------------------------------------------


def _triangulation_facts(t: Triangulation, threads: int | None) -> dict[str, Any]:
    free = int((t.across < 0).sum())
    facts: dict[str, Any] = {
        "dimension": t.dimension,
        "simplices": len(t),
        "given_as": "labelled simplices" if t.matched else "a gluing table",
        "labels": _labels(t),
        "facets": {"glued": (t.across.size - free) // 2, "boundary": free},
        "coordinates": _coordinates(t.coordinates._asdict() if t.coordinates else {}),
    }
    dual = build(t, keep_singular=True, threads=threads)
    return {**facts, **_shape(dual), "dual": dict(dual.counts)}


def _labels(t: Triangulation) -> dict[str, Any] | None:
    if t.corners is None:
        return None
    names = t.corner_names
    different = np.unique(t.corners)
    first, last = different[0], different[-1]
    return {
        "are": "integers" if names is None else "words",
        "different": len(different),
        "first": int(first) if names is None else names[first],
        "last": int(last) if names is None else names[last],
    }


def _triangulation_rows(facts: Mapping[str, Any]) -> Iterable[tuple[str, str]]:
    yield "simplices", f"{facts['simplices']}, given as {facts['given_as']}"
    labels = facts["labels"]
    yield (
        "labels",
        "none"
        if labels is None
        else f"{labels['different']} {labels['are']}, from {labels['first']} to {labels['last']}",
    )
    yield (
        "facets",
        f"{facts['facets']['glued']} glued in pairs, {facts['facets']['boundary']} in the boundary",
    )
    yield "coordinates", facts["coordinates"] or "none"
    yield from _shape_rows(facts)
    c = facts["dual"]
    yield (
        "dual",
        f"{c['vertices']} vertices, {c['edges_internal']} + {c['edges_external']} edges, "
        f"{c['faces_internal']} + {c['faces_external']} faces, {c['nodes']} nodes, {c['links']} links",
    )


def _triangulation_samples(t: Triangulation) -> Iterable[str]:
    for s in range(min(SAMPLES, len(t))):
        behind = " ".join("-" if x < 0 else str(x) for x in t.across[s].tolist())
        yield f"{t.place(s)}; behind its slots: {behind}"


# -- skeletons -------------------------------------------------------------------------------------


def _skeleton_facts(s: Skeleton) -> dict[str, Any]:
    c = s.counts
    lengths = np.bincount(np.diff(s["faces/vertex_offsets"][: c["faces_internal"] + 1]))
    given = {name.split("/")[1]: s[name] for name in s.arrays if name.startswith("coordinates/")}
    return {
        "dimension": s.dimension,
        "counts": dict(c),
        **_shape(s),
        "ordered": s.flags["ordered"],
        "twisted_edges": int(s["edges/twist"].sum()),
        "face_lengths": {str(n): int(lengths[n]) for n in np.flatnonzero(lengths).tolist()},
        "labels": None
        if "vertices/corners" not in s
        else ("integers" if s.corner_names is None else "words"),
        "coordinates": _coordinates(given),
        "optional_tables": [n for n in s.arrays if TABLES[n].presence != "always"],
        "further_entries": sorted(s.extra),
        "bytes": sum(a.nbytes for a in s.arrays.values()),
        "provenance": None if s.provenance is None else dict(s.provenance),
    }


def _skeleton_rows(facts: Mapping[str, Any]) -> Iterable[tuple[str, str]]:
    c = facts["counts"]
    twisted = facts["twisted_edges"]
    yield "vertices", str(c["vertices"])
    yield (
        "edges",
        f"{c['edges_internal']} internal, {c['edges_external']} external"
        + (f", {twisted} twisted" if twisted else ""),
    )
    yield "faces", f"{c['faces_internal']} internal, {c['faces_external']} external"
    if lengths := list(facts["face_lengths"].items()):
        shown = ", ".join(f"{number} with {n}" for n, number in lengths[:WIDEST])
        more = f", and {len(lengths) - WIDEST} more lengths" if len(lengths) > WIDEST else ""
        yield "", f"internal faces by their number of vertices: {shown}{more}"
    yield from _shape_rows(facts)
    yield (
        "places",
        "ascend at both ends of every edge"
        if facts["ordered"]
        else "do not ascend at the target of some edge",
    )
    yield "labels", facts["labels"] or "none"
    yield "coordinates", facts["coordinates"] or "none"
    if facts["further_entries"]:
        yield "further", ", ".join(facts["further_entries"])
    yield "size", f"{facts['bytes']} bytes of tables"
    if facts["provenance"]:
        yield (
            "provenance",
            ", ".join(f"{key.replace('_', ' ')} {value}" for key, value in facts["provenance"].items()),
        )


def _skeleton_samples(s: Skeleton) -> Iterable[str]:
    c = s.counts
    for v in range(min(SAMPLES, c["vertices"])):
        edges = " ".join(f"{'+-'[sign < 0]}{e}" for e, sign in s.edges_at(v))
        corners = f", corners {_words(s, 'vertices/corners', v)}" if "vertices/corners" in s else ""
        sign = s["vertices/orientation"][v]
        yield f"vertex {v}: orientation {sign:+d}, edges {edges} (+ leaves it){corners}"
    for e in range(min(SAMPLES, c["edges_internal"] + c["edges_external"])):
        ends = " to ".join(_end(s[f"edges/{end}"][e].tolist()) for end in ("source", "target"))
        yield f"edge {e}: {ends}, faces {' '.join(map(str, s['edges/face'][e].tolist()))}"
    for f in range(min(SAMPLES, c["faces_internal"] + c["faces_external"])):
        cells = s.face(f)
        shown = [
            f"v{n}" if kind == "vertex" else f"{'+-'[sign < 0]}e{n}" for kind, n, sign in cells[: 2 * WIDEST]
        ]
        yield f"face {f}: {' '.join(shown)}{' ...' if len(cells) > 2 * WIDEST else ''}"
    for n in range(min(SAMPLES, c["nodes"])):
        links = " ".join(map(str, s["nodes/link"][n].tolist()))
        corners = f", corners {_words(s, 'nodes/corners', n)}" if "nodes/corners" in s else ""
        yield f"node {n}: orientation {s['nodes/orientation'][n]:+d}, links {links}{corners}"
    for k in range(min(SAMPLES, c["links"])):
        source, target, face = (s[f"links/{key}"][k] for key in ("source", "target", "face"))
        yield f"link {k}: node {source} to node {target}, face {face}"


def _words(s: Skeleton, table: str, row: int) -> str:
    return " ".join(map(str, s.named(s[table][row])))


def _end(pair: list[int]) -> str:
    return f"node {pair[1]}" if pair[0] < 0 else f"vertex {pair[0]} slot {pair[1]}"


# -- what both have --------------------------------------------------------------------------------


def _shape(s: Skeleton) -> dict[str, Any]:
    singular = {}
    if "faces/singular" in s:
        kinds = np.bincount(s["faces/singular"], minlength=4)
        singular = {name: int(n) for name, n in zip(("holonomy", "pinched", "both"), kinds[1:], strict=True)}
    return {
        "components": s.counts["components"],
        "orientable_components": sum(s.flags["orientable"]),
        "boundary": {
            "components": int(s["nodes/component"].max(initial=-1)) + 1,
            "facets": s.counts["nodes"],
            "ridges": s.counts["links"],
        },
        "singular": s.flags["singular"],
        "singular_faces": singular,
    }


def _shape_rows(facts: Mapping[str, Any]) -> Iterable[tuple[str, str]]:
    parts, good = facts["components"], facts["orientable_components"]
    if parts == 1:
        yield "components", "1, " + ("orientable" if good else "not orientable")
    else:
        yield "components", f"{parts}, {good} of them orientable"
    boundary = facts["boundary"]
    if boundary["components"] == 0:
        yield "boundary", "none"
    else:
        pieces = f"{boundary['components']} component{'s' if boundary['components'] > 1 else ''}"
        yield "boundary", f"{pieces}, {boundary['facets']} nodes, {boundary['ridges']} links"
    if facts["singular"]:
        kinds = ", ".join(f"{n} {name}" for name, n in facts["singular_faces"].items() if n)
        yield "singular", f"yes ({kinds or 'two simplices have the same labels'})"


def _coordinates(arrays: Mapping[str, np.ndarray | None]) -> str | None:
    """Coordinates in a few words, None where there are none."""
    charts = {name: array for name, array in arrays.items() if array is not None}
    if not charts:
        return None
    words = []
    if "point" in charts:
        words.append("one chart, {} points with {} axes".format(*charts["point"].shape))
    if "corner" in charts:
        words.append(f"one chart for each simplex, {charts['corner'].shape[2]} axes")
    if "period" in charts and charts["period"].any():
        words.append("period " + " ".join(f"{x:g}" for x in charts["period"].tolist()))
    return ", ".join(words)
