"""Flat connections and Turaev-Viro sums, counted from files, against published groups and invariants."""

import ast
import subprocess
import sys
from math import sqrt

import numpy as np
import pytest
import specimens as sp
from catalogue import CATALOGUE, NAMES
from reference import table_from_pairs
from regions import READERS, SCRIPTS, glued, loaded, script, tables_of

from dualize import Triangulation, build

COUNT, TV = script("count_flat"), script("turaev_viro")


def lens_space(p, q):
    """p tetrahedra (N, S, e_i, e_i+1) around the axis N S; (N, e_i, e_i+1) is glued to (S, e_i+q, e_i+q+1).

    H. Seifert, W. Threlfall, Lehrbuch der Topologie (1934), section 60, cut into tetrahedra.
    """
    rows = []
    for i in range(p):
        swap, turn = (1, 0, 2, 3), (0, 1, 3, 2)
        rows.append([[(i - q) % p, swap], [(i + q) % p, swap], [(i + 1) % p, turn], [(i - 1) % p, turn]])
    return glued(table_from_pairs(rows), points=True)


def closed(name):
    return build(Triangulation.from_facets(CATALOGUE[name].facets), keep_singular=True)


# --------------------------------------------------------------------------------------------------
# Finite groups


CLOSED = [n for n in NAMES if CATALOGUE[n].boundary is None and CATALOGUE[n].dual_group]


@pytest.mark.parametrize("group", COUNT.GROUPS)
@pytest.mark.parametrize("name", CLOSED)
def test_flat_connections_of_published_triangulations(name, group):
    """|Hom(pi1, G)| |G|^(V-1): R. Dijkgraaf, E. Witten (1990); groups by the sources of the catalogue."""
    skeleton, elements = closed(name), COUNT.GROUPS[group]
    homomorphisms = CATALOGUE[name].dual_group["homomorphisms"][group]
    expected = homomorphisms * len(elements) ** (skeleton.counts["vertices"] - 1)
    assert COUNT.count(loaded(skeleton, COUNT), elements) == expected


# |Hom(pi1, G)| for Z2, Z3, S3: |Hom(Z_n, G)| counts the elements whose order divides n
LENSES = {(1, 1): (1, 1, 1), (2, 1): (2, 1, 4), (3, 1): (1, 3, 3), (5, 1): (1, 1, 1), (5, 2): (1, 1, 1)}


@pytest.mark.parametrize("every", [False, True], ids=["tree", "all"])
@pytest.mark.parametrize("group", COUNT.GROUPS)
@pytest.mark.parametrize("p, q", LENSES, ids=str)
def test_flat_connections_of_lens_spaces(p, q, group, every):
    elements = COUNT.GROUPS[group]
    homomorphisms = LENSES[p, q][list(COUNT.GROUPS).index(group)]
    found = COUNT.count(loaded(lens_space(p, q), COUNT), elements, every)
    assert found == homomorphisms * len(elements) ** (p - 1)


@pytest.mark.parametrize("name, group, number", [
    ("simplex_bd_4", "Z2", 16), ("simplex_bd_4", "Z3", 81), ("simplex_bd_4", "S3", 1296),
    ("simplex_bd_5", "Z2", 32), ("simplex_bd_5", "Z3", 243), ("simplex_bd_5", "S3", 7776),
])  # fmt: skip
def test_every_flat_connection_of_a_sphere(name, group, number):
    """|G|^(V-1), every single one visited."""
    assert COUNT.count(loaded(closed(name), COUNT), COUNT.GROUPS[group], every=True) == number


@pytest.mark.parametrize("name", ["simplex_bd_4", "simplex_bd_5"])
def test_a_flipped_sign_around_a_face_changes_the_count(name):
    """The other faces imply the right one, so that the wrong one adds that the square of an element is 1."""
    skeleton = closed(name)
    right = COUNT.count(loaded(skeleton, COUNT), COUNT.GROUPS["Z3"], every=True)
    for step in range(len(skeleton["faces/edge"])):
        tables = tables_of(skeleton)
        tables["faces/edge_sign"][step] *= -1
        assert COUNT.count(loaded(tables, COUNT), COUNT.GROUPS["Z3"], every=True) == right // 3


@pytest.mark.parametrize("make, message", [
    (lambda: build(Triangulation.from_facets(sp.simplex(3))), "has a boundary"),
    (lambda: build(Triangulation.from_facets(sp.disjoint(sp.sphere(3), sp.sphere(3)))), "not connected"),
], ids=["boundary", "two components"])  # fmt: skip
def test_foams_without_a_count_are_refused(make, message):
    with pytest.raises(SystemExit, match=message):
        COUNT.count(loaded(make(), COUNT), COUNT.GROUPS["Z2"])


# --------------------------------------------------------------------------------------------------
# Turaev-Viro

# V. G. Turaev, O. Y. Viro, Topology 31 (1992) 865; lens spaces as |surgery invariant|^2: N. Reshetikhin,
# V. G. Turaev, Invent. Math. 103 (1991) 547; L. C. Jeffrey, Commun. Math. Phys. 147 (1992) 563.  At r = 3, 4,
# 5 with the root exp(i pi / r), the formula evaluated by an independent script.
S5 = sqrt(5)
VALUES = {
    "S3": (1 / 2, 1 / 4, (5 - S5) / 20),
    "S2 x S1": (1, 1, 1),
    "RP3": (0, (2 - sqrt(2)) / 4, 0),
    "L(3,1)": (1 / 2, 1 / 4, (5 + S5) / 20),
    "L(4,1)": (1, 1 / 2, (5 - S5) / 10),
    "L(5,1)": (1 / 2, 1 / 4, 1 / 2),
    "L(5,2)": (1 / 2, 1 / 4, 0),
    "L(7,1)": (1 / 2, 1 / 4, (5 + S5) / 20),
}
MANIFOLDS = {
    "boundary of the 4-simplex": ("S3", lambda: build(Triangulation.from_facets(sp.sphere(3)), points=True)),
    "one tetrahedron, one point": ("S3", lambda: glued(sp.GLUED["tetrahedra_1_0"], points=True)),
    "one tetrahedron, two points": ("S3", lambda: glued(sp.GLUED["tetrahedra_1_1"], points=True)),
    "two tetrahedra with the same boundary": ("S3", lambda: glued(sp.melon(3, 4), points=True)),
    "L(1,1)": ("S3", lambda: lens_space(1, 1)),
    "self-glued L(4,1)": ("L(4,1)", lambda: glued(sp.GLUED["tetrahedra_1_2"], points=True)),
    "self-glued L(5,2)": ("L(5,2)", lambda: glued(sp.GLUED["tetrahedra_1_3"], points=True)),
    "L(2,1)": ("RP3", lambda: lens_space(2, 1)),
    "L(3,1)": ("L(3,1)", lambda: lens_space(3, 1)),
    "L(3,2)": ("L(3,1)", lambda: lens_space(3, 2)),
    "L(4,1)": ("L(4,1)", lambda: lens_space(4, 1)),
    "L(5,1)": ("L(5,1)", lambda: lens_space(5, 1)),
    "L(5,2)": ("L(5,2)", lambda: lens_space(5, 2)),
    "L(5,3)": ("L(5,2)", lambda: lens_space(5, 3)),
    "L(7,1)": ("L(7,1)", lambda: lens_space(7, 1)),
}


@pytest.mark.parametrize("space, make", MANIFOLDS.values(), ids=MANIFOLDS.keys())
def test_turaev_viro_sums_are_the_published_invariants(space, make):
    foam = loaded(make(), TV)
    found = [TV.turaev_viro(foam, r) for r in (3, 4, 5)]
    np.testing.assert_allclose(found, VALUES[space], atol=1e-9)


@pytest.mark.parametrize("make, value", [
    (lambda: build(Triangulation.from_facets(sp.sphere(3)), points=True), (5 + S5) / 20),
    (lambda: lens_space(2, 1), (5 - S5) / 10),
    (lambda: lens_space(3, 1), (5 - S5) / 20),
    (lambda: lens_space(5, 1), 1 / 2),
    (lambda: lens_space(5, 2), 0),
], ids=["S3", "RP3", "L(3,1)", "L(5,1)", "L(5,2)"])  # fmt: skip
def test_turaev_viro_at_another_root(make, value):
    """r = 5, root exp(2 i pi / 5); sources as above."""
    assert TV.turaev_viro(loaded(make(), TV), 5, 2) == pytest.approx(value, abs=1e-9)


@pytest.mark.parametrize("level", [3, 4, 5])
def test_turaev_viro_of_the_torus(level):
    """TV_r(T^3) = (r - 1)^2 (from memory): one point, six self-glued tetrahedra."""
    foam = loaded(glued(sp.kuhn_torus((1, 1, 1)), points=True), TV)
    assert TV.turaev_viro(foam, level) == pytest.approx((level - 1) ** 2, rel=1e-9)


@pytest.mark.parametrize("seed", range(4))
def test_turaev_viro_does_not_depend_on_the_description(seed):
    table = sp.scrambled(sp.GLUED["tetrahedra_1_3"], seed)
    assert TV.turaev_viro(loaded(glued(table, points=True), TV), 4) == pytest.approx(1 / 4, rel=1e-9)


@pytest.mark.parametrize("make, message", [
    (lambda: build(Triangulation.from_facets(sp.simplex(3)), points=True), "closed complex of dimension 3"),
    (lambda: build(Triangulation.from_facets(sp.sphere(4)), points=True), "closed complex of dimension 3"),
    (lambda: build(Triangulation.from_facets(sp.sphere(3))), "number of points is not in the file"),
], ids=["boundary", "dimension", "points"])  # fmt: skip
def test_foams_without_an_invariant_are_refused(make, message):
    with pytest.raises(SystemExit, match=message):
        TV.turaev_viro(loaded(make(), TV), 3)


# --------------------------------------------------------------------------------------------------
# As programs

PROGRAMS = {
    "amplitude_projectors.py": (["--spins", "1"], "4d-side-3"),
    "amplitude_symbols.py": (["--spins", "1"], "4d-side-3"),
    "count_flat.py": (["--group", "S3"], "3d-sphere"),
    "turaev_viro.py": (["--level", "4"], "3d-sphere"),
}


def run(name, *arguments):
    done = subprocess.run(
        [sys.executable, SCRIPTS / name, *map(str, arguments)], capture_output=True, text=True
    )
    assert done.returncode == 0, done.stderr
    return done.stdout


@pytest.mark.parametrize("name, arguments, foam", [(n, *x) for n, x in PROGRAMS.items()], ids=PROGRAMS.keys())
def test_readers_print_the_same_for_json_and_hdf5(name, arguments, foam, tmp_path):
    skeleton = build(Triangulation.from_facets(sp.LABELLED[foam]), points=True)
    for suffix in ("json", "h5"):
        skeleton.write(tmp_path / f"foam.{suffix}")
    outputs = {run(name, tmp_path / f"foam.{suffix}", *arguments) for suffix in ("json", "h5")}
    assert len(outputs) == 1
    expected = {
        "amplitude_projectors.py": "shape (2, 2, 2, 2, 2, 2, 2, 2, 2), sum of squares 0.0424382716049\n",
        "amplitude_symbols.py": "shape (2, 2, 2, 2, 2, 2, 2, 2, 2), sum of squares 0.0424382716049\n",
        "count_flat.py": "1296 flat connections; 1 homomorphisms from the group of the two-complex to S3\n",
        "turaev_viro.py": "0.250000000000\n",
    }
    assert outputs.pop().startswith(expected[name])


@pytest.mark.parametrize("reader", ["amplitude_projectors.py", "amplitude_symbols.py"])
def test_unbounded_spins_need_a_cut_off(reader, tmp_path):
    build(Triangulation.from_facets(sp.move_side(3, 4))).write(tmp_path / "foam.json")
    command = [sys.executable, SCRIPTS / reader, tmp_path / "foam.json", "--spins", "2"]
    done = subprocess.run(command, capture_output=True, text=True)
    assert done.returncode == 1 and "has no bound: --fix it, or sum --up-to" in done.stderr
    assert "sum of squares" in run(reader, tmp_path / "foam.json", "--spins", "2", "--fix", "0=1")
    assert "sum of squares" in run(reader, tmp_path / "foam.json", "--spins", "2", "--up-to", "2")


@pytest.mark.parametrize("name", PROGRAMS)
def test_readers_import_nothing_of_the_package(name):
    imports = {
        module.split(".")[0]
        for node in ast.walk(ast.parse((SCRIPTS / name).read_text()))
        if isinstance(node, ast.Import | ast.ImportFrom)
        for module in ([node.module] if isinstance(node, ast.ImportFrom) else [x.name for x in node.names])
    }
    assert imports <= {"argparse", "functools", "h5py", "itertools", "json", "math", "numpy", "signal"}


@pytest.mark.parametrize("reader", ["amplitude_projectors.py", "amplitude_symbols.py"])
@pytest.mark.parametrize("arguments, message", [
    (["--spins", "1,2"], "there are 18 links: give a twice-spin for each, or one for all"),
    (["--spins", "-1"], "there are 18 links: give a twice-spin for each, or one for all"),
    (["--spins", "half"], "error: ValueError"),
    (["--spins", "1", "--fix", "1=1"], "only internal faces are held fixed: numbers below 1"),
], ids=["number", "negative", "word", "fixed"])  # fmt: skip
def test_wrong_spins_end_in_one_sentence(reader, arguments, message, tmp_path):
    build(Triangulation.from_facets(sp.move_side(4, 3))).write(tmp_path / "foam.json")
    command = [sys.executable, SCRIPTS / reader, tmp_path / "foam.json", arguments[0] + "=" + arguments[1]]
    done = subprocess.run([*command, *arguments[2:]], capture_output=True, text=True)
    assert done.returncode == 1 and done.stderr.startswith(message) and "Traceback" not in done.stderr


@pytest.mark.parametrize("reader", [
    "amplitude_projectors.py", "amplitude_symbols.py", "count_flat.py", "turaev_viro.py",
])  # fmt: skip
def test_a_missing_file_is_named(reader):
    done = subprocess.run([sys.executable, SCRIPTS / reader, "none.json"], capture_output=True, text=True)
    assert done.returncode == 1
    assert done.stderr.startswith("error: FileNotFoundError") and "'none.json'" in done.stderr


def test_odd_spins_at_a_node_leave_an_empty_axis():
    """Three spins 1/2 have no invariant: the tensor has no entries."""
    skeleton = build(Triangulation.from_facets(sp.simplex(3)))
    for reader in READERS.values():
        assert reader.amplitude(loaded(skeleton, reader), 1).shape == (0, 0, 0, 0)


def test_a_sum_beyond_the_memory_is_refused():
    skeleton = build(Triangulation.from_facets(CATALOGUE["poincare_16"].facets), points=True)
    with pytest.raises(SystemExit, match="the complex is too large: its sum needs an array with"):
        TV.turaev_viro(loaded(skeleton, TV), 3)
