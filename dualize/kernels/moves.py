"""Kernels for bistellar moves on a changing complex: a walk, and the table of simplices that are there.

The complex lies in slots ``0 .. n - 1`` without holes: the gluing table `across`, `rank`, for labelled
complexes the points `corner`, and for every slot its `birth` (the number of the simplex: the input's are
``0 .. N - 1``, every new one gets the next) and its `orientation`; `slot_of` leads from a birth to its slot.

A move takes a simplex A whose star is A * (boundary of B), ``|A| + |B| = D + 2``, and puts
(boundary of A) * B in its place: `kind` = |B| simplices go and |A| come.  Inside a move the points have
*names*: 0 .. D are the corners of the simplex from which A was seen, D + 1 is the one point more.  The old
simplices are called by the name in B they lack, the new ones by the name in A they lack.

In a labelled complex B must not be there already.  All simplices of 2 to D points are kept in a hash table
with linear probing: a simplex of points x < y < z < w is the two words (x + 1, y + 1), (z + 1, w + 1).
"""

__all__ = [
    "BOUNDARY",
    "DEGREE",
    "EXISTS",
    "FULL",
    "GIVEN",
    "PINCHED",
    "RANDOM",
    "STATE",
    "SWEEP",
    "UNKNOWN",
    "average_points",
    "fill_simplices",
    "pin_simplices",
    "walk_moves",
]

# How places are proposed.
RANDOM = 0  # kind by lottery, simplex and corners at random
SWEEP = 1  # one kind, every place in turn from a random one on, until none is left
GIVEN = 2  # places of a record

# Why a place was refused, and that the arrays must grow.
BOUNDARY = 1  # A is on the boundary
DEGREE = 2  # the star of A is no join with the boundary of a simplex
EXISTS = 3  # B is a simplex already
PINCHED = 4  # A has further simplices around it that do not hang together with these
UNKNOWN = 5  # the record names a simplex that is not there
FULL = 6

# The places of the vector `state`.
COUNT = 0  # simplices
NEXT_BIRTH = 1
NEXT_POINT = 2
SEED = 3  # of the generator, 1 to 698769069 * 2**32 - 2
USED = 4  # entries of the hash table
DONE = 5  # moves made
TRIED = 6  # places looked at
REASON = 7  # why the last place was refused, 0 if it was not
WANT = 8  # stop after so many moves
TRIES = 9  # or after so many places; in a sweep, so many in a row without a move
TARGET = 10  # size to which a random walk is drawn
SPREAD = 11  # and within which distance it is free
MODE = 12
LABELLED = 13
LOOK = 14  # whether the hash table is kept
PINS = 15  # whether some simplices are pinched
REPLAY = 16  # whether births and layouts of new simplices are given (undo)
SINCE = 17  # places looked at since the last move
STATE = 18


def fill_simplices(corner, key_hi, key_lo, bits, axes, n):
    """Enter all simplices of 2 to D points; rows of `corner` ascend.

    Returns the number of entries, or -1 where the table would be more than half full.
    """
    k = len(axes)
    last = len(key_hi) - 1
    used = 0
    for s in range(n):
        if 2 * (used + 64) > len(key_hi):
            return -1
        for m in range(1, 1 << k):
            if bits[m] < 2 or bits[m] >= k:
                continue
            hi = 0
            lo = 0
            c = 0
            for x in range(k):
                if (m >> x) & 1:
                    if c < 2:
                        hi = (hi << 31) | (corner[s * k + x] + 1)
                    else:
                        lo = (lo << 31) | (corner[s * k + x] + 1)
                    c += 1
            z = (hi & 0x7FFFFFFF) * 0x2545F491 + (hi >> 31) * 0x1B873593
            z += (lo & 0x7FFFFFFF) * 0x27D4EB2F + (lo >> 31) * 0x165667B1
            h = (z ^ (z >> 31)) & last
            while key_hi[h] != 0 and (key_hi[h] != hi or key_lo[h] != lo):
                h = (h + 1) & last
            if key_hi[h] == 0:
                key_hi[h] = hi
                key_lo[h] = lo
                used += 1
    return used


def pin_simplices(hi_of, lo_of, key_hi, key_lo, mark):
    """Mark the simplices with these words as pinched, entering those that are not there."""
    last = len(key_hi) - 1
    entered = 0
    for e in range(len(hi_of)):
        hi = hi_of[e]
        lo = lo_of[e]
        z = (hi & 0x7FFFFFFF) * 0x2545F491 + (hi >> 31) * 0x1B873593
        z += (lo & 0x7FFFFFFF) * 0x27D4EB2F + (lo >> 31) * 0x165667B1
        h = (z ^ (z >> 31)) & last
        while key_hi[h] != 0 and (key_hi[h] != hi or key_lo[h] != lo):
            h = (h + 1) & last
        if key_hi[h] == 0:
            key_hi[h] = hi
            key_lo[h] = lo
            entered += 1
        mark[h] = 1
    return entered


def average_points(rows, target, coordinate, period, axes, n):
    """Put point ``target[e]`` at the average of the points ``rows[e]``, one after the other.

    `axes` has the length of a row, `period` of a coordinate; where there is a period the nearest images are
    averaged.
    """
    k = len(axes)
    a = len(period)
    for e in range(n):
        for x in range(a):
            first = coordinate[rows[e * k] * a + x]
            total = 0.0
            for c in range(1, k):
                step = coordinate[rows[e * k + c] * a + x] - first
                if period[x] > 0:
                    while step > period[x] / 2:
                        step -= period[x]
                    while step < -period[x] / 2:
                        step += period[x]
                total += step
            coordinate[target[e] * a + x] = first + total / k
    return 0


def walk_moves(
    corner,
    across,
    rank,
    birth,
    orientation,
    slot_of,
    key_hi,
    key_lo,
    mark,
    image,
    ranks,
    inverse,
    sign,
    bits,
    subset,
    subset_start,
    lottery,
    given_birth,
    given_mask,
    given_kind,
    given_row,
    given_new,
    given_layout,
    out_birth,
    out_mask,
    out_kind,
    out_row,
    out_removed,
    out_layout,
    work,
    state,
    axes,
):
    """Make moves until enough are made, too many places were refused, or the arrays are full.

    Returns 0 or `FULL`; every number in `state` is brought up to date.  `work` has 512 entries at least.
    The generator is multiply-with-carry (G. Marsaglia, Random number generators, J. Mod. Appl. Stat. Methods
    2 (2003) 2-13), because no product of it leaves 63 bits: compiled code takes it that none does, and both
    modes of running are to draw the same numbers.  Two draws make a number of 62 bits.
    """
    k = len(axes)
    d = k - 1
    v = k + 1
    last = len(key_hi) - 1
    # parts of `work`, by name of point
    old = 0  # slot of the old simplex that lacks a name
    new = v  # slot of the new simplex that lacks a name
    label = 2 * v
    ordered = 3 * v  # the points in ascending order
    layout = 4 * v  # rank of the order of the corners of a new simplex
    inner = 5 * v  # of the facets between ball and outside, v * v: the new simplex across, or -1
    beyond = inner + v * v  # v * v: the outer simplex across, or -1
    name = beyond + v * v  # v * v: corner of a name in the old simplex that lacks another
    place = name + v * v  # v * v: the same in the new simplices
    image_of = place + v * v  # v * v * v: where the names at an outer facet go: corners outside, or names
    while state[DONE] < state[WANT] and state[TRIED] < state[TRIES]:
        n = state[COUNT]
        if (
            n + k > len(birth)
            or state[NEXT_BIRTH] + k > len(slot_of)
            or (state[LOOK] != 0 and 2 * (state[USED] + 64) > len(key_hi))
        ):
            return FULL
        state[TRIED] += 1
        done = state[DONE]
        reason = 0

        # -- a place: a slot and the corners of A ------------------------------------------------
        if state[MODE] == GIVEN:
            kind = given_kind[done]
            s = slot_of[given_birth[done]]
            mask = given_mask[done]
            if s < 0:
                state[REASON] = UNKNOWN
                return 0
            if state[LABELLED] != 0:
                mask = 0
                for c in range(k):
                    for x in range(v - kind):
                        if corner[s * k + c] == given_row[done * v + x]:
                            mask |= 1 << c
            if bits[mask] != v - kind:
                state[REASON] = UNKNOWN
                return 0
        else:
            z = 0
            for _ in range(2):
                draw = state[SEED]
                draw = 698769069 * (draw & 0xFFFFFFFF) + (draw >> 32)
                state[SEED] = draw
                z = (z << 31) | ((draw ^ (draw >> 32)) & 0x7FFFFFFF)
            if state[MODE] == RANDOM:
                kind = lottery[z % len(lottery)]
                z //= len(lottery)
                step = v - 2 * kind
                there = abs(n + step - state[TARGET])
                if there > state[SPREAD] and there > abs(n - state[TARGET]):
                    # away from the target: once in 16 times, and 16 times more seldom at each further spread
                    far = min(4, there // (state[SPREAD] + 1))
                    if (z & ((1 << (4 * far)) - 1)) != 0:
                        continue
                z >>= 16
                some = subset_start[kind + 1] - subset_start[kind]
                mask = subset[subset_start[kind] + z % some]
                s = (z // some) % n
            else:
                kind = lottery[0]
                some = subset_start[kind + 1] - subset_start[kind]
                if state[SINCE] >= n * some:
                    return 0
                at = (state[TRIED] + state[TARGET]) % (n * some)
                s = at // some
                mask = subset[subset_start[kind] + at % some]
            state[SINCE] += 1

        # -- is the star of A a join with the boundary of B? -------------------------------------
        for y in range(k):
            work[name + k * v + y] = y
            if state[LABELLED] != 0:
                work[label + y] = corner[s * k + y]
        work[old + k] = s
        for c in range(k):
            if (mask >> c) & 1 or reason != 0:
                continue
            t = across[s * k + c]
            p = rank[s * k + c]
            if t < 0:
                reason = BOUNDARY
            elif t == s:
                reason = DEGREE
            else:
                work[old + c] = t
                for y in range(k):
                    work[name + c * v + y] = image[p * k + y]
                work[name + c * v + k] = image[p * k + c]
                if state[LABELLED] != 0:
                    work[label + k] = corner[t * k + image[p * k + c]]
                for e in range(c):
                    if (mask >> e) & 1 or reason != 0:
                        continue
                    i = work[name + c * v + e]
                    q = rank[t * k + i]
                    if t == work[old + e] or across[t * k + i] != work[old + e]:
                        reason = DEGREE
                        continue
                    for y in range(v):
                        if (
                            y != c
                            and y != e
                            and image[q * k + work[name + c * v + y]] != work[name + e * v + y]
                        ):
                            reason = DEGREE
        if kind == 1:
            work[label + k] = state[NEXT_POINT]
            if state[MODE] == GIVEN and state[LABELLED] != 0:
                work[label + k] = given_row[done * v + k]

        # -- is B there already? and what comes and goes -----------------------------------------
        if state[LABELLED] != 0 and reason == 0:
            if kind == k:
                for a in range(k):
                    if (mask >> a) & 1:
                        t = across[s * k + a]
                        if t >= 0 and corner[t * k + image[rank[s * k + a] * k + a]] == work[label + k]:
                            reason = EXISTS
            # sort the points and translate A and B to their order
            for x in range(v):
                work[ordered + x] = x
                y = x
                while y > 0 and work[label + work[ordered + y - 1]] > work[label + x]:
                    work[ordered + y] = work[ordered + y - 1]
                    y -= 1
                work[ordered + y] = x
            of_a = 0
            of_b = 0
            for x in range(v):
                y = work[ordered + x]
                if (mask >> y) & 1:
                    of_a |= 1 << x
                else:
                    of_b |= 1 << x
            for phase in range(2):
                if state[LOOK] == 0:
                    continue
                for m in range(1, 1 << v):
                    size = bits[m]
                    if size > d or reason != 0:
                        continue
                    # 1 look for B, 2 look whether A is pinched, 3 take away, 4 put in
                    job = 0
                    if phase == 0:
                        if m == of_b and size > 1:
                            job = 1
                        elif m == of_a and state[PINS] != 0:
                            job = 2
                    elif size > 1:
                        if (m & of_a) == of_a and (m & of_b) != of_b:
                            job = 3
                        elif (m & of_b) == of_b and (m & of_a) != of_a:
                            job = 4
                    if job == 0:
                        continue
                    hi = 0
                    lo = 0
                    c = 0
                    for x in range(v):
                        if (m >> x) & 1:
                            point = work[label + work[ordered + x]] + 1
                            if c < 2:
                                hi = (hi << 31) | point
                            else:
                                lo = (lo << 31) | point
                            c += 1
                    z = (hi & 0x7FFFFFFF) * 0x2545F491 + (hi >> 31) * 0x1B873593
                    z += (lo & 0x7FFFFFFF) * 0x27D4EB2F + (lo >> 31) * 0x165667B1
                    h = (z ^ (z >> 31)) & last
                    while key_hi[h] != 0 and (key_hi[h] != hi or key_lo[h] != lo):
                        h = (h + 1) & last
                    if job == 1:
                        if key_hi[h] != 0:
                            reason = EXISTS
                    elif job == 2:
                        if key_hi[h] != 0 and mark[h] != 0:
                            reason = PINCHED
                    elif job == 4:
                        if key_hi[h] == 0:
                            key_hi[h] = hi
                            key_lo[h] = lo
                            mark[h] = 0
                            state[USED] += 1
                    elif key_hi[h] != 0:
                        # close the gap, so that no probe stops early
                        state[USED] -= 1
                        g = (h + 1) & last
                        while key_hi[g] != 0:
                            hi = key_hi[g]
                            lo = key_lo[g]
                            z = (hi & 0x7FFFFFFF) * 0x2545F491 + (hi >> 31) * 0x1B873593
                            z += (lo & 0x7FFFFFFF) * 0x27D4EB2F + (lo >> 31) * 0x165667B1
                            home = (z ^ (z >> 31)) & last
                            if ((g - home) & last) >= ((g - h) & last):
                                key_hi[h] = key_hi[g]
                                key_lo[h] = key_lo[g]
                                mark[h] = mark[g]
                                h = g
                            g = (g + 1) & last
                        key_hi[h] = 0
                        key_lo[h] = 0
                        mark[h] = 0
        state[REASON] = reason
        if reason != 0:
            if state[MODE] == GIVEN:
                return 0
            continue

        # -- the record, before anything is written over -----------------------------------------
        out_birth[done] = birth[s]
        out_mask[done] = mask
        out_kind[done] = kind
        if state[LABELLED] != 0:
            a = done * v
            b = done * v + v - kind
            for x in range(v):
                y = work[ordered + x]
                if (mask >> y) & 1:
                    out_row[a] = work[label + y]
                    a += 1
                else:
                    out_row[b] = work[label + y]
                    b += 1
        i = 0
        for b in range(v):
            x = b
            if state[LABELLED] != 0:
                x = work[ordered + b]
            if (mask >> x) & 1:
                continue
            digits = 0
            for y in range(v):
                if y != x:
                    digits = digits * k + work[name + x * v + y]
            out_removed[done * k + i] = birth[work[old + x]]
            out_layout[done * k + i] = ranks[digits]
            i += 1
        # sign of the boundary of the simplex on all names, in which the simplex seen first lacks name k
        up = orientation[s]
        if k % 2 == 1:
            up = -up

        # -- what lies behind the facets of the ball ---------------------------------------------
        for a in range(k):
            if not (mask >> a) & 1:
                continue
            for c in range(v):
                if (mask >> c) & 1:
                    continue
                f = a * v + c
                h = work[old + c] * k + work[name + c * v + a]
                t = across[h]
                q = rank[h]
                work[inner + f] = -1
                work[beyond + f] = t
                if t < 0:
                    continue
                for y in range(v):
                    if y != a and y != c:
                        work[image_of + f * v + y] = image[q * k + work[name + c * v + y]]
                work[image_of + f * v + c] = image[q * k + work[name + c * v + a]]
                for x in range(v):
                    if (mask >> x) & 1 or work[old + x] != t:
                        continue
                    # the ball is glued to itself here: corners of an old simplex become names
                    behind = work[image_of + f * v + c]
                    for y in range(v):
                        if y != x and work[name + x * v + y] == behind:
                            work[inner + f] = y
                    for y in range(v):
                        if y == a:
                            continue
                        if y == c:
                            work[image_of + f * v + y] = x
                            continue
                        at = work[image_of + f * v + y]
                        for w in range(v):
                            if w != x and work[name + x * v + w] == at:
                                work[image_of + f * v + y] = w
                    break

        # -- slots, births and layouts of the new simplices --------------------------------------
        for x in range(v):
            if not (mask >> x) & 1:
                slot_of[birth[work[old + x]]] = -1
                birth[work[old + x]] = -1
        came = 0
        b = 0
        for a in range(k):
            if not (mask >> a) & 1:
                continue
            while b < v and (mask >> b) & 1:
                b += 1
            if came < kind:
                u = work[old + b]
                b += 1
            else:
                u = n + came - kind
            work[new + a] = u
            born = state[NEXT_BIRTH]
            work[layout + a] = 0
            if state[REPLAY] != 0:
                i = came
                if state[LABELLED] != 0:
                    for x in range(v - kind):
                        if given_row[done * v + x] == work[label + a]:
                            i = x
                born = given_new[done * k + i]
                work[layout + a] = given_layout[done * k + i]
            else:
                state[NEXT_BIRTH] += 1
            came += 1
            birth[u] = born
            slot_of[born] = u
            for y in range(v):
                if y < a:
                    work[place + a * v + y] = image[work[layout + a] * k + y]
                elif y > a:
                    work[place + a * v + y] = image[work[layout + a] * k + y - 1]
            up_here = -up * sign[work[layout + a]]
            if a % 2 == 1:
                up_here = -up_here
            orientation[u] = up_here

        # -- their corners and gluings -----------------------------------------------------------
        for a in range(k):
            if not (mask >> a) & 1:
                continue
            u = work[new + a]
            at = place + a * v
            if state[LABELLED] != 0:
                for y in range(v):
                    if y != a:
                        corner[u * k + work[at + y]] = work[label + y]
            for c in range(v):
                if c == a:
                    continue
                h = u * k + work[at + c]
                f = a * v + c
                ours = (mask >> c) & 1
                if not ours and work[beyond + f] < 0:
                    across[h] = -1
                    rank[h] = 0
                    continue
                # the simplex across, and the weights of the corners of u in the rank of the gluing
                digits = 0
                for i in range(k):
                    digits *= k
                    for y in range(v):
                        if y == a or work[at + y] != i:
                            continue
                        if ours:
                            digits += work[place + c * v + (a if y == c else y)]
                        elif work[inner + f] >= 0:
                            digits += work[place + work[inner + f] * v + work[image_of + f * v + y]]
                        else:
                            digits += work[image_of + f * v + y]
                rank[h] = ranks[digits]
                if ours:
                    across[h] = work[new + c]
                elif work[inner + f] >= 0:
                    across[h] = work[new + work[inner + f]]
                else:
                    t = work[beyond + f]
                    across[h] = t
                    g = t * k + work[image_of + f * v + c]
                    across[g] = u
                    rank[g] = inverse[ranks[digits]]

        # -- no holes: the last simplices move to them -------------------------------------------
        m = n + came - kind
        top = n - 1
        for x in range(v):
            if (mask >> x) & 1:
                continue
            u = work[old + x]
            if birth[u] >= 0 or u >= m:
                continue
            while birth[top] < 0:
                top -= 1
            birth[u] = birth[top]
            birth[top] = -1
            orientation[u] = orientation[top]
            slot_of[birth[u]] = u
            for i in range(k):
                if state[LABELLED] != 0:
                    corner[u * k + i] = corner[top * k + i]
                t = across[top * k + i]
                p = rank[top * k + i]
                rank[u * k + i] = p
                if t == top:
                    across[u * k + i] = u
                else:
                    across[u * k + i] = t
                    if t >= 0:
                        across[t * k + image[p * k + i]] = u
        state[COUNT] = m
        if kind == 1 and state[LABELLED] != 0 and state[MODE] != GIVEN:
            state[NEXT_POINT] += 1
        state[DONE] += 1
        state[SINCE] = 0
    return 0
