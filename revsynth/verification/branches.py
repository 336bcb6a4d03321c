"""Branches: the few basis states whose superposition is the state, for all lanes at once.

In a branch every lane has one basis state (a column a qubit), one phase omega**p, and the magnitude
2**(-halves/2), the same in all lanes. The state of a lane is the sum over the branches. NOTs and phases act
on each branch; a Hadamard doubles the branches or brings them together again. This follows every Clifford+T
circuit whose superpositions close in the end; where lanes would part, `NotUniformError` hands it to `sparse`.
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.verification.classical import Column
from revsynth.verification.phases import NO_PHASE, Phases, chosen, difference, turned


class NotUniformError(Exception):
    """The lanes do not all take the same way, or too many ways: another engine must decide."""


class Branch:
    """One basis state, phase and magnitude a lane. Columns are shared between branches where they agree."""

    __slots__ = ("columns", "halves", "phases")

    def __init__(self, columns: list[Column], phases: Phases = NO_PHASE, halves: int = 0) -> None:
        self.columns = columns
        self.phases = phases
        self.halves = halves


def product(columns: Sequence[Column], literals: Sequence[int], ones: Column) -> Column:
    """The lanes in which all literals hold."""
    found = ones
    for literal in literals:
        column = columns[literal >> 1]
        found = found ^ (found & column) if literal & 1 else found & column
    return found


def flip(branches: Sequence[Branch], target: int, literals: Sequence[int], ones: Column) -> None:
    """NOT on `target` where all literals hold; equal work on shared columns is done once."""
    before: list[Column] = []
    after = 0
    for branch in branches:
        columns = branch.columns
        operands = [columns[target], *(columns[literal >> 1] for literal in literals)]
        if not _same_objects(operands, before):
            before = operands
            after = columns[target] ^ product(columns, literals, ones)
        columns[target] = after


def _same_objects(some: Sequence[Column], others: Sequence[Column]) -> bool:
    return len(some) == len(others) and all(one is other for one, other in zip(some, others, strict=True))


def turn(branches: Sequence[Branch], amount: int, literals: Sequence[int], ones: Column) -> None:
    """The phase omega**amount where all literals hold."""
    for branch in branches:
        where = product(branch.columns, literals, ones)
        if where:
            branch.phases = turned(branch.phases, where, amount)


def hadamard(branches: list[Branch], qubit: int, ones: Column) -> list[Branch]:
    """H on a qubit: branches that differ there alone interfere, others split in two.

    Raises NotUniformError where branches interfere in some lanes one way and in others another way.
    """
    after: list[Branch] = []
    waiting = list(branches)
    while waiting:
        one = waiting.pop(0)
        partner = _partner(one, waiting, qubit, ones)
        if partner < 0:
            after.extend(_split(one, qubit, ones))
        else:
            after.extend(_interfere(one, waiting.pop(partner), qubit, ones))
    return after


def _partner(one: Branch, others: Sequence[Branch], qubit: int, ones: Column) -> int:
    for index, other in enumerate(others):
        if one.columns[qubit] ^ other.columns[qubit] == ones and _agree_elsewhere(one, other, qubit):
            return index
    return -1


def _agree_elsewhere(one: Branch, other: Branch, qubit: int) -> bool:
    return (
        one.columns[:qubit] == other.columns[:qubit]
        and one.columns[qubit + 1 :] == other.columns[qubit + 1 :]
    )


def _split(one: Branch, qubit: int, ones: Column) -> tuple[Branch, Branch]:
    """v to 0 + (-1)**v 1."""
    value = one.columns[qubit]
    zero = Branch(one.columns, one.phases, one.halves + 1)
    other = Branch(list(one.columns), turned(one.phases, value, 4), one.halves + 1)
    zero.columns[qubit] = 0
    other.columns[qubit] = ones
    return zero, other


def _interfere(one: Branch, other: Branch, qubit: int, ones: Column) -> list[Branch]:
    """a0 |0> + a1 |1> to (a0 + a1) |0> + (a0 - a1) |1>, all over sqrt(2).

    With a1 = a0 omega**d: d = 0 leaves sqrt(2) a0 |0>, d = 4 leaves sqrt(2) a0 |1>; d = 2 gives
    a0 (omega |0> + omega**-1 |1>) and d = 6 the same with 0 and 1 exchanged. Odd d gives no power of omega.
    """
    if one.halves != other.halves:
        raise NotUniformError
    value = one.columns[qubit]
    at_zero = chosen(value, other.phases, one.phases)
    at_one = chosen(value, one.phases, other.phases)
    odd, quarter, half = difference(at_one, at_zero, ones)
    if odd:
        raise NotUniformError
    if not quarter:
        one.columns[qubit] = half
        return [Branch(one.columns, at_zero, one.halves - 1)]
    if quarter != ones:
        raise NotUniformError
    first = turned(turned(at_zero, ones, 1), half, 6)
    second = turned(turned(at_zero, ones, 7), half, 2)
    one.columns[qubit] = 0
    other.columns[qubit] = ones
    return [Branch(one.columns, first, one.halves), Branch(other.columns, second, one.halves)]


def distinct(branches: Sequence[Branch], ones: Column) -> bool:
    """Whether any two branches are different basis states in every lane, so that weights add up."""
    for index, one in enumerate(branches):
        for other in branches[index + 1 :]:
            different = 0
            for a, b in zip(one.columns, other.columns, strict=True):
                if a is not b:
                    different |= a ^ b
            if different != ones:
                return False
    return True
