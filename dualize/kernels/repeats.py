"""Kernels that find out whether a ridge label set belongs to several faces, by mixed keys in buckets."""

__all__ = ["any_repeat", "fill_keys", "mix_ridges"]


def mix_ridges(corners, vertex, wedge, offsets, slots, factors, key, shift, axes, size, lo, hi):
    """A 63-bit key of the ridge labels of each face, and how many each bucket ``key >> shift`` gets.

    The labels are read at the first passage of the face.  The `factors` are drawn at random for each run, so
    no choice of labels makes different ridges collide on purpose; equal ridges always have equal keys.
    """
    k = len(axes)
    for f in range(lo, hi):
        s = vertex[offsets[f]]
        w = wedge[offsets[f]]
        mixed = 0
        rank = 0
        for c in range(k):
            if c != slots[2 * w] and c != slots[2 * w + 1]:
                mixed = ((mixed ^ corners[s * k + c]) * factors[rank]) & 0x7FFFFFFFFFFFFFFF
                mixed ^= mixed >> 29
                rank += 1
        key[f] = mixed
        size[mixed >> shift] += 1
    return 0


def fill_keys(key, entry, shift, cursor, lo, hi):
    """Write the keys into their buckets; `cursor` begins as the offsets of the buckets."""
    for x in range(lo, hi):
        b = key[x] >> shift
        entry[cursor[b]] = key[x]
        cursor[b] += 1
    return 0


def any_repeat(start, entry, lo, hi):
    """Whether two keys of one of the buckets `lo` to `hi` are equal (1 or 0); stops at the first."""
    for b in range(lo, hi):
        first = start[b]
        for x in range(first + 1, start[b + 1]):
            key = entry[x]
            y = x
            while y > first and entry[y - 1] > key:
                entry[y] = entry[y - 1]
                y -= 1
            entry[y] = key
            if y > first and entry[y - 1] == key:
                return 1
    return 0
