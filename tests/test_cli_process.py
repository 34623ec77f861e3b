"""The command line as processes of the installed program: statuses, messages, streams, signals."""

import hashlib
import json
import os
import signal
import subprocess
import sys
import time
from itertools import permutations, product
from pathlib import Path

import numpy as np
import pytest
from commandline import MESHES, PROGRAM, dualize, environment, lines, refused

import dualize as package

ONE = b"0 1 2 3 4\n"
FAN = b"0 1 2 3\n0 1 2 4\n0 1 2 5\n"  # three tetrahedra on one triangle


@pytest.fixture
def here(tmp_path):
    """A directory with a blank in its name."""
    folder = tmp_path / "a folder"
    folder.mkdir()
    (folder / "one.txt").write_bytes(ONE)
    return folder


# -- good runs -------------------------------------------------------------------------------------


def test_build_prints_five_lines_to_standard_error_and_nothing_else(here):
    run = dualize("build", "one.txt", "-o", "foam.json", cwd=here)
    assert (run.returncode, run.stdout) == (0, b"")
    assert lines(run.stderr) == [
        "one.txt -> foam.json: dimension 4, 1 component, orientable, 1 boundary component",
        "vertices  1",
        "edges     0 internal, 5 external",
        "faces     0 internal, 10 external",
        "boundary  5 nodes, 10 links",
    ]


def test_quiet_says_nothing(here):
    run = dualize("build", "one.txt", "-o", "foam.json", "--quiet", cwd=here)
    assert (run.returncode, run.stdout, run.stderr) == (0, b"", b"")


@pytest.mark.parametrize("suffix", ["json", "h5", "npz"])
def test_what_is_written_is_what_the_api_builds(here, suffix):
    assert dualize("build", MESHES / "slab_4d.txt", "-o", f"foam.{suffix}", cwd=here).returncode == 0
    assert package.load(here / f"foam.{suffix}") == package.build(package.read(MESHES / "slab_4d.txt"))


@pytest.mark.parametrize("suffix", ["json", "json.gz", "h5", "npz"])
@pytest.mark.parametrize("mesh", ["slab_4d.txt", "harbour_inside.txt", "hypercube.json", "room_3d.vtk"])
def test_same_input_gives_the_same_bytes_for_any_number_of_threads(here, mesh, suffix):
    for name, threads in (("a", 1), ("b", 2)):
        out = f"{name}.{suffix}"
        run = dualize("build", MESHES / mesh, "-o", out, "--threads", threads, cwd=here)
        assert run.returncode == 0, run.stderr
    assert (here / f"a.{suffix}").read_bytes() == (here / f"b.{suffix}").read_bytes()


def test_provenance_has_base_name_checksum_and_program_but_no_path(here):
    (here / "sub").mkdir()
    (here / "sub" / "in.txt").write_bytes(ONE)
    run = dualize("build", "sub/in.txt", "-o", "foam.json", cwd=here)
    assert run.returncode == 0
    text = (here / "foam.json").read_text()
    origin = json.loads(text)["provenance"]
    assert origin["input"] == "in.txt"
    assert origin["input_sha256"] == hashlib.sha256(ONE).hexdigest()
    assert (origin["program"], origin["program_version"]) == ("dualize", package.__version__)
    assert str(here) not in text


def test_standard_input_and_output_are_a_hyphen(here):
    run = dualize("build", "-", "-o", "-", "-q", cwd=here, data=ONE)
    assert (run.returncode, run.stderr) == (0, b"")
    made = json.loads(run.stdout)
    assert made["counts"]["nodes"] == 5
    assert made["provenance"]["input"] == "-"


def test_the_output_of_one_run_is_the_input_of_the_next(here):
    first = dualize("build", MESHES / "cp2_9.txt", "-o", "-", cwd=here)
    second = dualize("describe", "-", "--json", cwd=here, data=first.stdout)
    assert second.returncode == 0, second.stderr
    assert json.loads(second.stdout)["counts"]["vertices"] == 36


def test_from_names_the_format_of_the_input(here):
    (here / "facets.dat").write_bytes(ONE)
    refused(dualize("build", "facets.dat", "-o", "a.json", cwd=here))
    assert dualize("build", "facets.dat", "-o", "a.json", "--from", "text", cwd=here).returncode == 0


def test_to_names_the_format_of_the_output(here):
    assert dualize("build", "one.txt", "-o", "foam.out", "--to", "npz", cwd=here).returncode == 0
    assert (here / "foam.out").read_bytes()[:2] == b"PK"


def test_dataset_names_one_array_of_several(here):
    facets = np.array([[0, 1, 2, 3, 4]])
    np.savez(here / "two.npz", first=facets, second=np.array([[0, 1, 2, 3], [0, 1, 2, 4]]))
    refused(dualize("build", "two.npz", "-o", "a.json", cwd=here))
    run = dualize("build", "two.npz", "-o", "a.json", "--dataset", "second", cwd=here)
    assert run.returncode == 0, run.stderr
    assert package.load(here / "a.json").dimension == 3


def test_points_adds_the_classes_of_points_and_segments(here):
    assert dualize("build", "one.txt", "-o", "a.json", "--points", cwd=here).returncode == 0
    made = package.load(here / "a.json")
    assert made["vertices/point"].tolist() == [[0, 1, 2, 3, 4]]
    assert made["vertices/segment"].shape == (1, 10)


def test_compress_makes_the_same_skeleton_in_fewer_bytes(here):
    for name, more in (("plain.npz", []), ("small.npz", ["--compress"])):
        assert dualize("build", MESHES / "k3_16.txt", "-o", name, *more, cwd=here).returncode == 0
    assert (here / "small.npz").stat().st_size < (here / "plain.npz").stat().st_size
    assert package.load(here / "small.npz") == package.load(here / "plain.npz")


def test_keep_singular_builds_what_is_refused_without(here):
    # two tetrahedra with the same labels
    (here / "twins.txt").write_text("0 1 2 3\n0 1 2 3\n")
    what, hint = refused(dualize("build", "twins.txt", "-o", "a.json", cwd=here))
    assert "two simplices have the same labels" in what and "simplices 0 and 1" in what
    assert "--keep-singular" in hint
    assert not (here / "a.json").exists()
    assert dualize("build", "twins.txt", "-o", "a.json", "--keep-singular", cwd=here).returncode == 0
    assert package.load(here / "a.json").flags["singular"]


def test_python_dash_m_is_the_program(here):
    command = [sys.executable, "-m", "dualize", "--version"]
    run = subprocess.run(command, cwd=here, capture_output=True, check=True)
    assert run.stdout == dualize("--version", cwd=here).stdout == f"dualize {package.__version__}\n".encode()


# -- refusals --------------------------------------------------------------------------------------

WRONG = {
    "unknown verb, near miss": (["biuld"], "dualize has no verb biuld; is it build?", "known verbs: build"),
    "unknown verb, far": (["zzz"], "dualize has no verb zzz", "known verbs: build"),
    "no verb": ([], "dualize needs a verb", "known verbs: build"),
    "unknown option": (["--versoin"], "dualize has no option --versoin; is it --version?", "--help"),
    "unknown option of a verb": (
        ["build", "one.txt", "-o", "a.json", "--forse"],
        "dualize build has no option --forse; is it --force?",
        "dualize build --help",
    ),
    "no input": (["build"], "dualize build needs INPUT", "usage: dualize build [OPTIONS] INPUT -o FOAM"),
    "no output": (["build", "one.txt"], "dualize build needs -o FOAM", "usage: dualize build"),
    "one argument too many": (["describe", "one.txt", "two.txt"], "two.txt", "dualize describe --help"),
    "no threads": (["build", "one.txt", "-o", "a.json", "--threads", "0"], "0 is not in the range", "--help"),
    "missing file": (["build", "on.txt", "-o", "a.json"], "there is no such file (on.txt)", "one.txt"),
    "a directory": (["build", ".", "-o", "a.json"], "directory", "file"),
    "unknown output format": (["build", "one.txt", "-o", "a.xyz"], ".xyz", ".json"),
    "unknown format name": (["build", "one.txt", "-o", "a", "--to", "jsn"], "jsn", "json"),
    "a directory that is not there": (["build", "one.txt", "-o", "no/a.json"], "no such directory", ""),
    "describe nothing": (["describe", "gone.h5"], "there is no such file (gone.h5)", ""),
}


@pytest.mark.parametrize("case", WRONG)
def test_a_wrong_command_is_refused_in_one_line_with_a_hint(here, case):
    arguments, what, hint = WRONG[case]
    said = refused(dualize(*arguments, cwd=here))
    assert what in said[0]
    assert hint in said[1]
    assert sorted(os.listdir(here)) == ["one.txt"]


INPUTS = {
    "three simplices on a facet": (FAN, "three or more simplices"),
    "a repeated label": (b"0 1 2 2\n", "repeated"),
    "an empty file": (b"", "empty"),
    "only comments": (b"# nothing\n", ""),
    "rows of unequal length": (b"0 1 2 3\n0 1 2\n", ""),
}


@pytest.mark.parametrize("case", INPUTS)
def test_wrong_input_is_refused_with_the_name_of_the_file(here, case):
    data, word = INPUTS[case]
    (here / "in.txt").write_bytes(data)
    what, _ = refused(dualize("build", "in.txt", "-o", "a.json", cwd=here))
    assert word in what and "in.txt" in what
    assert not (here / "a.json").exists()


def test_a_skeleton_is_no_input_of_build(here):
    dualize("build", "one.txt", "-o", "foam.json", cwd=here)
    what, _ = refused(dualize("build", "foam.json", "-o", "again.json", cwd=here))
    assert "this is a skeleton already (foam.json)" in what


def test_a_damaged_skeleton_is_named_by_its_wrong_entry(here):
    dualize("build", "one.txt", "-o", "foam.json", cwd=here)
    text = (here / "foam.json").read_text()
    damaged = text.replace('"orientation": [1],', '"orientation": [7],', 1)
    assert damaged != text
    (here / "foam.json").write_text(damaged)
    what, _ = refused(dualize("describe", "foam.json", cwd=here))
    assert "foam.json" in what and "vertices/orientation" in what


def test_nothing_is_overwritten_without_force(here):
    (here / "foam.json").write_bytes(b"mine")
    what, hint = refused(dualize("build", "one.txt", "-o", "foam.json", cwd=here))
    assert "exists already (foam.json)" in what and "--force" in hint
    assert (here / "foam.json").read_bytes() == b"mine"
    assert dualize("build", "one.txt", "-o", "foam.json", "--force", cwd=here).returncode == 0
    assert package.load(here / "foam.json").counts["vertices"] == 1


def test_a_line_break_in_a_name_does_not_break_the_message(here):
    what, _ = refused(dualize("build", "no\nsuch.txt", "-o", "a.json", cwd=here))
    assert "no\\nsuch.txt" in what


@pytest.mark.skipif(not os.path.exists("/dev/full"), reason="needs a device that is always full")
@pytest.mark.parametrize(
    "arguments", [["describe", "one.txt"], ["build", "one.txt", "-o", "-"]], ids=["describe", "build"]
)
def test_a_full_standard_output_is_an_error(here, arguments):
    with open("/dev/full", "wb") as full:
        run = subprocess.run(
            [str(PROGRAM), *arguments, "-q"], cwd=here, stdout=full, stderr=subprocess.PIPE, env=environment()
        )
    assert run.returncode == 2
    assert lines(run.stderr)[0].startswith("error: ")
    assert b"Traceback" not in run.stderr and b"fault" not in run.stderr


# -- faults of our own -----------------------------------------------------------------------------

BREAK = """
import sys
import dualize.cli.build as verb
def boom(*a, **k):
    raise ZeroDivisionError("kaboom")
verb.build = boom
from dualize.cli import main
main(["build", "one.txt", "-o", "a.json"])
"""


def test_a_fault_of_our_own_asks_for_a_report_in_one_line(here):
    run = subprocess.run([sys.executable, "-c", BREAK], cwd=here, capture_output=True, env=environment())
    assert run.returncode == 2
    (line,) = lines(run.stderr)
    assert line.startswith("error: a fault in dualize itself; please report it")
    assert "ZeroDivisionError: kaboom" in line
    assert not (here / "a.json").exists()


def test_the_traceback_of_a_fault_is_shown_on_request(here):
    env = environment(DUALIZE_DEBUG="1")
    run = subprocess.run([sys.executable, "-c", BREAK], cwd=here, capture_output=True, env=env)
    assert run.returncode == 2
    assert b"Traceback" in run.stderr


# -- streams that are closed, and the environment --------------------------------------------------

CLOSED = {
    "input": ("build - -o foam.json <&-", "standard input is closed"),
    "output": ("build one.txt -o - >&-", "standard output is closed"),
    "output-of-words": ("describe one.txt >&-", "standard output is closed"),
}


def shell(here, line):
    return subprocess.run(
        f'"{PROGRAM}" {line}', shell=True, cwd=here, capture_output=True, env=environment(), timeout=60
    )


@pytest.mark.parametrize(("line", "what"), CLOSED.values(), ids=CLOSED.keys())
def test_a_closed_stream_is_named(here, line, what):
    assert refused(shell(here, line))[0] == f"{what} (-)"
    assert not (here / "foam.json").exists()


def test_closed_standard_error_puts_no_talk_into_the_data(here):
    run = shell(here, "build one.txt -o - 2>&-")
    assert (run.returncode, run.stderr) == (0, b"")
    assert json.loads(run.stdout)["format"] == "foam-skeleton"


@pytest.mark.parametrize("value", ["0", "two", "-1", "1.5"])
def test_a_wrong_number_of_threads_in_the_environment_is_refused(here, value):
    what, _ = refused(dualize("build", "one.txt", "-o", "foam.json", cwd=here, DUALIZE_THREADS=value))
    assert what.startswith(f"DUALIZE_THREADS is {value!r}, not a number of threads")


def test_a_ridge_with_a_holonomy_is_refused_with_the_name_of_the_file(here):
    (here / "knot.csv").write_text("simplex,slot,across,image0,image1,image2,image3\n0,2,0,1,0,3,2\n")
    assert (
        "(knot.csv, simplex 0, slots 2 and 3)"
        in refused(dualize("build", "knot.csv", "-o", "foam.json", cwd=here))[0]
    )


# -- pipes and signals -----------------------------------------------------------------------------


@pytest.mark.parametrize("verb", [["describe"], ["build", "-o", "-"]], ids=["describe", "build"])
def test_a_closed_pipe_ends_quietly(here, verb):
    name, *more = verb
    run = subprocess.Popen(
        [str(PROGRAM), name, str(MESHES / "k3_16.txt"), *more, "-q"],
        cwd=here,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        env=environment(),
    )
    run.stdout.close()
    said = run.stderr.read()
    assert run.wait(60) == 141  # 128 + SIGPIPE, as the shell reports it
    assert said == b""


@pytest.fixture(scope="module")
def large(tmp_path_factory):
    """A periodic lattice of 240,000 4-simplices: long enough to be interrupted."""
    n = 10
    cubes = np.array(list(product(range(n), repeat=4)))
    rows = []
    for order in permutations(range(4)):
        steps = np.zeros((5, 4), dtype=np.int64)
        for k, axis in enumerate(order):
            steps[k + 1 :, axis] += 1
        rows.append(((cubes[:, None] + steps) % n) @ n ** np.arange(4))
    path = tmp_path_factory.mktemp("a lattice") / "lattice.npy"
    np.save(path, np.concatenate(rows))
    return path


def parts(folder):
    """Half-written files."""
    return [name for name in os.listdir(folder) if name.endswith(".part")]


def start(here, large, out):
    command = [str(PROGRAM), "build", str(large), "-o", out, "--force"]
    return subprocess.Popen(command, cwd=here, stderr=subprocess.PIPE, env=environment(DUALIZE_THREADS="2"))


def stopped(run, number):
    """Send a signal; status, seconds until the end, and what was said last."""
    begin = time.perf_counter()
    run.send_signal(number)
    said = run.communicate(timeout=60)[1]
    return run.returncode, time.perf_counter() - begin, lines(said)[-1:]


SIGNALS = {"interrupt": (signal.SIGINT, 130, "interrupted"), "terminate": (signal.SIGTERM, 143, "terminated")}


@pytest.mark.parametrize("name", SIGNALS)
def test_a_signal_while_writing_leaves_the_old_file_and_no_other(here, large, name):
    number, status, word = SIGNALS[name]
    (here / "foam.json").write_bytes(b"mine")
    run = start(here, large, "foam.json")
    while not parts(here):
        assert run.poll() is None, run.communicate()
        time.sleep(0.005)
    assert stopped(run, number)[::2] == (status, [word])
    assert (here / "foam.json").read_bytes() == b"mine"
    assert parts(here) == []


def test_an_interrupt_while_reading_leaves_no_file(here):
    command = [str(PROGRAM), "build", "-", "-o", "foam.json"]
    pipes = {"stdin": subprocess.PIPE, "stderr": subprocess.PIPE}
    run = subprocess.Popen(command, cwd=here, env=environment(), **pipes)
    # more than a pipe holds, so that the program must have begun to read when all of it is taken
    run.stdin.write(ONE * 100_000)
    run.stdin.flush()
    time.sleep(0.5)  # it waits for more now
    run.send_signal(signal.SIGINT)
    assert run.wait(60) == 130
    assert lines(run.stderr.read()) == ["interrupted"]
    run.stdin.close()
    assert sorted(os.listdir(here)) == ["one.txt"]


@pytest.mark.skipif(not os.path.exists("/proc/self/maps"), reason="needs /proc to see what is loaded")
@pytest.mark.parametrize("delay", [0.0, 0.2, 0.5])
def test_an_interrupt_of_a_long_build_ends_within_two_seconds_and_leaves_no_file(here, large, delay):
    run = start(here, large, "foam.json")
    while "llvmlite" not in Path(f"/proc/{run.pid}/maps").read_text():  # compiled kernels begin
        assert run.poll() is None, run.communicate()
        time.sleep(0.005)
    time.sleep(delay)
    status, seconds, word = stopped(run, signal.SIGINT)
    assert (status, word) == (130, ["interrupted"])
    assert seconds < 2
    assert sorted(os.listdir(here)) == ["one.txt"]


# -- starting --------------------------------------------------------------------------------------

HEAVY = ["numba", "scipy", "gudhi", "h5py", "networkx", "rich", "meshio", "matplotlib", "sympy"]


@pytest.mark.parametrize(
    "arguments",
    [["--help"], ["build", "--help"], ["build", "one.txt", "-o", "a.json"], ["describe", "one.txt"]],
    ids=" ".join,
)
def test_starting_imports_no_heavy_library(here, arguments):
    code = (
        "import sys\nfrom dualize.cli import main\n"
        f"try:\n    main({arguments!r})\nfinally:\n    print(*sys.modules, sep='\\n', file=sys.stderr)\n"
    )
    run = subprocess.run([sys.executable, "-c", code], cwd=here, capture_output=True, env=environment())
    assert run.returncode == 0, run.stderr
    assert set(lines(run.stderr)) & set(HEAVY) == set()
    assert ("numpy" in lines(run.stderr)) == (arguments != ["--help"])  # or the list above says nothing
