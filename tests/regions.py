"""Foams as files for the readers in `scripts/`, and what their open ends have to do with each other.

The tensor of a region depends on conventions at its open edges: which way the edge and the faces run there,
and the order of the places.  `rebase` changes them; `same_region` and `compose` use it to compare the
tensors of two descriptions of one complex, and to glue.
"""

import itertools
import json
import sys
import tempfile
from functools import cache
from importlib import import_module
from pathlib import Path

import numpy as np
from reference import Table

import dualize

SCRIPTS = Path(__file__).parent.parent / "scripts"


def script(name):
    """A script as a module."""
    if str(SCRIPTS) not in sys.path:
        sys.path.insert(0, str(SCRIPTS))
    return import_module(name)


PROJECTORS, SYMBOLS = script("amplitude_projectors"), script("amplitude_symbols")
READERS = {"projectors": PROJECTORS, "symbols": SYMBOLS}


def write_json(tables, path):
    """Tables under the names of the layout as a JSON file, without a check: damaged ones are wanted too."""
    data = {"dimension": tables["dimension"], "counts": dict(tables["counts"])}
    for name, table in tables.items():
        if "/" in name:
            group, key = name.split("/")
            data.setdefault(group, {})[key] = table.tolist()
    Path(path).write_text(json.dumps(data))


def tables_of(skeleton):
    """The tables as arrays that can be changed."""
    tables = {name: array.copy() for name, array in skeleton.arrays.items()}
    return tables | {"dimension": skeleton.dimension, "counts": dict(skeleton.counts)}


def loaded(foam, reader):
    """A skeleton, or changed tables, as the reader sees it: written to a file and read from there."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "foam.json"
        if isinstance(foam, dict):
            write_json(foam, path)
        else:
            foam.write(path)
        return reader.load(path)


def amplitude(foam, spins, reader=PROJECTORS, **options):
    return reader.amplitude(loaded(foam, reader), spins, **options)


# --------------------------------------------------------------------------------------------------
# Complexes


@cache
def _built(facets):
    return dualize.build(dualize.Triangulation.from_facets(facets))


def foam(facets):
    return _built(tuple(map(tuple, facets)))


def glued(table, **options):
    """The foam of a gluing table of the tests."""
    none = tuple(range(table.dimension + 1))
    carry = [[none if p is None else p for p in row] for row in table.carry]
    return dualize.build(
        dualize.Triangulation.from_gluings(table.across, carry, written=table.written), **options
    )


def equally_oriented(one, two):
    """`two` (facets) as a foam whose boundary is oriented as that of the foam `one`."""
    other = foam(two)
    mine, theirs = (
        dict(zip(map(tuple, s["nodes/corners"].tolist()), s["nodes/orientation"].tolist(), strict=True))
        for s in (one, other)
    )
    assert mine.keys() == theirs.keys()
    if mine == theirs:
        return other
    assert all(mine[x] == -theirs[x] for x in mine)
    a, b, *rest = two[0]
    return equally_oriented(one, [[b, a, *rest], *two[1:]])


def by_labels(one, two):
    """For every node and every link of `one` the one of `two` with the same labels."""
    out = []
    for group in ("nodes", "links"):
        number = {tuple(row): x for x, row in enumerate(two[f"{group}/corners"].tolist())}
        out.append([number[tuple(row)] for row in one[f"{group}/corners"].tolist()])
    return out


def admissible_spins(skeleton, rng, top=3, largest=2000, unequal=True):
    """Random twice-spins of the links that allow invariants at every node; the tensor stays small."""
    nodes = skeleton["nodes/link"]
    unequal = unequal and skeleton.dimension > 2  # two legs always have the same spin
    for _ in range(50):
        draw = rng.integers(0, top + 1, (20000, skeleton.counts["links"]))
        rows = draw[:, nodes]  # (draw, node, place)
        ok = (rows.sum(2) % 2 == 0) & (2 * rows.max(2) <= rows.sum(2))
        # dim Inv of three or four spins; see `test_number_of_states`
        size = np.minimum(2 * rows.min(2), rows.sum(2) - 2 * rows.max(2)) // 2 + 1
        size = np.prod(np.where(ok, size, 0), axis=1) if nodes.shape[1] == 4 else ok.all(axis=1)
        good = (size > 0) & (size <= largest)
        if unequal:
            good &= draw.max(axis=1) > draw.min(axis=1)
        if good.any():
            return draw[np.argmax(good)]
    raise AssertionError("no admissible spins were found")


# --------------------------------------------------------------------------------------------------
# Open ends


def overlap(spins, new_place):
    """<new state | old state> when place k of an open edge becomes place new_place[k], from 3jm symbols."""
    old = SYMBOLS.intertwiners(*(int(x) for x in spins))
    permuted = np.empty(len(spins), dtype=int)
    permuted[list(new_place)] = spins
    new = SYMBOLS.intertwiners(*(int(x) for x in permuted))
    new = np.transpose(new, [0, *(1 + k for k in new_place)])
    return np.tensordot(new, old, axes=[range(1, old.ndim)] * 2)


def rebase(tensor, spins, skeleton, flip_faces, flip_edges, new_places):
    """The tensor of a region under other conventions at its open ends.

    `flip_faces[l]`: external face l runs the other way; `flip_edges[n]`: the edge at node n does;
    `new_places[n][k]`: the new place of its place k.  With V carried to V* by |m> to (-1)**(j - m) <-m|,
    there and back is (-1)**(2j): so a leg that comes back from V* to V costs that sign.
    """
    spins = np.asarray(spins)
    inner = skeleton.counts["edges_internal"]
    against = skeleton["edges/face_sign"][inner:] < 0
    links = skeleton["nodes/link"]
    turned = np.asarray(flip_faces, dtype=bool)[links]
    odd = spins[links][turned & against].sum()
    against = against ^ turned
    edges = np.asarray(flip_edges, dtype=bool)
    # all legs are carried over, and all of them from V to V* together leave an invariant as it is
    odd += spins[links[edges]][against[edges]].sum()
    tensor = tensor * (-1.0) ** int(odd)
    for n, places in enumerate(new_places):
        tensor = np.moveaxis(np.tensordot(overlap(spins[links[n]], places), tensor, axes=(1, n)), 0, n)
    return tensor


def corners_at(skeleton, vertex, slot):
    """The corner of `vertex` at each place of the edge at `slot`."""
    end = "source" if skeleton["vertices/leaves"][vertex, slot] > 0 else "target"
    return skeleton[f"edges/{end}_corner"][skeleton["vertices/edge"][vertex, slot]].tolist()


def same_region(one, two, simplex, corner):
    """How the open ends of `one` correspond to those of `two`, the same complex in another description.

    Corner c of simplex s of `one` is corner ``corner[s][c]`` of simplex ``simplex[s]`` of `two`.  Returns
    the node and the link of `two` for each of `one`, and the arguments of `rebase`.
    """
    number = {
        (v, i): n
        for n, (v, i) in enumerate(zip(two["nodes/vertex"].tolist(), two["nodes/slot"].tolist(), strict=True))
    }
    nodes, flip_edges, places = [], [], []
    links, flip_faces = [None] * one.counts["links"], [None] * one.counts["links"]
    for n, (v, i) in enumerate(zip(one["nodes/vertex"].tolist(), one["nodes/slot"].tolist(), strict=True)):
        w, j = simplex[v], corner[v][i]
        m = number[w, j]
        theirs = corners_at(two, w, j)
        nodes.append(m)
        flip_edges.append(one["nodes/orientation"][n] != two["nodes/orientation"][m])
        places.append([theirs.index(corner[v][c]) for c in corners_at(one, v, i)])
        for k, p in enumerate(places[-1]):
            link = one["nodes/link"][n, k]
            flip = one["nodes/link_leaves"][n, k] != two["nodes/link_leaves"][m, p]
            assert links[link] in (None, two["nodes/link"][m, p]) and flip_faces[link] in (None, flip)
            links[link], flip_faces[link] = two["nodes/link"][m, p], flip
    return nodes, links, (flip_faces, flip_edges, places)


def scramble(table, rng):
    """The same gluings with simplices, corners and directions drawn anew: (table, simplex, corner)."""
    n, k = len(table.across), table.dimension + 1
    simplex = rng.permutation(n).tolist()
    corner = [rng.permutation(k).tolist() for _ in range(n)]
    across = [[-1] * k for _ in range(n)]
    carry = [[None] * k for _ in range(n)]
    for s, i in itertools.product(range(n), range(k)):
        if (t := table.across[s][i]) >= 0:
            image = [None] * k
            for c in range(k):
                image[corner[s][c]] = corner[t][table.carry[s][i][c]]
            across[simplex[s]][corner[s][i]], carry[simplex[s]][corner[s][i]] = simplex[t], tuple(image)
    return Table(across, carry, rng.choice([1, -1], n).tolist()), simplex, corner


# --------------------------------------------------------------------------------------------------
# Cutting and gluing


def cut(table, slots):
    """The table with these (simplex, slot) and their other sides opened."""
    across, carry = [list(row) for row in table.across], [list(row) for row in table.carry]
    for s, i in slots:
        t, p = table.across[s][i], table.carry[s][i]
        for v, j in ((s, i), (t, p[i])):
            across[v][j], carry[v][j] = -1, None
    return Table(across, carry, list(table.written))


def compose(whole, region, boundary, up_to, reader=PROJECTORS):
    """The tensor of `whole` from that of `region`, which is `whole` cut along some of its edges.

    Both have the same simplices and corners.  Every face that becomes internal has the weight 2j + 1 and is
    summed up to `up_to`; the states of the two sides of an edge that becomes internal are orthonormal
    (weight 1) and summed; faces that stay open have the weight 1.
    """
    inner = region.counts["faces_internal"]
    vertex, wedge = np.nonzero(region["wedges/face"] >= inner)
    link = region["wedges/face"][vertex, wedge] - inner
    face_of = np.empty(region.counts["links"], dtype=int)
    flip_faces = np.empty(region.counts["links"], dtype=bool)
    face_of[link] = whole["wedges/face"][vertex, wedge]
    flip_faces[link] = whole["wedges/direction"][vertex, wedge] != region["wedges/direction"][vertex, wedge]

    flip_edges, places, edge_of = [], [], []
    for n, (v, i) in enumerate(
        zip(region["nodes/vertex"].tolist(), region["nodes/slot"].tolist(), strict=True)
    ):
        edge_of.append(int(whole["vertices/edge"][v, i]))
        flip_edges.append(region["nodes/orientation"][n] != whole["vertices/leaves"][v, i])
        theirs = corners_at(whole, v, i)
        places.append([theirs.index(c) for c in corners_at(region, v, i)])

    internal = whole.counts["faces_internal"]
    new = sorted({int(f) for f in face_of if f < internal})
    spins = np.full(internal + whole.counts["links"], -1)
    spins[internal:] = boundary
    open_edges = [e for e in range(whole.counts["edges_internal"], len(whole["edges/twist"]))]
    file = loaded(region, reader)
    total = 0
    for values in itertools.product(range(up_to + 1), repeat=len(new)):
        spins[new] = values
        given = spins[face_of]
        rows = given[region["nodes/link"]]
        if (rows.sum(axis=1) % 2).any() or (2 * rows.max(axis=1) > rows.sum(axis=1)).any():
            continue
        tensor = reader.amplitude(file, given, up_to=up_to)
        tensor = rebase(tensor, given, region, flip_faces, flip_edges, places)
        name = {e: x for x, e in enumerate(dict.fromkeys(edge_of))}
        tensor = np.einsum(tensor, [name[e] for e in edge_of], [name[e] for e in open_edges])
        total = total + np.prod(np.array(values) + 1.0) * tensor
    return total
