"""``dualize change``: pipes, files that stay, records, messages, refusals."""

import json
import subprocess
import sys

import pytest
from catalogue import CATALOGUE
from specimens import slab

import dualize
from dualize import Triangulation


def run(*arguments, stdin=None, cwd=None):
    return subprocess.run(
        [sys.executable, "-m", "dualize", *map(str, arguments)],
        input=stdin,
        capture_output=True,
        cwd=cwd,
        text=True,
    )


@pytest.fixture
def cp2(tmp_path):
    path = tmp_path / "cp2.txt"
    Triangulation.from_facets(CATALOGUE["cp2_9"].facets).write(path)
    return path


@pytest.fixture
def tetrahedra(tmp_path):
    path = tmp_path / "two.txt"
    path.write_text("a b c d\nb c d e\n")
    return path


def rows(text):
    return sorted(
        tuple(sorted(line.split())) for line in text.splitlines() if line and not line.startswith("#")
    )


def test_a_named_move_writes_the_new_complex_and_says_what_changed(tetrahedra):
    done = run("change", tetrahedra, "move", "2-3", "--at", "b,c,d")
    assert done.returncode == 0
    assert rows(done.stdout) == [("a", "b", "c", "e"), ("a", "b", "d", "e"), ("a", "c", "d", "e")]
    assert "2 -> 3 simplices, 1 move" in done.stderr
    assert "replaced: b c d; new simplex: a e" in done.stderr


def test_new_labels_are_stated(tetrahedra):
    done = run("change", tetrahedra, "move", "1-4", "--simplex", 0)
    assert "new labels: new0" in done.stderr


def test_changes_follow_each_other_in_pipes(cp2):
    one = run("change", cp2, "move", "1-5", "--at", "random", "--seed", 1)
    two = run("change", "-", "walk", 50, "--seed", 2, stdin=one.stdout)
    three = run("build", "-", "-o", "-", "--quiet", stdin=two.stdout)
    assert (one.returncode, two.returncode, three.returncode) == (0, 0, 0), two.stderr + three.stderr
    assert json.loads(three.stdout)["flags"]["orientable"] == [True]


def test_the_input_is_never_altered(cp2):
    before = cp2.read_bytes()
    done = run("change", cp2, "reverse", "-o", cp2, "--force")
    assert done.returncode == 2
    assert "which a change never alters" in done.stderr
    assert cp2.read_bytes() == before


def test_undo_restores_the_file(cp2, tmp_path):
    moved, record, back = tmp_path / "moved.txt", tmp_path / "moves.json", tmp_path / "back.txt"
    assert run("change", cp2, "walk", 200, "--seed", 5, "--record", record, "-o", moved).returncode == 0
    assert run("change", moved, "undo", record, "-o", back).returncode == 0
    assert dualize.read(back) == dualize.read(cp2)
    again = tmp_path / "again.txt"
    assert run("change", cp2, "replay", record, "-o", again).returncode == 0
    assert again.read_bytes() == moved.read_bytes()


def test_undo_of_a_gluing_table(tmp_path):
    table, moved, record, back = (tmp_path / x for x in ("t.json", "moved.json", "moves.json", "back.json"))
    identity = [list(range(5))] * 5
    Triangulation.from_gluings([[1] * 5, [0] * 5], [identity, identity]).write(table)
    assert run("change", table, "walk", 30, "--target", 20, "--record", record, "-o", moved).returncode == 0
    assert run("change", moved, "undo", record, "-o", back).returncode == 0
    assert dualize.read(back) == dualize.read(table)


def test_states_of_a_walk_are_files(cp2, tmp_path):
    pattern = tmp_path / "state-{}.txt"
    done = run("change", cp2, "walk", 30, "--every", 10, "--states", pattern, "-o", tmp_path / "last.txt")
    assert done.returncode == 0, done.stderr
    assert sorted(p.name for p in tmp_path.glob("state-*")) == [
        "state-10.txt",
        "state-20.txt",
        "state-30.txt",
    ]
    assert dualize.read(tmp_path / "state-30.txt") == dualize.read(tmp_path / "last.txt")


def test_the_origin_of_the_pieces_is_written(tetrahedra, tmp_path):
    origin = tmp_path / "origin.json"
    done = run("change", tetrahedra, "derived", "--origin", origin, "-o", tmp_path / "fine.txt")
    assert done.returncode == 0, done.stderr
    assert json.loads(origin.read_text())["refined_from"] == [0] * 24 + [1] * 24


def test_slabs_glue_by_a_map_in_a_file(tmp_path):
    low = tmp_path / "low.txt"
    Triangulation.from_facets(slab(CATALOGUE["simplex_bd_4"].facets)).write(low)
    names = tmp_path / "map.txt"
    names.write_text("".join(f"{2 * x} {2 * x + 1}  # up\n" for x in range(5)))
    done = run("change", low, "glue", low, "--map", names)
    assert done.returncode == 0, done.stderr
    assert len(rows(done.stdout)) == 40


@pytest.fixture
def halves(tmp_path):
    """CP2 without a simplex, the same with other labels, and the maps between their boundaries."""
    one, two, maps = tmp_path / "one.txt", tmp_path / "two.txt", tmp_path / "maps.json"
    Triangulation.from_facets(CATALOGUE["cp2_minus_ball_9"].facets).write(one)
    assert run("change", one, "relabel", "--seed", 5, "-o", two).returncode == 0
    found = run("match", one, two, "--by", "isomorphism", "--all", 200, "--json")
    maps.write_text(found.stdout)
    return one, two, maps, json.loads(found.stdout)["maps"]


def test_the_maps_of_match_glue(halves):
    one, two, file, maps = halves
    assert len(maps) == 120  # all rearrangements of 5 points
    done = run("change", one, "glue", two, "--map", file)
    assert done.returncode == 0, done.stderr
    assert len(rows(done.stdout)) == 70
    assert "does not reverse" not in done.stderr
    keeping = next(n for n, one in enumerate(maps) if one["node_sign"][0] == 1)
    assert "does not reverse" in run("change", one, "glue", two, "--map", file, "--which", keeping).stderr


@pytest.mark.parametrize(
    "damage, message",
    [
        (lambda m: m["nodes"].reverse(), "does not carry links to links"),
        (lambda m: m["places"][0].__setitem__(0, 3), "the places of the map are no rearrangement"),
        (lambda m: m["nodes"].__setitem__(0, m["nodes"][1]), "the nodes of the map are no rearrangement"),
        (lambda m: m["nodes"].pop(), "the map is about other boundaries"),
        (lambda m: m.pop("places"), "a map has no nodes or no places"),
    ],
    ids=["links", "places", "nodes", "short", "missing"],
)
def test_damaged_maps_of_match_are_refused(halves, damage, message):
    one, two, file, maps = halves
    damage(maps[0])
    file.write_text(json.dumps({"maps": maps[:1]}))
    done = run("change", one, "glue", two, "--map", file)
    assert (done.returncode, done.stdout) == (2, "")
    assert message in done.stderr and "maps.json" in done.stderr


@pytest.mark.parametrize(
    "arguments, message",
    [(["--map", "FILE", "--which", 120], "there is no map 120"), (["--which", 0], "--which goes with --map")],
    ids=["too-far", "alone"],
)
def test_wrong_choices_of_a_map_are_refused(halves, arguments, message):
    one, two, file, _ = halves
    done = run("change", one, "glue", two, *[file if x == "FILE" else x for x in arguments])
    assert (done.returncode, done.stdout) == (2, "")
    assert message in done.stderr


def test_the_help_of_a_change_needs_no_input():
    done = run("change", "glue", "--help")
    assert done.returncode == 0, done.stderr
    assert done.stdout.startswith("Usage: dualize change INPUT glue") and "--map" in done.stdout


def test_the_list_shows_every_change_in_one_line():
    done = run("change", "--list")
    names = [line.split()[0] for line in done.stdout.splitlines()]
    assert names[:3] == ["move", "walk", "replay"]
    assert {"stellar", "derived", "refine", "glue", "cut", "keep", "contract", "simplify", "relabel"} <= set(
        names
    )


CASES = {
    "near-miss": (["mvoe", "2-4"], "has no change mvoe; is it move?"),
    "kind": (["move", "2-9"], "there is no move '2-9' in dimension 4"),
    "nowhere": (["move", "3-3"], "the move 3-3 can be made nowhere"),
    "exists": (["move", "2-4", "--at", "1,2,3,7"], "the new simplex exists already"),
    "label": (["stellar", "1,77"], "no simplex has the label '77'"),
    "number": (["keep", "1,x"], "'x' is no simplex number"),
    "record": (["undo", "missing.json"], "the record cannot be read"),
    "states": (["walk", "5", "--every", "2"], "--every and --states go together"),
    "segment": (["contract"], "give the two labels of a segment, or --all"),
    "closed": (["detach", "0"], "it has no boundary facet"),
}


@pytest.mark.parametrize("name", CASES)
def test_what_is_wrong_is_told_in_one_sentence(name, cp2):
    arguments, message = CASES[name]
    done = run("change", cp2, *arguments)
    assert done.returncode == 2
    assert done.stderr.startswith("error: ")
    assert message in done.stderr
    assert done.stdout == ""


def test_a_skeleton_is_not_changed(cp2, tmp_path):
    foam = tmp_path / "foam.json"
    assert run("build", cp2, "-o", foam).returncode == 0
    done = run("change", foam, "reverse")
    assert done.returncode == 2
    assert "this is a skeleton" in done.stderr


def test_no_input_is_told():
    assert "needs an input and a change" in run("change").stderr
