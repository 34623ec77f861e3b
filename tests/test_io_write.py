"""Writing: nothing is overwritten unasked, and a file is there whole or not at all."""

import errno
import gc
import io
import os
import subprocess
import sys
import threading

import numpy as np
import pytest
import specimens as sp

from dualize import InputError, Triangulation, build, load, read
from dualize.formats import encode, hdf5, registry, target, write

T = Triangulation.from_facets(sp.chain(4, 30))
FOAM = build(T)
SUFFIXES = [".json", ".json.gz", ".h5", ".npz"]
suffixes = pytest.mark.parametrize("suffix", SUFFIXES)


@suffixes
def test_an_existing_file_is_not_touched(tmp_path, suffix):
    path = tmp_path / f"a{suffix}"
    path.write_bytes(b"precious")
    with pytest.raises(InputError, match="the file exists already") as caught:
        FOAM.write(path)
    assert "--force" in caught.value.hint
    assert path.read_bytes() == b"precious"
    assert os.listdir(tmp_path) == [path.name]


@suffixes
def test_force_overwrites(tmp_path, suffix):
    path = tmp_path / f"a{suffix}"
    path.write_bytes(b"old")
    FOAM.write(path, force=True)
    assert load(path) == FOAM
    assert os.listdir(tmp_path) == [path.name]


def test_force_keeps_the_permissions_of_the_old_file(tmp_path):
    path = tmp_path / "a.json"
    path.write_bytes(b"old")
    path.chmod(0o640)
    FOAM.write(path, force=True)
    assert path.stat().st_mode & 0o777 == 0o640


def test_a_new_file_has_the_permissions_of_any_new_file(tmp_path):
    FOAM.write(tmp_path / "a.json")
    (tmp_path / "b").touch()
    assert (tmp_path / "a.json").stat().st_mode == (tmp_path / "b").stat().st_mode


def test_force_follows_a_link(tmp_path):
    (tmp_path / "real.json").write_bytes(b"old")
    (tmp_path / "link.json").symlink_to("real.json")
    FOAM.write(tmp_path / "link.json", force=True)
    assert (tmp_path / "link.json").is_symlink()
    assert load(tmp_path / "real.json") == FOAM


@pytest.mark.parametrize(
    "failure", [KeyboardInterrupt, MemoryError, ZeroDivisionError], ids=lambda e: e.__name__
)
@pytest.mark.parametrize("before", [None, b"old"], ids=["new", "old"])
def test_a_failure_leaves_everything_as_it_was(tmp_path, monkeypatch, failure, before):
    path = tmp_path / "a.json"
    if before:
        path.write_bytes(before)

    def fail(content, target):
        target.stream.write(b"{half")
        raise failure

    broken = registry.formats()["json"]._replace(write=fail)
    monkeypatch.setattr(registry, "choose_writer", lambda *args: (broken, ".json"))
    with pytest.raises(failure):
        write(FOAM, path, force=True)
    assert os.listdir(tmp_path) == ([path.name] if before else [])
    assert before is None or path.read_bytes() == before


def test_a_failing_rename_leaves_everything_as_it_was(tmp_path, monkeypatch):
    path = tmp_path / "a.json"
    path.write_bytes(b"old")

    def fail(*args):
        raise OSError(errno.EIO, "Input/output error")

    monkeypatch.setattr(target.os, "replace", fail)
    with pytest.raises(InputError, match="the file cannot be written: Input/output error"):
        FOAM.write(path, force=True)
    assert os.listdir(tmp_path) == ["a.json"]
    assert path.read_bytes() == b"old"


FULL_DISK = """
import resource, signal, sys
signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
from dualize import Triangulation, build, InputError
s = build(Triangulation.from_facets([[i, i + 1, i + 2, i + 3, i + 4] for i in range(300)]))
resource.setrlimit(resource.RLIMIT_FSIZE, (20_000, 20_000))
try:
    s.write(sys.argv[1], force=True)
except InputError as error:
    print(error.what)
"""


@suffixes
def test_a_full_disk_leaves_the_old_file(tmp_path, suffix):
    """The limit on the size of a file stands for the end of the disk."""
    path = tmp_path / f"a{suffix}"
    path.write_bytes(b"old")
    environment = {**os.environ, "PYTHONDONTWRITEBYTECODE": "1"}
    script = FULL_DISK.replace("range(300)", "range(3000)") if suffix == ".json.gz" else FULL_DISK
    done = subprocess.run(
        [sys.executable, "-c", script, str(path)],
        capture_output=True,
        text=True,
        env=environment,
        check=False,
    )
    assert done.stdout == "there is no room for the file; nothing was written\n", done.stderr
    assert done.stderr == ""
    assert path.read_bytes() == b"old"
    assert os.listdir(tmp_path) == [path.name]


@pytest.mark.parametrize("failure", [KeyboardInterrupt, OSError], ids=lambda e: e.__name__)
@pytest.mark.parametrize("call", [1, 3, 10])
def test_a_failure_inside_the_hdf5_library_comes_out(tmp_path, failure, call, capfd):
    class Failing(io.BytesIO):
        calls = 0

        def write(self, data):
            self.calls += 1
            if self.calls == call:
                raise failure
            return super().write(data)

    with pytest.raises(failure):
        hdf5.write(FOAM, target.Target(Failing(), path="somewhere"))
    gc.collect()
    assert capfd.readouterr() == ("", "")


def test_a_directory_that_does_not_exist(tmp_path):
    with pytest.raises(InputError, match="there is no such directory"):
        FOAM.write(tmp_path / "none" / "a.json")


def test_a_directory_in_the_place_of_the_file(tmp_path):
    (tmp_path / "a.json").mkdir()
    with pytest.raises(InputError, match="this is a directory, not a file"):
        FOAM.write(tmp_path / "a.json", force=True)


def test_the_bytes_are_on_the_disk_before_the_name_is(tmp_path, monkeypatch):
    order = []
    for name in ("fsync", "replace"):
        real = getattr(os, name)
        monkeypatch.setattr(target.os, name, lambda *a, n=name, f=real: (order.append(n), f(*a))[1])
    FOAM.write(tmp_path / "a.json")
    assert order[:2] == ["fsync", "replace"]


def test_a_directory_that_may_not_be_written(tmp_path, monkeypatch):
    def forbidden(*args, **kwargs):
        raise PermissionError(errno.EACCES, "Permission denied")

    monkeypatch.setattr(target.os, "open", forbidden)
    with pytest.raises(InputError, match="the file may not be written"):
        FOAM.write(tmp_path / "a.json")


REFUSED = {
    "unknown-suffix": (FOAM, "a.docx", {}, r"no format has the suffix \.docx"),
    "no-suffix": (FOAM, "a", {}, "the name has no suffix"),
    "read-only-format": (T, "a.vtk", {}, r"\.vtk can be read, not written"),
    "skeleton-as-text": (FOAM, "a.txt", {}, "facet text holds triangulations, not skeletons"),
    "skeleton-as-npy": (FOAM, "a.npy", {}, "NPY holds one array, not a skeleton"),
    "skeleton-as-gluing": (FOAM, "a.json", {"kind": "gluing"}, "a skeleton is no gluing table"),
    "gluing-as-text": (T, "a.txt", {"kind": "gluing"}, "text files hold no gluing tables"),
    "compressed-json": (FOAM, "a.json", {"compress": True}, "json files are not compressed inside"),
    "packed-hdf5": (FOAM, "a.h5.gz", {}, r"no format has the suffix \.gz"),
    "packed-by-kind": (FOAM, "a.gz", {"kind": "npz"}, "npz files are not packed with gzip"),
}


@pytest.mark.parametrize(("content", "name", "options", "what"), REFUSED.values(), ids=REFUSED.keys())
def test_what_a_format_cannot_hold(tmp_path, content, name, options, what):
    with pytest.raises(InputError, match=what):
        write(content, tmp_path / name, **options)
    assert os.listdir(tmp_path) == []


def test_the_suffixes_named_for_a_skeleton_are_those_that_hold_one(tmp_path):
    with pytest.raises(InputError, match="no format has the suffix") as caught:
        write(FOAM, tmp_path / "a.docx")
    assert caught.value.where == str(tmp_path / "a.docx")
    assert caught.value.hint.startswith("known suffixes: .h5, .hdf5, .hdf, .npz, .json; ")
    with pytest.raises(InputError, match="no format has the suffix") as caught:
        write(T, tmp_path / "a.docx")
    assert caught.value.hint.count(".csv") == 1


def test_dropped_coordinates_are_noted(tmp_path):
    notes = []
    t = Triangulation.from_facets(sp.simplex(3), coordinates=np.eye(4))
    write(t, tmp_path / "a.txt", notes=notes.append)
    assert notes == ["left out the coordinates, which text files cannot hold"]


EXTRAS = {
    "name-of-a-table": {"edges/face": np.arange(3)},
    "name-of-the-head": {"counts/more": 1},
    "empty-name": {"a//b": 1},
    "dots": {"a/../b": 1},
    "below-an-entry": {"a": 1, "a/b": 2},
    "objects": {"a": np.array([{}], dtype=object)},
    "no-json": {"a": {1, 2}},
}


@pytest.mark.parametrize("kind", ["json", "hdf5", "npz"])
@pytest.mark.parametrize("extra", EXTRAS.values(), ids=EXTRAS.keys())
def test_further_groups_that_no_file_can_hold(extra, kind):
    import dataclasses

    with pytest.raises(
        InputError, match=r"cannot have this name|has the name of|empty name|cannot be written"
    ):
        encode(dataclasses.replace(FOAM, extra=extra), kind)


@pytest.mark.parametrize(
    ("array", "what"),
    [(np.array([np.nan]), "no infinity and no NaN"), (np.array([1j]), "no complex numbers")],
    ids=["nan", "complex"],
)
def test_numbers_that_json_has_not(array, what):
    import dataclasses

    with pytest.raises(InputError, match=what):
        encode(dataclasses.replace(FOAM, extra={"a": array}), "json")


# --------------------------------------------------------------------------------------------------
# Standard output, pipes


def python(script, **options):
    return subprocess.run([sys.executable, "-c", script], capture_output=True, check=True, **options).stdout


def test_standard_output_is_facet_text_for_labels():
    out = python("from dualize import Triangulation; Triangulation.from_facets([[3, 1, 2]]).write('-')")
    assert out == b"1 2 3\n"  # an even permutation of what was given


def test_standard_output_is_json_for_tables_and_skeletons():
    script = (
        "from dualize import *; t = Triangulation.from_gluings([[-1] * 3], [[[0, 1, 2]] * 3]); {}.write('-')"
    )
    assert python(script.format("t")).startswith(b'{\n  "across": [[-1,-1,-1]]')
    assert python(script.format("build(t)")).startswith(b'{\n  "format": "foam-skeleton"')


@pytest.mark.parametrize("kind", ["json", "hdf5", "npz"])
def test_standard_output_to_standard_input(kind):
    script = "from dualize import *; build(Triangulation.from_facets([[0, 1, 2, 3]])).write('-', kind='{}')"
    out = python(script.format(kind))
    script = "from dualize import formats; o = formats.open_any('-'); print(o.name, o.kind, o.content)"
    seen = python(script, input=out).decode()
    assert seen.startswith(f"- {kind} <Skeleton 3D: 1 vertices")


def test_a_pipe_is_written_and_stays_a_pipe(tmp_path):
    path = tmp_path / "pipe.json"
    os.mkfifo(path)
    seen = []
    reader = threading.Thread(target=lambda: seen.append(read(path)))
    reader.start()
    T.write(path)
    reader.join(10)
    assert seen == [T]
    assert path.is_fifo()
