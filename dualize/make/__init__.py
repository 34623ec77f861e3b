"""Recipes: triangulations made from a few numbers, ready for `dualize.build`.

    from dualize import make

    t = make.lattice(3, 3, 3, 3, periodic="xyzt")     # T4 as a labelled complex, with coordinates
    t = make.slab(make.published("RP3"), layers=2)    # RP3 x [0, 1], both ends in the labels of RP3
    t = make.shared_pair(4)                           # the melon, as a gluing table
    t = make.make("product", "S3", "circle(4)")       # by name, as `dualize make` does

A recipe returns a `dualize.Triangulation`: labelled where it is a simplicial complex, a gluing table where it
is not, with coordinates where there are any.  `make.RECIPES` lists every recipe with its parameters.
"""

from __future__ import annotations

from importlib import import_module
from typing import Any

# name -> module, imported on first use
_HOMES = {
    "RECIPES": "recipes",
    "Published": "catalogue",
    "Recipe": "recipes",
    "ball_bundle": "families",
    "cell_24": "polytopes",
    "cell_600": "polytopes",
    "circle": "parts",
    "coloured_graph": "random",
    "cone": "joins",
    "connected_sum": "joins",
    "cross_polytope": "polytopes",
    "cyclic_polytope": "polytopes",
    "delaunay": "random",
    "dipole_slab": "foams",
    "evaluate": "recipes",
    "interval": "parts",
    "join": "joins",
    "kummer_variety": "families",
    "lattice": "lattices",
    "lens_space": "families",
    "make": "recipes",
    "mapping_torus": "products",
    "melonic_graph": "random",
    "move_side": "foams",
    "points": "parts",
    "product": "products",
    "projective_plane": "families",
    "published": "catalogue",
    "random_delaunay": "random",
    "random_gluing": "random",
    "recipe": "recipes",
    "ridge_ring": "foams",
    "shared_pair": "foams",
    "simplex": "foams",
    "simplex_boundary": "polytopes",
    "simplex_pair": "foams",
    "slab": "products",
    "spaces": "catalogue",
    "sphere_bundle": "families",
    "stacked_ball": "random",
    "stacked_sphere": "random",
    "suspension": "joins",
    "torus": "families",
}

__all__ = sorted(_HOMES)


def __getattr__(name: str) -> Any:
    if name in _HOMES:
        value = getattr(import_module(f".{_HOMES[name]}", __name__), name)
        globals()[name] = value
        return value
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted([*globals(), *_HOMES])
