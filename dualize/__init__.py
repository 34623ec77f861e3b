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

from importlib import import_module
from typing import TYPE_CHECKING, Any

# A function that bears its module's name is imported at once: were it left to `__getattr__`, importing the
# module first (`import dualize.build`) would bind the name to the module.
from .audit import audit
from .build import build
from .export import export
from .match import match

if TYPE_CHECKING:
    from . import change, make, spins
    from .audit import Finding, Report
    from .errors import DualizeError, InputError, LimitError, SkeletonError, TriangulationError
    from .export import read_export
    from .formats import load, read
    from .match import Match
    from .skeleton import Skeleton
    from .triangulation import Coordinates, Triangulation

__version__ = "0.1.0"

# name -> module; imported on first use, so that `import dualize` costs little more than numpy
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
    "load": "formats",
    "read": "formats",
    "read_export": "export",
}

# rooms that are used under their own names, imported on first use
_ROOMS = ("change", "make", "spins")

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
    "export",
    "load",
    "make",
    "match",
    "read",
    "read_export",
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
