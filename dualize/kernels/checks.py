"""Kernels that verify the tables of a skeleton against each other, entry by entry.

They return ``(rule, index, wanted)``: 0 for `rule` when everything holds, else the number of the broken rule,
the flat index of the first wrong entry in that rule's table and the value it should have (where there is
one).  `dualize.check.RULES` says which table a rule reads and puts it into words.

Every entry must be in the range of its kind before these kernels see it; the two sides of a skeleton file
they compare are then safe as indices.
"""

__all__ = [
    "breadth_first",
    "check_edges",
    "check_faces",
    "check_labels",
    "spread_points",
    "spread_segments",
]

# Rules of edges
SOURCE_IS_NODE = 1
TARGET_IS_NODE = 2
TARGET_IS_SOURCE = 3
TARGET_NOT_NODE = 5
SOURCE_NODE = 6
TARGET_NODE = 7
EDGE_AT_SOURCE = 8
LEAVES_AT_SOURCE = 9
EDGE_AT_TARGET = 10
LEAVES_AT_TARGET = 11
SOURCE_CORNER_NODE = 12
SOURCE_CORNERS = 13
SOURCE_CORNER_ORDER = 14
TARGET_CORNER_NODE = 15
TARGET_CORNERS = 16
TARGET_CORNER_ORDER = 17
TWIST = 18
SOURCE_ARRIVES = 19
TWISTED_SOURCE = 20
TARGET_LEAVES = 21

# Rules of faces
FACE_VERTEX = 30
FACE_WEDGE = 31
WEDGE_DIRECTION = 32
WEDGE_FACE = 33
FACE_START = 34
FACE_EDGE = 35
FACE_EDGE_SIGN = 36
FACE_PLACE = 37
EDGE_FACE = 38
EDGE_FACE_SIGN = 39
FACE_ENDS_INSIDE = 40
FACE_GOES_ON = 41
FACE_NOT_FIRST = 42
DIRECTION_RULE = 43
AGAINST = 44

# Rules of labels
TARGET_LABEL = 50
NODE_LABEL = 51


def check_edges(
    source,
    target,
    source_corner,
    target_corner,
    twist,
    edge,
    leaves,
    orientation,
    ranks,
    power,
    across,
    rank,
    smallest,
    scrambled,
    axes,
    interior,
    lo,
    hi,
):
    """Verify the edges `lo` to `hi` with their ends, corners and twists; read the gluings back.

    `ranks` and ``power[c] = K**(D - c)`` turn images into the rank of a permutation.  Fills `across` and
    `rank` (V K) at the half-edges of these edges, the smallest half-edge of each in `smallest`, and in
    `scrambled` 1 where the corners do not ascend at the larger one.
    """
    k = len(axes)
    d = k - 1
    for e in range(lo, hi):
        s = source[2 * e]
        i = source[2 * e + 1]
        t = target[2 * e]
        j = target[2 * e + 1]
        h = s * k + i
        g = t * k + j
        if e < interior:
            if s < 0:
                return SOURCE_IS_NODE, 2 * e, 0
            if t < 0:
                return TARGET_IS_NODE, 2 * e, 0
            if h == g:
                return TARGET_IS_SOURCE, 2 * e, 0
        elif s < 0:
            if t < 0:
                return TARGET_IS_NODE, 2 * e, 0
            if i != e - interior:
                return SOURCE_NODE, 2 * e + 1, e - interior
        else:
            if t >= 0:
                return TARGET_NOT_NODE, 2 * e, -1
            if j != e - interior:
                return TARGET_NODE, 2 * e + 1, e - interior
        # Every end finds its edge again at the vertex.  As there are as many ends as half-edges, every
        # half-edge is then the end of exactly one edge.
        if s >= 0:
            if edge[h] != e:
                return EDGE_AT_SOURCE, h, e
            if leaves[h] != 1:
                return LEAVES_AT_SOURCE, h, 1
        if t >= 0:
            if edge[g] != e:
                return EDGE_AT_TARGET, g, e
            if leaves[g] != -1:
                return LEAVES_AT_TARGET, g, -1
        # the corners at either end: each but the slot once; in order at the smallest half-edge
        row = e * d
        source_first = t < 0 or (s >= 0 and h < g)
        source_sign = 1
        target_sign = 1
        met = 0
        descents = 0
        for x in range(d):
            c = source_corner[row + x]
            if s < 0:
                if c != -1:
                    return SOURCE_CORNER_NODE, row + x, -1
            else:
                if c < 0 or c == i or (met >> c) & 1 == 1:
                    return SOURCE_CORNERS, row + x, 0
                met |= 1 << c
                for y in range(x):
                    if source_corner[row + y] > c:
                        source_sign = -source_sign
                        descents = 1
                        if source_first:
                            return SOURCE_CORNER_ORDER, row + x, 0
        met = 0
        for x in range(d):
            c = target_corner[row + x]
            if t < 0:
                if c != -1:
                    return TARGET_CORNER_NODE, row + x, -1
            else:
                if c < 0 or c == j or (met >> c) & 1 == 1:
                    return TARGET_CORNERS, row + x, 0
                met |= 1 << c
                for y in range(x):
                    if target_corner[row + y] > c:
                        target_sign = -target_sign
                        descents = 1
                        if not source_first:
                            return TARGET_CORNER_ORDER, row + x, 0
        scrambled[e] = descents
        # the rule of leaving and arriving, and the twist where both sides cannot have it
        up = 0
        if s >= 0:
            up = orientation[s] * source_sign
            if i % 2 == 1:
                up = -up
        down = 0
        if t >= 0:
            down = orientation[t] * target_sign
            if j % 2 == 1:
                down = -down
        wanted = 1 if up == down else 0
        if twist[e] != wanted:
            return TWIST, e, wanted
        if wanted == 1:
            if h > g:
                return TWISTED_SOURCE, 2 * e, t
        elif up == -1:
            return SOURCE_ARRIVES, 2 * e, 0
        elif down == 1:
            return TARGET_LEAVES, 2 * e, 0
        # the gluing, from both sides
        smallest[e] = h if source_first else g
        if e >= interior:
            half = h if source_first else g
            across[half] = -1
            rank[half] = 0
        else:
            forth = j * power[i]
            back = i * power[j]
            for x in range(row, row + d):
                forth += target_corner[x] * power[source_corner[x]]
                back += source_corner[x] * power[target_corner[x]]
            across[h] = t
            across[g] = s
            rank[h] = ranks[forth]
            rank[g] = ranks[back]
    return 0, 0, 0


def check_faces(
    vertex_offsets,
    edge_offsets,
    vertex,
    wedge,
    face_edge,
    face_sign,
    face_place,
    against,
    wedge_face,
    wedge_direction,
    edge_face,
    edge_face_sign,
    edge,
    leaves,
    source_corner,
    target_corner,
    twist,
    orientation,
    across,
    rank,
    image,
    compose,
    pair,
    slots,
    smallest,
    twists,
    holonomy,
    axes,
    interior_faces,
    ordered,
    lo,
    hi,
):
    """Follow the faces `lo` to `hi` through the gluings and compare every cell they list.

    Fills `smallest` with the smallest wedge of each face, `twists` with the sum of twists along it mod 2,
    and `holonomy` with 1 where an internal face comes back permuted (looked for where `ordered` is 0).

    A passage has one successor and one predecessor, and a wedge one face and one direction.  A closed list
    that meets its first wedge once and a list between two boundary facets therefore meet no wedge twice, and
    as there are as many visits as wedges, every wedge is visited.
    """
    k = len(axes)
    d = k - 1
    w_count = k * d // 2
    n_perm = len(image) // k
    for f in range(lo, hi):
        first = vertex_offsets[f]
        last = vertex_offsets[f + 1] - 1
        out = edge_offsets[f]
        external = f >= interior_faces
        least = vertex[first] * w_count + wedge[first]
        runs_against = 0
        twisted = 0
        q = 0
        t = 0
        enter = 0
        leave = 0
        for visit in range(first, last + 1):
            s = vertex[visit]
            w = wedge[visit]
            x = s * w_count + w
            forward = wedge_direction[x]
            if visit > first:
                if s != t:
                    return FACE_VERTEX, visit, t
                if w != pair[enter * k + leave]:
                    return FACE_WEDGE, visit, pair[enter * k + leave]
                if (forward > 0) != (enter < leave):
                    return WEDGE_DIRECTION, x, -forward
                if x <= least:
                    if not external:
                        return FACE_NOT_FIRST, visit, 0
                    least = x
            if wedge_face[x] != f:
                return WEDGE_FACE, x, f
            a = slots[2 * w]
            b = slots[2 * w + 1]
            if forward < 0:
                a = slots[2 * w + 1]
                b = slots[2 * w]
            steps = 1
            if external and visit == first:
                if across[s * k + a] >= 0:
                    return FACE_START, visit, 0
                steps = 2
            for step in range(steps):
                # an external face also lists the edge by which it enters its first vertex
                entering = step == 0 and steps == 2
                slot = a if entering else b
                corner = b if entering else a
                h = s * k + slot
                e = edge[h]
                sign = leaves[h]
                place = e * d + face_place[out]
                if face_edge[out] != e:
                    return FACE_EDGE, out, e
                if sign > 0:
                    if source_corner[place] != corner:
                        return FACE_PLACE, out, corner
                elif target_corner[place] != corner:
                    return FACE_PLACE, out, corner
                if entering:
                    sign = -sign
                if face_sign[out] != sign:
                    return FACE_EDGE_SIGN, out, sign
                if edge_face[place] != f:
                    return EDGE_FACE, place, f
                if edge_face_sign[place] != sign:
                    return EDGE_FACE_SIGN, place, sign
                twisted += twist[e]
                out += 1
            t = across[h]
            if t < 0:
                if not external or visit < last:
                    return FACE_ENDS_INSIDE, visit, 0
            else:
                if external and visit == last:
                    return FACE_GOES_ON, visit, 0
                if sign < 0:
                    runs_against += 1
                p = rank[h]
                enter = image[p * k + b]
                leave = image[p * k + a]
                if ordered == 0:
                    q = compose[p * n_perm + q]
        if not external:
            # The list must close.  It cannot come back to its first wedge the other way: half-way round it
            # would have to cross a facet that is glued to itself.
            s = vertex[first]
            w = wedge[first]
            if t != s:
                return FACE_VERTEX, first, t
            if w != pair[enter * k + leave]:
                return FACE_WEDGE, first, pair[enter * k + leave]
            turned = 0
            for c in range(k):
                if c != enter and c != leave and image[q * k + c] != c:
                    turned = 1
            holonomy[f] = turned
        s = least // w_count
        w = least - s * w_count
        forward = orientation[s]
        if (slots[2 * w] + slots[2 * w + 1]) % 2 == 1:
            forward = -forward
        if wedge_direction[least] != forward:
            return DIRECTION_RULE, least, forward
        if against[f] != runs_against % 2:
            return AGAINST, f, runs_against % 2
        smallest[f] = least
        twists[f] = twisted % 2
    return 0, 0, 0


def check_labels(source, target, source_corner, target_corner, corners, node_corners, axes, interior, lo, hi):
    """Compare the labels at both ends of the edges `lo` to `hi`, place by place."""
    k = len(axes)
    d = k - 1
    for e in range(lo, hi):
        s = source[2 * e] * k
        t = target[2 * e] * k
        for place in range(e * d, e * d + d):
            if e < interior:
                label = corners[s + source_corner[place]]
                if corners[t + target_corner[place]] != label:
                    return TARGET_LABEL, t + target_corner[place], label
            else:
                label = corners[s + source_corner[place]] if s >= 0 else corners[t + target_corner[place]]
                if node_corners[place - interior * d] != label:
                    return NODE_LABEL, place - interior * d, label
    return 0, 0, 0


def breadth_first(neighbour, component, via, queue, axes):
    """Number the components of a graph by their smallest cells and record how each cell is reached.

    `neighbour` (n, K) holds the neighbours of each cell, -1 for none; `component` must be -1 at the start.
    ``via[y]`` becomes the position in `neighbour` from which y is first reached, breadth first from the
    smallest cell of its component; -1 for that one.  Returns the number of components.
    """
    k = len(axes)
    parts = 0
    for first in range(len(component)):
        if component[first] >= 0:
            continue
        component[first] = parts
        via[first] = -1
        queue[0] = first
        head = 0
        tail = 1
        while head < tail:
            x = queue[head]
            head += 1
            for i in range(k):
                y = neighbour[x * k + i]
                if y >= 0 and component[y] < 0:
                    component[y] = parts
                    via[y] = x * k + i
                    queue[tail] = y
                    tail += 1
        parts += 1
    return parts


def spread_points(across, rank, image, number, queue, axes):
    """Classes of the corners ``s * K + c`` under the gluings, numbered by first occurrence.

    `number` must be -1 at the start.  Returns how many classes there are.
    """
    k = len(axes)
    count = 0
    for first in range(len(number)):
        if number[first] >= 0:
            continue
        number[first] = count
        queue[0] = first
        head = 0
        tail = 1
        while head < tail:
            s = queue[head] // k
            c = queue[head] - s * k
            head += 1
            for i in range(k):
                t = across[s * k + i]
                if i != c and t >= 0:
                    y = t * k + image[rank[s * k + i] * k + c]
                    if number[y] < 0:
                        number[y] = count
                        queue[tail] = y
                        tail += 1
        count += 1
    return count


def spread_segments(across, rank, image, pair, slots, number, reached, queue, axes):
    """Classes of the segments ``s * W + w`` under the gluings, numbered by first occurrence.

    Directed segments ``2 x + (0 up, 1 down)`` are followed from the first of each class, upwards (from lower
    to higher corner); `queue` has room for two of each segment.  `number` must be -1 and `reached` 0 at the
    start; bit 0 of ``reached[x]`` becomes 1 where x is reached upwards, bit 1 where downwards.
    """
    k = len(axes)
    w_count = k * (k - 1) // 2
    count = 0
    for first in range(len(number)):
        if number[first] >= 0:
            continue
        number[first] = count
        reached[first] = 1
        queue[0] = 2 * first
        head = 0
        tail = 1
        while head < tail:
            x = queue[head] // 2
            down = queue[head] - 2 * x
            head += 1
            s = x // w_count
            w = x - s * w_count
            a = slots[2 * w]
            b = slots[2 * w + 1]
            for i in range(k):
                t = across[s * k + i]
                if i != a and i != b and t >= 0:
                    p = rank[s * k + i]
                    u = image[p * k + a]
                    v = image[p * k + b]
                    y = t * w_count + pair[u * k + v]
                    turn = down if u < v else 1 - down
                    if (reached[y] >> turn) & 1 == 0:
                        reached[y] |= 1 << turn
                        number[y] = count
                        queue[tail] = 2 * y + turn
                        tail += 1
        count += 1
    return count
