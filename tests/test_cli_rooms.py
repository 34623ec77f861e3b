"""Rooms import only from the rooms above them in the table of DEVELOPERS.md."""

import ast
import re
from pathlib import Path

import pytest
from commandline import ROOT

PACKAGE = ROOT / "dualize"
TEXT = (ROOT / "DEVELOPERS.md").read_text()
ROOMS = re.findall(r"^\| `(\w+)` \|", TEXT, re.M)
# the package itself, and the program: above nothing and below everything
FRAME = {"__init__", "__main__"}
# functions that are only another way to call a room below
LENT = {
    "audit": {"draw", "findings"},
    "triangulation": {"boundary", "coloured", "draw", "formats"},
    "skeleton": {"check", "draw", "formats"},
}


def room(path):
    return path.relative_to(PACKAGE).parts[0].removesuffix(".py")


MODULES = sorted(PACKAGE.rglob("*.py"))
FOUND = sorted({room(path) for path in MODULES} - FRAME)


def imports(path):
    """(room, inside a function) of every import from this package; those for type checkers do not count."""
    package = ("dualize", *path.relative_to(PACKAGE).parts[:-1])

    def walk(node, inside):
        for child in ast.iter_child_nodes(node):
            if isinstance(child, ast.If) and "TYPE_CHECKING" in ast.dump(child.test):
                continue
            if isinstance(child, ast.Import):
                for alias in child.names:
                    if alias.name.split(".")[0] == "dualize":
                        yield tuple(alias.name.split(".")), inside
            if isinstance(child, ast.ImportFrom):
                base = package[: len(package) - child.level + 1] if child.level else ()
                base += tuple(child.module.split(".")) if child.module else ()
                if base[:1] == ("dualize",):
                    for alias in child.names:
                        yield (*base, alias.name), inside
            yield from walk(child, inside or isinstance(child, ast.FunctionDef))

    for name, inside in walk(ast.parse(path.read_text()), False):
        target = name[1] if len(name) > 1 else "__init__"
        if (PACKAGE / target).exists() or (PACKAGE / f"{target}.py").exists():
            yield target, inside


def test_the_walk_sees_imports_at_the_top_and_inside_functions():
    seen = set(imports(PACKAGE / "skeleton.py"))
    assert ("errors", False) in seen
    assert ("formats", True) in seen


@pytest.mark.parametrize("name", FOUND)
def test_every_room_is_in_the_table(name):
    assert name in ROOMS


@pytest.mark.parametrize("path", MODULES, ids=lambda path: str(Path(path).relative_to(PACKAGE)))
def test_a_room_imports_only_from_rooms_above_it(path):
    here = room(path)
    if here in FRAME:
        return
    above = set(ROOMS[: ROOMS.index(here)]) | {here}
    wrong = {
        target
        for target, inside in imports(path)
        if target not in above and not (inside and target in LENT.get(here, set()))
    }
    assert wrong == set()
