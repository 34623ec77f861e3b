"""The report in a browser: links, search, keyboard, no script, and the rules for accessible pages.

The browser is Debian's chromium, which `scripts/test` installs where it can.
"""

import re
import shutil

import numpy as np
import pytest
from commandline import MESHES

import dualize as api
from dualize import Triangulation, build, report
from dualize.plan import plan as plan_of

CHROMIUM = next((p for p in map(shutil.which, ("chromium", "chromium-browser")) if p), None)
pytestmark = pytest.mark.skipif(
    CHROMIUM is None, reason="there is no chromium here, and scripts/test could not install one"
)
FLAGS = [
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]
# a tetrahedron whose facets are glued in two pairs
LOOPS = ([[0, 0, 0, 0]], [[[1, 0, 2, 3], [1, 0, 2, 3], [0, 1, 3, 2], [0, 1, 3, 2]]])
WORDS = ["<script>document.title='run'</script>", "<b>b</b>", "c&d", '"e"', "f'", "</script>"]


def foam(name):
    return build(api.read(MESHES / name), keep_singular=True, points=True)


@pytest.fixture(scope="module")
def browser():
    from playwright.sync_api import sync_playwright

    with sync_playwright() as play:
        opened = play.chromium.launch(executable_path=CHROMIUM, args=FLAGS)
        yield opened
        opened.close()


@pytest.fixture(scope="module")
def pages(tmp_path_factory):
    """Pages by name, as files."""
    folder = tmp_path_factory.mktemp("reports")
    made = {
        "harbour": report.page(foam("harbour_inside.txt"), audit=api.audit(foam("harbour_inside.txt"))),
        "knot": report.page(foam("figure_eight_knot.json")),
        "sample": report.page(foam("room_3d.vtk"), limit=7),
        "planned": report.page(plan_of(foam("hypercube.json"), 2).kept_in(foam("hypercube.json"))),
        "loops": report.page(build(Triangulation.from_gluings(*LOOPS), keep_singular=True)),
        "evil": report.page(build(Triangulation.from_facets([WORDS[:5], WORDS[1:]])), title=WORDS[0]),
    }
    for name, text in made.items():
        (folder / f"{name}.html").write_text(text)
    return folder


@pytest.fixture
def open_page(browser, pages):
    """Open a page by name and place; on leaving, nothing may have been asked for nor gone wrong."""
    contexts, faults, asked = [], [], []

    def opened(name, place="", **settings):
        context = browser.new_context(offline=True, **settings)
        contexts.append(context)
        page = context.new_page()
        page.set_default_timeout(15_000)
        page.on("console", lambda said: faults.append(said.text))
        page.on("pageerror", lambda error: faults.append(str(error)))
        page.on("request", lambda request: asked.append(request.url))
        page.goto(f"file://{pages / name}.html{place}")
        return page

    yield opened
    for context in contexts:
        context.close()
    assert faults == []
    assert all(re.fullmatch(r"file://\S+/reports\d*/\w+\.html", url.split("#")[0]) for url in asked), asked


def title(page, text):
    """Wait until a cell is shown."""
    page.locator("#cell-title", has_text=re.compile(rf"^{text}$")).wait_for()


def shown(page):
    """The facts of the cell that is shown, and the rows of its tables."""
    names = page.locator("#cell dt").all_inner_texts()
    values = page.locator("#cell dd").all_inner_texts()
    rows = [row.locator("td").all_inner_texts() for row in page.locator("#cell tbody tr").all()]
    return dict(zip(names, values, strict=True)), rows


def test_every_kind_of_cell_shows_its_neighbours_and_orders(open_page):
    s = foam("harbour_inside.txt")
    page = open_page("harbour", "#vertex-1")
    title(page, "vertex 1")
    facts, rows = shown(page)
    assert facts["corners"] == " ".join(s.named(s["vertices/corners"][1]))
    assert [(r[1], r[2]) for r in rows[:5]] == [
        (f"edge {e}", "leaves" if x > 0 else "arrives") for e, x in s.edges_at(1)
    ]
    assert [r[1] for r in rows[5:]] == [f"face {f}" for f in s["wedges/face"][1]]

    page.evaluate("location.hash = '#edge-1'")
    title(page, "edge 1")
    facts, rows = shown(page)
    (a, i), (b, j) = s["edges/source"][1], s["edges/target"][1]
    assert (facts["source"], facts["target"]) == (f"vertex {a}, slot {i}", f"vertex {b}, slot {j}")
    assert [r[1:3] for r in rows] == [
        [f"face {f}", "along" if x > 0 else "against"]
        for f, x in zip(s["edges/face"][1], s["edges/face_sign"][1], strict=True)
    ]

    for f in (0, 2):
        page.evaluate(f"location.hash = '#face-{f}'")
        title(page, f"face {f}")
        _, rows = shown(page)
        assert [r[0] for r in rows] == [f"{kind} {n}" for kind, n, _ in s.face(f)]
        signs = [r[1][0] for r in rows if r[0].startswith("edge")]
        assert signs == ["+" if x > 0 else chr(0x2212) for kind, _, x in s.face(f) if kind == "edge"]

    page.evaluate("location.hash = '#node-4'")
    title(page, "node 4")
    facts, rows = shown(page)
    assert facts["corners"] == " ".join(s.named(s["nodes/corners"][4]))
    assert [r[1:3] for r in rows] == [
        [f"link {k}", "starts" if x > 0 else "ends"]
        for k, x in zip(s["nodes/link"][4], s["nodes/link_leaves"][4], strict=True)
    ]

    page.evaluate("location.hash = '#link-7'")
    title(page, "link 7")
    facts, _ = shown(page)
    assert facts["source"] == f"node {s['links/source'][7]}"
    assert facts["target"] == f"node {s['links/target'][7]}"
    assert facts["face"] == f"face {s['links/face'][7]}"
    assert facts["corners"] == " ".join(s.named(s["links/corners"][7]))


def test_links_lead_from_cell_to_cell_and_back(open_page):
    page = open_page("harbour", "#face-0")
    title(page, "face 0")
    page.locator("#cell").get_by_role("link", name="vertex 2").click()
    title(page, "vertex 2")
    page.locator("#cell").get_by_role("link", name="next vertex").wait_for(state="detached")
    page.get_by_role("link", name="previous vertex").click()
    title(page, "vertex 1")
    page.go_back()
    title(page, "vertex 2")


def test_cells_in_a_picture_are_links(open_page):
    page = open_page("harbour")
    page.locator("figure svg a[href='#node-3'] rect").first.click()
    title(page, "node 3")


def test_a_cell_is_found_by_its_number(open_page):
    page = open_page("harbour")
    page.fill("#query", "edge 11")
    page.get_by_role("button", name="Find").click()
    title(page, "edge 11")
    page.fill("#query", "face 19")
    page.get_by_role("button", name="Find").click()
    page.get_by_text("There is no face 19; numbers run from 0 to 18.").wait_for()


@pytest.mark.parametrize(
    ("query", "cells"),
    [
        ("dusk, dawn noon", ["face 0", "vertex 0", "vertex 1", "vertex 2"]),
        # vertex 0 is dawn dusk mole noon quay: noon is its corner 3, and edge 5 its slot 3
        ("mole quay dusk dawn", ["edge 5", "node 2", "vertex 0"]),
        ("buoy dawn dusk noon quay", ["vertex 1"]),
    ],
    ids=["triangle", "tetrahedron", "simplex"],
)
def test_cells_are_found_by_their_labels_in_any_order(open_page, query, cells):
    page = open_page("harbour")
    page.fill("#query", query)
    page.keyboard.press("Enter")
    page.locator("#found li").first.wait_for()
    assert page.locator("#found li").all_inner_texts() == cells


def test_labels_that_are_not_there_are_told(open_page):
    page = open_page("harbour")
    page.fill("#query", "dawn fog")
    page.keyboard.press("Enter")
    page.get_by_text("No corner has the label fog.").wait_for()
    page = open_page("knot")
    page.fill("#query", "dawn")
    page.keyboard.press("Enter")
    page.get_by_text("These cells have no labels").wait_for()


def test_everything_can_be_reached_with_the_keyboard(open_page):
    page = open_page("harbour")
    page.keyboard.press("Tab")
    assert page.evaluate("document.activeElement.className") == "skip"
    page.locator("#query").focus()
    page.keyboard.type("node 2")
    page.keyboard.press("Enter")
    title(page, "node 2")
    # the heading of the cell has the focus: the next stop is the first link of the cell
    assert page.evaluate("document.activeElement.id") == "cell-title"
    page.keyboard.press("Tab")
    assert page.evaluate("document.activeElement.textContent") == "previous node"
    page.keyboard.press("Enter")
    title(page, "node 1")


def test_the_list_turns_its_pages(open_page):
    s = foam("hypercube.json")
    page = open_page("planned")
    page.get_by_role("button", name="edges", exact=True).click()
    page.locator("#rows caption", has_text=f"{len(s['edges/twist'])} edges; page 1 of 5").wait_for()
    page.get_by_role("button", name="later").click()
    page.locator("#rows caption", has_text="page 2 of 5").wait_for()
    assert page.locator("#rows th a").first.inner_text() == "edge 20"
    assert page.get_by_role("button", name="edges", exact=True).get_attribute("aria-pressed") == "true"


def test_unbounded_faces_are_marked_in_the_browser(open_page):
    page = open_page("planned", "#face-3")
    title(page, "face 3")
    facts, _ = shown(page)
    assert facts["bound"] == "∞ unbounded" and facts["twice-spin"].startswith("at least")


def test_a_sample_shows_its_cells_and_says_which_are_not_in_it(open_page):
    s = foam("room_3d.vtk")
    face = next(f for f in s["wedges/face"][6].tolist() if len(s.face(f)) > 8)
    page = open_page("sample", f"#face-{face}")
    title(page, f"face {face}")
    _, rows = shown(page)
    assert [r[0] for r in rows] == [f"{kind} {n}" for kind, n, _ in s.face(face)]
    outside = [r for r in rows if r[1] == "not in this sample"]
    assert len(outside) == sum(kind == "vertex" and n > 6 for kind, n, _ in s.face(face)) > 0
    page.evaluate("location.hash = '#vertex-30'")
    page.get_by_text("This cell is not in the sample that the page holds.").wait_for()


def test_an_edge_from_a_vertex_to_itself_shows_its_other_slot(open_page):
    page = open_page("loops", "#vertex-0")
    title(page, "vertex 0")
    _, rows = shown(page)
    # slots 0 and 1 are glued to each other, and so are 2 and 3
    assert [r[3] for r in rows[:4]] == [f"vertex 0, slot {i}" for i in (1, 0, 3, 2)]
    assert sorted(r[1] for r in rows[:4]) == ["edge 0", "edge 0", "edge 1", "edge 1"]


def test_labels_are_shown_and_not_run(open_page):
    page = open_page("evil", "#vertex-0")
    title(page, "vertex 0")
    facts, _ = shown(page)
    assert set(facts["corners"].split(" ")) == set(WORDS[:5])
    assert page.title() == f"{WORDS[0]}: foam report"
    page.fill("#query", WORDS[0])
    page.keyboard.press("Enter")
    page.locator("#found li").first.wait_for()
    assert page.locator("#found b, #cell b").count() == 0


def test_the_page_is_readable_without_scripts(open_page):
    page = open_page("harbour", java_script_enabled=False)
    text = page.locator("body").inner_text()
    for part in (
        "1 internal, 18 external",
        "No identity is violated",
        "d1-d2",
        "vertex 2",
        "-e3 v0 +e0 v1 +e6",
    ):
        assert part in text
    assert not page.locator("#browser").is_visible()
    assert page.locator("noscript").inner_text().startswith("With scripts switched on")


@pytest.mark.parametrize("width", [360, 1200])
def test_the_page_does_not_scroll_sideways(open_page, width):
    page = open_page("harbour", "#face-2", viewport={"width": width, "height": 800})
    title(page, "face 2")
    assert page.evaluate("document.documentElement.scrollWidth") <= width


def test_the_page_prints_on_paper(open_page):
    from io import BytesIO

    from pypdf import PdfReader

    page = open_page("harbour", "#face-2")
    title(page, "face 2")
    paper = PdfReader(BytesIO(page.pdf(format="A4")))
    text = "\n".join(sheet.extract_text() for sheet in paper.pages)
    assert 3 <= len(paper.pages) <= 12
    for part in ("Summary", "homology-manifold", "Boundary graph: 9 nodes, 18 links", "face 2"):
        assert part in text
    assert "Find a cell" not in text


@pytest.mark.parametrize("name", ["harbour", "planned", "sample", "evil"])
def test_no_rule_for_accessible_pages_is_broken(open_page, name):
    from axe_playwright_python.sync_playwright import Axe

    page = open_page(name, "#face-0")
    title(page, "face 0")
    broken = Axe().run(page).response["violations"]
    serious = [v for v in broken if v["impact"] in ("serious", "critical")]
    assert [(v["id"], v["nodes"][0]["html"]) for v in serious] == []


@pytest.mark.parametrize("part", ["boundary", "face", "space"])
def test_a_picture_is_drawn_as_it_is_measured(browser, tmp_path, part):
    """Texts of an SVG file lie inside the picture when a browser sets them."""
    api.draw.write(foam("room_3d.vtk"), tmp_path / "a.svg", part)
    page = browser.new_page()
    page.goto(f"file://{tmp_path / 'a.svg'}")
    frame = page.evaluate("[document.documentElement.viewBox.baseVal].map(b => [b.width, b.height])[0]")
    boxes = np.array(
        page.evaluate(
            "[...document.querySelectorAll('text')].map(t => { const b = t.getBBox();"
            " return [b.x, b.y, b.x + b.width, b.y + b.height] })"
        )
    )
    page.close()
    assert boxes[:, :2].min() >= 0
    assert (boxes[:, 2] <= frame[0]).all() and (boxes[:, 3] <= frame[1]).all()
