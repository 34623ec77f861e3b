"""What a triangulation is, measured without this package's own topology: counts, homology (gudhi), links."""

from collections import Counter
from itertools import combinations

import gudhi
import numpy as np

import dualize

# A prime that divides no torsion met here, for the free part of the homology (large ones cost gudhi long).
LARGE_PRIME = 1009


def f_vector(t):
    """Numbers of simplices by dimension; for a gluing table from the classes that `build` counts."""
    if t.corners is not None:
        return f_of_facets(t.corners)
    s = dualize.build(t, points=True)
    counts = [int(s["vertices/point"].max()) + 1]
    if t.dimension > 2:
        counts.append(int(s["vertices/segment"].max()) + 1)
    if t.dimension > 3:
        counts.append(s.counts["faces_internal"] + s.counts["faces_external"])
    counts.append(s.counts["edges_internal"] + s.counts["edges_external"])
    return (*counts, len(t))


def f_of_facets(facets):
    facets = np.sort(np.asarray(facets), axis=1)
    k = facets.shape[1]
    return tuple(
        len(np.unique(np.vstack([facets[:, list(c)] for c in combinations(range(k), size)]), axis=0))
        for size in range(1, k + 1)
    )


def euler(t):
    return sum((-1) ** i * n for i, n in enumerate(f_vector(t)))


def betti(facets, prime=LARGE_PRIME):
    """Betti numbers over the field of `prime` elements, by gudhi."""
    tree = gudhi.SimplexTree()
    facets = np.asarray(facets)
    tree.insert_batch(facets.T.astype(np.int32), np.zeros(len(facets)))
    tree.compute_persistence(homology_coeff_field=prime, persistence_dim_max=True)
    numbers = tree.betti_numbers()
    return tuple(numbers + [0] * (facets.shape[1] - len(numbers)))


def boundary_facets(t):
    rows = [np.delete(t.corners[s], i) for s, i in np.argwhere(t.across < 0).tolist()]
    return np.array(rows)


def vertex_links(facets):
    """{label: facets of its link}"""
    links = {}
    for row in np.asarray(facets).tolist():
        for label in row:
            links.setdefault(label, []).append([x for x in row if x != label])
    return links


def is_sphere_like(facets):
    """Closed, with the Betti numbers of a sphere mod 2 and 3, and so at every vertex link."""
    facets = np.asarray(facets)
    d = facets.shape[1] - 1
    ridges = Counter(tuple(sorted(c)) for row in facets.tolist() for c in combinations(row, d))
    if set(ridges.values()) != {2}:
        return False
    if d <= 2:  # closed, every vertex in one ring, connected: the Euler characteristic decides
        f = f_of_facets(facets)
        return f[0] - f[1] + (f[2] if d == 2 else 0) == (2 if d == 2 else 0) and betti(facets, 2)[0] == 1
    spherical = betti(facets, 2) == betti(facets, 3) == (1, *[0] * (d - 1), 1)
    return spherical and all(map(is_sphere_like, vertex_links(facets).values()))


def is_closed_manifold(t):
    """Every vertex link is sphere-like (for D = 4 it is a homology sphere; its group is not looked at)."""
    return all(map(is_sphere_like, vertex_links(t.corners).values()))


def orientable(t):
    return all(dualize.build(t).flags["orientable"])


def first_homology(t):
    """H_1 of a closed complex from its dual: invariant factors other than 1, 0 for a free part."""
    s = dualize.build(t)
    edges, faces = s.counts["edges_internal"], s.counts["faces_internal"]
    # edges of a spanning tree of the dual graph are relators of their own
    tree, seen = [], {0}
    ends = list(zip(s["edges/source"][:, 0].tolist(), s["edges/target"][:, 0].tolist(), strict=True))
    grown = True
    while grown:
        grown = False
        for e, (a, b) in enumerate(ends):
            if (a in seen) != (b in seen):
                seen |= {a, b}
                tree.append(e)
                grown = True
    rows = np.zeros((faces + len(tree), edges), dtype=int)
    offsets = s["faces/edge_offsets"]
    for f in range(faces):
        for x in range(offsets[f], offsets[f + 1]):
            rows[f, s["faces/edge"][x]] += s["faces/edge_sign"][x]
    rows[faces + np.arange(len(tree)), tree] = 1
    factors = invariant_factors(rows.tolist())
    return sorted(x for x in factors + [0] * (edges - len(factors)) if x != 1)


def invariant_factors(rows):
    """Non-zero entries of the Smith normal form, up to sign and order of divisibility."""
    factors = []
    rows = [row for row in rows if any(row)]
    while rows:
        size, r, c = min((abs(x), r, c) for r, row in enumerate(rows) for c, x in enumerate(row) if x)
        pivot = rows[r]
        for other in rows:
            if other is not pivot and (q := other[c] // pivot[c]):
                for x, value in enumerate(pivot):
                    other[x] -= q * value
        if any(row[c] for row in rows if row is not pivot):
            continue
        # the column is clear: clear the row by column operations, which then touch this row alone
        if any(value % size for value in pivot):
            x = next(x for x, value in enumerate(pivot) if value % size)
            q = pivot[x] // pivot[c]
            for row in rows:
                row[x] -= q * row[c]
            continue
        factors.append(size)
        rows = [row for row in rows if row is not pivot and any(row)]
    return factors


def volumes(t):
    """Volume of every simplex from its coordinates (as many axes as dimensions)."""
    c = t.coordinates
    where = c.corner if c.corner is not None else c.point[t.corners]
    edges = where[:, 1:] - where[:, :1]
    return np.abs(np.linalg.det(edges)) / np.prod(np.arange(1, t.dimension + 1))


def same_complex(t, facets):
    """Whether a triangulation has exactly these lists of labels."""
    return {tuple(sorted(f)) for f in facets} == set(map(tuple, t.corners.tolist()))
