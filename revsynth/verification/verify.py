"""Does a circuit file do what a spec says? From the two of them alone, for every input and outcome."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from revsynth.options import Oracle
from revsynth.spec.model import Spec
from revsynth.spec.understand import Understanding, understand
from revsynth.verification.counterexample import Teller
from revsynth.verification.cross_check import cross_check
from revsynth.verification.decide import Decision, decide
from revsynth.verification.evidence import Evidence, Verdict
from revsynth.verification.matching import Roles, match
from revsynth.verification.proof.free_variables import check_free_variables

if TYPE_CHECKING:
    from revsynth.circuit.model import Circuit
    from revsynth.qasm import Program

PHASE_TOLERANCE = 1e-9


def verify_program(
    spec: Spec,
    program: Program,
    *,
    oracle: Oracle | None = None,
    exact_phase: bool = False,
    placement: Mapping[str, Any] | None = None,
    progress: Callable[[str], None] | None = None,
) -> Verdict:
    """Decide whether `program` does what `spec` says, in the oracle form given or shown by its registers.

    Index 0 of a register is the least significant bit of its word. Every input is run, every outcome of
    every measurement is followed, their chances must not depend on the input, and phases count: one constant
    phase passes and is reported, unless `exact_phase`. Where only the value of f is free, inputs, scratch and
    signs are demanded all the same (not in `inplace` and `embedded` blocks). `placement` is the contract's
    object for an embedded block; without it the file's comment lines are read. Registers that the spec does
    not know count as scratch. Time and memory grow as 2**n for n input bits.

    Raises SpecError for a spec that cannot be understood, UsageError where registers are missing or the form
    does not go with the spec.
    """
    understanding = understand(spec)
    roles = match(understanding, program, oracle, placement)
    if understanding.tabulated is None:
        return _verify_wide(understanding, program, roles, exact_phase, progress or (lambda _: None))
    checked = [*cross_check(understanding), *check_free_variables(spec)]
    decision = decide(program.circuit, roles, understanding.function, progress or (lambda _: None))
    links = (*checked, *_links(decision, roles, program.circuit))
    teller = Teller(understanding, program.circuit, decision.demand)
    counterexample = None if decision.found is None else teller.tell(decision.found)
    holds = decision.holds
    if holds and exact_phase and abs(decision.global_phase) > PHASE_TOLERANCE:
        holds = False
        counterexample = teller.constant_phase(decision.global_phase, _marked(understanding, decision, roles))
    if counterexample is not None and decision.level == "sampled":
        decision = replace(decision, detail="stopped at the first input that fails")
    evidence = Evidence(decision.level, decision.inputs, links, decision.detail)
    return Verdict(holds, evidence, decision.global_phase, counterexample, roles.oracle)


def _verify_wide(
    understanding: Understanding,
    program: Program,
    roles: Roles,
    exact_phase: bool,
    progress: Callable[[str], None],
) -> Verdict:
    """By proof, for specs that no table holds."""
    from revsynth.verification.proof.telling import WideTeller
    from revsynth.verification.proof.wide import decide_wide

    decision = decide_wide(understanding, program.circuit, roles, progress)
    counterexample, holds = decision.told, decision.holds
    links = list(decision.links)
    if roles.foreign:
        links.insert(0, _foreign(roles))
    off = exact_phase and abs(decision.global_phase) > PHASE_TOLERANCE
    if decision.lifted is not None and decision.translation is not None:
        teller = WideTeller(understanding, program.circuit, roles, decision.lifted, decision.translation)
        if decision.failure is not None:
            counterexample = teller.tell(decision.failure)
        elif holds and off:
            holds = False
            counterexample = teller.constant_phase(decision.global_phase, decision.reference)
    evidence = Evidence(decision.level, decision.samples, tuple(links), decision.detail)
    return Verdict(holds, evidence, decision.global_phase, counterexample, roles.oracle)


def _foreign(roles: Roles) -> str:
    return "registers: " + ", ".join(roles.foreign) + " not in the spec, taken as scratch from 0 to 0"


def _marked(understanding: Understanding, decision: Decision, roles: Roles) -> bool:
    reference = decision.demand.reference or 0
    row = understanding.function.values[0]
    return roles.oracle == "phase" and bool(int(row[reference >> 6]) >> (reference & 63) & 1)


def _links(decision: Decision, roles: Roles, circuit: Circuit) -> list[str]:
    """What the verdict rests on, one line each."""
    links = []
    if roles.foreign:
        links.append(_foreign(roles))
    if decision.engine:
        links.append(f"circuit: {decision.engine}, {len(circuit)} operations, form {roles.oracle}")
    if decision.measurements:
        outcomes = "both outcomes of each followed" if decision.random else "every outcome certain"
        links.append(
            f"measurements: {decision.measurements}, {outcomes}, their chances the same for all inputs"
        )
    enumerated = len(decision.demand.enumerated)
    if enumerated and decision.level == "exhaustive":
        links.append(f"starts: {enumerated} outputs or lent qubits, all {1 << enumerated} values run")
    if decision.proven:
        links.append(
            f"starts: the circuit commutes with X on {len(decision.proven)} outputs or lent qubits, carried "
            "through every step, so their starting value 0 stands for both"
        )
    return links
