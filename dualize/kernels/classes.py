"""Kernels that find classes: components of a graph, points and segments of a glued complex."""

__all__ = ["join_pairs", "join_points", "join_segments", "number_classes", "number_segments"]


def join_pairs(one, two, parent):
    """Join ``one[x]`` and ``two[x]`` for all x.

    `parent` begins as 0, 1, 2, ...; roots are the smallest members of their classes.
    """
    for x in range(len(one)):
        a = one[x]
        b = two[x]
        while parent[a] != a:
            parent[a] = parent[parent[a]]
            a = parent[a]
        while parent[b] != b:
            parent[b] = parent[parent[b]]
            b = parent[b]
        if a < b:
            parent[b] = a
        elif b < a:
            parent[a] = b
    return 0


def number_classes(parent, number):
    """Number the classes by their smallest members, in order; returns how many there are."""
    count = 0
    for x in range(len(parent)):
        # a parent is never larger than its children, so it has its number already
        if parent[x] == x:
            number[x] = count
            count += 1
        else:
            number[x] = number[parent[x]]
    return count


def join_points(across, rank, image, parent, axes, n):
    """Join the corners ``s * K + c`` that gluings identify; `parent` as in `join_pairs`."""
    k = len(axes)
    for s in range(n):
        for i in range(k):
            t = across[s * k + i]
            if t < s:  # a gluing is seen from both sides, and once is enough
                continue
            p = rank[s * k + i]
            for c in range(k):
                if c == i:
                    continue
                a = s * k + c
                b = t * k + image[p * k + c]
                while parent[a] != a:
                    parent[a] = parent[parent[a]]
                    a = parent[a]
                while parent[b] != b:
                    parent[b] = parent[parent[b]]
                    b = parent[b]
                if a < b:
                    parent[b] = a
                elif b < a:
                    parent[a] = b
    return 0


def join_segments(across, rank, image, pair, parent, flip, folded, axes, n):
    """Join the segments ``s * W + w`` that gluings identify, with their directions.

    ``flip[x]`` is 1 where x runs against ``parent[x]`` (both from lower to higher corner); ``folded[root]``
    becomes 1 where a segment is glued to itself reversed.
    """
    k = len(axes)
    w_count = k * (k - 1) // 2
    for s in range(n):
        for i in range(k):
            t = across[s * k + i]
            if t < s:
                continue
            p = rank[s * k + i]
            for c in range(k):
                if c == i:
                    continue
                for d in range(c + 1, k):
                    if d == i:
                        continue
                    x = image[p * k + c]
                    y = image[p * k + d]
                    a = s * w_count + pair[c * k + d]
                    b = t * w_count + pair[x * k + y]
                    turn = 0 if x < y else 1
                    while parent[a] != a:
                        # halve the path, keeping the direction against the new parent
                        up = parent[a]
                        flip[a] = flip[a] ^ flip[up]
                        parent[a] = parent[up]
                        turn = turn ^ flip[a]
                        a = parent[a]
                    while parent[b] != b:
                        up = parent[b]
                        flip[b] = flip[b] ^ flip[up]
                        parent[b] = parent[up]
                        turn = turn ^ flip[b]
                        b = parent[b]
                    if a == b:
                        if turn == 1:
                            folded[a] = 1
                    elif a < b:
                        parent[b] = a
                        flip[b] = turn
                        folded[a] = folded[a] | folded[b]
                    else:
                        parent[a] = b
                        flip[a] = turn
                        folded[b] = folded[a] | folded[b]
    return 0


def number_segments(parent, flip, folded, number, direction):
    """Number the segment classes by first member; `direction` is against that member, 0 in a folded class."""
    count = 0
    for x in range(len(parent)):
        # a parent is never larger than its children, so its flip is against the root already
        up = parent[x]
        if up == x:
            number[x] = count
            count += 1
        else:
            number[x] = number[up]
            flip[x] = flip[x] ^ flip[up]
            folded[x] = folded[up]
        if folded[x] != 0:
            direction[x] = 0
        elif flip[x] != 0:
            direction[x] = -1
        else:
            direction[x] = 1
    return count
