"""The cabinet: small complexes by name, builders of any size, and hypothesis strategies.

`LABELLED` maps a name to a list of facets, `GLUED` to a gluing table (`reference.Table`); both hold only what
has a dual.  `SINGULAR` holds lists of facets that are refused unless singular complexes are kept, with the
reason; `REFUSED` those that are refused always.
"""

import random
from itertools import combinations, permutations, product

from catalogue import SMALL_GLUINGS
from hypothesis import strategies as st
from reference import Table, table_from_pairs

# --------------------------------------------------------------------------------------------------
# Builders of facet lists


def simplex(d):
    return [list(range(d + 1))]


def sphere(d):
    """Boundary of the (d+1)-simplex."""
    return [list(f) for f in combinations(range(d + 2), d + 1)]


def move_side(d, k):
    """k of the d + 2 facets of the (d+1)-simplex: one side of a Pachner move; the other is `other_side`."""
    return [[c for c in range(d + 2) if c != omitted] for omitted in range(k)]


def other_side(d, k):
    return [[c for c in range(d + 2) if c != omitted] for omitted in range(k, d + 2)]


def around_ridge(d, n):
    """n simplices in a ring around one ridge, n >= 3."""
    ridge, ring = list(range(d - 1)), list(range(d - 1, d - 1 + n))
    return [[*ridge, ring[i], ring[(i + 1) % n]] for i in range(n)]


def chain(d, n):
    """n simplices in a row, consecutive labels: simplex i is i, i+1, ..., i+d."""
    return [list(range(i, i + d + 1)) for i in range(n)]


def kuhn_grid(shape, periodic=False):
    """Every cube of a grid cut into path simplices (Freudenthal 1942, Kuhn 1960); periodic: sides >= 3."""
    d = len(shape)
    assert not periodic or min(shape) >= 3
    sides = list(shape) if periodic else [n + 1 for n in shape]

    def label(point):
        number = 0
        for x, n in zip(point, sides, strict=True):
            number = number * n + (x % n if periodic else x)
        return number

    facets = []
    for corner in product(*(range(n) for n in shape)):
        for order in permutations(range(d)):
            point, facet = list(corner), [label(corner)]
            for axis in order:
                point[axis] += 1
                facet.append(label(point))
            facets.append(facet)
    return facets


def slab(facets):
    """Staircase product with an interval (Eilenberg, Steenrod, Foundations of Algebraic Topology, 1952).

    The bottom copy of label x is 2x, the top copy 2x + 1.
    """
    prisms = []
    for labels in map(sorted, facets):
        for k in range(len(labels)):
            prisms.append([2 * x for x in labels[: k + 1]] + [2 * x + 1 for x in labels[k:]])
    return prisms


def suspension(facets):
    top = max(max(f) for f in facets) + 1
    return [[*f, apex] for f in facets for apex in (top, top + 1)]


def cone(facets):
    top = max(max(f) for f in facets) + 1
    return [[*f, top] for f in facets]


def disjoint(*lists):
    """Several complexes side by side."""
    out, shift = [], 0
    for facets in lists:
        low, high = min(map(min, facets)), max(map(max, facets))
        out += [[x - low + shift for x in f] for f in facets]
        shift += high - low + 1
    return out


def moebius_band():
    """Five triangles, boundary of five edges (common practice): i, i+1, i+2 mod 5."""
    return [[i, (i + 1) % 5, (i + 2) % 5] for i in range(5)]


def projective_plane():
    """Six vertices, ten triangles (from memory: the half icosahedron)."""
    ring = [[0, i + 1, (i + 1) % 5 + 1] for i in range(5)]
    return ring + [[i + 1, (i + 1) % 5 + 1, (i + 3) % 5 + 1] for i in range(5)]


def twisted_solid_torus(d, n):
    """i, ..., i+d mod n (W. Kuehnel, Results Math. 9 (1986) 95-106): a ball bundle over the circle."""
    return [[(i + x) % n for x in range(d + 1)] for i in range(n)]


# --------------------------------------------------------------------------------------------------
# Builders of gluing tables


def melon(d, shared=None):
    """Two simplices glued along `shared` facets by the identity; by default one facet of each is left."""
    shared = d if shared is None else shared
    identity = list(range(d + 1))
    return table_from_pairs(
        [[[other, identity] if i < shared else None for i in range(d + 1)] for other in (1, 0)]
    )


def kuhn_torus(shape):
    """The periodic grid of path simplices as a gluing table: any sides, 1 and 2 included."""
    d = len(shape)
    cells = list(product(*(range(n) for n in shape)))
    orders = list(permutations(range(d)))
    number = {key: x for x, key in enumerate(product(cells, orders))}

    def moved(cell, axis, by):
        return tuple(
            (x + by) % n if a == axis else x for a, (x, n) in enumerate(zip(cell, shape, strict=True))
        )

    down, up = (d, *range(d)), (*range(1, d + 1), 0)  # corner c goes to c - 1, to c + 1
    rows = []
    for cell, order in number:
        row = [[number[moved(cell, order[0], 1), (*order[1:], order[0])], down]]
        for i in range(1, d):
            swapped = list(order)
            swapped[i - 1], swapped[i] = swapped[i], swapped[i - 1]
            row.append([number[cell, tuple(swapped)], tuple(range(d + 1))])
        row.append([number[moved(cell, order[-1], -1), (order[-1], *order[:-1])], up])
        rows.append(row)
    return table_from_pairs(rows)


def one_simplex(d, i, j, p):
    """One simplex whose slots i and j are glued by p (p[i] = j)."""
    assert p[i] == j
    inverse = [p.index(c) for c in range(d + 1)]
    return table_from_pairs([[[0, p] if c == i else [0, inverse] if c == j else None for c in range(d + 1)]])


def unlabelled(table):
    """The same gluings without labels."""
    return Table(table.across, table.carry, table.written)


def scrambled(table, seed):
    """The same complex with simplices reordered, corners renumbered and `written` signs drawn anew."""
    rng = random.Random(seed)
    n, k = len(table.across), table.dimension + 1
    place = rng.sample(range(n), n)  # new number of every simplex
    turn = [rng.sample(range(k), k) for _ in range(n)]  # new number of every corner
    across = [[-1] * k for _ in range(n)]
    carry = [[None] * k for _ in range(n)]
    corners = None if table.corners is None else [[None] * k for _ in range(n)]
    for s in range(n):
        for i in range(k):
            t = table.across[s][i]
            if corners is not None:
                corners[place[s]][turn[s][i]] = table.corners[s][i]
            if t >= 0:
                image = [None] * k
                for c in range(k):
                    image[turn[s][c]] = turn[t][table.carry[s][i][c]]
                across[place[s]][turn[s][i]] = place[t]
                carry[place[s]][turn[s][i]] = tuple(image)
    return Table(across, carry, [rng.choice((1, -1)) for _ in range(n)], corners)


def random_table(rng, d, n, boundary=0.2, order_keeping=False):
    """n simplices, facets paired and carried at random; each pair stays open with probability `boundary`."""
    k = d + 1
    halves = [(s, i) for s in range(n) for i in range(k)]
    rng.shuffle(halves)
    rows = [[None] * k for _ in range(n)]
    for (s, i), (t, j) in zip(halves[::2], halves[1::2], strict=False):
        if rng.random() < boundary:
            continue
        others = [c for c in range(k) if c != j]
        if not order_keeping:
            rng.shuffle(others)
        image = [*others[:i], j, *others[i:]]
        rows[s][i] = [t, tuple(image)]
        rows[t][j] = [s, tuple(image.index(c) for c in range(k))]
    return table_from_pairs(rows)


# --------------------------------------------------------------------------------------------------
# Any order, any names


def shuffled(facets, seed, rename=True):
    """The same complex: another order of simplices and of labels within them, other (64-bit) labels."""
    rng = random.Random(seed)
    labels = sorted({x for f in facets for x in f})
    names = dict(zip(labels, labels, strict=True))
    if rename:
        spread, new = rng.choice((len(labels), 10**6, 2**63)), set()
        while len(new) < len(labels):
            new.add(rng.randrange(-spread, spread))
        names = dict(zip(labels, rng.sample(sorted(new), len(labels)), strict=True))
    out = [rng.sample([names[x] for x in f], len(f)) for f in facets]
    rng.shuffle(out)
    return out


# --------------------------------------------------------------------------------------------------
# The cabinet

LABELLED = {
    **{f"{d}d-simplex": simplex(d) for d in (2, 3, 4)},
    **{f"{d}d-sphere": sphere(d) for d in (2, 3, 4)},
    **{f"{d}d-side-{k}": move_side(d, k) for d in (2, 3, 4) for k in range(2, d + 2)},
    **{f"{d}d-around-{n}": around_ridge(d, n) for d in (2, 3, 4) for n in (3, 4, 7)},
    **{f"{d}d-chain-5": chain(d, 5) for d in (2, 3, 4)},
    "2d-cube": kuhn_grid((1, 1)),
    "3d-cube": kuhn_grid((1, 1, 1)),
    "4d-cube": kuhn_grid((1, 1, 1, 1)),
    "2d-grid": kuhn_grid((3, 2)),
    "3d-grid": kuhn_grid((2, 1, 2)),
    "4d-grid": kuhn_grid((2, 1, 1, 1)),
    "2d-torus": kuhn_grid((3, 4), periodic=True),
    "3d-torus": kuhn_grid((3, 3, 3), periodic=True),
    "2d-slab": slab([[0, 1], [1, 2], [2, 3], [0, 3]]),
    "3d-slab": slab(sphere(2)),
    "4d-slab": slab(sphere(3)),
    "moebius-band": moebius_band(),
    "projective-plane": projective_plane(),
    "3d-cone-on-projective-plane": cone(projective_plane()),
    "3d-suspended-projective-plane": suspension(projective_plane()),
    "4d-twice-suspended-projective-plane": suspension(suspension(projective_plane())),
    "3d-moebius-slab": slab(moebius_band()),
    "4d-moebius-slab": slab(slab(moebius_band())),
    "3d-ball-bundle-7": twisted_solid_torus(3, 7),
    "4d-ball-bundle-9": twisted_solid_torus(4, 9),
    "4d-ball-bundle-10": twisted_solid_torus(4, 10),
    "2d-mixed": disjoint(sphere(2), moebius_band(), simplex(2), projective_plane()),
    "3d-mixed": disjoint(sphere(3), twisted_solid_torus(3, 7), suspension(projective_plane()), simplex(3)),
    "4d-mixed": disjoint(twisted_solid_torus(4, 9), sphere(4), simplex(4), around_ridge(4, 4)),
    "3d-at-one-vertex": [[0, 1, 2, 3], [3, 4, 5, 6]],
    "4d-at-one-segment": [[0, 1, 2, 3, 4], [3, 4, 5, 6, 7]],
}

GLUED = {
    **{name: table_from_pairs(rows) for name, rows in SMALL_GLUINGS.items()},
    **{f"{d}d-melon-{m}": melon(d, m) for d in (2, 3, 4) for m in range(1, d + 2)},
    **{
        "kuhn-torus-" + "x".join(map(str, shape)): kuhn_torus(shape)
        for shape in [(1, 1), (2, 1), (3, 2), (1, 1, 1), (2, 1, 1), (2, 2, 2), (1, 1, 1, 1), (2, 1, 1, 1)]
    },
    "2d-folded-triangle": one_simplex(2, 0, 1, (1, 0, 2)),
    "2d-moebius-triangle": one_simplex(2, 0, 1, (1, 2, 0)),
    "3d-snapped-tetrahedron": one_simplex(3, 0, 1, (1, 0, 2, 3)),
    "3d-twisted-tetrahedron": one_simplex(3, 0, 3, (3, 0, 1, 2)),
    "4d-twisted-simplex": one_simplex(4, 0, 4, (4, 0, 1, 2, 3)),
    "4d-snapped-simplex": one_simplex(4, 1, 3, (0, 3, 2, 1, 4)),
}

SINGULAR = {
    "2d-pinched-vertex": ([[0, 1, 2], [2, 3, 4]], "pinched ridge"),
    "3d-pinched-edge": ([[0, 1, 2, 3], [0, 1, 4, 5]], "pinched ridge"),
    "4d-pinched-triangle": ([[0, 1, 2, 3, 4], [0, 1, 2, 5, 6]], "pinched ridge"),
    "3d-ring-and-chain": ([*around_ridge(3, 3), [0, 1, 10, 11]], "pinched ridge"),
    "3d-two-rings": ([*around_ridge(3, 3), [0, 1, 10, 11], [0, 1, 11, 12], [0, 1, 12, 10]], "pinched ridge"),
    "4d-two-rings": (
        [*around_ridge(4, 4), [0, 1, 2, 10, 11], [0, 1, 2, 11, 12], [0, 1, 2, 12, 10]],
        "pinched ridge",
    ),
    "2d-twins": ([[0, 1, 2], [2, 1, 0]], "twins"),
    "3d-twins": ([[0, 1, 2, 3], [1, 0, 2, 3]], "twins"),
    "4d-twins": ([[0, 1, 2, 3, 4], [0, 1, 2, 3, 4]], "twins"),
    "3d-twins-and-more": ([[0, 1, 2, 3], [3, 2, 1, 0], [4, 5, 6, 7], [0, 1, 4, 5]], "twins"),
}

REFUSED = {
    "2d-three-on-an-edge": ([[0, 1, 2], [0, 1, 3], [0, 1, 4]], "overfull facet"),
    "3d-three-on-a-triangle": ([[0, 1, 2, 3], [0, 1, 2, 4], [5, 2, 1, 0]], "overfull facet"),
    "4d-four-on-a-facet": ([[0, 1, 2, 3, x] for x in (4, 5, 6, 7)], "overfull facet"),
    "3d-three-alike": ([[0, 1, 2, 3]] * 3, "overfull facet"),
    "3d-repeated-label": ([[0, 1, 2, 3], [1, 2, 2, 3]], "repeated label"),
    "4d-repeated-label": ([[7, 1, 2, 3, 7]], "repeated label"),
}

# Tables with a holonomy, refused unless singular complexes are kept.
HOLONOMY = {
    # the edge 01 is glued to itself reversed
    "3d-reversed-edge": one_simplex(3, 2, 3, (1, 0, 3, 2)),
    # the triangle 012 is turned by a third
    "4d-turned-triangle": one_simplex(4, 3, 4, (1, 2, 0, 4, 3)),
    # the triangle 012 is reflected
    "4d-reflected-triangle": one_simplex(4, 3, 4, (1, 0, 2, 4, 3)),
}

# --------------------------------------------------------------------------------------------------
# Strategies

dimensions = st.sampled_from((2, 3, 4))
seeds = st.integers(0, 2**32 - 1)


def delaunay_facets(d, points, seed):
    """Delaunay triangulation of random points of a cube (scipy)."""
    import numpy as np
    from scipy.spatial import Delaunay

    return Delaunay(np.random.default_rng(seed).random((points, d))).simplices.tolist()


@st.composite
def delaunay(draw, d=None):
    d = draw(dimensions) if d is None else d
    points = draw(st.integers(d + 2, {2: 40, 3: 24, 4: 14}[d]))
    return delaunay_facets(d, points, draw(seeds))


@st.composite
def subcomplexes(draw, d=None):
    """Some of the simplices of a Delaunay triangulation: often pinched, often in several components."""
    facets = draw(delaunay(d))
    rng = random.Random(draw(seeds))
    return rng.sample(facets, rng.randint(1, len(facets)))


@st.composite
def reordered(draw, facets):
    """`facets` (a strategy) under a random order and random names."""
    return shuffled(draw(facets), draw(seeds))


@st.composite
def tables(draw, d=None, largest=6):
    """Random gluing tables, most of them with a holonomy somewhere."""
    d = draw(dimensions) if d is None else d
    rng = random.Random(draw(seeds))
    n = draw(st.integers(1, largest))
    return random_table(rng, d, n, draw(st.sampled_from((0.0, 0.2, 0.6))), draw(st.booleans()))


@st.composite
def scrambled_tables(draw):
    """A gluing of the cabinet, simplices reordered and corners renumbered: no holonomy, rarely ordered."""
    return scrambled(GLUED[draw(st.sampled_from(sorted(GLUED)))], draw(seeds))
