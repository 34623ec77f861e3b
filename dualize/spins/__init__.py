"""What may be summed over a foam, and what it costs: spins, divergences, gauge, work and contraction.

    from dualize import build, make, spins

    s = build(make.move_side(4, 5))
    data = spins.boundary_data(s, 1)                  # all boundary spins 1/2
    rules = spins.rules_of(s, data.spins)
    spins.parity_sectors(rules)                       # which spins are half-integers
    spins.spin_bounds(rules)                          # least and greatest of each
    spins.growth(rules)                               # which have no bound
    spins.count_labellings(rules, 6)                  # exactly how many up to spin 3
    for chunk in spins.list_labellings(rules, 6): ...

All spins are *twice-spins*, integers 2j; the group is SU(2) unless said otherwise.  Numbers of faces, edges
and vertices are those of the skeleton.
"""

from __future__ import annotations

from importlib import import_module
from typing import Any

# name -> module, imported on first use
_HOMES = {
    "PAIRINGS": "rules",
    "Bounds": "bounds",
    "BoundaryData": "boundary",
    "Bubbles": "surfaces",
    "Chunk": "listing",
    "Contradiction": "bounds",
    "Cost": "counting",
    "Estimate": "power",
    "Gauge": "fixing",
    "Growth": "unbounded",
    "HalfEdges": "work",
    "Network": "contraction",
    "NetworkPlan": "contraction",
    "Position": "listing",
    "Rays": "cones",
    "Rules": "rules",
    "Sampler": "counting",
    "Sectors": "parity",
    "VertexAdapter": "adapter",
    "VertexTable": "adapter",
    "Weights": "factors",
    "WorkList": "work",
    "adapters": "adapter",
    "admissible": "rules",
    "boundary_data": "boundary",
    "boundary_template": "boundary",
    "bubbles": "surfaces",
    "count_labellings": "counting",
    "counting_cost": "counting",
    "estimate": "power",
    "gauge": "fixing",
    "growth": "unbounded",
    "growth_rays": "unbounded",
    "half_edges": "work",
    "intertwiner_dimension": "rules",
    "list_labellings": "listing",
    "network": "contraction",
    "omega": "power",
    "overlap": "recoupling",
    "parity_sectors": "parity",
    "plan_network": "contraction",
    "recoupling_range": "rules",
    "rules_of": "rules",
    "six_j": "recoupling",
    "spin_bounds": "bounds",
    "sum_order": "contraction",
    "vertex_table": "adapter",
    "weights": "factors",
    "work_list": "work",
}

__all__ = sorted(_HOMES)


def __getattr__(name: str) -> Any:
    if name in _HOMES:
        value = getattr(import_module(f".{_HOMES[name]}", __name__), name)
        globals()[name] = value
        return value
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted([*globals(), *_HOMES])
