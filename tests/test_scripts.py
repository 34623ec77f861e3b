"""The scripts: what they promise, as far as it can be tried without making environments anew."""

import json
import os
import re
import shutil
import subprocess
import sys
import tomllib

import pytest
from commandline import BIN, ROOT, environment

SHELL = ["scripts/quickstart", "scripts/test", ".ci/run", "scripts/environment.sh"]


@pytest.mark.parametrize("name", SHELL)
def test_shell_scripts_parse(name):
    subprocess.run(["bash", "-n", str(ROOT / name)], check=True)


@pytest.mark.parametrize("name", ["scripts/quickstart", "scripts/test", ".ci/run", "scripts/bench"])
def test_scripts_are_executable(name):
    assert os.access(ROOT / name, os.X_OK)


def test_every_data_file_is_packed_into_an_installed_package():
    # setuptools packs what matches relative to the innermost package
    settings = tomllib.loads((ROOT / "pyproject.toml").read_text())["tool"]["setuptools"]["package-data"]
    package = ROOT / "dualize"
    hidden = ("__pycache__", ".mypy_cache")
    for path in package.rglob("*"):
        if path.is_dir() or path.suffix == ".py" or any(part in hidden for part in path.parts):
            continue
        home = next(folder for folder in path.parents if (folder / "__init__.py").exists())
        name = ".".join(home.relative_to(ROOT).parts)
        patterns = [*settings.get("*", []), *settings.get(name, [])]
        assert any(path.relative_to(home).match(pattern) for pattern in patterns), path


@pytest.fixture
def copy(tmp_path):
    """A fresh copy of the project whose `.venv` is this environment: nothing is installed or downloaded.

    The interpreter of the copy answers ``-m pip`` without doing anything, and is the real one otherwise.
    """
    folder = tmp_path / "fresh copy"
    for name in ("meshes", "scripts"):
        shutil.copytree(ROOT / name, folder / name, ignore=shutil.ignore_patterns("__pycache__"))
    binaries = folder / ".venv" / "bin"
    binaries.mkdir(parents=True)
    (binaries / "dualize").symlink_to(BIN / "dualize")
    python = binaries / "python"
    python.write_text(
        "#!/bin/sh\n"
        'echo "$@" >> calls\n'
        'if [ "$1 $2" = "-m pip" ]; then exit 0; fi\n'
        f'exec "{sys.executable}" "$@"\n'
    )
    python.chmod(0o755)
    return folder


def test_quickstart_builds_audits_and_says_where_the_result_lies_and_does_so_twice(copy):
    for _ in range(2):
        run = subprocess.run(
            [str(copy / "scripts" / "quickstart")],
            cwd="/",
            env=environment(),
            capture_output=True,
            timeout=120,
        )
        assert run.returncode == 0, run.stderr.decode()
        said = run.stdout.decode()
        assert f"the skeleton lies in {copy}/foam.h5" in said
        assert "foam skeleton of dimension 4" in said and "2 components" in said
        assert "Audit of" in said
    # what is written is readable, and the package was installed from the copy
    assert (copy / "foam.h5").stat().st_size > 0
    assert "-m pip install --quiet --disable-pip-version-check ." in (copy / "calls").read_text()


def test_test_script_hands_its_arguments_to_pytest(copy):
    (copy / "test_nothing.py").write_text("def test_one():\n    pass\ndef test_two():\n    pass\n")
    run = subprocess.run(
        [str(copy / "scripts" / "test"), "test_nothing.py", "-k", "two"],
        env=environment(DUALIZE_ENV=str(copy / ".venv")),
        cwd="/",
        capture_output=True,
        timeout=120,
    )
    assert run.returncode == 0, run.stdout.decode() + run.stderr.decode()
    assert "1 passed" in run.stdout.decode()


def test_an_old_python_is_refused_with_the_way_out(tmp_path):
    old = tmp_path / "python"
    old.write_text("#!/bin/sh\nexit 1\n")
    old.chmod(0o755)
    script = f'set -euo pipefail; source "{ROOT}/scripts/environment.sh"; environment "{tmp_path}/env"'
    run = subprocess.run(["bash", "-c", script], env=environment(PYTHON=str(old)), capture_output=True)
    assert run.returncode == 2
    assert run.stderr.startswith(b"error: there is no Python 3.11 or later")
    assert b"hint: install one, or name it: PYTHON=" in run.stderr


def bench(*arguments):
    return subprocess.run(
        [sys.executable, str(ROOT / "scripts" / "bench"), *arguments], capture_output=True, env=environment()
    )


def test_bench_prints_a_table_and_writes_figures(tmp_path):
    # status 1 is a missed limit: on a busy machine that is no failure of the script
    run = bench("--quick", "--case", "one 4-simplex", "--json", str(tmp_path / "figures.json"))
    assert run.returncode in (0, 1), run.stderr.decode()
    head, row = run.stdout.decode().splitlines()
    assert head.split()[:5] == ["case", "ours", "reference", "ratio", "limit"]
    (figures,) = json.loads((tmp_path / "figures.json").read_text())["cases"]
    assert figures["ratio"] == pytest.approx(figures["ours"] / figures["reference"])
    assert figures["holds"] == (figures["ratio"] <= figures["ratio_limit"]) == (run.returncode == 0)
    assert re.search(r"holds|misses", row)


def test_bench_names_its_cases_when_none_fits():
    run = bench("--case", "nothing like this")
    assert run.returncode == 2
    assert b"error: no case has" in run.stderr and b"one 4-simplex" in run.stderr
