"""Branches: the few products whose superposition is the state, for all lanes at once.

In a branch every qubit is either *closed*, with one value a lane (a column), or *open*: in the state
(|0> + omega**p |1>) / sqrt(2) with one p a lane. The branch is the product of these, times a phase omega**p a
lane and the magnitude 2**(-halves/2), the same in all lanes. A Hadamard opens and closes qubits; NOTs and
phases whose controls are closed leave a product a product; a control on an open qubit first *expands* it into
two branches, and two branches that differ in one qubit alone are a product again. So a branch or two are
enough for the Clifford+T circuits of the trade, however their Hadamards are nested. Where lanes would have to
part, `NotUniformError` hands the circuit to `sparse`.
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.circuit.model import Qubit
from revsynth.verification.classical import Column
from revsynth.verification.phases import (
    NO_PHASE,
    Phases,
    added,
    chosen,
    difference,
    negated,
    turned,
)


class NotUniformError(Exception):
    """The lanes do not all take the same way: another engine must decide."""


class Branch:
    """A product state a lane. `columns` holds 0 for open qubits, `open` their phases."""

    __slots__ = ("columns", "halves", "open", "phases")

    def __init__(
        self,
        columns: list[Column],
        phases: Phases = NO_PHASE,
        halves: int = 0,
        open_qubits: dict[Qubit, Phases] | None = None,
    ) -> None:
        self.columns = columns
        self.phases = phases
        self.halves = halves
        self.open = {} if open_qubits is None else open_qubits


def product(columns: Sequence[Column], literals: Sequence[int], ones: Column) -> Column:
    """The lanes in which all literals hold."""
    found = ones
    for literal in literals:
        column = columns[literal >> 1]
        found = found ^ (found & column) if literal & 1 else found & column
    return found


def expanded(branches: Sequence[Branch], qubit: Qubit, ones: Column) -> list[Branch]:
    """The same state with a qubit closed in every branch."""
    after: list[Branch] = []
    for branch in branches:
        after.append(branch)
        if qubit in branch.open:
            phases = branch.open.pop(qubit)
            other = Branch(
                list(branch.columns),
                added(branch.phases, ones, phases),
                branch.halves + 1,
                dict(branch.open),
            )
            other.columns[qubit] = ones
            branch.halves += 1
            after.append(other)
    return after


def flip(branches: list[Branch], target: Qubit, literals: Sequence[int], ones: Column) -> list[Branch]:
    """NOT on `target` where all literals hold."""
    for literal in literals:
        control = literal >> 1
        if any(control in branch.open for branch in branches):
            branches = expanded(branches, control, ones)
    for branch in branches:
        columns = branch.columns
        if len(literals) == 1 and not literals[0] & 1:
            where = columns[literals[0] >> 1]
        else:
            where = product(columns, literals, ones)
        if target in branch.open:
            _flip_open(branch, target, where)
        else:
            columns[target] ^= where
    return branches


def _flip_open(branch: Branch, target: Qubit, where: Column) -> None:
    """|0> + omega**p |1> becomes omega**p (|0> + omega**-p |1>)."""
    phases = branch.open[target]
    branch.phases = added(branch.phases, where, phases)
    branch.open[target] = negated(phases, where)


def turn(branches: list[Branch], amount: int, literals: Sequence[int], ones: Column) -> list[Branch]:
    """The phase omega**amount where all literals hold."""
    for literal in literals[1:]:
        qubit = literal >> 1
        if any(qubit in branch.open for branch in branches):
            branches = expanded(branches, qubit, ones)
    for branch in branches:
        if literals and literals[0] >> 1 in branch.open:
            qubit = literals[0] >> 1
            where = product(branch.columns, literals[1:], ones)
            if literals[0] & 1:
                branch.phases = turned(branch.phases, where, amount)
            own = -amount & 7 if literals[0] & 1 else amount
            branch.open[qubit] = turned(branch.open[qubit], where, own)
        else:
            where = product(branch.columns, literals, ones)
            if where:
                branch.phases = turned(branch.phases, where, amount)
    return branches


def hadamard(branches: list[Branch], qubit: Qubit, ones: Column) -> list[Branch]:
    """H on a qubit: a closed one opens, an open one closes or stays open.

    Raises NotUniformError where an open qubit would close in some lanes only, or leaves the powers of omega.
    """
    after: list[Branch] = []
    waiting = list(branches)
    while waiting:
        one = waiting.pop(0)
        if qubit not in one.open:
            partner = _partner(one, waiting, qubit, ones)
            if partner < 0:
                one.open[qubit] = (0, 0, one.columns[qubit])
                one.columns[qubit] = 0
                after.append(one)
                continue
            _join(one, waiting.pop(partner), qubit, ones)
        _close(one, qubit, ones)
        after.append(one)
    return after


def _partner(one: Branch, others: Sequence[Branch], qubit: Qubit, ones: Column) -> int:
    """A branch that differs from this one in the qubit alone, in every lane."""
    for index, other in enumerate(others):
        if (
            one.columns[qubit] ^ other.columns[qubit] == ones
            and one.columns[:qubit] == other.columns[:qubit]
            and one.columns[qubit + 1 :] == other.columns[qubit + 1 :]
            and one.open == other.open
        ):
            return index
    return -1


def _join(one: Branch, other: Branch, qubit: Qubit, ones: Column) -> None:
    """Make two branches that differ in a qubit alone one branch with that qubit open."""
    if one.halves != other.halves:
        raise NotUniformError
    value = one.columns[qubit]
    at_zero = chosen(value, other.phases, one.phases)
    at_one = chosen(value, one.phases, other.phases)
    one.open[qubit] = difference(at_one, at_zero, ones)
    one.columns[qubit] = 0
    one.phases = at_zero
    one.halves -= 1


def _close(branch: Branch, qubit: Qubit, ones: Column) -> None:
    """H on |0> + omega**p |1>: p = 0 gives |0>, p = 4 gives |1>; i and -i change places.

    For p = 2 the result is omega (|0> - i |1>), for p = 6 omega**-1 (|0> + i |1>), all over sqrt(2); for odd
    p the two amplitudes are not equally large.
    """
    odd, quarter, half = branch.open[qubit]
    if odd or quarter not in (0, ones):
        raise NotUniformError
    if quarter:
        branch.phases = turned(turned(branch.phases, ones, 1), half, 6)
        branch.open[qubit] = (0, ones, half ^ ones)
    else:
        del branch.open[qubit]
        branch.columns[qubit] = half


def distinct(branches: Sequence[Branch], ones: Column) -> bool:
    """Whether any two branches are orthogonal in every lane, so that weights add up."""
    for index, one in enumerate(branches):
        for other in branches[index + 1 :]:
            different = 0
            for qubit, (a, b) in enumerate(zip(one.columns, other.columns, strict=True)):
                if a is not b and qubit not in one.open and qubit not in other.open:
                    different |= a ^ b
            if different != ones:
                return False
    return True
