"""Homology over the integers, the fundamental group, and the intersection form; what they must satisfy."""

from __future__ import annotations

from collections.abc import Iterator

from ..audit import Finding
from ..errors import LimitError
from ..topology.homomorphisms import count_homomorphisms
from ..topology.integral import abelian_group, abelian_name
from ..topology.intersection import intersection_form
from .homology import find_betti
from .subject import GROUP_LIMIT, Subject, named

__all__ = ["check_form", "check_groups", "check_integral", "has_form"]

TARGETS = ("Z2", "Z3", "S3", "Q8", "A5")  # groups to which homomorphisms are counted
STEPS = 20_000  # partial homomorphisms after which counting is given up
LONGEST = 400  # characters of a presentation that are shown


def check_integral(x: Subject) -> Iterator[Finding]:
    """H_0 .. H_D with torsion, absolute and relative to the boundary, against fields and against duality."""
    if (reason := x.no_integers) is not None:
        for name in ("homology", "relative-homology"):
            yield Finding(name, "figure", "not checked", against=reason)
        for name in ("universal-coefficients", "integral-duality"):
            yield Finding(name, "identity", "not checked", against=reason)
        return
    against = "own chain complex of the simplex classes, pairs removed, Smith normal form of the rest"
    if x.irregular:
        against += "; of the barycentric subdivision, as simplices are glued to themselves"
    yield Finding("homology", "figure", "stated", _spelt(x.integral), against)
    relative = "closed" if x.closed else _spelt(x.relative)
    yield Finding("relative-homology", "figure", "stated", relative, "" if x.closed else against)
    yield _fields(x)
    yield _duality(x)


def _spelt(groups: list[list[int]]) -> dict[str, str]:
    return {f"H_{k}": abelian_name(group) for k, group in enumerate(groups)}


def _fields(x: Subject) -> Finding:
    """b_k over p elements: the free rank, and torsion divisible by p here and one dimension below."""
    name, kind = "universal-coefficients", "identity"
    betti, source = find_betti(x)
    if not betti:
        return Finding(name, kind, "not checked", against=source)
    if x.torn:
        why = "labels name simplices with several links; the integers see what is glued"
        return Finding(name, kind, "not checked", against=why)
    wrong = []
    for p, found in betti.items():
        torsion = [sum(e > 0 and e % p == 0 for e in group) for group in x.integral]
        mine = [
            group.count(0) + torsion[k] + (torsion[k - 1] if k else 0) for k, group in enumerate(x.integral)
        ]
        if mine != found:
            wrong.append(f"Z_{p}: {mine} from the integers, {found} over the field")
    if wrong:
        return Finding(name, kind, "violated", wrong, source)
    fields = ", ".join(f"Z_{p}" for p in betti)
    return Finding(name, kind, "holds", f"Betti numbers over {fields} follow from the integers", source)


def _duality(x: Subject) -> Finding:
    """Poincaré and Lefschetz: H_k(M) against H_(D-k)(M, boundary), torsion one dimension lower."""
    name, kind = "integral-duality", "identity"
    if x.link_trouble:
        return Finding(name, kind, "not checked", against=x.link_trouble)
    if not all(x.orientable):
        return Finding(name, kind, "not checked", against="not orientable: duality has twisted coefficients")
    other = x.integral if x.closed else x.relative
    bad = []
    for k in range(x.d + 1):
        mine, theirs = x.integral[k], other[x.d - k]
        low = other[x.d - k - 1] if k < x.d else []
        if mine.count(0) != theirs.count(0) or [e for e in mine if e] != [e for e in low if e]:
            bad.append(f"H_{k}")
    against = "free parts of H_k and H_(D-k), torsion of H_k and H_(D-k-1)"
    against += "" if x.closed else ", the latter relative to the boundary"
    if bad:
        return Finding(name, kind, "violated", f"not in {', '.join(bad)}", against)
    return Finding(name, kind, "holds", "Poincaré duality" if x.closed else "Lefschetz duality", against)


def check_groups(x: Subject) -> Iterator[Finding]:
    """The fundamental group of each component from the foam, and homomorphisms to small groups."""
    names = ("fundamental-group", "homomorphisms")
    if (reason := x.over(GROUP_LIMIT)) is not None:
        for name in names:
            yield Finding(name, "figure", "not checked", against=reason)
        yield Finding("group-homology", "identity", "not checked", against=reason)
        return
    against = "from the foam: edges off a spanning tree, internal faces; base point the lowest vertex"
    if x.link_trouble:
        against += f"; {x.link_trouble}: it is the group of the space without its singular points"
    shown = []
    for group in x.groups:
        text = str(group)
        if len(text) > LONGEST:
            letters = sum(map(len, group.relators))
            text = f"{group.generators} generators, {len(group.relators)} relators of {letters} letters"
        shown.append(text)
    yield Finding("fundamental-group", "figure", "stated", named(shown), against)
    counts: list[dict[str, object]] = []
    for group in x.groups[:10]:
        row: dict[str, object] = {}
        for target in TARGETS:
            try:
                row[target] = count_homomorphisms(group, target, steps=STEPS)
            except LimitError:
                row[target] = "not counted"
        counts.append(row)
    figure = counts[0] if len(counts) == 1 else counts
    more = f"; the first 10 of {len(x.groups)} components" if len(x.groups) > 10 else ""
    yield Finding("homomorphisms", "figure", "stated", figure, f"to groups of permutations{more}")
    yield _abelian(x)


def _abelian(x: Subject) -> Finding:
    name, kind = "group-homology", "identity"
    mine = [group.abelianisation() for group in x.groups]
    free, torsion = sum(g.count(0) for g in mine), [e for g in mine for e in g if e]
    figure = abelian_name([0] * free + torsion)
    if reason := x.link_trouble or x.no_integers:
        return Finding(name, kind, "not checked", figure, reason)
    other = x.integral[1]
    together = abelian_group(free + len(torsion), [{y: e} for y, e in enumerate(torsion)])
    against = "the group made abelian against H_1 of the triangulation"
    if together == other:
        return Finding(name, kind, "holds", abelian_name(other), against)
    figures = {"group": abelian_name(together), "H_1": abelian_name(other)}
    return Finding(name, kind, "violated", figures, against)


def has_form(x: Subject) -> bool:
    """Whether there is an intersection form: closed and orientable, of dimension 4."""
    return x.d == 4 and x.closed and all(x.orientable)


def check_form(x: Subject) -> Iterator[Finding]:
    """The intersection form, and that it is unimodular."""
    names = (("intersection-form", "figure"), ("unimodular", "identity"))
    reason = x.no_integers
    if reason is None:
        try:
            form = intersection_form(x.t, threads=x.threads)
        except LimitError as error:
            reason = error.what
    if reason is not None:
        for name, kind in names:
            yield Finding(name, kind, "not checked", against=reason)
        return
    against = "cup products on H^2 modulo torsion"
    yield Finding("intersection-form", "figure", "stated", form.to_dict(), against)
    if x.link_trouble:
        yield Finding("unimodular", "identity", "not checked", form.determinant, x.link_trouble)
        return
    against = "determinant +1 or -1, rank b_2; an even form has a signature divisible by 8"
    good = abs(form.determinant) == 1 and form.rank == x.integral[2].count(0)
    good = good and (form.parity == "odd" or form.signature % 8 == 0)
    figure = f"determinant {form.determinant}, rank {form.rank}, signature {form.signature}"
    yield Finding("unimodular", "identity", "holds" if good else "violated", figure, against)
