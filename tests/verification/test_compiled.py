"""The compiled engine finds what the one in plain integers finds, and says the same of what it cannot do."""

from __future__ import annotations

import os
import subprocess
import sys

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import revsynth
from revsynth.circuit.model import Circuit, Guard, Kind
from revsynth.verification import compiled, engines, verify_program
from revsynth.verification.bitsliced import CrowdedError, run_bitsliced
from revsynth.verification.branches import NotUniformError
from revsynth.verification.compiled import Compiled, RevealsSomewhereError, block_bits
from revsynth.verification.elementary import elementary
from revsynth.verification.outcome import Finals, RevealsError
from revsynth.verification.phases import constant, difference
from revsynth.verification.plan import deaths, plan
from revsynth.verification.steps import FLIP, MEASURE, Step, Steps
from tests.verification.oracles import as_program
from tests.verification.test_order import side_by_side
from tests.verification.test_verdicts_against_the_definition import circuits
from tests.verification.textbook import and_on_zero, erase_and, register_circuit, relative_toffoli, toffoli

LIMIT = 8


def slow(circuit: Circuit, start: list[int], lanes: int, limit: int = LIMIT) -> Finals | str:
    """What the engine in plain integers says."""
    made = plan(elementary(circuit), circuit.conditions)
    try:
        return run_bitsliced(made, start, (1 << lanes) - 1, most_branches=limit, most_runs=limit)
    except (CrowdedError, NotUniformError, RevealsError) as found:
        return type(found).__name__.removesuffix("Error")


def fast(circuit: Circuit, start: list[int], lanes: int, limit: int = LIMIT) -> Finals | str:
    """What the compiled engine says."""
    engine = Compiled(elementary(circuit), circuit.qubits, circuit.bits, circuit.conditions)
    try:
        return engine.run(start, lanes, most_branches=limit, most_runs=limit)
    except (CrowdedError, NotUniformError) as found:
        return type(found).__name__.removesuffix("Error")
    except RevealsSomewhereError:
        return "Reveals"


def assert_same(one: Finals | str, other: Finals | str, ones: int) -> None:
    """The same states; where outcomes are uncertain, in any order and up to a constant phase each."""
    if isinstance(one, str) or isinstance(other, str):
        assert one == other
        return
    assert one.random == other.random
    assert len(one.finals) == len(other.finals)
    left = list(other.finals)
    for final in one.finals:
        for match in left:
            turn = constant(difference(final.phases, match.phases, ones), ones)
            if final.columns == match.columns and turn is not None and (one.random or turn == 0):
                left.remove(match)
                break
        else:
            raise AssertionError("a final state is missing")
        if not one.random:
            assert final.angle == pytest.approx(match.angle, abs=1e-12)


@given(data=st.data())
def test_random_circuits_on_random_lanes(data: st.DataObject) -> None:
    """One lane, a word that is just full, and several words; columns that are constant among them."""
    circuit = data.draw(circuits(data.draw(st.booleans())))
    lanes = data.draw(st.sampled_from((1, 2, 63, 64, 65, 200)))
    ones = (1 << lanes) - 1
    start = [data.draw(st.integers(0, ones) | st.sampled_from((0, ones))) for _ in range(5)]
    assert_same(fast(circuit, start, lanes), slow(circuit, start, lanes), ones)


PIECES = ("relative", "toffoli", "and", "erase", "h", "x", "z", "s", "t", "cx", "measured", "reset", "if")


@given(data=st.data())
def test_long_circuits_of_the_pieces_of_the_trade(data: st.DataObject) -> None:
    c = register_circuit(("q", 6), bits=3)
    for piece in data.draw(st.lists(st.sampled_from(PIECES), min_size=10, max_size=40)):
        a, b, t, *_ = data.draw(st.permutations(range(6)))
        bit = data.draw(st.integers(0, 2))
        if piece in ("relative", "toffoli", "and"):
            {"relative": relative_toffoli, "toffoli": toffoli, "and": and_on_zero}[piece](c, a, b, t)
        elif piece == "erase":
            erase_and(c, a, b, t, bit)
        elif piece == "measured":
            c.h(t)
            c.measure(t, bit)
        elif piece == "reset":
            c.add(Kind.RESET, (t,))
        elif piece == "if":
            c.z(b, (2 * a,), (Guard((2 * bit,)), Guard((2 * ((bit + 1) % 3) + 1,), False)))
        elif piece == "cx":
            c.x(t, (2 * a + bit % 2,))
        elif piece == "t":
            c.t(t, inverse=bool(bit % 2))
        else:
            {"h": c.h, "x": c.x, "z": c.z, "s": c.s}[piece](t)
    circuit = c.build()
    lanes = data.draw(st.sampled_from((2, 64, 130)))
    ones = (1 << lanes) - 1
    start = [data.draw(st.integers(0, ones) | st.sampled_from((0, 0, ones))) for _ in range(6)]
    assert_same(fast(circuit, start, lanes), slow(circuit, start, lanes), ones)


@pytest.mark.parametrize("pairs", [3, 6, 7])
def test_many_branches_take_more_room_as_they_come(pairs: int) -> None:
    """64 branches with rows of their own; with 128 the limit is passed."""
    circuit = side_by_side(pairs)
    lanes = 1 << pairs
    draw = np.random.default_rng(pairs)
    start = [int.from_bytes(draw.bytes(lanes // 8), "little") for _ in range(pairs)] + [0] * pairs
    found = fast(circuit, start, lanes, 64)
    assert (found == "Crowded") == (pairs == 7)
    assert_same(found, slow(circuit, start, lanes, 64), (1 << lanes) - 1)


def test_memory_has_a_limit(monkeypatch: pytest.MonkeyPatch) -> None:
    circuit = side_by_side(6)
    start = [1 << i | 1 << 40 for i in range(6)] + [0] * 6
    assert not isinstance(fast(circuit, start, 64, 64), str)
    monkeypatch.setattr(compiled, "MOST_BYTES", 2000)
    assert fast(circuit, start, 64, 64) == "Crowded"


def test_blocks_get_smaller_where_there_are_many_qubits() -> None:
    assert block_bits(17) == 16
    assert block_bits(1000) < block_bits(100) <= 16
    assert block_bits(100_000) == 12


def test_the_python_form_of_the_kernels_does_the_same() -> None:
    """With compilation switched off the kernels are plain Python; all the tests above must hold there."""
    script = (
        "import sys, pytest;"
        "sys.exit(pytest.main(['-q', '-p', 'no:cacheprovider', '-W', 'ignore', __import__('sys').argv[1],"
        " '-k', 'random_circuits or pieces or branches']))"
    )
    done = subprocess.run(
        [sys.executable, "-c", script, __file__],
        env={**os.environ, "NUMBA_DISABLE_JIT": "1"},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stdout
    assert "5 passed" in done.stdout


def flips(*literals: int, target: int = 0, condition: int = -1) -> Steps:
    return Steps.of([Step(FLIP, literals, target, 0, 0.0, condition, -1, 0)])


@pytest.mark.parametrize(
    ("steps", "what"),
    [
        (flips(4), "literal"),
        (flips(-1), "literal"),
        (flips(target=2), "target"),
        (flips(condition=0), "condition"),
        (Steps.of([Step(MEASURE, (), 0, 0, 0.0, -1, 3, 0)]), "bit"),
    ],
)
def test_numbers_out_of_range_never_reach_the_kernel(steps: Steps, what: str) -> None:
    with pytest.raises(ValueError, match=f"a {what} is out of range"):
        Compiled(steps, 2, 3, ())
    with pytest.raises(ValueError, match=r"a bit of a condition is out of range: .* below 6"):
        Compiled(flips(), 2, 3, ((Guard((6,)),),))


def test_bits_die_with_their_last_reader() -> None:
    c = register_circuit(("q", 2), bits=2)
    c.measure(0, 0)
    c.measure(1, 1)
    c.x(0, condition=(Guard((0, 2)),))
    c.x(1, condition=(Guard((0,)),))
    c.measure(0, 1)
    circuit = c.build()
    assert deaths(elementary(circuit), circuit.conditions) == [(2, 1), (3, 0), (4, 1)]


def test_a_constant_angle_is_added_up() -> None:
    c = register_circuit(("q", 1))
    c.add(Kind.GPHASE, (), (), (0.3,))
    c.add(Kind.GPHASE, (), (), (0.4,))
    found = fast(c.build(), [0b10], 2)
    assert isinstance(found, Finals)
    assert found.finals[0].angle == pytest.approx(0.7)


@pytest.fixture
def always(monkeypatch: pytest.MonkeyPatch) -> None:
    """The compiled engine whatever the size."""
    monkeypatch.setattr(engines, "COMPILED_FROM", 0)
    monkeypatch.setattr(engines, "COMPILED_LOADED", 0)


@pytest.mark.usefixtures("always")
def test_counterexamples_are_told_as_ever(monkeypatch: pytest.MonkeyPatch) -> None:
    """A wrong sign at one input of 2**14, an output, a measurement that gives an input away."""
    monkeypatch.setattr(compiled, "LARGEST_BITS", 12)
    spec = revsynth.predicate("v == 9001", inputs={"v": 14})
    literals = [2 * bit + 1 - (9001 >> bit & 1) for bit in range(14)]
    good, bad, reveals = (register_circuit(("v", 14), bits=1) for _ in range(3))
    for c in (good, bad, reveals):
        c.z(0, literals[1:])
    bad.z(0, [2 * bit + 1 - (12345 >> bit & 1) for bit in range(1, 14)])
    reveals.measure(3, 0)
    assert verify_program(spec, as_program(good.build()), exact_phase=True).holds
    for c in (bad, reveals):
        told = verify_program(spec, as_program(c.build()))
        with monkeypatch.context() as plain:
            plain.setattr(engines, "COMPILED_FROM", 1 << 60)
            plain.setattr(engines, "COMPILED_LOADED", 1 << 60)
            expected = verify_program(spec, as_program(c.build()))
        assert told.holds is False
        assert told.counterexample == expected.counterexample


@pytest.mark.usefixtures("always")
def test_engines_that_disagree_are_a_defect(monkeypatch: pytest.MonkeyPatch) -> None:
    """A fault that only the compiled engine sees must not pass for a verdict."""
    spec = revsynth.predicate("v == 3", inputs={"v": 2})
    c = register_circuit(("v", 2))
    c.z(0, (2,))
    true_run = Compiled.run

    def wrong_run(self: Compiled, *args: object, **options: int) -> Finals:
        found = true_run(self, *args, **options)  # type: ignore[arg-type]
        found.finals[0].columns[0] ^= 1
        return found

    monkeypatch.setattr(Compiled, "run", wrong_run)
    with pytest.raises(AssertionError, match="two engines of verification disagree"):
        verify_program(spec, as_program(c.build()))
