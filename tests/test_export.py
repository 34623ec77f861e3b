"""Exports: what is written, what comes back, and that nothing is overwritten or left half done."""

import json
import shutil
import subprocess
import sys
from pathlib import Path

import meshio
import networkx as nx
import numpy as np
import pytest
import specimens as sp
from catalogue import CATALOGUE
from networkx.utils import graphs_equal
from regions import glued
from scipy.io import mmread

import dualize
from dualize import InputError, SkeletonError, Triangulation, build, export, read_export
from dualize.export import KINDS
from dualize.export import tables as tables_module
from dualize.triangulation import Coordinates

SCRIPTS = Path(__file__).parent.parent / "scripts"


def labelled(name, **options):
    return build(Triangulation.from_facets(sp.LABELLED[name]), **options)


def with_further(skeleton):
    further = {
        "spins/range": np.array([[0, 4], [1, 3]], dtype=np.int16),
        "spins/weights": np.array([0.1, np.nan, -np.inf]),
        "spins/phases": np.array([1 + 2j, 0.25j]),
        "spins/none": np.zeros((0, 3), dtype=np.float32),
        "plan/order": [3, 1, "é"],
    }
    parts = (skeleton.dimension, skeleton.counts, skeleton.flags, skeleton.arrays)
    return dualize.Skeleton(*parts, skeleton.corner_names, skeleton.provenance, further)


def words(facets):
    return [[f"point-{x}" for x in f] for f in facets]


def corner_charts():
    """Two triangles of a flat torus of periods 1, 1 as a gluing table, each in a chart that overlaps the
    edge."""
    table = sp.kuhn_torus((1, 1))
    none = range(3)
    carry = [[none if p is None else p for p in row] for row in table.carry]
    corner = np.array([[[0.9, 0.9], [1.9, 0.9], [1.9, 1.9]], [[0.9, 0.9], [0.9, 1.9], [1.9, 1.9]]])
    where = Coordinates(corner=corner, period=np.array([1.0, 1.0]))
    return Triangulation.from_gluings(table.across, carry, coordinates=where)


SKELETONS = {
    **{name: lambda name=name: labelled(name) for name in [
        "2d-simplex", "3d-simplex", "4d-simplex", "2d-torus", "3d-mixed", "4d-mixed", "4d-around-4",
        "3d-moebius-slab", "projective-plane",
    ]},
    **{name: lambda name=name: glued(sp.scrambled(sp.GLUED[name], 1), points=True) for name in [
        "4d-melon-4", "3d-snapped-tetrahedron", "4d-twisted-simplex", "four_simplices_2_0", "kuhn-torus-2x1",
    ]},
    "words": lambda: build(Triangulation.from_facets(words(sp.move_side(4, 3))), points=True),
    "odd words": lambda: build(Triangulation.from_facets([['a"b', "<&>", "é'", "\\n", "]]>"]])),
    "singular": lambda: build(
        Triangulation.from_facets(sp.SINGULAR["3d-pinched-edge"][0]), keep_singular=True
    ),
    "coordinates": lambda: build(
        Triangulation.from_facets(sp.move_side(3, 3), coordinates=np.random.default_rng(1).random((5, 4)))
    ),
    "charts": lambda: build(corner_charts(), points=True),
    "further": lambda: with_further(labelled("3d-simplex")),
}  # fmt: skip
every = pytest.mark.parametrize("make", SKELETONS.values(), ids=SKELETONS.keys())


def run(*arguments, **options):
    code = "from dualize.cli import main; main()"
    return subprocess.run([sys.executable, "-c", code, *map(str, arguments)], capture_output=True, **options)


# --------------------------------------------------------------------------------------------------
# Tables


@every
def test_tables_come_back_equal(make, tmp_path):
    skeleton = make()
    export(skeleton, tmp_path / "foam", "tables")
    assert read_export(tmp_path / "foam", "tables") == skeleton


@every
def test_tables_come_back_equal_whatever_the_order_of_rows(make, tmp_path):
    skeleton = make()
    export(skeleton, tmp_path / "foam", "tables")
    for file in (tmp_path / "foam").glob("*.csv"):
        head, *rows = file.read_text().splitlines()
        np.random.default_rng(5).shuffle(rows)
        file.write_text("\n".join([head, *rows]) + "\n")
    assert read_export(tmp_path / "foam", "tables") == skeleton


def test_columns_of_tables_have_the_names_of_the_layout_and_a_meaning(tmp_path):
    export(build(corner_charts(), points=True), tmp_path / "foam", "tables")
    about = json.loads((tmp_path / "foam" / "about.json").read_text())
    assert set(about["files"]) == {file.name for file in (tmp_path / "foam").glob("*.csv")}
    for name, columns in about["files"].items():
        assert (tmp_path / "foam" / name).read_text().splitlines()[0].split(",") == list(columns)
        assert all(columns.values()), name
    assert about["files"]["edges.csv"]["face_sign.1"] == "+1 the face runs along the edge, -1 against [1]"


def test_tables_of_one_tetrahedron_are_those_of_the_conventions(tmp_path):
    """Worked by hand: slot i leaves when (-1)**i = +1; the first face runs 1 -> 0, so it enters by edge 1."""
    export(build(Triangulation.from_facets([[0, 1, 2, 3]])), tmp_path / "foam", "tables")
    rows = (tmp_path / "foam" / "face_edges.csv").read_text().splitlines()
    assert rows[:3] == ["face,step,edge,edge_sign,place", "0,0,1,1,0", "0,1,0,1,0"]
    assert (tmp_path / "foam" / "vertices.csv").read_text().splitlines()[
        1
    ] == "0,1,0,0,1,2,3,1,-1,1,-1,0,1,2,3"


def test_provenance_is_kept_in_tables(tmp_path):
    s = labelled("3d-simplex")
    parts = (s.dimension, s.counts, s.flags, s.arrays, None)
    export(dualize.Skeleton(*parts, {"input": "rooms.txt"}), tmp_path / "foam", "tables")
    assert read_export(tmp_path / "foam", "tables").provenance == {"input": "rooms.txt"}


def spoil(name, change):
    def do(folder):
        file = folder / name
        file.write_text(change(file.read_text()))

    return do


DAMAGE = {
    "no about": (lambda folder: (folder / "about.json").unlink(), "there is no about.json"),
    "about no JSON": (spoil("about.json", lambda s: s[:-10]), "this is no JSON.*about.json"),
    "other JSON": (spoil("about.json", lambda s: "{}"), "does not describe tables of a skeleton"),
    "file missing": (lambda folder: (folder / "links.csv").unlink(), "the file is missing.*links.csv"),
    "header": (spoil("edges.csv", lambda s: s.replace("twist", "turn", 1)), "not those.*edges.csv, line 1"),
    "word": (spoil("links.csv", lambda s: s.replace("\n2,", "\ntwo,")), "'two' is no integer.*line 4"),
    "fraction": (spoil("links.csv", lambda s: s.replace("\n2,", "\n2.5,")), "'2.5' is no integer.*line 4"),
    "short line": (spoil("nodes.csv", lambda s: s.rsplit(",", 1)[0] + "\n"), "has 14 entries.*header 15"),
    "row missing": (
        spoil("wedges.csv", lambda s: s.replace(s.splitlines()[3] + "\n", "")),
        "a row is missing before vertex 0, wedge 3.*wedges.csv",
    ),
    "row twice": (spoil("faces.csv", lambda s: s + s.splitlines()[-1] + "\n"), "a row occurs twice: face 9"),
    "row gone": (
        spoil("nodes.csv", lambda s: s.replace(s.splitlines()[3] + "\n", "")),
        "a row is missing before node 3",
    ),
    "step gone": (
        spoil("face_edges.csv", lambda s: s.replace(s.splitlines()[2] + "\n", "")),
        "a row is missing before face 0, step 2",
    ),
}  # fmt: skip


@pytest.mark.parametrize("change, message", DAMAGE.values(), ids=DAMAGE.keys())
def test_damaged_tables_are_refused(change, message, tmp_path):
    export(labelled("3d-side-3"), tmp_path / "foam", "tables")
    change(tmp_path / "foam")
    with pytest.raises(InputError, match=message):
        read_export(tmp_path / "foam", "tables")


def test_tables_that_contradict_each_other_are_refused(tmp_path):
    export(labelled("3d-side-3"), tmp_path / "foam", "tables")
    spoil("wedges.csv", lambda s: s.replace(",1\n", ",-1\n", 1))(tmp_path / "foam")
    with pytest.raises(SkeletonError, match="wedges/direction"):
        read_export(tmp_path / "foam", "tables")


# --------------------------------------------------------------------------------------------------
# Matrices


@every
def test_boundary_maps_multiply_to_zero(make, tmp_path):
    skeleton = make()
    export(skeleton, tmp_path / "maps", "matrices")
    d1, d2 = read_export(tmp_path / "maps", "matrices")
    c = skeleton.counts
    edges = c["edges_internal"] + c["edges_external"] + c["links"]
    assert d1.shape == (c["vertices"] + c["nodes"], edges)
    assert d2.shape == (edges, c["faces_internal"] + c["faces_external"])
    assert abs(d1 @ d2).sum() == 0
    assert (d1.sum(axis=0) == 0).all()


@pytest.mark.parametrize("name", ["rp3_11", "t3_15", "torus_7", "s2_x_s1_10", "cp2_9"])
def test_first_betti_number_from_the_matrix_files(name, tmp_path):
    """Ranks by numpy, from the files alone; the group of a closed manifold is that of its dual
    two-complex."""
    export(build(Triangulation.from_facets(CATALOGUE[name].facets)), tmp_path / "maps", "matrices")
    d1, d2 = (mmread(tmp_path / "maps" / f"{d}.mtx").toarray() for d in ("d1", "d2"))
    b1 = d1.shape[1] - np.linalg.matrix_rank(d1) - np.linalg.matrix_rank(d2)
    homology = CATALOGUE[name].homology[1]
    free = sum(int(x[2:] or 1) if x.startswith("Z^") else x == "Z" for x in homology.split("+"))
    assert b1 == free


def test_matrices_say_what_their_rows_and_columns_are(tmp_path):
    export(labelled("4d-side-3"), tmp_path / "maps", "matrices")
    about = json.loads((tmp_path / "maps" / "about.json").read_text())["matrices"]
    assert about["d1.mtx"]["rows"] == {"vertices": [0, 3], "nodes": [3, 12]}
    assert about["d1.mtx"]["columns"] == about["d2.mtx"]["rows"]
    assert about["d2.mtx"]["rows"] == {"edges_internal": [0, 3], "edges_external": [3, 12], "links": [12, 30]}
    assert about["d2.mtx"]["columns"] == {"faces_internal": [0, 1], "faces_external": [1, 19]}
    assert "3 vertices, then 9 nodes" in (tmp_path / "maps" / "d1.mtx").read_text().splitlines()[1]


@pytest.mark.parametrize("change, message", [
    (lambda folder: (folder / "d2.mtx").unlink(), "the file is missing.*d2.mtx"),
    (spoil("d1.mtx", lambda s: "no matrix\n"), "no Matrix Market file.*d1.mtx"),
    (lambda folder: shutil.copy(folder / "d1.mtx", folder / "d2.mtx"), "d1 has 10 columns, and d2 5 rows"),
], ids=["missing", "damaged", "shapes"])  # fmt: skip
def test_damaged_matrices_are_refused(change, message, tmp_path):
    export(labelled("3d-simplex"), tmp_path / "maps", "matrices")
    change(tmp_path / "maps")
    with pytest.raises(InputError, match=message):
        read_export(tmp_path / "maps", "matrices")


# --------------------------------------------------------------------------------------------------
# Graphs


@pytest.mark.parametrize("which", ["dual", "boundary"])
@pytest.mark.parametrize("kind", ["graphml", "node-link"])
@every
def test_graphs_come_back_equal(make, kind, which, tmp_path):
    skeleton = make()
    export(skeleton, tmp_path / "graph", kind, graph=which)
    graph = skeleton.dual_graph() if which == "dual" else skeleton.boundary_graph()
    assert graphs_equal(read_export(tmp_path / "graph", kind), graph)


def read_plainly(path, kind):
    if kind == "graphml":
        return nx.read_graphml(path, force_multigraph=True)
    return nx.node_link_graph(json.loads(path.read_text()), edges="edges")


@pytest.mark.parametrize("kind", ["graphml", "node-link"])
def test_boundary_graph_of_a_4_simplex_is_complete(kind, tmp_path):
    """Five tetrahedra that meet pairwise: K5, as networkx reads and knows it."""
    export(labelled("4d-simplex"), tmp_path / "graph", kind, graph="boundary")
    graph = nx.Graph(read_plainly(tmp_path / "graph", kind))
    assert nx.is_isomorphic(graph, nx.complete_graph(5))


@pytest.mark.parametrize("kind", ["graphml", "node-link"])
def test_parallel_links_are_kept(kind, tmp_path):
    """The dipole: two nodes and four links (common practice)."""
    export(glued(sp.melon(4, 4)), tmp_path / "graph", kind, graph="boundary")
    graph = read_plainly(tmp_path / "graph", kind)
    assert (graph.number_of_nodes(), graph.number_of_edges()) == (2, 4)


def test_dot_has_a_line_for_every_cell_and_quotes_words(tmp_path):
    facets = [['a"b', "c\\d", "e", "f"]]
    export(build(Triangulation.from_facets(facets)), tmp_path / "g.dot", "dot", graph="boundary")
    lines = (tmp_path / "g.dot").read_text().splitlines()
    assert lines[0] == "digraph boundary {" and lines[-1] == "}"
    assert sum("->" in line for line in lines) == 6
    assert lines[1] == r'  n0 [shape=box, label="n0\nc\\d e f"];'
    assert lines[4] == r'  n3 [shape=box, label="n3\na\"b c\\d e"];'


@pytest.mark.skipif(not shutil.which("dot"), reason="there is no program that reads DOT")
def test_dot_is_read_by_its_program(tmp_path):
    export(labelled("4d-mixed"), tmp_path / "g.dot", "dot")
    subprocess.run(["dot", "-Tcanon", "-o", "/dev/null", tmp_path / "g.dot"], check=True)


@pytest.mark.parametrize("kind, data, message", [
    ("graphml", "no XML", "no GraphML of a foam"),
    ("graphml", "<graphml/>", "no GraphML of a foam"),
    ("node-link", "[]", "no node-link JSON of a foam"),
    ("node-link", '{"graph": {}, "nodes": [{"id": "x1"}], "edges": []}', "'x1' is no name"),
], ids=["text", "empty", "list", "name"])  # fmt: skip
def test_damaged_graphs_are_refused(kind, data, message, tmp_path):
    (tmp_path / "graph").write_text(data)
    with pytest.raises(InputError, match=message):
        read_export(tmp_path / "graph", kind)


# --------------------------------------------------------------------------------------------------
# Meshes


def grid(shape):
    """A grid of path simplices with the coordinates of its corners."""
    points = np.stack(np.meshgrid(*(np.arange(n + 1) for n in shape), indexing="ij"), -1).reshape(
        -1, len(shape)
    )
    return build(Triangulation.from_facets(sp.kuhn_grid(shape), coordinates=points.astype(float)))


def quads(mesh):
    return mesh.points[mesh.cells_dict["quad"]]


@pytest.mark.parametrize("suffix", [".vtk", ".vtu"])
def test_wedges_of_a_plane_grid_cover_it_once(suffix, tmp_path):
    """The dual cells of a triangulated rectangle have its area; all turn the same way where it is
    oriented."""
    export(grid((3, 2)), tmp_path / f"mesh{suffix}", "vtk")
    corners = quads(meshio.read(tmp_path / f"mesh{suffix}"))
    area = np.cross(corners[:, 2] - corners[:, 0], corners[:, 3] - corners[:, 1])[:, 2] / 2
    assert area.sum() == pytest.approx(-6) or area.sum() == pytest.approx(6)
    assert abs(area).sum() == pytest.approx(6)


@pytest.mark.parametrize("shape", [(2, 1, 2), (1, 1, 2, 1)], ids=["3d", "4d"])
def test_wedges_of_a_face_follow_each_other(shape, tmp_path):
    """From where a face enters a simplex through its centre to where it leaves: closed around an internal
    face."""
    skeleton = grid(shape)
    export(skeleton, tmp_path / "mesh.vtu", "vtk")
    mesh = meshio.read(tmp_path / "mesh.vtu")
    corners, face = quads(mesh), mesh.cell_data_dict["face"]["quad"]
    for f in range(skeleton.counts["faces_internal"]):
        ridge, enter, _, leave = np.moveaxis(corners[face == f], 1, 0)
        assert np.allclose(ridge, ridge[0])
        assert np.allclose(enter.sum(axis=0), leave.sum(axis=0))
    lines, edge = mesh.points[mesh.cells_dict["line"]], mesh.cell_data_dict["edge"]["line"]
    for e in range(skeleton.counts["edges_internal"]):
        one, two = lines[edge == e]
        assert np.allclose(one[1], two[0]) != np.allclose(two[1], one[0])


def test_vtk_holds_numbers_and_orientations(tmp_path):
    skeleton = grid((1, 1, 1))
    export(skeleton, tmp_path / "mesh.vtk", "vtk")
    data = meshio.read(tmp_path / "mesh.vtk").cell_data_dict
    assert data["edge"]["line"].tolist() == skeleton["vertices/edge"].ravel().tolist()
    assert data["direction"]["line"].tolist() == skeleton["vertices/leaves"].ravel().tolist()
    assert data["face"]["quad"].tolist() == skeleton["wedges/face"].ravel().tolist()
    assert data["direction"]["quad"].tolist() == skeleton["wedges/direction"].ravel().tolist()
    assert data["orientation"]["line"].tolist() == np.repeat(skeleton["vertices/orientation"], 4).tolist()
    assert set(data["face"]["line"].tolist()) == {-1}


def test_periodic_charts_stay_whole(tmp_path):
    """The longest line is a third of sqrt(7/8), the way from a path simplex's first corner to its centre.

    None goes across the period.
    """
    points = np.stack(np.meshgrid(*[np.arange(3)] * 3, indexing="ij"), -1).reshape(-1, 3).astype(float)
    where = Coordinates(point=points, period=np.full(3, 3.0))
    t = Triangulation.from_facets(sp.kuhn_grid((3, 3, 3), periodic=True), coordinates=where)
    export(build(t), tmp_path / "mesh.vtk", "vtk")
    mesh = meshio.read(tmp_path / "mesh.vtk")
    ends = mesh.points[mesh.cells_dict["line"]]
    assert np.linalg.norm(ends[:, 1] - ends[:, 0], axis=1).max() == pytest.approx(np.sqrt(7 / 8) / 3)


def test_charts_of_a_gluing_table_are_drawn_as_given(tmp_path):
    export(build(corner_charts()), tmp_path / "mesh.vtk", "vtk")
    corners = quads(meshio.read(tmp_path / "mesh.vtk"))
    area = np.cross(corners[:, 2] - corners[:, 0], corners[:, 3] - corners[:, 1])[:, 2] / 2
    assert abs(area).sum() == pytest.approx(1)


def test_axes_and_projection_agree(tmp_path):
    skeleton = grid((1, 1, 1, 1))
    export(skeleton, tmp_path / "axes.vtk", "vtk", axes=[3, 0, 2])
    export(skeleton, tmp_path / "turn.vtk", "vtk", projection=np.eye(4)[[3, 0, 2]])
    export(skeleton, tmp_path / "first.vtk", "vtk")
    a, b, c = (meshio.read(tmp_path / f"{name}.vtk").points for name in ("axes", "turn", "first"))
    assert np.array_equal(a, b) and np.array_equal(a[:, [1, 2]], c[:, [0, 2]]) and not np.array_equal(a, c)


@pytest.mark.parametrize("make, options, message", [
    (lambda: labelled("3d-simplex"), {}, "the skeleton has no coordinates"),
    (lambda: grid((1, 1)), {"axes": [0, 2]}, "there are no such axes: 0, 2"),
    (lambda: grid((1, 1)), {"axes": [0, 0]}, "there are no such axes"),
    (lambda: grid((1, 1)), {"projection": np.eye(3)}, "the projection has the shape"),
    (lambda: grid((1, 1)), {"projection": [["a"]]}, "the projection is no table of numbers"),
    (lambda: grid((1, 1)), {"axes": [0], "projection": np.eye(2)}, "both given"),
], ids=["none", "range", "twice", "shape", "words", "both"])  # fmt: skip
def test_meshes_that_cannot_be_made_are_refused(make, options, message, tmp_path):
    with pytest.raises(InputError, match=message):
        export(make(), tmp_path / "mesh.vtk", "vtk", **options)
    assert not list(tmp_path.iterdir())


def test_points_of_an_unlabelled_complex_are_needed(tmp_path):
    table = sp.kuhn_torus((1, 1))
    t = Triangulation.from_gluings(table.across, table.carry, coordinates=Coordinates(point=np.zeros((1, 2))))
    with pytest.raises(InputError, match="does not say which corner is which point"):
        export(build(t), tmp_path / "mesh.vtk", "vtk")
    export(build(t, points=True), tmp_path / "mesh.vtk", "vtk")


# --------------------------------------------------------------------------------------------------
# Files


@pytest.mark.parametrize("kind", [k for k in KINDS if k != "vtk"])
def test_nothing_is_overwritten_without_force(kind, tmp_path):
    export(labelled("3d-simplex"), tmp_path / "out", kind)
    before = {p: p.read_bytes() for p in tmp_path.rglob("*") if p.is_file()}
    with pytest.raises(InputError, match="exists already"):
        export(labelled("4d-simplex"), tmp_path / "out", kind)
    assert before == {p: p.read_bytes() for p in tmp_path.rglob("*") if p.is_file()}
    export(labelled("4d-simplex"), tmp_path / "out", kind, force=True)
    assert before != {p: p.read_bytes() for p in tmp_path.rglob("*") if p.is_file()}
    assert [p.name for p in tmp_path.iterdir()] == ["out"]


@pytest.mark.parametrize("kind", ["tables", "matrices"])
def test_a_directory_that_holds_something_else_is_never_replaced(kind, tmp_path):
    export(labelled("3d-simplex"), tmp_path / "out", kind)
    (tmp_path / "out" / "thesis.tex").write_text("x")
    with pytest.raises(InputError, match=r"holds something else: thesis\.tex"):
        export(labelled("3d-simplex"), tmp_path / "out", kind, force=True)
    assert (tmp_path / "out" / "thesis.tex").read_text() == "x"


def test_a_file_is_not_replaced_by_a_directory(tmp_path):
    (tmp_path / "out").write_text("x")
    with pytest.raises(InputError, match="this is no directory"):
        export(labelled("3d-simplex"), tmp_path / "out", "tables", force=True)
    assert (tmp_path / "out").read_text() == "x"


def test_a_failure_in_the_middle_leaves_no_trace(tmp_path, monkeypatch):
    def fail(skeleton, name, tables):
        yield b"half a file"
        raise MemoryError

    export(labelled("3d-simplex"), tmp_path / "old", "tables")
    monkeypatch.setattr(tables_module, "_lines", fail)
    for name in ("new", "old"):
        with pytest.raises(MemoryError):
            export(labelled("4d-simplex"), tmp_path / name, "tables", force=True)
    assert [p.name for p in tmp_path.iterdir()] == ["old"]
    assert read_export(tmp_path / "old", "tables").dimension == 3


@pytest.mark.parametrize("kind, path, options, message", [
    ("pictures", "x", {}, "there is no export as 'pictures'"),
    ("dot", "x", {"graph": "primal"}, "there is no 'primal' graph"),
    ("dot", "x", {"axes": [0]}, "dot has no coordinates"),
    ("tables", "x", {"graph": "boundary"}, "tables is no graph, so there is none to choose"),
    ("vtk", "x.vtk", {"graph": "dual"}, "vtk is no graph, so there is none to choose"),
    ("tables", "-", {}, "standard output cannot be"),
    ("tables", "no/such/place", {}, "there is no such directory"),
    ("vtk", "x.png", {}, "ends with .vtk or .vtu"),
], ids=["kind", "graph", "axes", "no-graph", "mesh", "stdout", "parent", "suffix"])  # fmt: skip
def test_wrong_requests_are_refused(kind, path, options, message, tmp_path):
    with pytest.raises(InputError, match=message):
        export(grid((1, 1)), path if path == "-" else tmp_path / path, kind, **options)
    assert not list(tmp_path.iterdir())


@pytest.mark.parametrize("kind", ["dot", "vtk"])
def test_what_is_not_read_back_says_so(kind, tmp_path):
    with pytest.raises(InputError, match="is not read back"):
        read_export(tmp_path / "x", kind)


@pytest.mark.parametrize("kind", KINDS)
def test_same_skeleton_gives_same_bytes(kind, tmp_path):
    for name in ("a", "b"):
        export(grid((1, 1, 2)), tmp_path / f"{name}.vtk", kind)
    files = [sorted((tmp_path / f"{n}.vtk").rglob("*.*")) or [tmp_path / f"{n}.vtk"] for n in ("a", "b")]
    assert [p.read_bytes() for p in files[0]] == [p.read_bytes() for p in files[1]]


# --------------------------------------------------------------------------------------------------
# The command line


@pytest.fixture
def foam_file(tmp_path):
    labelled("4d-side-3").write(tmp_path / "foam.json")
    return tmp_path / "foam.json"


def test_export_on_the_command_line(foam_file, tmp_path):
    done = run("export", foam_file, "--as", "tables", "-o", tmp_path / "out")
    assert (done.returncode, done.stdout, done.stderr) == (0, b"", b"")
    assert read_export(tmp_path / "out", "tables") == labelled("4d-side-3")


def test_graphs_go_to_standard_output_and_the_losses_to_standard_error(foam_file):
    done = run("export", foam_file, "--as", "node-link", "--of", "boundary", "-o", "-")
    assert json.loads(done.stdout)["graph"]["kind"] == "boundary graph"
    assert done.stderr.startswith(b"note: left out the order of the edges around a face")
    assert run("export", foam_file, "--as", "dot", "-o", "-", "-q").stderr == b""


def test_axes_and_projection_on_the_command_line(tmp_path):
    grid((1, 1, 1, 1)).write(tmp_path / "foam.h5")
    np.savetxt(tmp_path / "turn.txt", np.eye(4)[[3, 0, 2]])
    for name, options in (("a", ["--axes", "3,0,2"]), ("b", ["--projection", tmp_path / "turn.txt"])):
        out = ["-o", tmp_path / f"{name}.vtu"]
        assert run("export", tmp_path / "foam.h5", "--as", "vtk", *out, *options).returncode == 0
    assert (tmp_path / "a.vtu").read_bytes() == (tmp_path / "b.vtu").read_bytes()


@pytest.mark.parametrize("arguments, message", [
    (["--as", "poster", "-o", "x"], "there is no export as 'poster'"),
    (["--as", "vtk", "-o", "x.vtk"], "the skeleton has no coordinates"),
    (["--as", "vtk", "-o", "x.vtk", "--axes", "a"], "--axes are numbers"),
    (["--as", "vtk", "-o", "x.vtk", "--projection", "none.txt"], "the projection cannot be read"),
], ids=["kind", "coordinates", "axes", "projection"])  # fmt: skip
def test_errors_on_the_command_line_are_one_sentence(arguments, message, foam_file, tmp_path):
    done = run("export", foam_file, *arguments, cwd=tmp_path)
    assert (
        done.returncode == 2
        and done.stderr.decode().startswith("error: ")
        and b"Traceback" not in done.stderr
    )
    assert message in done.stderr.decode().splitlines()[0]
    assert [p.name for p in tmp_path.iterdir()] == ["foam.json"]


def test_a_triangulation_is_not_exported(tmp_path):
    (tmp_path / "t.txt").write_text("0 1 2 3\n")
    done = run("export", tmp_path / "t.txt", "--as", "dot", "-o", "-")
    assert done.returncode == 2 and b"hint: build its skeleton first" in done.stderr


# --------------------------------------------------------------------------------------------------
# A reader in C


@pytest.fixture(scope="module")
def c_reader(tmp_path_factory):
    compiler = shutil.which("cc") or shutil.which("gcc") or shutil.which("clang")
    if not compiler:
        pytest.skip("there is no C compiler")
    program = tmp_path_factory.mktemp("c") / "read_foam"
    flags = ["-std=c11", "-Wall", "-Wextra", "-pedantic", "-Werror"]
    subprocess.run([compiler, *flags, "-o", program, SCRIPTS / "read_foam.c"], check=True)
    return program


@every
def test_c_reader_counts_and_finds_no_violation(make, c_reader, tmp_path):
    skeleton = make()
    export(skeleton, tmp_path / "foam", "tables")
    done = subprocess.run([c_reader, tmp_path / "foam"], capture_output=True, text=True)
    c = skeleton.counts
    assert done.stdout.splitlines() == [
        f"vertices {c['vertices']}",
        f"edges {c['edges_internal']} + {c['edges_external']}",
        f"faces {c['faces_internal']} + {c['faces_external']}",
        f"nodes {c['nodes']}",
        f"links {c['links']}",
        f"longest face {np.diff(skeleton['faces/edge_offsets']).max()} edges",
        "d1 d2 = 0 holds",
    ]
    assert done.returncode == 0


@pytest.mark.parametrize("name, old, new, status", [
    ("face_edges.csv", "\n1,0,6,1,0\n", "\n1,0,6,-1,0\n", 1),
    ("edges.csv", "\n0,", "\nzero,", 2),
    ("face_edges.csv", "edge_sign", "sign", 2),
    ("face_edges.csv", "\n1,0,6,1,0\n", "\n1,0,99,1,0\n", 2),
], ids=["sign", "word", "column", "range"])  # fmt: skip
def test_c_reader_notices_damage(name, old, new, status, c_reader, tmp_path):
    export(labelled("4d-side-3"), tmp_path / "foam", "tables")
    text = (tmp_path / "foam" / name).read_text()
    assert old in text
    (tmp_path / "foam" / name).write_text(text.replace(old, new, 1))
    done = subprocess.run([c_reader, tmp_path / "foam"], capture_output=True, text=True)
    assert done.returncode == status, done
