"""Lattices against closed formulas, volumes, and published tori.

H. Freudenthal, Simplizialzerlegungen von beschraenkter Flachheit, Ann. of Math. 43 (1942) 580-582; H. W.
Kuhn, Some combinatorial lemmas in topology, IBM J. Res. Dev. 4 (1960) 518-524 (from memory).
"""

from itertools import product
from math import factorial

import numpy as np
import pytest
from make_measures import (
    betti,
    euler,
    f_vector,
    first_homology,
    is_closed_manifold,
    orientable,
    same_complex,
    volumes,
)
from specimens import GLUED, kuhn_grid

import dualize
from dualize.make import lattice

VARIANTS = {
    "paths": factorial,
    "coned": lambda d: 2 * d * factorial(d - 1),
    "barycentric": lambda d: 2**d * factorial(d),
}

# Simplices per cube of the periodic grid of paths: k! S(d, k) + (k + 1)! S(d, k + 1), S the Stirling
# numbers of the second kind (from memory).
PER_CUBE = {2: (1, 3, 2), 3: (1, 7, 12, 6), 4: (1, 15, 50, 60, 24)}


@pytest.mark.parametrize(
    "sizes",
    [(3, 4), (1, 1), (3, 3, 4), (1, 1, 1), (2, 1, 3), (3, 3, 3, 3), (1, 1, 1, 1), (1, 2, 1, 1)],
    ids=str,
)
def test_periodic_lattice_has_the_published_counts_per_cube(sizes):
    t = lattice(*sizes, periodic="xyzt"[: len(sizes)])
    assert f_vector(t) == tuple(n * int(np.prod(sizes)) for n in PER_CUBE[len(sizes)])


@pytest.mark.parametrize("d", [2, 3, 4])
@pytest.mark.parametrize("variant", VARIANTS)
def test_open_lattice_fills_its_box(variant, d):
    sizes = (2, 1, 3, 1)[:d]
    t = lattice(*sizes, variant=variant)
    assert len(t) == VARIANTS[variant](d) * np.prod(sizes)
    assert volumes(t).sum() == pytest.approx(np.prod(sizes))
    assert volumes(t).min() == pytest.approx(volumes(t).max())
    assert betti(t.corners) == (1, *[0] * d)


@pytest.mark.parametrize("d", [2, 3, 4])
@pytest.mark.parametrize("variant", VARIANTS)
@pytest.mark.parametrize("periodic", ["x", "all"])
def test_charts_of_a_periodic_lattice_fill_its_box(variant, d, periodic):
    sizes = (3, 1, 2, 1)[:d]
    t = lattice(*sizes, variant=variant, periodic="xyzt"[:d] if periodic == "all" else "x")
    assert volumes(t).sum() == pytest.approx(np.prod(sizes))
    assert t.coordinates.period.tolist() == [
        float(n) if periodic == "all" or a == 0 else 0 for a, n in enumerate(sizes)
    ]


@pytest.mark.parametrize("variant", VARIANTS)
def test_charts_agree_across_gluings_up_to_the_period(variant):
    t = lattice(3, 3, 3, variant=variant, periodic="xyz")
    where, period = t.coordinates.corner, t.coordinates.period
    here = np.repeat(where[:, None], 4, axis=1)
    there = where[t.across[:, :, None], t.carry]
    steps = (here - there) / period
    for i in range(4):
        shared = np.delete(steps[:, i], i, axis=1)
        assert np.abs(shared - np.round(shared)).max() < 1e-12


@pytest.mark.parametrize("shape", [(2, 1, 2), (1, 1, 1, 2)], ids=str)
def test_open_lattice_is_the_grid_built_one_path_at_a_time(shape):
    assert same_complex(lattice(*shape), kuhn_grid(shape))


@pytest.mark.parametrize("shape", [(3, 3, 3), (3, 4, 3), (3, 3, 3, 3)], ids=str)
def test_periodic_lattice_is_the_grid_built_one_path_at_a_time(shape):
    assert same_complex(lattice(*shape, periodic="xyzt"[: len(shape)]), kuhn_grid(shape, periodic=True))


@pytest.mark.parametrize("shape", ["1x1x1", "2x1x1", "2x2x2", "1x1x1x1", "2x1x1x1"])
def test_small_periods_have_the_counts_of_the_table_built_one_path_at_a_time(shape):
    sizes = tuple(map(int, shape.split("x")))
    slow = GLUED[f"kuhn-torus-{shape}"]
    rows = [[c if c is not None else [-1] * (len(sizes) + 1) for c in row] for row in slow.carry]
    slow = dualize.Triangulation.from_gluings(slow.across, rows)
    fast = lattice(*sizes, periodic="xyzt"[: len(sizes)])
    dualize.Triangulation.from_gluings(fast.across, fast.carry)  # the table is consistent
    lengths = [np.sort(np.diff(dualize.build(t)["faces/vertex_offsets"])).tolist() for t in (slow, fast)]
    assert lengths[0] == lengths[1]
    assert f_vector(fast) == f_vector(slow)


# T^D: Betti numbers are binomial coefficients (common knowledge, Kuenneth).
@pytest.mark.parametrize("variant,size", [("paths", 3), ("coned", 3), ("barycentric", 2)])
def test_periodic_variants_are_tori(variant, size):
    t = lattice(size, size, size, periodic="xyz", variant=variant)
    assert betti(t.corners) == betti(t.corners, 2) == (1, 3, 3, 1)
    assert is_closed_manifold(t)
    assert orientable(t)


def test_four_dimensional_periodic_lattice_is_a_torus():
    t = lattice(3, 3, 3, 3, periodic="xyzt")
    assert betti(t.corners) == (1, 4, 6, 4, 1)
    assert is_closed_manifold(t)


@pytest.mark.parametrize("variant,size", [("coned", 3), ("barycentric", 2), ("barycentric", 1)])
def test_four_dimensional_finer_variants_have_euler_characteristic_zero(variant, size):
    t = lattice(size, size, size, size, periodic="xyzt", variant=variant)
    assert euler(t) == 0
    assert len(t) == VARIANTS[variant](4) * size**4
    assert orientable(t)


# The flat 3-manifolds (W. Hantzsche, H. Wendt, Dreidimensionale euklidische Raumformen, Math. Ann. 110
# (1935) 593-611; J. A. Wolf, Spaces of Constant Curvature (1967), theorems 3.5.5 and 3.5.9; from memory):
# H_1 of the torus bundle with monodromy A is Z + coker(A - 1).
FLAT = {
    "half turn": (dict(twist="z=-x-y"), True, [2, 2, 0]),
    "exchange": (dict(twist="z=yx"), False, [0, 0]),
    "exchange and half turn": (dict(twist="z=-y-x"), False, [0, 0]),
    "reflection": (dict(twist="z=-xy", variant="barycentric"), False, [2, 0, 0]),
    "quarter turn": (dict(twist="z=-yx", variant="barycentric"), True, [2, 0]),
}


@pytest.mark.parametrize("size", [1, 2, 3])
@pytest.mark.parametrize("name", FLAT)
def test_twisted_lattice_is_the_flat_manifold_with_this_monodromy(name, size):
    options, orientable_, homology = FLAT[name]
    if size == 3 and options.get("variant"):
        size = 2
    t = lattice(size, size, size, periodic="xyz", **options)
    assert orientable(t) == orientable_
    assert euler(t) == 0
    if size == 1:
        assert first_homology(t) == sorted(homology)
    elif t.corners is not None:
        free, even = homology.count(0), homology.count(0) + homology.count(2)
        assert (betti(t.corners)[1], betti(t.corners, 2)[1]) == (free, even)
        assert is_closed_manifold(t)


# H_1 = Z + coker(A - 1): for the cyclic exchange of three axes coker = Z, for -1 it is (Z/2)^3.
@pytest.mark.parametrize(
    "twist,orientable_,homology",
    [("t=yzx", True, [0, 0]), ("t=-x-y-z", False, [2, 2, 2, 0]), ("t=yxz", False, [0, 0, 0])],
)
def test_twisted_four_dimensional_lattice(twist, orientable_, homology):
    t = lattice(1, 1, 1, 1, periodic="xyzt", twist=twist)
    assert f_vector(t) == (1, 15, 50, 60, 24)
    assert orientable(t) == orientable_
    assert first_homology(t) == sorted(homology)


def test_twisted_box_with_open_sides_is_a_moebius_bundle():
    t = lattice(2, 2, 3, periodic="z", twist="z=yx")
    assert betti(t.corners) == (1, 1, 0, 0)
    assert not orientable(t)


def test_period_of_a_twisted_direction_is_none():
    assert lattice(3, 3, 3, periodic="xyz", twist="z=yx").coordinates.period.tolist() == [3, 3, 0]


@pytest.mark.parametrize("variant", VARIANTS)
@pytest.mark.parametrize("periodic", ["", "y"])
def test_every_simplex_is_positive_as_it_is_written(variant, periodic):
    t = lattice(2, 3, 1, variant=variant, periodic=periodic)
    where = t.coordinates.corner if periodic else t.coordinates.point[t.corners]
    signs = np.sign(np.linalg.det(where[:, 1:] - where[:, :1]))
    assert (signs == t.written).all()
    assert (dualize.build(t)["vertices/orientation"] == t.written).all()


def test_coordinates_are_left_out_on_request():
    assert lattice(3, 3, 3, periodic="xyz", coordinates=False).coordinates is None


def test_labels_are_numbered_without_gaps():
    for variant, periodic in product(VARIANTS, ("", "xyz")):
        t = lattice(3, 3, 3, variant=variant, periodic=periodic)
        assert np.unique(t.corners).tolist() == list(range(int(t.corners.max()) + 1))


@pytest.mark.parametrize(
    "sizes,options,message",
    [
        ((3,), {}, "the box has 1 sizes"),
        ((3, 0), {}, "the size along y is 0"),
        ((3, 3), {"periodic": "z"}, "there is no direction 'z'"),
        ((3, 3), {"variant": "fine"}, "there is no variant 'fine'"),
        ((3, 3, 3), {"periodic": "z", "twist": "z=xx"}, "no permutation"),
        ((3, 3, 3), {"periodic": "z", "twist": "z>yx"}, "cannot be read"),
        ((3, 3, 3), {"periodic": "x", "twist": "z=yx"}, "seam of an open direction"),
        ((3, 4, 3), {"periodic": "xyz", "twist": "z=yx"}, "which are not alike"),
        ((3, 3, 3), {"periodic": "xz", "twist": "z=yx"}, "which are not alike"),
        ((3, 3, 3), {"periodic": "xyz", "twist": "z=-xy"}, "reverses some of the other directions"),
    ],
    ids=lambda x: str(x) if isinstance(x, str) else None,
)
def test_wrong_parameters_are_refused(sizes, options, message):
    with pytest.raises(dualize.InputError, match=message):
        lattice(*sizes, **options)


def test_a_lattice_beyond_the_memory_is_refused_at_once():
    with pytest.raises(dualize.LimitError, match="GiB"):
        lattice(10**4, 10**4, 10**4, 10**4)
