"""What is written comes back, in every format, for every kind of complex; the bytes are always the same."""

import dataclasses
import gzip
import json
import time

import numpy as np
import pytest
import specimens as sp
from hypothesis import given
from hypothesis import strategies as st

from dualize import Coordinates, Triangulation, build
from dualize.formats import decode, encode, load, open_any, read
from dualize.skeleton import Skeleton

CONTAINERS = ("json", "hdf5", "npz")
containers = pytest.mark.parametrize("kind", CONTAINERS)


def labelled(facets, **more):
    return Triangulation.from_facets(facets, **more)


def glued(table):
    carry = [[p or (-1,) * len(row) for p in row] for row in table.carry]
    return Triangulation.from_gluings(table.across, carry)


def words_3d():
    return labelled([["b", "a", "Ünïcode", "z"], ["a", "b", "z", "e_1"]])


def with_points():
    return labelled(sp.sphere(3), coordinates=np.arange(15.0).reshape(5, 3) / 7)


def with_charts():
    facets = [[3, 2, 1, 0], [1, 2, 3, 4]]
    chart = np.random.default_rng(3).normal(size=(2, 4, 3))
    return labelled(facets, coordinates=Coordinates(corner=chart, period=np.array([2.0, 0.0, 1.5])))


TRIANGULATIONS = {
    "one-simplex": lambda: labelled(sp.simplex(4)),
    "closed": lambda: labelled(sp.sphere(4)),
    "bounded": lambda: labelled(sp.chain(3, 5)),
    "triangles": lambda: labelled(sp.moebius_band()),
    "several-components": lambda: labelled(sp.disjoint(sp.sphere(3), sp.chain(3, 2))),
    "odd-parity": lambda: labelled([[4, 1, 2, 3, 0], [1, 0, 2, 3, 5]]),
    "huge-labels": lambda: labelled([[-(2**63), 0, 5, 2**63 - 1], [0, 5, 7, 2**63 - 1]]),
    "words": words_3d,
    "points": with_points,
    "charts": with_charts,
    "gluing": lambda: glued(sp.melon(4)),
}
triangulations = pytest.mark.parametrize("make", TRIANGULATIONS.values(), ids=TRIANGULATIONS.keys())


def singular():
    facets = next(iter(sp.SINGULAR.values()))[0]
    return build(labelled(facets), keep_singular=True)


def carrying_further_groups():
    s = build(labelled(sp.sphere(3)))
    extra = {
        "spins/upper": np.arange(10, dtype=np.int64),
        "spins/weight": np.linspace(0, 1, 5),
        "spins/allowed": np.array([[True, False], [False, False]]),
        "plan": "ring by ring, é",
        "notes/authors": ["one", "two"],
        "notes/nothing": None,
        "notes/mixed": [1, "a", {"deep": [1.5, None]}],
        "notes/empty": {},
    }
    return dataclasses.replace(s, extra=extra)


SKELETONS = {name: (lambda make=make: build(make(), points=True)) for name, make in TRIANGULATIONS.items()}
SKELETONS |= {
    "singular": singular,
    "further-groups": carrying_further_groups,
    "provenance": lambda: dataclasses.replace(build(words_3d()), provenance={"program": "x", "n": [1, 2]}),
}
skeletons = pytest.mark.parametrize("make", SKELETONS.values(), ids=SKELETONS.keys())


# --------------------------------------------------------------------------------------------------
# Skeletons


@containers
@skeletons
def test_skeleton_comes_back(make, kind):
    s = make()
    again = decode(encode(s, kind), kind)
    assert again == s
    assert {n: a.dtype for n, a in again.arrays.items()} == {n: a.dtype for n, a in s.arrays.items()}
    assert again.provenance == s.provenance


@containers
@skeletons
def test_skeleton_has_the_same_bytes_every_time(make, kind):
    s = make()
    data = encode(s, kind)
    assert encode(s, kind) == data
    assert encode(decode(data, kind), kind) == data


@pytest.mark.parametrize("kind", ["hdf5", "npz"])
@skeletons
def test_compressed_skeleton_comes_back(make, kind):
    s = make()
    assert decode(encode(s, kind, compress=True), kind) == s


@pytest.mark.parametrize("first", CONTAINERS)
@pytest.mark.parametrize("second", CONTAINERS)
def test_skeleton_survives_a_change_of_format(first, second):
    s = carrying_further_groups()
    assert decode(encode(decode(encode(s, first), first), second), second) == s


@pytest.mark.parametrize("suffix", [".json", ".json.gz", ".h5", ".hdf5", ".npz"])
def test_skeleton_file_comes_back(tmp_path, suffix):
    s = build(labelled(sp.chain(4, 3)))
    path = tmp_path / f"a foam{suffix}"
    s.write(path)
    assert load(path) == s
    assert [p.name for p in tmp_path.iterdir()] == [path.name]


def test_a_file_has_the_same_bytes_at_another_time(tmp_path):
    s = carrying_further_groups()
    names = ["a.json", "a.json.gz", "a.h5", "a.npz"]
    for folder in ("one", "two"):
        (tmp_path / folder).mkdir()
        for name in names:
            s.write(tmp_path / folder / name, compress=name in ("a.h5", "a.npz"))
        time.sleep(2.1)  # zip files tell times to two seconds
    for name in names:
        assert (tmp_path / "one" / name).read_bytes() == (tmp_path / "two" / name).read_bytes(), name


@pytest.mark.parametrize(
    "dtype", ["int8", "uint16", "int32", "uint64", "float32", "float64", "bool", "complex128"], ids=str
)
@pytest.mark.parametrize("kind", ["hdf5", "npz"])
def test_further_arrays_keep_their_width(kind, dtype):
    array = np.array([[0, 1, 2], [3, 4, 5]]).astype(dtype)
    s = dataclasses.replace(build(labelled(sp.simplex(3))), extra={"colours/of": array})
    assert decode(encode(s, kind), kind) == s


@pytest.mark.parametrize("kind", ["hdf5", "npz"])
def test_further_arrays_keep_nan_and_infinity(kind):
    s = dataclasses.replace(
        build(labelled(sp.simplex(3))), extra={"weights": np.array([np.nan, np.inf, -0.0])}
    )
    assert decode(encode(s, kind), kind) == s


@containers
def test_tables_without_entries_keep_their_shape(kind):
    s = build(labelled(sp.sphere(4)))
    again = decode(encode(s, kind), kind)
    assert again["nodes/link"].shape == (0, 4)
    assert again["links/corners"].shape == (0, 3)


@containers
def test_narrow_or_wide_integers_are_brought_to_the_width_of_the_layout(kind):
    s = build(labelled(sp.chain(3, 2)))
    wide = {n: a.astype(np.int64) if a.dtype.kind == "i" else a for n, a in s.arrays.items()}
    again = decode(encode(dataclasses.replace(s, arrays=wide), kind), kind)
    assert again == s


@given(st.one_of(sp.subcomplexes().map(labelled), sp.tables().map(glued)))
def test_any_complex_comes_back(t):
    for kind in CONTAINERS:
        assert decode(encode(t, kind), kind) == t
    assert decode(encode(t, "gluing"), "json") == t


# --------------------------------------------------------------------------------------------------
# Triangulations


@containers
@triangulations
def test_triangulation_comes_back(make, kind):
    t = make()
    again = decode(encode(t, kind), kind)
    assert again == t
    assert again.matched == t.matched


@triangulations
def test_gluing_table_comes_back(make):
    t = make()
    again = decode(encode(t, "gluing"), "json")
    assert np.array_equal(again.across, t.across)
    assert np.array_equal(again.rank, t.rank)
    assert np.array_equal(again.written, t.written)
    assert again.corner_names == t.corner_names
    assert again.matched == t.matched


@pytest.mark.parametrize("suffix", [".json", ".h5", ".npz"])
def test_gluing_table_file_comes_back(tmp_path, suffix):
    t = words_3d()
    path = tmp_path / f"table{suffix}"
    t.write(path, kind="gluing")
    assert read(path) == t
    assert open_any(path).how.endswith("gluing table")


@pytest.mark.parametrize("kind", ["text", ".csv", "npy"])
@pytest.mark.parametrize("name", ["one-simplex", "bounded", "triangles", "odd-parity", "huge-labels"])
def test_labels_come_back_from_plain_lists(name, kind):
    t = TRIANGULATIONS[name]()
    assert decode(encode(t, kind), kind) == t


@pytest.mark.parametrize("kind", ["text", ".csv"])
def test_words_come_back_from_text(kind):
    assert decode(encode(words_3d(), kind), kind) == words_3d()


@pytest.mark.parametrize("suffix", [".txt.gz", ".csv.gz", ".json.gz"])
def test_packed_text_comes_back(tmp_path, suffix):
    t = labelled(sp.chain(4, 20))
    t.write(tmp_path / f"t{suffix}")
    assert (tmp_path / f"t{suffix}").read_bytes()[:2] == b"\x1f\x8b"
    assert read(tmp_path / f"t{suffix}") == t


def test_many_rows_of_text_come_back():
    t = labelled(sp.chain(4, 70_000))
    data = encode(t, "text")
    assert data.count(b"\n") == 70_000
    assert decode(data, "text") == t


def test_text_is_one_line_a_simplex():
    assert encode(labelled([[0, 1, 2, 3], [2, 1, 3, 4]]), "text") == b"0 1 2 3\n1 2 4 3\n"


def test_json_facets_are_plain():
    assert json.loads(encode(labelled([[0, 1, 2, 3]]), "json")) == {"facets": [[0, 1, 2, 3]]}


def test_json_words_are_the_labels_themselves():
    tree = json.loads(encode(labelled([["a", "b", "c", "d"]]), "json"))
    assert tree == {"facets": [["a", "b", "c", "d"]]}


def test_boundary_slots_of_a_written_table_carry_nothing():
    tree = json.loads(encode(labelled(sp.simplex(2)), "gluing"))
    assert tree["across"] == [[-1, -1, -1]]
    assert tree["carry"] == [[[-1] * 3] * 3]


# --------------------------------------------------------------------------------------------------
# As plain libraries see the files


def test_json_file_is_an_object_per_group():
    s = build(words_3d())
    tree = json.loads(encode(s, "json"))
    assert (tree["format"], tree["version"], tree["dimension"]) == ("foam-skeleton", 1, 3)
    assert tree["counts"] == dict(s.counts)
    assert tree["flags"] == dict(s.flags)
    assert tree["provenance"] is None
    assert tree["corner_names"] == list(s.corner_names)
    assert tree["edges"]["face"] == s["edges/face"].tolist()


def test_hdf5_file_is_plain_for_h5py(tmp_path):
    h5py = pytest.importorskip("h5py")
    s = build(words_3d())
    s.write(tmp_path / "x.h5")
    with h5py.File(tmp_path / "x.h5") as f:
        assert f.attrs["format"] == "foam-skeleton"
        assert (f.attrs["version"], f.attrs["dimension"]) == (1, 3)
        assert json.loads(f["counts"].asstr()[()]) == dict(s.counts)
        assert tuple(f["corner_names"].asstr()) == s.corner_names
        assert f["edges/face"].dtype == np.int32
        assert np.array_equal(f["edges/face"], s["edges/face"])


def test_npz_file_is_plain_for_numpy(tmp_path):
    s = build(words_3d())
    s.write(tmp_path / "x.npz")
    with np.load(tmp_path / "x.npz", allow_pickle=False) as z:
        assert str(z["format"]) == "foam-skeleton"
        assert (int(z["version"]), int(z["dimension"])) == (1, 3)
        assert json.loads(str(z["flags"])) == dict(s.flags)
        assert json.loads(str(z["corner_names"])) == list(s.corner_names)
        assert np.array_equal(z["faces/vertex_offsets"], s["faces/vertex_offsets"])


def test_packed_json_holds_no_name_and_no_date(tmp_path):
    build(labelled(sp.simplex(3))).write(tmp_path / "secret.json.gz")
    data = (tmp_path / "secret.json.gz").read_bytes()
    assert b"secret" not in data
    assert data[4:8] == bytes(4)  # the date, RFC 1952
    assert json.loads(gzip.decompress(data))["format"] == "foam-skeleton"


def test_nested_mappings_of_a_further_group_come_back_under_long_names():
    s = dataclasses.replace(build(labelled(sp.simplex(3))), extra={"plan": {"a": {"b": 1}, "c": [1, 2]}})
    again = decode(encode(s, "npz"), "npz")
    assert isinstance(again, Skeleton)
    assert dict(again.extra) == {"plan/a/b": 1, "plan/c": [1, 2]}
