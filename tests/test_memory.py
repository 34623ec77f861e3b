"""Memory is estimated before a build, and told with figures when it will not do."""

import subprocess
import sys
from importlib import import_module

import pytest
from commandline import dualize as run
from commandline import refused

import dualize
from dualize import LimitError, memory


def test_a_build_that_does_not_fit_is_refused_with_figures(monkeypatch):
    t = dualize.make.lattice(3, 3, 3, periodic="xyz")
    monkeypatch.setattr(import_module("dualize.build"), "WEIGHED_FROM", 1)
    monkeypatch.setattr(memory, "available_memory", lambda: 1000)
    with pytest.raises(LimitError, match=r"building 162 simplices takes about .* GiB, and 0\.0 GiB are free"):
        dualize.build(t)
    assert dualize.build(t, any_size=True).counts["vertices"] == 162


def test_where_the_system_says_nothing_nothing_is_refused(monkeypatch):
    monkeypatch.setattr(memory, "available_memory", lambda: None)
    memory.check_memory(10**12, 0, 4, True)


def test_the_estimate_grows_with_the_complex():
    few, many = memory.build_memory(10**6, 0, 4, True), memory.build_memory(10**7, 0, 4, True)
    assert many == pytest.approx(10 * few, rel=1e-6)
    assert memory.build_memory(10**6, 5 * 10**6, 4, True) > 2 * few


@pytest.mark.skipif(not sys.platform.startswith("linux"), reason="the peak is read from /proc")
@pytest.mark.parametrize("kind", ["lattice", "separate"])
def test_the_estimate_is_near_the_peak(kind):
    """Within a third either way, of a build of 150,000 to 240,000 4-simplices in a fresh process."""
    code = f"""
import numpy as np, dualize
from pathlib import Path
from dualize.memory import build_memory
def status(field):
    return next(int(x.split()[1]) * 1024 for x in open("/proc/self/status") if x.startswith(field))
if {kind!r} == "lattice":
    f = np.array(dualize.make.lattice(10, 10, 10, 10, periodic="xyzt", coordinates=False).corners)
else:
    f = np.arange(5 * 150_000).reshape(-1, 5)
t = dualize.Triangulation.from_facets(f)
dualize.build(dualize.Triangulation.from_facets(f[:7000]))
begin = status("VmRSS"); Path("/proc/self/clear_refs").write_text("5")
s = dualize.build(t)
print(status("VmHWM") - begin, build_memory(len(f), s.counts["nodes"], 4, True))
"""
    out = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout
    peak, estimate = map(int, out.split())
    assert 2 / 3 < peak / estimate < 4 / 3


def test_the_command_line_has_the_way_out(tmp_path):
    (tmp_path / "one.txt").write_text("0 1 2 3\n")
    assert run("build", "one.txt", "-o", "foam.json", "--any-size", cwd=tmp_path).returncode == 0


def test_an_existing_output_is_refused_before_the_work(tmp_path):
    (tmp_path / "foam.json").write_text("mine")
    said = refused(run("build", "missing.txt", "-o", "foam.json", cwd=tmp_path))
    assert "the file exists already" in said[0]
    assert (tmp_path / "foam.json").read_text() == "mine"
