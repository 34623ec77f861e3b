"""Cones, joins, sums, products, slabs and mapping tori against theorems and published lists."""

from itertools import combinations
from itertools import product as pairs
from math import comb

import numpy as np
import pytest
from catalogue import CATALOGUE
from make_measures import (
    betti,
    boundary_facets,
    euler,
    f_vector,
    is_closed_manifold,
    is_sphere_like,
    orientable,
    same_complex,
    volumes,
)
from specimens import moebius_band

import dualize
from dualize import Triangulation
from dualize.make import (
    circle,
    cone,
    connected_sum,
    interval,
    join,
    lattice,
    lens_space,
    mapping_torus,
    points,
    product,
    projective_plane,
    published,
    random_gluing,
    shared_pair,
    simplex_boundary,
    slab,
    suspension,
    torus,
)


def written(name):
    return Triangulation.from_facets(CATALOGUE[name].facets)


def convolved(a, b):
    """The coefficients of the product of two polynomials."""
    return tuple(np.convolve(a, b).tolist())


# -- cones and suspensions -------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["torus_7", "rp3_11", "t3_15", "barnette_sphere_8", "solid_torus_7"])
def test_cone_has_the_homology_of_a_point_and_the_counts_of_a_cone(name):
    base = written(name)
    t = cone(base)
    f = (1, *f_vector(base), 0)
    assert f_vector(t) == tuple(a + b for a, b in zip(f[1:], f, strict=False))
    assert betti(t.corners) == (1, *[0] * t.dimension)


def test_cone_over_a_sphere_is_a_ball_with_this_boundary():
    base = written("barnette_sphere_8")
    t = cone(base)
    assert same_complex(base, boundary_facets(t).tolist())
    assert is_sphere_like(boundary_facets(t))


# Betti numbers of a suspension: those of the base, reduced, one dimension up (common knowledge).
@pytest.mark.parametrize("name", ["torus_7", "rp3_11", "t3_15", "poincare_16"])
@pytest.mark.parametrize("prime", [2, 1009])
def test_suspension_shifts_homology(name, prime):
    base = written(name)
    b = betti(base.corners, prime)
    assert betti(suspension(base).corners, prime) == (1, b[0] - 1, *b[1:])


@pytest.mark.parametrize(
    "name,suspended", [("torus_7", "susp_t2_9"), ("rp3_11", "susp_rp3_13"), ("t3_15", "susp_t3_17")]
)
def test_suspension_is_the_one_of_the_catalogue(name, suspended):
    assert same_complex(suspension(written(name)), CATALOGUE[suspended].facets)


@pytest.mark.parametrize("tips,make", [(1, cone), (2, suspension)], ids=["cone", "suspension"])
def test_gluing_tables_are_coned_like_labelled_complexes(tips, make):
    base = lens_space(3, 1)
    t = make(base)
    Triangulation.from_gluings(t.across, t.carry)
    f = f_vector(base)
    assert f_vector(t) == tuple(tips * a + b for a, b in zip((1, *f), (*f, 0), strict=True))
    assert int((t.across < 0).sum()) == (len(base) if tips == 1 else 0)
    assert orientable(t)


@pytest.mark.parametrize("make", [cone, suspension, slab], ids=["cone", "suspension", "slab"])
def test_orientation_of_the_first_simplex_is_that_of_the_base(make):
    facets = CATALOGUE["rp3_11"].facets
    straight = make(Triangulation.from_facets(facets))
    swapped = make(Triangulation.from_facets([[f[1], f[0], *f[2:]] for f in facets]))
    assert straight.written[0] == -swapped.written[0]


# -- joins -----------------------------------------------------------------------------------------


# The f-polynomial 1 + f0 x + ... of a join is the product of the f-polynomials (common knowledge).
@pytest.mark.parametrize("m,n", [(3, 3), (4, 5), (7, 3)])
def test_join_of_two_circles_is_a_sphere(m, n):
    t = join(circle(m), circle(n))
    assert (1, *f_vector(t)) == convolved((1, m, m), (1, n, n))
    assert is_sphere_like(t.corners)


def test_join_of_a_circle_and_a_sphere_is_a_sphere():
    t = join(circle(4), simplex_boundary(2))
    assert is_sphere_like(t.corners)
    assert t.dimension == 4


def test_join_with_two_points_is_the_suspension():
    base = written("rp3_11")
    assert f_vector(join(base, points(2))) == f_vector(suspension(base))


def test_join_with_a_segment_is_a_cone_twice():
    assert f_vector(join(simplex_boundary(2), interval())) == f_vector(cone(cone(simplex_boundary(2))))


def test_join_of_two_triangulations_has_too_many_dimensions():
    with pytest.raises(dualize.InputError, match="dimension 5"):
        join(simplex_boundary(2), simplex_boundary(2))


# -- products --------------------------------------------------------------------------------------

FACTORS = {
    "S1": circle(3),
    "I": interval(2),
    "S2": simplex_boundary(2),
    "T2": torus(2),
    "RP2": projective_plane(),
    "S3": simplex_boundary(3),
    "RP3": written("rp3_11"),
    "M": Triangulation.from_facets(moebius_band()),
}


def of(factor):
    return factor.corners if isinstance(factor, Triangulation) else factor


@pytest.mark.parametrize(
    "a,b",
    [
        (a, b)
        for a, b in pairs(FACTORS, repeat=2)
        if 2 <= of(FACTORS[a]).shape[1] + of(FACTORS[b]).shape[1] - 2 <= 4
    ],
)
@pytest.mark.parametrize("prime", [2, 1009])
def test_product_obeys_kuenneth(a, b, prime):
    t = product(FACTORS[a], FACTORS[b])
    assert betti(t.corners, prime) == convolved(betti(of(FACTORS[a]), prime), betti(of(FACTORS[b]), prime))
    dualize.build(t)


# From memory: S. Eilenberg, N. Steenrod, Foundations of Algebraic Topology (1952).
@pytest.mark.parametrize(
    "a,b,name",
    [
        ("S2", "S1", "prod_s2_s1_12"),
        ("S3", "S1", "prod_s3_s1_15"),
        ("S2", "S2", "prod_s2_s2_16"),
        ("T2", "S2", "prod_t2_s2_28"),
        ("RP2", "S1", "prod_rp2_s1_18"),
        ("RP2", "S2", "prod_rp2_s2_24"),
    ],
)
def test_product_has_the_published_counts(a, b, name):
    t = product(FACTORS[a], FACTORS[b])
    entry = CATALOGUE[name]
    assert list(f_vector(t)) == entry.f
    assert orientable(t) == entry.orientable
    assert is_closed_manifold(t)


def test_product_of_boxes_fills_its_box():
    t = product(lattice(2, 3), lattice(1, 2))
    assert t.coordinates.point.shape[1] == 4
    assert volumes(t).sum() == pytest.approx(2 * 3 * 1 * 2)
    assert len(t) == (2 * 6) * (2 * 2) * comb(4, 2)


def test_product_of_words_joins_them():
    t = product(Triangulation.from_facets([["a", "b", "c"]]), interval())
    assert set(t.corner_names) == {f"{x},{y}" for x in "abc" for y in "01"}


# -- slabs -----------------------------------------------------------------------------------------


@pytest.mark.parametrize("layers", [1, 2, 3])
@pytest.mark.parametrize("name", ["simplex_bd_4", "rp3_11", "t3_15", "solid_torus_7", "torus_7"])
def test_slab_has_the_homology_of_its_base(name, layers):
    base = written(name)
    t = slab(base, layers)
    assert len(t) == layers * (base.dimension + 1) * len(base)
    for prime in (2, 1009):
        assert betti(t.corners, prime) == (*betti(base.corners, prime), 0)


@pytest.mark.parametrize("layers", [1, 3])
def test_ends_of_a_slab_have_the_labels_of_the_base(layers):
    base = written("rp3_11")
    t = slab(base, layers)
    n = int(base.corners.max()) + 1
    ends = boundary_facets(t)
    assert same_complex(base, ends[(ends < n).all(axis=1)].tolist())
    assert same_complex(base, (ends[(ends >= layers * n).all(axis=1)] - layers * n).tolist())
    assert len(ends) == 2 * len(base)


def test_slab_has_the_published_counts():
    entry = CATALOGUE["rp3_x_i_22"]
    t = slab(written("rp3_11"))
    assert list(f_vector(t)) == entry.f
    assert dualize.build(t).counts["nodes"] == entry.nodes


@pytest.mark.parametrize("layers", [1, 2, 4])
def test_slab_of_a_table_is_that_of_the_labelled_complex(layers):
    base = written("torus_7")
    bare = Triangulation.from_gluings(base.across, base.carry)
    one, two = slab(base, layers), slab(bare, layers)
    Triangulation.from_gluings(two.across, two.carry)
    assert f_vector(two) == f_vector(one)
    lengths = [np.sort(np.diff(dualize.build(t)["faces/vertex_offsets"])).tolist() for t in (one, two)]
    assert lengths[0] == lengths[1]


@pytest.mark.parametrize("layers", [1, 2])
def test_slab_of_a_periodic_lattice_table(layers):
    base = lattice(1, 1, 1, periodic="xyz")
    t = slab(base, layers)
    Triangulation.from_gluings(t.across, t.carry)
    assert len(t) == 4 * 6 * layers
    assert euler(t) == 0
    assert orientable(t)


def test_slab_of_unordered_gluings_is_refused():
    base = random_gluing(3, 3, seed=1)
    assert not dualize.build(base).flags["ordered"]
    with pytest.raises(dualize.InputError, match="does not keep the order"):
        slab(base)


# Orientation of a product by its axes, first to last (common practice).
ALIKE = {
    "2 and 2": lambda: product(lattice(2, 1), lattice(1, 2)),
    "3 and 1": lambda: product(lattice(2, 1, 1), interval()),
    "1 and 2": lambda: product(interval(), lattice(2, 1)),
    "slab 4": lambda: slab(lattice(2, 1, 2), 2),
    "slab 3": lambda: slab(lattice(2, 1)),
    "slab of a table": lambda: slab(lens_space(3, 1)),
    "mapping torus": lambda: mapping_torus(lattice(1, 1, 1), {}),
    "cone": lambda: cone(lattice(2, 1, 1)),
    "suspension": lambda: suspension(lattice(2, 1, 1)),
    "suspension of a table": lambda: suspension(lens_space(3, 1)),
    "join": lambda: join(interval(), interval()),
}


@pytest.mark.parametrize("name", ALIKE)
def test_products_of_what_is_written_positive_are_written_positive(name):
    t = ALIKE[name]()
    assert (dualize.build(t)["vertices/orientation"] == t.written).all()


def test_top_of_a_slab_has_the_orientation_of_the_base():
    base = written("rp3_11")
    s, n = dualize.build(slab(base)), int(base.corners.max()) + 1
    signs = dict(zip(map(tuple, s["nodes/corners"].tolist()), s["nodes/orientation"].tolist(), strict=True))
    oriented = dualize.build(base)["vertices/orientation"].tolist()
    for row, sign in zip(base.corners.tolist(), oriented, strict=True):
        assert signs[tuple(x + n for x in row)] == sign
        assert signs[tuple(row)] == -sign


def test_slab_of_a_lattice_fills_its_box():
    assert volumes(slab(lattice(2, 1, 2), 3)).sum() == pytest.approx(12)
    assert volumes(slab(lattice(3, 3, 3, periodic="xyz"), 2)).sum() == pytest.approx(54)


def test_words_of_a_slab_keep_the_bottom_and_number_the_levels():
    t = slab(Triangulation.from_facets([["a", "b", "c"]]), 2)
    assert set(t.corner_names) == {x + y for x in "abc" for y in ("", ".1", ".2")}


# -- mapping tori ----------------------------------------------------------------------------------


def test_mapping_torus_of_the_identity_is_the_product_with_a_circle():
    base = written("rp3_11")
    t = mapping_torus(base, {}, 3)
    assert f_vector(t) == f_vector(product(base, circle(3)))
    assert is_closed_manifold(t)


# A transposition of corners reverses the orientation of the sphere, a cycle of three keeps it: the bundle
# is S3 x S1 or the twisted one, H = (Z, Z, 0, Z_2, 0) (D. W. Walkup 1970, B. Bagchi, B. Datta 2008; from
# memory).
@pytest.mark.parametrize(
    "symmetry,orientable_,free,even",
    [
        ({0: 1, 1: 0}, False, (1, 1, 0, 0, 0), (1, 1, 0, 1, 1)),
        ({0: 1, 1: 2, 2: 0}, True, (1, 1, 0, 1, 1), (1, 1, 0, 1, 1)),
    ],
    ids=["transposition", "three-cycle"],
)
def test_mapping_torus_of_the_sphere(symmetry, orientable_, free, even):
    t = mapping_torus(simplex_boundary(3), symmetry)
    assert orientable(t) == orientable_
    assert (betti(t.corners), betti(t.corners, 2)) == (free, even)
    assert is_closed_manifold(t)


def test_mapping_torus_of_the_seven_vertex_torus():
    # x -> 2 x has the order 3 on Z_7 and on H_1: H_1 = Z + coker(A - 1), coker of order det(A - 1) = 3
    t = mapping_torus(torus(2), {x: 2 * x % 7 for x in range(7)})
    assert betti(t.corners) == (1, 1, 1, 1)
    assert betti(t.corners, 3) == (1, 2, 2, 1)


@pytest.mark.parametrize(
    "symmetry,message",
    [({0: 1, 1: 0}, "which is none"), ({0: 1}, "two labels to the same"), ({0: 12, 12: 0}, "no label")],
    ids=["no symmetry", "not injective", "unknown label"],
)
def test_wrong_symmetries_are_refused(symmetry, message):
    with pytest.raises(dualize.InputError, match=message):
        mapping_torus(torus(2), symmetry)


# -- connected sums --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "a,b", [("s2_x_s1_10", "rp3_11"), ("cp2_9", "s2xs2_12_a"), ("t3_15", "t3_15"), ("torus_7", "torus_7")]
)
@pytest.mark.parametrize("reverse", [False, True])
def test_connected_sum_adds_homology(a, b, reverse):
    one, two = written(a), written(b)
    t = connected_sum(one, two, reverse=reverse)
    f, g, h = f_vector(one), f_vector(two), f_vector(t)
    d = t.dimension
    expected = [x + y - comb(d + 1, i + 1) for i, (x, y) in enumerate(zip(f, g, strict=True))]
    expected[d] -= 1
    assert list(h) == expected
    for prime in (2, 1009):
        x, y = betti(one.corners, prime), betti(two.corners, prime)
        assert betti(t.corners, prime) == (1, *(p + q for p, q in zip(x[1:-1], y[1:-1], strict=True)), 1)
    assert orientable(t)
    assert is_closed_manifold(t)


def signature(t):
    """Signature of the intersection form in the orientation of `build`, by cup products of cocycles."""
    corners, signs = t.corners.tolist(), dualize.build(t)["vertices/orientation"].tolist()
    triples = list(combinations(range(5), 3))
    triangles = sorted({tuple(s[i] for i in c) for s in corners for c in triples})
    number = {x: i for i, x in enumerate(triangles)}
    tetrahedra = sorted({tuple(np.delete(s, i).tolist()) for s in corners for i in range(5)})
    edges = sorted({(x[i], x[j]) for x in triangles for i, j in ((0, 1), (0, 2), (1, 2))})
    edge = {x: i for i, x in enumerate(edges)}
    d2 = np.zeros((len(tetrahedra), len(triangles)))
    for r, x in enumerate(tetrahedra):
        for i in range(4):
            d2[r, number[x[:i] + x[i + 1 :]]] = (-1) ** i
    d1 = np.zeros((len(triangles), len(edges)))
    for r, x in enumerate(triangles):
        for i in range(3):
            d1[r, edge[x[:i] + x[i + 1 :]]] = (-1) ** i
    # harmonic cochains: closed, and orthogonal to the exact ones
    _, values, rows = np.linalg.svd(np.vstack([d2, d1.T]), full_matrices=True)
    basis = rows[(values > 1e-9).sum() :]
    form = np.zeros((len(basis), len(basis)))
    for s, sign in zip(corners, signs, strict=True):
        front, back = number[tuple(s[:3])], number[tuple(s[2:])]
        form += sign * np.outer(basis[:, front], basis[:, back])
    eigenvalues = np.linalg.eigvalsh((form + form.T) / 2)
    assert (np.abs(eigenvalues) > 1e-6).all()
    return int(np.sign(eigenvalues).sum())


# Signature is additive, and changes its sign with the orientation (V. A. Rokhlin 1952; common knowledge).
@pytest.mark.parametrize("space,size", [("CP2#CP2", 2), ("CP2#-CP2", 0), ("CP2", 1), ("S2xS2", 0)])
def test_signature_of_the_sum_is_the_sum_of_signatures(space, size):
    assert abs(signature(published(space))) == size


@pytest.mark.parametrize("remove", [(0, 0), (3, 17), (35, 1)])
@pytest.mark.parametrize("flip", [False, True])
def test_signature_keeps_to_the_orientations_as_written(remove, flip):
    facets = CATALOGUE["cp2_9"].facets
    plus = Triangulation.from_facets(facets)
    other = Triangulation.from_facets([[f[1], f[0], *f[2:]] for f in facets]) if flip else plus
    t = connected_sum(plus, other, remove=remove)
    assert signature(t) == signature(plus) + signature(other)
    t = connected_sum(plus, other, remove=remove, reverse=True)
    assert signature(t) == signature(plus) - signature(other)


def test_connected_sum_with_the_catalogues_values():
    entry = CATALOGUE["cp2_sum_a_13"]
    assert list(f_vector(published("CP2#-CP2"))) == entry.f


@pytest.mark.parametrize(
    "make,message",
    [
        (lambda: connected_sum(torus(2), torus(3)), "dimensions 2 and 3"),
        (lambda: connected_sum(torus(2), torus(2), remove=(0, 14)), "no simplex 14"),
        (lambda: connected_sum(torus(3), lens_space(3, 1)), "second complex is a gluing table"),
        (lambda: cone(torus(4)), "four-dimensional"),
        (lambda: slab(torus(4)), "dimension 5"),
        (lambda: slab(torus(2), 0), "layers is 0"),
        (lambda: mapping_torus(torus(2), {}, 2), "layers is 2"),
        (lambda: product(torus(3), torus(2)), "dimension 5"),
        (lambda: product(shared_pair(4, 3), circle()), "gluing table"),
        (lambda: product([[0, 0]], torus(2)), "repeats a label"),
        (lambda: product([[0.5, 1]], torus(2)), "no table of integer labels"),
        (lambda: product([[-1, 1]], torus(2)), "negative label"),
        (lambda: circle(2), "segments is 2"),
    ],
)
def test_wrong_parameters_are_refused(make, message):
    with pytest.raises(dualize.InputError, match=message):
        make()
