"""Kernels of the audit: gluings read back, faces closed, classes of simplices, walks over the boundary."""

__all__ = ["close_faces", "glue_edges", "join_simplices", "number_simplices", "walk_boundary"]


def glue_edges(
    source, target, source_corner, target_corner, ranks, inverse, across, rank, axes, interior, lo, hi
):
    """Read the gluings of the edges `lo` to `hi` back into `across` and `rank`.

    `across` must be -2 everywhere at the start; external edges (from `interior` on) leave -1 behind.  The
    entries need not be trusted.  Returns the first edge that is no gluing of two free slots, or -1.
    """
    k = len(axes)
    d = k - 1
    n = len(across) // k
    for e in range(lo, hi):
        s = source[2 * e]
        i = source[2 * e + 1]
        t = target[2 * e]
        j = target[2 * e + 1]
        if e >= interior:
            if s < 0:
                s = t
                i = j
            if s < 0 or s >= n or i < 0 or i >= k or across[s * k + i] != -2:
                return e
            across[s * k + i] = -1
            rank[s * k + i] = 0
            continue
        if s < 0 or s >= n or t < 0 or t >= n or i < 0 or i >= k or j < 0 or j >= k:
            return e
        a = s * k + i
        b = t * k + j
        if a == b or across[a] != -2 or across[b] != -2:
            return e
        code = 0  # the images of the corners as digits in base K
        met = 0
        for c in range(k):
            image = j if c == i else -1
            for place in range(e * d, e * d + d):
                if source_corner[place] == c:
                    if image >= 0:
                        return e
                    image = target_corner[place]
            if image < 0 or image >= k or met & (1 << image) != 0:
                return e
            met = met | (1 << image)
            code = code * k + image
        p = ranks[code]
        across[a] = t
        across[b] = s
        rank[a] = p
        rank[b] = inverse[p]
    return -1


def close_faces(
    edge_offsets,
    face_edge,
    face_sign,
    source,
    target,
    link_source,
    link_target,
    open_face,
    axes,
    interior,
    lo,
    hi,
):
    """Mark in `open_face` the faces of `lo` to `hi` whose edges, with the link, are no closed walk.

    A face whose walk closes has the boundary 0; returns the number of the others.
    """
    open_faces = 0
    for f in range(lo, hi):
        begin = edge_offsets[f]
        end = edge_offsets[f + 1]
        good = 1
        # where the walk stands: a vertex and a slot's cell, or a node
        e = face_edge[end - 1]
        if f < interior:
            if face_sign[end - 1] > 0:
                cell = target[2 * e]
                node = target[2 * e + 1]
            else:
                cell = source[2 * e]
                node = source[2 * e + 1]
            if cell >= 0:
                node = 0
        else:
            cell = -1
            node = link_target[f - interior]
        for x in range(begin, end):
            e = face_edge[x]
            if face_sign[x] > 0:
                tail = source[2 * e]
                tail_node = source[2 * e + 1]
                head = target[2 * e]
                head_node = target[2 * e + 1]
            else:
                tail = target[2 * e]
                tail_node = target[2 * e + 1]
                head = source[2 * e]
                head_node = source[2 * e + 1]
            if tail != cell or (tail < 0 and tail_node != node):
                good = 0
            cell = head
            node = head_node
        if f >= interior and (cell >= 0 or node != link_source[f - interior]):
            good = 0
        if good == 0:
            open_face[f] = 1
            open_faces += 1
    return open_faces


def join_simplices(
    across, rank, member, image, turn, compose, inverse, parent, up, irregular, axes, subsets, n
):
    """Join the simplices of one dimension that gluings identify, with the maps of their corners.

    Simplex ``s * subsets + a`` has the corners of subset `a`; `member` (subsets, K) is 1 where the subset
    holds a corner; under a permutation p subset `a` goes to ``image[p, a]`` by ``turn[p, a]``, the rank of
    the map between the two ascending orders; `compose` and `inverse` multiply such ranks (0 is the
    identity).  `parent` begins as 0, 1, 2, ..., `up` as 0: the map of a simplex to its parent.
    ``irregular[root]`` becomes 1 where a simplex is identified with itself other than by the identity.
    """
    k = len(axes)
    orders = len(inverse)
    for s in range(n):
        for i in range(k):
            t = across[s * k + i]
            if t < s:  # every gluing is seen from both sides; once is enough
                continue
            p = rank[s * k + i]
            for c in range(subsets):
                if member[c * k + i] != 0:
                    continue
                a = s * subsets + c
                b = t * subsets + image[p * subsets + c]
                g = turn[p * subsets + c]  # from a to b
                while parent[a] != a:
                    above = parent[a]
                    up[a] = compose[up[above] * orders + up[a]]
                    parent[a] = parent[above]
                    g = compose[g * orders + inverse[up[a]]]
                    a = parent[a]
                while parent[b] != b:
                    above = parent[b]
                    up[b] = compose[up[above] * orders + up[b]]
                    parent[b] = parent[above]
                    g = compose[up[b] * orders + g]
                    b = parent[b]
                if a == b:
                    if g != 0:
                        irregular[a] = 1
                elif a < b:
                    parent[b] = a
                    up[b] = inverse[g]
                    irregular[a] = irregular[a] | irregular[b]
                else:
                    parent[a] = b
                    up[a] = g
                    irregular[b] = irregular[a] | irregular[b]
    return 0


def number_simplices(parent, up, irregular, compose, orders, number):
    """Number the classes by first member; `up` then maps to the first member, `irregular` holds for all.

    Returns the number of classes.
    """
    count = 0
    for x in range(len(parent)):
        above = parent[x]
        if above == x:
            number[x] = count
            count += 1
        else:
            # a parent is never larger than its children, so its map is to the root already
            number[x] = number[above]
            up[x] = compose[up[above] * orders + up[x]]
            irregular[x] = irregular[above]
    return count


def walk_boundary(
    across,
    rank,
    image,
    compose,
    pair,
    sign,
    orientation,
    vertex,
    slot,
    node_of,
    place_ranks,
    there,
    there_rank,
    ridge_sign,
    twist,
    axes,
    lo,
    hi,
):
    """Walk from the nodes `lo` to `hi` around the ridges of their facets to the next boundary facet.

    Node n is the facet of simplex ``vertex[n]`` at ``slot[n]``; `node_of` (N, K) inverts that.  For every
    place: the node at the other end in `there`, the map of the places in `there_rank` (by `place_ranks`, a
    table over digits in base D), the sign of the map from the corners of the ridge here to those at its
    smallest wedge, both ascending, in `ridge_sign`; and in `twist` the number of twisted gluings up to the
    smallest wedge, mod 2, plus twice that to the other end, mod 2.
    """
    k = len(axes)
    d = k - 1
    w_count = k * d // 2
    n_perm = len(sign)
    for n in range(lo, hi):
        i0 = slot[n]
        for b0 in range(k):
            if b0 == i0:
                continue
            s = vertex[n]
            a = i0
            b = b0
            q = 0
            bent = 0
            smallest = s * w_count + pair[a * k + b]
            at = 0
            at_bent = 0
            t = across[s * k + b]
            while t >= 0:
                p = rank[s * k + b]
                if orientation[t] != -orientation[s] * sign[p]:
                    bent = 1 - bent
                enter = image[p * k + b]
                b = image[p * k + a]
                a = enter
                s = t
                q = compose[p * n_perm + q]
                wedge = s * w_count + pair[a * k + b]
                if wedge < smallest:
                    smallest = wedge
                    at = q
                    at_bent = bent
                t = across[s * k + b]
            code = 0
            swaps = 0
            for c in range(k):
                if c == i0:
                    continue
                corner = a if c == b0 else image[q * k + c]
                code = code * d + corner - (1 if corner > b else 0)
                if c != b0:
                    for e in range(c + 1, k):
                        if e != i0 and e != b0 and image[at * k + e] < image[at * k + c]:
                            swaps += 1
            out = n * d + b0 - (1 if b0 > i0 else 0)
            there[out] = node_of[s * k + b]
            there_rank[out] = place_ranks[code]
            ridge_sign[out] = 1 - 2 * (swaps % 2)
            twist[out] = at_bent + 2 * bent
    return 0
