"""Files that are refused: missing, of another kind, cut short, damaged, hostile; each with its name."""

import gzip
import io
import json
import re
import zipfile
import zlib

import numpy as np
import pytest
import specimens as sp

from dualize import DualizeError, InputError, Skeleton, SkeletonError, Triangulation, build, load, read
from dualize.formats import decode, encode, formats, open_any, source

FOAM = build(Triangulation.from_facets(sp.chain(3, 3), coordinates=np.eye(6, 3)))


def put(folder, name, content):
    path = folder / name
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    return path


def refused(path, what, error=InputError, **options):
    with pytest.raises(error, match=what) as caught:
        open_any(path, **options)
    assert str(path) in str(caught.value)
    return caught.value


# --------------------------------------------------------------------------------------------------
# Names


def test_a_missing_file(tmp_path):
    refused(tmp_path / "none.txt", "there is no such file")


def test_a_missing_file_with_a_likely_neighbour(tmp_path):
    put(tmp_path, "region.txt", "0 1 2\n")
    assert (
        refused(tmp_path / "regoin.txt", "there is no such file").hint == f"is it {tmp_path / 'region.txt'}?"
    )


def test_a_directory(tmp_path):
    refused(tmp_path, "this is a directory, not a file")


def test_a_name_with_a_zero_byte():
    with pytest.raises(InputError, match="there is no such file"):
        read("a\0b.txt")


def test_a_file_that_may_not_be_read(tmp_path, monkeypatch):
    path = put(tmp_path, "a.txt", "0 1 2\n")

    def forbidden(*args, **kwargs):
        raise PermissionError(13, "Permission denied", str(path))

    monkeypatch.setattr(source, "open", forbidden, raising=False)
    assert "permissions" in refused(path, "the file may not be read").hint


def test_an_unknown_suffix_lists_the_known_ones(tmp_path):
    hint = refused(put(tmp_path, "a.docx", "0 1 2\n"), r"no format has the suffix \.docx").hint
    for suffix in (".txt", ".csv", ".json", ".h5", ".npz", ".npy", ".msh", ".vtu"):
        assert suffix in hint


def test_a_suffix_with_a_slip_names_the_near_one(tmp_path):
    refused(put(tmp_path, "a.jsn", "[]"), r"no format has the suffix \.jsn; is it \.json\?")


def test_no_suffix(tmp_path):
    refused(put(tmp_path, "region", "0 1 2\n"), "the name has no suffix that tells the format")


def test_an_unknown_kind(tmp_path):
    refused(put(tmp_path, "a.txt", "0 1 2\n"), "there is no format jsn; is it json", kind="jsn")


def test_a_kind_reads_what_the_suffix_does_not_tell(tmp_path):
    assert len(read(put(tmp_path, "region", "0 1 2\n"), kind="text")) == 1


# --------------------------------------------------------------------------------------------------
# Other content


@pytest.mark.parametrize("suffix", [".txt", ".json", ".npy", ".npz", ".h5", ".vtk", ".txt.gz"])
def test_an_empty_file(tmp_path, suffix):
    refused(put(tmp_path, f"a{suffix}", b""), "the file is empty")


def test_an_empty_file_inside_gzip(tmp_path):
    refused(put(tmp_path, "a.txt.gz", gzip.compress(b"")), "the file is empty")


OTHER = {
    "hdf5-as-text": (".txt", encode(FOAM, "hdf5"), "this is no text file: it looks like hdf5"),
    "npz-as-text": (".txt", encode(FOAM, "npz"), "this is no text file: it looks like npz"),
    "json-as-text": (".csv", b"[[0, 1, 2]]", "this is no text file: it looks like json"),
    "gzip-as-text": (".txt", gzip.compress(b"0 1 2\n"), "it is compressed with gzip"),
    "utf-16-as-text": (".txt", "0 1 2\n".encode("utf-16"), "it is UTF-16 text"),
    "zeros-as-text": (".txt", bytes(100), "this is no text file: it is a binary file"),
    "text-as-npz": (".npz", b"0 1 2\n", "this is no npz file: it looks like text"),
    "text-as-npy": (".npy", b"0 1 2\n", "this is no npy file: it looks like text"),
    "text-as-hdf5": (".h5", b"0 1 2\n", "this is no hdf5 file: it looks like text"),
    "text-as-json": (".json", b"0 1 2\n", "this is no json file: it looks like text"),
    "text-as-gzip": (".txt.gz", b"0 1 2\n", "the file is not compressed with gzip"),
    "binary-as-mesh": (".vtk", bytes(range(256)), "the mesh cannot be read as vtk"),
    "text-as-mesh": (".msh", b"0 1 2\n", "the mesh cannot be read as gmsh or ansys"),
}


@pytest.mark.parametrize(("suffix", "data", "what"), OTHER.values(), ids=OTHER.keys())
def test_another_kind_of_content(tmp_path, suffix, data, what, capfd):
    error = refused(put(tmp_path, f"a{suffix}", data), what)
    assert error.hint
    assert capfd.readouterr() == ("", "")


def test_read_refuses_a_skeleton(tmp_path):
    FOAM.write(tmp_path / "a.json")
    with pytest.raises(InputError, match="this is a skeleton, not a triangulation") as caught:
        read(tmp_path / "a.json")
    assert caught.value.hint == "use load"


def test_load_refuses_a_triangulation(tmp_path):
    with pytest.raises(InputError, match="this is a triangulation, not a skeleton"):
        load(put(tmp_path, "a.txt", "0 1 2\n"))


def test_a_dataset_of_a_text_file(tmp_path):
    refused(put(tmp_path, "a.txt", "0 1 2\n"), "text files have no named arrays", dataset="x")


def test_a_text_stream(tmp_path):
    with pytest.raises(InputError, match="the stream gives text, not bytes"):
        read(io.StringIO("0 1 2\n"))


# --------------------------------------------------------------------------------------------------
# Cut short


def whole_files():
    t = Triangulation.from_facets(sp.chain(3, 40))
    yield "skeleton.json", encode(FOAM, "json")
    yield "skeleton.h5", encode(FOAM, "hdf5")
    yield "skeleton.npz", encode(FOAM, "npz")
    yield "packed.npz", encode(FOAM, "npz", compress=True)
    yield "facets.json", encode(t, "json")
    yield "facets.npy", encode(t, "npy")
    yield "facets.npz", encode(t, "npz")
    yield "facets.h5", encode(t, "hdf5")
    yield "facets.txt.gz", gzip.compress(encode(t, "text"), mtime=0)


@pytest.mark.parametrize(("name", "data"), [pytest.param(n, d, id=n) for n, d in whole_files()])
@pytest.mark.parametrize("part", [0.05, 0.5, 0.9, -1], ids=["start", "half", "most", "all-but-one"])
def test_a_file_cut_in_the_middle(tmp_path, name, data, part):
    end = len(data) - 1 if part == -1 else int(part * len(data))
    if name.endswith(".json") and part == -1:
        end -= 1  # the last byte is a line end
    error = refused(
        put(tmp_path, name, data[:end]), "middle|damaged|cannot be read|promises|is no|labels", DualizeError
    )
    assert error.hint


@pytest.mark.parametrize(
    ("name", "what"),
    [
        ("skeleton.json", "the JSON text ends in the middle"),
        ("facets.npy", "the header promises 1280 bytes .* and there are 600"),
        ("facets.npz", "the zip file is damaged"),
        ("facets.h5", "the HDF5 file cannot be read: .*truncated"),
        ("facets.txt.gz", "the gzip data end in the middle"),
    ],
    ids=["json", "npy", "npz", "hdf5", "gzip"],
)
def test_a_cut_file_is_said_to_be_cut(tmp_path, name, what):
    data = dict(whole_files())[name]
    end = 128 + 600 if name.endswith("npy") else len(data) // 2
    refused(put(tmp_path, name, data[:end]), what)


def test_an_error_in_json_has_line_and_column(tmp_path):
    error = refused(put(tmp_path, "a.json", '{"facets":\n [[0, 1, 2], [1, 2 3]]}'), "this is no JSON")
    assert error.where.endswith("a.json, line 2, column 20")


def test_damaged_gzip(tmp_path):
    data = bytearray(gzip.compress(b"0 1 2 3\n" * 50))
    data[20] ^= 0xFF
    refused(put(tmp_path, "a.txt.gz", bytes(data)), "the gzip data are damaged")


# --------------------------------------------------------------------------------------------------
# Facets

FACETS = {
    "decimal": (
        {"facets": [[0, 1, 2], [1, 2, 3.5]]},
        "the label 3.5 is no integer within 64 bits",
        r"facets\[1\]",
    ),
    "overflow": ({"facets": [[0, 1, 2], [1, 2, 2**63]]}, "beyond 64 bits", r"facets\[1, 2\]"),
    "overflow-as-float": (
        {"facets": [[0, 1, 2], [1, 2, 10**30]]},
        "no integer within 64 bits",
        r"facets\[1\]",
    ),
    "mixture": ({"facets": [["a", "b", "c"], ["a", 2, "c"]]}, "the label 2 is no word", r"facets\[1\]"),
    "truth-value": ({"facets": [[0, 1, 2], [1, 2, True]]}, "the label true is no integer", r"facets\[1\]"),
    "null": ({"facets": [[0, 1, None]]}, "the label null is no integer", r"facets\[0\]"),
    "ragged": (
        {"facets": [[0, 1, 2], [0, 1, 2, 3]]},
        "this row has 4 entries, and the first has 3",
        r"facets\[1\]",
    ),
    "flat": ({"facets": [0, 1, 2]}, r"the table has the shape \(3,\)", "facets"),
    "deep": ({"facets": [[[0, 1, 2]]]}, r"the table has the shape \(1, 1, 3\)", "facets"),
    "no-simplex": ({"facets": []}, r"the table has the shape \(0,\)", "facets"),
    "six-labels": ([[0, 1, 2, 3, 4, 5]], r"the table has the shape \(1, 6\)", "facets"),
    "repeated": ([[0, 1, 2], [3, 4, 3]], "label 3 is repeated", "simplex 1: 3 4 3"),
    "empty-word": ([["a", "b", ""]], "a label is empty", "facets"),
    "control-character": ([["a", "b", "c\n"]], "a control character", "facets"),
    "no-facets": ({"cells": [[0, 1, 2]]}, "neither facets nor a gluing table, only cells", None),
    "number": (7, "this is no json file", None),
    "table-without-carry": (
        {"across": [[-1, -1, -1]]},
        "there is across but neither carry nor corners",
        None,
    ),
    "table-with-a-wrong-slot": (
        {"across": [[1, -1, -1]], "carry": [[[0, 1, 2]] * 3]},
        "a slot is glued to a simplex that does not exist",
        "simplex 0, slot 0",
    ),
    "points-missing": (
        {"facets": [[0, 1, 5]], "coordinates": [[0.0], [1.0]]},
        "a label has none",
        "simplex 0",
    ),
    "coordinates-of-words-by-row": (
        {"facets": [["a", "b", "c"]], "coordinates": [[0.0], [1.0], [2.0]]},
        "rows of coordinates cannot be found by words",
        "coordinates",
    ),
    "label-without-coordinates": (
        {"facets": [["a", "b", "c"]], "coordinates": {"a": [0.0], "b": [1.0]}},
        "there are no coordinates for label c",
        "coordinates",
    ),
    "coordinates-ragged": (
        {"facets": [[0, 1, 2]], "coordinates": [[0.0, 1.0], [1.0], [2.0, 1.0]]},
        "this row has 1 entries",
        r"coordinates/point\[1\]",
    ),
    "period-of-other-length": (
        {"facets": [[0, 1, 2]], "coordinates": {"point": [[0.0], [1.0], [2.0]], "period": [1.0, 2.0]}},
        "point, corner and period do not fit together",
        "coordinates",
    ),
    "charts-of-other-number": (
        {"across": [[-1] * 3], "carry": [[[0, 1, 2]] * 3], "coordinates": {"corner": [[[0.0]] * 4]}},
        "corner charts have the shape",
        "coordinates/corner",
    ),
    "names-out-of-order": (
        {
            "across": [[-1] * 3],
            "carry": [[[0, 1, 2]] * 3],
            "corners": [[0, 1, 2]],
            "corner_names": ["b", "a", "c"],
        },
        "not in order of code points",
        "corner_names",
    ),
    "label-beyond-the-names": (
        {"facets": [[0, 1, 3]], "corner_names": ["a", "b", "c"]},
        "a label is no position in the 3 words",
        "facets",
    ),
}


@pytest.mark.parametrize(("tree", "what", "where"), FACETS.values(), ids=FACETS.keys())
def test_json_triangulation(tmp_path, tree, what, where):
    error = refused(put(tmp_path, "a.json", json.dumps(tree)), what)
    if where is not None:
        assert re.search(where, error.where)


@pytest.mark.parametrize("large", [False, True], ids=["plain", "by-the-kernel"])
def test_large_json_is_refused_like_small(tmp_path, large):
    rows = np.arange(4 * (100_000 if large else 10)).reshape(-1, 4).tolist()
    rows[-1][3] = rows[-1][0]
    refused(put(tmp_path, "a.json", json.dumps(rows)), f"label {rows[-1][0]} is repeated")
    rows[-1][3] = 2.5
    refused(put(tmp_path, "a.json", json.dumps(rows)), "the label 2.5 is no integer")


ARRAYS = {
    "decimals": (np.zeros((2, 4)), "these are float64"),
    "beyond-64-bits": (np.array([[0, 1, 2**63]], dtype=np.uint64), "9223372036854775808 is out of range"),
    "truth-values": (np.zeros((2, 4), dtype=bool), "these are bool"),
    "one-dimension": (np.arange(4), r"the shape \(4,\)"),
    "nothing": (np.zeros((0, 4), dtype=int), r"the shape \(0, 4\)"),
    "two-columns": (np.zeros((3, 2), dtype=int), r"the shape \(3, 2\)"),
}


@pytest.mark.parametrize(("array", "what"), ARRAYS.values(), ids=ARRAYS.keys())
def test_npy_that_is_no_list_of_facets(tmp_path, array, what):
    np.save(tmp_path / "a.npy", array)
    refused(tmp_path / "a.npy", what)


def test_pickles_are_never_read(tmp_path):
    np.save(tmp_path / "a.npy", np.array([[0, 1, {}]], dtype=object), allow_pickle=True)
    refused(tmp_path / "a.npy", "it holds pickled objects, which are never read")


def test_pickles_in_npz_are_never_read(tmp_path):
    np.savez(tmp_path / "a.npz", facets=np.array([[0, 1, {}]], dtype=object))
    refused(tmp_path / "a.npz", "it holds pickled objects, which are never read")


@pytest.mark.parametrize("suffix", [".npz", ".h5"])
def test_several_arrays_ask_for_a_name(tmp_path, suffix):
    path = tmp_path / f"a{suffix}"
    arrays = {"one": np.arange(4)[None], "two": np.arange(3)[None], "other": np.zeros(5)}
    write_arrays(path, arrays)
    assert "--dataset" in refused(path, "2 arrays could hold the facets: one, two").hint
    assert read(path, dataset="two").dimension == 2
    refused(path, "there is no array three", dataset="three")


@pytest.mark.parametrize("suffix", [".npz", ".h5"])
def test_no_array_that_could_hold_facets(tmp_path, suffix):
    path = tmp_path / f"a{suffix}"
    write_arrays(path, {"other": np.zeros(5)})
    refused(path, "no array could hold facets, among other")


def write_arrays(path, arrays):
    if path.suffix == ".npz":
        np.savez(path, **arrays)
    else:
        import h5py

        with h5py.File(path, "w") as file:
            for name, array in arrays.items():
                file[name] = array


# --------------------------------------------------------------------------------------------------
# Skeletons


def tree():
    return json.loads(encode(FOAM, "json"))


def changed(path, value):
    t = tree()
    *groups, last = path.split("/")
    place = t
    for group in groups:
        place = place[group]
    if value is ...:
        del place[last]
    else:
        place[last] = value
    return t


SKELETONS = {
    "another-format": ("format", "other-skeleton", "the format is 'other-skeleton'"),
    "another-version": ("version", 2, "this is version 2 of the layout, and this program reads version 1"),
    "version-as-text": ("version", "1", "this is version '1'"),
    "version-true": ("version", True, "this is version true"),
    "no-version": ("version", ..., "this is version null"),
    "dimension-five": ("dimension", 5, "the dimension is 5"),
    "no-counts": ("counts", ..., "counts is missing"),
    "no-flags": ("flags", [], "flags is missing, or no mapping"),
    "negative-count": ("counts/vertices", -1, "-1 is no number of cells"),
    "huge-count": ("counts/vertices", 10**15, "1000000000000000 is no number of cells"),
    "large-count": ("counts/vertices", 10**12, r"the shape is .* and the counts ask for \(1000000000000"),
    "count-as-float": ("counts/nodes", 8.0, "8.0 is no number of cells"),
    "orientable-as-bool": ("flags/orientable", True, "no list of truth values"),
    "ordered-as-int": ("flags/ordered", 1, "it is 1, not true or false"),
    "provenance-as-list": ("provenance", [1], "this is no mapping"),
    "names-as-numbers": ("corner_names", [1, 2], "this is no list of words"),
    "table-as-text": ("edges/face", "abc", "it is 'abc', not a table"),
    "table-as-mapping": ("edges/twist", {}, "it is a mapping, not a table"),
    "words-in-a-table": ("edges/twist", ["a"] * 13, "'a' is no number"),
    "null-in-a-table": ("vertices/orientation", [1, None, 1], "null is no number"),
    "decimals": ("vertices/orientation", [1.0, 1.5, 1.0], "the entries are float64, not integers"),
    "ragged": ("vertices/edge", [[0, 1, 2, 3], [0], [1]], "this row has 1 entries"),
    "short": ("vertices/orientation", [1, -1], r"the shape is \(2,\), and the counts ask for \(3\)"),
    "too-deep": ("vertices/orientation", [[1], [1], [1]], r"the shape is \(3, 1\)"),
    "out-of-8-bits": ("vertices/orientation", [1, 300, 1], "300 is out of range"),
    "out-of-32-bits": ("vertices/component", [0, 2**40, 0], "1099511627776 is out of range"),
    "out-of-64-bits": ("vertices/component", [0, 2**63, 0], r"9223372036854775808 is beyond 64 bits"),
    "coordinates-of-two-sizes": ("coordinates/period", [0.0, 0.0], r"the shape is \(2,\)"),
    "an-empty-name": ("vertices/", [1], "an entry has an empty name"),
}


@pytest.mark.parametrize(("path", "value", "what"), SKELETONS.values(), ids=SKELETONS.keys())
def test_damaged_skeleton(path, value, what):
    data = json.dumps(changed(path, value)).encode()
    with pytest.raises(DualizeError, match=what):
        decode(data, "json")


def test_the_place_of_a_damaged_entry_is_named():
    data = json.dumps(changed("vertices/orientation", [1, 300, 1])).encode()
    with pytest.raises(SkeletonError, match="300") as caught:
        decode(data, "json")
    assert caught.value.where == "vertices/orientation[1]"


@pytest.mark.parametrize("kind", ["json", "hdf5", "npz"])
def test_load_validates(tmp_path, kind):
    tables = dict(FOAM.arrays)
    tables["faces/against"] = 1 - tables["faces/against"]
    broken = Skeleton(FOAM.dimension, FOAM.counts, FOAM.flags, tables)
    path = tmp_path / "a.foam"
    path.write_bytes(encode(broken, kind))
    with pytest.raises(SkeletonError, match=r"a\.foam, faces/against"):
        load(path, kind=kind)
    with pytest.raises(SkeletonError, match=r"a\.foam, faces/against"):
        open_any(path, kind=kind)
    assert load(path, kind=kind, check=False) == broken


def test_nan_among_coordinates(tmp_path):
    chart = FOAM["coordinates/point"].copy()
    chart[2, 1] = np.nan
    broken = Skeleton(FOAM.dimension, FOAM.counts, FOAM.flags, {**FOAM.arrays, "coordinates/point": chart})
    path = tmp_path / "a.npz"
    broken.write(path)
    with pytest.raises(SkeletonError, match=r"nan is out of range .*coordinates/point\[2, 1\]"):
        load(path)


# --------------------------------------------------------------------------------------------------
# Hostile


def npz(members, method=zipfile.ZIP_STORED):
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", method) as archive:
        for name, data in members.items():
            archive.writestr(name + ".npy", data)
    return stream.getvalue()


def npy(shape, dtype="<i8", body=b""):
    stream = io.BytesIO()
    np.lib.format.write_array_header_1_0(stream, {"descr": dtype, "fortran_order": False, "shape": shape})
    return stream.getvalue() + body


@pytest.mark.parametrize("shape", [(10**9, 4), (2**62, 4), (2**70, 3)], ids=["giga", "exa", "beyond"])
def test_a_header_that_promises_more_than_there_is(tmp_path, shape):
    refused(put(tmp_path, "a.npy", npy(shape, body=bytes(64))), "the header promises .* and there are 64")
    refused(put(tmp_path, "a.npz", npz({"facets": npy(shape, body=bytes(64))})), "the header promises")


@pytest.mark.parametrize("shape", [(-1, 4), (1,) * 40], ids=["negative", "deep"])
def test_an_impossible_shape(tmp_path, shape):
    refused(put(tmp_path, "a.npy", npy(shape, body=bytes(64))), "impossible|header is damaged")


@pytest.mark.parametrize(
    "header", [b"\x93NUMPY", b"\x93NUMPY\x01\x00\xff\xff{", b"\x93NUMPY\x09\x00" + bytes(90)]
)
def test_a_damaged_header(tmp_path, header):
    refused(put(tmp_path, "a.npy", header), "the header is damaged")


def test_a_zip_file_that_unpacks_beyond_reason(tmp_path):
    zeros = npy((40_000_000, 8), body=bytes(2_560_000_000 // 8))
    data = npz({"facets": zeros}, zipfile.ZIP_DEFLATED)
    assert len(data) < 1_000_000
    refused(put(tmp_path, "a.npz", data), "unpack to .* or more")


def test_a_gzip_file_that_unpacks_beyond_reason(tmp_path):
    packer = zlib.compressobj(9, wbits=31)
    line = b"0 1 2 3\n" * 131_072
    data = b"".join(packer.compress(line) for _ in range(300)) + packer.flush()
    assert len(data) < 1_000_000
    refused(put(tmp_path, "a.txt.gz", data), "unpack to .* or more")


def test_an_hdf5_file_that_promises_more_than_there_is(tmp_path):
    import h5py

    with h5py.File(tmp_path / "a.h5", "w") as file:
        file.create_dataset("facets", shape=(10**10, 4), dtype="i8", chunks=(1024, 4))
    refused(tmp_path / "a.h5", "unpack to .* or more")


def test_an_hdf5_link_to_another_file(tmp_path):
    import h5py

    with h5py.File(tmp_path / "a.h5", "w") as file:
        file["facets"] = h5py.ExternalLink("/etc/passwd", "x")
    refused(tmp_path / "a.h5", "a link to another place is not followed")


def test_an_hdf5_dataset_in_another_file(tmp_path):
    import h5py

    (tmp_path / "raw").write_bytes(bytes(96))
    with h5py.File(tmp_path / "a.h5", "w") as file:
        file.create_dataset("facets", shape=(3, 4), dtype="i8", external=[(str(tmp_path / "raw"), 0, 96)])
    refused(tmp_path / "a.h5", "data in another file are not read")


def test_hdf5_groups_in_a_circle(tmp_path):
    import h5py

    with h5py.File(tmp_path / "a.h5", "w") as file:
        file["a/facets"] = np.arange(4)[None]
        file["a/again"] = file["/"]
    assert len(read(tmp_path / "a.h5")) == 1


def test_two_members_with_one_name(tmp_path):
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w") as archive, pytest.warns(UserWarning, match="Duplicate"):
        for _ in range(2):
            archive.writestr("facets.npy", npy((1, 3), body=np.arange(3).tobytes()))
    refused(put(tmp_path, "a.npz", stream.getvalue()), "two arrays have the same name")


def test_json_nested_without_end(tmp_path):
    refused(put(tmp_path, "a.json", b"[" * 100_000), "this is no JSON|ends in the middle")


@pytest.mark.parametrize("kind", ["json", "hdf5", "npz"])
def test_damage_anywhere_is_an_error_or_harmless(kind):
    """One byte changed, in many places: never anything but an error of ours."""
    data = encode(FOAM, kind)
    rng = np.random.default_rng(8)
    for at in rng.integers(0, len(data), 300).tolist():
        broken = bytearray(data)
        broken[at] ^= 1 << int(rng.integers(8))
        try:
            decode(bytes(broken), kind).validate()
        except DualizeError:
            pass
        except AttributeError as error:  # it became a triangulation
            assert "validate" in str(error)


def test_json_that_is_no_utf8_is_named_with_its_line(tmp_path):
    error = refused(put(tmp_path, "a.json", b'[["a", "b",\n "\xe9"]]'), "this is no UTF-8 text")
    assert error.where.endswith("line 2")


def test_a_dataset_without_a_shape_is_no_table(tmp_path):
    import h5py

    with h5py.File(tmp_path / "a.h5", "w") as file:
        file["cells"] = h5py.Empty("i8")
    refused(tmp_path / "a.h5", "no array could hold facets, among cells")


def test_words_in_a_dataset_of_any_name_are_read(tmp_path):
    import h5py

    with h5py.File(tmp_path / "a.h5", "w") as file:
        file.create_dataset(
            "cells", data=np.array([["a", "c", "b"]], dtype=object), dtype=h5py.string_dtype()
        )
    assert read(tmp_path / "a.h5") == Triangulation.from_facets([["a", "c", "b"]])


def test_a_damaged_header_is_named_and_not_shown(tmp_path):
    text = b"{'descr': __import__, 'shape': (1, 3)}\n"
    data = b"\x93NUMPY\x01\x00" + len(text).to_bytes(2, "little") + text
    assert refused(put(tmp_path, "a.npy", data), "the header is damaged").what == "the header is damaged"


def test_every_format_says_what_it_holds():
    assert all(f.holds and (f.read or f.write) for f in formats().values())
    assert all(s.startswith(".") and s == s.lower() for f in formats().values() for s in f.suffixes)
