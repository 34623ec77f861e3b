"""Kernels that make a chain complex small: pairs of cells removed without fill-in, and the flow they leave.

The cells of all dimensions are numbered together, those of lower dimension first.  Cell `c` has the faces
``face[face_offsets[c]:face_offsets[c + 1]]`` with the coefficients `sign`, and lies on the cells
``coface[coface_offsets[c]:coface_offsets[c + 1]]``.
"""

__all__ = ["flow_down", "pair_cells", "pull_back"]


def pair_cells(face_offsets, face, sign, coface_offsets, coface, left, mate, order, queue, n):
    """Pair cells with the one face they have left, as long as that works; else set the lowest cell apart.

    `left` must hold the number of faces of each cell, `mate` -1 everywhere, `queue` room for every coface.
    Afterwards ``mate[c]`` is the partner of `c`, or `c` itself where it was set apart, and `order` lists the
    cells as they were removed, the lower one of a pair first.  Returns how many were set apart.
    """
    apart = 0
    time = 0
    for seed in range(n):
        if mate[seed] >= 0:
            continue
        # everything below it is gone, so its boundary is empty
        mate[seed] = seed
        order[time] = seed
        time += 1
        apart += 1
        head = 0
        tail = 0
        for p in range(coface_offsets[seed], coface_offsets[seed + 1]):
            x = coface[p]
            left[x] -= 1
            if left[x] == 1 and mate[x] < 0:
                queue[tail] = x
                tail += 1
        while head < tail:
            a = queue[head]
            head += 1
            if mate[a] >= 0 or left[a] != 1:
                continue
            b = -1
            for p in range(face_offsets[a], face_offsets[a + 1]):
                if mate[face[p]] < 0 and (sign[p] == 1 or sign[p] == -1):
                    b = face[p]
            if b < 0:
                continue
            mate[a] = b
            mate[b] = a
            order[time] = b
            order[time + 1] = a
            time += 2
            for p in range(coface_offsets[b], coface_offsets[b + 1]):
                x = coface[p]
                left[x] -= 1
                if left[x] == 1 and mate[x] < 0:
                    queue[tail] = x
                    tail += 1
            for p in range(coface_offsets[a], coface_offsets[a + 1]):
                x = coface[p]
                left[x] -= 1
                if left[x] == 1 and mate[x] < 0:
                    queue[tail] = x
                    tail += 1
    return apart


def flow_down(face_offsets, face, sign, mate, order, place, value, out_cell, out_value, cell, bound):
    """Push the boundary of a cell down to the cells that were set apart.

    `order` lists the cells of one dimension less as they were removed, `place` says where a cell stands in
    it; `value` must be 0 everywhere, and is again afterwards.  Returns the number of entries written, or -1
    where a coefficient exceeds `bound`.
    """
    open_cells = 0
    top = -1
    count = 0
    for p in range(face_offsets[cell], face_offsets[cell + 1]):
        value[face[p]] = sign[p]
        open_cells += 1
        if place[face[p]] > top:
            top = place[face[p]]
    while open_cells > 0:
        y = order[top]
        top -= 1
        v = value[y]
        if v == 0:
            continue
        if v > bound or v < -bound:
            return -1
        if mate[y] > y:  # the rest of the boundary of its partner is in its place, all removed earlier
            a = mate[y]
            u = 0
            for p in range(face_offsets[a], face_offsets[a + 1]):
                if face[p] == y:
                    u = sign[p]
            for p in range(face_offsets[a], face_offsets[a + 1]):
                x = face[p]
                if x == y:
                    continue
                before = value[x]
                value[x] -= v * u * sign[p]
                if before == 0 and value[x] != 0:
                    open_cells += 1
                elif before != 0 and value[x] == 0:
                    open_cells -= 1
        elif mate[y] == y:
            out_cell[count] = y
            out_value[count] = v
            count += 1
        value[y] = 0
        open_cells -= 1
    return count


def pull_back(face_offsets, face, sign, mate, order, value, start, width, bound):
    """Extend cochains from the cells that were set apart to all cells of their dimension, as cocycles do.

    `order` lists the cells of that dimension as they were removed, the first of them numbered `start`; cell c
    has the values ``value[(c - start) * width:]``, 0 at the start but for the cells set apart.  Returns 1
    where a value exceeds `bound`, else 0.
    """
    for x in range(len(order)):
        y = order[x]
        a = mate[y]
        if a <= y:
            continue
        u = 0
        for p in range(face_offsets[a], face_offsets[a + 1]):
            if face[p] == y:
                u = sign[p]
        for w in range(width):
            total = 0
            for p in range(face_offsets[a], face_offsets[a + 1]):
                if face[p] != y:
                    total += sign[p] * value[(face[p] - start) * width + w]
            if total > bound or total < -bound:
                return 1
            value[(y - start) * width + w] = -u * total
    return 0
