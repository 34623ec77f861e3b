"""Kernels that find out whether a set of labels occurs twice, by mixed keys in buckets."""

__all__ = ["any_repeat", "fill_keys", "mix_ridges", "mix_rows"]


def mix_ridges(corners, vertex, wedge, offsets, slots, factors, key, shift, axes, size, lo, hi):
    """A 62-bit key of the ridge labels of each face, and how many each bucket ``key >> shift`` gets.

    The labels are read at the first passage of the face.  The `factors` (two for every third of every label,
    odd, of 31 bits) are drawn at random for each run, so no choice of labels makes different ridges collide
    on purpose; equal ridges always have equal keys.  No product or sum here exceeds 63 bits: compiled and
    interpreted integers differ beyond.
    """
    k = len(axes)
    for f in range(lo, hi):
        s = vertex[offsets[f]]
        w = wedge[offsets[f]]
        one = 0
        two = 0
        x = 0
        for c in range(k):
            if c != slots[2 * w] and c != slots[2 * w + 1]:
                rest = corners[s * k + c]
                for _ in range(3):
                    piece = rest & 0x7FFFFFFF
                    one = (one + piece * factors[x]) & 0x3FFFFFFFFFFFFFFF
                    two = (two + piece * factors[x + 1]) & 0x3FFFFFFFFFFFFFFF
                    rest = rest >> 31
                    x += 2
        mixed = one ^ ((two & 0x7FFFFFFF) << 31) ^ (two >> 31)
        key[f] = mixed
        size[mixed >> shift] += 1
    return 0


def mix_rows(rows, factors, key, shift, axes, size, lo, hi):
    """The same for rows of labels (n, len(axes)), as they stand."""
    m = len(axes)
    for r in range(lo, hi):
        one = 0
        two = 0
        x = 0
        for c in range(m):
            rest = rows[r * m + c]
            for _ in range(3):
                piece = rest & 0x7FFFFFFF
                one = (one + piece * factors[x]) & 0x3FFFFFFFFFFFFFFF
                two = (two + piece * factors[x + 1]) & 0x3FFFFFFFFFFFFFFF
                rest = rest >> 31
                x += 2
        mixed = one ^ ((two & 0x7FFFFFFF) << 31) ^ (two >> 31)
        key[r] = mixed
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
