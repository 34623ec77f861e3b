"""The readers in `scripts/` against published numbers: one simplex, and the two sides of every move.

Both compute the SU(2) BF amplitude from a file, by projectors and by symbols.  Spins are twice-spins.
"""

from itertools import combinations, product

import numpy as np
import pytest
import specimens as sp
from regions import (
    PROJECTORS,
    READERS,
    SYMBOLS,
    admissible_spins,
    amplitude,
    by_labels,
    equally_oriented,
    foam,
    loaded,
)
from sympy import Rational, sqrt
from sympy.physics.wigner import wigner_3j, wigner_6j

both = pytest.mark.parametrize("reader", READERS.values(), ids=READERS.keys())


# --------------------------------------------------------------------------------------------------
# Intertwiners


@pytest.mark.parametrize("spins", list(product(range(5), repeat=3)), ids=str)
def test_three_valent_states_are_3j_symbols(spins):
    """E. P. Wigner, Group Theory (1959), the phases of Condon and Shortley; values from sympy."""
    a, b, c = spins
    expected = np.zeros([s + 1 for s in spins])
    for i, j in product(range(a + 1), range(b + 1)):
        m = Rational(a, 2) - i, Rational(b, 2) - j
        k = int(Rational(c, 2) + sum(m)) if (a + b + c) % 2 == 0 else -1
        if 0 <= k <= c:
            expected[i, j, k] = wigner_3j(*(Rational(s, 2) for s in spins), *m, -sum(m))
    states = PROJECTORS.open_states(spins, (1, 1, 1))
    assert len(states) == ((a + b + c) % 2 == 0 and abs(a - b) <= c <= a + b)
    np.testing.assert_allclose(states.sum(axis=0), expected, atol=1e-12)
    np.testing.assert_allclose(SYMBOLS.symbol_3jm(*spins), expected, atol=1e-12)


def test_number_of_states():
    """dim Inv = 1 + min(2 min j, sum - 2 max j), from memory; the readers find it by null spaces, by k."""
    for spins in product(range(5), repeat=4):
        total, largest = sum(spins), max(spins)
        number = 1 + min(min(spins), total // 2 - largest) if total % 2 == 0 and 2 * largest <= total else 0
        assert len(SYMBOLS.intertwiners(*spins)) == number, spins
        if max(spins) < 4:
            assert len(PROJECTORS.invariants(spins, (1, -1, 1, -1))) == number, spins


@pytest.mark.parametrize("signs", list(product((1, -1), repeat=4)), ids=str)
def test_open_states_are_orthonormal_invariants(signs):
    for spins in [(1, 1, 1, 1), (2, 1, 2, 3), (2, 2, 2, 2), (3, 1, 2, 2)]:
        states = PROJECTORS.open_states(spins, signs).reshape(-1, np.prod([s + 1 for s in spins]))
        basis = PROJECTORS.invariants(spins, signs).reshape(states.shape)
        np.testing.assert_allclose(states @ states.T, np.eye(len(states)), atol=1e-12)
        np.testing.assert_allclose(states.T @ states, basis.T @ basis, atol=1e-12)


@pytest.mark.parametrize(
    "spins", [(1, 1, 1, 1), (2, 1, 2, 3), (2, 2, 2, 2), (3, 1, 2, 2), (0, 1, 2, 3)], ids=str
)
def test_open_states_are_products_of_3j_symbols(spins):
    """Both readers have the same states, one from generators of the group, one from Racah's sums."""
    np.testing.assert_allclose(
        PROJECTORS.open_states(spins, (1,) * 4), SYMBOLS.intertwiners(*spins), atol=1e-12
    )


# --------------------------------------------------------------------------------------------------
# One simplex


def sign_of_links(skeleton, spins, low_to_high):
    """The sign of a single simplex against the network whose links all run as `low_to_high` says.

    A link the other way costs (-1)**(2j), and so does a face that leaves through an edge from a node.
    """
    odd = 0
    for w, (i, j) in enumerate(combinations(range(skeleton.dimension + 1), 2)):
        enter, leave = (i, j) if skeleton["wedges/direction"][0, w] > 0 else (j, i)
        spin = spins[skeleton["wedges/face"][0, w]]
        odd += spin * (((enter, leave) == (i, j)) != low_to_high)
        odd += spin * (skeleton["vertices/leaves"][0, leave] < 0)
    return (-1) ** int(odd)


SIX_J = [
    # {a b c; d e f} of twice-spins, from memory, all in Varshalovich, Moskalev, Khersonskii (1988)
    ((1, 1, 0, 1, 1, 0), -1 / 2),
    ((1, 1, 2, 1, 1, 0), 1 / 2),
    ((1, 1, 2, 1, 1, 2), 1 / 6),
    ((2, 2, 2, 2, 2, 2), 1 / 6),
    ((2, 2, 2, 1, 1, 1), -1 / 3),
    ((2, 2, 0, 2, 2, 2), -1 / 3),
    ((2, 2, 4, 2, 2, 4), 1 / 30),
    ((3, 3, 2, 3, 3, 2), -11 / 60),
    ((2, 2, 2, 3, 3, 3), -float(sqrt(10)) / 30),
    ((4, 4, 4, 2, 2, 2), float(sqrt(21)) / 30),
    ((1, 2, 3, 2, 1, 2), -1 / 6),
    ((4, 4, 4, 4, 4, 4), -3 / 70),
    ((6, 6, 6, 6, 6, 6), -1 / 14),
    ((8, 8, 8, 8, 8, 8), -467 / 18018),
]


def tetrahedron(reader, six, order=(0, 1, 2, 3)):
    """The value of a tetrahedron and the sign that makes it the 6j symbol {a b c; d e f}."""
    s = foam([list(order)])
    a, b, c, d, e, f = six
    spins = np.zeros(6, dtype=int)
    spins[s["wedges/face"][0]] = [a, b, c, f, e, d]  # the wedges 01 02 03 12 13 23
    # the network of four 3j symbols, all links upward: (-1)**(2 j13 + J1 + J3) {j01 j02 j03; j23 j13 j12},
    # J the sum of the spins at a slot (Yutsis, Levinson, Vanagas, 1962; sign verified on 181 cases)
    sign = (-1) ** (e + (a + f + e) // 2 + (c + e + d) // 2)
    return amplitude(s, spins, reader).item(), sign * sign_of_links(s, spins, True)


@both
@pytest.mark.parametrize("six, value", SIX_J, ids=[str(x) for x, _ in SIX_J])
def test_tetrahedron_is_the_6j_symbol(reader, six, value):
    number, sign = tetrahedron(reader, six)
    assert sign * number == pytest.approx(value, abs=1e-12)


@both
@pytest.mark.parametrize("order", [(0, 1, 2, 3), (1, 0, 2, 3)], ids=["positive", "negative"])
def test_tetrahedron_is_the_6j_symbol_of_sympy(reader, order):
    six = [
        s
        for s in product(range(4), repeat=6)
        if all(
            sum(t) % 2 == 0 and 2 * max(t) <= sum(t)
            for t in (s[:3], (s[0], s[4], s[5]), (s[3], s[1], s[5]), (s[3], s[4], s[2]))
        )
    ]
    for spins in six[:: len(six) // 40]:
        number, sign = tetrahedron(reader, spins, order)
        assert sign * number == pytest.approx(
            float(wigner_6j(*(Rational(x, 2) for x in spins))), abs=1e-12
        ), spins


@both
@pytest.mark.parametrize("order", [(0, 1, 2, 3, 4), (1, 0, 2, 3, 4)], ids=["positive", "negative"])
def test_4_simplex_is_the_15j_symbol(reader, order):
    """All spins 1/2.  Nodes are tetrahedra in lexicographic order, links run from the smaller to the larger
    of them.

    Computed by an independent script, no printed source: contraction of five 4-valent states (Ooguri 1992
    for the rule).
    """
    r = float(sqrt(3)) / 12
    table = {
        "00000": 1 / 4, "00011": 1 / 4, "11000": 1 / 4, "01101": -r, "01110": -r, "10101": -r, "10110": -r,
        "01111": 1 / 6, "10111": -1 / 6, "11011": -1 / 12, "11101": -1 / 6, "11110": 1 / 6,
    }  # fmt: skip
    expected = np.zeros((2,) * 5)
    for key, value in table.items():
        expected[tuple(map(int, key))] = value
    # node n is slot n: the tetrahedra without corner 0, 1, ..., so in reversed lexicographic order; the
    # legs of a node are its triangles in reversed order, which multiplies the state by (-1)**(sum of its
    # spins) = 1
    s = foam([list(order)])
    assert s["nodes/slot"].tolist() == [0, 1, 2, 3, 4]
    sign = sign_of_links(s, [1] * 10, low_to_high=False)
    np.testing.assert_allclose(sign * amplitude(s, 1, reader), expected.transpose(4, 3, 2, 1, 0), atol=1e-12)


@both
@pytest.mark.parametrize(
    "spin, value", [(1, 7 / 18), (2, 307 / 1500), (3, 9263 / 73500)], ids=["half", "one", "three halves"]
)
def test_sum_of_squares_of_the_15j_symbol(reader, spin, value):
    """The integral of the product of ten characters over SU(2)^5: J. W. Barrett, "The classical evaluation of
    relativistic spin networks", Adv. Theor. Math. Phys. 2 (1998) 593, for the integral; values by an
    independent script."""
    assert np.sum(amplitude(foam(sp.simplex(4)), spin, reader) ** 2) == pytest.approx(value, rel=1e-12)


@both
@pytest.mark.parametrize("name, euler, indicator", [
    ("2d-sphere", 2, False), ("2d-torus", 0, False), ("projective-plane", 1, True),
])  # fmt: skip
def test_closed_surface_is_a_sum_over_representations(reader, name, euler, indicator):
    """sum over j of (2j+1)^chi, with the indicator (-1)^(2j) on the projective plane: G. Frobenius and I.
    Schur (1906); A. D. Mednykh (1978); E. Witten, "On quantum gauge theories in two dimensions" (1991)."""
    expected = sum((-1) ** (indicator * s) * (s + 1) ** euler for s in range(4))
    assert amplitude(foam(sp.LABELLED[name]), 0, reader, up_to=3) == pytest.approx(expected, rel=1e-12)


# --------------------------------------------------------------------------------------------------
# Moves: the two sides have the same boundary, with the same orientation


def sides(d, k, reader, seeds, fixed=None, **choice):
    """Pairs of tensors of the side with k simplices and the other one, nodes in the same order."""
    one = foam(sp.move_side(d, k))
    two = equally_oriented(one, sp.other_side(d, k))
    nodes, links = by_labels(one, two)
    files = loaded(one, reader), loaded(two, reader)
    for seed in range(seeds):
        spins = admissible_spins(one, np.random.default_rng(seed), **choice)
        theirs = np.empty_like(spins)
        theirs[links] = spins
        first = reader.amplitude(files[0], spins)
        second = reader.amplitude(files[1], theirs, fixed=fixed)
        yield first, np.transpose(second, nodes)


@both
def test_move_3_3_keeps_the_tensor(reader):
    """H. Ooguri, "Topological lattice models in four dimensions", Mod. Phys. Lett. A 7 (1992) 2799."""
    sizes = []
    for one, two in sides(4, 3, reader, seeds=40):
        np.testing.assert_allclose(one, two, atol=1e-12)
        sizes.append(np.abs(one).max())
    assert np.mean(np.array(sizes) > 1e-6) > 0.9


@both
def test_both_sides_of_3_3_at_spins_one_half(reader):
    """Sum of squares over the 2^9 boundary states, by an independent script."""
    for one, two in sides(4, 3, reader, seeds=1, top=1, unequal=False):
        np.testing.assert_allclose(one, two, atol=1e-12)
    for facets in (sp.move_side(4, 3), sp.other_side(4, 3)):
        assert np.sum(amplitude(foam(facets), 1, reader) ** 2) == pytest.approx(0.0424382716049, abs=1e-12)


@both
def test_move_2_3_keeps_the_tensor(reader):
    """The Biedenharn-Elliott identity: L. C. Biedenharn (1953), J. P. Elliott (1953)."""
    sizes = []
    for one, two in sides(3, 2, reader, seeds=100, top=4):
        np.testing.assert_allclose(one, two, atol=1e-12)
        sizes.append(np.abs(one).max())
    assert np.mean(np.array(sizes) > 1e-6) > 0.7


@both
@pytest.mark.parametrize("spin", [0, 1, 2, 3])
def test_move_1_4_with_one_spin_fixed(reader, spin):
    """G. Ponzano, T. Regge, "Semiclassical limit of Racah coefficients" (1968): (2j+1)^2 times the
    tetrahedron."""
    for one, two in sides(3, 1, reader, seeds=6, fixed={spin: spin}):
        np.testing.assert_allclose((spin + 1) ** 2 * one, two, atol=1e-12 * (spin + 1) ** 2)


@both
@pytest.mark.parametrize("spin", [0, 1, 2])
def test_move_2_4_with_one_spin_fixed(reader, spin):
    """From memory, after Ooguri (1992): one bubble, so (2j+1)^2 times the two simplices."""
    for one, two in sides(4, 2, reader, seeds=4, fixed={spin: spin}, top=2, largest=200):
        np.testing.assert_allclose((spin + 1) ** 2 * one, two, atol=1e-12 * (spin + 1) ** 2)


def internal_pairs(skeleton):
    """Internal faces of the 1-5 side are pairs of the five edges at the inner point: {pair: face}."""
    apex = set.intersection(*(set(row) for row in skeleton["vertices/corners"].tolist())).pop()
    out = {}
    for v, w in product(range(skeleton.counts["vertices"]), range(10)):
        f = int(skeleton["wedges/face"][v, w])
        if f < skeleton.counts["faces_internal"]:
            i, j = skeleton.wedge(w)
            labels = np.delete(skeleton["vertices/corners"][v], [i, j]).tolist()
            out[tuple(sorted(x for x in labels if x != apex))] = f
    return out


TREES = {
    "star": [(0, 1), (0, 2), (0, 3), (0, 4)],
    "path": [(0, 1), (1, 2), (2, 3), (3, 4)],
    "fork": [(0, 1), (1, 2), (1, 3), (3, 4)],
}


@both
@pytest.mark.parametrize("tree", TREES.values(), ids=TREES.keys())
def test_move_1_5_with_a_tree_of_spins_zero(reader, tree):
    """Four inner spins on a spanning tree of the five inner segments at 0: the single 15j symbol.

    Gauge fixing after L. Freidel, D. Louapre, "Diffeomorphisms and spin foam models" (2003).
    """
    other = equally_oriented(foam(sp.move_side(4, 1)), sp.other_side(4, 1))
    pairs = internal_pairs(other)
    points = sorted({x for pair in pairs for x in pair})
    fixed = {pairs[points[a], points[b]]: 0 for a, b in tree}
    for one, two in sides(4, 1, reader, seeds=3, fixed=fixed, top=1, unequal=False):
        np.testing.assert_allclose(one, two, atol=1e-12)


@both
def test_move_1_5_with_a_star_of_spins_one_half(reader):
    """The same with spins 1/2 on the star: 2^8 times the 15j symbol."""
    other = equally_oriented(foam(sp.move_side(4, 1)), sp.other_side(4, 1))
    pairs = internal_pairs(other)
    points = sorted({x for pair in pairs for x in pair})
    fixed = {pairs[points[a], points[b]]: 1 for a, b in TREES["star"]}
    for one, two in sides(4, 1, reader, seeds=1, fixed=fixed, top=1, unequal=False):
        np.testing.assert_allclose(2**8 * one, two, atol=1e-10)
