"""Bounds of the internal spins for given boundary spins, and certificates where there is no labelling."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from math import lcm
from typing import TYPE_CHECKING

import numpy as np

from ..errors import InputError, LimitError
from ..progress import progress
from .parity import Sectors, parity_sectors
from .rules import NO_BOUND, Rules
from .unbounded import growth

if TYPE_CHECKING:
    from scipy.sparse import csr_array

__all__ = ["Bounds", "Contradiction", "propagated", "spin_bounds"]

METHODS = ("propagation", "linear", "integer")

# linear programmes up to which many are solved by default: two for each face
LINEAR_FACES = 500

SLACK = 1e-6  # what the solver may be wrong by: bounds are rounded outward


@dataclass(frozen=True)
class Contradiction:
    """Why there is no labelling.

    Attributes
    ----------
    kind : str
        ``"parity"``: the conditions at `edges` add up to an odd number of half-integers that is even.
        ``"inequalities"``: the edge rules at `edges`, each taken so many times, add up to a negative
        combination of spins that is at least a positive number.  ``"integers"``: rules and parities hold
        separately, and not together; integer programming found no labelling.
    edges : tuple of int
    places : tuple of int
        For inequalities, the place at each edge whose spin is not to exceed the sum of the others.
    multipliers : tuple of int
        For inequalities, how often each is taken.
    """

    kind: str
    edges: tuple[int, ...] = ()
    places: tuple[int, ...] = ()
    multipliers: tuple[int, ...] = ()

    def __str__(self) -> str:
        if self.kind == "parity":
            return (
                f"parities contradict at the edges {_listed(self.edges)}: every internal face meets them an "
                "even number of times, and the boundary spins there have an odd sum"
            )
        if self.kind == "inequalities" and self.edges:
            return (
                f"the edge rules at the edges {_listed(self.edges)} contradict: taken "
                f"{_listed(self.multipliers)} times they add up to an impossible one"
            )
        if self.kind == "inequalities":
            return "the edge rules contradict (numerically; no exact certificate was found)"
        return "the edge rules contradict the parities: integer programming found no labelling"


def _listed(numbers: tuple[int, ...]) -> str:
    return ", ".join(map(str, numbers[:12])) + (", ..." if len(numbers) > 12 else "")


@dataclass(frozen=True, eq=False)
class Bounds:
    """Least and greatest twice-spin of each internal face.

    Attributes
    ----------
    least, greatest : ndarray of int64, shape (F_int,)
        `greatest` is -1 where the spin is unbounded.
    method : str
        ``"propagation"`` from edge to edge, ``"linear"`` programming, both refined by parity: all admissible
        spins lie between them, but not every bound need be reached; ``"integer"`` programming: every bound is
        reached.
    exact : bool
        Whether every bound is reached.
    contradiction : Contradiction or None
        Why there is no labelling, where that was found; the bounds then mean nothing.
    """

    least: np.ndarray
    greatest: np.ndarray
    method: str
    exact: bool
    contradiction: Contradiction | None = None

    def __repr__(self) -> str:
        if self.contradiction is not None:
            return "<Bounds: no labelling>"
        return f"<Bounds of {len(self.least)} faces by {self.method}>"


def spin_bounds(
    rules: Rules,
    *,
    method: str | None = None,
    sector: np.ndarray | None = None,
    sectors: Sectors | None = None,
) -> Bounds:
    """Least and greatest admissible spin of every internal face.

    Parameters
    ----------
    rules : Rules
    method : str, optional
        ``"propagation"``, ``"linear"`` or ``"integer"``; by default linear up to 500 internal faces, else
        propagation.
    sector : array_like of int, shape (F_int,), optional
        Only labellings with these parities.
    sectors : Sectors, optional
        The parity sectors of these rules, where they are known already.

    Returns
    -------
    Bounds

    Raises
    ------
    InputError
        If the method is not known.

    Notes
    -----
    Two programmes for each face, solved by HiGHS (Q. Huangfu, J. A. J. Hall, Math. Prog. Comp. 10 (2018)
    119-142, through scipy).  Rounding is outward, so that outer bounds stay outer bounds.

    Examples
    --------
    Three 4-simplices around a triangle, all boundary spins 1/2: the inner spin is 1/2 or 3/2.

    >>> from dualize import build, make
    >>> from dualize.spins import rules_of
    >>> b = spin_bounds(rules_of(build(make.move_side(4, 3)), 1), method="integer")
    >>> b.least.tolist(), b.greatest.tolist()
    ([1], [3])
    """
    if method is None:
        method = "linear" if rules.internal <= LINEAR_FACES else "propagation"
    if method not in METHODS:
        raise InputError(f"there is no method {method!r}", hint="known are: " + ", ".join(METHODS))
    sectors = parity_sectors(rules) if sectors is None else sectors
    nothing = np.zeros(rules.internal, dtype=np.int64)
    if not sectors.feasible:
        why = Contradiction("parity", sectors.contradiction or ())
        return Bounds(nothing, nothing, method, False, why)
    parity = _fixed_parity(rules, sectors) if sector is None else np.asarray(sector, dtype=np.int64)
    least, greatest = propagated(rules)
    least, greatest, empty = _refine(rules, least, greatest, parity)
    if empty or method != "propagation":
        if (contradiction := _infeasible(rules)) is not None:
            return Bounds(nothing, nothing, method, False, contradiction)
        if empty:
            return Bounds(nothing, nothing, method, False, Contradiction("integers"))
    if method == "linear":
        least, greatest = _linear(rules, least, greatest)
        least, greatest, empty = _refine(rules, least, greatest, parity)
        if empty:
            return Bounds(nothing, nothing, method, False, Contradiction("integers"))
    exact = False
    if method == "integer":
        found = _integer(rules, least, greatest, None if sector is None else parity)
        if found is None:
            return Bounds(nothing, nothing, method, True, Contradiction("integers"))
        least, greatest = found
        exact = True
    unbounded = growth(rules).unbounded
    return Bounds(least, np.where(unbounded, -1, greatest), method, exact)


def propagated(
    rules: Rules, least: np.ndarray | None = None, greatest: np.ndarray | None = None
) -> tuple[np.ndarray, np.ndarray]:
    """Bounds carried from edge to edge until nothing changes; `NO_BOUND` and above stand for none.

    Parameters
    ----------
    rules : Rules
    least, greatest : ndarray of int64, shape (F_int,), optional
        What is known already.

    Returns
    -------
    least, greatest : ndarray of int64, shape (F_int,)
        If some least is above the greatest there is no labelling.
    """
    f = rules.internal
    low = np.zeros(f, dtype=np.int64) if least is None else least.astype(np.int64)
    high = np.full(f, NO_BOUND, dtype=np.int64) if greatest is None else greatest.astype(np.int64)
    d = rules.face.shape[1]
    inner = rules.face < f
    index = np.where(inner, rules.face, 0)
    outer = np.where(inner, 0, np.append(rules.boundary, 0)[np.where(inner, -1, rules.face - f)])
    count = (rules.face[:, :, None] == rules.face[:, None, :]).sum(axis=2)
    if not f or not len(rules.face):
        return low, high
    for _ in range(10_000):
        upper = np.where(inner, high[index], outer)
        lower = np.where(inner, low[index], outer)
        total = upper.sum(axis=1)
        new_high, new_low = high.copy(), low.copy()
        for p in range(d):
            alone = inner[:, p] & (count[:, p] == 1)
            np.minimum.at(new_high, rules.face[alone, p], (total - upper[:, p])[alone])
            for q in range(d):
                apart = inner[:, p] & (rules.face[:, p] != rules.face[:, q])
                # the spin at q is at most m times that at p and all others
                others = total - upper[:, q] - count[:, p] * upper[:, p]
                need = -((others - lower[:, q]) // count[:, p])
                np.maximum.at(new_low, rules.face[apart, p], need[apart])
        np.minimum(new_high, NO_BOUND, out=new_high)
        if np.array_equal(new_high, high) and np.array_equal(new_low, low):
            break
        high, low = new_high, new_low
        if (low > high).any():
            break
    return low, high


def _fixed_parity(rules: Rules, sectors: Sectors) -> np.ndarray:
    """The parity of each face where all sectors agree, else -1."""
    assert sectors.particular is not None
    return np.where(sectors.loose, -1, sectors.particular).astype(np.int64)


def _refine(
    rules: Rules, least: np.ndarray, greatest: np.ndarray, parity: np.ndarray
) -> tuple[np.ndarray, np.ndarray, bool]:
    """Bounds rounded inward to multiples of the step with the right parity; whether nothing is left."""
    step = rules.step
    low = -(-least // step) * step
    high = np.where(greatest >= NO_BOUND, greatest, greatest // step * step)
    if step % 2:
        low += np.where((parity >= 0) & ((low - parity) % 2 != 0), step, 0)
        high -= np.where((parity >= 0) & (high < NO_BOUND) & ((high - parity) % 2 != 0), step, 0)
    return low, high, bool((low > high).any())


def _inequalities(rules: Rules) -> tuple[csr_array, np.ndarray, list[tuple[int, int]]]:
    """All rules as ``A @ x <= b`` for x >= 0, with the (edge, place) of each row."""
    from scipy.sparse import csr_array

    rows: list[int] = []
    columns: list[int] = []
    values: list[int] = []
    right: list[int] = []
    names: list[tuple[int, int]] = []
    inner = rules.internal
    for e, faces in enumerate(rules.face.tolist()):
        count = {f: faces.count(f) for f in faces}
        total, largest = int(rules.total[e]), int(rules.largest[e])
        told = False
        for place, f in enumerate(faces):
            if f < inner:
                if count[f] > 1 or all(g == f for g in faces):
                    continue
                bound = total
            else:
                spin = int(rules.boundary[f - inner])
                if told or spin < largest:
                    continue
                told = True
                bound = total - 2 * spin
            terms = {g: -m for g, m in count.items() if g < inner}
            if f < inner:
                terms[f] = 1
            if bound >= 0 and all(c < 0 for c in terms.values()):
                continue
            rows += [len(right)] * len(terms)
            columns += list(terms)
            values += list(terms.values())
            right.append(bound)
            names.append((e, place))
    shape = (len(right), inner)
    matrix = csr_array((np.array(values, dtype=np.int64), (rows, columns)), shape=shape)
    return matrix, np.array(right, dtype=np.int64), names


def _infeasible(rules: Rules) -> Contradiction | None:
    """A certificate that the inequalities have no solution, or None if they have.

    Farkas' lemma: multipliers y >= 0 with ``y @ A >= 0`` and ``y @ b < 0``; found in floating point, then
    brought to integers and checked exactly.
    """
    from scipy.optimize import linprog

    matrix, right, names = _inequalities(rules)
    if not len(right) or (right >= 0).all():  # all spins 0
        return None
    ones = np.ones((1, len(right)))
    result = linprog(
        right.astype(float),
        A_ub=-matrix.T.astype(float),
        b_ub=np.zeros(rules.internal),
        A_eq=ones,
        b_eq=[1.0],
        method="highs-ds",
    )
    if result.x is None or result.fun > -SLACK / max(1, len(right)):
        return None
    top = float(result.x.max())
    parts = [Fraction(float(y) / top).limit_denominator(1000) for y in result.x]
    scale = lcm(*(p.denominator for p in parts))
    whole = [int(p * scale) for p in parts]
    slope = [0] * rules.internal
    entries = matrix.tocoo()
    for x, f, value in zip(*(c.tolist() for c in entries.coords), entries.data.tolist(), strict=True):
        slope[f] += whole[x] * value
    if min(slope, default=0) < 0 or sum(y * b for y, b in zip(whole, right.tolist(), strict=True)) >= 0:
        return Contradiction("inequalities")
    taken = [x for x, y in enumerate(whole) if y]
    return Contradiction(
        "inequalities",
        tuple(names[x][0] for x in taken),
        tuple(names[x][1] for x in taken),
        tuple(whole[x] for x in taken),
    )


def _linear(rules: Rules, least: np.ndarray, greatest: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Bounds by linear programming, rounded outward to integers; known bounds only help."""
    from scipy.optimize import linprog

    matrix, right, _ = _inequalities(rules)
    unbounded = growth(rules).unbounded
    low, high = least.copy(), greatest.copy()
    box = [(int(a), None if b >= NO_BOUND else int(b)) for a, b in zip(low, high, strict=True)]
    goal = np.zeros(rules.internal)

    def best(face: int, sign: int) -> float | None:
        goal[face] = sign
        result = linprog(goal, A_ub=matrix.astype(float), b_ub=right, bounds=box, method="highs")
        goal[face] = 0
        return None if result.x is None else float(sign * result.fun)

    with progress("bounding spins", total=rules.internal) as step:
        for face in range(rules.internal):
            if (value := best(face, 1)) is not None:
                low[face] = max(low[face], int(np.ceil(value - SLACK)))
            if not unbounded[face] and (value := best(face, -1)) is not None:
                high[face] = min(high[face], int(np.floor(value + SLACK)))
            step(1)
    return low, high


def _integer(
    rules: Rules, least: np.ndarray, greatest: np.ndarray, parity: np.ndarray | None
) -> tuple[np.ndarray, np.ndarray] | None:
    """Bounds by integer programming, or None if there is no labelling.

    Spins are ``step * n``; in a given sector ``2 n + parity``, else half of the sum at each edge is an
    integer variable of its own.
    """
    from scipy.optimize import Bounds as Box
    from scipy.optimize import LinearConstraint, milp
    from scipy.sparse import csr_array, eye_array, hstack

    matrix, right, _ = _inequalities(rules)
    f, edges = rules.internal, len(rules.face)
    scale, shift = rules.step, np.zeros(f)
    if parity is not None and rules.step % 2:
        scale, shift = 2 * rules.step, (parity % 2) * rules.step
    constraints = []
    free = 0 if parity is not None or rules.step % 2 == 0 else edges
    pad = csr_array((matrix.shape[0], free))
    if matrix.shape[0]:
        constraints.append(LinearConstraint(hstack([matrix * scale, pad]), ub=right - matrix @ shift))
    if free:
        incidence = csr_array((rules.times, (rules.edge_of_member, rules.member)), shape=(edges, f))
        sums = hstack([incidence * scale, -2 * eye_array(edges)])
        constraints.append(LinearConstraint(sums, lb=-rules.total, ub=-rules.total))
    low = np.concatenate([np.ceil((least - shift) / scale), np.zeros(free)])
    high = np.concatenate(
        [np.where(greatest >= NO_BOUND, np.inf, np.floor((greatest - shift) / scale)), np.full(free, np.inf)]
    )
    if (low > high).any():
        return None
    unbounded = growth(rules).unbounded
    new_low, new_high = least.copy(), greatest.copy()
    goal = np.zeros(f + free)
    if not f:
        return new_low, new_high
    with progress("bounding spins", total=f) as step:
        for face in range(f):
            for sign in (1,) if unbounded[face] else (1, -1):
                goal[face] = sign
                result = milp(
                    goal, constraints=constraints, bounds=Box(low, high), integrality=np.ones(f + free)
                )
                goal[face] = 0
                if result.status == 2:
                    return None
                if result.x is None:
                    raise LimitError(f"integer programming gave up: {result.message}")
                value = scale * round(float(result.x[face])) + int(shift[face])
                if sign > 0:
                    new_low[face] = value
                else:
                    new_high[face] = value
            step(1)
    return new_low, new_high
