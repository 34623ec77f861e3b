"""Every recipe by name, with its parameters: what ``dualize make`` offers, and what an expression may say.

An expression names a complex that a recipe takes: a space of the catalogue (``CP2``, ``L(3,1)``), or a recipe
with its arguments (``circle(5)``, ``slab(S3, layers=2)``, ``lattice(3, 3, 3, periodic=xyz)``).
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from difflib import get_close_matches
from importlib import import_module
from operator import index
from typing import Any, NamedTuple

from ..errors import InputError
from ..triangulation import Triangulation
from .lattices import VARIANTS
from .parts import Complex

__all__ = ["RECIPES", "Parameter", "Recipe", "evaluate", "make", "recipe"]


class Parameter(NamedTuple):
    """One parameter of a recipe.

    Attributes
    ----------
    name : str
        As the function calls it.
    kind : str
        ``"integer"``, ``"integers"`` (several), ``"complex"`` (an expression or, on the command line, a
        file), ``"word"``, ``"choice"``, ``"flag"``, ``"switch"`` (yes or no), ``"cycles"`` (a permutation
        such as ``(0 1 2)(3 4)``) or ``"points"`` (an array of numbers or, on the command line, a file).
    meaning : str
    default : object
        ``...`` where it must be given; such parameters are told apart by their order.
    low, high : int or None
        Allowed range of an integer.
    choices : tuple of str
    option : bool
        Whether it is given by its name only.
    """

    name: str
    kind: str
    meaning: str
    default: Any = ...
    low: int | None = None
    high: int | None = None
    choices: tuple[str, ...] = ()
    option: bool = False

    @property
    def shown(self) -> str:
        """Its name and range in a few signs, as `Recipe.usage` shows it."""
        if self.kind == "flag":
            return f"[--{self.name}]"
        text = self.name.upper() + ("..." if self.kind == "integers" else "")
        if self.option:
            return f"[--{self.name} {'|'.join(self.choices) or text}]"
        return text if self.default is ... else f"[{text}]"

    @property
    def range(self) -> str:
        """The allowed range in words, empty where there is none."""
        if self.choices:
            return " or ".join(self.choices)
        if self.low is None:
            return ""
        return f"at least {self.low}" if self.high is None else f"{self.low} to {self.high}"

    def convert(self, value: Any) -> Any:
        """The value for the function from a text, or a value already of the right kind; checks the range."""
        if self.kind in ("integer", "integers"):
            return self._integer(value)
        if self.kind in ("flag", "switch"):
            if not isinstance(value, bool) and value not in ("yes", "no"):
                raise InputError(f"{self.name} is {value!r}", hint="write yes or no")
            return value in (True, "yes")
        if self.kind == "points" and isinstance(value, str):
            raise InputError(f"{self.name} are given as an array or a file", hint=self._hint())
        if self.kind == "choice" and value not in self.choices:
            near = get_close_matches(str(value), self.choices, 1, 0.4)
            raise InputError(
                f"{self.name} is {value!r}" + (f"; is it {near[0]}?" if near else ""),
                hint=f"it may be {self.range}",
            )
        if self.kind == "complex" and isinstance(value, str):
            return evaluate_any(value)
        if self.kind == "cycles" and isinstance(value, str):
            return _cycles(value)
        return value

    def _integer(self, value: Any) -> int:
        try:
            number = int(value) if isinstance(value, str) else index(value)
        except (TypeError, ValueError):
            raise InputError(f"{self.name} is {value!r}, not an integer", hint=self._hint()) from None
        if (self.low is not None and number < self.low) or (self.high is not None and number > self.high):
            # the range is in the sentence: what is left to say is what the number is for
            raise InputError(
                f"{self.name} is {number}; it must be {self.range}", hint=f"{self.name}: {self.meaning}"
            )
        return number

    def _hint(self) -> str:
        return f"{self.name}: {self.meaning}" + (f" ({self.range})" if self.range else "")


class Recipe(NamedTuple):
    """One recipe.

    Attributes
    ----------
    name : str
    function : str
        Module and function in `dualize.make`.
    summary : str
        One line.
    parameters : tuple of Parameter
    group : str
    """

    name: str
    function: str
    summary: str
    parameters: tuple[Parameter, ...]
    group: str

    @property
    def usage(self) -> str:
        """The name with the parameters, in one line."""
        return " ".join([self.name, *(p.shown for p in self.parameters)])

    def __call__(self, *values: Any, **named: Any) -> Complex:
        """Make it; texts are converted, and every value is checked before work starts."""
        arguments, keywords = self.arguments(values, named)
        module, function = self.function.split(".")
        return getattr(import_module(f".{module}", __package__), function)(*arguments, **keywords)

    def made(self, *values: Any, **named: Any) -> Triangulation:
        """The same where the result must be a triangulation, not a factor of dimension 0 or 1."""
        return _whole(self(*values, **named), self.name)

    def arguments(self, values: Sequence[Any], named: dict[str, Any]) -> tuple[list[Any], dict[str, Any]]:
        """The checked arguments of the function, by order and by name; complexes are made last."""
        by_name = {p.name: p for p in self.parameters}
        usage = f"usage: {self.usage}"
        ordered = [p for p in self.parameters if not p.option]
        several = bool(ordered) and ordered[0].kind == "integers"
        given: dict[str, Any] = {} if several else dict(zip([p.name for p in ordered], values, strict=False))
        if several and not 2 <= len(values) <= 4:
            raise InputError(f"{self.name} has {len(values)} {ordered[0].name}, not 2 to 4", hint=usage)
        if not several and len(values) > len(ordered):
            raise InputError(f"{self.name} got {len(values)} arguments, not {len(ordered)}", hint=usage)
        for key, value in named.items():
            if key not in by_name:
                near = get_close_matches(key, by_name, 1, 0.4)
                what = f"{self.name} has no parameter {key!r}" + (f"; is it {near[0]}?" if near else "")
                raise InputError(what, hint=usage)
            if key in given:
                raise InputError(f"{self.name} got {key} twice", hint=usage)
            given[key] = value
        for p in self.parameters:
            if p.default is ... and p.name not in given and not several:
                raise InputError(f"{self.name} needs {p.name}", hint=usage)
        sizes = [ordered[0].convert(value) for value in values] if several else []
        for key in sorted(given, key=lambda key: by_name[key].kind == "complex"):
            given[key] = by_name[key].convert(given[key])
        return sizes, given


def _dimension(default: Any = 4, low: int = 2) -> Parameter:
    return Parameter("dimension", "integer", "of the simplices", default, low, 4)


_YES = ("yes", "no")
_SEED = Parameter("seed", "integer", "the same seed gives the same result", 0, 0, option=True)
_BASE = Parameter("base", "complex", "the complex, of dimension at most 3")
_TWO = (Parameter("first", "complex", "one complex"), Parameter("second", "complex", "the other"))


def _integer(name: str, meaning: str, default: Any, low: int, high: int | None = None) -> Parameter:
    return Parameter(name, "integer", meaning, default, low, high)


_TABLE = [
    Recipe(
        "lattice",
        "lattices.lattice",
        "box of cubes cut into simplices, open, periodic or twisted",
        (
            Parameter("sizes", "integers", "cubes along x, y, z, t", ..., 1),
            Parameter("periodic", "word", "the periodic directions, such as xyzt", "", option=True),
            Parameter("twist", "word", "what happens at a seam: t=yzx, or t=-x-y-z", None, option=True),
            Parameter("variant", "choice", "how cubes are cut", "paths", choices=VARIANTS, option=True),
            Parameter("coordinates", "switch", "where corners lie", "yes", choices=_YES, option=True),
        ),
        "lattices",
    ),
    Recipe(
        "simplex-boundary",
        "polytopes.simplex_boundary",
        "sphere of D + 2 simplices",
        (_dimension(),),
        "polytopes",
    ),
    Recipe(
        "cross-polytope",
        "polytopes.cross_polytope",
        "sphere of 2^(D+1) simplices",
        (_dimension(3),),
        "polytopes",
    ),
    Recipe(
        "cyclic-polytope",
        "polytopes.cyclic_polytope",
        "boundary of C(n, D + 1), by Gale's evenness condition",
        (_integer("vertices", "n, at least D + 2", ..., 4), _dimension(3)),
        "polytopes",
    ),
    Recipe(
        "cell-24",
        "polytopes.cell_24",
        "boundary of the 24-cell, its octahedra cut: 96 tetrahedra",
        (),
        "polytopes",
    ),
    Recipe("cell-600", "polytopes.cell_600", "boundary of the 600-cell: 600 tetrahedra", (), "polytopes"),
    Recipe(
        "cone",
        "joins.cone",
        "cone: a ball between given boundary, or a no-boundary space, by its base",
        (_BASE,),
        "products",
    ),
    Recipe("suspension", "joins.suspension", "two cones over the same base", (_BASE,), "products"),
    Recipe("join", "joins.join", "join of two complexes, say of circle(5) and circle(4)", _TWO, "products"),
    Recipe("product", "products.product", "product by staircases, say of S3 and circle(3)", _TWO, "products"),
    Recipe(
        "slab",
        "products.slab",
        "base times [0, 1] in layers, with both ends in the labels of the base",
        (_BASE, _integer("layers", "how many", 1, 1)),
        "products",
    ),
    Recipe(
        "mapping-torus",
        "products.mapping_torus",
        "slab closed up along a symmetry of its base",
        (
            _BASE,
            Parameter("symmetry", "cycles", "of the labels, such as '(0 1 2)(3 4)'; () is the identity"),
            _integer("layers", "how many", 3, 3),
        ),
        "products",
    ),
    Recipe(
        "connected-sum",
        "joins.connected_sum",
        "connected sum of two complexes of the same dimension",
        (*_TWO, Parameter("reverse", "flag", "reverse the orientation of the second", False, option=True)),
        "products",
    ),
    Recipe(
        "published",
        "catalogue.published",
        "published triangulation of a space, say CP2, with so many vertices",
        (
            Parameter("space", "word", "its name; --spaces lists all"),
            _integer("vertices", "how many; the smallest by default", None, 1),
        ),
        "published",
    ),
    Recipe(
        "sphere-bundle",
        "families.sphere_bundle",
        "S^(D-1) bundle over the circle, the product when D n is even",
        (_dimension(), _integer("vertices", "n, at least 2 D + 3", None, 7)),
        "published",
    ),
    Recipe(
        "ball-bundle",
        "families.ball_bundle",
        "B^(D-1) bundle over the circle, the product when (D - 1) n is even",
        (_dimension(), _integer("vertices", "n, at least 2 D + 1", None, 5)),
        "published",
    ),
    Recipe("torus", "families.torus", "torus with 2^(D+1) - 1 vertices", (_dimension(3),), "published"),
    Recipe("projective-plane", "families.projective_plane", "RP2 with 6 vertices, a factor", (), "published"),
    Recipe(
        "lens-space",
        "families.lens_space",
        "L(p, q) from p tetrahedra, or as a simplicial complex of 96 p",
        (
            _integer("p", "number of tetrahedra", ..., 1),
            _integer("q", "coprime to p", ..., 0),
            Parameter("simplicial", "flag", "a simplicial complex, not a gluing table", False, option=True),
        ),
        "published",
    ),
    Recipe(
        "kummer-variety",
        "families.kummer_variety",
        "torus divided by x -> -x, a pseudomanifold",
        (_dimension(low=3),),
        "published",
    ),
    Recipe(
        "random-delaunay",
        "random.random_delaunay",
        "Delaunay triangulation of random points of the unit cube",
        (_integer("number", "of points", 100, 3), _dimension(3), _SEED),
        "random",
    ),
    Recipe(
        "delaunay",
        "random.delaunay",
        "Delaunay triangulation of given points",
        (Parameter("points", "points", "a file with the coordinates of one point a line"),),
        "random",
    ),
    Recipe(
        "stacked-ball",
        "random.stacked_ball",
        "ball of simplices glued on one by one",
        (_integer("simplices", "how many", 10, 1), _dimension(), _SEED),
        "random",
    ),
    Recipe(
        "stacked-sphere",
        "random.stacked_sphere",
        "sphere from random 1-(D+1) moves",
        (_integer("vertices", "how many, at least D + 2", 10, 4), _dimension(), _SEED),
        "random",
    ),
    Recipe(
        "coloured-graph",
        "random.coloured_graph",
        "random connected edge-coloured graph, hardly ever a manifold",
        (
            _integer("vertices", "how many, an even number", 10, 2),
            _dimension(),
            Parameter("bipartite", "switch", "whether it is orientable", "yes", choices=_YES, option=True),
            _SEED,
        ),
        "random",
    ),
    Recipe(
        "melonic-graph",
        "random.melonic_graph",
        "random melonic graph, a sphere",
        (_integer("vertices", "how many, an even number", 10, 2), _dimension(), _SEED),
        "random",
    ),
    Recipe(
        "random-gluing",
        "random.random_gluing",
        "facets paired at random until every ridge is regular; hardly ever a manifold",
        (
            _integer("simplices", "how many", 2, 1),
            _dimension(3),
            Parameter("free", "integer", "facets left in the boundary", 0, 0, option=True),
            Parameter("ordered", "flag", "gluings keep the order of the corners", False, option=True),
            Parameter("orientable", "flag", "gluings reverse orientation", False, option=True),
            _SEED,
            Parameter("tries", "integer", "how often to draw", 10_000, 1, option=True),
        ),
        "random",
    ),
    Recipe("simplex", "foams.simplex", "one simplex", (_dimension(),), "first foams"),
    Recipe(
        "simplex-pair",
        "foams.simplex_pair",
        "two simplices that share a facet",
        (_dimension(),),
        "first foams",
    ),
    Recipe(
        "ridge-ring",
        "foams.ridge_ring",
        "simplices in a ring around one ridge",
        (_integer("number", "how many", 3, 3), _dimension()),
        "first foams",
    ),
    Recipe(
        "move-side",
        "foams.move_side",
        "side with k simplices of a Pachner move",
        (
            _dimension(...),
            _integer("simplices", "k, at most D + 1", ..., 1, 5),
            Parameter("opposite", "flag", "the other side, of D + 2 - k simplices", False, option=True),
        ),
        "first foams",
    ),
    Recipe(
        "shared-pair",
        "foams.shared_pair",
        "two simplices that share k facets: D is the melon, D + 1 the closed graph",
        (_integer("shared", "k, at most D + 1", 4, 1, 5), _dimension()),
        "first foams",
    ),
    Recipe(
        "dipole-slab",
        "foams.dipole_slab",
        "S3 x [0, 1] between two graphs of two nodes and four links",
        (_integer("layers", "how many", 1, 1),),
        "first foams",
    ),
    Recipe(
        "circle", "parts.circle", "ring of segments", (_integer("segments", "how many", 3, 3),), "factors"
    ),
    Recipe(
        "interval", "parts.interval", "row of segments", (_integer("segments", "how many", 1, 1),), "factors"
    ),
    Recipe("points", "parts.points", "points", (_integer("number", "how many", ..., 1),), "factors"),
]

RECIPES: dict[str, Recipe] = {r.name: r for r in _TABLE}


def recipe(name: str) -> Recipe:
    """The recipe of this name; ``_`` counts as ``-``.

    Raises
    ------
    InputError
        If there is none, naming near matches.
    """
    key = name.replace("_", "-").lower()
    if key in RECIPES:
        return RECIPES[key]
    near = get_close_matches(key, RECIPES, 3, 0.5) or [r for r in RECIPES if key in r or r in key]
    hint = "dualize make --list shows all recipes"
    from .catalogue import spaces

    if any(entry.space.lower() == name.replace(" ", "").lower() for entry in spaces()):
        hint = f"it is a published space: dualize make published '{name}'"
    raise InputError(
        f"there is no recipe {name!r}" + (f"; is it {' or '.join(near)}?" if near else ""), hint=hint
    )


def make(name: str, *values: Any, **named: Any) -> Triangulation:
    """Make a triangulation by the name of its recipe.

    Parameters
    ----------
    name : str
    *values, **named
        Parameters, as texts or as values; complexes also as expressions.

    Raises
    ------
    InputError
        If there is no such recipe, a parameter is not in its range, or the result is a factor of dimension 0
        or 1.

    Examples
    --------
    >>> make("product", "S3", "circle(4)")
    <Triangulation 4D: 80 simplices, labelled, 0 boundary facets>
    """
    return recipe(name).made(*values, **named)


def _whole(made: Complex, name: str) -> Triangulation:
    if not isinstance(made, Triangulation):
        raise InputError(
            f"{name} has the dimension {made.shape[1] - 1}",
            hint="it is a factor for join and product, which take it",
        )
    return made


# -- expressions -----------------------------------------------------------------------------------


def evaluate(text: str) -> Triangulation:
    """The triangulation that an expression names; see `evaluate_any`."""
    return _whole(evaluate_any(text), text)


def evaluate_any(text: str) -> Complex:
    """The complex that an expression names, an array of labels where its dimension is below 2.

    Raises
    ------
    InputError
        If the expression cannot be read, or names no recipe and no space.
    """
    from .catalogue import published, spaces

    key = text.replace(" ", "").lower()
    if any(entry.space.lower() == key for entry in spaces()):
        return published(text)
    match = re.fullmatch(r"\s*([\w-]+)\s*(?:\((.*)\))?\s*", text, re.DOTALL)
    if not match:
        raise InputError(
            f"{text!r} names no complex", hint="write a space (CP2) or a recipe (circle(5)), or a file"
        )
    values, named = [], {}
    for part in _split(match[2] or ""):
        name, equals, value = part.partition("=")
        if equals and re.fullmatch(r"\s*[\w-]+\s*", name):
            named[name.strip().replace("-", "_")] = value.strip()
        else:
            values.append(part.strip())
    return recipe(match[1])(*values, **named)


def _split(text: str) -> list[str]:
    """The arguments of an expression: parted by commas outside of parentheses."""
    parts, depth, start = [], 0, 0
    for place, sign in enumerate(text):
        depth += (sign == "(") - (sign == ")")
        if sign == "," and depth == 0:
            parts.append(text[start:place])
            start = place + 1
    if depth:
        raise InputError(f"the parentheses in ({text}) do not match")
    parts.append(text[start:])
    return [p for p in parts if p.strip()] if text.strip() else []


def _cycles(text: str) -> dict[int, int]:
    """The images of the labels that cycles such as ``(0 1 2)(3 4)`` move."""
    if not re.fullmatch(r"\s*(?:\([\d\s,]*\)\s*)*", text):
        raise InputError(
            f"the symmetry {text!r} cannot be read", hint="write cycles of labels: '(0 1 2)(3 4)'"
        )
    images: dict[int, int] = {}
    for cycle in re.findall(r"\(([^)]*)\)", text):
        labels = [int(x) for x in re.split(r"[\s,]+", cycle.strip()) if x]
        for x, y in zip(labels, labels[1:] + labels[:1], strict=True):
            if x in images:
                raise InputError(f"the symmetry {text!r} moves {x} twice")
            images[x] = y
    return images
