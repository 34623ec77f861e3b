"""Kernels that walk around the ridges and lay out the faces.

A face is walked as a sequence of passages: at simplex `s` it enters through slot `a` and leaves through slot
`b`.  Across slot `b`, with carrying permutation `p`, it enters through ``p[b]`` and leaves through ``p[a]``.
Where no facet is glued to itself each side of a wedge meets exactly one other, so a walk is a closed ring or
a chain between two boundary facets and meets every wedge once: a ridge cannot fold.
"""

__all__ = ["fill_edge_faces", "fill_faces", "walk_ridges"]


def walk_ridges(
    across,
    rank,
    image,
    compose,
    pair,
    orientation,
    seen,
    ring_vertex,
    ring_code,
    ring_length,
    ring_holonomy,
    chain_vertex,
    chain_code,
    chain_length,
    progress,
    axes,
    ordered,
    lo,
    hi,
):
    """Walk the ridges whose smallest wedge lies in the simplices `lo` to `hi`.

    A walk that comes below `lo` is given up: it belongs to a lower range.  Passages are recorded in the
    order and direction of the face, the simplex in ``*_vertex`` and ``2 * wedge + (1 if i to j)`` in
    ``*_code``; the number of passages of each face in ``*_length``, and in `ring_holonomy` 1 where the ridge
    comes back permuted.

    `progress` holds five numbers: the next wedge (from ``lo * W``), recorded ring passages, rings, chain
    passages and chains.  The kernel stops early when a buffer is full, and may be called again with
    `progress` as it stands and the counts of the emptied buffers set to 0.  Returns 1 when it is done, 0
    when the buffers must be emptied first, and -1 when a single face does not fit into them.
    """
    k = len(axes)
    w_count = k * (k - 1) // 2
    n_perm = len(image) // k
    for wedge in range(progress[0], hi * w_count):
        progress[0] = wedge
        if seen[wedge] != 0:
            continue
        s0 = wedge // w_count
        w0 = wedge - s0 * w_count
        i = 0
        while pair[i * k + k - 1] < w0:
            i += 1
        j = i + 1
        while pair[i * k + j] != w0:
            j += 1
        # the direction at the smallest wedge
        a0 = i
        b0 = j
        if (orientation[s0] > 0) != ((i + j) % 2 == 0):
            a0 = j
            b0 = i
        first = progress[1]
        if progress[2] >= len(ring_length) or progress[4] >= len(chain_length):
            return 0
        pos = first
        s = s0
        a = a0
        b = b0
        q = 0
        state = 0  # 0 walking, 1 closed, 2 at the boundary, 3 below the range, 4 buffer full
        while state == 0:
            w = pair[a * k + b]
            if s < hi:
                seen[s * w_count + w] = 1
            if pos >= len(ring_vertex):
                state = 4
                break
            ring_vertex[pos] = s
            ring_code[pos] = 2 * w + (1 if a < b else 0)
            pos += 1
            h = s * k + b
            t = across[h]
            if t < 0:
                state = 2
            elif t < lo:
                state = 3
            else:
                p = rank[h]
                enter = image[p * k + b]
                b = image[p * k + a]
                a = enter
                s = t
                if ordered == 0:
                    q = compose[p * n_perm + q]
                if s == s0 and pair[a * k + b] == w0:
                    state = 1
        if state == 1:
            holonomy = 0
            for c in range(k):
                if c != a0 and c != b0 and image[q * k + c] != c:
                    holonomy = 1
            ring_length[progress[2]] = pos - first
            ring_holonomy[progress[2]] = holonomy
            progress[2] += 1
            progress[1] = pos
            continue
        if state == 2:
            # an open chain: walk back from the smallest wedge to its other end, recorded behind the first part
            middle = pos
            s = s0
            a = b0
            b = a0
            while state == 2:
                h = s * k + b
                t = across[h]
                if t < 0:
                    state = 1
                elif t < lo:
                    state = 3
                else:
                    p = rank[h]
                    enter = image[p * k + b]
                    b = image[p * k + a]
                    a = enter
                    s = t
                    w = pair[a * k + b]
                    if s < hi:
                        seen[s * w_count + w] = 1
                    if pos >= len(ring_vertex):
                        state = 4
                        break
                    ring_vertex[pos] = s
                    ring_code[pos] = 2 * w + (0 if a < b else 1)
                    pos += 1
            if state == 1:
                out = progress[3]
                if out + pos - first > len(chain_vertex):
                    state = 4
                else:
                    for back in range(pos - 1, middle - 1, -1):
                        chain_vertex[out] = ring_vertex[back]
                        chain_code[out] = ring_code[back]
                        out += 1
                    for forth in range(first, middle):
                        chain_vertex[out] = ring_vertex[forth]
                        chain_code[out] = ring_code[forth]
                        out += 1
                    chain_length[progress[4]] = pos - first
                    progress[3] = out
                    progress[4] += 1
                    continue
        if state == 4:
            # room for this face once the buffers are empty, or not at all
            seen[wedge] = 0
            return 0 if progress[1] > 0 or progress[3] > 0 else -1
    progress[0] = hi * w_count
    return 1


def fill_faces(
    vertex,
    code,
    vertex_offsets,
    edge_offsets,
    across,
    rank,
    image,
    place_of,
    slots,
    edge,
    leaves,
    twist,
    wedge,
    wedge_face,
    wedge_direction,
    face_edge,
    face_sign,
    face_place,
    against,
    face_twist,
    axes,
    interior_faces,
    lo,
    hi,
):
    """Fill the tables of the faces `lo` to `hi` from their recorded passages.

    `slots` (W, 2) are the slot pairs of the wedges.  The sum of the twists along each face, mod 2, goes to
    `face_twist`.
    """
    k = len(axes)
    w_count = k * (k - 1) // 2
    for f in range(lo, hi):
        out = edge_offsets[f]
        parity = 0
        twists = 0
        for visit in range(vertex_offsets[f], vertex_offsets[f + 1]):
            s = vertex[visit]
            w = code[visit] // 2
            a = slots[2 * w]
            b = slots[2 * w + 1]
            direction = 1
            if code[visit] % 2 == 0:
                a = slots[2 * w + 1]
                b = slots[2 * w]
                direction = -1
            wedge[visit] = w
            wedge_face[s * w_count + w] = f
            wedge_direction[s * w_count + w] = direction
            if f >= interior_faces and visit == vertex_offsets[f]:
                # an external face begins with the edge from its first node
                face_edge[out] = edge[s * k + a]
                face_sign[out] = -leaves[s * k + a]
                face_place[out] = b - (1 if b > a else 0)
                out += 1
            h = s * k + b
            e = edge[h]
            face_edge[out] = e
            face_sign[out] = leaves[h]
            # the place of the face is that of the corner a, counted at the smallest half-edge
            face_place[out] = a - (1 if a > b else 0)
            t = across[h]
            if t >= 0:
                p = rank[h]
                if t * k + image[p * k + b] < h:
                    face_place[out] = place_of[(p * k + b) * k + a]
                if leaves[h] < 0:
                    parity += 1
                twists += twist[e]
            out += 1
        against[f] = parity % 2
        face_twist[f] = twists % 2
    return 0


def fill_edge_faces(
    source, target, source_corner, target_corner, pair, wedge_face, wedge_direction, edge_face, edge_sign, axes, lo, hi
):
    """The face and its sign at every place of the edges `lo` to `hi`, gathered from the wedges."""
    k = len(axes)
    d = k - 1
    w_count = k * (k - 1) // 2
    for e in range(lo, hi):
        s = source[2 * e]
        for place in range(e * d, e * d + d):
            # the face runs along the edge when it leaves the source through it, or enters the target
            if s >= 0:
                slot = source[2 * e + 1]
                corner = source_corner[place]
                wedge = s * w_count + pair[slot * k + corner]
                along = 1 if slot > corner else -1
            else:
                slot = target[2 * e + 1]
                corner = target_corner[place]
                wedge = target[2 * e] * w_count + pair[slot * k + corner]
                along = 1 if slot < corner else -1
            edge_face[place] = wedge_face[wedge]
            edge_sign[place] = along * wedge_direction[wedge]
    return 0
