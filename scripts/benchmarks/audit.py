"""The audit against the build: its identities alone, and gudhi's part told apart."""

from __future__ import annotations

from pathlib import Path

import dualize

from .core import lattice, whole
from .frame import Work, case

APART = ("gudhi", "foam homology", "links", "derived", "integers", "groups")


def _identities(facets) -> Work:
    s = whole(facets)

    def ours() -> float:
        report = dualize.audit(s)
        return sum(seconds for group, seconds in report.seconds.items() if group not in APART)

    return Work(ours, lambda: whole(facets))


@case("audit without gudhi and links, 8^4", "labels to skeleton", ratio=4.0)
def identities_8(folder: Path) -> Work:
    return _identities(lattice(8))


@case("audit without gudhi and links, 16^4", "labels to skeleton", ratio=3.0, repeats=3, quick=False)
def identities_16(folder: Path) -> Work:
    return _identities(lattice(16))


@case("audit, gudhi's part, 5^4", "labels to skeleton", quick=False)
def gudhi_part(folder: Path) -> Work:
    facets = lattice(5)
    s = whole(facets)
    return Work(lambda: float(dualize.audit(s).seconds["gudhi"]), lambda: whole(facets))


@case("audit, links, 8^4", "labels to skeleton", seconds=60.0)
def links(folder: Path) -> Work:
    facets = lattice(8)
    s = whole(facets)
    return Work(lambda: float(dualize.audit(s).seconds["links"]), lambda: whole(facets))
