"""Run the installed program as a process, in a directory with a blank in its name."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
MESHES = ROOT / "meshes"
BIN = Path(sys.executable).parent
PROGRAM = BIN / "dualize"


def environment(**more):
    """The environment of a process: the program on the path, one thread, and `more`."""
    path = f"{BIN}{os.pathsep}{os.environ.get('PATH', '')}"
    return {**os.environ, "PATH": path, "DUALIZE_THREADS": "1", "PYTHONWARNINGS": "error", **more}


def dualize(*arguments, cwd, data=b"", **more):
    """Run ``dualize`` with bytes on standard input; the finished process, its output as bytes."""
    command = [str(PROGRAM), *map(str, arguments)]
    return subprocess.run(
        command, cwd=cwd, input=data, capture_output=True, env=environment(**more), timeout=120, check=False
    )


def lines(output):
    """Lines of bytes as text."""
    return output.decode().splitlines()


def refused(process, status=2):
    """The error and the hint of a process that refused; nothing else on either stream."""
    said = lines(process.stderr)
    assert process.returncode == status, process
    assert process.stdout == b"", process
    assert 1 <= len(said) <= 2, said
    assert said[0].startswith("error: "), said
    assert all(line.startswith("hint: ") for line in said[1:]), said
    return said[0].removeprefix("error: "), said[1].removeprefix("hint: ") if len(said) > 1 else ""
