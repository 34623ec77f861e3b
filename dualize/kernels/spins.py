"""Kernels that list admissible labellings, by depth-first search in a fixed order of the faces.

At depth d the face ``d`` of the order gets a twice-spin.  The *closing* edges of depth d, entries
``close[d] .. close[d + 1]``, are those whose other faces all have theirs: each bounds the spin from both
sides and may fix its parity.  Entry x has the depths of its other faces in
``others[start[x] .. start[x + 1]]``, each mentioned as often as the face is at the edge; the boundary spins
there have sum ``total[x]`` and maximum
``largest[x]``; the face itself is there ``times[x]`` times.
"""

__all__ = ["fill_labellings"]


def fill_labellings(
    close, start, others, times, total, largest, low, high, step, last, value, top, state, out, room, depth
):
    """List labellings into ``out`` (`room` rows of `depth`); how many there are.

    They come by layers up to the layer `last`, the largest spin of a labelling; those of a layer by parts,
    the first depth that has that spin; those of a part in lexicographic order.  Spins at depth d lie between
    ``low[d]`` and ``high[d]`` and are multiples of `step`.  ``state`` is (depth, 1 where it is to be entered
    anew, layer, part), and depth -1 where the next part begins; the search goes on from there and from
    `value`.  ``top[2 d]`` is the last spin to be tried at depth d, ``top[2 d + 1]`` the step there.
    """
    d = state[0]
    enter = state[1]
    layer = state[2]
    part = state[3]
    found = 0
    jump = step
    while True:
        odd = -1
        if d < 0:
            part += 1
            if part >= depth:
                part = 0
                layer += step
            if layer > last:
                break
            if low[part] > layer or high[part] < layer:
                continue
            d = 0
            enter = 1
        if enter == 1:
            least = low[d]
            most = high[d]
            if d < part:
                if most > layer - 1:
                    most = layer - 1
            else:
                if most > layer:
                    most = layer
                if d == part:
                    least = layer
            for x in range(close[d], close[d + 1]):
                s = total[x]
                m = largest[x]
                for y in range(start[x], start[x + 1]):
                    v = value[others[y]]
                    s += v
                    if v > m:
                        m = v
                t = times[x]
                # 2 m <= s + t v, and, where the face is there once, v <= s
                need = 2 * m - s
                if need > 0:
                    need = (need + t - 1) // t
                    if need > least:
                        least = need
                if t == 1 and s < most:
                    most = s
                if t % 2 == 1:
                    if odd < 0:
                        odd = s % 2
                    elif odd != s % 2:
                        most = -1
                elif s % 2 == 1:
                    most = -1
            least = (least + step - 1) // step * step
            jump = step
            if odd >= 0:
                if step % 2 == 1:
                    jump = 2 * step
                    if least % 2 != odd:
                        least += step
                elif odd == 1:
                    most = -1
            value[d] = least
            top[2 * d] = most
            top[2 * d + 1] = jump
        else:
            value[d] += top[2 * d + 1]
        if value[d] > top[2 * d]:
            d -= 1
            enter = 0
            continue
        if d < depth - 1:
            d += 1
            enter = 1
            continue
        # the last depth: a run of labellings
        jump = top[2 * d + 1]
        enter = 0
        v = value[d]
        while v <= top[2 * d]:
            if found == room:
                # go on with this one next time
                value[d] = v - jump
                state[0] = d
                state[1] = 0
                state[2] = layer
                state[3] = part
                return found
            base = found * depth
            for y in range(depth - 1):
                out[base + y] = value[y]
            out[base + d] = v
            found += 1
            v += jump
        value[d] = v
        d -= 1
    state[0] = -1
    state[1] = 0
    state[2] = layer
    state[3] = part
    return found
