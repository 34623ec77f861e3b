"""The audit: can this skeleton be trusted, and what kind of space is it dual to?

Three kinds of findings, each with the figure found and what it was compared with:

identity   must hold in any correct file: *holds*, *violated*, or *not checked* with the reason
property   of the space: *yes*, *no*, or *undecided*
figure     *stated*, for the reader

`dualize.findings` holds the checks.  Every figure is compared with a source that shares as little as possible
with the way in which the dual was made: own counts of label sets, gudhi, the boundary matched anew.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from difflib import get_close_matches
from textwrap import wrap
from typing import Any

from .errors import InputError
from .skeleton import Skeleton
from .triangulation import Triangulation

__all__ = ["Finding", "Report", "audit", "checked_names"]

KINDS = {"identity": "Identities", "property": "Properties", "figure": "Figures"}
WIDTH = 100
SHOWN = 10  # offenders that a finding names


@dataclass(frozen=True)
class Finding:
    """One line of the audit.

    Parameters
    ----------
    check : str
        Name of the check, as ``--require`` takes it.
    kind : str
        ``identity``, ``property`` or ``figure``.
    verdict : str
        ``holds``, ``violated``, ``not checked``; ``yes``, ``no``, ``undecided``; ``stated``.
    figure : object
        What was found: a number, a text, lists or mappings of these.
    against : str
        What it was compared with, or why it was not.
    where : str
        The offenders, the worst ones first, at most ten by name.
    offenders : tuple of str
        All of them, where a check lists them; for the JSON report.
    """

    check: str
    kind: str
    verdict: str
    figure: Any = ""
    against: str = ""
    where: str = ""
    offenders: tuple[str, ...] = ()

    @property
    def good(self) -> bool:
        """Whether the identity holds or the property is there."""
        return self.verdict in ("holds", "yes")

    def to_dict(self) -> dict[str, Any]:
        """The finding as a mapping of plain values."""
        keys = ("check", "kind", "verdict", "figure", "against", "where")
        out = {key: getattr(self, key) for key in keys}
        return {**out, "offenders": list(self.offenders)} if self.offenders else out


@dataclass(frozen=True)
class Report:
    """All findings of an audit, in order; ``str`` is the table, ``report["euler"]`` one finding.

    Parameters
    ----------
    title : str
        What was audited.
    findings : tuple of Finding
    seconds : mapping of str to float
        Time taken by groups of checks; no part of `to_dict`.
    """

    title: str
    findings: tuple[Finding, ...]
    seconds: Mapping[str, float] = field(default_factory=dict, compare=False)

    @property
    def ok(self) -> bool:
        """Whether no identity is violated."""
        return not any(f.verdict == "violated" for f in self.findings)

    def __getitem__(self, check: str) -> Finding:
        for finding in self.findings:
            if finding.check == check:
                return finding
        raise KeyError(check)

    def __iter__(self) -> Iterator[Finding]:
        return iter(self.findings)

    def _repr_html_(self) -> str:
        """A small table, for notebooks."""
        from .draw.notebook import report_table

        return report_table(self)

    def fails(self, require: Iterable[str] = ()) -> list[Finding]:
        """The violated identities, and those findings named in `require` that do not hold.

        *Undecided* and *not checked* count as failures of what is required.

        Raises
        ------
        InputError
            If a name is not known.
        """
        names = checked_names(require)
        absent = sorted(names - {f.check for f in self.findings})
        return [
            Finding(name, "property", "undecided", against="it does not apply here") for name in absent
        ] + [f for f in self.findings if f.verdict == "violated" or (f.check in names and not f.good)]

    def to_dict(self) -> dict[str, Any]:
        """The report as plain values, as ``--json`` prints it."""
        return {"title": self.title, "ok": self.ok, "findings": [f.to_dict() for f in self.findings]}

    def __str__(self) -> str:
        return "\n".join(self.lines())

    def lines(self, style: Any = None) -> list[str]:
        """The table as lines; `style`, a function of a verdict and its padded text, may colour it."""
        verdicts = max((len(f.verdict) for f in self.findings), default=0)
        names = max((len(f.check) for f in self.findings), default=0)
        indent = " " * (verdicts + names + 6)
        out = [self.title]
        for kind, heading in KINDS.items():
            rows = [f for f in self.findings if f.kind == kind]
            if not rows:
                continue
            out += ["", heading]
            for f in rows:
                verdict = f"{f.verdict:<{verdicts}}"
                text = show(f.figure)
                body = wrap(text, WIDTH - len(indent)) or [""]
                lead = style(f.verdict, verdict) if style else verdict
                out.append(f"  {lead}  {f.check:<{names}}  {body[0]}".rstrip())
                notes = [f"({f.against})"] * bool(f.against) + [f"at {f.where}"] * bool(f.where)
                for line in body[1:] + [x for note in notes for x in wrap(note, WIDTH - len(indent))]:
                    out.append(indent + line)
        return out


def show(figure: Any) -> str:
    """A figure as text: ``9, 36, 84``, or ``3: 21, 4: 27``, or ``Z_2: (1, 0, 1)``."""

    def inner(value: Any) -> str:
        return (
            f"({show(value)})"
            if isinstance(value, Mapping | list | tuple) and len(value) != 1
            else show(value)
        )

    if isinstance(figure, Mapping):
        return ", ".join(f"{key}: {inner(value)}" for key, value in figure.items()) or "none"
    if isinstance(figure, list | tuple):
        return ", ".join(map(inner, figure)) or "none"
    return str(figure)


def checked_names(require: Iterable[str]) -> set[str]:
    """The names in `require`, all of them known.

    Raises
    ------
    InputError
        Naming the first unknown one, with the known names and near misses.
    """
    from .findings import IDENTITIES, PROPERTIES

    known = [*PROPERTIES, *IDENTITIES]
    names = list(require)
    for name in names:
        if name not in known:
            near = get_close_matches(name, known, 2, 0.5)
            raise InputError(
                f"the audit has no property or identity {name!r}"
                + (f"; is it {' or '.join(near)}?" if near else ""),
                hint=f"properties: {', '.join(PROPERTIES)}; identities: {', '.join(IDENTITIES)}",
            )
    return set(names)


def audit(
    content: Triangulation | Skeleton,
    *,
    triangulation: Triangulation | None = None,
    full: bool = False,
    require: Iterable[str] = (),
    keep_singular: bool = False,
    threads: int | None = None,
) -> Report:
    """Check a triangulation or a skeleton in every way this package knows.

    Parameters
    ----------
    content : Triangulation or Skeleton
        A triangulation is built first.  From a skeleton the triangulation is read back.
    triangulation : Triangulation, optional
        The triangulation from which a skeleton was made: compared with the one read back.
    full : bool
        Lift the size limits of the costly checks.
    require : iterable of str
        Checks that the caller will ask about with `Report.fails`: unknown names are refused at once.
    keep_singular : bool
        Audit also triangulations that `dualize.build` builds only on request.
    threads : int, optional

    Returns
    -------
    Report

    Raises
    ------
    TriangulationError
        If a triangulation has no dual.
    InputError
        If `require` names a check that does not exist.

    Notes
    -----
    A damaged skeleton raises nothing: its damage is a finding.

    Examples
    --------
    >>> from dualize import Triangulation
    >>> report = audit(Triangulation.from_facets([[0, 1, 2, 3]]))
    >>> report.ok, report["f-vector"].figure, report["manifold"].verdict
    (True, [4, 6, 4, 1], 'yes')
    """
    from .build import build
    from .findings import Subject, examine

    checked_names(require)
    if isinstance(content, Triangulation):
        skeleton = build(content, keep_singular=keep_singular, threads=threads)
        triangulation = content
    else:
        skeleton = content
    subject = Subject(skeleton, triangulation, full, threads)
    findings = tuple(examine(subject))
    return Report(subject.title, findings, dict(subject.seconds))
