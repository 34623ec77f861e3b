#!/usr/bin/env python3
"""Count the flat connections of a finite group on a closed, connected foam, read from the file alone.

    python scripts/count_flat.py FOAM --group S3
    python scripts/count_flat.py FOAM --group S3 --all    # visit every one, however many

A connection puts a group element on every internal edge; it is flat when the product around every internal
face, in order, the inverse where the face runs against the edge, is 1.  There are |Hom(pi1, G)| |G|**(V -
1) of them, pi1 the group of the two-complex (R. Dijkgraaf, E. Witten, "Topological gauge theories and group
cohomology", Commun. Math. Phys. 129 (1990) 393).  By default elements are 1 on a spanning tree, and the
count is multiplied by |G| for each of its edges, which is exact: a gauge transformation at every vertex but
one brings each connection there in one way.
"""

import argparse
import json
from itertools import permutations

import numpy as np

GROUPS = {
    "Z2": [(0, 1), (1, 0)],
    "Z3": [(0, 1, 2), (1, 2, 0), (2, 0, 1)],
    "S3": list(permutations(range(3))),
}


def load(path):
    """The tables that are needed, {name: array}, with `counts`; JSON or HDF5 by suffix."""
    names = ["edges/source", "edges/target", "faces/edge", "faces/edge_sign", "faces/edge_offsets"]
    if str(path).endswith((".h5", ".hdf5")):
        import h5py

        with h5py.File(path) as file:
            return {name: file[name][()] for name in names} | {"counts": json.loads(file["counts"][()])}
    with open(path) as file:
        data = json.load(file)
    tables = {f"{group}/{name}": np.array(data[group][name]) for group, name in (n.split("/") for n in names)}
    return tables | {"counts": data["counts"]}


def tables_of(group):
    """Products and inverses of a list of permutations, as tables of numbers; the identity is number 0."""
    elements = sorted(group)
    number = {g: x for x, g in enumerate(elements)}
    times = np.array([[number[tuple(g[x] for x in h)] for h in elements] for g in elements])
    inverse = np.argmin(times, axis=1)  # the identity is the least permutation, hence 0
    return times.tolist(), inverse.tolist()


def spanning_tree(foam):
    """Edges of a spanning tree, breadth first from vertex 0; all vertices must be reached."""
    c = foam["counts"]
    source = foam["edges/source"][: c["edges_internal"], 0].tolist()
    target = foam["edges/target"][: c["edges_internal"], 0].tolist()
    neighbours = [[] for _ in range(c["vertices"])]
    for e, (v, w) in enumerate(zip(source, target, strict=True)):
        neighbours[v].append((e, w))
        neighbours[w].append((e, v))
    reached, tree = [0], []
    seen = set(reached)
    for v in reached:
        for e, w in neighbours[v]:
            if w not in seen:
                seen.add(w)
                reached.append(w)
                tree.append(e)
    if len(reached) < c["vertices"]:
        raise SystemExit("the foam is not connected: count each component on its own")
    return tree


def flat_connections(foam, group, tree=()):
    """How many flat connections are 1 on the edges of `tree`."""
    times, inverse = tables_of(group)
    c = foam["counts"]
    offsets = foam["faces/edge_offsets"].tolist()
    steps = list(zip(foam["faces/edge"].tolist(), foam["faces/edge_sign"].tolist(), strict=True))
    faces = [steps[offsets[f] : offsets[f + 1]] for f in range(c["faces_internal"])]
    around = [[] for _ in range(c["edges_internal"])]
    for face in faces:
        for e in {e for e, _ in face}:
            around[e].append(face)
    value = [-1] * c["edges_internal"]

    def product(steps):
        out = 0
        for e, sign in steps:
            out = times[out][value[e] if sign > 0 else inverse[value[e]]]
        return out

    def put(edge, element, trail):
        """Set an edge and all that follows from it; False where a face is not flat."""
        value[edge] = element
        trail.append(edge)
        pending = list(around[edge])
        while pending:
            face = pending.pop()
            free = [x for x, (e, _) in enumerate(face) if value[e] < 0]
            if not free and product(face) != 0:
                return False
            if len(free) == 1:
                x = free[0]
                e, sign = face[x]
                rest = product(face[x + 1 :] + face[:x])
                value[e] = inverse[rest] if sign > 0 else rest
                trail.append(e)
                pending += around[e]
        return True

    def extend():
        """The number of flat completions of what is set so far."""
        if -1 not in value:
            return 1
        # an edge of the face that is nearest to completion
        open_faces = [[e for e, _ in face if value[e] < 0] for face in faces]
        edge = min((row for row in open_faces if row), key=len, default=[value.index(-1)])[0]
        total = 0
        for element in range(len(times)):
            trail = []
            if put(edge, element, trail):
                total += extend()
            for e in trail:
                value[e] = -1
        return total

    start = []
    if not all(put(e, 0, start) for e in tree if value[e] < 0):
        return 0
    return extend()


def count(foam, group, every=False):
    """All flat connections of a closed, connected foam."""
    if foam["counts"]["nodes"]:
        raise SystemExit("the foam has a boundary")
    tree = spanning_tree(foam)
    if every:
        return flat_connections(foam, group)
    return flat_connections(foam, group, tree) * len(group) ** len(tree)


def main():
    parser = argparse.ArgumentParser(description="Count flat connections of a finite group.")
    parser.add_argument("foam", help="a closed, connected skeleton as JSON or HDF5")
    parser.add_argument("--group", choices=sorted(GROUPS), default="S3")
    parser.add_argument("--all", action="store_true", dest="every", help="visit every connection")
    given = parser.parse_args()
    foam = load(given.foam)
    number, group = count(foam, GROUPS[given.group], given.every), GROUPS[given.group]
    homomorphisms = number // len(group) ** (foam["counts"]["vertices"] - 1)
    print(
        f"{number} flat connections; {homomorphisms} homomorphisms from the group of the two-complex "
        f"to {given.group}"
    )


if __name__ == "__main__":
    try:
        main()
    except (KeyError, OSError, ValueError) as error:
        raise SystemExit(f"error: {type(error).__name__}: {error}") from None
