"""Random triangulations; the same seed gives the same one."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from ..errors import InputError, LimitError, TriangulationError
from ..kernels.permutations import permutations_of
from ..triangulation import Coordinates, Triangulation
from .parts import at_least, check_dimension, check_room, table

__all__ = [
    "coloured_graph",
    "delaunay",
    "melonic_graph",
    "random_delaunay",
    "random_gluing",
    "stacked_ball",
    "stacked_sphere",
]

# A simplex flatter than this, relative to the cube of its longest edge, is taken for flat.
FLAT = 1e-12


# -- Delaunay --------------------------------------------------------------------------------------


def random_delaunay(number: int = 100, dimension: int = 3, seed: int = 0) -> Triangulation:
    """The Delaunay triangulation of so many random points of the unit cube.

    Parameters
    ----------
    number : int
        At least D + 1.
    dimension : int
        D = 2, 3 or 4.
    seed : int
    """
    check_dimension(dimension)
    at_least("number", number, dimension + 1)
    at_least("seed", seed, 0)
    return delaunay(np.random.default_rng(seed).random((number, dimension)))


def delaunay(points: np.ndarray | Sequence[Sequence[float]]) -> Triangulation:
    """The Delaunay triangulation of given points of the plane, of R3 or of R4: a ball, their convex hull.

    Parameters
    ----------
    points : array_like of float, shape (P, D)

    Returns
    -------
    Triangulation
        Label p is row p of `points`, which are its coordinates; simplices are positive as they are written.

    Raises
    ------
    InputError
        If points coincide, do not span the space, or lie so that the triangulation has flat simplices.

    Notes
    -----
    By scipy (Qhull).
    """
    from scipy.spatial import Delaunay, QhullError

    where = np.asarray(points, dtype=np.float64)
    if where.ndim != 2 or where.shape[1] not in (2, 3, 4):
        raise InputError(
            f"the points have the shape {where.shape}, not (points, axes)", hint="give 2 to 4 numbers a point"
        )
    if (wrong := ~np.isfinite(where).all(axis=1)).any():
        raise InputError("a point is not finite", f"point {np.flatnonzero(wrong)[0]}", "give finite numbers")
    d = where.shape[1]
    if len(where) <= d:
        raise InputError(
            f"{len(where)} points span no simplex of dimension {d}", hint=f"give at least {d + 1}"
        )
    try:
        made = Delaunay(where)
    except QhullError as error:
        raise InputError(
            "the points have no Delaunay triangulation: " + str(error).strip().splitlines()[0],
            hint="they must not lie in one plane; shift them a little at random",
        ) from None
    if len(made.coplanar):
        p, _, nearest = made.coplanar[0].tolist()
        raise InputError(
            f"point {p} is left out: it is too near to point {nearest}",
            f"{len(made.coplanar)} such points",
            "remove points that coincide, or shift them a little at random",
        )
    facets = made.simplices.astype(np.int64)
    edges = where[facets[:, 1:]] - where[facets[:, :1]]
    volume = np.linalg.det(edges)
    flat = np.abs(volume) <= FLAT * np.abs(edges).max(axis=(1, 2)) ** d
    if flat.any():
        s = int(np.flatnonzero(flat)[0])
        raise InputError(
            f"the triangulation has {int(flat.sum())} flat simplices",
            f"points {' '.join(map(str, facets[s].tolist()))}",
            "many points lie on one sphere there: shift them a little at random",
        )
    negative = volume < 0
    facets[negative, :2] = facets[negative, 1::-1]
    return Triangulation.from_facets(facets, coordinates=Coordinates(point=where))


# -- stacked balls and spheres ---------------------------------------------------------------------


def stacked_ball(simplices: int = 10, dimension: int = 4, seed: int = 0) -> Triangulation:
    """A ball of so many simplices, each new one glued onto a random facet of the boundary by one of its own.

    Parameters
    ----------
    simplices : int
        At least 1.
    dimension : int
        D = 2, 3 or 4.
    seed : int

    Returns
    -------
    Triangulation
        A labelled ball; all its corners are on the boundary, and its dual graph is a tree.
    """
    check_dimension(dimension)
    at_least("simplices", simplices, 1)
    at_least("seed", seed, 0)
    check_room(simplices, dimension)
    rng = np.random.default_rng(seed)
    k = dimension + 1
    facets = np.empty((simplices, k), dtype=np.int64)
    facets[0] = np.arange(k)
    # open facets as (simplex, slot); the new simplex takes one away and leaves D new ones
    open_: list[tuple[int, int]] = [(0, i) for i in range(k)]
    for s in range(1, simplices):
        pick = int(rng.integers(len(open_)))
        base, slot = open_[pick]
        facets[s] = facets[base]
        facets[s, slot] = dimension + s
        open_[pick] = open_[-1]
        open_.pop()
        open_ += [(s, i) for i in range(k) if i != slot]
    return Triangulation.from_facets(facets)


def stacked_sphere(vertices: int = 10, dimension: int = 4, seed: int = 0) -> Triangulation:
    """A sphere with so many corners: the boundary of a simplex, random simplices of it cut into D + 1.

    Parameters
    ----------
    vertices : int
        n, at least D + 2.
    dimension : int
        D = 2, 3 or 4.
    seed : int

    Returns
    -------
    Triangulation
        A labelled sphere of ``D n - (D - 1)(D + 2)`` simplices, the fewest that n corners allow.

    References
    ----------
    D. W. Walkup, The lower bound conjecture for 3- and 4-manifolds, Acta Math. 125 (1970) 75-107 (from
    memory).
    """
    check_dimension(dimension)
    d, k = dimension, dimension + 1
    at_least("vertices", vertices, d + 2)
    at_least("seed", seed, 0)
    total = d * vertices - (d - 1) * (d + 2)
    check_room(total, d)
    rng = np.random.default_rng(seed)
    facets = np.empty((total, k), dtype=np.int64)
    facets[: d + 2] = [[c for c in range(d + 2) if c != gone] for gone in range(d + 2)]
    count = d + 2
    for new in range(d + 2, vertices):
        s = int(rng.integers(count))
        old = facets[s].copy()
        facets[s, 0] = new
        facets[count : count + d] = old
        facets[count : count + d][np.arange(d), np.arange(1, k)] = new
        count += d
    return Triangulation.from_facets(facets)


# -- coloured graphs -------------------------------------------------------------------------------


def coloured_graph(
    vertices: int = 10, dimension: int = 4, bipartite: bool = True, seed: int = 0
) -> Triangulation:
    """A random connected edge-coloured graph with D + 1 colours, as a gluing table.

    Vertices are simplices, and an edge of colour c glues the facets opposite their corners c, corner on
    corner.

    Parameters
    ----------
    vertices : int
        An even number, at least 2.
    dimension : int
        D = 2, 3 or 4.
    bipartite : bool
        Whether edges join the even vertices with the odd ones only, which makes it orientable.
    seed : int

    Returns
    -------
    Triangulation
        Closed, connected, no ridge with a holonomy; for D > 2 hardly ever a manifold.

    References
    ----------
    R. Gurau, The complete 1/N expansion of colored tensor models in arbitrary dimension, Ann. Henri Poincare
    13 (2012) 399-423 (from memory).
    """
    check_dimension(dimension)
    _even(vertices)
    at_least("seed", seed, 0)
    check_room(vertices, dimension)
    rng = np.random.default_rng(seed)

    def draw() -> np.ndarray:
        across = np.empty((vertices, dimension + 1), dtype=np.int64)
        for colour in range(dimension + 1):
            if bipartite:
                one, two = np.arange(0, vertices, 2), 1 + 2 * rng.permutation(vertices // 2)
            else:
                one, two = rng.permutation(vertices).reshape(2, -1)
            across[one, colour], across[two, colour] = two, one
        return across

    # three random matchings already join all vertices with a probability that tends to one
    across = draw()
    while not _connected(across):
        across = draw()
    return _coloured(across)


def melonic_graph(vertices: int = 10, dimension: int = 4, seed: int = 0) -> Triangulation:
    """A random melonic graph with D + 1 colours, as a gluing table: a sphere.

    Begins with two vertices and all D + 1 edges between them; step by step two more are put on a random edge,
    with D edges between them.

    Parameters
    ----------
    vertices : int
        An even number p, at least 2.
    dimension : int
        D = 2, 3 or 4.
    seed : int

    Returns
    -------
    Triangulation
        Even and odd vertices are the two kinds.  D (D - 1) p / 4 + D faces.

    References
    ----------
    V. Bonzom, R. Gurau, A. Riello, V. Rivasseau, Critical behavior of colored tensor models in the large N
    limit, Nucl. Phys. B 853 (2011) 174-195 (from memory).
    """
    check_dimension(dimension)
    _even(vertices)
    at_least("seed", seed, 0)
    check_room(vertices, dimension)
    rng = np.random.default_rng(seed)
    across = np.empty((vertices, dimension + 1), dtype=np.int64)
    across[0], across[1] = 1, 0
    for new in range(2, vertices, 2):
        even, colour = 2 * int(rng.integers(new // 2)), int(rng.integers(dimension + 1))
        odd = int(across[even, colour])
        across[new], across[new + 1] = new + 1, new
        across[even, colour], across[new + 1, colour] = new + 1, even
        across[odd, colour], across[new, colour] = new, odd
    return _coloured(across)


def _even(vertices: int) -> None:
    at_least("vertices", vertices, 2)
    if vertices % 2:
        raise InputError(
            f"vertices is {vertices}", hint="edges of one colour pair all vertices: give an even number"
        )


def _coloured(across: np.ndarray) -> Triangulation:
    n, k = across.shape
    return table(across, np.broadcast_to(np.arange(k), (n, k, k)))


def _connected(across: np.ndarray) -> bool:
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import connected_components

    n, k = across.shape
    rows, columns = np.repeat(np.arange(n), k), across.ravel()
    inner = columns >= 0
    graph = coo_array((np.ones(int(inner.sum())), (rows[inner], columns[inner])), shape=(n, n))
    return bool(connected_components(graph, directed=False)[0] == 1)


# -- gluings ---------------------------------------------------------------------------------------


def random_gluing(
    simplices: int = 2,
    dimension: int = 3,
    *,
    free: int = 0,
    ordered: bool = False,
    orientable: bool = False,
    seed: int = 0,
    tries: int = 10_000,
) -> Triangulation:
    """Simplices whose facets are paired at random and carried to each other by random permutations.

    Parameters
    ----------
    simplices : int
        At least 1.
    dimension : int
        D = 2, 3 or 4.
    free : int
        How many facets stay in the boundary; ``simplices * (D + 1) - free`` must be even.
    ordered : bool
        Let every gluing keep the order of the corners; no ridge then has a holonomy.
    orientable : bool
        Let every gluing reverse orientation; not together with `ordered`.
    seed : int
    tries : int
        How often to draw until the result is connected and has a dual.

    Returns
    -------
    Triangulation
        Connected; every ridge regular, so that `dualize.build` takes it.  Nothing is promised about its
        vertices and segments: it is hardly ever a manifold from D = 3 on.

    Raises
    ------
    InputError
        If the numbers do not fit together.
    LimitError
        If no draw is good: unordered gluings of many simplices have a holonomy somewhere almost surely.
    """
    from ..build import build

    check_dimension(dimension)
    at_least("simplices", simplices, 1)
    k = dimension + 1
    at_least("free", free, 0, simplices * k)
    at_least("seed", seed, 0)
    at_least("tries", tries, 1)
    if (simplices * k - free) % 2:
        raise InputError(
            f"{simplices * k - free} facets cannot be paired",
            hint="let one facet more stay free, or one less",
        )
    if ordered and orientable:
        raise InputError(
            "ordered and orientable gluings cannot be asked for together", hint="choose one of the two"
        )
    check_room(simplices, dimension)
    rng = np.random.default_rng(seed)
    for _ in range(tries):
        drawn = _draw_gluing(rng, simplices, k, free, ordered, orientable)
        if not _connected(drawn.across):
            continue
        try:
            build(drawn)
        except TriangulationError:
            continue
        return drawn
    raise LimitError(
        f"{tries} draws gave no connected gluing of {simplices} simplices without a holonomy",
        hint="allow more tries, fewer simplices, more free facets, or ordered gluings",
    )


def _draw_gluing(
    rng: np.random.Generator, n: int, k: int, free: int, ordered: bool, orientable: bool
) -> Triangulation:
    tables = permutations_of(k - 1)
    halves = rng.permutation(n * k)[free:].reshape(2, -1)
    (s, t), (i, j) = halves // k, halves % k
    rank = tables.keeping[i, j]
    if not ordered:
        # slot i goes to slot j, the shared corners anywhere
        rows = np.arange(len(i))[:, None]
        others = np.array([[c for c in range(k) if c != x] for x in range(k)])
        image = np.empty((len(i), k), dtype=np.int64)
        image[rows, others[i]] = rng.permuted(others[j], axis=1)
        image[rows[:, 0], i] = j
        if orientable:
            even = np.flatnonzero(tables.sign[tables.rank(image)] > 0)[:, None]
            image[even, others[i[even[:, 0]]][:, :2]] = image[even, others[i[even[:, 0]]][:, 1::-1]]
        rank = tables.rank(image)
    across, ranks = np.full((n, k), -1, dtype=np.int32), np.zeros((n, k), dtype=np.uint8)
    across[s, i], across[t, j] = t, s
    ranks[s, i], ranks[t, j] = rank, tables.inverse[rank]
    return Triangulation(across=across, rank=ranks, written=np.ones(n, dtype=np.int8))
