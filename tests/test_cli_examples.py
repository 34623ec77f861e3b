"""The examples at the end of every help text, run as they stand in a fresh copy."""

import re
import shutil
import subprocess

import click
import pytest
from commandline import MESHES, environment

from dualize.cli import group


def commands():
    """Every command by its path, "dualize" and "dualize build" and so on, with its context."""
    top = click.Context(group, info_name="dualize")
    found = {"dualize": (group, top)}
    for verb in group.list_commands(top):
        command = group.get_command(top, verb)
        found[f"dualize {verb}"] = (command, click.Context(command, info_name=verb, parent=top))
    return found


COMMANDS = commands()


def examples(path):
    """The commands in the section Examples at the end of a help text."""
    command, context = COMMANDS[path]
    text = command.get_help(context)
    assert "Examples:\n" in text, f"the help of {path} has no examples"
    section = text.rsplit("Examples:\n", 1)[1]
    return [line.strip() for line in section.splitlines() if line.strip()]


@pytest.fixture
def copy(tmp_path):
    """A fresh copy of what the examples use, in a directory with a blank in its name."""
    folder = tmp_path / "fresh copy"
    shutil.copytree(MESHES, folder / "meshes")
    return folder


def test_verbs_are_those_of_the_design():
    verbs = set(COMMANDS["dualize"][0].list_commands(COMMANDS["dualize"][1]))
    assert verbs >= {"build", "describe", "spec"}


@pytest.mark.parametrize("path", COMMANDS)
def test_help_ends_with_two_examples(path):
    assert len(examples(path)) == 2
    assert all(re.match(r"dualize( |$)", line) for line in examples(path))


@pytest.mark.parametrize("path", COMMANDS)
def test_examples_run_as_they_stand(path, copy):
    for line in examples(path):
        run = subprocess.run(line, shell=True, cwd=copy, env=environment(), capture_output=True, timeout=120)
        assert run.returncode == 0, (line, run.stderr.decode())
        assert b"error:" not in run.stderr


@pytest.mark.parametrize("path", [path for path in COMMANDS if path != "dualize"])
def test_examples_show_the_verb_they_belong_to(path):
    assert all(f"{path} " in f"{line} " for line in examples(path))


@pytest.mark.parametrize("path", COMMANDS)
def test_every_option_says_what_it_does(path):
    command, _ = COMMANDS[path]
    assert all(p.help for p in command.params if isinstance(p, click.Option))
