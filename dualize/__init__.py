"""From a triangulation to its oriented dual two-complex: foam skeletons that amplitude codes can read.

    import dualize

    t = dualize.read("region.txt")      # Triangulation: a gluing table
    s = dualize.build(t)                # Skeleton: the oriented dual two-complex with its boundary graph
    report = dualize.audit(s)           # Report: can this be trusted, and what space is it?
    s.write("region.h5")
    s = dualize.load("region.h5")

A triangulation is a gluing table, a foam skeleton is a handful of flat arrays, and everything else is a pure
function from one to the other or from the skeleton to an answer.  ``dualize spec`` prints the conventions.
"""

from __future__ import annotations

import sys
from importlib import import_module
from types import ModuleType
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from . import change, draw, make, report, spins
    from .audit import Finding, Report, audit
    from .build import build
    from .errors import DualizeError, InputError, LimitError, SkeletonError, TriangulationError
    from .export import export, read_export
    from .formats import load, read
    from .match import Match, match
    from .plan import plan
    from .skeleton import Skeleton
    from .triangulation import Coordinates, Triangulation

__version__ = "0.1.0"

# name -> module; imported on first use, so that `import dualize` costs next to nothing
_HOMES = {
    "Coordinates": "triangulation",
    "DualizeError": "errors",
    "Finding": "audit",
    "InputError": "errors",
    "LimitError": "errors",
    "Match": "match",
    "Report": "audit",
    "Skeleton": "skeleton",
    "SkeletonError": "errors",
    "Triangulation": "triangulation",
    "TriangulationError": "errors",
    "audit": "audit",
    "build": "build",
    "export": "export",
    "load": "formats",
    "match": "match",
    "plan": "plan",
    "read": "formats",
    "read_export": "export",
}

# rooms that are used under their own names, imported on first use
_ROOMS = ("change", "draw", "make", "report", "spins")

__all__ = [
    "Coordinates",
    "DualizeError",
    "Finding",
    "InputError",
    "LimitError",
    "Match",
    "Report",
    "Skeleton",
    "SkeletonError",
    "Triangulation",
    "TriangulationError",
    "__version__",
    "audit",
    "build",
    "change",
    "draw",
    "export",
    "load",
    "make",
    "match",
    "plan",
    "read",
    "read_export",
    "report",
    "spins",
]


def __getattr__(name: str) -> Any:
    if name in _ROOMS:
        return import_module(f".{name}", __name__)
    if name in _HOMES:
        value = getattr(import_module(f".{_HOMES[name]}", __name__), name)
        globals()[name] = value
        return value
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted([*globals(), *_HOMES, *_ROOMS])


class _Package(ModuleType):
    """This package: a function of the name of its module stays the function when that is imported."""

    def __setattr__(self, name: str, value: object) -> None:
        if not (isinstance(value, ModuleType) and _HOMES.get(name) == name):
            super().__setattr__(name, value)


sys.modules[__name__].__class__ = _Package
