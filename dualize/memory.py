"""How much memory a build takes, and how much there is: told before the work, not after a crash."""

from __future__ import annotations

from pathlib import Path

from .errors import LimitError

__all__ = ["available_memory", "build_memory", "check_memory"]


def available_memory() -> int | None:
    """Bytes that this process may still take, or None where the system does not say (anything but Linux).

    The smaller of what the kernel calls available and what the control group leaves.
    """
    try:
        lines = Path("/proc/meminfo").read_text().splitlines()
    except OSError:
        return None
    fields = dict(line.split(":", 1) for line in lines)
    free = int(fields["MemAvailable"].split()[0]) * 1024
    group = Path("/sys/fs/cgroup")
    try:
        limit, used = (group / "memory.max").read_text().strip(), (group / "memory.current").read_text()
        if limit.isdecimal():
            free = min(free, int(limit) - int(used))
    except (OSError, ValueError):
        pass
    return max(0, free)


def build_memory(simplices: int, boundary: int, dimension: int, labels: bool) -> int:
    """About how many bytes building takes above its input, result and work space together.

    Parameters
    ----------
    simplices, boundary : int
        Numbers of top simplices and of boundary facets.
    dimension : int
    labels : bool
        Whether the triangulation has labels.

    Notes
    -----
    Everything but the number of internal faces follows from the arguments; those are taken as rings of
    three wedges, the shortest of a simplicial complex.
    """
    d, k = dimension, dimension + 1
    w = d * k // 2
    edges = (k * simplices + boundary) // 2
    links = d * boundary // 2
    faces = links + max(0, simplices * w - links) // 3
    visits = simplices * w
    result = (
        simplices * (5 + 5 * k + 5 * w)
        + edges * (17 + 7 * d)
        + faces * 18
        + visits * 11
        + links * (6 + 13 + (8 * (d - 1) if labels else 0))
        + boundary * (14 + 5 * d + (8 * d if labels else 0))
    )
    # beside the result: first the rows and the recorded passages, with no face in place yet; later the keys
    # of the ridges
    placed = simplices * 5 * w + visits * 11 + faces * 18
    early = simplices * 72 + visits * 11 + faces * 5 - placed
    late = faces * 16 if labels else 0
    return result + max(early, late, simplices * 16)


def check_memory(simplices: int, boundary: int, dimension: int, labels: bool) -> None:
    """Refuse a build for which there is not enough memory.

    Raises
    ------
    LimitError
        With the figures.
    """
    need, free = build_memory(simplices, boundary, dimension, labels), available_memory()
    if free is not None and need > free:
        raise LimitError(
            f"building {simplices:,} simplices takes about {need / 2**30:.1f} GiB, "
            f"and {free / 2**30:.1f} GiB are free",
            hint="take a larger machine, or try all the same: dualize build --any-size, any_size=True",
        )
