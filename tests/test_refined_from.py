"""The map from a refinement to what it refines travels through files into the skeleton."""

import numpy as np
import pytest
from commandline import dualize as run

import dualize
from dualize import InputError, Triangulation, change

SUFFIXES = ["json", "npz", "h5"]


@pytest.mark.parametrize("suffix", SUFFIXES)
def test_a_file_keeps_where_each_simplex_came_from(tmp_path, suffix):
    fine = change.derived(Triangulation.from_facets([[0, 1, 2, 3], [1, 2, 3, 4]])).refinement
    fine.write(tmp_path / f"fine.{suffix}")
    back = dualize.read(tmp_path / f"fine.{suffix}")
    assert back == fine
    # every tetrahedron has 4! = 24 pieces (common practice)
    assert np.bincount(dualize.build(back).extra["refined_from/simplex"]).tolist() == [24, 24]


def test_a_map_of_the_wrong_length_is_refused(tmp_path):
    (tmp_path / "bad.json").write_text('{"facets": [[0, 1, 2, 3]], "refined_from": {"simplex": [0, 0]}}')
    with pytest.raises(InputError, match="no list of 1 simplex numbers"):
        dualize.read(tmp_path / "bad.json")


def test_the_command_line_passes_the_map_on(tmp_path):
    (tmp_path / "one.txt").write_text("0 1 2 3\n")
    assert run("change", "one.txt", "refine", "2", "-o", "fine.json", cwd=tmp_path).returncode == 0
    assert run("build", "fine.json", "-o", "foam.json", cwd=tmp_path).returncode == 0
    # edgewise subdivision by 2 cuts a tetrahedron into 2**3 pieces (Freudenthal 1942)
    assert dualize.load(tmp_path / "foam.json").extra["refined_from/simplex"].tolist() == [0] * 8
