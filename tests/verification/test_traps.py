"""Circuits that look right to a careless verifier, and textbook facts that must come out."""

from __future__ import annotations

import math

import numpy as np
import pytest

import revsynth
from revsynth.circuit.model import Circuit, Guard, Kind
from revsynth.logic.function import Function
from revsynth.logic.truth_table import ones, pack
from revsynth.verification import Verdict, sparse, verify_program
from revsynth.verification.amplitudes import Exact, Floating
from revsynth.verification.forms import Demand
from revsynth.verification.judge import Judge
from revsynth.verification.matching import Roles
from revsynth.verification.outcome import Final, Finals
from tests.slow_simulator import unitary
from tests.verification.oracles import as_program, lamp_code, locker_mark
from tests.verification.textbook import (
    and_on_zero,
    erase_and,
    register_circuit,
    relative_toffoli,
    toffoli,
    with_steps,
)

ONE = (Guard((0,)),)


def check(spec: revsynth.Spec, circuit: Circuit, **options: object) -> Verdict:
    return verify_program(spec, as_program(circuit), **options)  # type: ignore[arg-type]


def both(a: int = 1, b: int = 1) -> revsynth.Spec:
    return revsynth.predicate("a == 1 and b == 1", inputs={"a": a, "b": b})


def words(verdict: Verdict) -> str:
    assert verdict.holds is False
    assert verdict.counterexample is not None
    return verdict.counterexample.why


def test_the_seven_t_toffoli_is_the_textbook_matrix() -> None:
    """Common practice: the Toffoli gate exchanges |110> and |111>."""
    c = register_circuit(("q", 3))
    toffoli(c, 0, 1, 2)
    expected = np.eye(8)
    expected[[3, 7]] = expected[[7, 3]]
    np.testing.assert_allclose(unitary(c.build()), expected, atol=1e-12)


def test_a_toffoli_is_an_and_and_a_relative_phase_toffoli_is_not() -> None:
    good, bad = (register_circuit(("a", 1), ("b", 1), ("mark", 1)) for _ in range(2))
    toffoli(good, 0, 1, 2)
    relative_toffoli(bad, 0, 1, 2)
    assert check(both(), good.build(), exact_phase=True).holds
    verdict = check(both(), bad.build())
    assert "phase" in words(verdict)
    assert verdict.counterexample is not None
    assert verdict.counterexample.kind == "phase"


def test_a_relative_phase_and_does_for_a_fresh_output_only_with_its_phase_corrected() -> None:
    c = register_circuit(("a", 1), ("b", 1), ("mark", 1))
    relative_toffoli(c, 0, 1, 2)
    verdict = check(both(), c.build(), oracle="fresh")
    assert verdict.counterexample is not None
    assert verdict.counterexample.got == {"phase": pytest.approx(math.pi / 2)}
    c.add(Kind.SDG, (1,), (0,))
    assert check(both(), c.build(), oracle="fresh", exact_phase=True).holds
    assert not check(both(), c.build(), oracle="bit").holds


def test_a_controlled_z_has_no_distinguished_target() -> None:
    for control, target in ((0, 1), (1, 0)):
        c = register_circuit(("a", 1), ("b", 1))
        c.z(target, (2 * control,))
        assert check(both(), c.build()).holds


def test_erasure_without_its_correction_fails_where_the_outcome_is_one() -> None:
    example = lamp_code()
    cz = next(i for i, op in enumerate(example.circuit) if op.condition >= 0 and op.kind is Kind.Z)
    assert "work[0] into seen[0] gives 1" in words(
        check(example.spec, with_steps(example.circuit, [(cz, None)]))
    )
    flip = next(i for i, op in enumerate(example.circuit) if op.condition >= 0 and op.kind is Kind.X)
    verdict = check(example.spec, with_steps(example.circuit, [(flip, None)]))
    assert "work[0] ends in 1" in words(verdict)
    assert verdict.counterexample is not None
    assert verdict.counterexample.kind == "scratch"
    assert verdict.counterexample.got == {"work[0]": 1}


def test_chances_that_depend_on_the_input_are_seen_though_every_outcome_leaves_the_right_state() -> None:
    """After the measurement the state is right whatever came, but the chances tell inputs apart."""
    c = register_circuit(("a", 1), ("b", 1), ("work", 1), bits=1)
    c.z(1, (0,))
    c.add(Kind.H, (2,), (0,))
    c.measure(2, 0)
    c.x(2, condition=ONE)
    why = words(check(both(), c.build()))
    assert why == (
        "the measurement of work[0] into seen[0] comes out with different chances here than for "
        "a = 0, b = 0: inputs in superposition would collapse"
    )


def test_a_measured_input_collapses() -> None:
    c = register_circuit(("a", 1), ("b", 1), bits=1)
    c.z(1, (0,))
    c.measure(0, 0)
    assert "comes out differently here than for a = 0, b = 0" in words(check(both(), c.build()))


def test_a_reset_does_not_clean_scratch() -> None:
    c = register_circuit(("a", 1), ("b", 1), ("work", 1))
    toffoli(c, 0, 1, 2)
    c.z(2)
    c.add(Kind.RESET, (2,))
    assert "the reset of work[0] comes out differently" in words(check(both(), c.build()))


def test_a_reset_of_what_is_in_zero_is_accepted() -> None:
    c = register_circuit(("a", 1), ("b", 1), ("work", 1))
    c.add(Kind.RESET, (2,))
    c.z(1, (0,))
    assert check(both(), c.build()).holds


def test_a_scratch_left_in_superposition_is_named() -> None:
    c = register_circuit(("a", 1), ("b", 1), ("work", 1))
    c.z(1, (0,))
    c.h(2)
    verdict = check(both(), c.build())
    assert words(verdict) == "work[0] ends in a superposition of basis states instead of a value"
    assert verdict.counterexample is not None
    assert verdict.counterexample.kind == "undefined"


def test_a_random_bit_is_no_oracle_for_free_values() -> None:
    """Where f is free it may be anything, but a function of the input."""
    spec = revsynth.truth_table("0-1-", inputs={"v": 2})
    c = register_circuit(("v", 2), ("work", 1), bits=1)
    c.z(1)
    c.h(2)
    c.measure(2, 0)
    c.x(2, condition=ONE)
    assert check(spec, c.build()).holds
    c.z(0, condition=ONE)
    assert "the sign, free here, depends on the outcomes of measurements" in words(check(spec, c.build()))


def test_free_outputs_must_not_depend_on_where_the_outputs_start() -> None:
    spec = revsynth.outputs({"f": {"table": [0, "-", 1, 0], "bits": 1}}, inputs={"v": 2})
    c = register_circuit(("v", 2), ("f", 1))
    c.x(2, (1, 2))
    c.x(2, (0, 3))
    assert check(spec, c.build()).holds
    stuck = register_circuit(("v", 2), ("f", 1), ("work", 1))
    stuck.x(2, (1, 2))
    stuck.x(3, (0, 3))
    stuck.add(Kind.SWAP, (2, 3), (0, 3))
    verdict = check(spec, stuck.build())
    assert verdict.holds is False


def test_free_values_are_compared_though_blocks_get_smaller_on_the_way() -> None:
    """Where memory runs short, the starting values 0 and 1 of an output are run in blocks of two sizes."""
    care = pack(np.array([1, 1, 1, 1, 1, 0, 0, 1]))
    values = pack(np.array([0, 1, 0, 1, 0, 0, 0, 1]))
    function = Function(3, 1, values[None], care[None], ones(3))
    demand = Demand(Roles("bit", (0, 1, 2), (3,)), function, 4, (3,))
    chosen = 0b10101010  # what the circuit does: free values 1 at input 5, 0 at input 6

    def faulty(blocks: list[tuple[int, int]], wrong: int) -> bool:
        judge = Judge(3, remember=True)
        for base, bits in blocks:
            chunk = demand.block(base, bits)
            numbers = [*chunk.numbers, 0]
            change = sum(
                ((chosen >> (number & 7) & 1) ^ (number == wrong)) << lane
                for lane, number in enumerate(numbers)
            )
            end = [*chunk.start[:3], chunk.start[3] ^ change]
            if judge.first_fault(Finals([Final(end)]), chunk) is not None:
                return True
        return False

    for blocks in ([(0, 3), (8, 2), (12, 2)], [(0, 2), (4, 1), (6, 1), (8, 1), (10, 1), (12, 1), (14, 1)]):
        assert not faulty(blocks, -1)
        assert faulty(blocks, 13)
        assert faulty(blocks, 14)


def test_twenty_erasures_are_two_runs_at_a_time() -> None:
    spec = revsynth.predicate("a == 1 and b == 1", inputs={"a": 1, "b": 1})
    c = register_circuit(("a", 1), ("b", 1), ("work", 1), bits=20)
    for bit in range(20):
        and_on_zero(c, 0, 1, 2)
        if bit == 7:
            c.z(2)
        erase_and(c, 0, 1, 2, bit)
    verdict = check(spec, c.build())
    assert verdict.holds
    assert any("measurements: 20, both outcomes" in link for link in verdict.evidence.links)


def test_one_constant_phase_passes_unless_it_must_be_exact() -> None:
    c = register_circuit(("a", 1), ("b", 1))
    c.z(1, (0,))
    c.add(Kind.GPHASE, (), angles=(0.3,))
    verdict = check(both(), c.build())
    assert verdict.holds
    assert verdict.global_phase == pytest.approx(0.3)
    exact = check(both(), c.build(), exact_phase=True)
    assert words(exact).startswith("every phase is off by the constant 0.3")
    assert exact.counterexample is not None
    assert exact.counterexample.kind == "phase"


def test_rotations_are_followed_to_one_part_in_a_billion() -> None:
    """RZ(pi/2) RZ(-pi/2) with a middle angle split in three; then one of the three off by 1e-6."""
    for slip, holds in ((0.0, True), (1e-6, False)):
        c = register_circuit(("a", 1), ("b", 1))
        for angle in (0.4, 0.6, math.pi - 1.0 + slip):
            c.cx(0, 1)
            c.add(Kind.RZ, (1,), angles=(-angle / 2,))
            c.cx(0, 1)
            c.add(Kind.RZ, (0,), angles=(angle / 2,))
            c.add(Kind.RZ, (1,), angles=(angle / 2,))
        assert check(both(), c.build()).holds is holds


def test_states_that_differ_behind_a_small_first_amplitude_are_not_proportional() -> None:
    some = np.array([1e-6, 0.6, 0.8], dtype=np.complex128)
    assert Floating.proportional(some, 1j * some)
    assert not Floating.proportional(some, some * np.exp([0.0, 0.0, 0.0005j]))
    assert not Floating.proportional(some, some[::-1])


@pytest.mark.parametrize(("slip", "holds"), [(2e-10, True), (2e-8, False)])
def test_an_amplitude_below_one_part_in_a_billion_is_no_superposition(slip: float, holds: bool) -> None:
    c = register_circuit(("a", 1), ("b", 1), ("work", 1))
    c.z(1, (0,))
    c.add(Kind.RY, (2,), (0,), angles=(2 * slip,))
    assert check(both(), c.build()).holds is holds


@pytest.mark.parametrize(("slip", "holds"), [(1e-11, True), (4e-5, False)])
def test_a_small_amplitude_does_not_slip_through_a_reset_as_a_tiny_chance(slip: float, holds: bool) -> None:
    """Scratch turned away from 0 by 2e-5 where a = 1 is reset: a chance of 4e-10, an amplitude of 2e-5."""
    c = register_circuit(("a", 1), ("b", 1), ("work", 1))
    c.add(Kind.RY, (2,), (0,), angles=(slip,))
    c.add(Kind.RESET, (2,))
    c.z(1, (0,))
    assert check(both(), c.build()).holds is holds


@pytest.mark.parametrize(("times", "accuracy"), [(25, "exact integers"), (200, "1e-9")])
def test_a_state_that_stays_open_for_long_comes_back(times: int, accuracy: str) -> None:
    """(T H)^k and back, never a basis state in between; beyond 64-bit integers by complex numbers."""
    c = register_circuit(("a", 1), ("b", 1), ("work", 1))
    for _ in range(times):
        c.h(2)
        c.t(2)
    for _ in range(times):
        c.t(2, inverse=True)
        c.h(2)
    c.z(1, (0,))
    verdict = check(both(), c.build())
    assert verdict.holds
    assert any(accuracy in link for link in verdict.evidence.links)


def test_division_by_root_two_in_the_ring() -> None:
    rows = np.array([[2, 0, 0, 0], [0, 1, 0, -1], [1, 1, 1, 1]], dtype=np.int64)
    shrunk, halves = Exact.halved(rows[:2], 1)
    np.testing.assert_allclose(
        Exact.complex(shrunk) / math.sqrt(2) ** halves, Exact.complex(rows[:2]) / 2, atol=1e-12
    )
    kept, halves = Exact.halved(rows[2:], 0)
    np.testing.assert_allclose(
        Exact.complex(kept) / math.sqrt(2) ** halves, Exact.complex(rows[2:]) / math.sqrt(2), atol=1e-12
    )


def test_a_wide_circuit_uses_several_words() -> None:
    """More than 64 qubits through the general engine: a controlled H opens lanes differently."""
    c = register_circuit(("a", 1), ("b", 1), ("work", 70))
    for qubit in range(2, 72):
        c.cx(0, qubit)
    c.add(Kind.H, (71,), (2 * 1,))
    c.add(Kind.H, (71,), (2 * 1,))
    for qubit in range(2, 72):
        c.cx(0, qubit)
    c.z(1, (0,))
    verdict = check(both(), c.build())
    assert verdict.holds
    assert any("sparse" in link for link in verdict.evidence.links)


def test_too_much_superposition_is_undecided_and_says_why(monkeypatch: pytest.MonkeyPatch) -> None:
    c = register_circuit(("a", 1), ("b", 1), ("work", 12))
    c.add(Kind.H, (2,), (0,))
    for qubit in range(3, 14):
        c.h(qubit)
    for qubit in range(3, 13):
        c.cx(qubit, qubit + 1)
        c.t(qubit + 1)
    for qubit in reversed(range(3, 13)):
        c.t(qubit + 1, inverse=True)
        c.cx(qubit, qubit + 1)
    for qubit in range(3, 14):
        c.h(qubit)
    c.add(Kind.H, (2,), (0,))
    c.z(1, (0,))
    assert check(both(), c.build()).holds
    monkeypatch.setattr(sparse, "MOST_ROWS", 1000)
    verdict = check(both(), c.build())
    assert verdict.holds is None
    assert verdict.counterexample is None
    assert "basis states at one time" in verdict.evidence.detail


def test_the_mark_may_start_in_one() -> None:
    """A circuit that is right only where the output starts in 0."""
    example = locker_mark()
    c = register_circuit(("locker", 3), ("mark", 1), ("work", 1), bits=1)
    for op in example.circuit:
        condition = example.circuit.conditions[op.condition] if op.condition >= 0 else ()
        c.add(op.kind, op.targets, op.controls, op.angles, condition, op.bit)
    c.z(0, (2 * 3, 2 * 1))
    c.x(3, (2 * 1 + 1, 2 * 0, 2 * 2))
    c.x(3, (2 * 1 + 1, 2 * 0, 2 * 2))
    verdict = check(example.spec, c.build())
    assert verdict.holds is False
    assert verdict.counterexample is not None
    assert verdict.counterexample.inputs == {"locker": 3, "mark": 1}
    assert "with mark starting in 1" in verdict.counterexample.why
