#!/usr/bin/env python3
"""The SU(2) BF amplitude of a foam skeleton, read from the file alone: 3jm symbols and 15j symbols.

    python scripts/amplitude_symbols.py FOAM --spins 1            # all boundary spins 1/2
    python scripts/amplitude_symbols.py FOAM --spins 1,1,2,...    # one for each link, in order
    python scripts/amplitude_symbols.py FOAM --spins 1 --fix 3=2  # face 3 held at spin 1
    python scripts/amplitude_symbols.py FOAM --up-to 2            # no spin above 1

All spins are twice-spins.  The same number as by `amplitude_projectors.py`, by another way and from other
tables: those of the vertices and wedges, and `faces/against`.

* Each edge sums over an orthonormal basis of real intertwiners, products of 3jm symbols, with legs in the
  order of the places at both ends.
* Each vertex is a symbol of its spins and intertwiners (the 6j symbol of a tetrahedron, the 15j symbol of a
  4-simplex): its intertwiners contracted, in every wedge, by epsilon[m, m'] = (-1)**(j - m) delta[m, -m'],
  from the slot where the face enters to the slot where it leaves.
* Internal faces have the weight 2j + 1, and every face the sign (-1)**(2j n), n the number of edges that it
  runs against and whose target is a vertex: `faces/against`, plus 1 if its last edge comes from a node.

The result has one axis per node, in order: the intertwiner of its external edge, by ascending
intermediate spin.

D. A. Varshalovich, A. N. Moskalev, V. K. Khersonskii, "Quantum Theory of Angular Momentum" (1988), chapters
8 to 10; H. Ooguri, "Topological lattice models in four dimensions", Mod. Phys. Lett. A 7 (1992) 2799.
"""

import argparse
import json
import signal
from functools import cache, lru_cache
from itertools import combinations
from math import factorial, inf, sqrt

import numpy as np

TABLES = [
    *("vertices/edge", "vertices/leaves", "wedges/face", "wedges/direction"),
    *("edges/source", "edges/source_corner", "edges/target_corner"),
    *("faces/against", "faces/edge", "faces/edge_offsets"),
]


def load(path):
    """The tables of a foam as {name: array}, with `dimension` and `counts`; JSON or HDF5 by suffix."""
    if str(path).endswith((".h5", ".hdf5")):
        import h5py

        with h5py.File(path) as file:
            foam = {name: file[name][()] for name in TABLES}
            counts = json.loads(file["counts"][()])
            return foam | {"dimension": int(file.attrs["dimension"]), "counts": counts}
    with open(path) as file:
        data = json.load(file)
    foam = {f"{group}/{name}": np.array(data[group][name]) for group, name in (t.split("/") for t in TABLES)}
    return foam | {"dimension": data["dimension"], "counts": data["counts"]}


# -- symbols ---------------------------------------------------------------------------------------


def triangle(a, b, c):
    return (a + b + c) % 2 == 0 and abs(a - b) <= c <= a + b


@cache
def symbol_3jm(a, b, c):
    """All 3jm symbols of three twice-spins, by Racah's sum; axis index i means m = j - i."""
    out = np.zeros((a + 1, b + 1, c + 1))
    if not triangle(a, b, c):
        return out

    def f(n):
        return factorial(n // 2)

    delta = f(a + b - c) * f(a - b + c) * f(b + c - a) / f(a + b + c + 2)
    for al in range(-a, a + 1, 2):
        for be in range(max(-b, -c - al), min(b, c - al) + 1, 2):
            ga = -al - be
            norm = delta * f(a + al) * f(a - al) * f(b + be) * f(b - be) * f(c + ga) * f(c - ga)
            total = 0.0
            for t in range(max(0, b - c - al, a - c + be), min(a + b - c, a - al, b + be) + 1, 2):
                below = (
                    f(t)
                    * f(c - b + t + al)
                    * f(c - a + t - be)
                    * f(a + b - c - t)
                    * f(a - t - al)
                    * f(b - t + be)
                )
                total += (-1) ** (t // 2) / below
            out[(a - al) // 2, (b - be) // 2, (c - ga) // 2] = (
                (-1) ** ((a - b - ga) // 2) * sqrt(norm) * total
            )
    return out


def epsilon(spin):
    return np.fliplr(np.diag((-1.0) ** np.arange(spin + 1)))


@cache
def intertwiners(*spins):
    """Orthonormal real intertwiners, shape (number, 2j_0 + 1, ...), by ascending intermediate spin."""
    if len(spins) == 2:
        a, b = spins
        return epsilon(a)[None] / sqrt(a + 1) if a == b else np.zeros((0, a + 1, b + 1))
    if len(spins) == 3:
        return symbol_3jm(*spins)[None][: int(triangle(*spins))]
    a, b, c, d = spins
    lowest, highest = max(abs(a - b), abs(c - d)), min(a + b, c + d)
    states = [
        sqrt(k + 1) * np.einsum("abm,mn,ncd->abcd", symbol_3jm(a, b, k), epsilon(k), symbol_3jm(k, c, d))
        for k in range(lowest, highest + 1, 2)
        if (a + b + c + d) % 2 == 0
    ]
    return np.array(states).reshape(-1, a + 1, b + 1, c + 1, d + 1)


class Foam:
    """What the sum needs of the tables: the wedges of every vertex and the order of its legs."""

    def __init__(self, tables):
        self.counts = tables["counts"]
        self.face, self.direction = tables["wedges/face"], tables["wedges/direction"]
        self.edge = tables["vertices/edge"]
        slots = range(tables["dimension"] + 1)
        self.wedges = list(combinations(slots, 2))
        # self.legs[v][i]: the wedges of slot i of vertex v, in the order of the places of the edge there
        corner = {1: tables["edges/source_corner"], -1: tables["edges/target_corner"]}
        self.legs = [
            [
                [self.wedges.index((min(i, c), max(i, c))) for c in corner[leaves[i]][edges[i]].tolist()]
                for i in slots
            ]
            for edges, leaves in zip(self.edge.tolist(), tables["vertices/leaves"].tolist(), strict=True)
        ]
        last = tables["faces/edge"][tables["faces/edge_offsets"][1:] - 1]
        inward = (last >= self.counts["edges_internal"]) & (tables["edges/source"][last, 0] < 0)
        self.odd = (tables["faces/against"] + inward) % 2
        self.vertex = lru_cache(maxsize=None)(self._vertex)

    def faces_of_edges(self):
        """The faces at each edge, {edge: [face, ...]}."""
        return {
            e: [int(self.face[v, w]) for w in legs]
            for v, edges in enumerate(self.edge.tolist())
            for e, legs in zip(edges, self.legs[v], strict=True)
        }

    def _vertex(self, v, spins):
        """The symbol of vertex v: one axis per slot."""
        operands, k = [], len(self.legs[v])
        for slot, legs in enumerate(self.legs[v]):
            names = [slot] + [k + 2 * w + (slot == self.wedges[w][1]) for w in legs]
            operands += [intertwiners(*(spins[w] for w in legs)), names]
        for w, direction in enumerate(self.direction[v].tolist()):
            enter, leave = (k + 2 * w, k + 2 * w + 1)[::direction]
            operands += [epsilon(spins[w]), [enter, leave]]
        return np.einsum(*operands, list(range(k)), optimize=("greedy", 2**30))


# -- the state sum ---------------------------------------------------------------------------------


def largest_spins(edges, given, up_to):
    """An upper bound for every spin: none exceeds the sum of the others at an edge."""
    bound = [up_to if spin < 0 else spin for spin in given]
    again = True
    while again:
        again = False
        for faces in edges:
            for place, f in enumerate(faces):
                others = faces[:place] + faces[place + 1 :]
                if f not in others and given[f] < 0 and sum(bound[o] for o in others) < bound[f]:
                    bound[f], again = sum(bound[o] for o in others), True
    return bound


def amplitude(tables, boundary, fixed=None, up_to=inf):
    """The amplitude of a foam: one axis per node, over the intertwiners of its external edge.

    `boundary` are the twice-spins of the links in order, or one number for all; `fixed` maps internal faces
    to twice-spins held fixed (their weight 2j + 1 stays in); free spins are summed up to `up_to`.
    """
    foam = Foam(tables)
    c = foam.counts
    internal = c["faces_internal"]
    if np.size(boundary) not in (1, c["links"]) or np.min(boundary, initial=0) < 0:
        raise SystemExit(f"there are {c['links']} links: give a twice-spin for each, or one for all")
    if any(not 0 <= face < internal for face in fixed or {}):
        raise SystemExit(f"only internal faces are held fixed: numbers below {internal}")
    spins = np.full(internal + c["links"], -1)
    spins[internal:] = boundary
    for face, spin in (fixed or {}).items():
        spins[face] = spin
    edges = foam.faces_of_edges()
    given = spins.tolist()
    bound = largest_spins(edges.values(), given, up_to)
    if inf in bound:
        raise SystemExit(
            f"the spin of face {bound.index(inf)} has no bound: --fix it, or sum --up-to a largest spin"
        )
    nodes = range(c["edges_internal"], c["edges_internal"] + c["nodes"])
    total = np.zeros([len(intertwiners(*(given[f] for f in edges[e]))) for e in nodes])

    # at each face, the edges that are complete once it and all faces before it have a spin
    closing = {f: [edges[e] for e in edges if max(edges[e]) == f] for f in range(len(given))}

    def add(face):
        nonlocal total
        if face == len(given):
            total = total + term(foam, spins, nodes)
            return
        for spin in [given[face]] if given[face] >= 0 else range(int(bound[face]) + 1):
            spins[face] = spin
            rows = [[int(spins[f]) for f in faces] for faces in closing[face]]
            if all(sum(row) % 2 == 0 and 2 * max(row) <= sum(row) for row in rows):
                add(face + 1)

    add(0)
    return total


def term(foam, spins, nodes):
    """The contribution of one labelling of the faces."""
    weight = np.prod(spins[: foam.counts["faces_internal"]] + 1.0) * (-1.0) ** int(foam.odd @ spins)
    value, names = np.array(weight), []
    for v, edges in enumerate(foam.edge.tolist()):
        symbol = foam.vertex(v, tuple(spins[foam.face[v]].tolist()))
        seen = names + edges
        number = {e: x for x, e in enumerate(dict.fromkeys(seen))}
        left = [e for e in number if seen.count(e) == 1]
        value = np.einsum(
            value, [number[e] for e in names], symbol, [number[e] for e in edges], [number[e] for e in left]
        )
        names = left
    return np.transpose(value, [names.index(e) for e in nodes])


def main():
    parser = argparse.ArgumentParser(description="The SU(2) BF amplitude of a foam, by 3jm and 15j symbols.")
    parser.add_argument("foam", help="a skeleton as JSON or HDF5")
    parser.add_argument(
        "--spins", default="0", help="twice-spins of the links, comma-separated, or one for all"
    )
    parser.add_argument(
        "--fix", action="append", default=[], metavar="FACE=SPIN", help="hold an internal face"
    )
    parser.add_argument("--up-to", type=float, default=inf, help="largest twice-spin of the internal faces")
    given = parser.parse_args()
    spins = [int(x) for x in given.spins.split(",")]
    fixed = dict(tuple(map(int, x.split("="))) for x in given.fix)
    tensor = amplitude(load(given.foam), spins[0] if len(spins) == 1 else spins, fixed, given.up_to)
    print(f"shape {tensor.shape}, sum of squares {np.sum(tensor**2):.12g}")
    for states in np.argwhere(np.abs(tensor) > 1e-12):
        print(*states, f"{tensor[tuple(states)]:+.15f}")


if __name__ == "__main__":
    if hasattr(signal, "SIGPIPE"):
        signal.signal(signal.SIGPIPE, signal.SIG_DFL)  # a closed pipe ends it quietly
    try:
        main()
    except (KeyError, OSError, ValueError) as error:
        raise SystemExit(f"error: {type(error).__name__}: {error}") from None
