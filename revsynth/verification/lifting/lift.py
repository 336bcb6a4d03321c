"""Lifting a circuit: gate by gate into a sum over paths, which is to close into one basis state a start."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from revsynth.circuit.model import Circuit, Kind
from revsynth.verification.elementary import ANGLE, FLIP, HADAMARD, MEASURE, RESET, TURN, Step, elementary
from revsynth.verification.lifting.graph import Graph
from revsynth.verification.lifting.linear_proofs import GuessError
from revsynth.verification.lifting.model import NO_PATHS, Lifted, NotClosedError, Value
from revsynth.verification.lifting.parities import TRUE, Literal, Parities
from revsynth.verification.lifting.path_sum import PathSum
from revsynth.verification.lifting.residue import counted, simplified

ATTEMPTS = 5
"""Wrong guesses from signatures are about as likely as 2**-20 in the largest circuits."""

MOST_PHASES = 10_000
"""Phases that may be left to be shown to be signs by a prover."""

TOLERANCE = 1e-11
"""An angle this close to a multiple of pi/8, in radians, is that multiple."""

_X, _Z, _H, _MEASURE = int(Kind.X), int(Kind.Z), int(Kind.H), int(Kind.MEASURE)
_EIGHTHS = {int(Kind.S): 2, int(Kind.SDG): 6, int(Kind.T): 1, int(Kind.TDG): 7}


def lift(circuit: Circuit, start: Sequence[Literal], variables: int) -> Lifted:
    """What the circuit does to every start.

    start: by qubit FALSE, TRUE, or the literal 2 * (1 + i) of start variable i < `variables`; no two qubits
    may start in the same variable. Exact for X and Z with any controls, H, phases by multiples of pi/4,
    measurements, conditions and resets. Raises NotClosedError where the sum over paths does not close, which
    says nothing about the circuit.
    """
    if len(start) != circuit.qubits:
        raise ValueError(f"{len(start)} starts for {circuit.qubits} qubits")
    for attempt in range(ATTEMPTS):
        try:
            return _Lifting(circuit, start, variables, attempt).run()
        except GuessError:
            continue
    raise NotClosedError("signatures of different parities are equal, time and again")


class _Lifting:
    def __init__(self, circuit: Circuit, start: Sequence[Literal], variables: int, seed: int) -> None:
        self.circuit = circuit
        self.parities = Parities(seed)
        self.variables = [self.parities.free() for _ in range(variables)]
        self.start = tuple(start)
        self.state = PathSum(self.parities, start, circuit.bits)
        self.at = 0

    def run(self) -> Lifted:
        try:
            self._gates(self._other_steps())
            self.at = -1
            return self._close()
        except NotClosedError as error:
            error.operation = self.at
            raise

    def _other_steps(self) -> dict[int, list[Step]]:
        """Elementary steps of the operations that `_gates` does not do itself."""
        circuit = self.circuit
        bare = (np.diff(circuit.offset) == 1) & (circuit.condition < 0)
        simple = np.isin(circuit.kind, [_X, _Z])
        simple |= np.isin(circuit.kind, [_H, _MEASURE, *_EIGHTHS]) & bare
        others = np.flatnonzero(~simple)
        found: dict[int, list[Step]] = {index: [] for index in others.tolist()}
        if len(others):
            for step in elementary(part_of(circuit, others)):
                found[int(others[step.source])].append(step)
        return found

    def _gates(self, others: dict[int, list[Step]]) -> None:
        """Every operation in order. The commonest are written out here: this loop takes the time."""
        state, xor = self.state, self.parities.xor
        literal, paths, plain = state.literal, state.paths, state.plain
        operand = self.circuit.operand.tolist()
        end = 0
        columns = (self.circuit.kind, self.circuit.offset[1:], self.circuit.condition)
        for index, (kind, stop, condition) in enumerate(zip(*(c.tolist() for c in columns), strict=True)):
            begin, end = end, stop
            target = operand[end - 1]
            if index in others:
                self.at = index
                for step in others[index]:
                    self._step(step)
            elif kind == _X and condition < 0 and end - begin == 2:
                control = operand[begin]
                literal[target] = xor(literal[target], literal[control >> 1] ^ (control & 1))
                if paths[control >> 1]:
                    state.change(target, paths[control >> 1])
            elif kind in _EIGHTHS:
                eighths = _EIGHTHS[kind]
                value = literal[target]
                if paths[target] or value & 1:
                    state.turn(Value(value, paths[target]), eighths)
                elif value:
                    node = value >> 1
                    total = (plain.get(node, 0) + eighths) & 7
                    if total & 3:
                        plain[node] = total
                    else:
                        plain.pop(node, None)
                        if total:
                            state.add_sign(NO_PATHS, value)
            elif kind == _H:
                state.hadamard(target)
            elif kind == _X and condition < 0 and end - begin == 1:
                literal[target] ^= 1
            elif kind == _MEASURE:
                state.bits[int(self.circuit.bit[index])] = state.measure(target, index)
            else:
                self.at = index
                self._controlled(kind, operand[begin : end - 1], target, condition)

    def _controlled(self, kind: int, controls: Sequence[int], target: int, condition: int) -> None:
        """X or Z on the target under controls and a condition."""
        state = self.state
        if kind == _X:
            self._flip(controls, target, condition)
        else:
            state.negate([*self._values(controls), state.value(target), *self._condition(condition)])

    def _flip(self, controls: Sequence[int], target: int, condition: int) -> None:
        """A product of qubits in superposition may be none once path variables are summed away."""
        state = self.state
        while True:
            factors = [*self._values(controls), *self._condition(condition)]
            try:
                state.flip(target, factors or [Value(TRUE)])
                return
            except NotClosedError:
                if not state.settle():
                    raise

    def _values(self, controls: Sequence[int]) -> list[Value]:
        """The values of control literals."""
        state = self.state
        return [
            Value(state.literal[control >> 1] ^ (control & 1), state.paths[control >> 1])
            for control in controls
        ]

    def _condition(self, condition: int) -> list[Value]:
        """Values whose product is the condition; none where there is no condition."""
        if condition < 0:
            return []
        state = self.state
        factors: list[Value] = []
        for literals, expected in self.circuit.conditions[condition]:
            bits = [Value(state.bits[b >> 1].literal ^ (b & 1), state.bits[b >> 1].paths) for b in literals]
            if expected:
                factors += bits
            elif len(bits) == 1:
                factors.append(Value(bits[0].literal ^ 1, bits[0].paths))
            else:
                factors.append(Value(self.parities.all_of(map(state.as_literal, bits)) ^ 1))
        return factors

    def _step(self, step: Step) -> None:
        """An elementary step."""
        state = self.state
        if step.act == FLIP:
            self._flip(step.literals, step.target, step.condition)
        elif step.act == TURN:
            factors = [*self._values(step.literals), *self._condition(step.condition)]
            state.turn_product(factors, step.amount)
        elif step.act == ANGLE and not step.literals and step.condition < 0:
            self._constant(step.angle)
        elif step.act == ANGLE:
            raise NotClosedError("a phase is no multiple of pi/4")
        elif step.condition >= 0:
            raise NotClosedError("a Hadamard, a measurement or a reset is under a condition")
        elif step.act == HADAMARD:
            state.hadamard(step.target)
        elif step.act == MEASURE:
            state.bits[step.bit] = state.measure(step.target, self.at)
        elif step.act == RESET:
            state.reset(step.target, self.at)

    def _constant(self, radians: float) -> None:
        """A constant phase, exact where it is a multiple of pi/8."""
        units = round(radians / (math.pi / 8))
        if abs(radians - units * math.pi / 8) < TOLERANCE:
            self.state.sixteenths += units
        else:
            self.state.radians += radians

    def _close(self) -> Lifted:
        """Sum all path variables away; what is left must be signs."""
        state, parities = self.state, self.parities
        state.settle()
        left = state.unmeasured()
        if left:
            raise NotClosedError(f"{left} path variables are left in the sum")
        state.settle_outcomes()
        signs, phases = simplified(parities, state.plain)
        if len(phases) > MOST_PHASES:
            raise NotClosedError(f"{len(phases)} phases are left that are not shown to be signs")
        low, middle, high = counted(parities, phases)
        signs.append(high)
        steady = [literal for literal in (low, middle) if literal > TRUE]
        sign = parities.parity((*(2 * node for node in sorted(state.sign_nodes)), *signs)) ^ state.sign_flip
        parities.proofs.finish()
        at_zero = self._at_zero([low, middle])
        state.sixteenths += 2 * at_zero[0] + 4 * at_zero[1]
        minus, sixteenths = divmod(state.sixteenths % 16, 8)
        outcome_signs = sorted(state.signs.items(), key=lambda item: sorted(item[0]))
        return Lifted(
            parities=parities,
            start_variables=len(self.variables),
            variables=(*self.variables, *state.outcome_atoms.values()),
            start=self.start,
            values=tuple(state.value(qubit) for qubit in range(self.circuit.qubits)),
            sign=sign ^ minus,
            sixteenths=sixteenths,
            radians=state.radians,
            revealed=tuple(item for item in state.revealed if item[1] > TRUE),
            steady=tuple(steady),
            outcome_signs=tuple(item for item in outcome_signs if item[1] > TRUE),
        )

    def _at_zero(self, literals: Sequence[Literal]) -> list[int]:
        """The literals where all variables are 0."""
        if all(literal <= TRUE for literal in literals):
            return list(literals)
        variables = (*self.variables, *self.state.outcome_atoms.values())
        graph = Graph.below(self.parities, variables, literals)
        return [
            int(row[0] & np.uint64(1)) for row in graph.simulate(np.zeros((len(variables), 1), np.uint64))
        ]


def part_of(circuit: Circuit, operations: NDArray[np.intp]) -> Circuit:
    """A circuit of those operations alone, on the same qubits and bits."""
    count = np.diff(circuit.offset)[operations]
    offset = np.concatenate([[0], np.cumsum(count)])
    place = np.repeat(circuit.offset[operations] - offset[:-1], count) + np.arange(offset[-1])
    angles = {
        number: circuit.angles[index]
        for number, index in enumerate(operations.tolist())
        if index in circuit.angles
    }
    return Circuit(
        circuit.registers,
        circuit.bit_registers,
        circuit.kind[operations],
        offset,
        circuit.operand[place],
        circuit.condition[operations],
        circuit.bit[operations],
        angles,
        circuit.conditions,
    )
