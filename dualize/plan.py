"""The plan of a sum as one document: what may be summed, what diverges, what it costs, what to fix.

p = dualize.plan.plan(skeleton, boundary, most=4)
print(p)                 # a page
p.to_dict()              # everything, for machines
p.groups()               # arrays under the names of the layout, to be kept in the file of the foam
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from math import log10
from typing import Any

import numpy as np

from .errors import InputError, LimitError
from .progress import progress
from .skeleton import Skeleton
from .spins.boundary import BoundaryData, boundary_data
from .spins.bounds import Bounds, spin_bounds
from .spins.contraction import NetworkPlan, SumOrder, network, plan_network, sum_order
from .spins.counting import count_labellings, counting_cost
from .spins.factors import weights
from .spins.fixing import Gauge, gauge
from .spins.listing import list_labellings
from .spins.parity import Sectors, parity_sectors
from .spins.power import estimate as estimate_degree
from .spins.power import interior_group, interior_homology
from .spins.rules import Rules, intertwiner_dimension, rules_of
from .spins.surfaces import Bubbles, bubbles
from .spins.unbounded import Growth, growth, growth_rays
from .spins.work import half_edges, work_list

__all__ = ["Plan", "plan"]

# beyond these a part of the page is left out, and the page says so
RAY_DIMENSION = 40  # dimension of a cone whose rays are looked for
RELATED_BUBBLES = 20_000  # bubbles whose relations are looked for
LISTED = 50_000  # labellings whose work list is made
NETWORK_VERTICES = 300  # vertices of a network whose order is looked for
EXACT_SIZE = 300_000  # internal faces whose boundary map is eliminated over Q
QUICK_STEPS = 100_000_000  # of a count: about a second
SHOWN = 12  # numbers shown in a row

METHODS = {
    "integer": "integer programming, every bound is reached",
    "linear": "linear programming and parity, outer bounds",
    "propagation": "propagation from edge to edge and parity, outer bounds",
}


@dataclass(frozen=True, eq=False)
class Plan:
    """The plan of a sum.

    Attributes
    ----------
    document : dict
        Everything that was found, as plain values; parts that were left out have a ``left_out`` that says
        why.
    rules : Rules or None
        The edge rules; None where boundary data are needed and not given.
    sectors, bounds, growth, bubbles, gauge : or None
        The results as objects.
    """

    document: dict[str, Any]
    rules: Rules | None
    sectors: Sectors | None
    bounds: Bounds | None
    growth: Growth
    bubbles: Bubbles | None
    gauge: Gauge | None

    def to_dict(self) -> dict[str, Any]:
        """Everything as plain values."""
        return self.document

    def groups(self) -> dict[str, np.ndarray]:
        """Arrays under the names of the layout's further groups."""
        out: dict[str, np.ndarray] = {"spins/unbounded": self.growth.unbounded.astype(np.int8)}
        if self.rules is not None:
            out["spins/boundary"] = self.rules.boundary
        if self.bounds is not None and self.bounds.contradiction is None:
            out["spins/least"], out["spins/greatest"] = self.bounds.least, self.bounds.greatest
        if self.sectors is not None and self.sectors.particular is not None:
            out["spins/parity"] = self.sectors.particular
        if self.bubbles is not None:
            for kind in ("face", "edge", "vertex"):
                for table in (f"{kind}_offsets", kind, f"{kind}_times"):
                    out[f"bubbles/{table}"] = getattr(self.bubbles, table)
            out["bubbles/characteristic"] = self.bubbles.characteristic
        if self.gauge is not None:
            out["gauge/edge"], out["gauge/face"] = self.gauge.edges, self.gauge.faces
            out["gauge/slot"] = self.gauge.slot
        return out

    def kept_in(self, skeleton: Skeleton) -> Skeleton:
        """The skeleton with the groups of this plan among its further groups."""
        return replace(skeleton, extra={**skeleton.extra, **self.groups()})

    def __str__(self) -> str:
        return "\n".join(_page(self.document))


def plan(
    skeleton: Skeleton,
    boundary: BoundaryData | Mapping[str, Any] | int | None = None,
    *,
    most: int | None = None,
    step: int = 1,
    exact: bool = False,
    rays: int = 100,
    power: float = 1.0,
    truncation: int | None = None,
    slot: int = 0,
    memory: int | None = None,
) -> Plan:
    """Plan a sum over a foam.

    Parameters
    ----------
    skeleton : Skeleton
    boundary : BoundaryData, mapping or int, optional
        Boundary spins and states, as `dualize.spins.boundary_data` takes them.
    most : int, optional
        Largest twice-spin of the internal faces; by default what the bounds allow, where all are bounded.
    step : int
        Spins are multiples of it: 2 for integer spins.
    exact : bool
        Bounds by integer programming.
    rays : int
        At most so many growth rays.
    power : float
        Exponent of the face weight 2j + 1 in the estimate of the divergence.
    truncation : int, optional
        4D: also count half-edge coefficients with l - j up to this.
    slot : int
        The redundant slot of every vertex for non-compact groups.
    memory : int, optional
        Slice contractions so that no tensor has more bytes.

    Raises
    ------
    InputError
        If boundary data or options do not fit the foam.
    """
    if most is not None and most < 0:
        raise InputError(f"the largest twice-spin is not negative, as {most} is")
    if not 0 <= slot <= skeleton.dimension:
        raise InputError(f"a vertex has the slots 0 .. {skeleton.dimension}, and no slot {slot}")
    if truncation is not None and skeleton.dimension != 4:
        raise InputError("half-edge coefficients, and so a truncation, belong to 4D foams")
    counts = dict(skeleton.counts)
    document: dict[str, Any] = {
        "format": "foam-plan",
        "version": 1,
        "dimension": skeleton.dimension,
        "counts": counts,
        "step": step,
    }
    data: BoundaryData | None = None
    if boundary is not None:
        data = boundary if isinstance(boundary, BoundaryData) else boundary_data(skeleton, boundary)
    elif not counts["links"]:
        data = BoundaryData(np.zeros(0, dtype=np.int64))
    flat = rules_of(skeleton, 0, step=step)
    rules = None if data is None else rules_of(skeleton, data.spins, step=step)
    if rules is None:
        document["boundary"] = {"given": False}
    else:
        assert data is not None
        document["boundary"] = {"given": True, "spins": data.spins.tolist(), "states": sorted(data.states)}
    with progress("planning") as tick:
        grown = growth(flat)
        document["growth"] = _growth(flat, grown, rays)
        tick(1)
        found = None if skeleton.dimension < 3 else bubbles(skeleton)
        document["bubbles"] = _bubbles(found)
        tick(1)
        fixed, document["power"] = _power(skeleton, flat, power, slot)
        document["gauge"] = {"slot": slot} if fixed is None else fixed.to_dict()
        tick(1)
        sectors = bounds = None
        if rules is not None:
            sectors, bounds = _sectors(rules, exact, document)
            tick(1)
        cutoff = _cutoff(most, rules, bounds)
        good = bounds is not None and bounds.contradiction is None
        if rules is not None and good:
            assert data is not None
            document["sum"] = _sum(rules, cutoff)
            _cost(skeleton, rules, data, cutoff, memory, truncation, slot, document)
    return Plan(document, rules, sectors, bounds, grown, found, fixed)


# -- the parts of the document -----------------------------------------------------------------------


def _growth(flat: Rules, grown: Growth, limit: int) -> dict[str, Any]:
    out: dict[str, Any] = {
        "unbounded": np.flatnonzero(grown.unbounded).tolist(),
        "dimension": grown.dimension,
    }
    surfaces = parity_sectors(replace(flat, step=1))
    out["surfaces_exponent"] = surfaces.exponent
    if grown.dimension > RAY_DIMENSION:
        return out | {"left_out": f"rays: the cone has dimension {grown.dimension}, above {RAY_DIMENSION}"}
    rays = growth_rays(flat, limit)
    return out | {"rays": rays.vectors.tolist(), "rays_complete": rays.complete}


def _bubbles(found: Bubbles | None) -> dict[str, Any]:
    if found is None:
        return {"left_out": "a 2D foam has none"}
    if len(found) > RELATED_BUBBLES:
        return {"number": len(found), "left_out": f"relations: there are more than {RELATED_BUBBLES} bubbles"}
    return {"number": len(found), **found.to_dict()}


def _power(skeleton: Skeleton, flat: Rules, power: float, slot: int) -> tuple[Gauge | None, dict[str, Any]]:
    inner = skeleton.counts["faces_internal"]
    if inner > EXACT_SIZE:
        return None, {"left_out": f"Omega: there are more than {EXACT_SIZE:,} internal faces"}
    group = interior_group(skeleton)
    omega = inner - (skeleton.counts["edges_internal"] - group.count(0))
    homology = interior_homology(skeleton, group)
    guess = estimate_degree(flat, power)
    out = {
        "omega": omega,
        "su2_degree": 3 * omega,
        "valid": "near the trivial flat connection",
        "h1": homology,
        "estimate": {
            "power": power,
            "degree": guess.degree,
            "dimension": guess.dimension,
            "growing": len(guess.growing),
            "edges": guess.edges,
        },
    }
    return gauge(skeleton, slot=slot, rank=inner - omega), out


def _sectors(rules: Rules, exact: bool, document: dict[str, Any]) -> tuple[Sectors, Bounds]:
    sectors = parity_sectors(rules)
    bounds = spin_bounds(rules, method="integer" if exact else None, sectors=sectors)
    document["parity"] = {
        "feasible": sectors.feasible,
        "exponent": sectors.exponent,
        "particular": None if sectors.particular is None else sectors.particular.tolist(),
        "contradiction": sectors.contradiction,
    }
    if sectors.feasible and sectors.exponent <= 64:
        document["parity"]["basis"] = [v.tolist() for v in sectors.basis()]
    why = bounds.contradiction
    document["bounds"] = {
        "method": bounds.method,
        "exact": bounds.exact,
        "least": bounds.least.tolist() if why is None else None,
        "greatest": [None if x < 0 else x for x in bounds.greatest.tolist()] if why is None else None,
        "contradiction": None
        if why is None
        else {
            "kind": why.kind,
            "edges": list(why.edges),
            "places": list(why.places),
            "multipliers": list(why.multipliers),
            "says": str(why),
        },
    }
    return sectors, bounds


def _cutoff(most: int | None, rules: Rules | None, bounds: Bounds | None) -> int | None:
    """The largest twice-spin of the sum: what was asked for, or what the bounds allow."""
    if rules is None or bounds is None or bounds.contradiction is not None:
        return most
    finite = not (bounds.greatest < 0).any()
    return int(bounds.greatest.max(initial=0)) if most is None and finite else most


def _sum(rules: Rules, cutoff: int | None) -> dict[str, Any]:
    """Exact numbers of labellings up to each cutoff."""
    if cutoff is None:
        return {"left_out": "counts: some spins are unbounded, so a largest twice-spin is needed"}
    cost = counting_cost(rules, cutoff, intertwiners=True)
    out: dict[str, Any] = {
        "most": cutoff,
        "cost": {"width": cost.width, "largest": cost.largest, "steps": cost.steps, "bytes": cost.bytes},
        "counts": [],
    }
    # the cutoffs before the last one only where that is quick
    first = max(0, cutoff - 8) if cost.steps < QUICK_STEPS else cutoff
    try:
        for n in range(first, cutoff + 1):
            row = {
                "most": n,
                "spins": count_labellings(rules, n),
                "spins_and_intertwiners": count_labellings(rules, n, intertwiners=True),
            }
            out["counts"].append(row)
    except LimitError as error:
        out["left_out"] = f"counts: {error.what}"
    return out


def _cost(
    skeleton: Skeleton,
    rules: Rules,
    data: BoundaryData,
    cutoff: int | None,
    memory: int | None,
    truncation: int | None,
    slot: int,
    document: dict[str, Any],
) -> None:
    """What the sum takes: vertex amplitudes, half-edges, contraction; into the document."""
    counted = document["sum"].get("counts") or []
    number = counted[-1]["spins"] if counted and "left_out" not in document["sum"] else None
    factors = weights(skeleton)
    document["weights"] = {
        "odd_faces": np.flatnonzero(factors.odd).tolist(),
        "says": "(2j+1) for each internal face, (-1)**(2j) for each odd face, 1 for each edge with "
        "orthonormal intertwiners, nothing at the boundary",
    }
    if cutoff is None or number is None:
        return
    if 0 < number <= LISTED:
        rows = np.concatenate([c.spins for c in list_labellings(rules, cutoff)])
        try:
            work = work_list(skeleton, rows, data.spins)
            document["work"] = {
                "labellings": number,
                "entries": len(work),
                "elements": work.elements,
                "bytes": work.bytes,
            }
            if truncation is not None:
                half = half_edges(skeleton, rows, data.spins, truncation=truncation, slot=slot)
                document["half_edges"] = half.to_dict()
        except LimitError as error:
            document["work"] = {"left_out": error.what}
    elif number:
        document["work"] = {"left_out": f"there are more than {LISTED:,} labellings; list them in chunks"}
    if len(skeleton["vertices/edge"]) > NETWORK_VERTICES:
        document["network"] = {"left_out": f"there are more than {NETWORK_VERTICES} vertices"}
        return
    sizes = _largest_sizes(skeleton, rules, cutoff)
    planned: NetworkPlan = plan_network(network(skeleton, sizes, closed=sorted(data.states)), memory=memory)
    order: SumOrder = sum_order(
        skeleton, cutoff // rules.step + 1, int(sizes[: len(rules.face)].max(initial=1))
    )
    document["network"] = planned.to_dict()
    document["whole_sum"] = order.to_dict()


def _largest_sizes(skeleton: Skeleton, rules: Rules, cutoff: int) -> np.ndarray:
    """The most intertwiners that each edge can have up to a cutoff."""
    spins = np.append(np.full(rules.internal, cutoff), rules.boundary)
    rows = spins[skeleton["edges/face"]]
    inner = len(rules.face)
    sizes = np.ones(len(rows), dtype=np.int64)
    if rows.shape[1] == 4:
        # 1 + the least spin is never exceeded; where a boundary spin is least it counts
        sizes[:inner] = 1 + np.where(rules.face < rules.internal, cutoff, rows[:inner]).min(axis=1)
        sizes[inner:] = intertwiner_dimension(rows[inner:])
    return sizes


# -- the page --------------------------------------------------------------------------------------


def _page(d: dict[str, Any]) -> list[str]:
    """The lines of the page."""
    c = d["counts"]
    out = [
        f"{d['dimension']}D foam: {c['vertices']} vertices, {c['edges_internal']} internal and "
        f"{c['edges_external']} external edges, {c['faces_internal']} internal and {c['faces_external']} "
        "external faces",
        "all spins are twice-spins of SU(2)" + _step(d["step"]),
    ]
    if not d["boundary"]["given"]:
        out.append("no boundary data: sectors, bounds, counts and costs are left out")
    out += _sector_lines(d) + _growth_lines(d) + _sum_lines(d) + _cost_lines(d) + _gauge_lines(d)
    return out


def _step(step: int) -> str:
    if step == 1:
        return ""
    return ", integer spins only" if step == 2 else f", multiples of {step}"


def _sector_lines(d: dict[str, Any]) -> list[str]:
    if "parity" not in d:
        return []
    out = ["", "admissible spins"]
    parity, bounds = d["parity"], d["bounds"]
    if parity["feasible"]:
        out.append(f"  parity sectors   {_power_of_two(parity['exponent'])}")
    why = bounds["contradiction"]
    if why is not None:
        return [*out, f"  no labelling     {why['says']}"]
    out.append(f"  bounds           by {METHODS[bounds['method']]}")
    ranges: dict[tuple, list[int]] = {}
    for f, (a, b) in enumerate(zip(bounds["least"], bounds["greatest"], strict=True)):
        ranges.setdefault((a, b), []).append(f)
    rows = sorted(ranges.items(), key=lambda item: item[1][0])
    for (a, b), faces in rows[:SHOWN]:
        text = f"from {a}, no upper bound" if b is None else (f"{a}" if a == b else f"{a} to {b}")
        out.append(f"    {text:<22} {_plural(len(faces), 'face')}: {_some(faces)}")
    if len(rows) > SHOWN:
        out.append(f"    and {len(rows) - SHOWN} other ranges")
    return out


def _growth_lines(d: dict[str, Any]) -> list[str]:
    g, b, p = d["growth"], d["bubbles"], d["power"]
    out = ["", "growth: three different things, none follows from another"]
    out.append(
        f"  unbounded spins  {len(g['unbounded'])} of {d['counts']['faces_internal']} internal faces, in a "
        f"cone of dimension {g['dimension']}"
    )
    if "rays" in g:
        more = "" if g["rays_complete"] else " found, and there are more"
        out.append(f"    growth rays    {len(g['rays'])}{more}")
    elif "left_out" in g:
        out.append(f"    left out       {g['left_out']}")
    out.append(f"  closed surfaces  {_power_of_two(g['surfaces_exponent'])} mod 2, the empty one included")
    if "number" in b:
        text = f"  bubbles          {b['number']}"
        if "independent" in b:
            text += f", {b['independent']} independent mod 2"
            odd = [n for n, row in enumerate(b["bubbles"]) if row["characteristic"] != 2]
            if odd:
                text += f"; no spheres: {_some(odd)}"
        out.append(text)
    if "omega" in p:
        out.append(
            f"  divergence       Omega = {p['omega']}: BF theory of SU(2) as L^{p['su2_degree']}, near the "
            "trivial flat connection"
        )
        if p["h1"]:
            out.append(
                "    H_1 is not trivial here: other flat connections can dominate, and were not looked at"
            )
        else:
            out.append("    H_1 is trivial; whether the fundamental group is was not checked")
        e = p["estimate"]
        out.append(
            f"    estimate       degree {e['degree']:g} for face weights (2j+1)^{e['power']:g}: cone "
            f"{e['dimension']}, {e['growing']} growing spins, {e['edges']} edges; powers only, no signs"
        )
    else:
        out.append(f"  divergence       left out: {p['left_out']}")
    return out


def _sum_lines(d: dict[str, Any]) -> list[str]:
    if "sum" not in d:
        return []
    s = d["sum"]
    out = ["", "labellings"]
    if s.get("counts"):
        out.append(f"  {'largest':>9} {'spins':>22} {'spins and intertwiners':>26}")
        for row in s["counts"]:
            both = row["spins_and_intertwiners"]
            out.append(f"  {row['most']:>9} {_figure(row['spins']):>22} {_figure(both):>26}")
        greatest = d["bounds"]["greatest"]
        if None in greatest:
            out.append("  the sum has no end: some spins are unbounded")
        elif max(greatest, default=0) <= s["most"]:
            out.append("  these are all labellings")
        else:
            out.append(f"  there may be more, up to the largest spin {max(greatest)}")
    if "left_out" in s:
        out.append(f"  left out         {s['left_out']}")
    return out


def _cost_lines(d: dict[str, Any]) -> list[str]:
    out = []
    if "work" in d:
        w = d["work"]
        out.append("  vertex tables    " + (
            f"left out: {w['left_out']}" if "left_out" in w else
            f"{w['entries']:,} distinct amplitudes, {_figure(w['elements'])} elements, {_bytes(w['bytes'])}"
        ))  # fmt: skip
    if "half_edges" in d:
        h = d["half_edges"]
        out.append(
            f"  half-edges       {h['half_edges']} with l - j up to {h['truncation']}: "
            f"{_figure(h['coefficients'])} distinct coefficients, {_figure(h['elements'])} elements, "
            f"{_figure(h['symbols'])} SU(2) symbols"
        )
    if "network" in d:
        n = d["network"]
        if "left_out" in n:
            out.append(f"  contraction      left out: {n['left_out']}")
        else:
            text = f"{_figure(n['flops'])} operations, largest tensor {_bytes(n['peak_bytes'])}"
            if n["sliced"]:
                text += f", {_figure(n['slices'])} slices over the edges {_some(n['sliced'])}"
            out.append(f"  contraction      {text}, for fixed spins and the largest intertwiner spaces")
            w = d["whole_sum"]
            out.append(
                f"  whole sum        width {w['width']}, tables of up to {_figure(w['entries'])} entries, "
                "spins and intertwiners together"
            )
    return ["", "cost", *out] if out else []


def _gauge_lines(d: dict[str, Any]) -> list[str]:
    g = d["gauge"]
    out = ["", "to fix"]
    if "edges" in g:
        out.append(
            f"  group elements   {_plural(len(g['edges']), 'edge')} of a spanning forest: {_some(g['edges'])}"
        )
        where = (
            "dual to a maximal tree of the interior segments"
            if g["how"] == "tree"
            else "without which the rank over Q stays; valid near the trivial flat connection"
        )
        faces = _some(g["faces"]) if g["faces"] else "none"
        out.append(f"  spins            {_plural(len(g['faces']), 'face')} {where}: {faces}")
    slot = g["slot"] if isinstance(g["slot"], int) else (g["slot"] or [0])[0]
    out.append(f"  non-compact      the integration at slot {slot} of every vertex")
    if "weights" in d:
        odd = d["weights"]["odd_faces"]
        out.append(
            f"  signs            (-1)^(2j) at {_plural(len(odd), 'face')}"
            + (f": {_some(odd)}" if odd else "")
        )
    return out


def _power_of_two(exponent: int) -> str:
    return f"{2**exponent}" if exponent <= 20 else f"2^{exponent}"


def _plural(number: int, noun: str) -> str:
    return f"{number} {noun}" + ("" if number == 1 else "s")


def _some(numbers: list[int]) -> str:
    return " ".join(map(str, numbers[:SHOWN])) + (" ..." if len(numbers) > SHOWN else "")


def _figure(number: int) -> str:
    if number < 10**15:
        return f"{number:,}"
    digits = int(log10(number))
    return f"{number // 10 ** (digits - 3) / 1000:.3f}e{digits}"


def _bytes(number: int) -> str:
    for unit, size in (("GiB", 1 << 30), ("MiB", 1 << 20), ("KiB", 1 << 10)):
        if number >= size:
            return f"{number / size:,.1f} {unit}" if number < 10**15 else f"{_figure(number)} bytes"
    return f"{number} bytes"
