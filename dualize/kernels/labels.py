"""Kernels on labelled simplices: sort the corners, match equal facets.

Facets are matched by buckets: every half-facet goes to the bucket of its corner of lowest degree, and every
bucket is sorted on the labels that are left.  A corner that lies in every simplex (the tip of a cone) then
never fills a bucket, no hash can be attacked, and the work is n log n whatever the labels are.
"""

__all__ = ["bucket_sizes", "fill_buckets", "match_buckets", "number_labels", "sort_rows"]


def sort_rows(labels, corners, written, axes, lo, hi):
    """Sort each row of `labels` (N, K) into `corners`, its parity into `written` (N,).

    Returns the first row with a repeated label, or -1.
    """
    k = len(axes)
    for s in range(lo, hi):
        base = s * k
        sign = 1
        for i in range(k):
            x = labels[base + i]
            j = i
            while j > 0 and corners[base + j - 1] > x:
                corners[base + j] = corners[base + j - 1]
                j -= 1
                sign = -sign
            corners[base + j] = x
            if j > 0 and corners[base + j - 1] == x:
                return s
        written[s] = sign
    return -1


def number_labels(labels, factors, keys, numbers, shift, out, progress):
    """Number the labels by first occurrence, with a table of ``2 ** (62 - shift)`` places.

    `numbers` must be -1 at the start; the six `factors` (odd, of 31 bits) are drawn at random for each run,
    so that no choice of labels collides on purpose.  No product or sum exceeds 63 bits.  Returns 1 when
    done, with the count in ``progress[0]``, and 0 when the table is half full.
    """
    last = len(keys) - 1
    count = 0
    for x in range(len(labels)):
        label = labels[x]
        one = 0
        two = 0
        rest = label
        for third in range(3):
            piece = rest & 0x7FFFFFFF
            one = (one + piece * factors[2 * third]) & 0x3FFFFFFFFFFFFFFF
            two = (two + piece * factors[2 * third + 1]) & 0x3FFFFFFFFFFFFFFF
            rest = rest >> 31
        place = (one ^ ((two & 0x7FFFFFFF) << 31) ^ (two >> 31)) >> shift
        while numbers[place] >= 0 and keys[place] != label:
            place = (place + 1) & last
        if numbers[place] < 0:
            if 2 * count > last:
                return 0
            keys[place] = label
            numbers[place] = count
            count += 1
        out[x] = numbers[place]
    progress[0] = count
    return 1


def bucket_sizes(points, degree, bucket, axes, size, lo, hi):
    """Choose the two corners of lowest degree of each simplex and count what the buckets will hold.

    `points` (N, K) are the corners as numbers from 0; `degree` says in how many simplices each lies.  Into
    `bucket` (N, 2) go the positions of the corners of lowest and second-lowest degree (ties: the smaller
    position); a half-facet lies in the bucket of the first, unless it is opposite to it.
    """
    k = len(axes)
    for s in range(lo, hi):
        base = s * k
        best = 0
        second = 1
        if degree[points[base + 1]] < degree[points[base]]:
            best = 1
            second = 0
        for i in range(2, k):
            d = degree[points[base + i]]
            if d < degree[points[base + best]]:
                second = best
                best = i
            elif d < degree[points[base + second]]:
                second = i
        bucket[2 * s] = best
        bucket[2 * s + 1] = second
        size[points[base + best]] += k - 1
        size[points[base + second]] += 1
    return 0


def fill_buckets(points, bucket, entry, axes, cursor, lo, hi):
    """Write the half-edges ``s * K + i`` into their buckets; `cursor` begins as the buckets' offsets."""
    k = len(axes)
    for s in range(lo, hi):
        base = s * k
        best = bucket[2 * s]
        second = bucket[2 * s + 1]
        a = points[base + best]
        b = points[base + second]
        for i in range(k):
            if i == best:
                entry[cursor[b]] = base + i
                cursor[b] += 1
            else:
                entry[cursor[a]] = base + i
                cursor[a] += 1
    return 0


def match_buckets(points, start, entry, keeping, across, rank, work_key, work_tail, work_half, axes, lo, hi):
    """Match the half-facets of the buckets `lo` to `hi`.

    Equal facets get each other in `across` and the order-keeping permutation in `rank`; a facet on one
    simplex gets -1, on three or more -2.  The work arrays have twice the length of the largest bucket of
    this range.  Returns the number of half-facets marked -2.
    """
    k = len(axes)
    refused = 0
    for v in range(lo, hi):
        first = start[v]
        n = start[v + 1] - first
        for e in range(n):
            h = entry[first + e]
            s = h // k
            i = h - s * k
            # the labels other than v, in order: at most three, the last two packed into one word
            key = 0
            tail = 0
            for c in range(k):
                x = points[s * k + c]
                if c != i and x != v:
                    key = (key << 31) | tail
                    tail = x
            work_key[e] = key
            work_tail[e] = tail
            work_half[e] = h
        # insertion sort in runs of 16, then merges from one half of the work arrays to the other
        run = 16
        for begin in range(0, n, run):
            end = min(begin + run, n)
            for e in range(begin + 1, end):
                key = work_key[e]
                tail = work_tail[e]
                h = work_half[e]
                g = e
                while g > begin and (
                    work_key[g - 1] > key or (work_key[g - 1] == key and work_tail[g - 1] > tail)
                ):
                    work_key[g] = work_key[g - 1]
                    work_tail[g] = work_tail[g - 1]
                    work_half[g] = work_half[g - 1]
                    g -= 1
                work_key[g] = key
                work_tail[g] = tail
                work_half[g] = h
        here = 0
        there = n
        while run < n:
            for begin in range(0, n, 2 * run):
                middle = min(begin + run, n)
                end = min(begin + 2 * run, n)
                x = here + begin
                y = here + middle
                for out in range(there + begin, there + end):
                    if y >= here + end or (
                        x < here + middle
                        and (
                            work_key[x] < work_key[y]
                            or (work_key[x] == work_key[y] and work_tail[x] <= work_tail[y])
                        )
                    ):
                        work_key[out] = work_key[x]
                        work_tail[out] = work_tail[x]
                        work_half[out] = work_half[x]
                        x += 1
                    else:
                        work_key[out] = work_key[y]
                        work_tail[out] = work_tail[y]
                        work_half[out] = work_half[y]
                        y += 1
            here, there = there, here
            run *= 2
        e = 0
        while e < n:
            end = e + 1
            while (
                end < n
                and work_key[here + end] == work_key[here + e]
                and work_tail[here + end] == work_tail[here + e]
            ):
                end += 1
            h = work_half[here + e]
            if end - e == 1:
                across[h] = -1
                rank[h] = 0
            elif end - e == 2:
                g = work_half[here + e + 1]
                s = h // k
                t = g // k
                i = h - s * k
                j = g - t * k
                across[h] = t
                across[g] = s
                rank[h] = keeping[i * k + j]
                rank[g] = keeping[j * k + i]
            else:
                for x in range(e, end):
                    across[work_half[here + x]] = -2
                    rank[work_half[here + x]] = 0
                refused += end - e
            e = end
    return refused
