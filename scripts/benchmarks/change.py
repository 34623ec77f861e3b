"""Making and changing triangulations."""

from __future__ import annotations

from pathlib import Path

import dualize
from dualize import change, make

from .core import lattice
from .frame import Work, case


@case(
    "a million random moves on 98,304 4-simplices", "building it once", seconds=30.0, repeats=1, quick=False
)
def walk(folder: Path) -> Work:
    t = dualize.Triangulation.from_facets(lattice(8))
    change.walk(t, 1000, seed=2)
    return Work(lambda: change.walk(t, 10**6, seed=1), lambda: dualize.build(t))


@case("make the periodic 26^4 lattice", "its build", seconds=30.0, repeats=1, quick=False)
def make_lattice(folder: Path) -> Work:
    t = dualize.Triangulation.from_facets(lattice(26))
    return Work(
        lambda: make.lattice(26, 26, 26, 26, periodic="xyzt", coordinates=False), lambda: dualize.build(t)
    )
