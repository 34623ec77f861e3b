"""Kernels for the group of a foam: a spanning tree, and generators that short relators make equal.

Generators are numbered from 1, and a negative number is an inverse.  Relator `r` has the letters
``letter[offsets[r]:offsets[r] + length[r]]``.
"""

__all__ = ["merge_generators", "span_tree"]


def span_tree(vertex_edge, source, target, tree, queue, axes, interior, n):
    """Mark in `tree` the edges of a spanning tree of each component, breadth first from its lowest vertex.

    `queue` has room for n vertices and then n marks, which must be 0.  Returns the number of components.
    """
    k = len(axes)
    parts = 0
    for first in range(n):
        if queue[n + first] != 0:
            continue
        parts += 1
        queue[n + first] = 1
        queue[0] = first
        head = 0
        tail = 1
        while head < tail:
            v = queue[head]
            head += 1
            for i in range(k):
                e = vertex_edge[v * k + i]
                if e >= interior:
                    continue
                t = target[2 * e]
                if t == v:
                    t = source[2 * e]
                if queue[n + t] == 0:
                    queue[n + t] = 1
                    tree[e] = 1
                    queue[tail] = t
                    tail += 1
    return parts


def merge_generators(offsets, letter, length, parent, weight, head, end, follow, relator, stack, inside, n):
    """Use every relator of one letter, or of two different ones, until none is left.

    ``parent[x]`` becomes 0 where generator `x` is trivial, else a generator or inverse that it equals; roots
    are their own parents, as all are at the start.  The places of generator `x` in `letter` are a list from
    ``head[x]`` to ``end[x]`` by `follow`, -1 behind the last, `weight` long; `relator` says where they lie.
    `stack` must hold all n relators, and `inside` be 1 for each.
    """
    height = n
    while height > 0:
        height -= 1
        r = stack[height]
        inside[r] = 0
        off = offsets[r]
        m = 0
        for p in range(off, off + length[r]):
            x = letter[p]
            s = 1
            if x < 0:
                s = -1
                x = -x
            while x != 0 and parent[x] != x:
                up = parent[x]
                if up < 0:
                    s = -s
                    up = -up
                x = up
            if x == 0:
                continue
            y = s * x
            if m > 0 and letter[off + m - 1] == -y:
                m -= 1
            else:
                letter[off + m] = y
                m += 1
        low = 0
        while m - low > 1 and letter[off + low] == -letter[off + m - 1]:
            low += 1
            m -= 1
        m -= low
        if low > 0:
            for p in range(off, off + m):
                letter[p] = letter[p + low]
        length[r] = m
        gone = 0
        if m == 1:
            gone = abs(letter[off])
            parent[gone] = 0
        elif m == 2 and abs(letter[off]) != abs(letter[off + 1]):
            gone = abs(letter[off])
            kept = abs(letter[off + 1])
            if weight[gone] > weight[kept]:
                gone, kept = kept, gone
            parent[gone] = kept
            if (letter[off] > 0) == (letter[off + 1] > 0):
                parent[gone] = -kept
        if gone == 0:
            continue
        length[r] = 0
        p = head[gone]
        while p >= 0:
            q = relator[p]
            if inside[q] == 0 and length[q] > 0:
                inside[q] = 1
                stack[height] = q
                height += 1
            p = follow[p]
        if parent[gone] != 0 and head[gone] >= 0:
            follow[end[kept]] = head[gone]
            end[kept] = end[gone]
            weight[kept] += weight[gone]
    return 0
