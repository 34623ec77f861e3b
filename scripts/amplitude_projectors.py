#!/usr/bin/env python3
"""The SU(2) BF amplitude of a foam skeleton, read from the file alone: one projector on every edge.

    python scripts/amplitude_projectors.py FOAM --spins 1            # all boundary spins 1/2
    python scripts/amplitude_projectors.py FOAM --spins 1,1,2,...    # one for each link, in order
    python scripts/amplitude_projectors.py FOAM --spins 1 --fix 3=2  # face 3 held at spin 1
    python scripts/amplitude_projectors.py FOAM --up-to 2            # no spin above 1

All spins are twice-spins.  It uses the tables `edges/...` and nothing else (H. Ooguri, "Topological lattice
models in four dimensions", Mod. Phys. Lett. A 7 (1992) 2799):

* A face of spin j carries V, of dimension 2j + 1, along its direction, and V* against it.
* An internal edge carries the projector on the invariants of the product of its faces, V where the face
  runs along the edge and V* where it runs against.  The projector is a sum of v (x) v* over an orthonormal
  basis: v sits at the target of the edge, v* at its source.
* At place k of the end (vertex, slot) of an edge the face goes on through the wedge (slot, corner at place
  k).
* Internal faces have the weight 2j + 1; those at the boundary have none, so that regions can be glued.

An external edge stays open.  It has one end at a vertex, and there it carries one of the real orthonormal
states `open_states` in place of v or v*: first coupled in V (x) V (x) ..., places (0 1)(2 3), by ascending
intermediate spin, with the phases of Condon and Shortley; then V is carried to V* at the places of the
faces that run against the edge, |m> to (-1)**(j - m) <-m|.  The result has one axis per node, in order.
"""

import argparse
import json
import signal
from functools import cache

import numpy as np


def load(path):
    """The tables of a foam as {name: array}, with `dimension` and `counts`; JSON or HDF5 by suffix."""
    if str(path).endswith((".h5", ".hdf5")):
        import h5py

        with h5py.File(path) as file:
            foam = {f"edges/{name}": table[()] for name, table in file["edges"].items()}
            counts = json.loads(file["counts"][()])
            return foam | {"dimension": int(file.attrs["dimension"]), "counts": counts}
    with open(path) as file:
        data = json.load(file)
    foam = {f"edges/{name}": np.array(table) for name, table in data["edges"].items()}
    return foam | {"dimension": data["dimension"], "counts": data["counts"]}


# -- representations -------------------------------------------------------------------------------


def raising(spins, signs):
    """J+ on the product of V (sign +1) and V* (-1), and the weight (twice m) of each product state."""
    total, weight = 0, np.zeros(1, dtype=int)
    for leg, (spin, sign) in enumerate(zip(spins, signs, strict=True)):
        m = np.arange(spin, -spin - 1, -2)  # twice m, from j down to -j
        up = np.diag(np.sqrt((spin - m[1:]) / 2 * ((spin + m[1:]) / 2 + 1)), 1)
        up = up if sign > 0 else -up.T  # a generator X acts on V* as -X^T
        before, after = (int(np.prod([s + 1 for s in part])) for part in (spins[:leg], spins[leg + 1 :]))
        total = total + np.kron(np.eye(before), np.kron(up, np.eye(after)))
        weight = (weight[:, None] + sign * m).ravel()
    return total, weight


@cache
def invariants(spins, signs):
    """An orthonormal basis of the invariants, shape (dimension, 2j_0 + 1, 2j_1 + 1, ...)."""
    up, weight = raising(spins, signs)
    level = np.flatnonzero(weight == 0)  # a highest-weight state of weight 0 is invariant
    _, values, rows = np.linalg.svd(up[:, level])
    basis = np.zeros((len(level) - np.count_nonzero(values > 1e-9), len(weight)))
    basis[:, level] = rows[len(level) - len(basis) :]
    return basis.reshape(-1, *(s + 1 for s in spins))


@cache
def open_states(spins, signs):
    """The states of an open edge, in the shape of `invariants`."""
    states = invariants(spins, (1,) * len(spins))
    if len(spins) == 4 and len(states):
        # order by the intermediate spin k: diagonalise (J_0 + J_1)^2, of eigenvalue k (k + 1)
        up, weight = raising(spins[:2], (1, 1))
        casimir = up.T @ up + np.diag(weight / 2 * (weight / 2 + 1))
        flat = states.reshape(len(states), len(casimir), -1)
        _, mix = np.linalg.eigh(np.einsum("axm,xy,bym->ab", flat, casimir, flat))
        states = np.einsum("ak,a...->k...", mix, states)
    states = states.copy()
    # Condon and Shortley: the component at (j0, k - j0, j3 - k, -j3) has the sign (-1)**(j0 - j1 - j2 + j3)
    k = max(abs(spins[0] - spins[1]), abs(spins[-2] - spins[-1])) if len(spins) == 4 else 0
    for state in states:
        m, sign = {
            2: lambda a, b: ((a, -b), 0),
            3: lambda a, b, c: ((a, c - a, -c), a - b + c),
            4: lambda a, b, c, d: ((a, k - a, d - k, -d), a - b - c + d),  # noqa: B023
        }[len(spins)](*spins)
        if state[tuple((s - x) // 2 for s, x in zip(spins, m, strict=True))] * (-1) ** (sign // 2) < 0:
            state *= -1
        k += 2
    for place, (spin, sign) in enumerate(zip(spins, signs, strict=True), start=1):
        if sign < 0:
            turn = (-1.0) ** np.arange(spin, -1, -1)
            states = np.flip(states, place) * turn.reshape(
                [-1 if x == place else 1 for x in range(states.ndim)]
            )
    return states


# -- the state sum ---------------------------------------------------------------------------------


def labellings(faces, internal, given, up_to):
    """All spins of the faces that agree with `given` (-1 = free) and allow invariants at every edge."""
    spins = given.copy()
    edges_of = [np.flatnonzero((faces == f).any(axis=1)) for f in range(len(spins))]

    def allowed(face):
        rows = spins[faces[edges_of[face]]]
        rows = rows[(rows >= 0).all(axis=1)]
        return (rows.sum(axis=1) % 2 == 0).all() and (
            2 * rows.max(axis=1, initial=0) <= rows.sum(axis=1)
        ).all()

    def choose():
        """A free face and its largest possible spin: where all the others of an edge are known, their sum."""
        bounds = {}
        for row in faces[(spins[faces] < 0).sum(axis=1) == 1]:
            face = row[spins[row] < 0][0]
            bounds[face] = min(bounds.get(face, up_to), spins[row].sum() + 1)  # + 1 for its own -1
        if bounds:
            return min(bounds.items(), key=lambda item: item[1])
        return int(np.flatnonzero(spins < 0)[0]), up_to

    def descend():
        if (spins >= 0).all():
            yield spins.copy()
            return
        face, bound = choose()
        if not np.isfinite(bound):
            raise SystemExit(f"the spin of face {face} has no bound: --fix it, or sum --up-to a largest spin")
        for spin in range(int(bound) + 1):
            spins[face] = spin
            if allowed(face):
                yield from descend()
        spins[face] = -1

    if all(allowed(face) for face in np.flatnonzero(spins >= 0)):
        yield from descend()


def contract(tensors, keep):
    """Sum the product of (array, names of its axes) over all names but `keep`; intermediate arrays may be
    large."""
    number = {name: x for x, name in enumerate(dict.fromkeys(n for _, names in tensors for n in names))}
    operands = [x for array, names in tensors for x in (array, [number[n] for n in names])]
    return np.einsum(*operands, [number[n] for n in keep], optimize=("greedy", 2**30))


def amplitude(foam, boundary, fixed=None, up_to=np.inf):
    """The amplitude of a foam: one axis per node, over the states of its external edge.

    `boundary` are the twice-spins of the links in order, or one number for all; `fixed` maps internal faces
    to twice-spins held fixed (their weight 2j + 1 stays in); free spins are summed up to `up_to`.
    """
    c = foam["counts"]
    internal, inner_edges = c["faces_internal"], c["edges_internal"]
    faces, signs = foam["edges/face"], foam["edges/face_sign"]
    ends = [(np.array(foam[f"edges/{end}"]), foam[f"edges/{end}_corner"]) for end in ("source", "target")]
    if np.size(boundary) not in (1, c["links"]) or np.min(boundary, initial=0) < 0:
        raise SystemExit(f"there are {c['links']} links: give a twice-spin for each, or one for all")
    if any(not 0 <= face < internal for face in fixed or {}):
        raise SystemExit(f"only internal faces are held fixed: numbers below {internal}")
    given = np.full(internal + c["links"], -1)
    given[internal:] = boundary
    for face, spin in (fixed or {}).items():
        given[face] = spin

    # the tensors of each vertex: (edge, names of its legs)
    at_vertex = [[] for _ in range(c["vertices"])]
    for edge in range(len(faces)):
        for where, corners in ends:
            vertex, slot = where[edge]
            if vertex >= 0:
                at_vertex[vertex].append((edge, [frozenset((slot, corner)) for corner in corners[edge]]))

    def states(edge, spins):
        make = open_states if edge >= inner_edges else invariants
        return make(tuple(spins[faces[edge]].tolist()), tuple(signs[edge].tolist()))

    total = None
    nodes = list(range(inner_edges, len(faces)))
    for spins in labellings(faces, internal, given, up_to):
        value, open_edges = np.array(np.prod(spins[:internal] + 1.0)), []
        for legs in at_vertex:
            vertex = [(states(edge, spins), [edge, *names]) for edge, names in legs]
            here = [edge for edge, _ in legs]
            once = [edge for edge in dict.fromkeys(here) if here.count(edge) == 1]
            vertex = contract(vertex, once)
            keep = [e for e in [*open_edges, *once] if e >= inner_edges or (e in open_edges) != (e in once)]
            value = contract([(value, open_edges), (vertex, once)], keep)
            open_edges = keep
        value = contract([(value, open_edges)], nodes)
        total = value if total is None else total + value
    if total is None:  # no labelling at all
        shape = [len(states(e, given)) if (given[faces[e]] >= 0).all() else 0 for e in nodes]
        total = np.zeros(shape)
    return np.asarray(total)


def main():
    parser = argparse.ArgumentParser(description="The SU(2) BF amplitude of a foam, by projectors.")
    parser.add_argument("foam", help="a skeleton as JSON or HDF5")
    parser.add_argument(
        "--spins", default="0", help="twice-spins of the links, comma-separated, or one for all"
    )
    parser.add_argument(
        "--fix", action="append", default=[], metavar="FACE=SPIN", help="hold an internal face"
    )
    parser.add_argument(
        "--up-to", type=float, default=np.inf, help="largest twice-spin of the internal faces"
    )
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
