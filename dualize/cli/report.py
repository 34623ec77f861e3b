"""``dualize report``: everything about a foam as one page."""

from __future__ import annotations

import click

from ..progress import progress
from .common import force_option, input_options, note, open_foam, quiet_option, threads_option, verb

__all__ = ["command"]


@verb(
    "report",
    examples=(
        "dualize report meshes/slab_4d.txt -o slab.html",
        "dualize report meshes/figure_eight_knot.json -o knot.html --no-audit",
    ),
)
@input_options
@click.option("--no-audit", is_flag=True, help="Leave the audit out; the page says so.")
@click.option("-o", "--output", required=True, metavar="FILE", help="Where to write; - is standard output.")
@force_option
@threads_option
@quiet_option
def command(
    path: str,
    from_kind: str | None,
    dataset: str | None,
    no_audit: bool,
    output: str,
    force: bool,
    threads: int | None,
) -> None:
    """Write a page about INPUT, a skeleton or a triangulation: summary, audit, pictures, and every cell.

    The page is one HTML file that opens from disk in any browser and asks the network for nothing. Cells are
    found by number or by the labels of their corners; without scripts the page shows all but these. Where the
    skeleton keeps the plan of a sum (dualize plan -o), the page shows it. Beyond 100,000 vertices it holds a
    sample of the cells, and says so.
    """
    from .. import report
    from ..audit import audit

    given, foam = open_foam(path, from_kind=from_kind, dataset=dataset, threads=threads)
    found = None
    if not no_audit:
        with progress("auditing"):
            found = audit(foam, threads=threads)
    with progress(f"writing {output}"):
        report.write(foam, output, force=force, audit=found, title=given.name)
    held = min(foam.counts["vertices"], report.LIMIT)
    if held < foam.counts["vertices"]:
        note(f"note: the page holds a sample of the cells: the first {held} vertices and what touches them")
    if found is not None and not found.ok:
        note("note: the audit finds violated identities")
