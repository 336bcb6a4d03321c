"""Deciding about circuits too wide to run on every input: the file lifted, the spec translated, both equal.

Three links: the file's circuit is lifted exactly (every start, outcome and phase at once); the spec's
translation is held against its evaluation in Python's own integers, at satisfying inputs first; a solver
proves that the two never differ.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from revsynth.circuit.model import Circuit
from revsynth.spec.understand import Understanding
from revsynth.verification.evidence import Level
from revsynth.verification.lifting import Lifted, NotClosedError, account, lift, start_of
from revsynth.verification.lifting.linear_proofs import GuessError
from revsynth.verification.lifting.parities import TRUE
from revsynth.verification.matching import Roles
from revsynth.verification.proof.cone import Cone
from revsynth.verification.proof.encoding import Encoding
from revsynth.verification.proof.obligations import Obligation, PlainGates, obligations
from revsynth.verification.proof.samples import Samples
from revsynth.verification.proof.sweep import LAST_CONFLICTS, Answer, Sweep
from revsynth.verification.translation import Translation, translate
from revsynth.verification.translation.gates import TooLargeToTranslateError

Progress = Callable[[str], None]


@dataclass(frozen=True)
class Failure:
    """An obligation that is broken, and the start at which it is, by variable of the lifting."""

    obligation: Obligation
    variables: tuple[int, ...]


@dataclass(frozen=True)
class WideDecision:
    """holds: None where undecided. samples: inputs at which the translation met plain integers.

    lifted: None where the circuit could not be lifted.
    """

    holds: bool | None
    level: Level
    samples: int
    links: tuple[str, ...]
    detail: str = ""
    global_phase: float = 0.0
    failure: Failure | None = None
    lifted: Lifted | None = None
    translation: Translation | None = None


def decide_wide(
    understanding: Understanding, circuit: Circuit, roles: Roles, progress: Progress
) -> WideDecision:
    """Decide by proof. Raises ExpressionError where the spec is undefined at an input that was tried."""
    progress("verifying: following the circuit")
    try:
        start, variables = start_of(roles, circuit.qubits)
        lifted = lift(circuit, start, variables)
    except NotClosedError as error:
        where = f" (at operation {error.operation})" if error.operation >= 0 else ""
        return WideDecision(None, "none", 0, (), f"the circuit could not be followed: {error}{where}")
    try:
        return _Decider(understanding, circuit, roles, lifted, progress).decide()
    except TooLargeToTranslateError as error:
        detail = f"the spec could not be written out in gates: {error}"
        return WideDecision(None, "none", 0, (), detail, lifted=lifted)
    except GuessError:
        return WideDecision(None, "none", 0, (), "signatures of different sums coincide", lifted=lifted)


class _Decider:
    def __init__(
        self,
        understanding: Understanding,
        circuit: Circuit,
        roles: Roles,
        lifted: Lifted,
        progress: Progress,
    ) -> None:
        self.understanding = understanding
        self.circuit = circuit
        self.roles = roles
        self.lifted = lifted
        self.progress = progress
        progress("verifying: writing the spec in gates")
        self.inputs = lifted.variables[: understanding.input_bits]
        self.translation = translate(
            understanding.spec, understanding.outputs, PlainGates(lifted.parities), self.inputs
        )
        self.links: list[str] = []

    def decide(self) -> WideDecision:
        lifted, roles = self.lifted, self.roles
        accounted = account(lifted, roles)
        reference = self._reference()
        if reference is None:
            return self._decision(None, "none", "no input of the domain was found within the solver's limit")
        self.progress("verifying: comparing the spec's gates with plain integers")
        samples = Samples(self.understanding, lifted.parities, self.inputs, self.translation)
        self.links += samples.check()
        owed = obligations(
            lifted,
            accounted,
            self.translation,
            phase=roles.oracle == "phase",
            reference=[*reference, *[0] * (lifted.start_variables - len(reference))],
        )
        loose = self._loose_garbage([literal for _, literal in accounted.kept])
        if loose:
            return self._decision(None, "none", loose)
        self._say_lifting()
        sweep = Sweep(
            lifted.parities,
            lifted.variables,
            [one.literal for one in owed.all],
            samples.starts(len(lifted.variables)),
            self.progress,
        )
        try:
            return self._settle(owed.all, sweep, owed.global_phase, samples)
        finally:
            sweep.close()

    def _reference(self) -> list[int] | None:
        """An input inside the domain where no value is free; None where none was found."""
        free = self.translation.free
        wanted = [self.translation.domain, *(literal ^ 1 for literal in free)]
        if all(literal == TRUE for literal in wanted):
            return [0] * len(self.inputs)
        encoding = Encoding(self.lifted.parities)
        try:
            for literals in (wanted, wanted[:1]):
                if encoding.ever(literals, LAST_CONFLICTS):
                    return encoding.model(self.inputs)
        finally:
            encoding.close()
        return None

    def _loose_garbage(self, kept: list[int]) -> str:
        """Why garbage that must depend on the inputs alone is not shown to; empty where it is."""
        allowed = {literal >> 1 for literal in self.inputs}
        others = [literal for literal in self.lifted.variables if literal >> 1 not in allowed]
        cone = Cone(self.lifted.parities, self.lifted.variables, kept)
        parities = self.lifted.parities
        read = {part for node in cone.gates for part in (parities.left[node], parities.right[node])}
        read |= {literal >> 1 for literal in kept}
        if any(literal >> 1 in read for literal in others):
            return "garbage is not shown to depend on the inputs alone"
        return ""

    def _say_lifting(self) -> None:
        circuit = self.circuit
        measured = len(self.lifted.variables) - self.lifted.start_variables
        outcomes = f", {measured} outcomes followed both ways" if measured else ""
        self.links.append(
            f"circuit: {len(circuit)} operations on {circuit.qubits} qubits followed exactly as sums over "
            f"paths, for every start, outcome and phase at once{outcomes}"
        )

    def _settle(
        self, owed: tuple[Obligation, ...], sweep: Sweep, turn: float, samples: Samples
    ) -> WideDecision:
        methods: dict[str, int] = {}
        for place, obligation in enumerate(owed):
            self.progress(f"verifying: claim {place + 1} of {len(owed)}")
            answer: Answer = sweep.zero(obligation.literal)
            if answer.holds is False:
                failure = Failure(obligation, answer.inputs)
                return self._decision(False, "sampled", samples=samples.count, failure=failure)
            if answer.holds is None:
                detail = (
                    f"the solver reached its limit on claim {place + 1} of {len(owed)} ({obligation.kind})"
                )
                return self._decision(None, "sampled", detail, samples=samples.count)
            methods[answer.method] = methods.get(answer.method, 0) + 1
        how = ", ".join(f"{count} by {method}" for method, count in methods.items())
        equal = f", {sweep.merged} inner equalities proved on the way" if sweep.merged else ""
        self.links.append(
            f"proof: that the circuit and the spec's gates differ nowhere: {len(owed)} claims left to prove"
            + (f" ({how}{equal})" if owed else ", all the same by structure")
        )
        return self._decision(True, "proved", global_phase=turn, samples=samples.count)

    def _decision(
        self,
        holds: bool | None,
        level: Level,
        detail: str = "",
        *,
        samples: int = 0,
        global_phase: float = 0.0,
        failure: Failure | None = None,
    ) -> WideDecision:
        return WideDecision(
            holds,
            level,
            samples,
            tuple(self.links),
            detail,
            global_phase,
            failure,
            self.lifted,
            self.translation,
        )
