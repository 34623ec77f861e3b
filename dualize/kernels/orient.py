"""Kernels that spread the orientation and lay out the edges."""

__all__ = ["count_edges", "fill_edges", "spread_orientation"]


def spread_orientation(across, rank, sign, written, orientation, component, queue, axes):
    """Breadth-first over shared facets; `orientation` must be zero at the start.

    Each component starts at its lowest simplex, positive as written, and neighbours induce opposite
    orientations on a shared facet.  Fills `orientation` and `component`; returns the number of components.
    """
    k = len(axes)
    parts = 0
    for first in range(len(written)):
        if orientation[first] != 0:
            continue
        orientation[first] = written[first]
        component[first] = parts
        queue[0] = first
        head = 0
        tail = 1
        while head < tail:
            s = queue[head]
            head += 1
            here = orientation[s]
            for i in range(k):
                t = across[s * k + i]
                if t >= 0 and orientation[t] == 0:
                    orientation[t] = -here * sign[rank[s * k + i]]
                    component[t] = parts
                    queue[tail] = t
                    tail += 1
        parts += 1
    return parts


def count_edges(across, rank, image, keeping, axes, lo, hi):
    """Interior edges whose smallest half-edge lies in the simplices `lo` to `hi`, boundary facets there,
    and gluings whose shared corners do not ascend on both sides."""
    k = len(axes)
    interior = 0
    boundary = 0
    scrambled = 0
    for s in range(lo, hi):
        for i in range(k):
            h = s * k + i
            t = across[h]
            if t < 0:
                boundary += 1
            else:
                p = rank[h]
                j = image[p * k + i]
                if h < t * k + j:
                    interior += 1
                    if p != keeping[i * k + j]:
                        scrambled += 1
    return interior, boundary, scrambled


def fill_edges(
    across,
    rank,
    image,
    sign,
    orientation,
    edge,
    leaves,
    source,
    target,
    twist,
    source_corner,
    target_corner,
    node_vertex,
    node_slot,
    node_orientation,
    axes,
    interior,
    next_edge,
    next_node,
    lo,
    hi,
):
    """Number the edges whose smallest half-edge lies in the simplices `lo` to `hi` and fill their rows.

    `interior` is the number of interior edges of the whole complex; `next_edge` and `next_node` the first
    numbers of this range.  Returns the number of twisted edges.
    """
    k = len(axes)
    d = k - 1
    twisted = 0
    for s in range(lo, hi):
        for i in range(k):
            h = s * k + i
            up = orientation[s]
            if i % 2 == 1:
                up = -up
            t = across[h]
            if t < 0:
                x = interior + next_node
                edge[h] = x
                leaves[h] = up
                twist[x] = 0
                node_vertex[next_node] = s
                node_slot[next_node] = i
                node_orientation[next_node] = up
                place = x * d
                if up > 0:
                    source[2 * x] = s
                    source[2 * x + 1] = i
                    target[2 * x] = -1
                    target[2 * x + 1] = next_node
                    for c in range(k):
                        if c != i:
                            source_corner[place] = c
                            target_corner[place] = -1
                            place += 1
                else:
                    source[2 * x] = -1
                    source[2 * x + 1] = next_node
                    target[2 * x] = s
                    target[2 * x + 1] = i
                    for c in range(k):
                        if c != i:
                            source_corner[place] = -1
                            target_corner[place] = c
                            place += 1
                next_node += 1
                continue
            p = rank[h]
            j = image[p * k + i]
            g = t * k + j
            if h > g:
                continue
            x = next_edge
            next_edge += 1
            edge[h] = x
            edge[g] = x
            if orientation[t] == -orientation[s] * sign[p]:
                twist[x] = 0
            else:
                twist[x] = 1
                twisted += 1
                up = 1
            leaves[h] = up
            leaves[g] = -up
            place = x * d
            if up > 0:
                source[2 * x] = s
                source[2 * x + 1] = i
                target[2 * x] = t
                target[2 * x + 1] = j
                for c in range(k):
                    if c != i:
                        source_corner[place] = c
                        target_corner[place] = image[p * k + c]
                        place += 1
            else:
                source[2 * x] = t
                source[2 * x + 1] = j
                target[2 * x] = s
                target[2 * x + 1] = i
                for c in range(k):
                    if c != i:
                        source_corner[place] = image[p * k + c]
                        target_corner[place] = c
                        place += 1
    return twisted
