#!/usr/bin/env python3
"""The Turaev-Viro invariant of a closed 3-manifold, read from its foam skeleton alone.

    dualize build INPUT -o FOAM --points
    python scripts/turaev_viro.py FOAM --level 5 [--root 1]

V. G. Turaev, O. Y. Viro, "State sum invariants of 3-manifolds and quantum 6j-symbols", Topology 31 (1992)
865, in the form

    TV_r = D**(-2 P)  sum  prod_faces (-1)**(2j) [2j + 1]  prod_edges (-1)**(j + k + l)  prod_vertices {6j}

with spins 2j = 0 .. r - 2 on the faces (they are dual to the segments of the triangulation), quantum
numbers [n] = sin(n pi s / r) / sin(pi s / r), D**2 = r / (2 sin(pi s / r)**2), s the root (1 by default,
coprime to r), and P the number of points of the triangulation.  Only P is not in the two-complex: it is
read from `vertices/point`.  That every point has a sphere around it is not checked here: where it fails the
number means nothing.
"""

import argparse
import json
from functools import cache
from itertools import product
from math import inf, pi, sin

import numpy as np

LARGEST = 2**24  # entries of an array in the sum: 128 MiB


def load(path):
    """The tables that are needed, {name: array}, with `dimension` and `counts`; JSON or HDF5 by suffix."""
    names = ["wedges/face", "edges/face", "vertices/point"]
    if str(path).endswith((".h5", ".hdf5")):
        import h5py

        with h5py.File(path) as file:
            tables = {name: file[name][()] for name in names if name in file}
            tables |= {"dimension": int(file.attrs["dimension"]), "counts": json.loads(file["counts"][()])}
            return tables
    with open(path) as file:
        data = json.load(file)
    tables = {f"{group}/{name}": data[group].get(name) for group, name in (n.split("/") for n in names)}
    tables = {name: np.array(table) for name, table in tables.items() if table is not None}
    return tables | {"dimension": data["dimension"], "counts": data["counts"]}


class Quantum:
    """Admissible triples and 6j symbols at level r, arguments twice-spins (Kirillov, Reshetikhin, 1989)."""

    def __init__(self, level, root):
        self.level = level
        self.number = [sin(n * pi * root / level) / sin(pi * root / level) for n in range(level + 1)]
        self.factorial = [1.0]
        for n in self.number[1:level]:
            self.factorial.append(self.factorial[-1] * n)
        self.total = level / (2 * sin(pi * root / level) ** 2)  # D**2
        self.six_j = cache(self.six_j)

    def admissible(self, a, b, c):
        total = a + b + c
        return total % 2 == 0 and 2 * max(a, b, c) <= total <= 2 * (self.level - 2)

    def delta_squared(self, a, b, c):
        f = self.factorial
        above = f[(a + b - c) // 2] * f[(a - b + c) // 2] * f[(b + c - a) // 2]
        return above / self.factorial_or_infinity((a + b + c) // 2 + 1)

    def factorial_or_infinity(self, n):
        return self.factorial[n] if n < self.level else inf

    def six_j(self, a, b, c, d, e, f):
        """Racah's sum for {a b c; d e f}, without the square roots of its four triangles.

        In a closed complex each triangle has two sides, so its root occurs squared: `delta_squared` once.
        """
        triads = [(a, b, c), (a, e, f), (d, b, f), (d, e, c)]
        if not all(self.admissible(*t) for t in triads):
            return 0.0
        lowest = max(sum(t) for t in triads) // 2
        fours = [(a + b + d + e) // 2, (b + c + e + f) // 2, (a + c + d + f) // 2]
        total = 0.0
        for z in range(lowest, min([*fours, self.level - 2]) + 1):
            below = 1.0
            for t in triads:
                below *= self.factorial[z - sum(t) // 2]
            for q in fours:
                below *= self.factorial[q - z]
            total += (-1) ** z * self.factorial[z + 1] / below
        return total


def turaev_viro(foam, level, root=1):
    """TV_r of a closed foam of dimension 3."""
    if foam["dimension"] != 3 or foam["counts"]["nodes"]:
        raise SystemExit("the invariant is that of a closed complex of dimension 3")
    if "vertices/point" not in foam:
        raise SystemExit("the number of points is not in the file: build it with --points")
    q = Quantum(level, root)
    labels = range(level - 1)
    # one tensor per cell, one axis per face through it
    triangle, tetrahedron = np.zeros((len(labels),) * 3), np.zeros((len(labels),) * 6)
    for spins in product(labels, repeat=3):
        if q.admissible(*spins):
            triangle[spins] = (-1) ** (sum(spins) // 2) * q.delta_squared(*spins)
    for spins in product(labels, repeat=6):
        s01, s02, s03, s12, s13, s23 = spins
        tetrahedron[spins] = q.six_j(s01, s02, s03, s23, s13, s12)
    weight = np.array([(-1) ** s * q.number[s + 1] for s in labels])

    points = int(foam["vertices/point"].max()) + 1
    faces = foam["counts"]["faces_internal"]
    tensors = [(weight, [f]) for f in range(faces)]
    tensors += [(triangle, row) for row in foam["edges/face"].tolist()]
    tensors += [(tetrahedron, row) for row in foam["wedges/face"].tolist()]
    return q.total ** (-points) * eliminate(tensors)


def eliminate(tensors):
    """Sum the product of all (array, names): one name after the other, that of the smallest result first."""
    names = {n for _, row in tensors for n in row}
    while names:
        cost = {n: len({m for _, row in tensors if n in row for m in row}) for n in names}
        name = min(cost, key=lambda n: (cost[n], n))
        touched = [t for t in tensors if name in t[1]]
        number = {n: x for x, n in enumerate(dict.fromkeys(m for _, row in touched for m in row))}
        left = [n for n in number if n != name]
        if touched[0][0].shape[0] ** len(left) > LARGEST:
            raise SystemExit(f"the complex is too large: its sum needs an array with {len(left)} axes")
        operands = [x for array, row in touched for x in (array, [number[n] for n in row])]
        array = np.einsum(*operands, [number[n] for n in left], optimize=("greedy", 2**30))
        tensors = [t for t in tensors if name not in t[1]] + [(array, left)]
        names.remove(name)
    return float(np.prod([array for array, _ in tensors]))


def main():
    parser = argparse.ArgumentParser(description="The Turaev-Viro invariant of a closed 3-manifold.")
    parser.add_argument("foam", help="a closed skeleton of dimension 3 with its points, as JSON or HDF5")
    parser.add_argument("--level", type=int, default=5, help="r, 3 or more (default 5)")
    parser.add_argument("--root", type=int, default=1, help="s of exp(i pi s / r), coprime to r (default 1)")
    given = parser.parse_args()
    print(f"{turaev_viro(load(given.foam), given.level, given.root):.12f}")


if __name__ == "__main__":
    try:
        main()
    except (KeyError, OSError, ValueError) as error:
        raise SystemExit(f"error: {type(error).__name__}: {error}") from None
