"""Kernels that ask whether the links of the points are simply connected, all links at once.

The link of a point is a complex of dimension D - 1 whose top simplices are the corners ``s * K + c`` of
the triangulation; its *generators* cross its facets, the half-generator ``(s * K + c) * K + i`` through slot
i, and its *rings* go around its ridges, with the items ``(s * K + c) * W + pair[i, j]``.  Generators of a
spanning forest are trivial; a ring that meets just one generator not known to be trivial, and once, shows
that it is.
"""

__all__ = ["kill_generators", "lay_rings", "span_links"]


def span_links(across, rank, image, known, met, queue, axes, n):
    """Mark the half-generators of a spanning forest in `known`; `known` and `met` must be 0 at the start."""
    k = len(axes)
    for first in range(n * k):
        if met[first] != 0:
            continue
        met[first] = 1
        queue[0] = first
        head = 0
        tail = 1
        while head < tail:
            x = queue[head]
            head += 1
            s = x // k
            c = x - s * k
            for i in range(k):
                t = across[s * k + i]
                if i == c or t < 0:
                    continue
                p = rank[s * k + i]
                y = t * k + image[p * k + c]
                if met[y] == 0:
                    met[y] = 1
                    known[x * k + i] = 1
                    known[y * k + image[p * k + i]] = 1
                    queue[tail] = y
                    tail += 1
    return 0


def lay_rings(across, rank, image, pair, known, ring, unknown, axes, n):
    """Give every item the first item of its ring, -1 where the walk is open; `ring` must be -2 at the start.

    ``unknown[first]`` becomes the number of passages through generators not known to be trivial.
    """
    k = len(axes)
    w_count = k * (k - 1) // 2
    for s0 in range(n):
        for c0 in range(k):
            for i0 in range(k):
                for j0 in range(i0 + 1, k):
                    first = (s0 * k + c0) * w_count + pair[i0 * k + j0]
                    if i0 == c0 or j0 == c0 or ring[first] != -2:
                        continue
                    count = 0
                    mark = first
                    side = 0
                    while side < 2:
                        s = s0
                        c = c0
                        a = i0
                        b = j0
                        if side == 1:
                            a = j0
                            b = i0
                        going = 1
                        while going == 1:
                            ring[(s * k + c) * w_count + pair[a * k + b]] = mark
                            t = across[s * k + b]
                            if t < 0:
                                going = 0
                            else:
                                if known[(s * k + c) * k + b] == 0:
                                    count += 1
                                p = rank[s * k + b]
                                enter = image[p * k + b]
                                b = image[p * k + a]
                                a = enter
                                c = image[p * k + c]
                                s = t
                                if s == s0 and c == c0 and a == i0 and b == j0:
                                    going = 2
                        if going == 2:
                            side = 2
                        elif mark == first:  # open: mark it again from its start, then the other side
                            mark = -1
                            side = 0
                        else:
                            side += 1
                    if mark == first:
                        unknown[first] = count
    return 0


def kill_generators(across, rank, image, pair, slots, known, ring, unknown, stack, axes, n):
    """Mark in `known` every generator that the rings show to be trivial, one after the other.

    `stack` must have room for one entry per ring.
    """
    k = len(axes)
    w_count = k * (k - 1) // 2
    height = 0
    for item in range(n * k * w_count):
        if ring[item] == item and unknown[item] == 1:
            stack[height] = item
            height += 1
    while height > 0:
        height -= 1
        item = stack[height]
        if unknown[item] != 1:
            continue
        x = item // w_count
        w = item - x * w_count
        s = x // k
        c = x - s * k
        a = slots[2 * w]
        b = slots[2 * w + 1]
        while known[(s * k + c) * k + b] != 0:
            p = rank[s * k + b]
            s = across[s * k + b]
            enter = image[p * k + b]
            b = image[p * k + a]
            a = enter
            c = image[p * k + c]
        known[(s * k + c) * k + b] = 1
        p = rank[s * k + b]
        known[(across[s * k + b] * k + image[p * k + c]) * k + image[p * k + b]] = 1
        # every passage through this generator leaves one wedge on this side of it
        for a in range(k):
            if a == c or a == b:  # noqa: SIM109 (numba knows no tuples of two widths)
                continue
            lead = ring[(s * k + c) * w_count + pair[a * k + b]]
            if lead >= 0:
                unknown[lead] -= 1
                if unknown[lead] == 1:
                    stack[height] = lead
                    height += 1
    return 0
