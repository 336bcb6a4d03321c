"""Modifiers as matrices: controls, inverses and powers against linear algebra on the plain gate."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.errors import CircuitFileError
from revsynth.qasm import read
from tests.qasm.circuits import H3, close, operator
from tests.slow_simulator import unitary

GATES = {
    "x": 1, "y": 1, "z": 1, "h": 1, "s": 1, "sdg": 1, "t": 1, "tdg": 1, "sx": 1, "p(0.7)": 1, "rx(0.7)": 1,
    "ry(-1.1)": 1, "rz(2.5)": 1, "U(0.4, 1.2, -0.3)": 1, "cx": 2, "swap": 2, "crz(0.3)": 2, "gphase(0.6)": 0,
    "cu(0.1, 0.2, 0.3, 0.4)": 2, "mine(0.8)": 2,
}  # fmt: skip
MINE = "gate mine(a) c, t { h c; rz(a) t; cx c, t; gphase(a/3); t t; }\n"


def matrix(text: str, qubits: int, negctrl: str | None = None) -> np.ndarray:
    total = max(qubits, 1)
    operands = ", ".join(f"q[{index}]" for index in range(qubits))
    file = f"{H3}{MINE}qubit[{total}] q;\n{text} {operands};\n"
    return unitary(read(file, negctrl=negctrl).circuit)


def plain(gate: str) -> np.ndarray:
    """The matrix of a gate on its own qubits alone (1 x 1 for gphase)."""
    found = matrix(gate, GATES[gate])
    return found[:1, :1] if GATES[gate] == 0 else found


def with_controls(inner: np.ndarray, fires: list[bool], controls: int) -> np.ndarray:
    """`inner` on the qubits behind `controls` qubits, where `fires[value of the controls]`."""
    width = int(math.log2(inner.shape[0]))

    def act(state: int) -> dict[int, complex]:
        value, rest = state & ((1 << controls) - 1), state >> controls
        if not fires[value]:
            return {state: 1}
        return {value | row << controls: inner[row, rest] for row in range(inner.shape[0])}

    return operator(width + controls, act)


@pytest.mark.parametrize("gate", GATES)
@pytest.mark.parametrize(
    ("modifiers", "wanted"),
    [("ctrl @", {1}), ("negctrl @", {0}), ("ctrl(2) @", {3}), ("ctrl @ negctrl @", {1}),
     ("negctrl @ ctrl @", {2}),
     ("negctrl @ negctrl @", {0}), ("ctrl @ ctrl(2) @", {7}), ("negctrl(1) @", {0})],
)  # fmt: skip
def test_controls(gate: str, modifiers: str, wanted: set[int]) -> None:
    controls = {"(2) @": 2}.get(modifiers[4:], modifiers.count("@"))
    controls = 3 if modifiers == "ctrl @ ctrl(2) @" else controls
    found = matrix(f"{modifiers} {gate}", GATES[gate] + controls)
    fires = [value in wanted for value in range(1 << controls)]
    assert close(found, with_controls(plain(gate), fires, controls))


@pytest.mark.parametrize("gate", GATES)
@pytest.mark.parametrize("count", [2, 3])
def test_both_readings_of_several_negative_controls(gate: str, count: int) -> None:
    inner = plain(gate)
    all_zero = [value == 0 for value in range(1 << count)]
    not_all_one = [value != (1 << count) - 1 for value in range(1 << count)]
    text = f"negctrl({count}) @ {gate}"
    assert close(matrix(text, GATES[gate] + count, "all-zero"), with_controls(inner, all_zero, count))
    assert close(matrix(text, GATES[gate] + count, "as-published"), with_controls(inner, not_all_one, count))
    with pytest.raises(CircuitFileError, match=rf"line 5, column 1: negctrl\({count}\) has two readings"):
        matrix(text, GATES[gate] + count)


@pytest.mark.parametrize("gate", GATES)
def test_inverse(gate: str) -> None:
    found = matrix(f"inv @ {gate}", GATES[gate])[: plain(gate).shape[0], : plain(gate).shape[0]]
    assert close(found, plain(gate).conj().T)


@pytest.mark.parametrize("gate", GATES)
@pytest.mark.parametrize("exponent", [0, 1, 2, 3, 5, 8, -1, -2, -7])
def test_whole_powers(gate: str, exponent: int) -> None:
    size = plain(gate).shape[0]
    found = matrix(f"pow({exponent}) @ {gate}", GATES[gate])[:size, :size]
    assert close(found, np.linalg.matrix_power(plain(gate), exponent))


def principal_power(inner: np.ndarray, exponent: float) -> np.ndarray:
    """The power on the eigenvalues exp(ia) with a in (-pi, pi] (numpy's eigenvectors of a normal matrix)."""
    values, vectors = np.linalg.eig(inner)
    angles = np.angle(values)
    angles = np.where(np.isclose(angles, -np.pi), np.pi, angles)
    return vectors @ np.diag(np.exp(1j * angles * exponent)) @ np.linalg.inv(vectors)


ROOTED = [
    "x",
    "y",
    "z",
    "s",
    "sdg",
    "t",
    "tdg",
    "sx",
    "p(0.7)",
    "p(5.1)",
    "p(-pi)",
    "id",
    "rx(0.7)",
    "ry(-1.1)",
    "rz(2.5)",
    "gphase(0.6)",
]


@pytest.mark.parametrize("gate", ROOTED)
@pytest.mark.parametrize("exponent", ["1/2", "-1/2", "1/4", "0.3", "2.7", "-1.6"])
def test_broken_powers(gate: str, exponent: str) -> None:
    width = GATES.get(gate, 1)
    inner = matrix(gate, width)
    value = float(Fraction(exponent))
    assert close(matrix(f"pow({exponent}) @ {gate}", width), principal_power(inner, value))


@pytest.mark.parametrize("gate", ["x", "sx", "rz(2.5)", "y"])
def test_a_power_of_a_controlled_gate_is_the_controlled_power(gate: str) -> None:
    inner = principal_power(plain(gate), 0.4)
    expected = with_controls(inner, [False, True], 1)
    assert close(matrix(f"pow(0.4) @ ctrl @ {gate}", 2), expected)
    assert close(matrix(f"ctrl @ pow(0.4) @ {gate}", 2), expected)
    negative = with_controls(inner, [True, False], 1)
    assert close(matrix(f"pow(0.4) @ negctrl @ {gate}", 2), negative)


@given(
    st.lists(
        st.sampled_from(["inv @", "ctrl @", "negctrl @", "pow(2) @", "pow(-1) @", "pow(3) @"]), max_size=4
    ),
    st.sampled_from(sorted(GATES)),
)
def test_any_chain_of_modifiers(chain: list[str], gate: str) -> None:
    expected = plain(gate)
    controls = 0
    for modifier in reversed(chain):
        if modifier == "inv @":
            expected = expected.conj().T
        elif modifier.startswith("pow"):
            expected = np.linalg.matrix_power(expected, int(modifier[4:-3]))
        else:
            expected = with_controls(expected, [modifier == "negctrl @", modifier == "ctrl @"], 1)
            controls += 1
    found = matrix(f"{' '.join(chain)} {gate}", GATES[gate] + controls)
    size = expected.shape[0]
    assert close(found[:size, :size], expected)


def test_operands_come_in_the_order_of_the_modifiers() -> None:
    text = f"{H3}qubit[4] q;\nctrl @ negctrl @ cx q[2], q[0], q[3], q[1];\n"
    (op,) = read(text).circuit
    assert op.controls == (4, 1, 6)
    assert op.targets == (1,)


def test_named_roots_keep_their_names() -> None:
    modifiers = "pow(1/2) @ x q; inv @ pow(1/2) @ z q; pow(0.25) @ z q; pow(3) @ s q; pow(2) @ t q;"
    text = f"{H3}qubit q;\n{modifiers}\n"
    assert [op.kind.name for op in read(text).circuit] == ["SX", "SDG", "T", "SDG", "S"]
