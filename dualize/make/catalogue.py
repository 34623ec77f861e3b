"""Published triangulations by the name of the space and the number of vertices.

``data/published.json`` lists them with their sources (from memory); each is a list of labels in ``data/`` or
a rule of `dualize.make.recipes`.  The test suite checks every one against its published values.
"""

from __future__ import annotations

import json
from difflib import get_close_matches
from functools import cache
from importlib.resources import files
from typing import NamedTuple

import numpy as np

from ..errors import InputError
from ..triangulation import Triangulation

__all__ = ["Published", "published", "spaces"]


class Published(NamedTuple):
    """One triangulation of the catalogue.

    Attributes
    ----------
    space : str
    vertices : int
        Corners of the triangulation.
    dimension : int
    title, source : str
    file, rule : str or None
        Where its simplices are listed, or the recipe that makes them: one of the two.
    """

    space: str
    vertices: int
    dimension: int
    title: str
    source: str
    file: str | None = None
    rule: str | None = None


@cache
def spaces() -> tuple[Published, ...]:
    """All published triangulations, by dimension; those of one space together, smallest first."""
    text = (files(__package__) / "data" / "published.json").read_text(encoding="utf-8")
    return tuple(Published(**entry) for entry in json.loads(text))


def published(space: str, vertices: int | None = None) -> Triangulation:
    """A published triangulation.

    Parameters
    ----------
    space : str
        Such as ``"CP2"`` or ``"S2xS1-twisted"``; upper and lower case are the same.
    vertices : int, optional
        Its number of corners; by default the smallest one.

    Raises
    ------
    InputError
        If there is none, naming those there are.

    Examples
    --------
    >>> published("CP2")
    <Triangulation 4D: 36 simplices, labelled, 0 boundary facets>
    """
    entry = find(space, vertices)
    if entry.rule is not None:
        from .recipes import evaluate

        return evaluate(entry.rule)
    text = (files(__package__) / "data" / str(entry.file)).read_text(encoding="utf-8")
    rows = [line.split() for line in text.splitlines() if line and not line.startswith("#")]
    return Triangulation.from_facets(np.array(rows, dtype=np.int64))


def find(space: str, vertices: int | None = None) -> Published:
    """The entry of a space, or the error that there is none."""
    known: dict[str, str] = {entry.space.lower(): entry.space for entry in spaces()}
    key = space.replace(" ", "").lower()
    if key not in known:
        near = get_close_matches(key, known, 3, 0.4)
        raise InputError(
            f"there is no published triangulation of {space!r}"
            + (f"; is it {' or '.join(known[x] for x in near)}?" if near else ""),
            hint="spaces: " + ", ".join(known.values()),
        )
    entries = [entry for entry in spaces() if entry.space.lower() == key]
    for entry in entries:
        if vertices is None or entry.vertices == vertices:
            return entry
    there = ", ".join(str(entry.vertices) for entry in entries)
    raise InputError(f"there is no {known[key]} with {vertices} vertices", hint=f"there is one with: {there}")
