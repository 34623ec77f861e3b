"""The progress bar: on a terminal, after a second, on standard error."""

import os
import pty
import subprocess
import sys

import pytest
from commandline import environment

CODE = """
import sys, time
from dualize.progress import progress, silence
if {silent}:
    silence()
with progress("counting sheep", total=10) as step:
    for _ in range(10):
        time.sleep({pause})
        step(1)
print("rich" in sys.modules)
"""


def on_terminal(code):
    """Run code with standard error on a terminal; its standard output, and what the terminal saw."""
    here, there = pty.openpty()
    run = subprocess.Popen(
        [sys.executable, "-c", code], stdout=subprocess.PIPE, stderr=there, env=environment(TERM="xterm")
    )
    os.close(there)
    out = run.stdout.read()
    assert run.wait(30) == 0
    seen = b""
    try:
        while piece := os.read(here, 4096):
            seen += piece
    except OSError:  # the terminal is closed
        pass
    os.close(here)
    return out.strip(), seen


def test_long_work_on_a_terminal_shows_a_bar():
    out, seen = on_terminal(CODE.format(silent=False, pause=0.25))
    assert out == b"True"
    assert b"counting sheep" in seen


@pytest.mark.parametrize(
    "settings", [{"silent": False, "pause": 0.01}, {"silent": True, "pause": 0.15}], ids=["short", "quiet"]
)
def test_no_bar_and_no_library_for_short_work_or_quiet(settings):
    assert on_terminal(CODE.format(**settings)) == (b"False", b"")


def test_no_bar_where_standard_error_is_no_terminal():
    code = CODE.format(silent=False, pause=0.15)
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, env=environment(), check=True)
    assert (run.stdout.strip(), run.stderr) == (b"False", b"")


def test_a_failure_inside_goes_through():
    from dualize.progress import progress

    with pytest.raises(ZeroDivisionError, match="division"), progress("dividing"):
        1 / 0  # noqa: B018
