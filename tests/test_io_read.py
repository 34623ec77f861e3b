"""Reading: standard input, streams, coordinates, notes, what is said about a file."""

import gzip
import hashlib
import io
import json
from pathlib import Path

import meshio
import numpy as np
import pytest
import specimens as sp
from hypothesis import given
from hypothesis import strategies as st

from dualize import InputError, Triangulation, __version__, build, read
from dualize.formats import boxes, decode, encode, open_any
from dualize.kernels import mode

T = Triangulation.from_facets([[0, 1, 2, 3], [1, 2, 3, 4]])
TETRAHEDRA = [[0, 1, 2, 3], [1, 2, 3, 4]]
POINTS = np.array([[0, 0, 0], [1, 0, 0], [0, 1, 0], [0, 0, 1], [1, 1, 1.5]])


# --------------------------------------------------------------------------------------------------
# Streams and names

STREAMS = {
    "text": (encode(T, "text"), "text"),
    "text-with-mark": (b"\xef\xbb\xbf" + encode(T, "text"), "text"),
    "json-list": (b" [[0, 1, 2, 3], [1, 2, 3, 4]]", "json"),
    "json": (encode(T, "json"), "json"),
    "gluing-table": (encode(T, "gluing"), "json"),
    "npy": (encode(T, "npy"), "npy"),
    "npz": (encode(T, "npz"), "npz"),
    "hdf5": (encode(T, "hdf5"), "hdf5"),
    "packed-text": (gzip.compress(encode(T, "text")), "text"),
    "packed-json": (gzip.compress(encode(T, "json")), "json"),
    "packed-in-two-members": (gzip.compress(b"0 1 2 3\n") + gzip.compress(b"1 2 3 4\n") + bytes(8), "text"),
}


@pytest.mark.parametrize(("data", "kind"), STREAMS.values(), ids=STREAMS.keys())
def test_streams_are_known_by_their_first_bytes(data, kind):
    opened = open_any(io.BytesIO(data))
    assert (opened.content, opened.kind, opened.name) == (T, kind, "-")
    assert opened.sha256 == hashlib.sha256(data).hexdigest()


def test_standard_input(monkeypatch):
    class Standard:
        buffer = io.BytesIO(b"0 1 2\n")

    monkeypatch.setattr("sys.stdin", Standard)
    assert read("-").dimension == 2


@pytest.mark.parametrize("suffix", [".txt", ".json", ".npy", ".npz", ".h5", ".txt.gz"])
def test_what_is_said_about_a_file(tmp_path, suffix):
    path = tmp_path / f"My Region{suffix.upper() if suffix == '.txt' else suffix}"
    T.write(path)
    opened = open_any(path)
    assert opened.content == T
    assert opened.name == path.name
    assert opened.sha256 == hashlib.sha256(path.read_bytes()).hexdigest()


def test_provenance_has_neither_date_nor_path(tmp_path):
    T.write(tmp_path / "a.txt")
    said = open_any(tmp_path / "a.txt").provenance()
    assert said == {
        "program": "dualize",
        "program_version": __version__,
        "input": "a.txt",
        "input_sha256": hashlib.sha256(b"0 1 2 3\n1 2 3 4\n").hexdigest(),
        "read_as": "facet text, labels are integers",
    }


@pytest.mark.parametrize("kind", ["json", ".json", "JSON"])
def test_a_kind_by_name_or_suffix(kind):
    assert decode(encode(T, "json"), kind) == T


def test_shipped_meshes_are_read():
    folder = Path(__file__).parent.parent / "meshes"
    paths = [p for p in folder.iterdir() if p.suffix != ".md"]
    assert len(paths) >= 12
    for path in paths:
        assert len(read(path)) >= 1, path


# --------------------------------------------------------------------------------------------------
# JSON


def from_json(tree):
    return decode(json.dumps(tree).encode(), "json")


def test_coordinates_by_row():
    t = from_json({"facets": TETRAHEDRA, "coordinates": POINTS.tolist()})
    assert np.array_equal(t.coordinates.point, POINTS)


def test_coordinates_by_label_become_one_chart_where_labels_number_rows():
    rows = {str(i): POINTS[i].tolist() for i in (3, 1, 4, 0, 2)}
    t = from_json({"facets": TETRAHEDRA, "coordinates": rows})
    assert np.array_equal(t.coordinates.point, POINTS)
    assert t.coordinates.corner is None


@pytest.mark.parametrize("names", ["abcde", ["7", "-3", "100", "5", "12"]], ids=["words", "sparse"])
def test_coordinates_by_label_become_charts_elsewhere(names):
    label = (lambda i: names[i]) if names == "abcde" else (lambda i: int(names[i]))
    facets = [[label(i) for i in row] for row in ([3, 1, 0, 2], [1, 2, 3, 4])]
    t = from_json({"facets": facets, "coordinates": {names[i]: POINTS[i].tolist() for i in range(5)}})
    assert t.coordinates.point is None
    for row, chart in zip(t.named(t.corners), t.coordinates.corner, strict=True):
        for name, place in zip(row, chart, strict=True):
            assert np.array_equal(place, POINTS[list(names).index(str(name))])


def test_coordinates_as_point_and_period():
    t = from_json({"facets": TETRAHEDRA, "coordinates": {"point": POINTS.tolist(), "period": [2, 0, 0]}})
    assert np.array_equal(t.coordinates.point, POINTS)
    assert t.coordinates.period.tolist() == [2.0, 0.0, 0.0]


def test_charts_follow_the_labels_as_they_are_written():
    chart = [[[3.0], [1.0], [0.0], [2.0]]]
    t = from_json({"facets": [[3, 1, 0, 2]], "coordinates": {"corner": chart}})
    assert t.coordinates.corner.tolist() == [[[0.0], [1.0], [2.0], [3.0]]]


def test_gluing_table_with_everything():
    t = from_json(
        {
            "across": [[1, 1, 1], [0, 0, 0]],
            "carry": [[[0, 1, 2]] * 3] * 2,
            "written": [1, -1],
            "corners": [["a", "b", "c"]] * 2,
            "coordinates": {"corner": [[[0.0], [1.0], [2.0]]] * 2},
        }
    )
    assert t.across.tolist() == [[1, 1, 1], [0, 0, 0]]
    assert t.written.tolist() == [1, -1]
    assert t.corner_names == ("a", "b", "c")
    assert t.coordinates.corner.shape == (2, 3, 1)
    assert not t.matched


def test_rows_of_boundary_slots_are_not_read():
    t = from_json({"across": [[-1, -1, -1]], "carry": [[[9, 9, 9], [-1, -1, -1], [0, 0, 0]]]})
    assert t.carry.tolist() == [[[-1] * 3] * 3]


def test_entries_that_are_not_read_are_noted(tmp_path):
    (tmp_path / "a.json").write_text(json.dumps({"facets": TETRAHEDRA, "coordinate": [[0.0]], "title": "x"}))
    notes = []
    open_any(tmp_path / "a.json", notes=notes.append)
    assert notes == ["ignored coordinate, title: no entries of a triangulation"]


def test_words_in_json_may_be_anything_printable():
    rows = [["a b", "1,2", "#", "1.5"]]
    t = from_json(rows)
    assert sorted(t.corner_names) == sorted(rows[0])
    assert decode(encode(t, "json"), "json") == t


# --------------------------------------------------------------------------------------------------
# Boxes of integers in large JSON text

numbers = st.integers(-(2**63), 2**63 - 1) | st.integers(-9, 9)
values = st.recursive(
    st.none() | st.booleans() | numbers | st.floats(allow_nan=False) | st.text(max_size=5),
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(st.text(max_size=4), inner, max_size=4),
    max_leaves=12,
)
ROWS = st.integers(1, 3).flatmap(
    lambda depth: st.sampled_from(
        [np.arange(300).tolist(), np.arange(-150, 150).reshape(60, 5).tolist(), [[[7, 2**63 - 1]] * 5] * 20]
    )
)
LISTS = st.sampled_from(
    [
        [1] * 99 + [2.5],
        [[1, 2]] * 99 + [[3]],
        [True] * 99,
        [None] * 99,
        [[]] * 99,
        [],
        [2**63] * 99,
        [[1], 1] * 50,
    ]
)
trees = st.dictionaries(st.text(alphabet='ab:[]{}"\\, 01', max_size=6), ROWS | LISTS | values, max_size=5)


def plain(value):
    if isinstance(value, np.ndarray):
        return value.tolist()
    if isinstance(value, dict):
        return {key: plain(inner) for key, inner in value.items()}
    return value


@pytest.fixture
def all_text_is_large(monkeypatch):
    monkeypatch.setattr(boxes, "LARGE", 0)


@pytest.mark.usefixtures("all_text_is_large")
@given(trees | ROWS | LISTS, st.sampled_from([None, 1]))
def test_boxes_read_what_the_library_reads(tree, indent):
    import orjson

    data = json.dumps(tree, indent=indent).encode()
    with mode("interpreted"):
        assert plain(boxes.loads(data)) == orjson.loads(data)


@pytest.mark.usefixtures("all_text_is_large")
@pytest.mark.parametrize("kernels", ["interpreted", "compiled"])
def test_boxes_become_arrays(kernels):
    tree = {"a": {"b": [[1, 2, 3]] * 40}, "c": list(range(100)), "d": "x"}
    with mode(kernels):
        found = boxes.loads(json.dumps(tree).encode())
    assert isinstance(found["a"]["b"], np.ndarray)
    assert isinstance(found["c"], np.ndarray)
    assert plain(found) == tree


@pytest.mark.usefixtures("all_text_is_large")
def test_what_looks_like_a_box_inside_a_string_stays_a_string():
    tree = {"a": "see: " + json.dumps(list(range(200))), "b": list(range(200))}
    with mode("interpreted"):
        assert plain(boxes.loads(json.dumps(tree).encode())) == tree


def test_a_large_skeleton_comes_back_through_json():
    s = build(Triangulation.from_facets(sp.chain(4, 5000)))
    data = encode(s, "json")
    assert len(data) > boxes.LARGE
    assert decode(data, "json") == s


# --------------------------------------------------------------------------------------------------
# Arrays


@pytest.mark.parametrize("dtype", ["int8", "uint8", "int16", ">i4", "uint64", "<i8"])
def test_npy_of_any_integers(tmp_path, dtype):
    np.save(tmp_path / "a.npy", np.array(TETRAHEDRA, dtype=dtype))
    assert read(tmp_path / "a.npy") == T


def test_npy_in_the_order_of_columns(tmp_path):
    np.save(tmp_path / "a.npy", np.asfortranarray(TETRAHEDRA))
    assert read(tmp_path / "a.npy") == T


def test_npy_of_words(tmp_path):
    np.save(tmp_path / "a.npy", np.array([["a", "b", "c"]]))
    assert read(tmp_path / "a.npy").corner_names == ("a", "b", "c")


def test_npz_with_one_table_under_any_name(tmp_path):
    np.savez_compressed(tmp_path / "a.npz", cells=np.array(TETRAHEDRA), weights=np.zeros(3))
    assert read(tmp_path / "a.npz") == T


def test_hdf5_with_one_table_in_a_group(tmp_path):
    import h5py

    with h5py.File(tmp_path / "a.h5", "w") as file:
        file["mesh/cells"] = np.array(TETRAHEDRA)
        file["mesh/points"] = POINTS
    assert read(tmp_path / "a.h5") == T
    assert read(tmp_path / "a.h5", dataset="/mesh/cells") == T


@pytest.mark.parametrize("suffix", [".npz", ".h5"])
def test_arrays_with_coordinates_and_names(tmp_path, suffix):
    t = Triangulation.from_facets([["a", "b", "c"]])
    t.write(tmp_path / f"a{suffix}")
    assert read(tmp_path / f"a{suffix}") == t


# --------------------------------------------------------------------------------------------------
# Meshes

WRITABLE = {
    ".vtk": None,
    ".vtu": None,
    ".msh": "gmsh",
    ".mesh": "medit",
    ".xdmf": None,
    ".inp": None,
    ".avs": None,
    ".med": None,
    ".su2": None,
    ".mdpa": None,
    ".f3grid": None,
    ".node": None,
    ".hmf": None,
    ".h5m": None,
    ".xml": None,
    ".bdf": None,
    ".vol": None,
}


@pytest.mark.parametrize("suffix", WRITABLE)
def test_tetrahedra_of_mesh_formats(tmp_path, suffix, capfd):
    mesh = meshio.Mesh(POINTS, [("tetra", np.array(TETRAHEDRA))])
    path = tmp_path / f"a{suffix}"
    mesh.write(path, file_format=WRITABLE[suffix])
    capfd.readouterr()
    t = read(path)
    assert t.across.tolist() == T.across.tolist()
    assert np.allclose(t.coordinates.point, POINTS)
    assert capfd.readouterr() == ("", "")


@pytest.mark.parametrize("suffix", [".vtk", ".vtu", ".off", ".ply", ".obj", ".stl"])
def test_triangles_of_mesh_formats(tmp_path, suffix):
    mesh = meshio.Mesh(POINTS[:4], [("triangle", np.array(sp.sphere(2)))])
    mesh.write(tmp_path / f"a{suffix}")
    t = read(tmp_path / f"a{suffix}")
    assert (t.dimension, len(t)) == (2, 4)
    assert (t.across >= 0).all()
    assert t.coordinates.point.shape == (4, 3)


@pytest.mark.parametrize("suffix", [".vtk", ".vtu", ".msh", ".mesh"])
def test_meshes_on_streams(tmp_path, suffix):
    mesh = meshio.Mesh(POINTS, [("tetra", np.array(TETRAHEDRA))])
    mesh.write(tmp_path / f"a{suffix}", file_format=WRITABLE[suffix])
    with open(tmp_path / f"a{suffix}", "rb") as file:
        opened = open_any(file)
    assert opened.kind == "mesh"
    assert opened.content.across.tolist() == T.across.tolist()


def test_a_mesh_stream_by_its_suffix(tmp_path):
    meshio.Mesh(POINTS, [("tetra", np.array(TETRAHEDRA))]).write(tmp_path / "a.inp")
    with open(tmp_path / "a.inp", "rb") as file:
        assert len(read(file, kind="inp")) == 2
    with open(tmp_path / "a.inp", "rb") as file, pytest.raises(InputError, match="does not say its format"):
        read(file, kind="mesh")


def test_lower_cells_are_ignored_with_a_note(tmp_path):
    cells = [
        ("triangle", np.array([[0, 1, 2], [1, 2, 3]])),
        ("line", np.array([[0, 1]])),
        ("tetra", np.array(TETRAHEDRA[:1])),
        ("tetra", np.array(TETRAHEDRA[1:])),
        ("triangle", np.array([[2, 3, 4]])),
    ]
    meshio.Mesh(POINTS, cells).write(tmp_path / "a.vtu")
    notes = []
    opened = open_any(tmp_path / "a.vtu", notes=notes.append)
    assert len(opened.content) == 2
    assert notes == ["ignored 3 triangle cells", "ignored 1 line cell"]


CELLS = {
    "hexahedron": ([("hexahedron", [list(range(8))])], "other cells than tetrahedra: hexahedron"),
    "mixed": (
        [("tetra", [[0, 1, 2, 3]]), ("wedge", [list(range(6))])],
        "other cells than tetrahedra: wedge",
    ),
    "second-order": ([("tetra10", [list(range(10))])], "other cells than tetrahedra: tetra10"),
    "quadrangles": (
        [("quad", [[0, 1, 2, 3]]), ("triangle", [[0, 1, 2]])],
        "other cells than triangles: quad",
    ),
    "lines": ([("line", [[0, 1]])], r"neither tetrahedra nor triangles \(line\)"),
    "vertices": ([("vertex", [[0]])], r"neither tetrahedra nor triangles \(vertex\)"),
}


@pytest.mark.parametrize(("cells", "what"), CELLS.values(), ids=CELLS.keys())
def test_other_cells_are_refused(tmp_path, cells, what):
    mesh = meshio.Mesh(np.random.default_rng(0).normal(size=(10, 3)), [(k, np.array(c)) for k, c in cells])
    mesh.write(tmp_path / "a.vtu")
    with pytest.raises(InputError, match=what) as caught:
        read(tmp_path / "a.vtu")
    assert str(tmp_path / "a.vtu") in str(caught.value)


def test_a_point_that_is_not_there(tmp_path):
    meshio.Mesh(POINTS, [("tetra", np.array(TETRAHEDRA))]).write(tmp_path / "a.vtk", binary=False)
    text = (tmp_path / "a.vtk").read_text()
    assert text.count("\n1\n2\n3\n4\n") == 1
    (tmp_path / "a.vtk").write_text(text.replace("\n1\n2\n3\n4\n", "\n1\n2\n3\n9\n"))
    with pytest.raises(InputError, match=r"cannot be read|a label has none"):
        read(tmp_path / "a.vtk")


def test_a_point_without_a_place(tmp_path):
    points = POINTS.copy()
    points[3, 1] = np.nan
    meshio.Mesh(points, [("tetra", np.array(TETRAHEDRA))]).write(tmp_path / "a.vtu")
    with pytest.raises(InputError, match="no finite number") as caught:
        read(tmp_path / "a.vtu")
    assert caught.value.where.endswith("point 3")


@pytest.mark.parametrize("suffix", [".vtk", ".vtu", ".msh", ".mesh", ".inp", ".xdmf"])
@pytest.mark.parametrize("part", [0.2, 0.6, 0.9])
def test_a_mesh_cut_in_the_middle(tmp_path, suffix, part, capfd):
    path = tmp_path / f"a{suffix}"
    mesh = meshio.Mesh(
        np.random.default_rng(0).normal(size=(60, 3)), [("tetra", np.arange(60).reshape(15, 4))]
    )
    mesh.write(path, file_format=WRITABLE[suffix])
    capfd.readouterr()
    data = path.read_bytes()
    path.write_bytes(data[: int(part * len(data))])
    try:
        assert len(read(path)) <= 15  # some of the formats cannot tell
    except InputError as error:
        assert str(path) in str(error)
    assert capfd.readouterr() == ("", "")
