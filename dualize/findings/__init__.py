"""The checks of the audit, by what they look at; each yields findings about a `Subject`."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from time import perf_counter

from ..audit import Finding
from . import boundary, certified, coloured, counting, derived, homology, integral, space, tables
from .subject import GUDHI_LIMIT, LINK_LIMIT, Subject

__all__ = ["FIGURES", "GUDHI_LIMIT", "IDENTITIES", "LINK_LIMIT", "PROPERTIES", "Subject", "examine"]

# group: (check, names of its identities, properties, figures); the groups are timed apart
GROUPS: list[
    tuple[str, Callable[[Subject], Iterator[Finding]], tuple[str, ...], tuple[str, ...], tuple[str, ...]]
] = [
    ("tables", tables.check_tables, ("layout", "tables", "gluings"), (), ("cells",)),
    ("tables", tables.check_chains, ("d1-d2", "twist"), (), ()),
    ("counting", counting.check_counts, ("counts", "components"), (), ("f-vector", "ridge-degrees")),
    ("boundary", boundary.check_boundary, ("boundary-cells", "boundary-signs"), (), ("boundary",)),
    ("links", space.check_links, (), ("homology-manifold", "manifold"), ("links",)),
    ("links", certified.check_certificates, (), (), ("certificates", "space")),
    ("counting", counting.check_relations, ("dehn-sommerville", "euler-dual", "euler-boundary"), (), ()),
    ("gudhi", counting.check_euler, ("euler",), (), ()),
    ("gudhi", homology.check_betti, ("euler-betti", "duality"), (), ("betti", "boundary-betti")),
    ("gudhi", homology.check_orientability, ("orientability",), (), ()),
    (
        "integers",
        integral.check_integral,
        ("universal-coefficients", "integral-duality"),
        (),
        ("homology", "relative-homology"),
    ),
    ("integers", integral.check_form, ("unimodular",), (), ("intersection-form",)),
    ("derived", derived.check_derived, ("derived",), (), ()),
    (
        "coloured",
        coloured.check_coloured,
        ("bipartite", "sub-graphs", "face-formula", "melonic-degree"),
        ("melonic",),
        ("colour-sets", "jackets", "degree"),
    ),
    ("foam homology", homology.check_foam, ("foam-b0", "foam-b1"), (), ()),
    (
        "groups",
        integral.check_groups,
        ("group-homology",),
        (),
        ("fundamental-group", "homomorphisms"),
    ),
    ("groups", certified.check_recognised, (), ("sphere", "ball"), ()),
    (
        "space",
        space.check_space,
        (),
        ("connected", "closed", "orientable", "simplicial", "regular", "ordered"),
        (),
    ),
    ("space", space.check_coordinates, (), ("volumes", "sides"), ()),
]
# what is asked of some complexes only
APPLIES: dict[Callable[[Subject], Iterator[Finding]], Callable[[Subject], bool]] = {
    derived.check_derived: derived.is_subdivided,
    integral.check_form: integral.has_form,
    coloured.check_coloured: coloured.is_coloured,
}
IDENTITIES = tuple(name for group in GROUPS for name in group[2])
PROPERTIES = tuple(name for group in GROUPS for name in group[3])
FIGURES = tuple(name for group in GROUPS for name in group[4])


def examine(subject: Subject) -> Iterator[Finding]:
    """All findings about a skeleton, each name once.

    Where the layout is broken, or the gluings cannot be read back, whatever stands on them is *not checked*.
    """
    for group, check, identities, properties, figures in GROUPS:
        start = perf_counter()
        obstacle = None if check is tables.check_tables else subject.obstacle
        if check in APPLIES and (obstacle is not None or not APPLIES[check](subject)):
            continue
        if obstacle is None:
            found = list(check(subject))
        else:
            found = [Finding(name, "identity", "not checked", against=obstacle) for name in identities]
            found += [Finding(name, "property", "undecided", against=obstacle) for name in properties]
            found += [Finding(name, "figure", "not checked", against=obstacle) for name in figures]
        assert sorted(f.check for f in found) == sorted(identities + properties + figures), found
        subject.seconds[group] = subject.seconds.get(group, 0.0) + perf_counter() - start
        yield from found
