"""Lifting a circuit: gate by gate into a sum over paths, which is to close into one basis state a start."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from revsynth.circuit.model import Circuit
from revsynth.verification.elementary import elementary
from revsynth.verification.lifting.graph import Graph
from revsynth.verification.lifting.linear_proofs import GuessError
from revsynth.verification.lifting.model import NO_PATHS, Lifted, NotClosedError, Value
from revsynth.verification.lifting.parities import TRUE, Literal, Parities
from revsynth.verification.lifting.path_sum import PathSum
from revsynth.verification.lifting.residue import counted, simplified
from revsynth.verification.steps import ANGLE, FLIP, HADAMARD, MEASURE, TURN, Steps

ATTEMPTS = 5
"""Wrong guesses from signatures are about as likely as 2**-20 in the largest circuits."""

MOST_PHASES = 10_000
"""Phases that may be left to be shown to be signs by a prover."""

TOLERANCE = 1e-11
"""An angle this close to a multiple of pi/8, in radians, is that multiple."""


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
            self._go(elementary(self.circuit))
            self.at = -1
            return self._close()
        except NotClosedError as error:
            error.operation = self.at
            raise

    def _go(self, steps: Steps) -> None:
        """Every step in order. The commonest are written out here: this loop takes the time."""
        state, xor = self.state, self.parities.xor
        literal, paths, plain = state.literal, state.paths, state.plain
        operand = steps.literal.tolist()
        columns = (steps.act, steps.offset[1:], steps.target, steps.amount, steps.condition)
        end = 0
        for index, (act, stop, target, amount, condition) in enumerate(
            zip(*(column.tolist() for column in columns), strict=True)
        ):
            begin, end = end, stop
            if act == HADAMARD and condition < 0:
                state.hadamard(target)
            elif end - begin > 1 or condition >= 0 or act > TURN:
                self.at = int(steps.source[index])
                self._other(act, operand[begin:end], target, steps, index)
            elif act == FLIP and end == begin:
                literal[target] ^= 1
            elif act == FLIP:
                control = operand[begin] >> 1
                literal[target] = xor(literal[target], literal[control] ^ (operand[begin] & 1))
                if paths[control]:
                    state.change(target, paths[control])
            elif end == begin:
                state.sixteenths += 2 * amount
            else:
                target = operand[begin] >> 1
                value = literal[target] ^ (operand[begin] & 1)
                if paths[target] or value & 1:
                    state.turn(Value(value, paths[target]), amount)
                elif value:
                    node = value >> 1
                    total = (plain.get(node, 0) + amount) & 7
                    if total & 3:
                        plain[node] = total
                    else:
                        plain.pop(node, None)
                        if total:
                            state.add_sign(NO_PATHS, value)

    def _other(self, act: int, controls: Sequence[int], target: int, steps: Steps, index: int) -> None:
        """A step with several literals or a condition, a measurement, or one that must be refused."""
        state = self.state
        condition = int(steps.condition[index])
        if act == FLIP:
            self._flip(controls, target, condition)
        elif act == TURN:
            factors = [*self._values(controls), *self._condition(condition)]
            state.turn_product(factors, int(steps.amount[index]))
        elif act == ANGLE and not len(controls) and condition < 0:
            self._constant(float(steps.angle[index]))
        elif act == ANGLE:
            raise NotClosedError("a phase is no multiple of pi/4")
        elif condition >= 0:
            raise NotClosedError("a Hadamard, a measurement or a reset is under a condition")
        elif act == MEASURE:
            state.bits[int(steps.bit[index])] = state.measure(target, self.at)
        else:
            state.reset(target, self.at)

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
            random=any(state.measured),
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
