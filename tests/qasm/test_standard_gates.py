"""Every gate of the standard include files against its published matrix or definition.

Matrices: A. Cross et al. 2017 (arXiv 1707.03429) and 2022 (arXiv 2104.14722), and the standard library
section of OpenQASM 3; where the text is from memory, a comment says so.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable

import numpy as np
import pytest

from revsynth.qasm import read
from revsynth.qasm.standard_gates import all_gates
from revsynth.qasm.vocabulary import QELIB1, QELIB1_LATER, STDGATES
from tests.qasm.circuits import H2, H3, close, close_up_to_phase, embedded, operator, u_matrix
from tests.slow_simulator import unitary

A, B, C, D = 0.7, -1.3, 2.1, 0.4
R = math.sqrt(0.5)
X = [[0, 1], [1, 0]]
Y = [[0, -1j], [1j, 0]]
Z = [[1, 0], [0, -1]]
H = [[R, R], [R, -R]]
SX = [[(1 + 1j) / 2, (1 - 1j) / 2], [(1 - 1j) / 2, (1 + 1j) / 2]]


def phase(angle: float) -> list[list[complex]]:
    return [[1, 0], [0, cmath.exp(1j * angle)]]


def exponential(axis: list[list[complex]], angle: float) -> list[list[complex]]:
    """exp(-i angle/2 axis) = cos(angle/2) I - i sin(angle/2) axis, as axis squared is I."""
    return (math.cos(angle / 2) * np.eye(2) - 1j * math.sin(angle / 2) * np.array(axis)).tolist()


def pauli_rotation(axis: list[list[complex]], angle: float) -> np.ndarray:
    """exp(-i angle/2 axis (x) axis) on two qubits."""
    return math.cos(angle / 2) * np.eye(4) - 1j * math.sin(angle / 2) * np.kron(axis, axis)


def dagger(matrix: list[list[complex]]) -> list[list[complex]]:
    return np.conj(np.array(matrix)).T.tolist()


def swap(controls: int) -> np.ndarray:
    def act(state: int) -> dict[int, complex]:
        a, b = state >> controls & 1, state >> (controls + 1) & 1
        if state & ((1 << controls) - 1) != (1 << controls) - 1 or a == b:
            return {state: 1}
        return {state ^ (3 << controls): 1}

    return operator(controls + 2, act)


def single(matrix: list[list[complex]], controls: int = 0) -> np.ndarray:
    return embedded(matrix, controls, [2 * control for control in range(controls)], controls + 1)


ONE_QUBIT: dict[str, list[list[complex]]] = {
    "id": [[1, 0], [0, 1]],
    "x": X,
    "y": Y,
    "z": Z,
    "h": H,
    "s": phase(math.pi / 2),
    "sdg": phase(-math.pi / 2),
    "t": phase(math.pi / 4),
    "tdg": phase(-math.pi / 4),
    "sx": SX,
    "sxdg": dagger(SX),
    f"u0({A})": [[1, 0], [0, 1]],
    f"p({A})": phase(A),
    f"phase({A})": phase(A),
    f"u1({A})": phase(A),
    f"rx({A})": exponential(X, A),
    f"ry({A})": exponential(Y, A),
    f"u2({A}, {B})": u_matrix(math.pi / 2, A, B),
    f"u3({A}, {B}, {C})": u_matrix(A, B, C),
    f"u({A}, {B}, {C})": u_matrix(A, B, C),
    f"U({A}, {B}, {C})": u_matrix(A, B, C),
}
CONTROLLED: dict[str, tuple[list[list[complex]], int]] = {
    "CX": (X, 1),
    "cx": (X, 1),
    "cy": (Y, 1),
    "cz": (Z, 1),
    "ch": (H, 1),
    "csx": (SX, 1),
    f"cp({A})": (phase(A), 1),
    f"cphase({A})": (phase(A), 1),
    f"cu1({A})": (phase(A), 1),
    f"crx({A})": (exponential(X, A), 1),
    f"cry({A})": (exponential(Y, A), 1),
    f"crz({A})": (exponential(Z, A), 1),
    f"cu3({A}, {B}, {C})": (u_matrix(A, B, C), 1),
    f"cu({A}, {B}, {C}, {D})": ((cmath.exp(1j * D) * np.array(u_matrix(A, B, C))).tolist(), 1),
    "ccx": (X, 2),
    "c3x": (X, 3),
    "c4x": (X, 4),
    "c3sqrtx": (SX, 3),
}
OTHERS: dict[str, tuple[int, np.ndarray]] = {
    "swap": (2, swap(0)),
    "cswap": (3, swap(1)),
    f"rzz({A})": (2, pauli_rotation(Z, A)),
    f"rxx({A})": (2, pauli_rotation(X, A)),
}


def matrix_of(text: str, qubits: int, header: str = H3) -> np.ndarray:
    operands = ", ".join(f"q[{index}]" for index in range(qubits))
    return unitary(read(f"{header}qreg q[{qubits}];\n{text} {operands};\n").circuit)


@pytest.mark.parametrize("header", [H2, H3])
@pytest.mark.parametrize("call", ONE_QUBIT)
def test_one_qubit_gates(call: str, header: str) -> None:
    assert close(matrix_of(call, 1, header), np.array(ONE_QUBIT[call]))


@pytest.mark.parametrize("header", [H2, H3])
@pytest.mark.parametrize("call", CONTROLLED)
def test_controlled_gates(call: str, header: str) -> None:
    matrix, controls = CONTROLLED[call]
    assert close(matrix_of(call, controls + 1, header), single(matrix, controls))


@pytest.mark.parametrize("header", [H2, H3])
@pytest.mark.parametrize("call", OTHERS)
def test_other_gates(call: str, header: str) -> None:
    qubits, matrix = OTHERS[call]
    assert close(matrix_of(call, qubits, header), matrix)


def test_rz_differs_between_the_versions() -> None:
    assert close(matrix_of(f"rz({A})", 1, H3), np.array(exponential(Z, A)))
    assert close(matrix_of(f"rz({A})", 1, H2), np.array(phase(A)))


def test_gphase() -> None:
    text = f"{H3}qubit[2] q;\ngphase({A});\nctrl @ gphase({B}) q[1];\n"
    expected = cmath.exp(1j * A) * np.diag([1, 1, cmath.exp(1j * B), cmath.exp(1j * B)])
    assert close(unitary(read(text).circuit), expected)


def test_every_gate_of_the_include_files_is_tested_here() -> None:
    named = {call.partition("(")[0] for call in (*ONE_QUBIT, *CONTROLLED, *OTHERS)} | {"rz", "rccx", "rc3x"}
    assert named == STDGATES | QELIB1 | QELIB1_LATER | {"U", "CX"}
    assert named == {gate.name for gate in all_gates(3)}


def test_relative_phase_gates_are_toffolis_up_to_phases() -> None:
    """rccx, rc3x: D. Maslov, "Advantages of using relative-phase Toffoli gates", 2016 (Phys. Rev. A 93)."""
    for name, controls in (("rccx", 2), ("rc3x", 3)):
        found = matrix_of(name, controls + 1)
        assert np.allclose(np.abs(found), np.abs(single(X, controls)), atol=1e-9)
    # rccx from memory: the phases are all 1 but for -1 at |101> and a factor i, -i where both controls are 1
    found = matrix_of("rccx", 3)
    assert close(found @ found.conj().T, np.eye(8))
    nonzero = {(row, column): found[row, column] for row, column in np.argwhere(np.abs(found) > 0.5).tolist()}
    signs = {place: value for place, value in nonzero.items() if abs(value - 1) > 1e-9}
    assert set(signs) == {(5, 5), (3, 7), (7, 3)}
    assert abs(signs[5, 5] + 1) < 1e-9
    assert abs(signs[3, 7] * signs[7, 3] - 1) < 1e-9


# How the published files build their gates from a few, as (gate, operands) steps: facts of qelib1.inc
# (arXiv 1707.03429, figure 2; u and cx are the built-in U and CX).
def steps_of_qelib1() -> dict[str, tuple[str, str, str]]:
    return {
        "cz": ("", "a,b", "h b; cx a,b; h b;"),
        "cy": ("", "a,b", "sdg b; cx a,b; s b;"),
        "ch": ("", "a,b", "h b; sdg b; cx a,b; h b; t b; cx a,b; t b; h b; s b; x b; s a;"),
        "ccx": (
            "",
            "a,b,c",
            "h c; cx b,c; tdg c; cx a,c; t c; cx b,c; tdg c; cx a,c; "
            "t b; t c; h c; cx a,b; t a; tdg b; cx a,b;",
        ),
        "crz": ("(l)", "a,b", "u1(l/2) b; cx a,b; u1(-l/2) b; cx a,b;"),
        "cu1": ("(l)", "a,b", "u1(l/2) a; cx a,b; u1(-l/2) b; cx a,b; u1(l/2) b;"),
        "x": ("", "a", "u3(pi,0,pi) a;"),
        "y": ("", "a", "u3(pi,pi/2,pi/2) a;"),
        "z": ("", "a", "u1(pi) a;"),
        "h": ("", "a", "u2(0,pi) a;"),
        "s": ("", "a", "u1(pi/2) a;"),
        "tdg": ("", "a", "u1(-pi/4) a;"),
        "rx": ("(l)", "a", "u3(l,-pi/2,pi/2) a;"),
        "ry": ("(l)", "a", "u3(l,0,0) a;"),
        "rz": ("(l)", "a", "u1(l) a;"),
        "u1": ("(l)", "a", "U(0,0,l) a;"),
        "u2": ("(p,l)", "a", "U(pi/2,p,l) a;"),
    }


UP_TO_PHASE = {"ch"}
"""The published ch gives the controlled Hadamard up to a constant phase exp(i pi/4)."""


@pytest.mark.parametrize("name", steps_of_qelib1())
def test_published_definitions_expand_to_the_built_in_gates(name: str) -> None:
    parameters, qubits, body = steps_of_qelib1()[name]
    count = len(qubits.split(","))
    given = {"": "", "(l)": f"({A})", "(p,l)": f"({A},{B})"}[parameters]
    text = f"{H2}gate mine{parameters} {qubits} {{ {body} }}\n"
    built_in = matrix_of(name + given, count, H2)
    expanded = matrix_of("mine" + given, count, text)
    compare: Callable[[np.ndarray, np.ndarray], bool] = close_up_to_phase if name in UP_TO_PHASE else close
    assert compare(expanded, built_in)


def test_the_published_cu3_leaves_out_a_phase_on_the_control() -> None:
    """cu3 of 2017 is diag(I, Rz(p) Ry(t) Rz(l)): ours times exp(-i(p+l)/2) where the control is 1."""
    body = "u1((l-p)/2) b; cx a,b; u3(-t/2,0,-(p+l)/2) b; cx a,b; u3(t/2,p,0) b;"
    text = f"{H2}gate mine(t,p,l) a,b {{ {body} }}\n"
    later = f"{H2}gate mine(t,p,l) a,b {{ u1((l+p)/2) a; {body} }}\n"
    ours = matrix_of(f"cu3({A},{B},{C})", 2, H2)
    assert close(matrix_of(f"mine({A},{B},{C})", 2, later), ours)
    control = np.diag([1, cmath.exp(-0.5j * (B + C))] * 2)
    assert close(matrix_of(f"mine({A},{B},{C})", 2, text), ours @ control)


# Facts of stdgates.inc (OpenQASM 3 standard, standard library; from memory).
STDGATES_STEPS = {
    "p(l)": ("a", "ctrl @ gphase(l) a;"),
    "s": ("a", "pow(1/2) @ z a;"),
    "sdg": ("a", "inv @ pow(1/2) @ z a;"),
    "t": ("a", "pow(1/2) @ s a;"),
    "tdg": ("a", "inv @ pow(1/2) @ s a;"),
    "sx": ("a", "pow(1/2) @ x a;"),
    "rz(l)": ("a", "gphase(-l/2); U(0, 0, l) a;"),
    "cy": ("a, b", "ctrl @ y a, b;"),
    "cp(l)": ("a, b", "ctrl @ p(l) a, b;"),
    "crx(l)": ("a, b", "ctrl @ rx(l) a, b;"),
    "cry(l)": ("a, b", "ctrl @ ry(l) a, b;"),
    "crz(l)": ("a, b", "ctrl @ rz(l) a, b;"),
    "ch": ("a, b", "ctrl @ h a, b;"),
    "swap": ("a, b", "cx a, b; cx b, a; cx a, b;"),
    "ccx": ("a, b, c", "ctrl @ ctrl @ x a, b, c;"),
    "cswap": ("a, b, c", "ctrl @ swap a, b, c;"),
    "cu(t,f,l,g)": ("a, b", "p(g) a; ctrl @ U(t, f, l) a, b;"),
}


@pytest.mark.parametrize("name", STDGATES_STEPS)
def test_the_standard_library_of_openqasm3_expands_to_the_built_in_gates(name: str) -> None:
    qubits, body = STDGATES_STEPS[name]
    count = len(qubits.split(","))
    given = name.replace("(l)", f"({A})").replace("(t,f,l,g)", f"({A},{B},{C},{D})")
    formal = name[name.index("(") :] if "(" in name else ""
    text = f"{H3}gate mine{formal} {qubits} {{ {body} }}\n"
    actual = given[given.index("(") :] if "(" in given else ""
    assert close(matrix_of("mine" + actual, count, text), matrix_of(given, count))


def test_sympy_agrees_on_the_rotations() -> None:
    """exp of a matrix by SymPy, an algebra system of general purpose."""
    import sympy

    for name, axis in (("rx", X), ("ry", Y), ("rz", Z)):
        exact = (-sympy.I * sympy.Rational(7, 20) * sympy.Matrix(axis)).exp()
        expected = np.array(exact.evalf(20).tolist(), dtype=complex)
        assert close(matrix_of(f"{name}({A})", 1), expected)
