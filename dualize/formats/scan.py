# mypy: disallow-untyped-defs=False
"""Kernels that read integers from text; see `dualize.kernels` for the rules kernels keep."""

__all__ = ["parse_box", "parse_rows"]


def parse_rows(text, out, width, first, lo, hi):
    """Read the bytes ``lo .. hi - 1`` of `text`, whole lines of `width` integers, into `out` from `first` on.

    Labels are separated by blanks, tabs, or one comma; ``#`` begins a comment; empty lines do not count.
    Returns the number of rows, or -1 at anything else: a word, a number beyond 64 bits, a row of another
    length, a label twice in a row.
    """
    at = first
    count = 0
    comma = 0
    i = lo
    while i < hi:
        c = text[i]
        if 48 <= c <= 57 or c == 45 or c == 43:
            negative = 0
            if c < 48:
                if c == 45:
                    negative = 1
                i += 1
                if i == hi or text[i] < 48 or text[i] > 57:
                    return -1
                c = text[i]
            value = 0
            while 48 <= c <= 57:
                digit = c - 48
                if value > 922337203685477580 or (value == 922337203685477580 and digit > 7):
                    return -1
                value = value * 10 + digit
                i += 1
                if i == hi:
                    break
                c = text[i]
            if i < hi and c != 32 and c != 10 and c != 44 and c != 9 and c != 13 and c != 35:
                return -1
            if negative:
                value = -value
            if count == width:
                return -1
            for k in range(at, at + count):
                if out[k] == value:
                    return -1
            out[at + count] = value
            count += 1
            comma = 0
        elif c == 32 or c == 9:
            i += 1
        elif c == 10 or c == 13:
            i += 1
            if count:
                if count != width or comma:
                    return -1
                at += width
                count = 0
        elif c == 44:
            if comma or count == 0:
                return -1
            comma = 1
            i += 1
        elif c == 35:
            while i < hi and text[i] != 10 and text[i] != 13:
                i += 1
        else:
            return -1
    if count:
        if count != width or comma:
            return -1
        at += width
    return (at - first) // width


def parse_box(text, out, side, first, lo, hi):
    """Read a JSON list of integers, or of such lists, three deep at most and all rows of a length.

    The list begins at byte `lo`; its entries go into `out` from `first` on, the lengths at each depth into
    `side` (3,), 0 beyond the depth.  Returns where the list ends, or -1 at anything else, an
    empty list included.
    """
    full = 0
    level = 0
    at = first
    ready = 1
    c0 = 0
    c1 = 0
    c2 = 0
    side[0] = 0
    side[1] = 0
    side[2] = 0
    i = lo
    while i < hi:
        c = text[i]
        if 48 <= c <= 57 or c == 45:
            if not ready or level == 0:
                return -1
            if full == 0:
                full = level
            elif level != full:
                return -1
            negative = 0
            if c == 45:
                negative = 1
                i += 1
                if i == hi:
                    return -1
                c = text[i]
                if c < 48 or c > 57:
                    return -1
            if c == 48 and i + 1 < hi and 48 <= text[i + 1] <= 57:
                return -1
            value = 0
            while 48 <= c <= 57:
                digit = c - 48
                if value > 922337203685477580 or (value == 922337203685477580 and digit > 7):
                    return -1
                value = value * 10 + digit
                i += 1
                if i == hi:
                    return -1
                c = text[i]
            if c != 44 and c != 93 and c != 32 and c != 10 and c != 13 and c != 9:
                return -1
            out[at] = -value if negative else value
            at += 1
            if level == 1:
                c0 += 1
            elif level == 2:
                c1 += 1
            else:
                c2 += 1
            ready = 0
        elif c == 44:
            if ready:
                return -1
            ready = 1
            i += 1
        elif c == 91:
            if not ready or level == 3 or level == full > 0:
                return -1
            level += 1
            if level == 2:
                c1 = 0
            elif level == 3:
                c2 = 0
            i += 1
        elif c == 93:
            if ready:
                return -1
            count = c0
            if level == 2:
                count = c1
            elif level == 3:
                count = c2
            if side[level - 1] == 0:
                side[level - 1] = count
            elif side[level - 1] != count:
                return -1
            level -= 1
            i += 1
            ready = 0
            if level == 0:
                return i
            if level == 1:
                c0 += 1
            else:
                c1 += 1
        elif c == 32 or c == 10 or c == 13 or c == 9:
            i += 1
        else:
            return -1
    return -1
