"""What the tests of `dualize.spins` share: small foams, and sums by trying everything."""

from functools import cache
from itertools import product

import numpy as np
import specimens as sp
from reference import glue_by_labels
from regions import glued

# few enough internal faces to try all spins
FOAMS = {
    "2d-ring": glue_by_labels(sp.around_ridge(2, 4)),
    "2d-sphere": glue_by_labels(sp.sphere(2)),
    "3d-2-3": glue_by_labels(sp.move_side(3, 3)),
    "3d-1-4": glue_by_labels(sp.move_side(3, 4)),
    "3d-melon-3": sp.melon(3, 3),
    "3d-melon-4": sp.melon(3, 4),
    "3d-snapped": sp.GLUED["3d-snapped-tetrahedron"],
    "3d-twisted": sp.GLUED["3d-twisted-tetrahedron"],
    "3d-closed-1": sp.GLUED["tetrahedra_1_2"],
    "3d-closed-2": sp.GLUED["tetrahedra_2_4"],
    "4d-simplex": glue_by_labels(sp.simplex(4)),
    "4d-3-3": glue_by_labels(sp.move_side(4, 3)),
    "4d-2-4": glue_by_labels(sp.move_side(4, 4)),
    "4d-around-5": glue_by_labels(sp.around_ridge(4, 5)),
    "4d-melon-2": sp.melon(4, 2),
    "4d-melon-3": sp.melon(4, 3),
    "4d-melon-4": sp.melon(4, 4),
    "4d-snapped": sp.GLUED["4d-snapped-simplex"],
    "4d-twisted": sp.GLUED["4d-twisted-simplex"],
    "4d-closed": sp.GLUED["four_simplices_2_3"],
}


@cache
def foam_of(name):
    return glued(FOAMS[name])


def reach(faces):
    """A largest twice-spin with which all labellings can be tried."""
    return {0: 9, 1: 9, 2: 8, 3: 6, 4: 4, 5: 3, 6: 3}.get(faces, 1)


def rows_at(skeleton, spins):
    """The spins at every internal edge, read from the table."""
    inner = skeleton.counts["edges_internal"]
    return [[int(spins[f]) for f in faces] for faces in skeleton["edges/face"][:inner].tolist()]


def allowed(skeleton, spins):
    """The edge rule, from the table alone."""
    return all(sum(row) % 2 == 0 and 2 * max(row) <= sum(row) for row in rows_at(skeleton, spins))


def all_labellings(skeleton, boundary, most, step=1):
    """Every admissible labelling up to a cutoff, by trying all."""
    inner = skeleton.counts["faces_internal"]
    found = [
        spins
        for spins in product(range(0, most + 1, step), repeat=inner)
        if allowed(skeleton, [*spins, *boundary])
    ]
    return np.array(found, dtype=np.int64).reshape(len(found), inner)


def weight_count(spins):
    """Invariants in a product of spins: states of weight 0 less those of weight 2 (in twice-weights)."""
    weights = {0: 1}
    for s in spins:
        new = {}
        for total, number in weights.items():
            for m in range(-s, s + 1, 2):
                new[total + m] = new.get(total + m, 0) + number
        weights = new
    return weights.get(0, 0) - weights.get(2, 0)


def boundaries(skeleton, number=3, seed=0, step=1):
    """Some boundary spins that the nodes allow: all 0, all alike, and drawn."""
    rng = np.random.default_rng(seed)
    links, nodes = skeleton.counts["links"], skeleton["nodes/link"]
    out = [np.zeros(links, dtype=np.int64)]
    if not links:
        return out
    pool = [np.full(links, step), np.full(links, 2 * step)]
    if skeleton.dimension > 2:
        pool.insert(1, 2 * step * rng.integers(1, 3, links))  # fits any node
        pool = np.concatenate([pool, step * rng.integers(0, 4, (4000, links))])
    at = np.array(pool)[:, nodes]
    good = ((at.sum(2) % 2 == 0) & (2 * at.max(2) <= at.sum(2))).all(1)
    return out + [pool[n] for n in np.flatnonzero(good)[: number - 1]]
