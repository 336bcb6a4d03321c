"""Numba kernels: NOTs, phases and Hadamards on the branches of a run. Called by `kernels`.

The rules are those of `branches`, lane for lane, with rows of `row_kernels` for its columns. Every function
that may run out of room says so before it changes anything but the form that the same state is written in.
"""

from __future__ import annotations

import numpy as np

from revsynth.verification.kernel import kernel
from revsynth.verification.row_kernels import (
    ALL,
    BRANCH_SPACE,
    COUNT,
    FREE_ROWS,
    FREE_SLOTS,
    HALVES,
    QUBITS,
    SLOTS,
    added,
    both,
    column_of,
    dropped,
    equal,
    inverted,
    member,
    negated,
    opened_of,
    opposite,
    phase_of,
    private,
    product,
    settled,
    shared,
    turned,
    xored,
)

GOOD, MORE_ROWS, MORE_SLOTS, CROWDED, NOT_UNIFORM, REVEALS = range(6)
"""What became of a step. After MORE_ROWS and MORE_SLOTS it is to be tried again with more room."""
ROOM = 32
"""A step on one branch takes fewer rows than this; measurements ask for more."""


@kernel
def is_open(st, slot, qubit):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Whether a qubit is open in a branch."""
    return st[opened_of(st, slot, qubit)] >= 0


@kernel
def released(pool, st, slot):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Give a branch's slot and rows back."""
    qubits = st[QUBITS]
    for q in range(qubits):
        dropped(pool, st, st[column_of(st, slot, q)])
        if st[opened_of(st, slot, q)] >= 0:
            for plane in range(3):
                dropped(pool, st, st[opened_of(st, slot, q) + plane])
    for plane in range(3):
        dropped(pool, st, st[phase_of(st, slot) + plane])
    st[st[SLOTS] + st[FREE_SLOTS]] = slot
    st[FREE_SLOTS] += 1


@kernel
def copied(pool, st, slot):  # type: ignore[no-untyped-def]  # pragma: no cover
    """A new slot with the same branch; there must be one."""
    st[FREE_SLOTS] -= 1
    new = st[st[SLOTS] + st[FREE_SLOTS]]
    qubits = st[QUBITS]
    for q in range(qubits):
        st[column_of(st, new, q)] = shared(pool, st, st[column_of(st, slot, q)])
        for plane in range(3):
            st[opened_of(st, new, q) + plane] = shared(pool, st, st[opened_of(st, slot, q) + plane])
    for plane in range(3):
        st[phase_of(st, new) + plane] = shared(pool, st, st[phase_of(st, slot) + plane])
    st[st[HALVES] + new] = st[st[HALVES] + slot]
    return new


@kernel
def expanded(pool, st, run, qubit):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The same state with a qubit closed in every branch."""
    count = st[st[COUNT] + run]
    wanted = 0
    for k in range(count):
        if is_open(st, st[member(st, run, k)], qubit):
            wanted += 1
    if wanted == 0:
        return GOOD
    if count + wanted > st[BRANCH_SPACE]:
        return CROWDED
    if st[FREE_SLOTS] < wanted:
        return MORE_SLOTS
    if st[FREE_ROWS] < ROOM * wanted:
        return MORE_ROWS
    place = count + wanted - 1
    for k in range(count - 1, -1, -1):
        slot = st[member(st, run, k)]
        spot = opened_of(st, slot, qubit)
        if st[spot] >= 0:
            o0, o1, o2 = st[spot], st[spot + 1], st[spot + 2]
            st[spot] = st[spot + 1] = st[spot + 2] = -1
            new = copied(pool, st, slot)
            added(pool, st, new, o0, o1, o2, 1)
            dropped(pool, st, o0)
            dropped(pool, st, o1)
            dropped(pool, st, o2)
            st[column_of(st, new, qubit)] = 1
            st[st[HALVES] + new] += 1
            st[st[HALVES] + slot] += 1
            st[member(st, run, place)] = new
            place -= 1
        st[member(st, run, place)] = slot
        place -= 1
    st[st[COUNT] + run] = count + wanted
    return GOOD


@kernel
def closed_controls(pool, st, run, literal, begin, end):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Close the qubits of some literals, and see to it that there is room for a step on all branches."""
    for k in range(begin, end):
        status = expanded(pool, st, run, literal[k] >> 1)
        if status != GOOD:
            return status
    return MORE_ROWS if st[FREE_ROWS] < ROOM * st[st[COUNT] + run] else GOOD


@kernel
def flip_branch(pool, st, slot, target, where):  # type: ignore[no-untyped-def]  # pragma: no cover
    """NOT on `target` of one branch in the lanes of `where`."""
    spot = opened_of(st, slot, target)
    if st[spot] < 0:
        st[column_of(st, slot, target)] = xored(pool, st, st[column_of(st, slot, target)], where)
        return
    o0, o1, o2 = st[spot], st[spot + 1], st[spot + 2]
    if o0 == 0 and o1 == 0 and o2 == 0:
        return
    added(pool, st, slot, o0, o1, o2, where)
    negated(pool, st, spot, where)


@kernel
def flipped(pool, st, run, target, literal, begin, end):  # type: ignore[no-untyped-def]  # pragma: no cover
    """NOT on `target` where all literals hold."""
    status = closed_controls(pool, st, run, literal, begin, end)
    if status != GOOD:
        return status
    for k in range(st[st[COUNT] + run]):
        slot = st[member(st, run, k)]
        where = product(pool, st, slot, literal, begin, end)
        if where != 0:
            flip_branch(pool, st, slot, target, where)
            dropped(pool, st, where)
    return GOOD


@kernel
def turned_run(pool, st, run, amount, literal, begin, end):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The phase omega**amount where all literals hold; the first literal's qubit may stay open."""
    status = closed_controls(pool, st, run, literal, begin + 1, end)
    if status != GOOD:
        return status
    for k in range(st[st[COUNT] + run]):
        slot = st[member(st, run, k)]
        if begin < end and is_open(st, slot, literal[begin] >> 1):
            spot = opened_of(st, slot, literal[begin] >> 1)
            where = product(pool, st, slot, literal, begin + 1, end)
            own = amount
            if literal[begin] & 1:
                turned(pool, st, phase_of(st, slot), where, amount)
                own = (8 - amount) & 7
            turned(pool, st, spot, where, own)
        else:
            where = product(pool, st, slot, literal, begin, end)
            turned(pool, st, phase_of(st, slot), where, amount)
        dropped(pool, st, where)
    return GOOD


@kernel
def alike(pool, st, one, other, apart):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Whether two branches agree in all qubits but `apart` (-1: in all), phases of open ones included."""
    qubits = st[QUBITS]
    for q in range(qubits):
        if q != apart and not equal(pool, st, st[column_of(st, one, q)], st[column_of(st, other, q)]):
            return False
    for q in range(qubits):
        a, b = opened_of(st, one, q), opened_of(st, other, q)
        if (st[a] < 0) != (st[b] < 0):
            return False
        if st[a] >= 0:
            for plane in range(3):
                if not equal(pool, st, st[a + plane], st[b + plane]):
                    return False
    return True


@kernel
def _partner(pool, st, run, k, qubit):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The place of a later branch that differs from the one in place k in the qubit alone, in every lane."""
    one = st[member(st, run, k)]
    for place in range(k + 1, st[st[COUNT] + run]):
        other = st[member(st, run, place)]
        if opposite(pool, st, st[column_of(st, one, qubit)], st[column_of(st, other, qubit)]) and alike(
            pool, st, one, other, qubit
        ):
            return place
    return -1


@kernel
def chosen(pool, st, where, one, other):  # type: ignore[no-untyped-def]  # pragma: no cover
    """One user more of the row that is `one` in the lanes of `where` and `other` elsewhere."""
    if one == other:
        return shared(pool, st, one)
    row = xored(pool, st, shared(pool, st, one), other)
    part = both(pool, st, row, where)
    dropped(pool, st, row)
    row = xored(pool, st, shared(pool, st, other), part)
    dropped(pool, st, part)
    return row


@kernel
def difference_word(pool, st, b0, b1, b2, a0, a1, a2, i):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Word i of the phase in the rows b less that in the rows a, modulo 8."""
    low, taken_low = pool[b0, i], pool[a0, i]
    middle, taken_middle = pool[b1, i], pool[a1, i]
    borrow = ~low & taken_low
    over = (~middle & (taken_middle | borrow)) | (taken_middle & borrow)
    return low ^ taken_low, middle ^ taken_middle ^ borrow, pool[b2, i] ^ pool[a2, i] ^ over


@kernel
def subtracted(pool, st, spot, slot):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Take the phase of a slot away from that of an open qubit, modulo 8, in every lane."""
    r0, r1, r2 = st[spot], st[spot + 1], st[spot + 2]
    a0, a1, a2 = st[phase_of(st, slot)], st[phase_of(st, slot) + 1], st[phase_of(st, slot) + 2]
    r0, r1, r2 = private(pool, st, r0), private(pool, st, r1), private(pool, st, r2)
    some0, some1, some2 = np.uint64(0), np.uint64(0), np.uint64(0)
    every0, every1, every2 = ALL, ALL, ALL
    for i in range(pool.shape[1]):
        low, middle, high = difference_word(pool, st, r0, r1, r2, a0, a1, a2, i)
        pool[r0, i] = low
        pool[r1, i] = middle
        pool[r2, i] = high
        some0 |= low
        some1 |= middle
        some2 |= high
        every0 &= low
        every1 &= middle
        every2 &= high
    st[spot] = settled(pool, st, r0, some0, every0)
    st[spot + 1] = settled(pool, st, r1, some1, every1)
    st[spot + 2] = settled(pool, st, r2, some2, every2)


@kernel
def _join(pool, st, slot, other, qubit):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Make two branches that differ in a qubit alone one with that qubit open; the other slot is released."""
    value = st[column_of(st, slot, qubit)]
    spot = opened_of(st, slot, qubit)
    for plane in range(3):
        here, there = st[phase_of(st, slot) + plane], st[phase_of(st, other) + plane]
        st[spot + plane] = chosen(pool, st, value, here, there)
        st[phase_of(st, slot) + plane] = chosen(pool, st, value, there, here)
        dropped(pool, st, here)
    subtracted(pool, st, spot, slot)
    dropped(pool, st, value)
    st[column_of(st, slot, qubit)] = 0
    st[st[HALVES] + slot] -= 1
    released(pool, st, other)


@kernel
def _close(pool, st, slot, qubit):  # type: ignore[no-untyped-def]  # pragma: no cover
    """H on an open qubit (see `branches._close`); False where the lanes would part."""
    spot = opened_of(st, slot, qubit)
    half = st[spot + 2]
    if st[spot] != 0 or st[spot + 1] >= 2:
        return False
    if st[spot + 1] == 1:
        turned(pool, st, phase_of(st, slot), 1, 1)
        turned(pool, st, phase_of(st, slot), half, 6)
        st[spot + 2] = inverted(pool, st, half)
        return True
    st[column_of(st, slot, qubit)] = half
    st[spot] = st[spot + 1] = st[spot + 2] = -1
    return True


@kernel
def hadamard(pool, st, run, qubit):  # type: ignore[no-untyped-def]  # pragma: no cover
    """H on a qubit: branches that differ in it alone are joined; closed qubits open and open ones close."""
    if st[FREE_ROWS] < ROOM * st[st[COUNT] + run]:
        return MORE_ROWS
    k = 0
    while k < st[st[COUNT] + run]:
        slot = st[member(st, run, k)]
        spot = opened_of(st, slot, qubit)
        if st[spot] < 0:
            partner = _partner(pool, st, run, k, qubit)
            if partner < 0:
                st[spot] = st[spot + 1] = 0
                st[spot + 2] = st[column_of(st, slot, qubit)]
                st[column_of(st, slot, qubit)] = 0
                k += 1
                continue
            other = st[member(st, run, partner)]
            if st[st[HALVES] + slot] != st[st[HALVES] + other]:
                return NOT_UNIFORM
            _join(pool, st, slot, other, qubit)
            for later in range(partner + 1, st[st[COUNT] + run]):
                st[member(st, run, later - 1)] = st[member(st, run, later)]
            st[st[COUNT] + run] -= 1
        if not _close(pool, st, slot, qubit):
            return NOT_UNIFORM
        k += 1
    return GOOD


@kernel
def constant_difference(pool, st, one, other):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The phase of a branch less that of another where it is the same in every lane, else -1."""
    b0, b1, b2 = st[phase_of(st, one)], st[phase_of(st, one) + 1], st[phase_of(st, one) + 2]
    a0, a1, a2 = st[phase_of(st, other)], st[phase_of(st, other) + 1], st[phase_of(st, other) + 2]
    if b0 == a0 and b1 == a1 and b2 == a2:
        return 0
    first = difference_word(pool, st, b0, b1, b2, a0, a1, a2, 0)
    amount = 0
    for plane in range(3):
        if first[plane] == ALL:
            amount |= 1 << plane
        elif first[plane] != np.uint64(0):
            return -1
    for i in range(1, pool.shape[1]):
        if difference_word(pool, st, b0, b1, b2, a0, a1, a2, i) != first:
            return -1
    return amount
