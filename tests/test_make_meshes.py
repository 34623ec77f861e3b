"""The shipped meshes are what the recipes make."""

import subprocess
import sys
from pathlib import Path

SCRIPT = Path(__file__).parent.parent / "scripts" / "make_meshes"


def test_meshes_are_what_the_recipes_make(tmp_path):
    done = subprocess.run(
        [sys.executable, SCRIPT, tmp_path / "made"], capture_output=True, text=True, check=False
    )
    rows = done.stdout.splitlines()
    assert done.returncode == 0, done.stdout + done.stderr
    assert len(rows) == 16
    assert all(row.endswith(" same") for row in rows)
    assert len(list((tmp_path / "made").iterdir())) == 16
