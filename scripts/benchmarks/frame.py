"""What a timing case is, and how it is measured: seconds in turn with its reference, memory alone."""

from __future__ import annotations

import statistics
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import NamedTuple

import numpy as np

__all__ = ["CASES", "Case", "Work", "case", "measure", "peak", "result_bytes"]


class Work(NamedTuple):
    """The two sides of a case, prepared.

    `share` scales the ratio, where the two sides do different amounts of work: the reference's amount over
    ours (bytes of result, or simplices).  `memory` is the most our side may take above what it began with,
    in bytes.  A side that returns a float has timed itself, in seconds.
    """

    ours: Callable[[], object]
    reference: Callable[[], object]
    share: float = 1.0
    memory: float | None = None


class Case(NamedTuple):
    """One row of the table."""

    name: str
    reference: str
    prepare: Callable[[Path], Work]
    ratio: float | None = None  # ours / reference is at most this
    stretch: float | None = None  # where we want to be
    seconds: float | None = None  # ours takes at most this
    repeats: int = 5
    quick: bool = True  # part of --quick


CASES: list[Case] = []


def case(name: str, reference: str, **limits: float) -> Callable:
    """Register the function that prepares a case."""

    def register(prepare: Callable[[Path], Work]) -> Callable[[Path], Work]:
        CASES.append(Case(name, reference, prepare, **limits))  # type: ignore[arg-type]
        return prepare

    return register


def measure(chosen: Case, repeats: int) -> dict[str, object]:
    """Medians of runs in turn; the first of each side compiles, loads and touches, and is left out."""
    with tempfile.TemporaryDirectory() as folder:
        work = chosen.prepare(Path(folder))
        times: tuple[list[float], list[float]] = ([], [])
        for turn in range(repeats + 1):
            for side, taken in zip((work.ours, work.reference), times, strict=True):
                begin = time.perf_counter()
                own = side()
                if turn:
                    taken.append(own if isinstance(own, float) else time.perf_counter() - begin)
    ours, reference = map(statistics.median, times)
    return {"ours": ours, "reference": reference, "ratio": ours / reference * work.share}


def peak(chosen: Case, side: str) -> dict[str, object]:
    """Peak memory of one side above what there was when its data lay ready; for a fresh process."""
    with tempfile.TemporaryDirectory() as folder:
        work = chosen.prepare(Path(folder))
        begin = _status("VmRSS")
        Path("/proc/self/clear_refs").write_text("5")  # forget the peak of the preparation
        kept = getattr(work, side)()
        top = _status("VmHWM")
        del kept
    return {f"{side}_peak": top - begin, "memory_limit": work.memory}


def _status(field: str) -> int:
    for line in Path("/proc/self/status").read_text().splitlines():
        if line.startswith(field + ":"):
            return int(line.split()[1]) * 1024
    raise LookupError(field)


def result_bytes(skeleton: object) -> int:
    """Bytes of all tables of a skeleton."""
    return sum(np.asarray(table).nbytes for table in skeleton.arrays.values())  # type: ignore[attr-defined]
