"""What coloured tensor models ask of a coloured graph: sub-graphs, jackets and degree, melons.

All of it is read from the graph alone (`across` as D + 1 pairings of the vertices), not from the dual
two-complex, so that the two can be compared.

References, from memory: R. Gurau, The complete 1/N expansion of colored tensor models in arbitrary
dimension, Ann. Henri Poincaré 13 (2012) 399-423 (jackets, degree, number of faces); V. Bonzom, R. Gurau, A.
Riello, V. Rivasseau, Critical behavior of colored tensor models in the large N limit, Nucl. Phys. B 853
(2011) 174-195 (melons).
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations, permutations
from typing import NamedTuple

import numpy as np

from ..errors import InputError
from ..triangulation import Triangulation

__all__ = [
    "Jacket",
    "bipartite",
    "colour_components",
    "degree",
    "faces_by_degree",
    "jackets",
    "melon_removals",
    "sub_graph_counts",
]


class Jacket(NamedTuple):
    """A ribbon graph that runs through the colours in a cycle: a surface in the triangulation.

    Attributes
    ----------
    cycle : tuple of int
        The colours in cyclic order, from 0, the second one smaller than the last.
    euler : int
        Its Euler characteristic, vertices - edges + faces, all components together.
    genus : float
        Components minus half of `euler`: the sum of the genera of its components where the graph is
        bipartite, half the number of cross-caps of those that are not.
    """

    cycle: tuple[int, ...]
    euler: int
    genus: float


def colour_components(triangulation: Triangulation, colours: Sequence[int]) -> np.ndarray:
    """The connected sub-graph of edges of these colours in which each vertex lies.

    Returns
    -------
    ndarray of int64, shape (N,)
        Sub-graphs are numbered by their smallest vertex.

    Raises
    ------
    InputError
        If a gluing does not keep colours, or there is no such colour.
    """
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import connected_components

    across = _graph(triangulation)
    n, k = across.shape
    if any(not 0 <= c < k for c in colours):
        raise InputError(f"the colours are 0 to {k - 1}", ", ".join(map(str, colours)))
    here = np.repeat(np.arange(n), len(colours))
    there = across[:, list(colours)].ravel()
    glued = there > here
    ones = np.ones(int(glued.sum()), dtype=np.int8)
    graph = coo_array((ones, (here[glued], there[glued])), shape=(n, n))
    label = connected_components(graph, directed=False)[1].astype(np.int64)
    _, first, label = np.unique(label, return_index=True, return_inverse=True)
    return np.argsort(np.argsort(first))[label]


def sub_graph_counts(triangulation: Triangulation) -> dict[tuple[int, ...], int]:
    """The number of connected sub-graphs of every set of colours, the smaller sets first.

    Of no colours these are the vertices, of one the facets, of two the ridges, of all the components.

    Examples
    --------
    >>> from dualize.coloured import from_coloured_edges
    >>> t = from_coloured_edges(2, [[0, 1, c] for c in range(3)])
    >>> sub_graph_counts(t)
    {(): 2, (0,): 1, (1,): 1, (2,): 1, (0, 1): 1, (0, 2): 1, (1, 2): 1, (0, 1, 2): 1}
    """
    k = triangulation.dimension + 1
    sets = [c for m in range(k + 1) for c in combinations(range(k), m)]
    return {c: int(colour_components(triangulation, c).max()) + 1 for c in sets}


def bipartite(triangulation: Triangulation) -> list[bool]:
    """Whether each component of the graph is bipartite, by its double cover.

    The double cover has two copies of every vertex and joins each to the other copy of its neighbours; it
    falls into two parts over a component exactly when that is bipartite.
    """
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import connected_components

    across = _graph(triangulation)
    n = len(across)
    component = colour_components(triangulation, range(across.shape[1]))
    here, colour = np.nonzero(across >= 0)
    there = across[here, colour]
    cover = coo_array((np.ones(len(here), dtype=np.int8), (here, n + there)), shape=(2 * n, 2 * n))
    sheet = connected_components(cover, directed=False)[1]
    _, first = np.unique(component, return_index=True)
    return [bool(sheet[v] != sheet[n + v]) for v in first.tolist()]


def jackets(triangulation: Triangulation) -> list[Jacket]:
    """The D!/2 jackets of a closed coloured graph, with their genera.

    Raises
    ------
    InputError
        If the graph has a boundary, or a gluing does not keep colours.

    Examples
    --------
    >>> from dualize.coloured import from_coloured_edges
    >>> t = from_coloured_edges(2, [[0, 1, c] for c in range(4)])
    >>> jackets(t)[0]
    Jacket(cycle=(0, 1, 2, 3), euler=2, genus=0.0)
    """
    n, k = _closed(triangulation).shape
    faces = {c: int(colour_components(triangulation, c).max()) + 1 for c in combinations(range(k), 2)}
    parts = int(colour_components(triangulation, range(k)).max()) + 1
    out = []
    for rest in permutations(range(1, k)):
        if rest[0] > rest[-1]:
            continue  # the same cycle backwards
        cycle = (0, *rest)
        rings = sum(faces[min(a, b), max(a, b)] for a, b in zip(cycle, (*rest, 0), strict=True))
        chi = n - n * k // 2 + rings
        out.append(Jacket(cycle, chi, parts - chi / 2))
    return out


def degree(triangulation: Triangulation) -> float:
    """The degree of a closed coloured graph: the sum of the genera of its jackets.

    An integer where the graph is bipartite; from D = 3 on zero exactly when all components are melonic.
    """
    return sum(jacket.genus for jacket in jackets(triangulation))


def faces_by_degree(dimension: int, vertices: int, components: int, degree: float) -> float:
    """The number of faces of a closed coloured graph by its degree.

    ``F = D (D - 1) / 4 p + D c - 2 degree / (D - 1)!`` for `p` vertices in `c` components (Gurau 2012).

    Examples
    --------
    The melonic graphs in dimension 4 have 3 p + 4 faces:

    >>> faces_by_degree(4, 10, 1, 0)
    34.0
    """
    d = dimension
    factorial = int(np.prod(range(1, d)))
    return d * (d - 1) / 4 * vertices + d * components - 2 * degree / factorial


def melon_removals(triangulation: Triangulation) -> list[tuple[int, int, int]] | None:
    """The certificate that a closed coloured graph is melonic: melons to remove one after the other.

    A melon is a pair of vertices joined by D edges; it is removed and the two edges of the last colour at its
    ends are joined.  A graph is melonic when this ends with two vertices joined by D + 1 edges, in every
    component.

    Returns
    -------
    list of (int, int, int), or None
        The two vertices of each melon and the colour of the edge it sits on, in the order of removal; colour
        -1 for the last pair of a component.  None when the graph is not melonic: removals never get in each
        other's way, so any order ends at the same.

    Raises
    ------
    InputError
        If the graph has a boundary, or a gluing does not keep colours.

    Notes
    -----
    Takes time in proportion to the number of vertices.

    Examples
    --------
    >>> from dualize.coloured import from_coloured_edges
    >>> chain = [[0, 1, 0], [0, 1, 1], [1, 2, 2], [2, 3, 0], [2, 3, 1], [0, 3, 2]]
    >>> melon_removals(from_coloured_edges(4, chain))
    [(0, 1, 2), (2, 3, -1)]
    """
    rows: list[list[int] | None] = _closed(triangulation).tolist()
    k = triangulation.dimension + 1
    removals = []
    waiting = list(range(len(rows)))[::-1]
    while waiting:
        v = waiting.pop()
        row = rows[v]
        if row is None:
            continue
        w = row[0] if row[0] in row[1:] else row[1]  # a melon's partner is there at least D times, so here
        other = rows[w]
        assert other is not None
        apart = [c for c in range(k) if row[c] != w]
        if len(apart) > 1:
            continue
        rows[v] = rows[w] = None
        v, w = sorted((v, w))
        if not apart:
            removals.append((v, w, -1))
            continue
        c = apart[0]
        a, b = row[c], other[c]
        end, far = rows[a], rows[b]
        assert end is not None and far is not None
        end[c], far[c] = b, a
        removals.append((v, w, c))
        waiting += [b, a]
    return removals if all(row is None for row in rows) else None


def _graph(t: Triangulation) -> np.ndarray:
    """The vertices behind the edges of each colour, int64, shape (N, D + 1); -1 where there is none."""
    if not t.keeps_colours:
        raise InputError("this is no coloured graph: a gluing does not keep the colours of the corners")
    return t.across.astype(np.int64)


def _closed(t: Triangulation) -> np.ndarray:
    across = _graph(t)
    if (across < 0).any():
        v, c = np.argwhere(across < 0)[0].tolist()
        raise InputError(
            "the graph has a boundary, and this is defined for closed graphs",
            f"vertex {v} has no edge of colour {c}",
        )
    return across
