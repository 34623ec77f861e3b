"""Every command of README.md runs from a fresh copy and answers what README.md shows."""

import re
import shutil
import subprocess
import sys

import pytest
from commandline import MESHES, ROOT, environment

TEXT = (ROOT / "README.md").read_text()


def blocks(language):
    """The contents of the fenced blocks in a language, in order."""
    return re.findall(rf"^```{language}\n(.*?)^```$", TEXT, re.M | re.S)


def tour():
    """(command, answer) of every ``$`` line, in order."""
    steps = []
    for block in blocks("console"):
        for line in block.splitlines():
            if line.startswith("$ "):
                steps.append((line[2:], []))
            else:
                steps[-1][1].append(line)
    return [(command, "".join(f"{line}\n" for line in answer)) for command, answer in steps]


@pytest.fixture
def copy(tmp_path):
    """A fresh copy of what a reader has, in a directory with a blank in its name."""
    folder = tmp_path / "fresh copy"
    folder.mkdir()
    shutil.copytree(MESHES, folder / "meshes")
    shutil.copytree(MESHES.parent / "scripts", folder / "scripts")
    return folder


def test_the_tour_answers_what_it_shows(copy):
    assert len(tour()) >= 15
    for command, answer in tour():
        run = subprocess.run(
            ["bash", "-c", command],
            cwd=copy,
            env=environment(),
            stdout=subprocess.PIPE,
            stderr=subprocess.STDOUT,
            timeout=120,
            check=False,
        )
        assert run.stdout.decode() == answer, command
        if "status" not in answer:
            assert run.returncode == 0, command


def test_the_python_of_the_tour_runs(copy):
    (code,) = blocks("python")
    run = subprocess.run([sys.executable, "-c", code], cwd=copy, env=environment(), capture_output=True)
    assert run.returncode == 0, run.stderr.decode()
    assert len(run.stdout.splitlines()) == 3


def test_the_second_of_the_two_commands_is_the_program(copy):
    (block,) = blocks("sh")
    first, second = block.splitlines()
    assert (ROOT / first).exists()
    command = second.removeprefix(".venv/bin/")
    assert command.startswith("dualize build ")
    subprocess.run(command, shell=True, cwd=copy, env=environment(), capture_output=True, check=True)


def test_every_file_that_is_named_exists():
    named = set(re.findall(r"`((?:scripts|meshes|tests)/[\w./]+)`", TEXT)) | {"DEVELOPERS.md"}
    assert {name for name in named if not (ROOT / name).exists()} == set()
