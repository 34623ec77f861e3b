"""What may be summed: parity sectors and unbounded spins of a large lattice, and listing labellings."""

from __future__ import annotations

from pathlib import Path

import numpy as np

import dualize
from dualize import make, spins

from .core import lattice, whole
from .frame import Work, case

LISTED = 1_000_000


@case("parity sectors and unbounded spins, 7^4", "labels to skeleton", seconds=30.0, repeats=3)
def sectors(folder: Path) -> Work:
    facets = lattice(7)  # 120,050 internal faces
    s = whole(facets)

    def ours() -> tuple:
        rules = spins.rules_of(s)
        return spins.parity_sectors(rules), spins.growth(rules)

    return Work(ours, lambda: whole(facets))


def _listing(rules: spins.Rules, most: int) -> Work:
    """List a million labellings; the reference writes as many rows."""

    def ours() -> int:
        number = 0
        for chunk in spins.list_labellings(rules, most):
            number += len(chunk.spins)
            if number >= LISTED:
                return number
        raise SystemExit(f"error: there are only {number} labellings")

    return Work(ours, lambda: np.random.default_rng(1).integers(0, most, (LISTED, rules.internal)))


@case("10^6 labellings, three around a triangle", "numpy: as many random rows", seconds=1.0)
def ring(folder: Path) -> Work:
    s = dualize.build(make.move_side(4, 3))
    return _listing(spins.rules_of(s, 2_000_000), 6_000_000)


@case("10^6 labellings, five around a point", "numpy: as many random rows", seconds=1.0)
def star(folder: Path) -> Work:
    s = dualize.build(make.move_side(4, 5))
    return _listing(spins.rules_of(s, 2), 9)
