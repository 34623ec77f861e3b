"""Pictures: every mark is compared with the tables of the skeleton, every format is read back."""

import re
import shutil
import subprocess
import sys
from io import BytesIO
from itertools import combinations
from xml.etree import ElementTree

import numpy as np
import pytest
from commandline import MESHES, environment
from specimens import GLUED, LABELLED, around_ridge, simplex

import dualize
from dualize import InputError, Triangulation, build
from dualize.draw import KINDS, PARTS, encode, figure, histograms, sketch, svg, tikz
from dualize.draw.looks import INK, LOOKS, QUIET
from dualize.draw.sketch import Area, Badge, Curve, Head, Words, along, extent

BOUNDED = (
    "slab_4d.txt",
    "harbour_inside.txt",
    "solid_torus_7.txt",
    "twisted_ball_bundle_9.txt",
    "room_3d.vtk",
)
SHIPPED = sorted(p.name for p in MESHES.iterdir() if p.name != "README.md")


def foam(name):
    if name in SHIPPED:
        from dualize.formats import open_any

        content = open_any(MESHES / name).content
        return build(content, keep_singular=True, points=True)
    if name in LABELLED:
        return build(Triangulation.from_facets(LABELLED[name]))
    table = GLUED[name]
    return build(Triangulation.from_gluings(table.across, table.carry), keep_singular=True)


def badges(made, kind):
    return {m.cell[1]: m for m in made.of(kind, Badge)}


def curves(made, kind):
    found = list(made.of(kind, Curve))
    assert len({m.cell for m in found}) == len(found), f"a {kind} is drawn twice"
    return {m.cell[1]: m for m in found}


def heads(made, kind):
    return {m.cell[1]: m for m in made.of(kind, Head)}


def texts(made, kind):
    return {m.cell[1]: m.text for m in made.of(kind, Words)}


def runs(curve, a, b):
    """Whether a curve begins at one badge and ends at the other."""
    return np.allclose(curve.points[0], a.at) and np.allclose(curve.points[-1], b.at)


def points_along(head, curve):
    """Whether an arrowhead lies on a curve and points the way in which the curve is written."""
    at, way = along(curve.points, np.linspace(0, 1, 2001))
    k = int(np.argmin(np.linalg.norm(at - (head.tip - head.way * head.size / 2), axis=1)))
    on_it = np.linalg.norm(at[k] - (head.tip - head.way * head.size / 2)) < 0.5
    return on_it and float(way[k] @ head.way) > 0.99


def cross(a, b):
    """Twice the signed area that two vectors of the plane span."""
    return a[..., 0] * b[..., 1] - a[..., 1] * b[..., 0]


# -- graphs ----------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", BOUNDED)
def test_the_boundary_graph_has_an_arrow_for_every_link_from_source_to_target(name):
    s = foam(name)
    made = sketch(s, "boundary")
    nodes, lines, arrows = badges(made, "node"), curves(made, "link"), heads(made, "link")
    assert set(nodes) == set(range(s.counts["nodes"]))
    assert set(lines) == set(arrows) == set(range(s.counts["links"]))
    for link, (a, b) in enumerate(zip(s["links/source"], s["links/target"], strict=True)):
        assert runs(lines[link], nodes[a], nodes[b]), link
        assert points_along(arrows[link], lines[link]), link
        assert lines[link].look == ("twisted link" if s["links/twist"][link] else "link")


@pytest.mark.parametrize("name", ["harbour_inside.txt", "twisted_ball_bundle_9.txt"])
def test_nodes_and_links_bear_their_numbers_and_nodes_their_orientation(name):
    s = foam(name)
    made = sketch(s, "boundary")
    for n, badge in badges(made, "node").items():
        assert badge.text == str(n)
        assert badge.look == ("node+" if s["nodes/orientation"][n] > 0 else "node-")
    assert texts(made, "link") == {link: str(link) for link in range(s.counts["links"])}


@pytest.mark.parametrize(
    "name", ["slab_4d.txt", "klein_bottle_3d_9.txt", "figure_eight_knot.json", "room_3d.vtk"]
)
def test_the_dual_graph_has_an_arrow_for_every_edge_from_source_to_target(name):
    s = foam(name)
    made = sketch(s, "dual")
    ends = {("vertex", v): m for v, m in badges(made, "vertex").items()}
    ends |= {("node", n): m for n, m in badges(made, "node").items()}
    assert len(ends) == s.counts["vertices"] + s.counts["nodes"]
    lines, arrows = curves(made, "edge"), heads(made, "edge")
    assert set(lines) == set(arrows) == set(range(len(s["edges/twist"])))
    for e, line in lines.items():
        a, b = (
            ("vertex", v) if v >= 0 else ("node", n)
            for v, n in (s["edges/source"][e].tolist(), s["edges/target"][e].tolist())
        )
        assert runs(line, ends[a], ends[b]), e
        assert points_along(arrows[e], line), e
        external = e >= s.counts["edges_internal"]
        assert line.look == ("external" if external else "twisted" if s["edges/twist"][e] else "edge")


def test_the_boundary_graph_of_a_4_simplex_is_a_regular_pentagon():
    # the complete graph on five nodes, as it is usually drawn (common practice)
    s = build(Triangulation.from_facets(simplex(4)))
    at = np.array([m.at for m in badges(sketch(s), "node").values()])
    ray = at - at.mean(axis=0)
    angle = np.sort(np.arctan2(ray[:, 1], ray[:, 0]))
    assert np.allclose(np.linalg.norm(ray, axis=1), np.linalg.norm(ray[0]))
    assert np.allclose(np.diff(angle), 2 * np.pi / 5)


@pytest.mark.parametrize("name", ["room_3d.vtk", "tetrahedron"])
def test_the_boundary_graph_of_a_ball_is_drawn_without_crossings(name):
    # a sphere's graph is planar, and has as many straight crossing-free drawings as one likes
    # (K. Wagner 1936, I. Fary 1948; from memory)
    s = build(Triangulation.from_facets(simplex(3))) if name == "tetrahedron" else foam(name)
    made = sketch(s, "boundary")
    lines = [np.array([m.points[0], m.points[-1]]) for m in made.of("link", Curve)]
    for m in made.of("link", Curve):
        at, _ = along(m.points, np.linspace(0, 1, 7))
        assert abs(cross(at - at[0], at[-1] - at[0])).max() < 1e-6, "a link is bent"
    for (a, b), (c, d) in combinations(lines, 2):
        if min(np.linalg.norm(p - q) for p in (a, b) for q in (c, d)) < 1e-6:
            continue
        turn = [np.sign(cross(q - p, r - p)) for p, q, r in ((a, b, c), (a, b, d), (c, d, a), (c, d, b))]
        assert turn[0] == turn[1] or turn[2] == turn[3]


def test_the_boundary_of_a_fan_of_triangles_is_a_regular_polygon():
    s = build(Triangulation.from_facets(around_ridge(2, 7)))
    at = np.array([m.at for m in badges(sketch(s), "node").values()])
    gaps = np.linalg.norm(at - at.mean(axis=0), axis=1)
    assert np.allclose(gaps, gaps[0])


def test_parallel_links_are_kept_apart():
    s = foam("pillow_4d.json")
    lines = list(sketch(s, "dual").of("edge", Curve))
    middles = [along(m.points, 0.5)[0] for m in lines]
    assert len(middles) == 5
    assert min(np.linalg.norm(a - b) for a, b in combinations(middles, 2)) > 10


def test_loops_leave_their_vertex_and_keep_apart():
    # a tetrahedron with its facets glued in two pairs
    across = [[0, 0, 0, 0]]
    carry = [[[1, 0, 2, 3], [1, 0, 2, 3], [0, 1, 3, 2], [0, 1, 3, 2]]]
    s = build(Triangulation.from_gluings(across, carry), keep_singular=True)
    made = sketch(s, "dual")
    lines = curves(made, "edge")
    assert len(lines) == 2
    far = [along(m.points, 0.5)[0] for m in lines.values()]
    home = badges(made, "vertex")[0]
    assert all(np.linalg.norm(x - home.at) > 2 * home.radius for x in far)
    assert np.linalg.norm(far[0] - far[1]) > 2 * home.radius
    assert all(points_along(h, lines[e]) for e, h in heads(made, "edge").items())


def test_a_large_graph_is_drawn_in_part_and_says_which():
    s = foam("k3_16.txt")
    made = sketch(s, "dual", number=100, most=20)
    shown = set(badges(made, "vertex"))
    assert len(shown) == 20 and 100 in shown
    inside = {
        e
        for e in range(s.counts["edges_internal"])
        if {int(s["edges/source"][e, 0]), int(s["edges/target"][e, 0])} <= shown
    }
    assert set(curves(made, "edge")) == inside
    assert "Only a part: 20 of 288 vertices, those nearest to vertex 100" in made.note
    # the five neighbours of the start are nearest to it
    near = {int(s[f"edges/{end}"][e, 0]) for e, _ in s.edges_at(100) for end in ("source", "target")}
    assert near <= shown


def test_one_component_of_the_boundary_can_be_drawn():
    s = foam("slab_4d.txt")
    made = sketch(s, "boundary", component=1)
    assert set(badges(made, "node")) == set(np.flatnonzero(s["nodes/component"] == 1).tolist())
    assert len(curves(made, "link")) == 10


# -- cells -----------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["harbour_inside.txt", "room_3d.vtk", "figure_eight_knot.json", "cp2_9.txt"])
def test_a_vertex_has_its_edges_and_wedges_in_the_directions_of_the_tables(name):
    s = foam(name)
    for v in range(min(4, s.counts["vertices"])):
        made = sketch(s, "vertex", number=v)
        centre = badges(made, "vertex")[v]
        slots = {int(m.text): m for m in made.marks if isinstance(m, Badge) and m.look == "slot" and m.text}
        assert set(slots) == set(range(s.dimension + 1))
        lines = list(made.of("edge", Curve))
        assert [m.cell[1] for m in lines] == s["vertices/edge"][v].tolist()
        for slot, (line, leaves) in enumerate(zip(lines, s["vertices/leaves"][v], strict=True)):
            ends = (centre, slots[slot]) if leaves > 0 else (slots[slot], centre)
            assert runs(line, *ends)
        wedges = list(made.of("face", Curve))
        assert [m.cell[1] for m in wedges] == s["wedges/face"][v].tolist()
        arrows = list(made.of("face", Head))
        for w, (line, direction) in enumerate(zip(wedges, s["wedges/direction"][v], strict=True)):
            i, j = s.wedge(w) if direction > 0 else s.wedge(w)[::-1]
            assert runs(line, slots[i], slots[j])
            assert points_along(arrows[w], line)


def test_a_vertex_names_what_lies_at_the_other_end_of_its_edges():
    s = foam("harbour_inside.txt")
    made = sketch(s, "vertex", number=1)
    # as `describe` lists it: vertex 1 lies behind slot 0 of vertex 0, and so on; three free slots
    assert {m.text for m in made.of("vertex", Words)} == {"v0, slot 2", "v2, slot 3"}
    assert {m.text for m in made.of("node", Words)} == {"n3", "n4", "n5"}


@pytest.mark.parametrize("name", ["harbour_inside.txt", "klein_bottle_3d_9.txt", "figure_eight_knot.json"])
def test_a_face_is_drawn_in_the_order_of_its_list_with_the_signs_of_its_edges(name):
    s = foam(name)
    inner = s.counts["faces_internal"]
    for f in [0, inner - 1, len(s["faces/against"]) - 1]:
        made = sketch(s, "face", number=f)
        cells = s.face(f)
        ring = [m for m in made.marks if isinstance(m, Badge) and m.cell is not None]
        lines = list(made.of("edge", Curve))
        visits = [n for kind, n, _ in cells if kind == "vertex"]
        edges = [(n, sign) for kind, n, sign in cells if kind == "edge"]
        assert [m.cell[1] for m in ring if m.cell[0] == "vertex"] == visits
        assert [m.cell[1] for m in lines] == [e for e, _ in edges]
        words = [m.text for m in made.of("edge", Words)]
        assert words == [f"{'+' if sign > 0 else chr(0x2212)}e{e}" for e, sign in edges]
        for k, (line, (_, sign)) in enumerate(zip(lines, edges, strict=True)):
            a, b = ring[k], ring[(k + 1) % len(ring)]
            assert runs(line, *((a, b) if sign > 0 else (b, a)))
        for head, line in zip(made.of("edge", Head), lines, strict=True):
            assert points_along(head, line)


def test_an_external_face_is_closed_by_its_link_from_its_last_to_its_first_node():
    s = foam("harbour_inside.txt")
    f = s.counts["faces_internal"] + 3
    made = sketch(s, "face", number=f)
    (line,) = made.of("link", Curve)
    nodes = badges(made, "node")
    assert runs(line, nodes[s["links/source"][3]], nodes[s["links/target"][3]])
    assert line.cell == ("link", 3)
    ring = [m for m in made.marks if isinstance(m, Badge) and m.cell is not None]
    assert (ring[0].cell, ring[-1].cell) == (("node", s["links/target"][3]), ("node", s["links/source"][3]))


def test_a_long_face_is_drawn_in_part_and_says_so():
    s = build(Triangulation.from_facets(around_ridge(3, 90)))
    made = sketch(s, "face", number=0)
    assert "Only a part: the first 34 of 90 corners" in made.note
    assert len(badges(made, "vertex")) == 34


@pytest.mark.parametrize("name", ["room_3d.vtk", "cp2_9.txt", "figure_eight_knot.json"])
def test_histograms_count_every_face_and_every_corner_once(name):
    s = foam(name)
    inside, *rest = histograms(s)
    lengths = np.diff(s["faces/vertex_offsets"])[: s.counts["faces_internal"]].tolist()
    assert dict(zip(inside.low.tolist(), inside.number.tolist(), strict=True)) == {
        n: lengths.count(n) for n in set(lengths)
    }
    points = rest[-1]
    corners = s.counts["vertices"] * (s.dimension + 1)
    assert int((points.low * points.number).sum()) == corners


def test_wide_histograms_are_put_into_bins_that_lose_nothing():
    facets = [
        [a, b, c] for n in range(3, 60) for a, b, c in (np.array(around_ridge(2, n)) + 1000 * n).tolist()
    ]
    s = build(Triangulation.from_facets(facets))
    inside = histograms(s)[0]
    assert len(inside.number) <= 24 and inside.number.sum() == s.counts["faces_internal"] == 57
    made = sketch(s, "degrees")
    heights = [m for m in made.marks if isinstance(m, Area)]
    assert len(heights) == sum(len(h.number) for h in histograms(s))


# -- space -----------------------------------------------------------------------------------------


def test_in_space_vertices_lie_in_the_middles_of_their_simplices():
    s = foam("room_3d.vtk")
    # from above: the second axis to the right, the first downwards
    made = sketch(s, "space", view=(0.0, 90.0), most=48)
    at = np.array([badges(made, "vertex")[v].at for v in range(48)])
    middle = s["coordinates/point"][s["vertices/corners"]].mean(axis=1)[:, :2] @ np.array([[0, -1], [1, 0]])
    scale = np.ptp(at[:, 0]) / np.ptp(middle[:, 0])
    assert np.allclose(at - at[0], (middle - middle[0]) * scale, atol=1e-6)
    # an internal edge has two halves, an external one is whole
    found = [m.cell[1] for m in made.of("edge", Curve)]
    inner = s.counts["edges_internal"]
    assert sorted(found) == sorted([*range(inner)] * 2 + [*range(inner, inner + s.counts["edges_external"])])


def test_four_axes_are_projected_and_the_picture_says_so():
    made = sketch(foam("hypercube.json"), "space")
    assert "fourth axis is projected" in made.note
    assert "Axes 3 left out" in sketch(foam("hypercube.json"), "space", axes=(0, 1, 2)).note


# -- formats ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("part", PARTS)
def test_svg_parses_and_has_every_mark_of_the_sketch(part):
    made = sketch(foam("room_3d.vtk"), part)
    root = ElementTree.fromstring(svg(made))
    found = sorted((g.get("data-cell"), g.get("data-mark")) for g in root.iter() if g.get("data-cell"))
    wanted = sorted((f"{m.cell[0]} {m.cell[1]}", type(m).__name__.lower()) for m in made.marks if m.cell)
    assert found == wanted
    words = [e.text for e in root.iter("{http://www.w3.org/2000/svg}text")]
    assert words == [m.text for m in made.marks if isinstance(m, Words | Badge) and m.text]


@pytest.mark.parametrize("part", PARTS)
def test_a_figure_shows_the_cells_of_the_sketch_and_cuts_no_text(part):
    made = sketch(foam("room_3d.vtk"), part)
    drawn = figure(made)
    (axes,) = drawn.axes
    cells = {a.get_gid() for a in axes.get_children() if a.get_gid()}
    assert cells == {f"{m.cell[0]} {m.cell[1]}" for m in made.marks if m.cell}
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.text import Text

    canvas = FigureCanvasAgg(drawn)
    canvas.draw()
    width, height = canvas.get_width_height()
    for text in axes.findobj(Text):
        if text.get_text():
            box = text.get_window_extent()
            assert box.x0 >= 0 and box.y0 >= 0 and box.x1 <= width and box.y1 <= height, text.get_text()


def test_a_pdf_is_read_back_with_its_text():
    from pypdf import PdfReader

    pages = PdfReader(BytesIO(encode(sketch(foam("harbour_inside.txt")), "pdf"))).pages
    assert len(pages) == 1
    text = pages[0].extract_text()
    assert "Boundary graph: 9 nodes, 18 links" in text
    assert "node, orientation +1" in text


def test_a_png_is_read_back_and_not_empty():
    from matplotlib.image import imread

    pixels = imread(BytesIO(encode(sketch(foam("harbour_inside.txt")), "png")))
    assert pixels.shape[0] > 900 and pixels.std() > 0.05


def test_tikz_has_every_mark_and_balanced_braces():
    made = sketch(foam("harbour_inside.txt"), "face", number=2)
    text = tikz(made)
    assert text.count("{") == text.count("}") and text.count("[") == text.count("]")
    found = re.findall(r" % (\w+) (\d+)$", text, re.M)
    assert sorted(found) == sorted((m.cell[0], str(m.cell[1])) for m in made.marks if m.cell)
    assert r"\usetikzlibrary" not in text


@pytest.mark.skipif(shutil.which("pdflatex") is None, reason="there is no pdflatex on this machine")
@pytest.mark.parametrize("part", ["boundary", "vertex", "face", "degrees"])
def test_tikz_compiles_with_a_stock_latex(part, tmp_path):
    names = ["a_b", "c%d", "e{f", r"g\h", "i$j", "k&l"]
    s = build(Triangulation.from_facets([names[:5], names[1:]]))
    (tmp_path / "picture.tex").write_text(tikz(sketch(s, part)))
    (tmp_path / "paper.tex").write_text(
        r"\documentclass{article}\usepackage{tikz}\begin{document}\input{picture}\end{document}"
    )
    run = subprocess.run(
        ["pdflatex", "-interaction=nonstopmode", "-halt-on-error", "paper.tex"],
        cwd=tmp_path,
        capture_output=True,
        timeout=100,
    )
    assert run.returncode == 0, run.stdout.decode(errors="replace")[-2000:]


def test_the_same_picture_has_the_same_bytes_in_another_process():
    code = (
        "import hashlib, dualize\nfrom dualize.draw import KINDS, encode, sketch\n"
        f"s = dualize.build(dualize.read({str(MESHES / 'klein_bottle_3d_9.txt')!r}))\n"
        "made = sketch(s, 'dual')\n"
        "print([(k, len(encode(made, k)), hashlib.sha256(encode(made, k)).hexdigest()) for k in KINDS])"
    )
    one, two = (
        subprocess.run(
            [sys.executable, "-c", code],
            env=environment(PYTHONHASHSEED=seed, TZ=zone),
            capture_output=True,
            check=True,
        ).stdout.decode()
        for seed, zone in (("1", "UTC"), ("2", "Asia/Tokyo"))
    )
    assert one == two
    assert all(f"'{kind}'" in one for kind in KINDS)


def test_labels_are_text_and_never_markup():
    evil = ["<script>", "b&c", '"d"', "e'f", "]]>"]
    s = build(Triangulation.from_facets([evil]))
    text = svg(sketch(s, "vertex"))
    ElementTree.fromstring(text)
    assert "<script" not in text and "&lt;script&gt;" in text
    for table in (s._repr_html_(), Triangulation.from_facets([evil])._repr_html_()):
        assert "<script" not in table


# -- looks -----------------------------------------------------------------------------------------


def luminance(colour):
    """Relative luminance (W3C, Web Content Accessibility Guidelines 2.1, 2018)."""
    parts = [int(colour[k : k + 2], 16) / 255 for k in (1, 3, 5)]
    linear = [x / 12.92 if x <= 0.04045 else ((x + 0.055) / 1.055) ** 2.4 for x in parts]
    return float(np.dot(linear, [0.2126, 0.7152, 0.0722]))


def contrast(a, b):
    high, low = sorted((luminance(a), luminance(b)), reverse=True)
    return (high + 0.05) / (low + 0.05)


@pytest.mark.parametrize("colour", sorted({INK, QUIET} | {x.colour for x in LOOKS.values() if x.head}))
def test_type_and_lines_stand_out_from_white(colour):
    assert contrast(colour, "#ffffff") >= 4.5


@pytest.mark.parametrize("name", [n for n, look in LOOKS.items() if look.shape])
def test_numbers_stand_out_from_their_badges(name):
    assert contrast(INK, LOOKS[name].fill) >= 4.5


def test_no_two_looks_differ_by_colour_alone():
    meant = {n: x for n, x in LOOKS.items() if x.means}
    kinds = {
        n: (x.width >= 1.2, x.dashes, x.head, x.shape, x.fill == "#ffffff", bool(x.fill))
        for n, x in meant.items()
    }
    assert len(set(kinds.values())) == len(kinds)


def test_the_legend_names_what_is_shown_and_nothing_else():
    made = sketch(foam("harbour_inside.txt"))
    said = {m.text for m in made.marks if isinstance(m, Words) and m.cell is None}
    assert {"link, from source to target", "node, orientation +1"} <= said
    assert not any("vertex" in x for x in said)


@pytest.mark.parametrize("name", SHIPPED)
def test_every_shipped_mesh_is_drawn_inside_its_picture(name):
    s = foam(name)
    for part in ("boundary", "dual") if s.counts["nodes"] else ("dual",):
        made = sketch(s, part, most=30)
        boxes = np.array([extent(m) for m in made.marks])
        assert boxes.min() >= 0
        assert (boxes[:, 1] <= [made.width + 0.1, made.height + 0.1]).all()


# -- refusals --------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("part", "options", "told"),
    [
        ("bondary", {}, "no part 'bondary' to draw; is it boundary"),
        ("boundary", {}, "no boundary to draw"),
        ("vertex", {"number": 36}, "no vertex 36"),
        ("face", {"number": -1}, "no face -1"),
        ("vertex", {"most": 3}, "has no option most"),
        ("dual", {"most": 0}, "cannot show 0 cells"),
        ("space", {}, "no coordinates"),
    ],
)
def test_what_cannot_be_drawn_is_refused(part, options, told):
    with pytest.raises(InputError, match=told):
        sketch(foam("cp2_9.txt"), part, **options)


def test_a_name_without_a_known_suffix_is_refused(tmp_path):
    with pytest.raises(InputError, match="does not say what kind of picture"):
        dualize.draw.write(foam("cp2_9.txt"), tmp_path / "picture.bmp")
    assert list(tmp_path.iterdir()) == []


def test_an_existing_file_is_not_overwritten(tmp_path):
    s = build(Triangulation.from_facets(simplex(3)))
    assert dualize.draw.write(s, tmp_path / "a.svg").width > 0
    with pytest.raises(InputError, match="exists already"):
        dualize.draw.write(s, tmp_path / "a.svg")
