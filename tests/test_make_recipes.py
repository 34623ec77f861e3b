"""The table of recipes, expressions, and ``dualize make`` as a process."""

import inspect
import json
from importlib import import_module

import pytest
from commandline import dualize as run
from commandline import lines, refused

import dualize
from dualize import make
from dualize.make.recipes import RECIPES, evaluate, evaluate_any, recipe

# A call of every recipe, as on the command line.
CALLS = {
    "lattice": ["2", "1", "2"],
    "cyclic-polytope": ["7"],
    "cone": ["S3"],
    "suspension": ["S3"],
    "join": ["circle(3)", "circle(4)"],
    "product": ["S2", "circle(3)"],
    "slab": ["S3", "2"],
    "mapping-torus": ["S3", "(0 1 2)"],
    "connected-sum": ["RP3", "S2xS1"],
    "published": ["RP3"],
    "lens-space": ["5", "2"],
    "move-side": ["4", "3"],
    "points": ["2"],
}
FACTORS = ("circle", "interval", "points")
WHOLE = [n for n in RECIPES if n not in FACTORS and n != "delaunay"]


@pytest.mark.parametrize("name", WHOLE)
def test_every_recipe_makes_something_that_has_a_dual(name):
    dualize.build(make.make(name, *CALLS.get(name, [])))


@pytest.mark.parametrize("name", RECIPES)
def test_table_agrees_with_the_function(name):
    r = RECIPES[name]
    module, function = r.function.split(".")
    signature = inspect.signature(getattr(import_module(f"dualize.make.{module}"), function))
    for p in r.parameters:
        there = signature.parameters[p.name]
        if p.kind == "integers":
            assert there.kind is inspect.Parameter.VAR_POSITIONAL
            continue
        default = {"yes": True, "no": False}.get(p.default, p.default) if p.kind == "switch" else p.default
        assert (default is ...) == (there.default is inspect.Parameter.empty)
        assert default is ... or default == there.default
    assert r.summary
    assert "\n" not in r.usage


@pytest.mark.parametrize("name", [n for n in make.__all__])
def test_every_exported_name_is_there(name):
    assert getattr(make, name) is not None
    assert name in dir(make)


def test_unknown_export_is_an_attribute_error():
    with pytest.raises(AttributeError, match="no attribute 'nothing'"):
        make.nothing  # noqa: B018


@pytest.mark.parametrize(
    "text,simplices",
    [
        ("CP2", 36),
        ("L(3,1)", 54),
        ("l(3, 1)", 54),
        ("slab(S3, layers=2)", 40),
        ("lattice(3,3,3,periodic=xyz)", 162),
        ("product( torus(2), circle( 4 ) )", 14 * 4 * 3),
        ("connected-sum(CP2, CP2, reverse=yes)", 70),
        ("connected_sum(CP2,CP2)", 70),
        ("suspension(product(S2,circle(3)))", 72),
        ("mapping-torus(S3,(0 1 2)(3 4))", 60),
        ("cell-24", 96),
    ],
)
def test_expressions_name_complexes(text, simplices):
    assert len(evaluate(text)) == simplices


@pytest.mark.parametrize(
    "text,message",
    [
        ("nothing", "no recipe 'nothing'"),
        ("latice(3,3)", r"'latice'; is it lattice"),
        ("slab(S3", "names no complex|do not match"),
        ("slab(S3))", "do not match|names no complex"),
        ("slab(S3, levels=2)", r"no parameter 'levels'; is it layers"),
        ("slab(S3, 2, layers=2)", "got layers twice"),
        ("slab(S3, 2, 3)", "got 3 arguments, not 2"),
        ("slab()", "needs base"),
        ("slab(S3, two)", "layers is 'two', not an integer"),
        ("slab(S3, 0)", "layers is 0; it must be at least 1"),
        ("simplex(5)", "dimension is 5; it must be 2 to 4"),
        ("lattice(3)", "has 1 sizes"),
        ("lattice(2,2,variant=conned)", r"variant is 'conned'; is it coned"),
        ("connected-sum(CP2,CP2,reverse=maybe)", "reverse is 'maybe'"),
        ("mapping-torus(S3,(0 1)(1 2))", "moves 1 twice"),
        ("mapping-torus(S3,x)", "cannot be read"),
        ("delaunay(x)", "given as an array or a file"),
        ("circle(4)", "dimension 1"),
    ],
)
def test_wrong_expressions_are_refused(text, message):
    with pytest.raises(dualize.InputError, match=message):
        evaluate(text)


def test_numbers_are_checked_before_complexes_are_made():
    with pytest.raises(dualize.InputError, match="layers is 0"):
        recipe("slab")("no such thing", 0)


def test_no_means_no():
    asked = make.make("coloured-graph", 14, 3, bipartite="no", seed=3)
    assert asked == make.coloured_graph(14, 3, bipartite=False, seed=3)
    assert make.make("lattice", 2, 2, coordinates="no").coordinates is None


def test_factors_are_arrays():
    assert evaluate_any("circle(4)").tolist() == [[0, 1], [1, 2], [2, 3], [3, 0]]


def test_dualize_make_is_imported_on_first_use():
    import subprocess
    import sys

    code = "import sys, dualize; assert 'dualize.make' not in sys.modules; print(dualize.make.simplex(3))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout == "<Triangulation 3D: 1 simplices, labelled, 4 boundary facets>\n"


# -- the command line ------------------------------------------------------------------------------


def test_list_has_one_line_for_every_recipe(tmp_path):
    said = lines(run("make", "--list", cwd=tmp_path).stdout)
    assert [line.split()[0] for line in said] == list(RECIPES)
    assert all(r.summary in line for r, line in zip(RECIPES.values(), said, strict=True))


def test_list_as_json(tmp_path):
    told = json.loads(run("make", "--list", "--spaces", "--json", cwd=tmp_path).stdout)
    assert [r["name"] for r in told["recipes"]] == list(RECIPES)
    assert {s["space"] for s in told["spaces"]} >= {"CP2", "K3", "RP3"}


def test_spaces_have_one_line_each_with_their_source(tmp_path):
    said = lines(run("make", "--spaces", cwd=tmp_path).stdout)
    assert len(said) == len(make.spaces())
    assert any(line.startswith("CP2 ") and "Banchoff" in line for line in said)


def test_example_of_the_periodic_lattice(tmp_path):
    done = run("make", "lattice", "3", "3", "3", "3", "--periodic", "xyzt", cwd=tmp_path)
    assert done.returncode == 0
    assert len(lines(done.stdout)) == 1944
    built = run("build", "-", "-o", "foam.json", cwd=tmp_path, data=done.stdout)
    assert built.returncode == 0
    counts = dualize.load(tmp_path / "foam.json").counts
    assert (counts["vertices"], counts["edges_internal"], counts["faces_internal"]) == (1944, 4860, 4050)


def test_gluing_tables_go_out_as_json(tmp_path):
    done = run("make", "shared-pair", "4", cwd=tmp_path)
    assert json.loads(done.stdout)["across"] == [[1, 1, 1, 1, -1], [0, 0, 0, 0, -1]]


@pytest.mark.parametrize("name", WHOLE)
def test_files_hold_what_the_recipe_makes(name, tmp_path):
    call = CALLS.get(name, [])
    done = run("make", name, *call, "-o", "made.json", cwd=tmp_path)
    assert done.returncode == 0, done.stderr
    assert done.stdout == b""
    assert dualize.read(tmp_path / "made.json") == make.make(name, *call)


def test_text_keeps_the_complex_and_says_that_coordinates_are_left_out(tmp_path):
    done = run("make", "lattice", "2", "2", "2", "-o", "made.txt", cwd=tmp_path)
    assert b"left out the coordinates" in done.stderr
    back, made = dualize.read(tmp_path / "made.txt"), make.lattice(2, 2, 2)
    assert back.corners.tolist() == made.corners.tolist()
    assert (
        dualize.build(back)["vertices/orientation"].tolist()
        == dualize.build(made)["vertices/orientation"].tolist()
    )


def test_complexes_come_from_files_and_from_standard_input(tmp_path):
    run("make", "published", "RP3", "-o", "space.txt", cwd=tmp_path)
    from_file = run("make", "suspension", "space.txt", cwd=tmp_path)
    from_pipe = run("make", "suspension", "-", cwd=tmp_path, data=(tmp_path / "space.txt").read_bytes())
    by_name = run("make", "suspension", "RP3", cwd=tmp_path)
    assert from_file.stdout == from_pipe.stdout == by_name.stdout
    assert len(lines(by_name.stdout)) == 80


def test_points_come_from_a_file(tmp_path):
    (tmp_path / "points.csv").write_text(
        "# corners and centre\n0, 0, 0\n1,0,0\n0 1 0\n0,0,1\n\n0.2, 0.2, 0.2\n"
    )
    done = run("make", "delaunay", "points.csv", cwd=tmp_path)
    assert len(lines(done.stdout)) == 4


def test_parameters_with_a_default_may_be_given_by_name(tmp_path):
    by_name = run("make", "stacked-ball", "--dimension", "3", "--simplices", "5", cwd=tmp_path)
    by_order = run("make", "stacked-ball", "5", "3", cwd=tmp_path)
    assert by_name.stdout == by_order.stdout != b""


@pytest.mark.parametrize(
    "arguments,what,hint",
    [
        ([], "needs a recipe", "--list"),
        (["latice", "3"], "no recipe 'latice'; is it lattice", "--list"),
        (["CP2"], "no recipe 'CP2'", "dualize make published 'CP2'"),
        (["slab"], "needs BASE", "usage"),
        (["slab", "S3", "0"], "layers is 0; it must be at least 1", "layers"),
        (["lattice", "3", "x"], "sizes is 'x', not an integer", "cubes"),
        (["lattice", "3", "3", "--periodc", "x"], "no option --periodc; is it --periodic", "--help"),
        (["published", "CP3"], "'CP3'; is it", "spaces:"),
        (["delaunay", "none.txt"], "cannot be read", ""),
        (["cone", "none.txt"], "none.txt", ""),
        (["circle", "4"], "dimension 1", "factor"),
        (["simplex", "3", "-o", "no/where.txt"], "no such directory", "make it first"),
    ],
    ids=lambda x: " ".join(x) if isinstance(x, list) else "",
)
def test_refusals_are_two_lines(arguments, what, hint, tmp_path):
    said = refused(run("make", *arguments, cwd=tmp_path))
    assert what in said[0]
    assert hint in said[1]


def test_a_range_is_told_once(tmp_path):
    said = refused(run("make", "ridge-ring", "2", cwd=tmp_path))
    assert said == ("number is 2; it must be at least 3", "number: how many")


@pytest.mark.parametrize("value", [2.7, True, "2.0", None], ids=repr)
def test_numbers_that_are_no_integers_are_not_rounded(value):
    with pytest.raises(dualize.InputError, match=r"not an integer|must be 2 to 4"):
        make.make("torus", value)


def test_a_long_symmetry_that_cannot_be_read_is_refused_at_once():
    # a pattern with nested repetitions takes 2^60 steps here
    with pytest.raises(dualize.InputError, match="cannot be read"):
        make.make("mapping-torus", "S3", "(" + 60 * "1" + "x)")


@pytest.mark.parametrize(
    "rows,what", [("0 0\n1 x\n", "line 2"), ("0 0\n1 1 1\n", "line 2"), ("# none\n", "no points")]
)
def test_damaged_points_are_refused_with_their_line(rows, what, tmp_path):
    (tmp_path / "points.txt").write_text(rows)
    assert what in refused(run("make", "delaunay", "points.txt", cwd=tmp_path))[0]


def test_an_existing_file_is_kept(tmp_path):
    (tmp_path / "made.txt").write_text("mine")
    assert "exists" in refused(run("make", "simplex", "-o", "made.txt", cwd=tmp_path))[0]
    assert (tmp_path / "made.txt").read_text() == "mine"


@pytest.mark.parametrize("name", ["lattice", "slab", "lens-space"])
def test_help_of_a_recipe_tells_its_parameters(name, tmp_path):
    said = run("make", name, "--help", cwd=tmp_path).stdout.decode()
    for p in RECIPES[name].parameters:
        assert (f"--{p.name}" if p.option else p.name.upper()) in said
