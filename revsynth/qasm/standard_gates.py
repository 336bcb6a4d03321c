"""The gates of the standard include files as templates of exact textbook matrices.

Which reading is taken where texts differ:

* `rz(a)` is diag(exp(-ia/2), exp(ia/2)) in OpenQASM 3 (standard library: `gphase(-a/2); U(0, 0, a)`) and
  diag(1, exp(ia)) in OpenQASM 2, where qelib1.inc defines it as `u1(a)` (arXiv 1707.03429, figure 2).
* `U`, `u`, `u3(t, p, l)` are [[cos(t/2), -exp(il) sin(t/2)], [exp(ip) sin(t/2), exp(i(p+l)) cos(t/2)]], the
  matrix of the OpenQASM 3 paper (A. Cross et al., 2022, arXiv 2104.14722, section on the built-in gates), so
  that every body of qelib1.inc is exactly its textbook gate. Texts that differ do so by a constant phase of
  the uncontrolled gate alone: the 2017 paper writes U as Rz(p) Ry(t) Rz(l); later texts of the standard give
  U a phase exp(it/2), and stdgates.inc gives u2 and u3 a phase exp(-i(p+l)/2).
* `u2(p, l)` is u3(pi/2, p, l); `u1`, `p`, `phase` are diag(1, exp(ia)).
* `cu(t, p, l, g)` is diag(I, exp(ig) U(t, p, l)), the same in all texts; `cu3(t, p, l)` is
  diag(I, U(t, p, l)), as later copies of qelib1.inc have it (that of 2017 leaves out a phase exp(i(p+l)/2) on
  the control).
* `crz(a)` is diag(1, 1, exp(-ia/2), exp(ia/2)) in both versions; `rxx` is exp(-ia/2 XX), `rzz` exp(-ia/2 ZZ).
* `sx` is the principal square root of X; `c3sqrtx` is sx with three controls; `u0` waits: the identity.

The bodies of rccx and rc3x follow later copies of qelib1.inc (from memory).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import TypeAlias

from revsynth.circuit.model import Kind
from revsynth.qasm.syntax import VersionNumber
from revsynth.qasm.template import Piece, Template
from revsynth.qasm.vocabulary import QELIB1, STDGATES

Build: TypeAlias = Callable[..., Template]


@dataclass(frozen=True, eq=False)
class StandardGate:
    """A gate that an include file brings: its shape and its template for given parameters."""

    name: str
    parameters: int
    qubits: int
    build: Build


def _fixed(name: str, qubits: int, template: Template) -> StandardGate:
    return StandardGate(name, 0, qubits, lambda: template)


def _single(name: str, kind: Kind, controls: int = 0, parameters: int = 0) -> StandardGate:
    """A kind under positive controls, its parameters the kind's angles."""
    held = tuple(2 * index for index in range(controls))
    targets = (controls, controls + 1) if kind is Kind.SWAP else (controls,)

    def build(*angles: float) -> Template:
        return (Piece(kind, held, targets, angles),)

    return StandardGate(name, parameters, controls + len(targets), build)


def _u2(phi: float, lam: float) -> Template:
    return (Piece(Kind.U, (), (0,), (math.pi / 2, phi, lam)),)


def _cu(theta: float, phi: float, lam: float, gamma: float) -> Template:
    turn = Piece(Kind.U, (0,), (1,), (theta, phi, lam))
    return (turn,) if gamma == 0 else (Piece(Kind.P, (), (0,), (gamma,)), turn)


def _rzz(angle: float) -> Template:
    toggle = Piece(Kind.X, (0,), (1,))
    return (toggle, Piece(Kind.RZ, (), (1,), (angle,)), toggle)


def _rxx(angle: float) -> Template:
    turn = (_h(0), _h(1))
    return turn + _rzz(angle) + turn


def _h(qubit: int) -> Piece:
    return Piece(Kind.H, (), (qubit,))


def _cx(control: int, target: int) -> Piece:
    return Piece(Kind.X, (2 * control,), (target,))


def _t(qubit: int) -> Piece:
    return Piece(Kind.T, (), (qubit,))


def _tdg(qubit: int) -> Piece:
    return Piece(Kind.TDG, (), (qubit,))


_RCCX: Template = (_h(2), _t(2), _cx(1, 2), _tdg(2), _cx(0, 2), _t(2), _cx(1, 2), _tdg(2), _h(2))
_RC3X_ENDS: Template = (_h(3), _t(3), _cx(2, 3), _tdg(3), _h(3))
_RC3X_HALF: Template = (_cx(0, 3), _t(3), _cx(1, 3), _tdg(3))
_RC3X: Template = _RC3X_ENDS + _RC3X_HALF + _RC3X_HALF + _RC3X_ENDS

_GATES = (
    _fixed("id", 1, ()),
    StandardGate("u0", 1, 1, lambda _: ()),
    _single("x", Kind.X),
    _single("y", Kind.Y),
    _single("z", Kind.Z),
    _single("h", Kind.H),
    _single("s", Kind.S),
    _single("sdg", Kind.SDG),
    _single("t", Kind.T),
    _single("tdg", Kind.TDG),
    _single("sx", Kind.SX),
    _single("sxdg", Kind.SXDG),
    _single("p", Kind.P, parameters=1),
    _single("phase", Kind.P, parameters=1),
    _single("u1", Kind.P, parameters=1),
    _single("rx", Kind.RX, parameters=1),
    _single("ry", Kind.RY, parameters=1),
    _single("rz", Kind.RZ, parameters=1),
    StandardGate("u2", 2, 1, _u2),
    _single("u", Kind.U, parameters=3),
    _single("u3", Kind.U, parameters=3),
    _single("U", Kind.U, parameters=3),
    _single("CX", Kind.X, controls=1),
    _single("cx", Kind.X, controls=1),
    _single("cy", Kind.Y, controls=1),
    _single("cz", Kind.Z, controls=1),
    _single("ch", Kind.H, controls=1),
    _single("csx", Kind.SX, controls=1),
    _single("cp", Kind.P, controls=1, parameters=1),
    _single("cphase", Kind.P, controls=1, parameters=1),
    _single("cu1", Kind.P, controls=1, parameters=1),
    _single("crx", Kind.RX, controls=1, parameters=1),
    _single("cry", Kind.RY, controls=1, parameters=1),
    _single("crz", Kind.RZ, controls=1, parameters=1),
    _single("cu3", Kind.U, controls=1, parameters=3),
    StandardGate("cu", 4, 2, _cu),
    _single("swap", Kind.SWAP),
    _single("cswap", Kind.SWAP, controls=1),
    _single("ccx", Kind.X, controls=2),
    _single("c3x", Kind.X, controls=3),
    _single("c4x", Kind.X, controls=4),
    _single("c3sqrtx", Kind.SX, controls=3),
    StandardGate("rzz", 1, 2, _rzz),
    StandardGate("rxx", 1, 2, _rxx),
    _fixed("rccx", 3, _RCCX),
    _fixed("rc3x", 4, _RC3X),
)
_BY_NAME = {gate.name: gate for gate in _GATES}
_OLD_RZ = _single("rz", Kind.P, parameters=1)
GPHASE = StandardGate("gphase", 1, 0, lambda angle: (Piece(Kind.GPHASE, (), (), (angle,)),))
"""The statement `gphase(a)` of OpenQASM 3, which takes modifiers as a gate does."""

PUBLISHED = {"stdgates.inc": STDGATES, "qelib1.inc": QELIB1}
"""The standard include files and the gates in them, which a file must not define a second time."""
BUILT_IN = ("U", "CX")
"""Gates that need no include. (CX is built into OpenQASM 2 and part of stdgates.inc in 3.)"""


def standard_gate(name: str, version: VersionNumber) -> StandardGate:
    """The gate of that name as the version reads it; KeyError for others."""
    return _OLD_RZ if version == 2 and name == "rz" else _BY_NAME[name]


def all_gates(version: VersionNumber) -> tuple[StandardGate, ...]:
    """Everything known here: either include brings them all, unpublished ones free to be defined again."""
    return tuple(standard_gate(name, version) for name in _BY_NAME)
