"""Changes of a triangulation: moves, subdivisions, gluing, cutting, parts.

Each is a function from a triangulation to a `Changed`: the new triangulation, where its simplices come from
(`refined_from`), the labels that are new, notes, and for bistellar moves their record.

    from dualize import change

    result = change.move(t, "2-4", [0, 3, 5, 8])     # at a named place
    result = change.walk(t, 1000, seed=1)            # at random
    change.undo(result.triangulation, result.moves)  # restores t
    change.derived(t).refined_from
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from .common import Changed
    from .contraction import contract, contract_all, contractible
    from .cover import double_cover
    from .cutting import cut
    from .gluing import glue, glue_facets, union
    from .moves import move, places
    from .parts import around, component, keep, relabel, remove, reverse
    from .record import Moves
    from .shell import attach, detach
    from .simplification import simplify
    from .subdivide import derived, refine, stellar
    from .walks import kinds_of_moves, replay, undo, walk, walk_states

# name -> module, imported on first use.  A function must not bear the name of its module: importing the
# module would put it in the function's place.
_HOMES = {
    "Changed": "common",
    "Moves": "record",
    "around": "parts",
    "attach": "shell",
    "component": "parts",
    "contract": "contraction",
    "contract_all": "contraction",
    "contractible": "contraction",
    "cut": "cutting",
    "derived": "subdivide",
    "detach": "shell",
    "double_cover": "cover",
    "glue": "gluing",
    "glue_facets": "gluing",
    "keep": "parts",
    "kinds_of_moves": "walks",
    "move": "moves",
    "places": "moves",
    "refine": "subdivide",
    "relabel": "parts",
    "remove": "parts",
    "replay": "walks",
    "reverse": "parts",
    "simplify": "simplification",
    "stellar": "subdivide",
    "undo": "walks",
    "union": "gluing",
    "walk": "walks",
    "walk_states": "walks",
}

__all__ = [
    "Changed",
    "Moves",
    "around",
    "attach",
    "component",
    "contract",
    "contract_all",
    "contractible",
    "cut",
    "derived",
    "detach",
    "double_cover",
    "glue",
    "glue_facets",
    "keep",
    "kinds_of_moves",
    "move",
    "places",
    "refine",
    "relabel",
    "remove",
    "replay",
    "reverse",
    "simplify",
    "stellar",
    "undo",
    "union",
    "walk",
    "walk_states",
]


def __getattr__(name: str) -> Any:
    if name in _HOMES:
        value = getattr(import_module(f".{_HOMES[name]}", __name__), name)
        globals()[name] = value
        return value
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted([*globals(), *_HOMES])
