"""What space is this?  Homology over the integers, the group, the form, certificates of links."""

from __future__ import annotations

from pathlib import Path

import dualize
from dualize.certificates import certify_links
from dualize.topology.groups import foam_groups
from dualize.topology.homology import integral_homology
from dualize.topology.intersection import intersection_form

from .core import lattice, whole
from .frame import Work, case

GIGA = 2**30


@case("integral homology, 16^3", "labels to skeleton", seconds=20.0)
def homology_16(folder: Path) -> Work:
    facets = lattice(16, 3)
    t = dualize.Triangulation.from_facets(facets)
    return Work(lambda: integral_homology(t), lambda: whole(facets), memory=2 * GIGA)


@case("integral homology, 8^4", "labels to skeleton")
def homology_8(folder: Path) -> Work:
    facets = lattice(8)
    t = dualize.Triangulation.from_facets(facets)
    return Work(lambda: integral_homology(t), lambda: whole(facets), memory=2 * GIGA)


@case("links certified by moves, 8^4", "labels to skeleton", seconds=60.0)
def links_8(folder: Path) -> Work:
    facets = lattice(8)
    t = dualize.Triangulation.from_facets(facets)
    return Work(lambda: certify_links(t), lambda: whole(facets))


@case("fundamental group of the foam, 8^4", "labels to skeleton")
def group_8(folder: Path) -> Work:
    facets = lattice(8)
    s = whole(facets)
    return Work(lambda: foam_groups(s), lambda: whole(facets))


@case("intersection form, 8^4", "labels to skeleton")
def form_8(folder: Path) -> Work:
    facets = lattice(8)
    t = dualize.Triangulation.from_facets(facets)
    return Work(lambda: intersection_form(t), lambda: whole(facets))
