"""Lifting of wide circuits: adders, chains and rounds, against Python's own integers."""

from __future__ import annotations

from contextlib import suppress

import numpy as np
import pytest

import revsynth
from revsynth.circuit.model import Circuit
from revsynth.spec.understand import understand
from revsynth.verification.lifting import Account, Lifted, NotClosedError, account, lift, start_of
from revsynth.verification.matching import Roles
from tests.verification.lifting_checks import verdict
from tests.verification.lifting_circuits import adder, equality_with_products, rounds
from tests.verification.mutants import mutants
from tests.verification.slow_verdict import slow_verdict

STYLES = [
    ("clifford+t", "measured"),
    ("clifford+t", "unitary"),
    ("toffoli", "measured"),
    ("toffoli", "unitary"),
    ("cascade", "unitary"),
]


def lifted_in_place(circuit: Circuit, inputs: int) -> tuple[Lifted, Account]:
    """The circuit as a block in place on its first qubits."""
    qubits = tuple(range(inputs))
    roles = Roles("inplace", qubits, qubits)
    lifted = lift(circuit, *start_of(roles, circuit.qubits))
    return lifted, account(lifted, roles)


def images(lifted: Lifted, found: Account, values: list[int]) -> list[int]:
    """What the lifted graph makes of 64 inputs."""
    assert len(values) == 64
    rows = [
        sum((value >> bit & 1) << place for place, value in enumerate(values))
        for bit in range(lifted.start_variables)
    ]
    words = lifted.export(found.outputs).simulate(np.array(rows, dtype=np.uint64)[:, np.newaxis])[:, 0]
    return [sum((int(word) >> place & 1) << bit for bit, word in enumerate(words)) for place in range(64)]


def random_values(bits: int, seed: int) -> list[int]:
    generator = np.random.default_rng(seed)
    return [int.from_bytes(generator.bytes((bits + 7) // 8), "little") % (1 << bits) for _ in range(64)]


@pytest.mark.parametrize("bits", [1, 2, 22, 67])
@pytest.mark.parametrize(("gates", "uncompute"), STYLES)
def test_adders_lift_to_sums_with_an_and_a_bit(bits: int, gates: str, uncompute: str) -> None:
    lifted, found = lifted_in_place(adder(bits, gates, uncompute), 2 * bits)
    assert found.claims == ()
    assert found.sign == 0
    assert lifted.sixteenths == 0
    graph = lifted.export(found.outputs)
    assert graph.ands == bits - 1
    values = random_values(2 * bits, bits)
    mask = (1 << bits) - 1
    wanted = [value & mask | ((value & mask) + (value >> bits) & mask) << bits for value in values]
    assert images(lifted, found, values) == wanted


@pytest.mark.parametrize(("gates", "uncompute"), STYLES)
def test_rounds_of_additions_lift_to_the_ands_computed(gates: str, uncompute: str) -> None:
    """Neighbouring products on one scratch qubit meet without Hadamards between them."""
    words, bits, count = 4, 16, 6
    lifted, found = lifted_in_place(rounds(words, bits, count, gates, uncompute), words * bits)
    assert found.claims == ()
    assert lifted.export(found.outputs).ands == count * (bits - 1)
    values = random_values(words * bits, 1)
    assert images(lifted, found, values) == [by_hand(value, words, bits, count) for value in values]


def by_hand(value: int, words: int, bits: int, count: int) -> int:
    """The rounds on integers."""
    mask = (1 << bits) - 1
    state = [value >> bits * word & mask for word in range(words)]
    for turn in range(count):
        one, other, third = ((turn + shift) % words for shift in range(3))
        state[other] = state[other] + state[one] & mask
        rotated = (state[other] << 7 | state[other] >> (bits - 7)) & mask
        state[third] ^= rotated
    return sum(word << bits * place for place, word in enumerate(state))


@pytest.mark.parametrize(("gates", "uncompute"), STYLES)
@pytest.mark.parametrize("controls", [5, 20, 101])
def test_chains_lift_to_one_product(controls: int, gates: str, uncompute: str) -> None:
    circuit = equality_with_products(controls, gates, uncompute)
    roles = Roles("phase", tuple(range(controls)))
    lifted = lift(circuit, *start_of(roles, circuit.qubits))
    found = account(lifted, roles)
    assert found.claims == ()
    graph = lifted.export([found.sign])
    generator = np.random.default_rng(controls)
    rows = [
        int.from_bytes(generator.bytes(8), "little") if generator.integers(controls) < 6 else (1 << 64) - 1
        for _ in range(controls)
    ]
    signs = graph.simulate(np.array(rows, dtype=np.uint64)[:, np.newaxis])[0, 0]
    assert int(signs) == int(np.bitwise_and.reduce(np.array(rows, dtype=np.uint64)))


@pytest.mark.parametrize("uncompute", ["measured", "unitary"])
def test_faults_in_a_small_adder_are_passed_only_where_they_do_nothing(uncompute: str) -> None:
    circuit = adder(2, "clifford+t", uncompute)
    roles = Roles("inplace", (0, 1, 2, 3), (0, 1, 2, 3))
    spec = revsynth.permutation([x & 3 | ((x & 3) + (x >> 2) & 3) << 2 for x in range(16)])
    function = understand(spec).function
    assert verdict(circuit, roles, function) is True
    for mutant in mutants(circuit):
        found = verdict(mutant.circuit, roles, function)
        assert found is None or found == slow_verdict(mutant.circuit, roles, function), mutant


def test_no_gate_of_a_wide_adder_can_be_left_out() -> None:
    """A fault must show: in a claim, in a random image, or by not closing."""
    bits = 24
    circuit = adder(bits, "clifford+t", "measured")
    values = random_values(2 * bits, 5)
    mask = (1 << bits) - 1
    wanted = [value & mask | ((value & mask) + (value >> bits) & mask) << bits for value in values]
    faults = [m for m in mutants(circuit) if m.fault in ("left out", "inverted", "condition dropped")]
    closed = 0
    for mutant in faults[::8]:
        with suppress(NotClosedError):
            lifted, found = lifted_in_place(mutant.circuit, 2 * bits)
            closed += 1
            assert found.claims or images(lifted, found, values) != wanted, mutant
    assert closed > 25
