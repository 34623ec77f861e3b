"""The cells in the page: arrays, packed with deflate and written in base64, unpacked when asked for.

A foam of a hundred thousand 4-simplices takes 4 (a lattice) to 16 megabytes (numbered at random).  Of a
larger one the page holds a sample: the first vertices, with everything that touches them.
"""

from __future__ import annotations

import gzip
import json
from base64 import b64encode
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from ..layout import wedge_pairs
from ..skeleton import Skeleton

if TYPE_CHECKING:
    from .plan import PlanPage

__all__ = ["LIMIT", "Packed", "Sample", "packed", "sample_of"]

LIMIT = 100_000  # vertices up to which every cell is in the page
LONGEST = 100_000  # vertices of a face that a sample holds


@dataclass(frozen=True, eq=False)
class Sample:
    """The numbers of the cells that are in the page, ascending; `whole` when these are all.

    Attributes
    ----------
    numbers : dict of str to ndarray
        By kind: ``vertex``, ``edge``, ``face``, ``node``, ``link``.
    whole : bool
    """

    numbers: dict[str, np.ndarray]
    whole: bool


@dataclass(frozen=True)
class Packed:
    """A table in the page."""

    name: str
    type: str  # Int8, Int32 or Float64, as the script calls its arrays
    text: str


def sample_of(skeleton: Skeleton, limit: int = LIMIT) -> Sample:
    """All cells, or beyond `limit` vertices the first ones and what touches them."""
    s, c = skeleton, skeleton.counts
    edges = c["edges_internal"] + c["edges_external"]
    faces = c["faces_internal"] + c["faces_external"]
    totals = {
        "vertex": c["vertices"],
        "edge": edges,
        "face": faces,
        "node": c["nodes"],
        "link": c["links"],
    }
    if c["vertices"] <= limit:
        return Sample({kind: np.arange(n) for kind, n in totals.items()}, True)
    edge = np.unique(s["vertices/edge"][:limit])
    face = np.unique(s["wedges/face"][:limit])
    face = face[np.diff(s["faces/vertex_offsets"])[face] <= LONGEST]
    return Sample(
        {
            "vertex": np.arange(limit),
            "edge": edge,
            "face": face,
            "node": edge[edge >= c["edges_internal"]] - c["edges_internal"],
            "link": face[face >= c["faces_internal"]] - c["faces_internal"],
        },
        False,
    )


def packed(skeleton: Skeleton, sample: Sample, plan: PlanPage | None) -> tuple[str, list[Packed]]:
    """What the script needs: a JSON text that can stand in a page, and the tables."""
    s = skeleton
    numbers = sample.numbers
    tables: dict[str, np.ndarray] = {}
    for name in ("vertices/orientation", "vertices/component", "vertices/edge", "vertices/leaves"):
        tables[name] = s[name][numbers["vertex"]]
    for name in ("wedges/face", "wedges/direction"):
        tables[name] = s[name][numbers["vertex"]]
    for key in ("source", "target", "twist", "face", "face_sign", "source_corner", "target_corner"):
        tables[f"edges/{key}"] = s[f"edges/{key}"][numbers["edge"]]
    _ragged(s, numbers["face"], tables)
    tables["faces/against"] = s["faces/against"][numbers["face"]]
    if "faces/singular" in s:
        tables["faces/singular"] = s["faces/singular"][numbers["face"]]
    for key in ("vertex", "slot", "orientation", "component", "link", "link_leaves"):
        tables[f"nodes/{key}"] = s[f"nodes/{key}"][numbers["node"]]
    for key in ("source", "target", "twist"):
        tables[f"links/{key}"] = s[f"links/{key}"][numbers["link"]]
    labels: list[str] | None = None
    if "vertices/corners" in s:
        known, inverse = np.unique(s["vertices/corners"][numbers["vertex"]], return_inverse=True)
        labels = [str(x) for x in s.named(known)]
        tables["vertices/corners"] = inverse.reshape(len(numbers["vertex"]), -1)
    if plan is not None:
        for name, column in plan.tables.items():
            kind = "link" if name == "spins/boundary" else "face"
            tables[name] = column[numbers[kind][numbers[kind] < len(column)]]
    if not sample.whole:
        for kind, found in numbers.items():
            tables[f"numbers/{kind}"] = found
    meta: dict[str, Any] = {
        "dimension": s.dimension,
        "counts": dict(s.counts),
        "pairs": wedge_pairs(s.dimension),
        "labels": labels,
        "whole": sample.whole,
        "held": {kind: len(x) for kind, x in numbers.items()},
        "plan": sorted(plan.tables) if plan is not None else [],
    }
    # "<" cannot end the element, nor begin a comment
    text = json.dumps(meta, ensure_ascii=True).replace("<", "\\u003c")
    return text, [_packed(name, array) for name, array in tables.items()]


def _ragged(s: Skeleton, faces: np.ndarray, tables: dict[str, np.ndarray]) -> None:
    """The lists of these faces: lengths in vertices, vertices, wedges, edges, signs, places."""
    for item, keys in (("vertex", ("vertex", "wedge")), ("edge", ("edge", "edge_sign", "place"))):
        offsets = s[f"faces/{item}_offsets"].astype(np.int64)
        length = np.diff(offsets)[faces]
        if len(faces) == len(offsets) - 1:
            rows: Any = slice(None)
        else:
            ends = np.cumsum(length)
            rows = np.repeat(offsets[faces] - (ends - length), length) + np.arange(int(ends[-1]))
        tables[f"faces/{item}_count"] = length
        for key in keys:
            tables[f"faces/{key}"] = s[f"faces/{key}"][rows]


def _packed(name: str, array: np.ndarray) -> Packed:
    if array.dtype.itemsize == 1:
        kind, data = "Int8", array.astype(np.int8)
    elif not array.size or (array.min() >= -(2**31) and array.max() < 2**31):
        kind, data = "Int32", array.astype("<i4")
    else:
        kind, data = "Float64", array.astype("<f8")
    raw = np.ascontiguousarray(data)
    if kind == "Int32":
        # the four bytes of all numbers one after the other: the high ones are nearly always zero
        raw = np.ascontiguousarray(raw.reshape(-1, 1).view(np.uint8).T)
    return Packed(name, kind, b64encode(gzip.compress(raw.tobytes(), 6, mtime=0)).decode())
