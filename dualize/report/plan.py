"""What a page shows of the plan of a sum: from a `Plan`, or from what a file keeps of one."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from ..draw.graphs import plural
from ..skeleton import Skeleton

if TYPE_CHECKING:
    from ..plan import Plan

__all__ = ["PlanPage", "plan_page"]

SHOWN = 40  # faces in the table that needs no script
COLUMNS = ("spins/least", "spins/greatest", "spins/unbounded", "spins/parity", "spins/boundary")


@dataclass(frozen=True, eq=False)
class PlanPage:
    """The plan as a page shows it.

    Attributes
    ----------
    text : str
        The page of a `Plan`; empty where only a file's groups are known.
    facts : list of (str, str)
    rows : list of dict
        The first internal faces: ``face``, ``least``, ``greatest``, ``unbounded``.
    more : int
        Internal faces that have no row.
    tables : dict of str to ndarray
        Columns by face, or by link (``spins/boundary``).
    """

    text: str
    facts: list[tuple[str, str]]
    rows: list[dict[str, Any]]
    more: int
    tables: dict[str, np.ndarray]


def plan_page(skeleton: Skeleton, plan: Plan | None = None) -> PlanPage | None:
    """The plan as a page shows it, or None where there is none."""
    groups: dict[str, Any] = dict(skeleton.extra) if plan is None else dict(plan.groups())
    inner, links = skeleton.counts["faces_internal"], skeleton.counts["links"]
    tables: dict[str, np.ndarray] = {}
    for name in COLUMNS:
        column = _column(groups.get(name), links if name == "spins/boundary" else inner)
        if column is not None:
            tables[name] = column
    if not tables and plan is None:
        return None
    facts: list[tuple[str, str]] = []
    unbounded = tables.get("spins/unbounded")
    if unbounded is not None:
        count = int((unbounded != 0).sum())
        facts.append(
            (
                "faces without an upper bound",
                f"{count} of {plural(inner, 'internal face')}" if count else "none",
            )
        )
    if "spins/least" in tables:
        facts.append(("spins", "twice-spins, integers 2j"))
    characteristic = groups.get("bubbles/characteristic")
    if characteristic is not None:
        facts.append(("bubbles", str(len(characteristic))))
    if groups.get("gauge/edge") is not None:
        facts.append(("edges that gauge fixing sets to the identity", str(len(groups["gauge/edge"]))))
    if groups.get("gauge/face") is not None:
        facts.append(("faces whose condition is redundant", str(len(groups["gauge/face"]))))
    return PlanPage(
        text="" if plan is None else str(plan),
        facts=facts,
        rows=[_row(tables, f) for f in range(min(inner, SHOWN))],
        more=max(0, inner - SHOWN),
        tables=tables,
    )


def _column(given: Any, length: int) -> np.ndarray | None:
    """A group of a file as a column of integers, or None: files may hold anything under these names."""
    if given is None:
        return None
    try:
        column = np.asarray(given)
    except ValueError:
        return None
    return column.astype(np.int64) if column.shape == (length,) and column.dtype.kind in "iub" else None


def _row(tables: dict[str, np.ndarray], face: int) -> dict[str, Any]:
    def entry(name: str) -> int | None:
        return int(tables[name][face]) if name in tables else None

    greatest = entry("spins/greatest")
    # bounds for given boundary spins say -1 for none; without them only the growth of the foam is known
    no_bound = entry("spins/unbounded") == 1 if greatest is None else greatest < 0
    return {
        "face": face,
        "least": entry("spins/least"),
        "greatest": None if no_bound else greatest,
        "unbounded": no_bound,
    }
