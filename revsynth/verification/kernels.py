"""Numba kernels: a whole circuit on all runs, measurements and conditions included. Called by `compiled`.

The rules are those of `bitsliced`. The kernel can be left for more room and entered again where it stopped.
"""

from __future__ import annotations

import numpy as np

from revsynth.verification.branch_kernels import (
    CROWDED,
    GOOD,
    MORE_ROWS,
    NOT_UNIFORM,
    REVEALS,
    ROOM,
    alike,
    chosen,
    constant_difference,
    expanded,
    flipped,
    hadamard,
    is_open,
    released,
    turned_run,
)
from revsynth.verification.kernel import kernel
from revsynth.verification.row_kernels import (
    ALL,
    BIT_WORDS,
    BITS,
    COUNT,
    DEATH,
    FREE_ROWS,
    HALVES,
    MOST_BRANCHES,
    MOST_RUNS,
    QUBITS,
    RANDOM,
    RUN,
    RUN_SPACE,
    RUNS,
    RUNS_BEFORE,
    STEP,
    column_of,
    dropped,
    member,
    opened_of,
    opposite,
    phase_of,
    shared,
)
from revsynth.verification.steps import ANGLE, FLIP, HADAMARD, TURN

ACT, TARGET, AMOUNT, CONDITION, BIT = range(5)
"""What the columns of `steps` hold: as in `Steps`."""


@kernel
def write_bit(st, run, bit, value):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Set a classical bit of a run."""
    place = st[BITS] + run * st[BIT_WORDS] + (bit >> 5)
    mask = np.int64(1) << (bit & 31)
    st[place] = (st[place] | mask) if value else (st[place] & ~mask)


@kernel
def _written(st, run, qubit, bit, value):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Note the outcome, or set the qubit of a reset (bit -1) to 0."""
    if bit >= 0:
        write_bit(st, run, bit, value)
    elif value:
        for k in range(st[st[COUNT] + run]):
            st[column_of(st, st[member(st, run, k)], qubit)] = 0


@kernel
def _split(st, run, qubit):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Move the branches with a 1 on the qubit to a new run; in each it is the same in every lane."""
    new = st[RUNS]
    st[RUNS] += 1
    for word in range(st[BIT_WORDS]):
        st[st[BITS] + new * st[BIT_WORDS] + word] = st[st[BITS] + run * st[BIT_WORDS] + word]
    stay, go = 0, 0
    for k in range(st[st[COUNT] + run]):
        slot = st[member(st, run, k)]
        if st[column_of(st, slot, qubit)] == 1:
            st[member(st, new, go)] = slot
            go += 1
        else:
            st[member(st, run, stay)] = slot
            stay += 1
    st[st[COUNT] + run] = stay
    st[st[COUNT] + new] = go


@kernel
def _orthogonal(pool, st, one, other):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Whether in every lane two branches differ in a qubit that is closed in both."""
    qubits = st[QUBITS]
    for q in range(qubits):
        closed = not (is_open(st, one, q) or is_open(st, other, q))
        if closed and opposite(pool, st, st[column_of(st, one, q)], st[column_of(st, other, q)]):
            return True
    for i in range(pool.shape[1]):
        different = np.uint64(0)
        for q in range(qubits):
            if not (is_open(st, one, q) or is_open(st, other, q)):
                different |= pool[st[column_of(st, one, q)], i] ^ pool[st[column_of(st, other, q)], i]
        if different != ALL:
            return False
    return True


@kernel
def _distinct(pool, st, run):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Whether any two branches are orthogonal in every lane, so that weights add up."""
    for k in range(st[st[COUNT] + run]):
        for later in range(k + 1, st[st[COUNT] + run]):
            if not _orthogonal(pool, st, st[member(st, run, k)], st[member(st, run, later)]):
                return False
    return True


@kernel
def _exchange(pool, st, here, there, value):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Exchange the rows that stand at two places of `st`, in the lanes of `value`."""
    a, b = st[here], st[there]
    if a != b:
        st[here] = chosen(pool, st, value, b, a)
        st[there] = chosen(pool, st, value, a, b)
        dropped(pool, st, a)
        dropped(pool, st, b)


@kernel
def _taken_apart(pool, st, one, other, qubit):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Write two equally heavy branches that differ on the qubit in every lane by its value: 0 first, then 1.

    False, with nothing changed, where they are not of that kind.
    """
    qubits = st[QUBITS]
    value = st[column_of(st, one, qubit)]
    if st[st[HALVES] + one] != st[st[HALVES] + other]:
        return False
    if not opposite(pool, st, value, st[column_of(st, other, qubit)]):
        return False
    for q in range(qubits):
        if is_open(st, one, q) != is_open(st, other, q):
            return False
    shared(pool, st, value)
    for q in range(qubits):
        _exchange(pool, st, column_of(st, one, q), column_of(st, other, q), value)
        if is_open(st, one, q):
            for plane in range(3):
                _exchange(pool, st, opened_of(st, one, q) + plane, opened_of(st, other, q) + plane, value)
    for plane in range(3):
        _exchange(pool, st, phase_of(st, one) + plane, phase_of(st, other) + plane, value)
    dropped(pool, st, value)
    return True


@kernel
def measured(pool, st, run, qubit, bit):  # type: ignore[no-untyped-def]  # pragma: no cover
    """A measurement into `bit`, or a reset where that is -1; the run of the outcome 1 may be a new one."""
    status = expanded(pool, st, run, qubit)
    if status != GOOD:
        return status
    if st[FREE_ROWS] < 8 * st[QUBITS] + 2 * ROOM:
        return MORE_ROWS
    zeros, ones = 0, 0
    for k in range(st[st[COUNT] + run]):
        zeros += st[column_of(st, st[member(st, run, k)], qubit)] == 0
        ones += st[column_of(st, st[member(st, run, k)], qubit)] == 1
    if zeros == st[st[COUNT] + run] or ones == st[st[COUNT] + run]:
        _written(st, run, qubit, bit, np.int64(ones > 0))
        return GOOD
    if st[st[COUNT] + run] == 1:
        return REVEALS
    if not _distinct(pool, st, run):
        return NOT_UNIFORM
    if st[RUNS] == st[RUN_SPACE]:
        return CROWDED
    if zeros + ones != st[st[COUNT] + run]:
        if st[st[COUNT] + run] != 2:
            return NOT_UNIFORM
        if not _taken_apart(pool, st, st[member(st, run, 0)], st[member(st, run, 1)], qubit):
            return NOT_UNIFORM
    _split(st, run, qubit)
    _written(st, run, qubit, bit, 0)
    _written(st, st[RUNS] - 1, qubit, bit, 1)
    st[RANDOM] = 1
    return GOOD


@kernel
def one_step(pool, st, run, steps, offset, literal):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The step that `st` stands at, on one run."""
    i = st[STEP]
    act, target = np.int64(steps[i, ACT]), np.int64(steps[i, TARGET])
    begin, end = offset[i], offset[i + 1]
    if act == FLIP:
        return flipped(pool, st, run, target, literal, begin, end)
    if act == TURN:
        return turned_run(pool, st, run, np.int64(steps[i, AMOUNT]), literal, begin, end)
    if act == HADAMARD:
        return hadamard(pool, st, run, target)
    if act == ANGLE:
        return GOOD if begin == end else NOT_UNIFORM
    return measured(pool, st, run, target, np.int64(steps[i, BIT]))


@kernel
def read_bit(st, run, bit):  # type: ignore[no-untyped-def]  # pragma: no cover
    """A classical bit of a run."""
    return (st[st[BITS] + run * st[BIT_WORDS] + (bit >> 5)] >> (bit & 31)) & 1


@kernel
def holds(st, rule, condition, run):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Whether all guards of a condition hold for the classical bits of a run.

    At rule[rule[condition]] stands the number of guards, then each guard: what it is expected to be, the
    number of its literals, the literals.
    """
    place = rule[condition]
    guards = rule[place]
    place += 1
    for _ in range(guards):
        met = 1
        for k in range(rule[place + 1]):
            literal = rule[place + 2 + k]
            if read_bit(st, run, literal >> 1) == literal & 1:
                met = 0
        if met != rule[place]:
            return False
        place += 2 + rule[place + 1]
    return True


@kernel
def _same_bits(st, one, other):  # type: ignore[no-untyped-def]  # pragma: no cover
    for word in range(st[BIT_WORDS]):
        if st[st[BITS] + one * st[BIT_WORDS] + word] != st[st[BITS] + other * st[BIT_WORDS] + word]:
            return False
    return True


@kernel
def _same_state(pool, st, one, other):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Whether every branch of one has its own in the other, all of them with one constant phase between.

    The branches of the other are brought into the order of the first as they are found.
    """
    count = st[st[COUNT] + one]
    if count != st[st[COUNT] + other]:
        return False
    turn, shift = 0, 0
    for k in range(count):
        slot, found = st[member(st, one, k)], -1
        for place in range(k, count):
            if alike(pool, st, slot, st[member(st, other, place)], -1):
                found = place
                break
        if found < 0:
            return False
        match = st[member(st, other, found)]
        st[member(st, other, found)] = st[member(st, other, k)]
        st[member(st, other, k)] = match
        amount = constant_difference(pool, st, slot, match)
        more = st[st[HALVES] + slot] - st[st[HALVES] + match]
        if amount < 0 or (k > 0 and (amount != turn or more != shift)):
            return False
        turn, shift = amount, more
    return True


@kernel
def _removed(pool, st, run):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Forget a run; later ones move up."""
    for k in range(st[st[COUNT] + run]):
        released(pool, st, st[member(st, run, k)])
    for later in range(run + 1, st[RUNS]):
        st[st[COUNT] + later - 1] = st[st[COUNT] + later]
        for word in range(st[BIT_WORDS]):
            place = st[BITS] + later * st[BIT_WORDS] + word
            st[place - st[BIT_WORDS]] = st[place]
        for k in range(st[st[COUNT] + later]):
            st[member(st, later - 1, k)] = st[member(st, later, k)]
    st[RUNS] -= 1


@kernel
def merge(pool, st):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Make runs one that agree in their bits and, up to a constant phase, in the state."""
    run = 1
    while run < st[RUNS]:
        again = False
        for kept in range(run):
            if _same_bits(st, run, kept) and _same_state(pool, st, run, kept):
                again = True
                break
        if again:
            _removed(pool, st, run)
        else:
            run += 1


@kernel
def run_script(pool, st, steps, offset, literal, rule, deaths):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Go on from where `st` says to the end, or to a step that cannot be done: how it went.

    steps int32 (n, 5); offset int64 (n + 1,) and literal int64 as in `Steps`; rule int64: see `holds`; deaths
    int64 (k, 2): step and bit, in order, bits that nobody reads any more after the step.
    """
    while st[STEP] < len(steps):
        i = st[STEP]
        condition = np.int64(steps[i, CONDITION])
        while st[RUN] < st[RUNS_BEFORE]:
            run = st[RUN]
            if condition < 0 or holds(st, rule, condition, run):
                status = one_step(pool, st, run, steps, offset, literal)
                if status != GOOD:
                    return status
                if st[st[COUNT] + run] > st[MOST_BRANCHES]:
                    return CROWDED
            st[RUN] += 1
        while st[DEATH] < len(deaths) and deaths[st[DEATH], 0] == i:
            for run in range(st[RUNS]):
                write_bit(st, run, deaths[st[DEATH], 1], 0)
            st[DEATH] += 1
        if st[RUNS] > 1:
            if condition >= 0 or steps[i, ACT] >= HADAMARD:
                merge(pool, st)
            if st[RUNS] > st[MOST_RUNS]:
                return CROWDED
        st[STEP] += 1
        st[RUN] = 0
        st[RUNS_BEFORE] = st[RUNS]
    return GOOD
