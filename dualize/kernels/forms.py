"""Kernel that writes a connected gluing table in a form that depends on where the writing starts only."""

__all__ = ["write_form"]


def write_form(across, rank, image, inverse, compose, start, turn, number, frame, queue, out, axes, n):
    """Number the simplices as they are met from simplex `start`, seen through permutation `turn`.

    The slots of every simplex are taken in the order in which the first way to it carries them.  `number`
    must be -1 everywhere.  ``out[x * K + j]`` becomes ``number * (K)! + rank`` of the gluing at slot j of the
    simplex numbered x, -1 on the boundary.  Returns how many simplices were met.
    """
    k = len(axes)
    f = len(inverse)
    number[start] = 0
    frame[start] = turn
    queue[0] = start
    head = 0
    tail = 1
    while head < tail:
        s = queue[head]
        q = frame[s]
        for j in range(k):
            i = image[q * k + j]
            t = across[s * k + i]
            if t < 0:
                out[head * k + j] = -1
                continue
            carried = compose[rank[s * k + i] * f + q]
            if number[t] < 0:
                number[t] = tail
                frame[t] = carried
                queue[tail] = t
                tail += 1
            out[head * k + j] = number[t] * f + compose[inverse[frame[t]] * f + carried]
        head += 1
    return tail
