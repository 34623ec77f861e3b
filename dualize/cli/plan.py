"""``dualize plan``: what is to be summed over a foam, and what it costs."""

from __future__ import annotations

from typing import Any

import click

from ..build import build
from ..errors import DualizeError, InputError
from ..skeleton import Skeleton
from .common import (
    force_option,
    from_option,
    json_option,
    note,
    open_input,
    quiet_option,
    threads_option,
    verb,
    write_output,
)

__all__ = ["command"]


@verb(
    "plan",
    examples=(
        "dualize plan meshes/sphere_4d.txt --max-twice-spin 2",
        "dualize plan meshes/harbour_inside.txt --boundary all=2 --max-twice-spin 2",
    ),
)
@click.argument("path", metavar="FOAM")
@from_option
@click.option(
    "--boundary",
    metavar="FILE",
    help="Boundary data as JSON, - for standard input; or all=N, twice-spin N at every link.",
)
@click.option("--template", is_flag=True, help="Print boundary data to be filled in, and nothing else.")
@click.option(
    "--max-twice-spin", "most", type=click.IntRange(min=0), metavar="N", help="Largest twice-spin of the sum."
)
@click.option("--integer-spins", is_flag=True, help="Integer spins only.")
@click.option("--step", type=click.IntRange(min=1), metavar="N", help="Twice-spins that are multiples of N.")
@click.option("--exact-bounds", "exact", is_flag=True, help="Bounds by integer programming: slower.")
@click.option(
    "--rays",
    type=click.IntRange(min=1),
    default=100,
    show_default=True,
    metavar="N",
    help="At most so many growth rays.",
)
@click.option(
    "--weight-power",
    "power",
    type=float,
    default=1.0,
    show_default=True,
    metavar="P",
    help="Face weight (2j+1)^P in the estimate of the divergence.",
)
@click.option(
    "--truncation",
    type=click.IntRange(min=0),
    metavar="N",
    help="4D Lorentzian models: count half-edge coefficients with l - j up to N.",
)
@click.option(
    "--slot",
    type=click.IntRange(min=0),
    default=0,
    show_default=True,
    metavar="I",
    help="The slot of every vertex whose integration is redundant for a non-compact group.",
)
@click.option(
    "--memory",
    type=click.FloatRange(min=0, min_open=True),
    metavar="MIB",
    help="Slice contractions so that no tensor is larger.",
)
@click.option(
    "--vertex-table",
    "table",
    metavar="FILE",
    help="How your table of vertex amplitudes is indexed, as JSON: print what fits it to every vertex.",
)
@click.option("-o", "--output", metavar="FILE", help="Also write the foam with the arrays of the plan.")
@force_option
@json_option
@threads_option
@quiet_option
def command(
    path: str,
    from_kind: str | None,
    boundary: str | None,
    template: bool,
    most: int | None,
    integer_spins: bool,
    step: int | None,
    exact: bool,
    rays: int,
    power: float,
    truncation: int | None,
    slot: int,
    memory: float | None,
    table: str | None,
    output: str | None,
    force: bool,
    as_json: bool,
    threads: int | None,
) -> int:
    """Tell what is to be summed over FOAM, a skeleton or a triangulation, and what it costs.

    Parity sectors, bounds of the spins, unbounded spins, bubbles and divergences, numbers of labellings,
    vertex amplitudes, contraction, gauge. Without boundary data only what does not depend on them. The status
    is 1 if the boundary data admit no labelling.
    """
    if integer_spins and step is not None and step % 2:
        raise InputError("--integer-spins and an odd --step contradict", hint=f"try --step {2 * step}")
    foam = open_input(path, from_kind=from_kind, threads=threads).content
    if not isinstance(foam, Skeleton):
        foam = build(foam, threads=threads)
    if template:
        _print_json(_template(foam))
        return 0
    if table is not None:
        from ..spins import adapters, vertex_table

        declared = _told(table, lambda: vertex_table(_read(table), dimension=foam.dimension))
        fitted = [a.to_dict() for a in adapters(foam, declared)]
        _print_json(
            {"format": "foam-vertex-adapters", "version": 1, "table": declared.to_dict(), "vertices": fitted}
        )
        return 0
    from ..plan import plan
    from ..spins import boundary_data

    data = None
    if boundary is not None:
        document = _boundary(boundary)
        data = _told(boundary, lambda: boundary_data(foam, document))
    found = plan(
        foam,
        data,
        most=most,
        step=step or (2 if integer_spins else 1),
        exact=exact,
        rays=rays,
        power=power,
        truncation=truncation,
        slot=slot,
        memory=None if memory is None else int(memory * 2**20),
    )
    if as_json:
        _print_json(found.to_dict())
    else:
        click.echo(str(found))
    if output is not None:
        write_output(found.kept_in(foam), output, force=force)
        note(f"{path} -> {output}: the foam with the groups spins, bubbles and gauge")
    return 1 if found.bounds is not None and found.bounds.contradiction is not None else 0


def _print_json(document: Any) -> None:
    import json

    click.echo(json.dumps(document, indent=1, ensure_ascii=False))


def _template(foam: Skeleton) -> dict[str, Any]:
    from ..spins import boundary_template

    if not foam.counts["links"]:
        raise InputError("the foam is closed: it has no boundary", hint="plan it without boundary data")
    return boundary_template(foam)


def _boundary(text: str) -> dict[str, Any]:
    """Boundary data of the option: a file, or ``all=N``."""
    if text.startswith("all="):
        digits = text[4:]
        if not digits.isdecimal():
            raise InputError(f"--boundary all=N has a twice-spin, such as all=1, not {text!r}")
        return {"all": int(digits)}
    return _read(text)


def _read(path: str) -> dict[str, Any]:
    """A JSON object from a file."""
    import json
    import sys

    try:
        if path == "-":
            raw = sys.stdin.buffer.read()
        else:
            with open(path, "rb") as stream:
                raw = stream.read()
        document = json.loads(raw)
    except OSError as error:
        raise InputError(f"it cannot be read: {error.strerror or error}", path) from None
    except (ValueError, RecursionError) as error:
        raise InputError(f"this is no JSON: {error}", path) from None
    if not isinstance(document, dict):
        raise InputError("this is no JSON object", path)
    return document


def _told(path: str, work: Any) -> Any:
    """The result of `work`, whose errors name the file."""
    try:
        return work()
    except DualizeError as error:
        raise error.at(path) from None
