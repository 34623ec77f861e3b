"""Kernels that walk around the ridges and lay out the faces.

A face is walked as a sequence of passages: at simplex `s` it enters through slot `a` and leaves through slot
`b`.  Across slot `b`, with carrying permutation `p`, it enters through ``p[b]`` and leaves through ``p[a]``.
Where no facet is glued to itself each side of a wedge meets exactly one other, so a walk is a closed ring or
a chain between two boundary facets and meets every wedge once: a ridge cannot fold.

What a step needs to know of a simplex stands in one *row* of 16 words, a cache line when words are int32:

    words  0 .. K-1    simplex across each slot
    words  5 .. 5+K-1  edge at each slot
    bytes  0 .. K-1    (behind the tenth word) rank of each carrying permutation
    bytes  5 .. 5+K-1  1 where the edge leaves here, plus 2 where it is twisted
    bytes 10 .. 10+W-1 1 where the wedge needs no walk of its own any more
"""

__all__ = ["fill_edge_faces", "label_nodes", "label_ridges", "pack_rows", "place_faces", "walk_ridges"]


def pack_rows(across, rank, edge, leaves, twist, words, octets, width, axes, lo, hi):
    """Fill the rows of the simplices `lo` to `hi`; `width` is the number of bytes of a word."""
    k = len(axes)
    w_count = k * (k - 1) // 2
    for s in range(lo, hi):
        base = s * 16 * width + 10 * width
        for i in range(k):
            h = s * k + i
            words[s * 16 + i] = across[h]
            words[s * 16 + 5 + i] = edge[h]
            octets[base + i] = rank[h]
            octets[base + 5 + i] = (1 if leaves[h] > 0 else 0) + 2 * twist[edge[h]]
        for w in range(w_count):
            octets[base + 10 + w] = 0
    return 0


def walk_ridges(
    words,
    octets,
    width,
    image,
    compose,
    place_of,
    pair,
    slots,
    orientation,
    ring_vertex,
    ring_code,
    ring_edge,
    ring_sign,
    ring_place,
    ring_length,
    ring_bits,
    chain_vertex,
    chain_code,
    chain_edge,
    chain_sign,
    chain_place,
    chain_length,
    chain_bits,
    progress,
    axes,
    ordered,
    hi,
):
    """Walk the ridges whose smallest wedge lies in the simplices up to `hi`, from where `progress` stands.

    A walk that comes to a wedge below its start is given up: that wedge walks it.  The marks on the way are
    shared between threads, and may be: a mark says that a smaller wedge has walked here, or this one itself,
    so a mark that comes late costs a walk, never a result.

    Passages are recorded in the order and direction of the face: the simplex in ``*_vertex``, ``2 * wedge +
    (1 if it passes from the lower to the higher slot)`` in ``*_code``, the edge through which it leaves in
    ``*_edge``, ``*_sign`` and ``*_place``; a chain has the edge of its first node before those.  Per face
    ``*_length`` is the number of passages and ``*_bits`` 1 for a holonomy, 2 for an odd number of internal
    edges run against, 4 for an odd number of twists.

    `progress` holds: the next wedge, recorded ring passages, rings, chain passages, chains, and a word that
    means nothing.  Returns 1 when done, 0 when the buffers must be emptied first (then call again with the
    counts at 0), and -1 when a single face does not fit into empty buffers.
    """
    k = len(axes)
    w_count = k * (k - 1) // 2
    n_perm = len(image) // k
    stride = 16 * width
    bytes_at = 10 * width
    touched = 0
    for start in range(progress[0], hi * w_count):
        s0 = start // w_count
        w0 = start - s0 * w_count
        if w0 == 0:
            # read ahead: the rows that the next walks need, in loads that do not wait for each other
            ahead = s0 + 6
            if ahead < hi:
                for i in range(k):
                    t = words[ahead * 16 + i]
                    if t >= 0:
                        touched ^= words[t * 16]
            ahead = s0 + 3
            if ahead < hi:
                for i in range(k):
                    t = words[ahead * 16 + i]
                    if t >= 0:
                        for j in range(k):
                            u = words[t * 16 + j]
                            if u >= 0:
                                touched ^= words[u * 16]
        if octets[s0 * stride + bytes_at + 10 + w0] != 0:
            continue
        i = slots[2 * w0]
        j = slots[2 * w0 + 1]
        # the direction at the smallest wedge
        a0 = i
        b0 = j
        if (orientation[s0] > 0) != ((i + j) % 2 == 0):
            a0 = j
            b0 = i
        if progress[2] >= len(ring_length) or progress[4] >= len(chain_length):
            progress[0] = start
            return 0
        first = progress[1]
        pos = first
        s = s0
        a = a0
        b = b0
        w = w0
        q = 0
        bits = 0
        state = 0  # 0 walking, 1 closed, 2 at the boundary, 3 met a smaller wedge, 4 buffer full
        while state == 0:
            base = s * stride + bytes_at
            octets[base + 10 + w] = 1
            if pos >= len(ring_vertex):
                state = 4
                break
            p = octets[base + b]
            flag = octets[base + 5 + b]
            t = words[s * 16 + b]
            ring_vertex[pos] = s
            ring_code[pos] = 2 * w + (1 if a < b else 0)
            ring_edge[pos] = words[s * 16 + 5 + b]
            ring_sign[pos] = 1 if flag & 1 else -1
            # the place of the face is that of corner a, counted at the smallest half-edge
            place = a - (1 if a > b else 0)
            if t < 0:
                state = 2
            else:
                enter = image[p * k + b]
                if ordered == 0:
                    q = compose[p * n_perm + q]
                    if t * k + enter < s * k + b:
                        place = place_of[(p * k + b) * k + a]
                bits ^= (flag & 2) * 2 + (2 - 2 * (flag & 1))
                b = image[p * k + a]
                a = enter
                s = t
                w = pair[a * k + b]
                if s == s0 and w == w0:
                    state = 1
                elif s < s0 or (s == s0 and w < w0):
                    state = 3
            ring_place[pos] = place
            pos += 1
        if state == 1:
            for c in range(k):
                if c != a0 and c != b0 and image[q * k + c] != c:
                    bits |= 1
            ring_length[progress[2]] = pos - first
            ring_bits[progress[2]] = bits
            progress[2] += 1
            progress[1] = pos
        elif state == 2:
            # an open chain: walk back from its smallest wedge to the other end; what is found there comes
            # before the first part, in reverse, and the face leaves through the slot we came in by
            middle = pos
            s = s0
            a = b0
            b = a0
            while state == 2:
                base = s * stride + bytes_at
                t = words[s * 16 + b]
                if t < 0:
                    state = 1
                    break
                p = octets[base + b]
                enter = image[p * k + b]
                leave = image[p * k + a]
                s = t
                a = enter
                b = leave
                w = pair[a * k + b]
                if s < s0 or (s == s0 and w < w0):
                    state = 3
                    break
                if pos >= len(ring_vertex):
                    state = 4
                    break
                base = s * stride + bytes_at
                octets[base + 10 + w] = 1
                flag = octets[base + 5 + a]
                place = b - (1 if b > a else 0)
                if ordered == 0:
                    # through slot a the face goes on to where we came from
                    back = octets[base + a]
                    if words[s * 16 + a] * k + image[back * k + a] < s * k + a:
                        place = place_of[(back * k + a) * k + b]
                ring_vertex[pos] = s
                ring_code[pos] = 2 * w + (0 if a < b else 1)
                ring_edge[pos] = words[s * 16 + 5 + a]
                ring_sign[pos] = 1 if flag & 1 else -1
                ring_place[pos] = place
                bits ^= (flag & 2) * 2 + (2 - 2 * (flag & 1))
                pos += 1
            if state == 1:
                out = progress[3]
                steps = out + progress[4]
                if out + pos - first > len(chain_vertex) or steps + pos - first + 1 > len(chain_edge):
                    state = 4
                else:
                    chain_edge[steps] = words[s * 16 + 5 + b]
                    chain_sign[steps] = -1 if octets[s * stride + bytes_at + 5 + b] & 1 else 1
                    chain_place[steps] = a - (1 if a > b else 0)
                    steps += 1
                    for x in range(pos - first):
                        y = pos - 1 - x if x < pos - middle else first + x - (pos - middle)
                        chain_vertex[out + x] = ring_vertex[y]
                        chain_code[out + x] = ring_code[y]
                        chain_edge[steps + x] = ring_edge[y]
                        chain_sign[steps + x] = ring_sign[y]
                        chain_place[steps + x] = ring_place[y]
                    chain_length[progress[4]] = pos - first
                    chain_bits[progress[4]] = bits
                    progress[3] += pos - first
                    progress[4] += 1
        if state == 4:
            # there is room once the buffers are empty, or for this face not at all
            octets[s0 * stride + bytes_at + 10 + w0] = 0
            progress[0] = start
            return 0 if progress[1] > 0 or progress[3] > 0 else -1
    progress[0] = hi * w_count
    progress[5] = touched
    return 1


def place_faces(
    part_vertex,
    part_code,
    part_edge,
    part_sign,
    part_place,
    part_length,
    part_bits,
    vertex_offsets,
    edge_offsets,
    vertex,
    wedge,
    edge,
    sign,
    place,
    against,
    twists,
    wedge_face,
    wedge_direction,
    w_count,
    faces,
    first_face,
    first_visit,
    first_step,
    lead,
):
    """Put `faces` recorded faces into the tables, from face `first_face` on.

    `lead` is 1 for chains, whose edges are one more than their vertices, and 0 for rings.
    """
    visit = first_visit
    step = first_step
    x = 0
    y = 0
    for number in range(faces):
        f = first_face + number
        for _ in range(lead):
            edge[step] = part_edge[y]
            sign[step] = part_sign[y]
            place[step] = part_place[y]
            step += 1
            y += 1
        for _ in range(part_length[number]):
            s = part_vertex[x]
            w = part_code[x] // 2
            vertex[visit] = s
            wedge[visit] = w
            wedge_face[s * w_count + w] = f
            wedge_direction[s * w_count + w] = 1 if part_code[x] % 2 == 1 else -1
            edge[step] = part_edge[y]
            sign[step] = part_sign[y]
            place[step] = part_place[y]
            visit += 1
            x += 1
            step += 1
            y += 1
        vertex_offsets[f + 1] = visit
        edge_offsets[f + 1] = step
        against[f] = (part_bits[number] >> 1) & 1
        twists[f] = (part_bits[number] >> 2) & 1
    return 0


def fill_edge_faces(
    source,
    target,
    source_corner,
    target_corner,
    pair,
    wedge_face,
    wedge_direction,
    edge_face,
    edge_sign,
    axes,
    lo,
    hi,
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


def label_nodes(corners, vertex, slot, labels, axes, lo, hi):
    """Labels of the boundary facets `lo` to `hi` in reference order, into `labels` (B, D)."""
    k = len(axes)
    for n in range(lo, hi):
        out = n * (k - 1)
        for c in range(k):
            if c != slot[n]:
                labels[out] = corners[vertex[n] * k + c]
                out += 1
    return 0


def label_ridges(corners, vertex, wedge, offsets, slots, labels, axes, lo, hi):
    """Labels of the ridges of the faces `lo` to `hi`, ascending, read at their first passages."""
    k = len(axes)
    for f in range(lo, hi):
        visit = offsets[f]
        s = vertex[visit]
        w = wedge[visit]
        begin = f * (k - 2)
        out = begin
        for c in range(k):
            if c != slots[2 * w] and c != slots[2 * w + 1]:
                x = corners[s * k + c]
                at = out
                while at > begin and labels[at - 1] > x:
                    labels[at] = labels[at - 1]
                    at -= 1
                labels[at] = x
                out += 1
    return 0
