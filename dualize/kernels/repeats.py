"""Kernels that find rows of labels that occur twice, by a mixed key and buckets of its leading bits."""

__all__ = ["any_repeat", "fill_keys", "mix_rows"]


def mix_rows(rows, factors, key, size, shift, axes, n):
    """A 64-bit key of each row (n, len(axes)) and how many keys fall into each bucket ``key >> shift``.

    The `factors` are drawn at random for each run, so no choice of labels can make different rows collide
    on purpose; equal rows always have equal keys.
    """
    m = len(axes)
    for x in range(n):
        mixed = 0
        for c in range(m):
            mixed = ((mixed ^ rows[x * m + c]) * factors[c]) & 0x7FFFFFFFFFFFFFFF
            mixed ^= mixed >> 29
        key[x] = mixed
        size[mixed >> shift] += 1
    return 0


def fill_keys(key, cursor, entry, shift, n):
    """Write the keys into their buckets; `cursor` begins as the offsets of the buckets."""
    for x in range(n):
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
