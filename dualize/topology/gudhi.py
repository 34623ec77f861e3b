"""The bridge to gudhi: a library that knows nothing of dual complexes counts and computes for itself."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from gudhi import SimplexTree

__all__ = ["PRIMES", "betti_numbers", "cone_off", "simplex_tree", "simplices_per_dimension"]

# The fields of the Betti numbers: torsion of even order shows in the first, none of small order in
# the second.
# (gudhi tabulates inverses in time p^2: 0.1 s here, over a second near its largest prime.)
PRIMES = (2, 9973)


def simplex_tree(facets: np.ndarray) -> SimplexTree:
    """gudhi's simplex tree of the complex with these facets, rows of labels, shape (N, K).

    Labels are renumbered from 0, as gudhi asks for.
    """
    from gudhi import SimplexTree

    _, points = np.unique(facets, return_inverse=True)
    tree = SimplexTree()
    table = np.ascontiguousarray(points.reshape(facets.shape).T.astype(np.int32))
    tree.insert_batch(table, np.zeros(len(facets)))
    return tree


def simplices_per_dimension(tree: SimplexTree) -> list[int]:
    """Numbers of simplices of each dimension."""
    found = [0] * (tree.dimension() + 1)
    for simplex, _ in tree.get_simplices():
        found[len(simplex) - 1] += 1
    return found


def betti_numbers(tree: SimplexTree, prime: int) -> list[int]:
    """Betti numbers b_0 .. b_D over the field of `prime` elements, by persistent cohomology.

    gudhi leaves the top dimension out unless `persistence_dim_max` is set.
    """
    tree.compute_persistence(homology_coeff_field=prime, min_persistence=-1, persistence_dim_max=True)
    found = list(tree.betti_numbers())
    return found + [0] * (tree.dimension() + 1 - len(found))


def cone_off(facets: np.ndarray, boundary: np.ndarray) -> np.ndarray:
    """The complex with a cone over its boundary: from H_1 on it has the homology relative to it."""
    if not len(boundary):
        return facets
    apex = int(facets.max()) + 1
    return np.concatenate([facets, np.column_stack([boundary, np.full(len(boundary), apex)])])
