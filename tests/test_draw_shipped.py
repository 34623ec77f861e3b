"""The pictures of the README, and the gallery of the shipped meshes."""

import re
import subprocess
import sys
from xml.etree import ElementTree

import pytest
from commandline import MESHES, ROOT, environment

import dualize
from dualize.draw import sketch, svg

SHOWN = {
    "boundary.svg": ("boundary", {}),
    "vertex.svg": ("vertex", {"number": 1}),
    "face.svg": ("face", {"number": 2}),
}
NUMBER = r"-?\d+(?:\.\d+)?"


@pytest.mark.parametrize("name", SHOWN)
def test_the_pictures_of_the_read_me_are_those_that_are_drawn(name):
    part, options = SHOWN[name]
    foam = dualize.build(dualize.read(MESHES / "harbour_inside.txt"), points=True)
    drawn, kept = svg(sketch(foam, part, **options)), (ROOT / "pictures" / name).read_text()
    assert re.split(NUMBER, drawn) == re.split(NUMBER, kept)
    # the last digit may be that of another machine
    pairs = zip(re.findall(NUMBER, drawn), re.findall(NUMBER, kept), strict=True)
    assert all(abs(float(a) - float(b)) < 0.05 for a, b in pairs)


def test_the_read_me_shows_every_picture_and_no_other():
    found = set(re.findall(r"\]\(pictures/([^)]+)\)", (ROOT / "README.md").read_text()))
    assert found == set(SHOWN) == {p.name for p in (ROOT / "pictures").iterdir()}


def test_the_gallery_draws_every_mesh_and_shows_it(tmp_path):
    command = [
        sys.executable,
        ROOT / "scripts/gallery",
        tmp_path / "new",
        "--part",
        "face",
        "--part",
        "space",
    ]
    run = subprocess.run(command, env=environment(), capture_output=True, timeout=120, check=False)
    assert run.returncode == 0, run.stderr.decode()
    meshes = {p.stem for p in MESHES.iterdir() if p.name != "README.md"}
    made = {p.name for p in (tmp_path / "new").glob("*.svg")}
    assert made == {f"{m}_face.svg" for m in meshes} | {"hypercube_space.svg", "room_3d_space.svg"}
    for path in (tmp_path / "new").glob("*.svg"):
        assert ElementTree.parse(path).getroot().get("viewBox")
    assert set(re.findall(r'src="([^"]+)"', (tmp_path / "new" / "index.html").read_text())) == made
