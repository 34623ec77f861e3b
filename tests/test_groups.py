"""Fundamental groups of foams and homomorphisms to finite groups, against published counts and theorems."""

import random
from itertools import product
from math import gcd

import numpy as np
import pytest
from catalogue import CATALOGUE, NAMES, SMALL_GLUINGS
from hypothesis import given
from hypothesis import strategies as st
from spaces import factors, glued, listed

from dualize import InputError, LimitError, build, change
from dualize.kernels import mode
from dualize.topology.groups import foam_groups, foam_presentation
from dualize.topology.homology import integral_homology
from dualize.topology.homomorphisms import count_homomorphisms, finite_group, group_of_permutations
from dualize.topology.integral import abelian_group
from dualize.topology.presentation import Presentation, simplified

GROUPED = [n for n in NAMES if CATALOGUE[n].dual_group]
SLOW = {("emch_8", "S3"), ("emch_8", "Z3")}


def group_of(name):
    [group] = foam_groups(build(listed(name)))
    return group


# --------------------------------------------------------------------------------------------------
# The group of the foam


@pytest.mark.parametrize("name", GROUPED)
def test_abelianisation_is_the_published_one(name):
    assert group_of(name).abelianisation() == factors(CATALOGUE[name].dual_group["abelianisation"])


@pytest.mark.parametrize("name", GROUPED)
def test_numbers_of_homomorphisms_are_the_published_ones(name):
    counts = CATALOGUE[name].dual_group["homomorphisms"]
    chosen = [g for g in counts if (name, g) not in SLOW]
    group = group_of(name)
    assert {g: count_homomorphisms(group, g) for g in chosen} == {g: counts[g] for g in chosen}


@pytest.mark.parametrize("name", NAMES)
def test_the_presentation_as_it_stands_has_the_published_number_of_flat_labellings(name):
    """|G|^(V - 1) |Hom(group, G)| labellings of the edges by G = Z_2, product 1 around faces (R.
    Dijkgraaf, E. Witten, Comm. Math. Phys. 129 (1990) 393-429)."""
    entry = CATALOGUE[name]
    [group] = foam_presentation(build(listed(name)))
    assert group.generators == entry.edges_internal - entry.vertices + 1
    assert len(group.relators) == entry.faces_internal
    into_z2 = sum(e % 2 == 0 for e in group.abelianisation())
    assert into_z2 + entry.vertices - 1 == entry.log2_flat_z2


@pytest.mark.parametrize("name", ["susp_t2_9", "susp_rp3_13", "susp_t3_17", "kummer_k3_8"])
def test_with_singular_points_it_is_the_group_of_the_space_without_them(name):
    group = group_of(name)
    assert integral_homology(listed(name))[1] == []  # the space itself is simply connected
    assert group.abelianisation() == factors(CATALOGUE[name].dual_group["abelianisation"]) != []


def test_groups_of_one_and_two_tetrahedra():
    """By S. V. Matveev, Acta Appl. Math. 19 (1990) 101-130: L(4,1), L(5,2); L(5,1), L(7,2), L(8,3), and
    S3/Q8, which has 28 homomorphisms to Q8 (from memory; see `catalogue`)."""
    first = [foam_groups(build(glued(SMALL_GLUINGS[f"tetrahedra_1_{x}"])))[0] for x in range(4)]
    assert sorted(str(g).replace("A", "a") for g in first) == [
        "<a | a a a a a>",
        "<a | a a a a>",
        "<trivial>",
        "<trivial>",
    ]
    second = [foam_groups(build(glued(SMALL_GLUINGS[f"tetrahedra_2_{x}"])))[0] for x in range(17)]
    into_q8 = sorted(count_homomorphisms(g, "Q8") for g in second)
    assert sum(g.trivial for g in second) == 6
    assert into_q8 == [1] * 11 + [2] * 2 + [8] * 3 + [28]


def test_poincares_sphere():
    """Perfect, of order 120, onto A5: 120 isomorphisms up to the centre and the trivial map; S4 is solvable
    (H. Seifert, W. Threlfall, Lehrbuch der Topologie, 1934)."""
    group = group_of("poincare_16")
    assert group.abelianisation() == []
    into = {name: count_homomorphisms(group, name) for name in ("Z2", "S3", "S4", "A5", "S5")}
    assert into == {"Z2": 1, "S3": 1, "S4": 1, "A5": 121, "S5": 121}


@pytest.mark.parametrize("name, n", [("s2_x_s1_10", 1), ("prod_t2_s2_28", 2), ("t3_15", 3), ("t4_31", 4)])
def test_commuting_tuples_of_the_symmetric_group(name, n):
    """|Hom(Z^n, S3)| = 6, 18, 48, 126."""
    assert count_homomorphisms(group_of(name), "S3") == [6, 18, 48, 126][n - 1]


def test_every_component_has_its_own_group():
    both = change.union(listed("l31_12"), listed("l51_16")).triangulation
    assert sorted(g.abelianisation() for g in foam_groups(build(both))) == [[3], [5]]


@pytest.mark.parametrize("name", ["t3_15", "poincare_16", "kummer_k4_16", "prod_rp2_s2_24"])
def test_compiled_and_interpreted_kernels_agree(name):
    s = build(listed(name))
    found = []
    for kind in ("interpreted", "compiled"):
        with mode(kind):
            found.append((foam_presentation(s), foam_groups(s)))
    assert found[0] == found[1]


def test_the_group_does_not_depend_on_the_order_of_simplices():
    t = change.relabel(listed("poincare_16"), seed=3).triangulation
    [group] = foam_groups(build(t))
    assert count_homomorphisms(group, "A5") == 121


# --------------------------------------------------------------------------------------------------
# Presentations and finite groups


def brute(presentation, name):
    """Homomorphisms counted one assignment after the other."""
    g = finite_group(name)
    total = 0
    for images in product(range(len(g.inverse)), repeat=presentation.generators):
        good = True
        for r in presentation.relators:
            value = 0
            for x in r:
                y = images[abs(x) - 1]
                value = int(g.product[value, y if x > 0 else g.inverse[y]])
            good = good and value == 0
        total += good
    return total


words = st.lists(st.sampled_from([-3, -2, -1, 1, 2, 3]), max_size=7)


@given(st.lists(words, max_size=4))
def test_counts_are_those_of_plain_search(relators):
    p = Presentation(3, tuple(map(tuple, relators)))
    for name in ("Z2", "S3"):
        assert count_homomorphisms(p, name) == brute(p, name)


@given(st.lists(words, max_size=4))
def test_tietze_transformations_keep_the_group(relators):
    p = Presentation(3, tuple(map(tuple, relators)))
    short = simplified(3, relators)
    assert short.abelianisation() == p.abelianisation()
    for name in ("S3", "Q8"):
        assert count_homomorphisms(short, name) == count_homomorphisms(p, name)


@pytest.mark.parametrize("name", ["Z2", "S3", "Q8", "A5", "PSL(2,7)"])
@pytest.mark.parametrize("n", [2, 3, 4, 6])
def test_solutions_of_x_to_the_n_are_divisible_by_the_common_divisor(name, n):
    """G. Frobenius, 1895 (from memory)."""
    count = count_homomorphisms(Presentation(1, ((1,) * n,)), name)
    assert count % gcd(n, len(finite_group(name).inverse)) == 0


@pytest.mark.parametrize("n", range(1, 13))
def test_cyclic_groups_into_the_symmetric_group(n):
    """|Hom(Z_n, S3)| = 1 + 3 [2 | n] + 2 [3 | n]."""
    expected = 1 + 3 * (n % 2 == 0) + 2 * (n % 3 == 0)
    assert count_homomorphisms(Presentation(1, ((1,) * n,)), "S3") == expected


@pytest.mark.parametrize("name", ["Z3", "S3", "Q8", "A5"])
def test_commuting_pairs_are_as_many_as_elements_times_classes(name):
    """|Hom(Z^2, G)| = |G| k(G), k the number of conjugacy classes: 3, 3, 5, 5 (from memory; common
    practice)."""
    classes = {"Z3": 3, "S3": 3, "Q8": 5, "A5": 5}[name]
    torus = Presentation(2, ((1, 2, -1, -2),))
    assert count_homomorphisms(torus, name) == len(finite_group(name).inverse) * classes


@pytest.mark.parametrize("genus", [1, 2])
def test_surface_groups_by_the_formula_of_mednykh(genus):
    """|Hom(pi_1(surface of genus g), G)| = |G|^(2g-1) times the sum of dim^(2-2g) over irreducible
    representations (A. D. Mednykh, 1978); S3 has the dimensions 1, 1, 2."""
    letters = [x for h in range(genus) for x in (2 * h + 1, 2 * h + 2, -2 * h - 1, -2 * h - 2)]
    expected = 6 ** (2 * genus - 1) * (2 + 2.0 ** (2 - 2 * genus))
    assert count_homomorphisms(Presentation(2 * genus, (tuple(letters),)), "S3") == expected


def test_free_generators_are_counted_apart():
    assert count_homomorphisms(Presentation(20, ()), "A5") == 60**20


@pytest.mark.parametrize(
    "name, order",
    [("Z7", 7), ("S3", 6), ("S4", 24), ("A4", 12), ("A5", 60), ("A6", 360), ("Q8", 8), ("PSL(2,7)", 168)],
)
def test_finite_groups_have_their_orders_and_are_groups(name, order):
    g = finite_group(name)
    assert len(g.inverse) == order
    rng = np.random.default_rng(1)
    a, b, c = rng.integers(0, order, (3, 200))
    assert (g.product[g.product[a, b], c] == g.product[a, g.product[b, c]]).all()
    assert (g.product[a, g.inverse[a]] == 0).all() and (g.product[0] == np.arange(order)).all()


def test_q8_has_one_element_of_order_two():
    g = finite_group("Q8")
    assert (g.product[np.arange(8), np.arange(8)] == 0).sum() == 2
    assert (g.product != g.product.T).any()


def test_a_group_given_by_permutations():
    square = group_of_permutations([[1, 2, 3, 0], [3, 2, 1, 0]])
    assert len(square.inverse) == 8
    assert count_homomorphisms(Presentation(1, ((1, 1),)), square) == 6  # 1, the half turn, four reflections


@pytest.mark.parametrize("name", ["M11", "Z0", "S9"])
def test_unknown_groups_are_refused(name):
    with pytest.raises(InputError, match="there is no group"):
        finite_group(name)


def test_no_permutation_is_refused():
    with pytest.raises(InputError, match="no permutation"):
        group_of_permutations([[0, 0, 1]])


def test_large_groups_are_refused():
    with pytest.raises(LimitError, match="more than 2520 elements"):
        group_of_permutations([[1, 2, 3, 4, 5, 6, 0], [1, 0, 2, 3, 4, 5, 6]])


def test_a_long_search_gives_up():
    rng = random.Random(1)
    relators = tuple(tuple(rng.choice([-1, 1]) * rng.randint(1, 8) for _ in range(30)) for _ in range(2))
    with pytest.raises(LimitError, match="too many steps"):
        count_homomorphisms(Presentation(8, relators), "A5", steps=1000)


def test_long_presentations_are_told_apart_by_their_letters():
    assert str(Presentation(2, ((1, -2, -2),))) == "<a, b | a B B>"
    assert str(Presentation(0, ())) == "<trivial>"


def test_finite_abelian_groups_are_what_they_were():
    for orders in ([2, 4], [3, 5], [2, 2, 6]):
        relators = [(x,) * e for x, e in enumerate(orders, 1)]
        found = Presentation(len(orders), tuple(relators)).abelianisation()
        assert found == abelian_group(len(orders), [{x: e} for x, e in enumerate(orders)])
        assert np.prod(found) == np.prod(orders)
