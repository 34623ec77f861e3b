"""Published spaces, and the families that rules build, against their published values."""

from math import gcd

import numpy as np
import pytest
from catalogue import CATALOGUE
from make_measures import (
    betti,
    boundary_facets,
    f_vector,
    first_homology,
    invariant_factors,
    is_closed_manifold,
    orientable,
    same_complex,
)

import dualize
from dualize.make import (
    ball_bundle,
    kummer_variety,
    lens_space,
    projective_plane,
    published,
    spaces,
    sphere_bundle,
    torus,
)

# (space, vertices) -> the entry of the test catalogue, whose values are published or were recomputed
# separately
ENTRIES = {
    ("T2", 7): "torus_7",
    ("S3", 5): "simplex_bd_4",
    ("S3", 8): "cell16",
    ("S3", 120): "cell600",
    ("S3-Barnette", 8): "barnette_sphere_8",
    ("B3-Ziegler", 10): "ziegler_ball_10",
    ("S1xB2", 7): "solid_torus_7",
    ("S2xS1", 10): "s2_x_s1_10",
    ("S2xS1", 12): "prod_s2_s1_12",
    ("S2xS1-twisted", 9): "klein_s2_s1_twisted_9",
    ("RP3", 11): "rp3_11",
    ("T3", 15): "t3_15",
    ("T3", 27): "kuhn_t3_n3",
    ("L(3,1)", 12): "l31_12",
    ("L(4,1)", 14): "l41_14",
    ("L(5,1)", 16): "l51_16",
    ("Poincare", 16): "poincare_16",
    ("RP2xS1", 18): "prod_rp2_s1_18",
    ("Emch", 8): "emch_8",
    ("Kummer3", 8): "kummer_k3_8",
    ("S4", 6): "simplex_bd_5",
    ("S4", 10): "cross_polytope_5",
    ("CP2", 9): "cp2_9",
    ("CP2#-CP2", 13): "cp2_sum_a_13",
    ("S2xS2", 12): "s2xs2_12_a",
    ("S2xS2", 16): "prod_s2_s2_16",
    ("S3xS1", 11): "s3_x_s1_11",
    ("S3xS1", 15): "prod_s3_s1_15",
    ("S3xS1-twisted", 12): "s3_s1_twisted_12",
    ("S1xB3", 10): "s1_x_b3_10",
    ("S1xB3-twisted", 9): "b3_bundle_twisted_9",
    ("T2xS2", 28): "prod_t2_s2_28",
    ("RP2xS2", 24): "prod_rp2_s2_24",
    ("T4", 31): "t4_31",
    ("T4", 81): "kuhn_t4_n3",
    ("K3", 16): "k3_16",
    ("Kummer4", 16): "kummer_k4_16",
}

# Where the list itself is published, it must be that list.
SAME = {n for n in ENTRIES.values() if not n.startswith(("prod", "cell600", "cp2_sum", "cell16"))}


def betti_of(homology, prime):
    """Betti numbers over a field from groups written as ``Z^2+Z_2``."""
    free, torsion = [], []
    for group in homology:
        terms = [] if group == "0" else group.split("+")
        free.append(
            sum(int(x[2:] or 1) if x.startswith("Z^") else 1 for x in terms if not x.startswith("Z_"))
        )
        torsion.append(sum(x.startswith("Z_") and int(x[2:]) % prime == 0 for x in terms))
    return tuple(
        f + t + (torsion[i - 1] if i else 0) for i, (f, t) in enumerate(zip(free, torsion, strict=True))
    )


@pytest.mark.parametrize("space,vertices", ENTRIES, ids=[f"{s} {n}" for s, n in ENTRIES])
def test_published_space_has_its_published_values(space, vertices):
    entry = CATALOGUE[ENTRIES[space, vertices]]
    t = published(space, vertices)
    assert list(f_vector(t)) == entry.f
    assert orientable(t) == entry.orientable
    s = dualize.build(t)
    assert (s.counts["nodes"], s.counts["links"]) == (entry.nodes, entry.links)
    for prime in (2, 1009):
        assert betti(t.corners, prime) == betti_of(entry.homology, prime)
    if entry.name in SAME:
        assert same_complex(t, entry.facets)


@pytest.mark.parametrize("entry", spaces(), ids=lambda e: f"{e.space} {e.vertices}")
def test_every_space_is_made_with_its_vertices_and_dimension(entry):
    t = published(entry.space, entry.vertices)
    assert (t.dimension, f_vector(t)[0]) == (entry.dimension, entry.vertices)
    assert (entry.file is None) != (entry.rule is None)
    assert entry.source


def test_every_space_is_compared_with_values_somewhere():
    # S2, RP2 and the 24-cell: below and in test_make_polytopes; CP2 # CP2: signature in test_make_products
    elsewhere = {("S2", 4), ("S2", 6), ("RP2", 6), ("S3", 24), ("CP2#CP2", 13)}
    assert {(e.space, e.vertices) for e in spaces()} == set(ENTRIES) | elsewhere


def test_the_smallest_is_the_default_and_case_does_not_matter():
    assert len(published("s3")) == 5
    assert len(published("K3")) == len(published("k3")) == 288


def test_unknown_space_names_near_ones():
    with pytest.raises(dualize.InputError, match=r"'CP3'; is it .*CP2"):
        published("CP3")


def test_unknown_number_of_vertices_names_those_there_are():
    with pytest.raises(dualize.InputError, match="no T3 with 16 vertices") as caught:
        published("T3", 16)
    assert caught.value.hint == "there is one with: 15, 27"


def test_projective_plane_has_the_published_values():
    t = projective_plane()
    assert f_vector(t) == (6, 15, 10)
    assert (betti(t.corners), betti(t.corners, 2)) == ((1, 0, 0), (1, 1, 1))
    assert is_closed_manifold(t)


# -- families --------------------------------------------------------------------------------------


# W. Kuehnel, Results Math. 9 (1986) 95-106 (from memory): f_0 = n, f_1 = (D + 1) n, f_D = D n.
@pytest.mark.parametrize("d,n", [(2, 7), (2, 8), (3, 9), (3, 10), (3, 13), (4, 11), (4, 12), (4, 15)])
def test_sphere_bundle_is_the_product_exactly_when_dn_is_even(d, n):
    t = sphere_bundle(d, n)
    f = f_vector(t)
    assert (f[0], f[1], f[d]) == (n, (d + 1) * n, d * n)
    assert orientable(t) == (d * n % 2 == 0)
    expected = np.convolve([1, 1], [1, *[0] * (d - 2), 1]).tolist()  # Kuenneth mod 2
    assert list(betti(t.corners, 2)) == expected
    assert is_closed_manifold(t)


@pytest.mark.parametrize("d,n", [(2, 5), (2, 6), (3, 7), (3, 8), (4, 9), (4, 10)])
def test_ball_bundle_bounds_the_sphere_bundle_below(d, n):
    t = ball_bundle(d, n)
    assert betti(t.corners) == (1, 1, *[0] * (d - 1))
    assert orientable(t) == ((d - 1) * n % 2 == 0)
    if d > 2:
        assert same_complex(sphere_bundle(d - 1, n), boundary_facets(t).tolist())


@pytest.mark.parametrize("d,b", [(2, (1, 2, 1)), (3, (1, 3, 3, 1)), (4, (1, 4, 6, 4, 1))])
def test_torus_family(d, b):
    t = torus(d)
    assert betti(t.corners) == b
    assert is_closed_manifold(t)


@pytest.mark.parametrize("d", [3, 4])
def test_kummer_variety_is_the_published_list(d):
    assert same_complex(kummer_variety(d), CATALOGUE[{3: "kummer_k3_8", 4: "kummer_k4_16"}[d]].facets)


COPRIME = [(p, q) for p in range(1, 10) for q in range(p) if gcd(p, q) == 1]


# H. Seifert, W. Threlfall, Lehrbuch der Topologie (1934), section 60 (from memory).
@pytest.mark.parametrize("p,q", COPRIME)
def test_lens_space_table_has_cyclic_first_homology_and_the_counts_of_its_cells(p, q):
    t = lens_space(p, q)
    dualize.Triangulation.from_gluings(t.across, t.carry)
    assert first_homology(t) == ([p] if p > 1 else [])
    assert orientable(t)
    assert f_vector(t) == (2, p + 2, 2 * p, p)  # chi = 0: with V = E - F + T every vertex link is a sphere


@pytest.mark.parametrize("p,q", [(1, 0), (2, 1), (3, 1), (5, 2), (7, 3)])
def test_simplicial_lens_space_is_a_manifold_with_this_homology(p, q):
    t = lens_space(p, q, simplicial=True)
    assert len(t) == 96 * p
    assert orientable(t)
    assert betti(t.corners) == (1, 0, 0, 1)
    for prime in {2, 3, 5, 7}:
        assert betti(t.corners, prime) == ((1, 1, 1, 1) if p % prime == 0 else (1, 0, 0, 1))
    if p <= 3:
        assert is_closed_manifold(t)
    f = f_vector(t)
    assert f[0] - f[1] + f[2] - f[3] == 0


# Turaev-Viro at r = 5 tells L(5, 1) from L(5, 2): V. Turaev, O. Viro, Topology 31 (1992) 865-902; the
# values from N. Reshetikhin, V. Turaev (1991) and L. Jeffrey (1992), |S T^a S ...|^2 (from memory,
# recomputed).
TURAEV_VIRO_5 = {
    (1, 0): (5 - 5**0.5) / 20,
    (2, 1): 0,
    (3, 1): (5 + 5**0.5) / 20,
    (4, 1): (5 - 5**0.5) / 10,
    (5, 1): 1 / 2,
    (5, 2): 0,
    (5, 3): 0,
    (7, 2): (5 + 5**0.5) / 20,
}


@pytest.mark.parametrize("p,q", TURAEV_VIRO_5)
def test_lens_space_table_has_the_published_turaev_viro_value(p, q, tmp_path):
    import sys
    from pathlib import Path

    sys.path.insert(0, str(Path(__file__).parent.parent / "scripts"))
    try:
        from turaev_viro import load, turaev_viro
    finally:
        sys.path.pop(0)
    foam = tmp_path / "foam.json"
    dualize.build(lens_space(p, q), points=True).write(foam)
    assert turaev_viro(load(foam), 5) == pytest.approx(TURAEV_VIRO_5[p, q], abs=1e-9)


def nullspace(matrix, p):
    """A basis of the kernel of a matrix over the field of p elements, one row each."""
    m, pivots, row = matrix % p, [], 0
    for column in range(m.shape[1]):
        found = np.flatnonzero(m[row:, column])
        if not len(found):
            continue
        m[[row, row + found[0]]] = m[[row + found[0], row]]
        m[row] = m[row] * pow(int(m[row, column]), -1, p) % p
        others = np.flatnonzero(m[:, column])
        others = others[others != row]
        m[others] = (m[others] - np.outer(m[others, column], m[row])) % p
        pivots.append(column)
        row += 1
        if row == len(m):
            break
    free = [c for c in range(m.shape[1]) if c not in set(pivots)]
    basis = np.zeros((len(free), m.shape[1]), dtype=np.int64)
    basis[np.arange(len(free)), free] = 1
    basis[:, pivots] = -m[: len(pivots), free].T % p
    return basis


def linking_numbers(t, p):
    """Values of ``a cup (da / p)`` on the manifold for a basis of cocycles a mod p, zeros left out."""
    corners = t.corners
    edges = np.unique(np.vstack([corners[:, [i, j]] for i in range(4) for j in range(i + 1, 4)]), axis=0)
    number = {tuple(e): x for x, e in enumerate(edges.tolist())}
    faces = np.unique(np.vstack([np.delete(corners, i, axis=1) for i in range(4)]), axis=0).tolist()
    d = np.zeros((len(faces), len(edges)), dtype=np.int64)
    for f, (x, y, z) in enumerate(faces):
        d[f, [number[y, z], number[x, y]]] = 1
        d[f, number[x, z]] = -1
    signs = dualize.build(t)["vertices/orientation"].astype(int)
    found = []
    for a in nullspace(d, p):
        bockstein = dict(zip(map(tuple, faces), (d @ a // p).tolist(), strict=True))
        pairs = zip(signs, corners.tolist(), strict=True)
        found.append(sum(int(s) * int(a[number[w, x]]) * bockstein[x, y, z] for s, (w, x, y, z) in pairs) % p)
    return {x for x in found if x}


# The linking form of L(p, q) is q / p up to squares, so that for p = 5, where -1 is a square, q = 1, 4
# and q = 2, 3 differ (H. Seifert, W. Threlfall, Lehrbuch der Topologie (1934), section 77; from memory).
@pytest.mark.parametrize("q,square", [(1, True), (4, True), (2, False), (3, False)])
def test_simplicial_lens_space_has_the_linking_form_of_its_q(q, square):
    found = linking_numbers(lens_space(5, q, simplicial=True), 5)
    assert found
    assert found <= ({1, 4} if square else {2, 3})


def test_published_lens_space_has_the_linking_form_of_its_q():
    assert linking_numbers(published("L(5,1)"), 5) <= {1, 4}


@pytest.mark.parametrize(
    "make,message",
    [
        (lambda: lens_space(6, 3), "common factor 3"),
        (lambda: lens_space(0, 1), "p is 0"),
        (lambda: sphere_bundle(3, 8), "vertices is 8"),
        (lambda: ball_bundle(4, 8), "vertices is 8"),
        (lambda: torus(5), "dimension is 5"),
        (lambda: kummer_variety(2), "dimension is 2"),
    ],
)
def test_wrong_parameters_are_refused(make, message):
    with pytest.raises(dualize.InputError, match=message):
        make()


def test_measure_of_smith_forms_is_right():
    # worked by hand: [[2, 4], [6, 8]] has gcd 2 and determinant -8; [[2, 0], [0, 3]] is Z/6
    assert np.prod(invariant_factors([[2, 4], [6, 8]])) == 8
    assert sorted(invariant_factors([[4, 6], [6, 12]])) == [2, 6]
