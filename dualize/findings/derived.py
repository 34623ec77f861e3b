"""Gluings that are no simplicial complexes: own homology against gudhi on the second derived subdivision."""

from __future__ import annotations

from collections.abc import Iterator

from ..audit import Finding
from ..topology.classes import census, classes
from ..topology.derived import first_derived
from ..topology.gudhi import PRIMES, betti_numbers, simplices_per_dimension
from ..topology.maps import simplex_maps
from ..topology.rank import betti_numbers as own_betti
from .subject import Subject

__all__ = ["check_derived", "is_subdivided"]


def is_subdivided(x: Subject) -> bool:
    """Whether gudhi reads a subdivision, because the gluings are no simplicial complex."""
    return x.labels is None and not x.twins


def check_derived(x: Subject) -> Iterator[Finding]:
    """Simplices and Betti numbers of the second subdivision as gudhi finds them, against own ones.

    Own Betti numbers are those of the chain complex of the gluings; where a simplex is glued to itself, so
    that its class carries no chain, those of the first subdivision.
    """
    name, kind = "derived", "identity"
    if x.tree is None:
        yield Finding(name, kind, "not checked", against=str(x.no_witness))
        return
    once = first_derived(x.t)
    counted, own = simplices_per_dimension(x.tree), census(first_derived(once), threads=x.threads).f
    if x.irregular:
        maps, of = simplex_maps(once, census(once), classes(once, x.d)), "the first subdivision"
    else:
        maps, of = simplex_maps(x.t, x.census, x.facet_classes), "the gluings"
    wrong = [f"simplices {counted}, own counts {own}"] if counted != own else []
    found = {}
    for p in PRIMES:
        found[f"Z_{p}"] = theirs = betti_numbers(x.tree, p)
        if theirs != (mine := own_betti(maps, p)):
            wrong.append(f"Betti numbers {theirs} over Z_{p}, own {mine}")
    against = f"gudhi on the second derived subdivision, {counted[-1]} simplices; own chain complex of {of}"
    if wrong:
        yield Finding(name, kind, "violated", wrong, against)
    else:
        yield Finding(name, kind, "holds", found, against)
