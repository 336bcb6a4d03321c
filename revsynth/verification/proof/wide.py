"""Deciding about circuits too wide to run on every input: the file lifted, the spec translated, both equal.

Three links: the file's circuit is lifted exactly (every start, outcome and phase at once); the spec's
translation is held against its evaluation in exact integers, at satisfying inputs first, and so is the
circuit; a solver proves that the two never differ.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from contextlib import ExitStack, closing
from dataclasses import dataclass, field

import numpy as np

from revsynth.circuit.model import Circuit
from revsynth.errors import SpecError
from revsynth.spec.expectation import Expectation
from revsynth.spec.sampled import SampledSpec
from revsynth.spec.understand import Understanding
from revsynth.verification.evidence import Counterexample, Level
from revsynth.verification.lifting import Account, Lifted, NotClosedError, account, lift, start_of
from revsynth.verification.lifting.linear_proofs import GuessError
from revsynth.verification.lifting.parities import TRUE, Literal, Parities
from revsynth.verification.matching import Roles
from revsynth.verification.outcome import TooLargeError
from revsynth.verification.proof.choice import Choice, number
from revsynth.verification.proof.cone import Cone
from revsynth.verification.proof.encoding import Encoding
from revsynth.verification.proof.every_input import MOST_WORK, find_one
from revsynth.verification.proof.obligations import (
    Obligation,
    Obligations,
    PlainGates,
    UnsettledError,
    active,
    obligations,
)
from revsynth.verification.proof.running import Runner
from revsynth.verification.proof.samples import Samples
from revsynth.verification.proof.sweep import Answer, Sweep
from revsynth.verification.translation import Translation, translate
from revsynth.verification.translation.gates import TooLargeToTranslateError

Progress = Callable[[str], None]

REFERENCE_CONFLICTS = 500_000
"""Conflicts for finding an input of the domain."""
FIRST_CONFLICTS = 30_000
"""Conflicts for the claims that sweeping leaves, in the first attempt with each way to write the spec."""
SOON = 1 << 36
"""Gates times inputs up to which all inputs are run before anything else: half a second."""
LAST_CONFLICTS = 600_000
"""The same in the last attempt, over all claims: some minutes."""


@dataclass(frozen=True)
class Failure:
    """An obligation that is broken, and the start at which it is, by variable of the lifting.

    reference: by input bit; with what is relative the start was compared with this one.
    """

    obligation: Obligation
    variables: tuple[int, ...]
    reference: tuple[int, ...]


@dataclass(frozen=True)
class WideDecision:
    """holds: None where undecided. samples: inputs at which the circuit met the spec's plain integers.

    lifted: None where the circuit could not be lifted. told: a counterexample that running it gave. marked:
    whether the spec wants a sign at the reference.
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
    told: Counterexample | None = None
    reference: tuple[int, ...] = field(default=())


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
        why = f"the circuit could not be followed for all inputs at once: {error}{where}"
        return _run_only(understanding, circuit, roles, why, progress)
    try:
        return _Decider(understanding, circuit, roles, lifted, progress).decide()
    except GuessError:
        return WideDecision(None, "none", 0, (), "signatures of different sums coincide", lifted=lifted)
    except UnsettledError as error:
        return WideDecision(None, "none", 0, (), str(error), lifted=lifted)


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
        self.untranslated = ""
        self.translation = self._translated()
        self.reference: list[int] = []
        self.links: list[str] = []
        self.samples = Samples(
            understanding,
            lifted.parities,
            [*lifted.variables, *self.stand_ins],
            self.translation,
            translated=not self.untranslated,
            progress=progress,
        )

    def _translated(self, *, by_columns: bool = True) -> Translation:
        """The spec in gates; where that is too large, variables that stand for its values."""
        parities, understanding = self.lifted.parities, self.understanding
        self.stand_ins: list[Literal] = []
        try:
            gates = PlainGates(parities)
            return translate(
                understanding.spec, understanding.outputs, gates, self.inputs, by_columns=by_columns
            )
        except TooLargeToTranslateError as error:
            self.untranslated = f"the spec could not be written out in gates: {error}"
        size = understanding.output_bits
        self.stand_ins = [parities.free() for _ in range(2 * size + 1)]
        domain, *rest = self.stand_ins
        return Translation(tuple(rest[:size]), tuple(rest[size:]), domain)

    def decide(self) -> WideDecision:
        accounted = account(self.lifted, self.roles)
        chosen = self._chosen()
        reference = self._reference()
        if isinstance(reference, WideDecision):
            return reference
        self.reference = reference
        owed = self._owed(accounted)
        refuted = self._compared(owed, chosen)
        if refuted is not None:
            return refuted
        self._say_samples()
        self._say_lifting()
        if self.untranslated:
            return self._decision(None, "sampled", f"{self.untranslated}; {self.samples.bound()}")
        unclean = any(one.kind == "scratch" for one in owed.all)
        run = self._by_all_inputs(owed, MOST_WORK if unclean else SOON)
        if run is not None:
            return run
        with ExitStack() as stack:
            first = stack.enter_context(closing(self._sweep(owed, chosen)))
            decision = self._settle(owed, first, FIRST_CONFLICTS)
            if decision.holds is None:
                decision = self._by_rows(accounted, chosen) or decision
            if decision.holds is None:
                decision = self._settle(owed, first, LAST_CONFLICTS)
            if decision.holds is None:
                decision = self._by_all_inputs(owed, MOST_WORK) or decision
        return decision

    def _by_all_inputs(self, owed: Obligations, most_work: int) -> WideDecision | None:
        """All claims at every value of the variables they rest on; None where that is too much work.

        Where structure does not even show that scratch ends clean, as in products modulo a number, a solver
        has little to go by, so this comes first.
        """
        parities, variables = self.lifted.parities, self.lifted.variables
        if not owed.all:
            return None
        wrong = parities.all_of(one.literal ^ 1 for one in owed.all) ^ 1
        parities.proofs.finish()
        found = find_one(parities, variables, wrong, self.progress, most_work)
        if found is None:
            return None
        if found is False:
            self.links.append(
                f"proof: the circuit and the spec's gates differ nowhere: {len(owed.all)} claims run, "
                "64 inputs side by side, at every value of the inputs they rest on"
            )
            return self._decision(True, "proved", global_phase=owed.global_phase)
        words = np.array(found, dtype=np.uint64)[:, None]
        literals = [one.literal for one in owed.all]
        values = Cone(parities, variables, literals).values(literals, words)
        broken = next(one for one, row in zip(owed.all, values, strict=True) if int(row[0]) & 1)
        return self._refuted(broken, found)

    def _by_rows(self, accounted: Account, chosen: list[int]) -> WideDecision | None:
        """The same with the spec written another way; None where that changes nothing."""
        first = self.translation
        try:
            self.translation = self.samples.translation = self._translated(by_columns=False)
            if self.translation == first or self.untranslated:
                return None
            owed = self._owed(accounted)
            refuted = self._compared(owed, chosen, random=1 << 12)
            if refuted is not None:
                return refuted
            with closing(self._sweep(owed, chosen)) as sweep:
                return self._settle(owed, sweep, FIRST_CONFLICTS)
        finally:
            self.translation = self.samples.translation = first

    def _compared(
        self, owed: Obligations, chosen: Sequence[int], random: int | None = None
    ) -> WideDecision | None:
        """Compare with the spec in exact integers; the decision where a claim fails."""
        self.lifted.parities.proofs.finish()
        self.progress("verifying: comparing with the spec in plain integers")
        hit = self.samples.first_hit(chosen, [one.literal for one in owed.all], random)
        if hit is None:
            return None
        return self._refuted(owed.all[hit.place], hit.variables[: len(self.lifted.variables)])

    def _sweep(self, owed: Obligations, chosen: Sequence[int]) -> Sweep:
        lifted = self.lifted
        literals = [one.literal for one in owed.all]
        return Sweep(lifted.parities, lifted.variables, literals, self.samples.tests(chosen), self.progress)

    def _owed(self, accounted: Account) -> Obligations:
        start = [*self.reference, *[0] * (self.lifted.start_variables - len(self.reference))]
        values: dict[Literal, int] = {}
        if self.untranslated:
            bits = Expectation(self.understanding)(number(self.reference))
            said = [1, *(bit or 0 for bit in bits), *(int(bit is None) for bit in bits)]
            values = dict(zip(self.stand_ins, said, strict=True))
        return obligations(self.lifted, accounted, self.translation, self.roles, start, stand_ins=values)

    def _chosen(self) -> list[int]:
        """Inputs to try before random ones."""
        if self.untranslated:
            return [0, (1 << len(self.inputs)) - 1]
        self.progress("verifying: looking for satisfying inputs")
        choice = Choice(self.lifted.parities, self.inputs, self.translation)
        self.satisfying = len(choice.satisfying)
        return choice.chosen or [0]

    def _reference(self) -> list[int] | WideDecision:
        """An input at which everything is demanded; the decision where there is none or none was found."""
        parities, translation = self.lifted.parities, self.translation
        if self.untranslated:
            return self._sampled_reference()
        wanted = active(translation, self.roles, parities)
        if self.roles.oracle == "phase":
            wanted = parities.and_(translation.domain, translation.free[0] ^ 1)
        if wanted == TRUE and translation.domain == TRUE:
            return [0] * len(self.inputs)
        encoding = Encoding(parities)
        try:
            inside = encoding.ever([translation.domain], REFERENCE_CONFLICTS)
            if inside is False:
                raise SpecError(
                    "no input satisfies it: a domain needs at least one",
                    source=self.understanding.spec.source,
                    place="[domain] where",
                )
            some = encoding.ever([wanted], REFERENCE_CONFLICTS)
            if some:
                return encoding.model(self.inputs)
        finally:
            encoding.close()
        if some is None or inside is None:
            return self._decision(None, "none", "no input of the domain was found within the solver's limit")
        if self.roles.oracle == "phase":
            return [0] * len(self.inputs)
        return self._decision(True, "proved", "the spec leaves every input free")

    def _sampled_reference(self) -> list[int] | WideDecision:
        draw = np.random.default_rng(3)
        inputs = draw.integers(0, 1 << 64, (len(self.inputs), 64), dtype=np.uint64)
        wanted = SampledSpec(self.understanding).wanted(inputs)
        fixed = ~np.bitwise_or.reduce(wanted.free, axis=0)
        for word in np.flatnonzero(fixed):
            bit = (int(fixed[word]) & -int(fixed[word])).bit_length() - 1
            return [int(row[word]) >> bit & 1 for row in inputs]
        return self._decision(None, "none", f"{self.untranslated}; no random input was inside the domain")

    def _say_samples(self) -> None:
        samples = self.samples
        found = "" if self.untranslated else f"{self.satisfying} satisfying ones found by a solver, "
        near = "" if self.untranslated else "their neighbours, "
        what = (
            "spec: evaluated in exact integers"
            if self.untranslated
            else "spec: written a second time in gates, which agree with its evaluation in exact integers"
        )
        self.links.append(
            f"{what}, and the circuit with both, at {samples.count} inputs: "
            f"{found}{near}{samples.random} random"
        )

    def _say_lifting(self) -> None:
        circuit = self.circuit
        measured = len(self.lifted.variables) - self.lifted.start_variables
        outcomes = f", {measured} outcomes followed both ways" if measured else ""
        self.links.append(
            f"circuit: {len(circuit)} operations on {circuit.qubits} qubits followed exactly as sums over "
            f"paths, for every start, outcome and phase at once, form {self.roles.oracle}{outcomes}"
        )

    def _settle(self, owed: Obligations, sweep: Sweep, conflicts: int) -> WideDecision:
        """Prove claim by claim; the conflicts are for all of them together."""
        methods: dict[str, int] = {}
        count = len(owed.all)
        begun = -1
        for place, obligation in enumerate(owed.all):
            self.progress(f"verifying: claim {place + 1} of {count}")
            spent = sweep.conflicts - begun if begun >= 0 else 0
            answer: Answer = sweep.zero(obligation.literal, max(conflicts - spent, 1))
            if begun < 0:
                begun = sweep.conflicts
            if answer.holds is False:
                return self._refuted(obligation, answer.inputs)
            if answer.holds is None:
                limit = f"the solver reached its limit on claim {place + 1} of {count} ({obligation.kind})"
                return self._decision(None, "sampled", f"{limit}; {self.samples.bound()}")
            methods[answer.method] = methods.get(answer.method, 0) + 1
        how = ", ".join(f"{number} by {method}" for method, number in methods.items())
        equal = f", {sweep.merged} inner equalities proved on the way" if sweep.merged else ""
        claims = f"{count} claim{'s' * (count != 1)} left to prove"
        self.links.append(
            "proof: the circuit and the spec's gates differ nowhere: "
            + (f"{claims} ({how}{equal})" if count else "all the same by structure")
        )
        return self._decision(True, "proved", global_phase=owed.global_phase)

    def _refuted(self, obligation: Obligation, variables: Sequence[int]) -> WideDecision:
        failure = Failure(obligation, tuple(variables), tuple(self.reference))
        return self._decision(False, "sampled", "stopped at the first input that fails", failure=failure)

    def _decision(
        self,
        holds: bool | None,
        level: Level,
        detail: str = "",
        *,
        global_phase: float = 0.0,
        failure: Failure | None = None,
    ) -> WideDecision:
        return WideDecision(
            holds,
            level,
            self.samples.count,
            tuple(self.links),
            detail,
            global_phase,
            failure,
            self.lifted,
            self.translation,
            reference=tuple(self.reference),
        )


def _run_only(
    understanding: Understanding, circuit: Circuit, roles: Roles, why: str, progress: Progress
) -> WideDecision:
    """Run the circuit at satisfying and at random inputs: that may show a fault, and proves nothing."""
    parities = Parities()
    inputs = [parities.free() for _ in range(understanding.input_bits)]
    chosen: list[int] = []
    reference = 0
    try:
        translation = translate(understanding.spec, understanding.outputs, PlainGates(parities), inputs)
        chosen = Choice(parities, inputs, translation).chosen
        wanted = [translation.domain, *(free ^ 1 for free in translation.free)]
        encoding = Encoding(parities)
        try:
            if not encoding.ever(wanted, REFERENCE_CONFLICTS):
                return WideDecision(None, "none", 0, (), f"{why}; no input of the domain was found")
            reference = number(encoding.model(inputs))
        finally:
            encoding.close()
        parities.proofs.finish()
    except (TooLargeToTranslateError, GuessError):
        if understanding.spec.domain is not None:
            return WideDecision(None, "none", 0, (), why)
    try:
        runner = Runner(understanding, circuit, roles, reference)
        count, told = runner.sample(chosen, progress)
    except TooLargeError as limit:
        return WideDecision(None, "none", 0, (), f"{why}; simulation stopped: {limit}")
    if told is not None:
        return WideDecision(
            False, "sampled", count + 1, (), "stopped at the first input that fails", told=told
        )
    detail = (
        f"{why}; run at {count} inputs, satisfying ones found by a solver among them, it is right, "
        "which is no proof"
    )
    return WideDecision(None, "sampled", count, (), detail)
