"""Fewer XORs between the same ANDs: sums that have two terms in common share the XOR of these.

The pair of terms that most sums hold becomes a term of its own, again and again (C. Paar, "Optimized
arithmetic for Reed-Solomon encoders", ISIT 1997). The ANDs stay as they are.
"""

from __future__ import annotations

import heapq

from revsynth.logic.and_reduction.common_operands import Forms, forms_of
from revsynth.logic.and_reduction.form_builder import Form, FormBuilder, fits
from revsynth.logic.network import FALSE, Literal, Network

MOST_TERMS = 2000
"""Inputs and ANDs up to which pairs are counted."""


def share_xors(network: Network) -> Network:
    """The network with its sums built anew where that needs fewer XORs; never more ANDs or XORs."""
    if network.inputs + network.ands > MOST_TERMS or network.xors < 2 or not fits(network):
        return network
    forms = forms_of(network)
    shared = _built(forms, *_paired(forms))
    return shared if (shared.ands, shared.xors) < (network.ands, network.xors) else network


def _paired(forms: Forms) -> tuple[list[tuple[int, int]], dict[Form, list[int]]]:
    """New terms, numbered behind the ANDs, each the sum of two earlier terms; and each sum's terms."""
    sums = sorted({form & -2 for form in forms.readers() if (form & -2).bit_count() > 1})
    count = forms.first + len(forms.products)
    holders = [0] * count
    for place, form in enumerate(sums):
        rest = form
        while rest:
            low = rest & -rest
            holders[low.bit_length() - 1] |= 1 << place
            rest ^= low
    heap = []
    held_often = [a for a in range(1, count) if holders[a].bit_count() > 1]
    for place, a in enumerate(held_often):
        for b in held_often[:place]:
            shared = (holders[a] & holders[b]).bit_count()
            if shared > 1:
                heap.append((-shared, b, a))
    heapq.heapify(heap)
    pairs: list[tuple[int, int]] = []
    while heap:
        claimed, a, b = heapq.heappop(heap)
        both = holders[a] & holders[b]
        shared = both.bit_count()
        if shared < 2:
            continue
        if shared < -claimed:
            heapq.heappush(heap, (-shared, a, b))
            continue
        number = count + len(pairs)
        pairs.append((a, b))
        holders[a] ^= both
        holders[b] ^= both
        holders.append(both)
        if number % 64 == 0:
            held_often = [c for c in held_often if holders[c].bit_count() > 1]
        for c in held_often:
            shared = (holders[c] & both).bit_count()
            if shared > 1:
                heapq.heappush(heap, (-shared, c, number))
        held_often.append(number)
    terms: dict[Form, list[int]] = {form: [] for form in sums}
    for number, held in enumerate(holders):
        while held:
            low = held & -held
            terms[sums[low.bit_length() - 1]].append(number)
            held ^= low
    return pairs, terms


def _built(forms: Forms, pairs: list[tuple[int, int]], terms: dict[Form, list[int]]) -> Network:
    """The network with its sums made of the shared terms."""
    builder = FormBuilder(forms.inputs)
    count = forms.first + len(forms.products)
    literals: list[Literal] = [FALSE] * (count + len(pairs))
    literals[: forms.first] = [1, *(2 * i for i in range(1, forms.first))]

    def term(number: int) -> Literal:
        """A term's literal, made when first wanted: everything that it is made of is there by then."""
        waiting = [number]
        while waiting:
            top = waiting[-1]
            if top < count or literals[top]:
                waiting.pop()
                continue
            a, b = pairs[top - count]
            missing = [c for c in (a, b) if c >= count and not literals[c]]
            if missing:
                waiting += missing
            else:
                literals[top] = builder.xor(literals[a], literals[b])
                waiting.pop()
        return literals[number]

    def summed(form: Form) -> Literal:
        rest = form & -2
        if rest.bit_count() < 2:
            total = literals[rest.bit_length() - 1] if rest else FALSE
        else:
            total = FALSE
            for number in terms[rest]:
                total = builder.xor(total, term(number))
        return total ^ (form & 1)

    for number, (one, other) in enumerate(forms.products):
        literals[forms.first + number] = builder.and_(summed(one), summed(other))
    return builder.build([summed(output) for output in forms.outputs])
