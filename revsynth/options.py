"""The options of `build`, in the same words on the command line and in Python."""

from __future__ import annotations

import math
from dataclasses import dataclass
from numbers import Integral
from typing import Literal, get_args

from revsynth.errors import UsageError

Oracle = Literal["phase", "bit", "fresh", "compute", "inplace", "embedded"]
GateSet = Literal["clifford+t", "toffoli", "cascade"]
Uncompute = Literal["unitary", "measured"]
Aim = Literal["t", "qubits", "depth", "gates"]
MethodName = Literal["auto", "transform", "decompose", "products", "network", "optimal"]
Effort = Literal["normal", "low", "high"]
Format = Literal["openqasm3", "openqasm2", "plain"]
Controls = Literal["mixed", "positive"]

CHOICES: dict[str, tuple[str, ...]] = {
    "oracle": get_args(Oracle),
    "gates": get_args(GateSet),
    "uncompute": get_args(Uncompute),
    "aim": get_args(Aim),
    "method": get_args(MethodName),
    "effort": get_args(Effort),
    "format": get_args(Format),
    "controls": get_args(Controls),
}
"""Every option with a fixed set of values, the default first where there is one."""


@dataclass(frozen=True)
class BuildOptions:
    """How to build. `oracle` None takes the spec's natural form: phase, bit or inplace."""

    oracle: Oracle | None = None
    gates: GateSet = "clifford+t"
    uncompute: Uncompute = "unitary"
    qubits: int | None = None
    t: int | None = None
    depth: int | None = None
    aim: Aim = "t"
    method: MethodName = "auto"
    effort: Effort = "normal"
    format: Format = "openqasm3"
    controls: Controls = "mixed"
    seed: int = 0
    time_limit: float | None = None
    unverified: bool = False
    outputs_any_order: bool = False

    def __post_init__(self) -> None:
        for name, allowed in CHOICES.items():
            value = getattr(self, name)
            if value not in allowed and not (name == "oracle" and value is None):
                raise UsageError(f"{name} {value!r} is not one of {', '.join(allowed)}")
        for name in ("qubits", "t", "depth"):
            value = getattr(self, name)
            if value is not None and not _is_count(value):
                raise UsageError(f"{name} {value!r}: a budget is a whole number from 0 on")
        if not _is_count(self.seed):
            raise UsageError(f"seed {self.seed!r}: a seed is a whole number from 0 on")
        for name in ("qubits", "t", "depth", "seed"):
            value = getattr(self, name)
            object.__setattr__(self, name, None if value is None else int(value))
        if self.time_limit is not None and not _is_duration(self.time_limit):
            raise UsageError(f"time limit {self.time_limit!r}: a number of seconds above 0 is wanted")
        if self.format != "openqasm3":
            if self.gates == "cascade":
                raise UsageError(
                    "gates 'cascade' needs format 'openqasm3': OpenQASM 2 has no control modifiers"
                )
            if self.uncompute == "measured":
                raise UsageError("uncompute 'measured' needs format 'openqasm3'")
        if self.format == "plain" and self.gates != "clifford+t":
            raise UsageError("format 'plain' holds Clifford+T gates only: use gates 'clifford+t'")


def _is_count(value: object) -> bool:
    return isinstance(value, Integral) and not isinstance(value, bool) and int(value) >= 0


def _is_duration(value: object) -> bool:
    return isinstance(value, (int, float)) and not isinstance(value, bool) and 0 < value < math.inf
