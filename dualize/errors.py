"""What can go wrong, as one small tree of exceptions.

    DualizeError            catch this one to catch them all
    ├── InputError          a file or an argument is not what it should be
    ├── TriangulationError  the complex is readable, but it has no dual two-complex
    ├── SkeletonError       a foam skeleton is damaged: its tables disagree
    └── LimitError          the work is larger than a stated limit

Each error keeps three short texts: *what* is wrong, *where* (file, line, simplex, labels), and a *hint* at
the way out.  The command line prints them as ``error: what (where)`` and ``hint: ...`` and ends with
status 2.
"""

from __future__ import annotations

__all__ = ["DualizeError", "InputError", "LimitError", "SkeletonError", "TriangulationError"]


class DualizeError(Exception):
    """Base of all errors of this package.

    Parameters
    ----------
    what : str
        One clear sentence, without a full stop.
    where : str, optional
        File, line, simplex numbers or labels.
    hint : str, optional
        How to mend it.
    """

    def __init__(self, what: str, where: str | None = None, hint: str | None = None) -> None:
        super().__init__(what, where, hint)
        self.what = what
        self.where = where
        self.hint = hint

    def __str__(self) -> str:
        return f"{self.what} ({self.where})" if self.where else self.what

    def at(self, place: str) -> DualizeError:
        """The same error with `place` (say, a file name) put before where it happened."""
        return type(self)(self.what, f"{place}, {self.where}" if self.where else place, self.hint)


class InputError(DualizeError):
    """A file or an argument is not what it should be."""


class TriangulationError(DualizeError):
    """The complex can be read, but it has no dual two-complex (or none that was asked for)."""


class SkeletonError(DualizeError):
    """A foam skeleton is damaged: shapes, ranges, or tables that contradict each other."""


class LimitError(DualizeError):
    """The work is larger than a stated limit; the message gives the figures."""
