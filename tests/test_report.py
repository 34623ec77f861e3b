"""The report: what is in the page without a script, and the tables that are packed into it."""

import gzip
import hashlib
import json
import re
from base64 import b64decode, b64encode
from dataclasses import replace
from html import unescape
from html.parser import HTMLParser

import numpy as np
import pytest
from commandline import MESHES, dualize, lines, refused

import dualize as api
from dualize import InputError, Triangulation, build, report
from dualize.plan import plan as plan_of

EVIL = ["<script>document.title='run'</script>", "</script>", '"quoted"', "a&amp;b", "<!--", "<img/src=x>"]


def foam(name):
    return build(api.read(MESHES / name), keep_singular=True, points=True)


class Text(HTMLParser):
    """The tags with their attributes, and the text that is not in scripts or styles."""

    def __init__(self, page):
        super().__init__()
        self.tags, self.words, self.open = [], [], []
        self.feed(page)

    def handle_starttag(self, tag, attributes):
        self.tags.append((tag, dict(attributes)))
        if tag in ("script", "style"):
            self.open.append(tag)

    def handle_endtag(self, tag):
        if tag in ("script", "style"):
            self.open.pop()

    def handle_data(self, data):
        if not self.open:
            self.words.append(data)

    def __str__(self):
        return " ".join(" ".join(self.words).split())


def meta(page):
    return json.loads(re.search(r'<script type="application/json" id="meta">(.*?)</script>', page, re.S)[1])


def tables(page):
    """The packed tables, unpacked by other means than the script's."""
    out = {}
    pattern = r'<script type="text/plain" data-table="([^"]+)" data-type="(\w+)">([^<]*)</script>'
    for name, kind, text in re.findall(pattern, page):
        raw = np.frombuffer(gzip.decompress(b64decode(text)), dtype=np.uint8)
        if kind == "Int32":
            raw = np.ascontiguousarray(raw.reshape(4, -1).T).reshape(-1)
        out[name] = raw.view({"Int8": np.int8, "Int32": "<i4", "Float64": "<f8"}[kind])
    return out


@pytest.mark.parametrize(
    "name", ["harbour_inside.txt", "twisted_bundle_12.txt", "figure_eight_knot.json", "kummer_16.txt"]
)
def test_the_tables_in_the_page_are_those_of_the_skeleton(name):
    s = foam(name)
    found = tables(report.page(s))
    shared = {n for n in found if n in s.arrays and n != "vertices/corners"}
    assert len(shared) > 25
    for table in shared:
        assert np.array_equal(found[table], s[table].ravel()), table
    assert np.array_equal(found["faces/vertex_count"], np.diff(s["faces/vertex_offsets"]))
    assert np.array_equal(found["faces/edge_count"], np.diff(s["faces/edge_offsets"]))


@pytest.mark.parametrize("name", ["harbour_inside.txt", "slab_4d.txt"])
def test_labels_are_kept_as_they_were_written(name):
    s = foam(name)
    page = report.page(s)
    words = np.array(meta(page)["labels"])[tables(page)["vertices/corners"]].reshape(-1, s.dimension + 1)
    assert words.tolist() == [[str(x) for x in row] for row in s.named(s["vertices/corners"])]


def test_labels_beyond_the_precision_of_a_script_are_kept():
    big = 2**62 + 1
    page = report.page(build(Triangulation.from_facets([[big, big + 1, big + 2, 5]])))
    assert meta(page)["labels"] == ["5", str(big), str(big + 1), str(big + 2)]


def test_the_page_tells_counts_findings_and_degrees_without_a_script():
    s = foam("slab_4d.txt")
    found = api.audit(s)
    text = str(Text(report.page(s, audit=found, title="slab_4d.txt")))
    for part in ("45 internal, 10 external", "40 internal, 20 external", "2 components, 10 nodes, 20 links"):
        assert part in text
    for finding in found:
        assert f"{finding.verdict} {finding.check} " in text, finding.check
    assert "No identity is violated." in text
    assert "12 of 45" not in text and "12 of 55 edges" in text


def test_a_violated_identity_is_told_in_the_first_sentence():
    s = foam("sphere_4d.txt")
    signs = s["edges/face_sign"].copy()
    signs[0, 0] *= -1
    damaged = replace(s, arrays={**s.arrays, "edges/face_sign": signs})
    text = str(Text(report.page(damaged, audit=api.audit(damaged))))
    assert "Identities are violated:" in text and "cannot be trusted" in text
    assert "Not audited" in str(Text(report.page(s)))


def test_nothing_is_asked_of_the_network():
    page = report.page(foam("slab_4d.txt"))
    parsed = Text(page)
    for tag, attributes in parsed.tags:
        for key in ("src", "href", "action", "data", "srcset", "poster"):
            target = attributes.get(key) or "#"
            assert target.startswith(("#", "data:")), (tag, target)
        assert not any(key.startswith("on") or key == "style" for key in attributes), tag
    assert "url(" not in page and "@import" not in page


def test_the_policy_allows_the_script_and_the_style_of_the_page_and_no_others():
    page = report.page(foam("slab_4d.txt"))
    policy = unescape(re.search(r'Content-Security-Policy" content="([^"]*)"', page)[1])
    assert "default-src 'none'" in policy and "unsafe" not in policy
    for element in ("script", "style"):
        (body,) = re.findall(rf"<{element}>(.*?)</{element}>", page, re.S)
        assert f"'sha256-{b64encode(hashlib.sha256(body.encode()).digest()).decode()}'" in policy


def test_labels_that_look_like_markup_are_text():
    s = build(Triangulation.from_facets([EVIL[:5], EVIL[1:]]))
    page = report.page(s, audit=api.audit(s), title=EVIL[0])
    parsed = Text(page)
    assert not any(tag == "img" for tag, _ in parsed.tags)
    assert sum(tag == "script" for tag, _ in parsed.tags) == 2 + len(tables(page))
    assert EVIL[0] in str(parsed)
    assert sorted(meta(page)["labels"]) == sorted(EVIL)


def test_ids_in_the_page_are_used_once():
    ids = [
        a["id"]
        for _, a in Text(report.page(foam("slab_4d.txt"), audit=api.audit(foam("slab_4d.txt")))).tags
        if "id" in a
    ]
    assert len(ids) == len(set(ids)) > 15


def test_the_same_foam_has_the_same_page():
    assert report.page(foam("room_3d.vtk")) == report.page(foam("room_3d.vtk"))


# -- samples ---------------------------------------------------------------------------------------


def test_of_a_large_foam_the_page_holds_a_sample_and_says_so():
    s = foam("room_3d.vtk")
    page = report.page(s, limit=7)
    assert "more than 7 vertices. The page holds a sample of its cells: vertices 0 to 6" in str(Text(page))
    found, head = tables(page), meta(page)
    assert head["held"]["vertex"] == 7 and not head["whole"]
    for kind, table in (("edge", "vertices/edge"), ("face", "wedges/face")):
        assert found[f"numbers/{kind}"].tolist() == sorted(set(s[table][:7].ravel().tolist()))
    at = 0
    for f, n in zip(found["numbers/face"].tolist(), found["faces/vertex_count"].tolist(), strict=True):
        wanted = [v for kind, v, _ in s.face(f) if kind == "vertex"]
        assert found["faces/vertex"][at : at + n].tolist() == wanted
        at += n
    nodes = [n for n in range(s.counts["nodes"]) if s["nodes/vertex"][n] < 7]
    assert found["numbers/node"].tolist() == nodes
    assert np.array_equal(found["nodes/link"].reshape(-1, 3), s["nodes/link"][nodes])


def test_the_page_of_many_simplices_is_small():
    # 12,288 4-simplices, numbered at random: an eighth of 30 megabytes at most for an eighth of 100,000
    rng = np.random.default_rng(0)
    t = api.make.lattice(4, 4, 4, 8, periodic="xyzt", coordinates=False)
    labels = rng.permutation(int(t.corners.max()) + 1)[t.corners][rng.permutation(len(t))]
    s = build(Triangulation.from_facets(labels))
    assert len(report.page(s)) < 30e6 * len(t) / 100_000


# -- plans -----------------------------------------------------------------------------------------


def test_a_plan_in_the_file_is_shown_with_its_unbounded_faces():
    s = foam("hypercube.json")
    planned = plan_of(s, 2)
    page = report.page(planned.kept_in(s))
    rows = re.findall(r'<tr( class="unbounded")?><th scope="row"><a href="#face-(\d+)">', page)
    free = {int(f) for mark, f in rows if mark}
    assert free == set(np.flatnonzero(planned.growth.unbounded).tolist()) and free
    assert np.array_equal(tables(page)["spins/least"], planned.bounds.least)
    assert np.array_equal(tables(page)["spins/boundary"], np.full(s.counts["links"], 2))


def test_bounded_spins_are_shown_as_ranges_and_none_is_marked():
    s = foam("harbour_inside.txt")
    planned = plan_of(s, 2)
    page = report.page(s, plan=planned)
    assert not re.search(r'class="unbounded"', page)
    (least,), (greatest,) = planned.bounds.least, planned.bounds.greatest
    assert f">face 0</a></th><td>{least}</td><td>{greatest}</td>" in page
    assert unescape(str(planned)).splitlines()[0] in unescape(page)


def test_groups_of_a_file_that_only_look_like_a_plan_are_left_out():
    s = replace(foam("harbour_inside.txt"), extra={"spins/least": [1, 2, 3], "spins/greatest": "many"})
    assert "Plan of the sum" not in report.page(s)


# -- files -----------------------------------------------------------------------------------------


def test_a_report_is_written_once_and_not_over_another(tmp_path):
    report.write(foam("harbour_inside.txt"), tmp_path / "a.html")
    with pytest.raises(InputError, match="exists already"):
        report.write(foam("harbour_inside.txt"), tmp_path / "a.html")
    assert [p.name for p in tmp_path.iterdir()] == ["a.html"]


def test_the_verb_writes_the_page_of_the_api(tmp_path):
    run = dualize("report", MESHES / "harbour_inside.txt", "-o", "-", "--no-audit", cwd=tmp_path)
    assert run.returncode == 0 and run.stderr == b""
    page = run.stdout.decode()
    assert page.startswith("<!DOCTYPE html>") and "<h1>harbour_inside.txt</h1>" in page
    assert meta(page)["counts"]["links"] == 18


def test_the_verb_draw_says_which_part_it_drew(tmp_path):
    run = dualize("draw", MESHES / "k3_16.txt", "-o", "k.svg", "--most", "9", cwd=tmp_path)
    assert run.returncode == 0
    assert lines(run.stderr)[0].startswith("note: only a part: 9 of 288 vertices")
    assert (tmp_path / "k.svg").read_text().startswith("<?xml")


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        (["--part", "fase", "-o", "a.svg"], "is it face"),
        (["-o", "a.jpeg"], "what kind of picture"),
        (["--part", "space", "-o", "a.svg"], "no coordinates"),
        (["--part", "space", "--view", "1,x", "-o", "a.svg"], "--view are two angles"),
        (["--to", "bmp", "-o", "a.svg"], "no pictures of the kind"),
    ],
    ids=["part", "suffix", "coordinates", "view", "kind"],
)
def test_what_cannot_be_drawn_leaves_no_file(arguments, told, tmp_path):
    error, _ = refused(dualize("draw", MESHES / "harbour_inside.txt", *arguments, cwd=tmp_path))
    assert told in error
    assert list(tmp_path.iterdir()) == []


# -- notebooks -------------------------------------------------------------------------------------


def test_notebooks_show_small_tables():
    t = api.read(MESHES / "harbour_inside.txt")
    s = build(t)
    found = api.audit(s)
    for content, told in ((t, "dawn dusk mole noon quay"), (s, "orientable"), (found, "d1-d2")):
        html = content._repr_html_()
        parsed = Text(html)
        assert [tag for tag, _ in parsed.tags].count("table") == 1
        assert told in str(parsed)
    rows = [tag for tag, _ in Text(found._repr_html_()).tags].count("tr")
    assert rows == len(found.findings) + 1


def test_a_large_triangulation_shows_its_first_simplices_only():
    assert api.read(MESHES / "k3_16.txt")._repr_html_().count("<tr>") == 1 + 5 + 1
