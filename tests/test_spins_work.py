"""Work lists, users' vertex tables, gauge, contraction and weights, proved with the readers in `scripts/`."""

import itertools
import json

import networkx
import numpy as np
import opt_einsum
import pytest
import specimens as sp
from reference import glue_by_labels
from regions import SYMBOLS, admissible_spins, by_labels, equally_oriented, foam, glued, loaded, scramble

import dualize
from dualize import InputError, LimitError, make, spins
from dualize.spins.work import slot_group

COMPLEXES = {
    "4d-3-3": glue_by_labels(sp.move_side(4, 3)),
    "4d-chain": glue_by_labels(sp.chain(4, 2)),
    "4d-twisted": sp.GLUED["4d-twisted-simplex"],
    "4d-snapped": sp.GLUED["4d-snapped-simplex"],
    "3d-2-3": glue_by_labels(sp.move_side(3, 3)),
    "3d-snapped": sp.GLUED["3d-snapped-tetrahedron"],
    "2d-melon": sp.melon(2, 2),
}
complexes = pytest.mark.parametrize("table", COMPLEXES.values(), ids=COMPLEXES)


def symbol(at, legs, directions, pairs):
    """A vertex from its spins, legs and directions alone: 3jm tensors and an epsilon at every wedge."""
    k = len(legs)
    wedge = {frozenset(p): w for w, p in enumerate(pairs)}
    operands = []
    for slot, row in enumerate(legs):
        ws = [wedge[frozenset((slot, c))] for c in row]
        names = [k + 2 * w + (slot == pairs[w][1]) for w in ws]
        operands += [SYMBOLS.intertwiners(*(int(at[w]) for w in ws)), [slot, *names]]
    for w, direction in enumerate(directions):
        operands += [SYMBOLS.epsilon(int(at[w])), [k + 2 * w, k + 2 * w + 1][::direction]]
    return np.einsum(*operands, list(range(k)), optimize="greedy")


def amplitude(s, boundary, vertex, most=6):
    """The sum over the internal spins with vertex tensors ``vertex(row, v, spins of all faces)``."""
    rules, factors, total = spins.rules_of(s, boundary), spins.weights(s), 0
    for chunk in spins.list_labellings(rules, most):
        for n, row in enumerate(chunk.spins):
            every = np.concatenate([row, rules.boundary])
            net = spins.network(s, spins=every)
            tensors = [vertex(chunk, n, v, every) for v in range(s.counts["vertices"])]
            total = total + factors.of_faces(every) * np.einsum(*net.operands(tensors), optimize="greedy")
    return total


def drawn(table, seed, number=3):
    """Descriptions of a complex with boundary spins and the amplitude by the reader."""
    rng = np.random.default_rng(seed)
    for _ in range(number):
        s = glued(scramble(table, rng)[0])
        given = admissible_spins(s, rng, largest=300)
        yield rng, s, given, SYMBOLS.amplitude(loaded(s, SYMBOLS), given, up_to=6)


# --------------------------------------------------------------------------------------------------
# Work lists


@pytest.mark.parametrize("symmetric", [False, True], ids=["plain", "symmetric"])
@complexes
def test_the_entries_of_a_work_list_give_the_amplitude(table, symmetric):
    d = table.dimension
    pairs = list(itertools.combinations(range(d + 1), 2))
    turns = [[*range(1, d + 1), 0], [1, 0, *range(2, d + 1)]] if symmetric else []
    sizes = []
    for _, s, given, expected in drawn(table, 5):
        lists = {}

        def vertex(chunk, n, v, every, s=s, given=given, lists=lists):
            if id(chunk) not in lists:
                lists[id(chunk)] = chunk, spins.work_list(s, chunk.spins, given, symmetries=turns)
            work = lists[id(chunk)][1]
            x = work.entry[n, v]
            tensor = symbol(work.spins[x], work.order[x].tolist(), [1] * len(pairs), pairs)
            assert tensor.shape == tuple(work.dimensions[x])
            return work.carry(n, v, tensor)

        got = amplitude(s, given, vertex)
        np.testing.assert_allclose(got, expected, atol=1e-12)
        sizes.append(np.abs(expected).max())
    assert max(sizes) > 1e-4


def test_equal_vertices_are_counted_once():
    s = dualize.build(make.move_side(4, 5))
    work = spins.work_list(s, np.full((1, 10), 2), np.full(10, 2))
    assert len(work) == 1 and work.elements == 3**5 and work.bytes == 8 * 3**5
    assert work.entry.tolist() == [[0] * 5]


def test_directions_stay_in_the_key_on_request():
    s = dualize.build(make.move_side(4, 5))
    work = spins.work_list(s, np.full((1, 10), 2), np.full(10, 2), signs=False)
    distinct = {
        (tuple(a), tuple(b))
        for a, b in zip(s["wedges/direction"].tolist(), s["vertices/leaves"].tolist(), strict=True)
    }
    assert len(work) == len(distinct) > 1
    back = work.direction[work.entry[0]]
    np.testing.assert_array_equal(back, s["wedges/direction"])


def test_symmetries_need_fewer_entries():
    s = dualize.build(make.move_side(4, 4))
    rules = spins.rules_of(s, 1)
    rows = np.concatenate([c.spins for c in spins.list_labellings(rules, 3)])
    every = [[1, 2, 3, 4, 0], [1, 0, 2, 3, 4]]
    plain = spins.work_list(s, rows, rules.boundary)
    fewer = spins.work_list(s, rows, rules.boundary, symmetries=every)
    assert len(slot_group(4, every)) == 120
    assert len(fewer) < len(plain)


@pytest.mark.parametrize(
    "rows, outer, match",
    [([[1, 2]], [1] * 18, "1 columns"), ([[1]], [1] * 3, "18 links")],
    ids=["labelling", "boundary"],
)
def test_what_does_not_fit_the_foam_is_refused(rows, outer, match):
    with pytest.raises(InputError, match=match):
        spins.work_list(dualize.build(make.move_side(4, 3)), rows, outer)


def test_a_symmetry_is_a_permutation():
    with pytest.raises(InputError, match=r"permutation of 0 \.\. 4"):
        slot_group(4, [[0, 1, 2, 3, 3]])


# --------------------------------------------------------------------------------------------------
# Users' tables


def users_tensor(table, link_spins):
    """An entry of a table, by contraction as declared; written without the package."""
    k = len(table.legs)
    spin = {frozenset(link): s for link, s in zip(table.links, link_spins, strict=True)}
    name = {(a, b): k + k * a + b for a in range(k) for b in range(k)}
    operands = []
    for n in range(k):
        legs = [table.legs[n][p] for p in table.pairing[n]]
        row = [spin[frozenset((n, other))] for other in legs]
        states = SYMBOLS.intertwiners(*row)
        if table.norm == "symbols" and k == 5 and len(states):
            a, b, c, d = row
            ks = np.arange(max(abs(a - b), abs(c - d)), min(a + b, c + d) + 1, 2)
            states = states / np.sqrt(ks + 1).reshape(-1, 1, 1, 1, 1)
        operands += [states, [n, *(name[n, other] for other in legs)]]
    for (a, b), s in zip(table.links, link_spins, strict=True):
        # lowering takes |m> of the leg at b to (-1)**(j - m) <-m|, which is applied to the leg at a
        ends = [name[b, a], name[a, b]] if table.contraction == "delta" else [name[a, b], name[b, a]]
        operands += [SYMBOLS.epsilon(s), ends]
    used = {x: y for y, x in enumerate(dict.fromkeys(i for o in operands[1::2] for i in o))}
    operands[1::2] = [[used[i] for i in o] for o in operands[1::2]]
    return np.einsum(*operands, [used[n] for n in range(k)], optimize="greedy")


def random_declaration(rng, d):
    k = d + 1
    pairs = list(itertools.combinations(range(k), 2))
    links = [pairs[x] for x in rng.permutation(len(pairs))]
    return {
        "nodes": rng.permutation(k).tolist(),
        "legs": [rng.permutation([x for x in range(k) if x != n]).tolist() for n in range(k)],
        "links": [list(p) if rng.integers(2) else list(p)[::-1] for p in links],
        "pairing": [rng.permutation(d).tolist() for _ in range(k)],
        "contraction": str(rng.choice(["epsilon", "delta"])),
        "norm": str(rng.choice(["orthonormal", "symbols"])),
    }


@complexes
def test_tables_under_any_declaration_give_the_same_amplitude(table):
    sizes = []
    for rng, s, given, expected in drawn(table, 5):
        for _ in range(2):
            declared = spins.vertex_table(json.loads(json.dumps(random_declaration(rng, s.dimension))))
            fit = spins.adapters(s, declared)

            def vertex(chunk, n, v, every, s=s, fit=fit, declared=declared):
                at = every[s["wedges/face"][v]]
                return fit[v].carry(users_tensor(declared, fit[v].link_spins(at)), at)

            np.testing.assert_allclose(amplitude(s, given, vertex), expected, atol=1e-12)
        sizes.append(np.abs(expected).max())
    assert max(sizes) > 1e-4


def test_a_declaration_survives_its_document():
    declared = spins.vertex_table(random_declaration(np.random.default_rng(0), 4))
    assert spins.vertex_table(declared.to_dict()) == declared


@pytest.mark.parametrize(
    "document, match",
    [
        ({"colour": 1}, "no entry 'colour'"),
        ({"version": 2}, "version 2"),
        ({"legs": [[1, 2], [0, 2]]}, "3, 4 or 5 nodes, not 2"),
        ({"legs": [[1, 2, 3, 3], *[[0, 1, 2, 3]] * 4]}, "legs of node 0"),
        ({"links": [[0, 1]]}, "every two nodes are linked"),
        ({"nodes": [0, 1, 2, 3, 3]}, "each once"),
        ({"pairing": [0, 1, 2, 2]}, "a pairing orders"),
        ({"contraction": "gamma"}, "no contraction 'gamma'"),
        ({"norm": "other"}, "no norm 'other'"),
        ({"legs": 4}, "no list"),
    ],
    ids=["entry", "version", "few", "legs", "links", "nodes", "pairing", "contraction", "norm", "type"],
)
def test_bad_declarations_are_refused(document, match):
    with pytest.raises(InputError, match=match):
        spins.vertex_table(document)


def test_a_table_of_another_dimension_is_refused():
    with pytest.raises(InputError, match="4D foams, and this foam is 3D"):
        spins.adapters(dualize.build(make.simplex(3)), spins.vertex_table())


# --------------------------------------------------------------------------------------------------
# Half-edges


@pytest.mark.parametrize("slot", [0, 3])
def test_half_edges_leave_out_the_redundant_one(slot):
    """S. Speziale, "Boosting Wigner's nj-symbols" (2017), from memory: one of five is redundant."""
    s = dualize.build(make.move_side(4, 3))
    found = spins.half_edges(s, [[1], [3]], [1] * 18, truncation=1, slot=slot)
    pairs = list(itertools.combinations(range(5), 2))
    assert len(found.vertex) == 3 * 4 and slot not in found.slot
    assert {tuple(row) for row in found.fixed.tolist()} == {
        tuple(w for w, p in enumerate(pairs) if slot in p)
    }
    assert found.auxiliary.shape == (3, 6)
    for n, (v, i) in enumerate(zip(found.vertex.tolist(), found.slot.tolist(), strict=True)):
        edge = s["vertices/edge"][v, i]
        for x, inner in enumerate((1, 3)):
            every = np.array([inner] + [1] * 18)
            entry = found.entry[x, n]
            assert found.spins[entry].tolist() == every[s["edges/face"][edge]].tolist()
            face = s["edges/face"][edge, found.held[entry]]
            wedge = pairs.index(tuple(sorted((i, slot))))
            assert s["wedges/face"][v, wedge] == face


def test_half_edge_coefficients_are_counted():
    s = dualize.build(make.simplex(4))
    found = spins.half_edges(s, np.zeros((1, 0)), [1] * 10, truncation=2)
    # each distinct half-edge: three spins l = 1/2, 3/2, 5/2, the fourth 1/2; tried one by one
    sizes = [int(spins.intertwiner_dimension([1, *row])) for row in itertools.product((1, 3, 5), repeat=3)]
    distinct = len(found.spins)
    assert found.coefficients == distinct * sum(x > 0 for x in sizes)
    assert found.elements == distinct * 2 * sum(sizes)
    assert found.symbols == 3**6


# --------------------------------------------------------------------------------------------------
# Gauge


@pytest.mark.parametrize("spin", [0, 1, 2])
def test_four_around_a_segment_with_the_gauge_fixed(spin):
    """The divergent 2-4 move: with one inner spin held at j, (2j+1)**2 times the other side.

    H. Ooguri, Mod. Phys. Lett. A 7 (1992) 2799; Bonzom, Smerlak (2010): one spare delta.
    """
    facets, other = sp.move_side(4, 4), sp.other_side(4, 4)
    one = foam(facets)
    two = equally_oriented(one, other)
    fixed = spins.gauge(one).faces.tolist()
    assert len(fixed) == 1
    got = SYMBOLS.amplitude(loaded(one, SYMBOLS), 1, fixed=dict.fromkeys(fixed, spin))
    expected = SYMBOLS.amplitude(loaded(two, SYMBOLS), 1)
    nodes, _ = by_labels(one, two)
    np.testing.assert_allclose(got, (spin + 1) ** 2 * np.transpose(expected, nodes), atol=1e-12)
    assert np.abs(expected).max() > 1e-3


def test_five_around_a_point_with_the_gauge_fixed():
    """The 1-5 move: four inner spins on a spanning tree of the inner segments at 0 leave the vertex."""
    facets, other = sp.move_side(4, 5), sp.other_side(4, 5)
    one = foam(facets)
    two = equally_oriented(one, other)
    fixed = spins.gauge(one).faces.tolist()
    got = SYMBOLS.amplitude(loaded(one, SYMBOLS), 1, fixed=dict.fromkeys(fixed, 0))
    nodes, _ = by_labels(one, two)
    expected = np.transpose(SYMBOLS.amplitude(loaded(two, SYMBOLS), 1), nodes)
    np.testing.assert_allclose(got, expected, atol=1e-12)
    assert np.abs(expected).max() > 1e-2


def test_fixed_faces_of_a_point_are_a_spanning_tree():
    """Inner triangles contain the point and a pair of the five others: the pairs are a tree."""
    s = dualize.build(make.move_side(4, 5))
    graph = networkx.Graph()
    for f in spins.gauge(s).faces.tolist():
        at = s["faces/vertex_offsets"][f]
        v, (i, j) = int(s["faces/vertex"][at]), s.wedge(int(s["faces/wedge"][at]))
        labels = {int(x) for c, x in enumerate(s["vertices/corners"][v]) if c not in (i, j)}
        graph.add_edge(*sorted(labels - {5}))
    assert networkx.is_tree(graph) and len(graph) == 5


@pytest.mark.parametrize("name", ["S3", "RP3", "T3", "S2xS1"])
def test_three_dimensional_trees_have_one_face_for_every_point_but_one(name):
    """L. Freidel, D. Louapre, "Diffeomorphisms and spin foam models" (2003)."""
    t = make.published(name)
    found = spins.gauge(dualize.build(t))
    assert found.how == "tree" and len(found.faces) == len(np.unique(t.corners)) - 1


def test_the_boundary_counts_as_one_point():
    found = spins.gauge(dualize.build(make.move_side(3, 4)))
    assert len(found.faces) == 1
    assert len(spins.gauge(dualize.build(make.move_side(3, 3))).faces) == 0


def test_the_gauge_fixed_three_sphere_has_the_value_one():
    """Ponzano-Regge on the boundary of the 4-simplex: spin 0 on the tree leaves only spins 0."""
    s = dualize.build(make.simplex_boundary(3))
    fixed = dict.fromkeys(spins.gauge(s).faces.tolist(), 0)
    value = SYMBOLS.amplitude(loaded(s, SYMBOLS), np.empty(0, dtype=int), fixed=fixed)
    assert float(value) == pytest.approx(1)


@pytest.mark.parametrize("name", ["4d-3-3", "4d-snapped", "4d-chain"])
def test_group_elements_are_fixed_on_a_spanning_forest(name):
    s = glued(COMPLEXES[name])
    graph = networkx.MultiGraph()
    graph.add_nodes_from(range(s.counts["vertices"]))
    for e in spins.gauge(s).edges.tolist():
        graph.add_edge(int(s["edges/source"][e, 0]), int(s["edges/target"][e, 0]))
    assert networkx.is_forest(graph)
    assert networkx.number_connected_components(graph) == s.counts["components"]


# --------------------------------------------------------------------------------------------------
# Contraction and weights


def random_tensors(net, rng):
    return [rng.normal(size=[int(net.sizes[e]) for e in t]) for t in net.tensors]


@pytest.mark.parametrize("memory", [None, 8 * 64, 8 * 40], ids=["whole", "sliced", "thin"])
def test_slices_add_up(memory):
    s = dualize.build(make.simplex_boundary(4))
    net = spins.network(s, 2)
    plan = spins.plan_network(net, memory=memory)
    tensors = random_tensors(net, np.random.default_rng(2))
    expected = np.einsum(*net.operands(tensors), optimize="greedy")
    total = 0
    for values in itertools.product(*(range(int(net.sizes[e])) for e in plan.sliced)):
        chosen = dict(zip(plan.sliced, values, strict=True))
        parts = [
            t[tuple(chosen.get(e, slice(None)) for e in axes)]
            for t, axes in zip(tensors, net.tensors, strict=True)
        ]
        names = [[e for e in axes if e not in chosen] for axes in net.tensors]
        total += contract_by(plan.path, parts, names)
    assert total == pytest.approx(float(expected))
    assert plan.slices == 2 ** len(plan.sliced)
    shapes = [t.shape for t in parts]
    _, info = opt_einsum.contract_path(opt_einsum_text(names), *shapes, shapes=True, optimize=list(plan.path))
    assert plan.flops == plan.slices * info.opt_cost
    if memory is not None:
        assert plan.sliced and 8 * plan.peak <= memory


def opt_einsum_text(names):
    return ",".join("".join(map(opt_einsum.get_symbol, axes)) for axes in names) + "->"


def contract_by(path, tensors, names):
    """Contract step by step as a path says; the largest tensor on the way is seen."""
    work = list(zip(tensors, names, strict=True))
    for step in path:
        taken = [work.pop(x) for x in sorted(step, reverse=True)]
        left = {e for _, axes in work for e in axes}
        ours = [e for _, axes in taken for e in axes]
        keep = sorted({e for e in ours if e in left})
        operands = [x for t, axes in taken for x in (t, axes)]
        work.append((np.einsum(*operands, keep), keep))
    ((value, axes),) = work
    assert not axes
    return float(value)


def test_open_edges_cannot_be_sliced_away():
    s = dualize.build(make.simplex(4))
    with pytest.raises(LimitError, match="however it is sliced"):
        spins.plan_network(spins.network(s, 1), memory=4)


def test_einsum_text_and_index_arrays_agree():
    s = dualize.build(make.move_side(4, 3))
    net = spins.network(s, 2, closed=[0, 4])
    tensors = random_tensors(net, np.random.default_rng(1))
    one = np.einsum(net.einsum, *tensors, optimize="greedy")
    np.testing.assert_allclose(one, np.einsum(*net.operands(tensors), optimize="greedy"))
    assert one.ndim == 7 and net.vertices == 3


def test_networks_need_admissible_spins():
    s = dualize.build(make.move_side(4, 3))
    with pytest.raises(InputError, match="admit no intertwiner"):
        spins.network(s, spins=[2] + [1] * 18)
    with pytest.raises(InputError, match="either the sizes of the edges or the spins"):
        spins.network(s)


def test_the_order_of_the_whole_sum_names_every_face_and_edge_once():
    s = dualize.build(make.move_side(4, 5))
    order = spins.sum_order(s, 5, 3)
    assert sorted(order.order) == sorted([("face", f) for f in range(10)] + [("edge", e) for e in range(10)])
    # every vertex holds six inner faces and four inner edges at once
    assert order.width >= 10
    assert order.entries >= 5**6 * 3**4


def test_roots_of_weights_at_the_boundary_multiply_to_whole_ones():
    """Two regions glued along a face bring half of its weight each."""
    s = dualize.build(make.move_side(4, 2))
    none, root = spins.weights(s), spins.weights(s, boundary="root")
    assert none.face_power.tolist() == [0.0] * 16 and root.face_power.tolist() == [0.5] * 16
    given = np.full(16, 2)
    assert root.of_faces(given) == pytest.approx(none.of_faces(given) * 3**8)


@pytest.mark.parametrize("word", ["boundary", "norm"])
def test_unknown_weights_are_refused(word):
    with pytest.raises(InputError, match=f"there is no .*{word}"):
        spins.weights(dualize.build(make.simplex(4)), **{word: "other"})
