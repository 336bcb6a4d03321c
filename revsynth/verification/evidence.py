"""What verification found: a verdict, how far it reaches, and a counterexample where there is one."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any, Literal

from revsynth.options import Oracle

Level = Literal["exhaustive", "proved", "sampled", "none"]
FaultKind = Literal["output", "input", "scratch", "phase", "undefined"]


LARGEST_NUMBER = 1 << 53
"""Integers from here on are decimal strings in JSON."""


@dataclass(frozen=True)
class Evidence:
    """How a verdict was reached. The level is that of the weakest link; `sampled` is not a proof."""

    level: Level
    inputs_checked: int
    links: tuple[str, ...] = ()
    detail: str = ""

    def to_json(self) -> dict[str, Any]:
        """The JSON object of the contract."""
        return {
            "level": self.level,
            "inputs_checked": self.inputs_checked,
            "links": list(self.links),
            "detail": self.detail,
        }


@dataclass(frozen=True)
class Counterexample:
    """One input at which the circuit does not do what the spec says; words as (lists of) integers.

    bits: the same input by the names that the spec's file gives to single bits, where it does.
    """

    inputs: dict[str, Any] | list[int]
    kind: FaultKind
    expected: dict[str, Any]
    got: dict[str, Any]
    why: str
    bits: dict[str, int] = field(default_factory=dict)

    def to_json(self) -> dict[str, Any]:
        """The JSON object of the contract."""
        found = {
            "inputs": _as_json(self.inputs),
            "kind": self.kind,
            "expected": _as_json(self.expected),
            "got": _as_json(self.got),
            "why": self.why,
        }
        return found | ({"bits": dict(self.bits)} if self.bits else {})


@dataclass(frozen=True)
class Verdict:
    """`holds` is None where verification could not finish; `global_phase` in radians; `oracle`: the form."""

    holds: bool | None
    evidence: Evidence
    global_phase: float = 0.0
    counterexample: Counterexample | None = None
    oracle: Oracle | None = None

    def to_json(self) -> dict[str, Any]:
        """The JSON object of the contract."""
        return {
            "holds": self.holds,
            "oracle": self.oracle,
            "evidence": self.evidence.to_json(),
            "global_phase": self.global_phase,
            "counterexample": None if self.counterexample is None else self.counterexample.to_json(),
        }


def _as_json(value: Any) -> Any:
    """Words as JSON takes them without loss: integers of more than 53 bits as decimal strings."""
    if isinstance(value, dict):
        return {name: _as_json(part) for name, part in value.items()}
    if isinstance(value, list):
        return [_as_json(part) for part in value]
    if isinstance(value, int) and abs(value) >= LARGEST_NUMBER:
        return str(value)
    return value
