"""Numba kernels: rows of lanes shared by count, and phases in three rows. Called by `branch_kernels`.

A row is one column of the bit-sliced engine: words of 64 lanes, all of them in use; the rows are `pool`,
uint64 (rows, words). Row 0 is 0 in every lane and row 1 is 1 in every lane; no other row in use ever holds
one of these two, so that "the same in all lanes" is seen from the number of the row.
"""

from __future__ import annotations

import numpy as np

from revsynth.verification.kernel import kernel

ALL = np.uint64(0xFFFFFFFFFFFFFFFF)

(
    FREE_ROWS,
    FREE_SLOTS,
    RUNS,
    RANDOM,
    STEP,
    RUN,
    RUNS_BEFORE,
    DEATH,
    MOST_BRANCHES,
    MOST_RUNS,
    QUBITS,
    BRANCH_SPACE,
    RUN_SPACE,
    BIT_WORDS,
    REFS,
    FREE,
    COLUMN,
    OPENED,
    PHASE,
    HALVES,
    SLOTS,
    MEMBERS,
    COUNT,
    BITS,
    HEADER,
) = range(25)
"""Places in the int64 array `st` that holds the state of the engine but for the rows themselves.

How many rows and slots are free and how many runs there are; whether an outcome was uncertain. Where to go
on: at which step, with which run of how many, and which bit is the next that is no longer read. Limits and
sizes. Then where in `st` the tables start. REFS: users of a row; FREE: a stack of rows without users. By slot
s (a branch) and qubit q: COLUMN + s * qubits + q, the row of a closed qubit, 0 where it is open; OPENED + 3 *
(s * qubits + q), the three rows of an open qubit's phase, -1 where it is closed; PHASE + 3 * s; HALVES + s.
SLOTS: a stack of free slots. By run: MEMBERS + run * BRANCH_SPACE, its slots; COUNT + run; BITS + run *
BIT_WORDS, 32 bits a word.
HEADER: how many places there are.
"""


@kernel
def column_of(st, slot, qubit):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Where in `st` the row of a closed qubit is."""
    return st[COLUMN] + slot * st[QUBITS] + qubit


@kernel
def opened_of(st, slot, qubit):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Where in `st` the three rows of an open qubit's phase are."""
    return st[OPENED] + 3 * (slot * st[QUBITS] + qubit)


@kernel
def phase_of(st, slot):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Where in `st` the three rows of a branch's phase are."""
    return st[PHASE] + 3 * slot


@kernel
def member(st, run, k):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Where in `st` the slot of branch k of a run is."""
    return st[MEMBERS] + run * st[BRANCH_SPACE] + k


@kernel
def taken(pool, st):  # type: ignore[no-untyped-def]  # pragma: no cover
    """A row nobody uses, with one user now."""
    st[FREE_ROWS] -= 1
    row = st[st[FREE] + st[FREE_ROWS]]
    st[st[REFS] + row] = 1
    return row


@kernel
def dropped(pool, st, row):  # type: ignore[no-untyped-def]  # pragma: no cover
    """One user less."""
    if row >= 2:
        st[st[REFS] + row] -= 1
        if st[st[REFS] + row] == 0:
            st[st[FREE] + st[FREE_ROWS]] = row
            st[FREE_ROWS] += 1


@kernel
def shared(pool, st, row):  # type: ignore[no-untyped-def]  # pragma: no cover
    """One user more."""
    if row >= 2:
        st[st[REFS] + row] += 1
    return row


@kernel
def private(pool, st, row):  # type: ignore[no-untyped-def]  # pragma: no cover
    """For one of its users: a row with the same lanes that may be written."""
    if row >= 2 and st[st[REFS] + row] == 1:
        return row
    new = taken(pool, st)
    source, into = pool[row], pool[new]
    for i in range(source.size):
        into[i] = source[i]
    dropped(pool, st, row)
    return new


@kernel
def settled(pool, st, row, some, every):  # type: ignore[no-untyped-def]  # pragma: no cover
    """A row just written, the OR and the AND of its words known: itself, or 0 or 1."""
    if some == np.uint64(0):
        dropped(pool, st, row)
        return 0
    if every == ALL:
        dropped(pool, st, row)
        return 1
    return row


@kernel
def xored(pool, st, row, where):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The row XOR `where`, in place of the row for the one user that asks."""
    if where == 0:
        return row
    if row == 0:
        return shared(pool, st, where)
    if row == where:
        dropped(pool, st, row)
        return 0
    row = private(pool, st, row)
    a, w = pool[row], pool[where]
    some, every = np.uint64(0), ALL
    for i in range(a.size):
        value = a[i] ^ w[i]
        a[i] = value
        some |= value
        every &= value
    return settled(pool, st, row, some, every)


@kernel
def both(pool, st, one, other):  # type: ignore[no-untyped-def]  # pragma: no cover
    """One user more of the row one AND other."""
    if one == 0 or other == 0:
        return 0
    if one == 1 or one == other:
        return shared(pool, st, other)
    if other == 1:
        return shared(pool, st, one)
    row = taken(pool, st)
    c, a, b = pool[row], pool[one], pool[other]
    some = np.uint64(0)
    for i in range(c.size):
        value = a[i] & b[i]
        c[i] = value
        some |= value
    return settled(pool, st, row, some, np.uint64(0))


@kernel
def inverted(pool, st, row):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The complement, in place of the row for the one user that asks."""
    return xored(pool, st, row, 1)


@kernel
def equal(pool, st, one, other):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Whether two rows hold the same."""
    if one == other:
        return True
    if one < 2 or other < 2:
        return False
    a, b = pool[one], pool[other]
    i = 0
    while i < a.size and a[i] == b[i]:
        i += 1
    return i == a.size


@kernel
def opposite(pool, st, one, other):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Whether two rows differ in every lane."""
    if one < 2 or other < 2:
        return one < 2 and other < 2 and one != other
    a, b = pool[one], pool[other]
    i = 0
    while i < a.size and a[i] ^ b[i] == ALL:
        i += 1
    return i == a.size


@kernel
def narrowed(pool, st, found, row, negative):  # type: ignore[no-untyped-def]  # pragma: no cover
    """`found` AND the row (its complement where negative), in place of `found`."""
    if found == 1:
        found = shared(pool, st, row)
        return inverted(pool, st, found) if negative else found
    found = private(pool, st, found)
    f, a = pool[found], pool[row]
    some = np.uint64(0)
    if negative:
        for i in range(f.size):
            value = f[i] & ~a[i]
            f[i] = value
            some |= value
    else:
        for i in range(f.size):
            value = f[i] & a[i]
            f[i] = value
            some |= value
    return settled(pool, st, found, some, np.uint64(0))


@kernel
def product(pool, st, slot, literal, begin, end):  # type: ignore[no-untyped-def]  # pragma: no cover
    """One user more of the row of lanes in which the literals begin ... end - 1 hold; all closed."""
    left = 0
    last = 0
    for k in range(begin, end):
        row = st[column_of(st, slot, literal[k] >> 1)]
        if row >= 2:
            left += 1
            last = literal[k]
        elif row == literal[k] & 1:
            return 0
    if left == 0:
        return 1
    if left == 1:
        row = shared(pool, st, st[column_of(st, slot, last >> 1)])
        return inverted(pool, st, row) if last & 1 else row
    found = 1
    for k in range(begin, end):
        row = st[column_of(st, slot, literal[k] >> 1)]
        if row >= 2:
            found = narrowed(pool, st, found, row, literal[k] & 1)
            if found == 0:
                return found
    return found


@kernel
def _one_more(pool, st, place, where, less):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Add 1 modulo 8, or take 1 away where `less`."""
    r0, r1, r2 = (
        private(pool, st, st[place]),
        private(pool, st, st[place + 1]),
        private(pool, st, st[place + 2]),
    )
    a, b, c, w = pool[r0], pool[r1], pool[r2], pool[where]
    flip = ALL if less else np.uint64(0)
    some0, some1, some2 = np.uint64(0), np.uint64(0), np.uint64(0)
    every0, every1, every2 = ALL, ALL, ALL
    for i in range(a.size):
        carry = (a[i] ^ flip) & w[i]
        over = (b[i] ^ flip) & carry
        low, middle, high = a[i] ^ w[i], b[i] ^ carry, c[i] ^ over
        a[i] = low
        b[i] = middle
        c[i] = high
        some0 |= low
        some1 |= middle
        some2 |= high
        every0 &= low
        every1 &= middle
        every2 &= high
    st[place] = settled(pool, st, r0, some0, every0)
    st[place + 1] = settled(pool, st, r1, some1, every1)
    st[place + 2] = settled(pool, st, r2, some2, every2)


@kernel
def turned(pool, st, place, where, amount):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Add `amount` modulo 8 to the phase in st[place : place + 3] in the lanes of `where`."""
    if where == 0:
        return
    p0, p1, p2 = st[place], st[place + 1], st[place + 2]
    if where == 1 and p0 < 2 and p1 < 2 and p2 < 2:
        total = p0 + 2 * p1 + 4 * p2 + amount
        for plane in range(3):
            st[place + plane] = (total >> plane) & 1
        return
    if amount & 1:
        _one_more(pool, st, place, where, (amount & 2) != 0)
        if amount == 3 or amount == 5:
            st[place + 2] = xored(pool, st, st[place + 2], where)
        return
    if amount & 2:
        part = both(pool, st, p1, where)
        if amount == 6:
            part = xored(pool, st, part, where)
        st[place + 1] = xored(pool, st, p1, where)
        st[place + 2] = xored(pool, st, p2, part)
        dropped(pool, st, part)
    else:
        st[place + 2] = xored(pool, st, p2, where)


@kernel
def _full_adder(pool, st, slot, part, carry):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Plane 1 of the slot's phase plus two rows; what goes over into plane 2, with one user."""
    row, over = private(pool, st, st[phase_of(st, slot) + 1]), taken(pool, st)
    a, o, b, c = pool[row], pool[over], pool[part], pool[carry]
    some, every, some_over, every_over = np.uint64(0), ALL, np.uint64(0), ALL
    for i in range(a.size):
        half = a[i] ^ b[i]
        out = (a[i] & b[i]) | (half & c[i])
        value = half ^ c[i]
        a[i] = value
        o[i] = out
        some |= value
        every &= value
        some_over |= out
        every_over &= out
    st[phase_of(st, slot) + 1] = settled(pool, st, row, some, every)
    return settled(pool, st, over, some_over, every_over)


@kernel
def added(pool, st, slot, o0, o1, o2, where):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Add the phase in the rows o0, o1, o2 to that of a slot in the lanes of `where`.

    In three loops of few arrays each, because compilers give up on telling many arrays apart.
    """
    part0 = both(pool, st, o0, where)
    part1 = both(pool, st, o1, where)
    part2 = both(pool, st, o2, where)
    carry = both(pool, st, st[phase_of(st, slot) + 0], part0)
    st[phase_of(st, slot) + 0] = xored(pool, st, st[phase_of(st, slot) + 0], part0)
    middle = st[phase_of(st, slot) + 1]
    if part1 == 0 and carry == 0:
        over = 0
    elif part1 == 0:
        over = both(pool, st, middle, carry)
        st[phase_of(st, slot) + 1] = xored(pool, st, middle, carry)
    elif carry == 0:
        over = both(pool, st, middle, part1)
        st[phase_of(st, slot) + 1] = xored(pool, st, middle, part1)
    else:
        over = _full_adder(pool, st, slot, part1, carry)
    st[phase_of(st, slot) + 2] = xored(pool, st, xored(pool, st, st[phase_of(st, slot) + 2], part2), over)
    dropped(pool, st, part0)
    dropped(pool, st, part1)
    dropped(pool, st, part2)
    dropped(pool, st, carry)
    dropped(pool, st, over)


@kernel
def negated(pool, st, place, where):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Minus the phase in st[place : place + 3], in the lanes of `where`."""
    low, middle = st[place], st[place + 1]
    if low == 0 and middle == 0:
        return
    if low == 1:
        part = shared(pool, st, where)
        st[place + 1] = xored(pool, st, middle, where)
    else:
        part = both(pool, st, low, where)
        rest = both(pool, st, middle, where)
        st[place + 1] = xored(pool, st, middle, part)
        shorter = both(pool, st, part, rest)
        part = xored(pool, st, xored(pool, st, part, rest), shorter)
        dropped(pool, st, rest)
        dropped(pool, st, shorter)
    st[place + 2] = xored(pool, st, st[place + 2], part)
    dropped(pool, st, part)
