"""`meshes/README.md` against the files, and the files against the program."""

import hashlib
import json
import re
from itertools import combinations

import meshio
import pytest
from commandline import MESHES
from commandline import dualize as program

import dualize

TEXT = (MESHES / "README.md").read_text()


def rows(number):
    """The rows of a table by file."""
    table = re.findall(r"^\| file .*\n\| ---.*\n((?:\| .*\n)+)", TEXT, re.M)[number].splitlines()
    cells = [[cell.strip() for cell in line.strip("|").split("|")] for line in table]
    return {row[0]: row[1:] for row in cells}


ROWS, AUDITS = rows(0), rows(1)
FILES = sorted(path.name for path in MESHES.iterdir() if path.name != "README.md")
CHECKSUMS = {name: digits for digits, name in re.findall(r"^([0-9a-f]{64})  (\S+)$", TEXT, re.M)}


def counts(name):
    """Numbers of the table: vertices, edges and faces as (internal, external), nodes, links."""
    v, e, f, nodes, links = ROWS[name][2:7]
    pair = [tuple(int(x) for x in cell.split("+")) if "+" in cell else (int(cell), 0) for cell in (e, f)]
    return int(v), *pair, int(nodes), int(links)


def facets(name):
    """The top simplices of a labelled mesh as sets, read without this package."""
    path = MESHES / name
    if name.endswith(".vtk"):
        return [frozenset(row) for row in meshio.read(path).cells_dict["tetra"].tolist()]
    if name.endswith(".json"):
        return [frozenset(row) for row in json.loads(path.read_text())["facets"]]
    lines = [line.split("#")[0].split() for line in path.read_text().splitlines()]
    return [frozenset(line) for line in lines if line]


LABELLED = [name for name in FILES if name.endswith((".txt", ".vtk")) or name == "hypercube.json"]


def test_every_file_has_a_row_in_both_tables_and_a_checksum():
    assert sorted(ROWS) == FILES
    assert sorted(AUDITS) == FILES
    assert sorted(CHECKSUMS) == FILES


@pytest.mark.parametrize("name", FILES)
def test_checksum(name):
    assert hashlib.sha256((MESHES / name).read_bytes()).hexdigest() == CHECKSUMS[name]


@pytest.mark.parametrize("name", LABELLED)
def test_counts_of_the_table_by_counting_subsets(name):
    """Facets and ridges as sets: internal ones are those of the whole that are not in the boundary."""
    top = facets(name)
    k = len(top[0])
    of_facet = {}
    for simplex in top:
        for facet in combinations(sorted(simplex), k - 1):
            of_facet[facet] = of_facet.get(facet, 0) + 1
    boundary = [facet for facet, n in of_facet.items() if n == 1]
    outer = {ridge for facet in boundary for ridge in combinations(facet, k - 2)}
    ridges = {ridge for simplex in top for ridge in combinations(sorted(simplex), k - 2)}
    found = (
        len(top),
        (len(of_facet) - len(boundary), len(boundary)),
        (len(ridges) - len(outer), len(outer)),
        len(boundary),
        len(outer),
    )
    assert found == counts(name)


@pytest.mark.parametrize("name", FILES)
def test_the_program_finds_what_the_table_says(name):
    s = dualize.build(dualize.read(MESHES / name))
    c = s.counts
    found = (
        c["vertices"],
        (c["edges_internal"], c["edges_external"]),
        (c["faces_internal"], c["faces_external"]),
        c["nodes"],
        c["links"],
    )
    orientable, boundary = ROWS[name][7:9]
    pieces = int(s["nodes/component"].max(initial=-1)) + 1
    assert found == counts(name)
    assert ("yes" if all(s.flags["orientable"]) else "no") == orientable
    assert ("closed" if pieces == 0 else f"{pieces} piece{'s' if pieces > 1 else ''}") == boundary


@pytest.mark.parametrize("name", FILES)
def test_the_audit_says_what_its_table_says(name, tmp_path):
    done = program("audit", MESHES / name, "--json", cwd=tmp_path)
    assert done.returncode == 0, done.stderr
    found = {finding["check"]: finding for finding in json.loads(done.stdout)["findings"]}
    assert [check for check, finding in found.items() if finding["verdict"] == "violated"] == []
    euler, *betti = AUDITS[name][:3]
    assert found["euler"]["figure"] == int(euler)
    assert list(found["betti"]["figure"].values()) == [[int(b) for b in row.split()] for row in betti]
    checks = ("connected", "closed", "orientable", "manifold", "simplicial", "sides")
    assert [found[check]["verdict"] for check in checks] == AUDITS[name][3:]


def cells_of(top):
    """Numbers of simplices by dimension, as subsets."""
    sizes = range(1, len(next(iter(top))) + 1)
    return [len({face for s in top for face in combinations(sorted(s), m)}) for m in sizes]


@pytest.mark.parametrize("name", LABELLED)
def test_the_euler_characteristics_of_the_audit_table_by_counting_subsets(name):
    counted = sum((-1) ** m * n for m, n in enumerate(cells_of(facets(name))))
    assert counted == int(AUDITS[name][0])
    for row in AUDITS[name][1:3]:
        assert sum((-1) ** m * int(b) for m, b in enumerate(row.split())) == counted


def test_the_figure_eight_knot_has_six_tetrahedra_around_both_edges():
    # W. P. Thurston, The Geometry and Topology of Three-Manifolds, lecture notes (1979), from memory
    s = dualize.build(dualize.read(MESHES / "figure_eight_knot.json"), points=True)
    assert [len(s.face(f)) // 2 for f in range(2)] == [6, 6]
    assert int(s["vertices/point"].max()) == 0
    assert all(s.flags["orientable"])
