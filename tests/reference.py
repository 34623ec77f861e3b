"""The slow reference: the foam skeleton written down from the conventions alone, in plain Python.

It shares no line with the package: lists, tuples and dicts only, simple rather than fast, one function per
section of the conventions.  The tests compare the package with it table by table.

    table = glue_by_labels([[0, 1, 2, 3], [1, 2, 3, 4]])
    skeleton = reference_skeleton(table)
    skeleton["edges/source"]            # nested lists, under the names of the layout
"""

from collections import Counter
from dataclasses import dataclass
from itertools import combinations, pairwise


class Refused(Exception):
    """The complex has no dual two-complex; `kind` is a word of KINDS, `detail` says where."""

    def __init__(self, kind, detail=""):
        assert kind in KINDS, kind
        super().__init__(f"{kind}: {detail}")
        self.kind = kind
        self.detail = detail


KINDS = (
    "repeated label",
    "overfull facet",
    "out of range",
    "no permutation",
    "inverse",
    "self-glued facet",
    "folded ridge",
    "holonomy",
    "pinched ridge",
    "twins",
)


@dataclass
class Table:
    """A gluing table; `matched` says that it was made by matching labels."""

    across: list  # across[s][i]: simplex across slot i, or -1
    carry: list  # carry[s][i]: tuple, images of the corners; None on the boundary
    written: list  # +1 or -1
    corners: list | None = None  # labels
    matched: bool = False

    @property
    def dimension(self):
        return len(self.across[0]) - 1


def sign_of(sequence):
    """+1 or -1: the parity of the order of distinct things (+1 when they ascend)."""
    inversions = sum(a > b for a, b in combinations(sequence, 2))
    return -1 if inversions % 2 else 1


# --------------------------------------------------------------------------------------------------
# Section 1: the triangulation


def glue_by_labels(facets):
    """The gluing table of a list of simplices, each a list of labels."""
    facets = [tuple(f) for f in facets]
    for s, labels in enumerate(facets):
        if len(set(labels)) < len(labels):
            raise Refused("repeated label", f"simplex {s}: {labels}")
    corners = [tuple(sorted(labels)) for labels in facets]
    found = {}
    for s, labels in enumerate(corners):
        for i in range(len(labels)):
            found.setdefault(labels[:i] + labels[i + 1 :], []).append((s, i))
    for labels, places in found.items():
        if len(places) > 2:
            raise Refused("overfull facet", f"{labels} in {places}")

    k = len(facets[0])
    across = [[-1] * k for _ in facets]
    carry = [[None] * k for _ in facets]
    for places in found.values():
        if len(places) == 2:
            for (s, i), (t, j) in (places, places[::-1]):
                across[s][i] = t
                position = {label: c for c, label in enumerate(corners[t])}
                carry[s][i] = tuple(j if c == i else position[corners[s][c]] for c in range(k))
    written = [sign_of(labels) for labels in facets]
    return Table(across, carry, written, [list(c) for c in corners], matched=True)


def table_from(across, carry, written=None, corners=None):
    """A given gluing table, tidied: tuples for permutations, None on the boundary."""
    across = [[int(t) for t in row] for row in across]
    carry = [
        [None if t == -1 else tuple(int(c) for c in p) for t, p in zip(ts, ps, strict=True)]
        for ts, ps in zip(across, carry, strict=True)
    ]
    written = [1] * len(across) if written is None else [int(w) for w in written]
    return Table(across, carry, written, None if corners is None else [list(c) for c in corners])


def table_from_pairs(rows):
    """A gluing table from rows of [simplex, permutation] entries (None on the boundary)."""
    across = [[-1 if e is None else e[0] for e in row] for row in rows]
    carry = [[None if e is None else tuple(e[1]) for e in row] for row in rows]
    return Table(across, carry, [1] * len(rows))


def check_table(table):
    """Refuse a table that is no gluing: section 5, first item."""
    n, k = len(table.across), table.dimension + 1
    halves = [(s, i) for s in range(n) for i in range(k)]
    for s, i in halves:
        if not -1 <= table.across[s][i] < n:
            raise Refused("out of range", f"simplex {s}, slot {i}: {table.across[s][i]}")
    for s, i in halves:
        if table.across[s][i] >= 0 and sorted(table.carry[s][i]) != list(range(k)):
            raise Refused("no permutation", f"simplex {s}, slot {i}: {table.carry[s][i]}")
    for s, i in halves:
        t = table.across[s][i]
        if t >= 0:
            p = table.carry[s][i]
            if (t, p[i]) == (s, i):
                raise Refused("self-glued facet", f"simplex {s}, slot {i}")
            back = table.carry[t][p[i]]
            if table.across[t][p[i]] != s or any(back[p[c]] != c for c in range(k)):
                raise Refused("inverse", f"simplex {s}, slot {i}")


# --------------------------------------------------------------------------------------------------
# Walking


def step(table, state):
    """Cross the exit slot: (simplex, enter, exit) -> the same at the next simplex; None at the boundary."""
    s, enter, leave = state
    t = table.across[s][leave]
    if t < 0:
        return None
    p = table.carry[s][leave]
    return t, p[leave], p[enter]


def turned(state):
    s, enter, leave = state
    return s, leave, enter


def ridge_walks(table):
    """Every ridge class once, as (is a ring, directed wedges in order from an arbitrary start).

    A wedge met twice in opposite directions is a folded ridge.
    """
    k = table.dimension + 1
    walks, seen = [], set()
    for s in range(len(table.across)):
        for i, j in combinations(range(k), 2):
            if (s, i, j) in seen or (s, j, i) in seen:
                continue
            walk, state = [], (s, i, j)
            while state is not None and not (walk and state == walk[0]):
                walk.append(state)
                state = step(table, state)
            ring = state is not None
            if not ring:  # also backwards, from the same wedge
                behind, state = [], step(table, turned(walk[0]))
                while state is not None:
                    behind.append(turned(state))
                    state = step(table, state)
                walk = behind[::-1] + walk
            seen.update(walk)
            if any(turned(state) in seen for state in walk):
                raise Refused("folded ridge", f"wedge {walk[0]}")
            walks.append((ring, walk))
    return walks


def has_holonomy(table, ring):
    """Does the ridge come back permuted after one walk around it?"""
    _, enter, leave = ring[0]
    image = list(range(table.dimension + 1))  # where each corner of the first simplex has been carried to
    for simplex, _, exit_slot in ring:
        p = table.carry[simplex][exit_slot]
        image = [p[c] for c in image]
    # enter and exit slots change roles at every step, so that only the ridge's own corners tell
    return any(image[c] != c for c in range(len(image)) if c not in (enter, leave))


# --------------------------------------------------------------------------------------------------
# Section 2: orientation


def orient(table):
    """Orientation and component of every simplex, breadth first."""
    n, k = len(table.across), table.dimension + 1
    orientation, component = [0] * n, [-1] * n
    components = 0
    for first in range(n):
        if orientation[first]:
            continue
        orientation[first], component[first] = table.written[first], components
        queue = [first]
        while queue:
            s = queue.pop(0)
            for i in range(k):
                t = table.across[s][i]
                if t >= 0 and not orientation[t]:
                    orientation[t] = -orientation[s] * sign_of(table.carry[s][i])
                    component[t] = components
                    queue.append(t)
        components += 1
    return orientation, component


# --------------------------------------------------------------------------------------------------
# Sections 3 to 6: the skeleton


def reference_skeleton(table, keep_singular=False, points=False):
    """All tables of the layout, as nested lists under their names, with `counts` and `flags`."""
    check_table(table)
    D, n = table.dimension, len(table.across)
    K = D + 1
    pairs = list(combinations(range(K), 2))
    orientation, component = orient(table)
    out = {"vertices/orientation": orientation, "vertices/component": component}
    if table.corners is not None:
        out["vertices/corners"] = [list(c) for c in table.corners]

    # ---- edges and nodes
    interior, external = [], []
    for s in range(n):
        for i in range(K):
            t = table.across[s][i]
            if t < 0:
                external.append([(s, i)])
            elif (s, i) < (t, table.carry[s][i][i]):
                interior.append([(s, i), (t, table.carry[s][i][i])])
    interior.sort()
    external.sort()
    edges, E_int, B = interior + external, len(interior), len(external)
    edge_at, corner_at, leaving = {}, {}, {}  # by half-edge; corner_at lists the corners at each place
    ordered, twist = True, []
    for e, halves in enumerate(edges):
        s, i = halves[0]
        reference = [c for c in range(K) if c != i]
        for h, half in enumerate(halves):
            carried = reference if h == 0 else [table.carry[s][i][c] for c in reference]
            edge_at[half], corner_at[half] = e, carried
            leaving[half] = orientation[half[0]] * (-1) ** half[1] * sign_of(carried)
            ordered = ordered and carried == sorted(carried)
        if len(halves) == 2:
            t = halves[1][0]
            twist.append(int(orientation[t] != -orientation[s] * sign_of(table.carry[s][i])))
            assert twist[-1] == (leaving[halves[0]] == leaving[halves[1]])
        else:
            twist.append(0)

    source, target = [], []
    for e, halves in enumerate(edges):
        if e >= E_int:
            ends = [halves[0], (-1, e - E_int)]
            if leaving[halves[0]] == -1:
                ends.reverse()
        else:
            ends = list(halves)
            if not twist[e] and leaving[halves[0]] == -1:
                ends.reverse()
        source.append(ends[0])
        target.append(ends[1])
    out["edges/source"] = [list(h) for h in source]
    out["edges/target"] = [list(h) for h in target]
    out["edges/twist"] = twist
    out["edges/source_corner"] = [list(corner_at.get(h, [-1] * D)) for h in source]
    out["edges/target_corner"] = [list(corner_at.get(h, [-1] * D)) for h in target]
    out["vertices/edge"] = [[edge_at[s, i] for i in range(K)] for s in range(n)]
    out["vertices/leaves"] = [
        [1 if source[edge_at[s, i]] == (s, i) else -1 for i in range(K)] for s in range(n)
    ]

    # ---- faces and links
    walks = []
    for ring, walk in ridge_walks(table):
        smallest = min((s, min(a, b), max(a, b)) for s, a, b in walk)
        s, i, j = smallest
        wanted = (s, i, j) if orientation[s] * (-1) ** (i + j) == 1 else (s, j, i)
        if wanted not in walk:
            walk = [turned(state) for state in reversed(walk)]
        if ring:
            at = walk.index(wanted)
            walk = walk[at:] + walk[:at]
        walks.append((not ring, smallest, walk))  # internal faces sort first
    walks.sort()
    F_int = sum(1 for outer, _, _ in walks if not outer)
    L = len(walks) - F_int

    face_at, direction_at = {}, {}
    vertex_offsets, visits, wedges = [0], [], []
    edge_offsets, edge_list, edge_signs, places = [0], [], [], []
    edge_face = [[None] * D for _ in edges]
    edge_face_sign = [[None] * D for _ in edges]
    against, link_source, link_target, link_twist = [], [], [], []
    node_link = [[None] * D for _ in external]
    node_link_leaves = [[None] * D for _ in external]
    for f, (outer, _, walk) in enumerate(walks):
        crossings = []  # (edge, sign, place) in order
        if outer:
            s, enter, leave = walk[0]
            e = edge_at[s, enter]
            crossings.append((e, 1 if target[e] == (s, enter) else -1, corner_at[s, enter].index(leave)))
        for s, enter, leave in walk:
            face_at[s, min(enter, leave), max(enter, leave)] = f
            direction_at[s, min(enter, leave), max(enter, leave)] = 1 if enter < leave else -1
            visits.append(s)
            wedges.append(pairs.index((min(enter, leave), max(enter, leave))))
            e = edge_at[s, leave]
            crossings.append((e, 1 if source[e] == (s, leave) else -1, corner_at[s, leave].index(enter)))
        for e, sign, place in crossings:
            assert edge_face[e][place] is None, "two faces at one place of an edge"
            edge_face[e][place], edge_face_sign[e][place] = f, sign
        edge_list += [e for e, _, _ in crossings]
        edge_signs += [sign for _, sign, _ in crossings]
        places += [place for _, _, place in crossings]
        vertex_offsets.append(len(visits))
        edge_offsets.append(len(edge_list))
        against.append(sum(1 for e, sign, _ in crossings if e < E_int and sign == -1) % 2)
        if outer:
            link = f - F_int
            (first, _, first_place), (last, _, last_place) = crossings[0], crossings[-1]
            link_source.append(last - E_int)
            link_target.append(first - E_int)
            link_twist.append(sum(twist[e] for e, _, _ in crossings) % 2)
            node_link[last - E_int][last_place], node_link_leaves[last - E_int][last_place] = link, 1
            node_link[first - E_int][first_place], node_link_leaves[first - E_int][first_place] = link, -1

    out["wedges/face"] = [[face_at[s, i, j] for i, j in pairs] for s in range(n)]
    out["wedges/direction"] = [[direction_at[s, i, j] for i, j in pairs] for s in range(n)]
    out["edges/face"] = edge_face
    out["edges/face_sign"] = edge_face_sign
    out["faces/vertex_offsets"] = vertex_offsets
    out["faces/vertex"] = visits
    out["faces/wedge"] = wedges
    out["faces/edge_offsets"] = edge_offsets
    out["faces/edge"] = edge_list
    out["faces/edge_sign"] = edge_signs
    out["faces/place"] = places
    out["faces/against"] = against

    out["nodes/edge"] = [E_int + b for b in range(B)]
    out["nodes/vertex"] = [s for [(s, _)] in external]
    out["nodes/slot"] = [i for [(_, i)] in external]
    out["nodes/orientation"] = [leaving[half] for [half] in external]
    out["nodes/component"] = classes_in_order(B, zip(link_source, link_target, strict=True))
    out["nodes/link"] = node_link
    out["nodes/link_leaves"] = node_link_leaves
    out["links/source"] = link_source
    out["links/target"] = link_target
    out["links/face"] = [F_int + link for link in range(L)]
    out["links/twist"] = link_twist
    if table.corners is not None:
        out["nodes/corners"] = [[table.corners[s][c] for c in corner_at[s, i]] for [(s, i)] in external]
        out["links/corners"] = [ridge_labels(table, smallest) for outer, smallest, _ in walks if outer]

    # ---- what is singular
    singular = singular_faces(table, walks, keep_singular)
    if singular is not None:
        out["faces/singular"] = singular

    if points:
        name_points(table, out)

    out["counts"] = {
        "vertices": n,
        "edges_internal": E_int,
        "edges_external": B,
        "faces_internal": F_int,
        "faces_external": L,
        "nodes": B,
        "links": L,
        "components": max(component) + 1,
    }
    orientable = [True] * (max(component) + 1)
    for e, halves in enumerate(edges):
        if twist[e]:
            orientable[component[halves[0][0]]] = False
    out["flags"] = {"orientable": orientable, "ordered": ordered, "singular": singular is not None}
    return out


def ridge_labels(table, wedge):
    """Labels of the ridge at wedge (s, i, j), ascending."""
    s, i, j = wedge
    return sorted(label for c, label in enumerate(table.corners[s]) if c not in (i, j))


def singular_faces(table, walks, keep_singular):
    """0, 1, 2 or 3 for every face; None where nothing is singular (section 5)."""
    holonomy = [not outer and has_holonomy(table, walk) for outer, _, walk in walks]
    pinched, twins = [False] * len(walks), False
    if table.matched:
        twins = len({tuple(c) for c in table.corners}) < len(table.corners)
        labels = [tuple(ridge_labels(table, smallest)) for _, smallest, _ in walks]
        number = Counter(labels)
        pinched = [number[ridge] > 1 for ridge in labels]
    if not keep_singular:
        for kind, found in (("twins", twins), ("holonomy", any(holonomy)), ("pinched ridge", any(pinched))):
            if found:
                raise Refused(kind)
    if twins or any(holonomy) or any(pinched):
        return [h + 2 * p for h, p in zip(holonomy, pinched, strict=True)]
    return None


def classes_in_order(n, pairs):
    """Number of the class of each of 0..n-1 under `pairs`, classes numbered by smallest member."""
    members = [[x] for x in range(n)]  # one list for each class, shared by its members
    for a, b in pairs:
        if members[a] is not members[b]:
            members[a] += members[b]
            for x in members[b]:
                members[x] = members[a]
    numbers = {}
    return [numbers.setdefault(id(group), len(numbers)) for group in members]


def name_points(table, out):
    """Classes of points and segments (section 6, optional tables)."""
    n, k = len(table.across), table.dimension + 1
    pairs = list(combinations(range(k), 2))
    if table.matched:
        # a point is a label, a segment a pair of labels; the corners ascend, so every sign is +1
        number, segments = {}, {}
        out["vertices/point"] = [[number.setdefault(x, len(number)) for x in row] for row in table.corners]
        out["vertices/segment"] = [
            [segments.setdefault((row[a], row[b]), len(segments)) for a, b in pairs] for row in table.corners
        ]
        out["vertices/segment_sign"] = [[1] * len(pairs) for _ in table.corners]
        return
    glued = [
        ((s, c), (table.across[s][i], table.carry[s][i][c]))
        for s in range(n)
        for i in range(k)
        if table.across[s][i] >= 0
        for c in range(k)
        if c != i
    ]
    flat = classes_in_order(n * k, [(s * k + c, t * k + d) for (s, c), (t, d) in glued])
    out["vertices/point"] = [flat[s * k : s * k + k] for s in range(n)]

    # directed segments (simplex, from, to), followed from the first occurrence of each class
    segment, sign = {}, {}
    classes = 0
    for s in range(n):
        for a, b in pairs:
            if (s, a, b) in segment:
                continue
            reached, todo = {(s, a, b)}, [(s, a, b)]
            while todo:
                t, x, y = todo.pop()
                for i in range(k):
                    if i not in (x, y) and table.across[t][i] >= 0:
                        p = table.carry[t][i]
                        there = (table.across[t][i], p[x], p[y])
                        if there not in reached:
                            reached.add(there)
                            todo.append(there)
            reversed_too = (s, b, a) in reached
            for t, x, y in reached:
                segment[t, min(x, y), max(x, y)] = classes
                sign[t, min(x, y), max(x, y)] = 0 if reversed_too else (1 if x < y else -1)
            classes += 1
    out["vertices/segment"] = [[segment[s, a, b] for a, b in pairs] for s in range(n)]
    out["vertices/segment_sign"] = [[sign[s, a, b] for a, b in pairs] for s in range(n)]


# --------------------------------------------------------------------------------------------------
# What follows from the tables: boundary maps, ranks, graphs.  These read any mapping of the layout.


def _rows(table):
    return [list(map(int, row)) for row in table]


def boundary_maps(skeleton):
    """d1 and d2 with nodes and links, as {(row, column): integer}.

    Rows of d1 are ("vertex", v) and ("node", n); its columns and the rows of d2 ("edge", e) and ("link", l);
    columns of d2 are faces.  The boundary of an external face is its signed edges plus its link.
    """
    d1, d2 = {}, {}

    def add(matrix, key, value):
        matrix[key] = matrix.get(key, 0) + value

    def end(half):
        return ("node", half[1]) if half[0] < 0 else ("vertex", half[0])

    ends = zip(_rows(skeleton["edges/source"]), _rows(skeleton["edges/target"]), strict=True)
    for e, (a, b) in enumerate(ends):
        add(d1, (end(a), ("edge", e)), -1)
        add(d1, (end(b), ("edge", e)), 1)
    for link, (a, b) in enumerate(zip(skeleton["links/source"], skeleton["links/target"], strict=True)):
        add(d1, (("node", int(a)), ("link", link)), -1)
        add(d1, (("node", int(b)), ("link", link)), 1)
    for f, crossings in enumerate(face_crossings(skeleton)):
        for e, sign in crossings:
            add(d2, (("edge", e), f), sign)
    for link, f in enumerate(skeleton["links/face"]):
        add(d2, (("link", link), int(f)), 1)
    return d1, d2


def face_crossings(skeleton):
    """The (edge, sign) pairs of every face in order."""
    offsets = [int(o) for o in skeleton["faces/edge_offsets"]]
    edges, signs = skeleton["faces/edge"], skeleton["faces/edge_sign"]
    return [[(int(edges[x]), int(signs[x])) for x in range(a, b)] for a, b in pairwise(offsets)]


def assert_boundary_of_boundary_is_zero(skeleton):
    """d1 d2 = 0, entry by entry."""
    d1, d2 = boundary_maps(skeleton)
    columns = {}
    for (row, column), value in d1.items():
        columns.setdefault(column, []).append((row, value))
    product = {}
    for (cell, f), value in d2.items():
        for row, other in columns[cell]:
            product[row, f] = product.get((row, f), 0) + other * value
    wrong = {key: value for key, value in product.items() if value}
    assert not wrong, f"d1 d2 is not zero: {wrong}"


def rank_mod_2(rows):
    """Rank over GF(2) of rows given as sets of columns (a column present an odd number of times)."""
    by_leader, rank = {}, 0
    for row in rows:
        bits = sum(1 << column for column in row)
        while bits:
            leader = bits.bit_length()
            if leader not in by_leader:
                by_leader[leader] = bits
                rank += 1
                break
            bits ^= by_leader[leader]
    return rank


def log2_flat_z2_labellings(skeleton, counts):
    """log2 of the number of labellings of internal edges by Z2 with product 1 round each internal face."""
    rows = []
    for crossings in face_crossings(skeleton)[: counts["faces_internal"]]:
        odd = set()
        for e, _ in crossings:
            odd ^= {e}
        rows.append(odd)
    return counts["edges_internal"] - rank_mod_2(rows)


def face_length_histogram(skeleton, counts):
    """{length: number} of the internal faces."""
    offsets = [int(o) for o in skeleton["faces/vertex_offsets"]]
    lengths = [b - a for a, b in pairwise(offsets)][: counts["faces_internal"]]
    return {length: lengths.count(length) for length in sorted(set(lengths))}
