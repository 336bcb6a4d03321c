"""Cut enumeration and covering on flat sequences: run as they stand for small networks, compiled for large.

All in one file, because the compiler's cache on disk watches a function's own file only.

Priority cuts, area flow and exact area follow Mishchenko, Cho, Chatterjee, Brayton, "Combinational and
sequential mapping with priority cuts", ICCAD 2007; the price of a cut is the number of ANDs that its function
needs (as Meuli, Soeken, Roetteler, De Micheli, "The role of multiplicative complexity in compiling low
T-count oracle circuits", ICCAD 2019). `cut_mapping` prepares the sequences and `cut_kernels` compiles these
same functions, so that both ways give the same cover.

All integers are signed 64 bits and below 2**62; lists of Python integers and numpy arrays serve alike.

A node is a number as in `network`; kind: 0 for the constant and inputs, 1 AND, 2 XOR; left, right: literals.
Each node has `slots` places for cuts, cut c = node * slots + place; the last place holds the cut {node}, the
one before it the inputs in the node's support where these are at most k, whatever it costs; size -1: empty.
leaves[k * c ...]: ascending nodes; table: 2**k bits, bit x the value where leaf i is bit i of x, not
depending on variables from `size` on; mark: one bit a leaf modulo 61, to reject large unions early.
depth: ANDs on the way to a node, as far as its best cut's price tells; refs: how often a node is used by the
cover; share: the same, smoothed over passes, for the area flow; best: the chosen cut's place.
"""

# mypy: disable-error-code="no-untyped-def, no-untyped-call"

from __future__ import annotations

FIVE_KEYS = 323
"""Size of the price list of functions of five inputs, by `five_key`."""
XOR_WEIGHT = 1.0 / 256
"""What an XOR counts, in ANDs, where covers are compared."""


def anf_of(table, k):
    """The algebraic normal form of a table of 2**k bits, k = 3 ... 5; bit m: the product of m's variables."""
    table ^= (table & 0x55555555) << 1
    table ^= (table & 0x33333333) << 2
    table ^= (table & 0x0F0F0F0F) << 4
    table ^= (table & 0x00FF00FF) << 8
    if k == 5:
        table ^= (table & 0x0000FFFF) << 16
    return table & ((1 << (1 << k)) - 1)


def ones_of(word):
    """The number of ones."""
    count = 0
    while word:
        word &= word - 1
        count += 1
    return count


def more_than(word, limit):
    """Whether a word has more than `limit` ones."""
    while word and limit >= 0:
        word &= word - 1
        limit -= 1
    return limit < 0


def ands_of_four(anf):
    """ANDs that a function of 4 inputs needs, from its normal form (16 bits): degree - 1, but 2 for rank 4.

    Turan, Peralta, "The multiplicative complexity of Boolean functions on four and five variables", 2014.
    """
    if anf & 0x8000:
        return 3
    if anf & 0x6880:
        return 2
    if not anf & 0x1668:
        return 0
    pairs = (anf >> 3 & anf >> 12) ^ (anf >> 5 & anf >> 10) ^ (anf >> 9 & anf >> 6)
    return 2 if pairs & 1 else 1


def depends(table, variable, low):
    """Whether the table depends on the variable; low: mask of the places where the variable is 0."""
    return ((table >> (1 << variable)) ^ table) & low != 0


def moved(table, source, target, low_source, low_target):
    """The table with variable `source` renamed to `target`, which it did not depend on before."""
    shift = 1 << source
    zero = table & low_source
    one = (table >> shift) & low_source
    zero |= zero << shift
    one |= one << shift
    return (zero & low_target) | (one & (low_target << (1 << target)))


def merge(k, a, b, size, leaves, out, places):
    """The union of two cuts' leaves into out[0:]; places[0:k], [k:2k]: where the leaves of a and b went.

    Returns its size, or -1 for more than k leaves.
    """
    i = j = n = 0
    size_a, size_b = size[a], size[b]
    base_a, base_b = a * k, b * k
    while i < size_a or j < size_b:
        if n == k:
            return -1
        if j == size_b or (i < size_a and leaves[base_a + i] < leaves[base_b + j]):
            out[n] = leaves[base_a + i]
            places[i] = n
            i += 1
        elif i == size_a or leaves[base_b + j] < leaves[base_a + i]:
            out[n] = leaves[base_b + j]
            places[k + j] = n
            j += 1
        else:
            out[n] = leaves[base_a + i]
            places[i] = n
            places[k + j] = n
            i += 1
            j += 1
        n += 1
    return n


def spread(table, count, places, begin, lows):
    """The table with variable i moved to places[begin + i], from the last one down."""
    for i in range(count - 1, -1, -1):
        if places[begin + i] != i:
            table = moved(table, i, places[begin + i], lows[i], lows[places[begin + i]])
    return table


def shrink(table, size, out, lows):
    """Drops leaves that the table does not depend on, from out as well: returns (table, size)."""
    i = 0
    while i < size:
        if depends(table, i, lows[i]):
            i += 1
            continue
        for j in range(i + 1, size):
            table = moved(table, j, j - 1, lows[j], lows[j - 1])
            out[j - 1] = out[j]
        size -= 1
    return table, size


def five_key(table, anf):
    """A number below FIVE_KEYS that functions of 5 inputs in one affine class share.

    Made of the degree and of how evenly each of the 31 derivatives f(x) ^ f(x ^ a) is spread: both are the
    same for all of a class, and the number is different for all 48 of them.
    """
    degree = 0
    if anf & 0x80000000:
        degree = 3
    elif anf & 0x68808000:
        degree = 2
    elif anf & 0x16686880:
        degree = 1
    seen = 0
    shifted = table
    for step in range(1, 32):
        change = step & -step
        if change == 1:
            shifted = ((shifted & 0x55555555) << 1) | ((shifted >> 1) & 0x55555555)
        elif change == 2:
            shifted = ((shifted & 0x33333333) << 2) | ((shifted >> 2) & 0x33333333)
        elif change == 4:
            shifted = ((shifted & 0x0F0F0F0F) << 4) | ((shifted >> 4) & 0x0F0F0F0F)
        elif change == 8:
            shifted = ((shifted & 0x00FF00FF) << 8) | ((shifted >> 8) & 0x00FF00FF)
        else:
            shifted = ((shifted & 0x0000FFFF) << 16) | ((shifted >> 16) & 0x0000FFFF)
        weight = ones_of((table ^ shifted) & 0xFFFFFFFF)
        half = (weight - 16 if weight > 16 else 16 - weight) >> 1
        seen += half * half * half * half * half
    return (seen * 4 + degree) % FIVE_KEYS


def price_of(table, size, k, prices):
    """What a cut costs: its ANDs and a small share for about as many XORs as its normal form has."""
    anf = anf_of(table, k)
    ands = prices[five_key(table, anf)] if size == 5 else ands_of_four(anf & 0xFFFF)
    terms = ones_of(anf & 0xFFFFFFFE)
    return ands + (terms - 1) * XOR_WEIGHT if terms > 1 else 1.0 * ands


def contains(c, k, size, leaves, n, out):
    """Whether out[0:n] holds all leaves of cut c."""
    j = 0
    for i in range(size[c]):
        leaf = leaves[c * k + i]
        while j < n and out[j] < leaf:
            j += 1
        if j == n or out[j] != leaf:
            return False
    return True


def store(c, k, n, out, table, mark, price, flow, cut_data):
    """Writes one cut."""
    size, leaves, tables, marks, prices, flows = cut_data
    size[c] = n
    for i in range(n):
        leaves[c * k + i] = out[i]
    tables[c] = table
    marks[c] = mark
    prices[c] = price
    flows[c] = flow


def copy_cut(source, target, k, cut_data):
    """Copies one cut."""
    size, leaves, tables, marks, prices, flows = cut_data
    size[target] = size[source]
    for i in range(size[source]):
        leaves[target * k + i] = leaves[source * k + i]
    tables[target] = tables[source]
    marks[target] = marks[source]
    prices[target] = prices[source]
    flows[target] = flows[source]


def insert(base, keep, k, n, out, table, mark, price, flow, cut_data):
    """Puts a cut into the ascending list of `keep` cuts at `base`, unless one of its subsets is no dearer."""
    size, leaves, _, marks, _, flows = cut_data
    count = 0
    while count < keep and size[base + count] >= 0:
        c = base + count
        if (
            size[c] <= n
            and marks[c] & ~mark == 0
            and flows[c] <= flow
            and contains(c, k, size, leaves, n, out)
        ):
            return
        count += 1
    place = count
    while place > 0 and (
        flows[base + place - 1] > flow or (flows[base + place - 1] == flow and size[base + place - 1] > n)
    ):
        place -= 1
    if place == keep:
        return
    for c in range(min(count, keep - 1), place, -1):
        copy_cut(base + c - 1, base + c, k, cut_data)
    store(base + place, k, n, out, table, mark, price, flow, cut_data)


def supports(first, nodes, k, left, right, support, support_size):
    """The inputs below each node where these are at most k: support[k * node ...], else size -1."""
    for node in range(1, first):
        support[k * node] = node
        support_size[node] = 1
    support_size[0] = 0
    for node in range(first, nodes):
        a, b = left[node] >> 1, right[node] >> 1
        if support_size[a] < 0 or support_size[b] < 0:
            support_size[node] = -1
            continue
        i = j = n = 0
        while i < support_size[a] or j < support_size[b]:
            if n == k:
                n = -1
                break
            if j == support_size[b] or (i < support_size[a] and support[k * a + i] < support[k * b + j]):
                leaf = support[k * a + i]
                i += 1
            elif i == support_size[a] or support[k * b + j] < support[k * a + i]:
                leaf = support[k * b + j]
                j += 1
            else:
                leaf = support[k * a + i]
                i += 1
                j += 1
            support[k * node + n] = leaf
            n += 1
        support_size[node] = n


def enumerate_cuts(first, nodes, k, slots, kind, left, right, share, flow, lows, prices, cut_data, scratch):
    """Fills in the cuts of all nodes and the area flow of each node's cheapest."""
    size, leaves, tables, marks, _, flows = cut_data
    support, support_size = scratch[0], scratch[1]
    supports(first, nodes, k, left, right, support, support_size)
    full = lows[k]
    for node in range(nodes):
        base = node * slots
        for c in range(base, base + slots):
            size[c] = -1
        if kind[node]:
            cuts_of_gate(node, k, slots, kind, left, right, flow, lows, prices, cut_data, scratch)
            cheapest = flows[base]
            if size[base] < 0 or (size[base + slots - 2] >= 0 and flows[base + slots - 2] < cheapest):
                cheapest = flows[base + slots - 2]
            flow[node] = cheapest / max(share[node], 1.0)
        own = base + slots - 1
        size[own] = 1 if node else 0
        leaves[own * k] = node
        tables[own] = full - lows[0] if node else 0
        marks[own] = 1 << (node % 61) if node else 0


def cuts_of_gate(node, k, slots, kind, left, right, flow, lows, prices, cut_data, scratch):
    """Joins the cuts of both operands."""
    size, leaves, tables, marks, _, _ = cut_data
    support, support_size, out, places = scratch
    a, b = left[node], right[node]
    full = lows[k]
    flip_a, flip_b = full * (a & 1), full * (b & 1)
    base, begin_a, begin_b = node * slots, (a >> 1) * slots, (b >> 1) * slots
    keep = slots - 2
    wanted = support_size[node]
    for c in range(begin_a, begin_a + slots):
        if size[c] < 0:
            continue
        for d in range(begin_b, begin_b + slots):
            if size[d] < 0 or more_than(marks[c] | marks[d], k):
                continue
            n = merge(k, c, d, size, leaves, out, places)
            if n < 0:
                continue
            one = spread(tables[c], size[c], places, 0, lows) ^ flip_a
            other = spread(tables[d], size[d], places, k, lows) ^ flip_b
            table = one ^ other if kind[node] == 2 else one & other
            is_support = n == wanted
            if is_support:
                for i in range(n):
                    if out[i] != support[k * node + i]:
                        is_support = False
            table, n = shrink(table, n, out, lows)
            price = price_of(table, n, k, prices)
            mark = 0
            total = price
            for i in range(n):
                mark |= 1 << (out[i] % 61)
                total += flow[out[i]]
            if is_support and size[base + slots - 2] < 0:
                store(base + slots - 2, k, n, out, table, mark, price, total, cut_data)
            insert(base, keep, k, n, out, table, mark, price, total, cut_data)


def choose_by_flow(first, nodes, k, slots, share, flow, depth, best, cut_data):
    """Picks each node's cut of least area flow, the flatter one where two cost the same."""
    size, leaves, _, _, prices, _ = cut_data
    for node in range(first, nodes):
        base = node * slots
        chosen, least, flattest = -1, 0.0, 0.0
        for place in range(slots - 1):
            c = base + place
            if size[c] < 0:
                continue
            total = prices[c]
            level = 0.0
            for i in range(size[c]):
                leaf = leaves[c * k + i]
                total += flow[leaf]
                level = max(level, depth[leaf])
            level += 1.0 if prices[c] >= 1.0 else 0.0
            if chosen < 0 or total < least - 1e-9 or (total < least + 1e-9 and level < flattest):
                chosen, least, flattest = place, total, level
        best[node] = chosen
        depth[node] = flattest
        flow[node] = least / max(share[node], 1.0)


def count_uses(first, nodes, k, slots, outputs, refs, best, cut_data):
    """Counts how often the cover uses each node; returns its total price."""
    size, leaves, _, _, prices, _ = cut_data
    for node in range(nodes):
        refs[node] = 0
    for i in range(len(outputs)):
        refs[outputs[i] >> 1] += 1
    total = 0.0
    for node in range(nodes - 1, first - 1, -1):
        if refs[node] == 0:
            continue
        c = node * slots + best[node]
        total += prices[c]
        for i in range(size[c]):
            refs[leaves[c * k + i]] += 1
    return total


def blend(first, nodes, refs, share):
    """Moves the smoothed use counts towards the present cover's."""
    for node in range(first, nodes):
        share[node] = (share[node] + 2.0 * refs[node]) / 3.0


def take(c, first, k, slots, refs, best, cut_data, stack):
    """Adds a cut's uses to the cover; returns the price of everything that this makes necessary."""
    size, leaves, _, _, prices, _ = cut_data
    area = prices[c]
    stack[0] = c
    height = 1
    while height:
        height -= 1
        d = stack[height]
        for i in range(size[d]):
            leaf = leaves[d * k + i]
            refs[leaf] += 1
            if refs[leaf] == 1 and leaf >= first:
                e = leaf * slots + best[leaf]
                area += prices[e]
                stack[height] = e
                height += 1
    return area


def release(c, first, k, slots, refs, best, cut_data, stack):
    """Removes a cut's uses from the cover: the opposite of `take`."""
    size, leaves, _, _, _, _ = cut_data
    stack[0] = c
    height = 1
    while height:
        height -= 1
        d = stack[height]
        for i in range(size[d]):
            leaf = leaves[d * k + i]
            refs[leaf] -= 1
            if refs[leaf] == 0 and leaf >= first:
                stack[height] = leaf * slots + best[leaf]
                height += 1


def recover_area(first, nodes, k, slots, depth, refs, best, cut_data, stack):
    """Replaces each used node's cut by the one that adds the least to the rest of the cover."""
    size, leaves, _, _, _, _ = cut_data
    for node in range(first, nodes):
        base = node * slots
        if refs[node] == 0:
            continue
        present = base + best[node]
        release(present, first, k, slots, refs, best, cut_data, stack)
        chosen, least, flattest = -1, 0.0, 0.0
        for place in range(slots - 1):
            c = base + place
            if size[c] < 0:
                continue
            area = take(c, first, k, slots, refs, best, cut_data, stack)
            release(c, first, k, slots, refs, best, cut_data, stack)
            level = 0.0
            for i in range(size[c]):
                level = max(level, depth[leaves[c * k + i]])
            if chosen < 0 or area < least - 1e-9 or (area < least + 1e-9 and level < flattest):
                chosen, least, flattest = place, area, level
        best[node] = chosen
        depth[node] = flattest + (1.0 if cut_data[4][base + chosen] >= 1.0 else 0.0)
        take(base + chosen, first, k, slots, refs, best, cut_data, stack)
