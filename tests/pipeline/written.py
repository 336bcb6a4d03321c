"""What a written file does, seen without the project's reader and verification.

A reader of the lines that `build` writes (nothing else), counts by obvious code, and the demands of each
form on a state of random weights over all inputs: a linear map that sends one such state right, up to a
constant for the record of outcomes, is right for every input (with probability one).
"""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from revsynth.circuit.model import Circuit, CircuitBuilder, Guard, Kind
from tests.pipeline.random_specs import Case
from tests.slow_simulator import run_circuit

GATES = {
    "x": (Kind.X, 0), "z": (Kind.Z, 0), "h": (Kind.H, 0), "s": (Kind.S, 0), "sdg": (Kind.SDG, 0),
    "t": (Kind.T, 0), "tdg": (Kind.TDG, 0), "cx": (Kind.X, 1), "cz": (Kind.Z, 1), "ccx": (Kind.X, 2),
}  # fmt: skip
_HEAD = re.compile(r'OPENQASM [23]\.0;|include "(stdgates|qelib1)\.inc";')
_QUBITS = re.compile(r"qubit\[(\d+)\] (\w+);|qreg (\w+)\[(\d+)\];")
_BITS = re.compile(r"bit\[(\d+)\] (\w+);")
_IF = re.compile(r"if \((\w+)\[(\d+)\]\) \{ (.*) \}")
_MEASURE = re.compile(r"(\w+)\[(\d+)\] = measure (\w+)\[(\d+)\];")
_GATE = re.compile(r"((?:(?:neg)?ctrl(?:\(\d+\))? @ )*)(\w+) (\w+\[\d+\](?:, ?\w+\[\d+\])*);")
_PHASE = re.compile(r"gphase\(pi\);")


@dataclass
class Written:
    """A file as it stands: registers by name, the circuit, and counts by the contract's names."""

    circuit: Circuit
    registers: dict[str, list[int]]
    comments: list[str]
    counts: Counter[str] = field(default_factory=Counter)


def read_lines(text: str) -> Written:
    """Read what `build` writes; any other line is an error."""
    builder, places, bits = CircuitBuilder(), {}, {}
    found = Written(builder.build(), {}, [])
    chains = {kind: _Chain(names) for kind, names in _CHAINS.items()}
    for line in text.splitlines():
        if line.startswith("//"):
            assert line.startswith("// ")
            assert line.isprintable()
            found.comments.append(line[3:])
            continue
        if _HEAD.fullmatch(line):
            continue
        if match := _QUBITS.fullmatch(line):
            name, size = match[2] or match[3], int(match[1] or match[4])
            found.registers[name] = list(builder.add_register(name, size).members)
            places |= {f"{name}[{i}]": q for i, q in enumerate(found.registers[name])}
            continue
        if match := _BITS.fullmatch(line):
            bits |= {
                f"{match[2]}[{i}]": b for i, b in enumerate(builder.add_bits(match[2], int(match[1])).members)
            }
            continue
        condition, waits = (), []
        if match := _IF.fullmatch(line):
            bit = bits[f"{match[1]}[{match[2]}]"]
            condition, waits, line = (Guard((2 * bit,)),), [-1 - bit], match[3]
        found.counts["gates"] += 1
        if _PHASE.fullmatch(line):
            builder.add(Kind.GPHASE, (), angles=(np.pi,))
            continue
        if match := _MEASURE.fullmatch(line):
            bit, qubit = bits[f"{match[1]}[{match[2]}]"], places[f"{match[3]}[{match[4]}]"]
            builder.measure(qubit, bit)
            found.counts["measured"] += 1
            name, touched, waits = "measure", [qubit], [-1 - bit]
        else:
            match = _GATE.fullmatch(line)
            assert match, line
            modifiers, name = match[1], match[2]
            touched = [places[operand] for operand in re.findall(r"\w+\[\d+\]", match[3])]
            signs: list[int] = []
            for negative, count in re.findall(r"(neg)?ctrl(?:\((\d+)\))? @ ", modifiers):
                signs += [int(bool(negative))] * int(count or 1)
            kind, own = GATES[name]
            signs += [0] * own
            assert len(touched) == len(signs) + 1 == len(set(touched)), line
            controls = tuple(2 * q + sign for q, sign in zip(touched, signs, strict=False))
            builder.add(kind, touched[-1:], controls, condition=condition)
            _count(found.counts, kind, len(controls))
            name = {0: "", 1: "", 2: "toffoli"}.get(len(controls), "other") if controls else name
        for chain in chains.values():
            chain.add(name, touched, waits)
    found.circuit = builder.build()
    found.counts["qubits"] = builder.qubits
    found.counts["work"] = len(found.registers.get("work", ()))
    for kind, chain in chains.items():
        found.counts[kind] = max(chain.length.values(), default=0)
    return found


_CHAINS: dict[str, tuple[str, ...]] = {"depth": (), "t_depth": ("t", "tdg"), "toffoli_depth": ("toffoli",)}


class _Chain:
    """The longest chain of operations of some names (none: all) so far, by qubit; bits are -1, -2, ..."""

    def __init__(self, names: tuple[str, ...]) -> None:
        self.names = names
        self.length: dict[int, int] = {}

    def add(self, name: str, touched: list[int], waits: list[int]) -> None:
        """An operation on `touched` that waits for the bits of `waits`, or sets them where it measures."""
        length = max(self.length.get(place, 0) for place in (*touched, *waits))
        length += not self.names or name in self.names
        for place in (*touched, *(waits if name == "measure" else ())):
            self.length[place] = length


def _count(counts: Counter[str], kind: Kind, controls: int) -> None:
    if kind in (Kind.T, Kind.TDG):
        counts["t"] += 1
    if controls == 1:
        counts["cx" if kind is Kind.X else "cz"] += 1
    if controls == 2:
        counts["toffoli"] += 1
    if controls > 2:
        counts["other"] += 1


def _spread(value: int, qubits: list[int]) -> int:
    return sum(((value >> i) & 1) << q for i, q in enumerate(qubits))


class WrongError(AssertionError):
    """The file does not do what the spec says."""


@dataclass(frozen=True)
class Demand:
    """Input x started in `start` must end in `end` but for the bits of `free`, times `sign` (0: either)."""

    x: int
    start: int
    end: int
    free: int = 0
    sign: int = 1


def demands(case: Case, oracle: str, written: Written, described: dict[str, Any]) -> list[Demand]:
    """All of them, those that leave no freedom first; what is unconstrained has none."""
    registers = described.get("qubits", written.registers)
    if oracle == "embedded":
        found = list(_embedded(case, registers["line"], described["placement"]))
    else:
        names = described["registers"]
        inputs = [q for word in case.inputs for name, _ in word.registers() for q in registers[names[name]]]
        outputs: list[int] = []
        if oracle in ("bit", "fresh", "compute"):
            for name, width in case.outputs:
                register = registers["mark" if case.kind == "predicate" else names[name]]
                if len(register) != width:
                    raise WrongError(f"{name} has {len(register)} bits, {width} wanted")
                outputs += register
        found = list(_by_words(case, oracle, inputs, outputs, registers.get("keep", [])))
    return sorted(found, key=lambda demand: (demand.sign == 0, demand.free != 0))


def _known(row: tuple[int | None, ...], qubits: list[int]) -> tuple[int, int]:
    """The bits wanted, and those that are free, as states."""
    known = sum(1 << q for bit, q in zip(row, qubits, strict=True) if bit)
    return known, sum(1 << q for bit, q in zip(row, qubits, strict=True) if bit is None)


def _by_words(
    case: Case, oracle: str, inputs: list[int], outputs: list[int], keep: list[int]
) -> Iterator[Demand]:
    for x, row in enumerate(case.wanted):
        start = _spread(x, inputs)
        if oracle == "phase":
            yield Demand(x, start, start, sign=0 if row[0] is None else (-1) ** row[0])
        elif oracle != "inplace":
            value, free = _known(row, outputs)
            for y in range(1 << len(outputs) if oracle == "bit" else 1):
                begun = start | _spread(y, outputs)
                yield Demand(x, begun, (begun ^ value) & ~free, free | _spread(-1, keep))
        elif any(bit is not None for bit in row):
            yield Demand(x, start, *_known(row, inputs))


def _embedded(case: Case, line: list[int], placement: dict[str, Any]) -> Iterator[Demand]:
    before = [i for word in case.inputs for name, _ in word.registers() for i in placement["before"][name]]
    after = [
        i
        for name, _ in case.outputs
        for i in placement["after"]["mark" if case.kind == "predicate" else name]
    ]
    preset = {int(place): value for place, value in placement["preset"].items()}
    for side in ([*before, *preset], [*after, *placement["leftover"]]):
        if sorted(side) != list(range(len(line))):
            raise WrongError(f"not each line once: {placement}")
    garbage = sum(1 << line[i] for i in placement["leftover"])
    for x, row in enumerate(case.wanted):
        if any(bit is not None for bit in row):
            start = _spread(x, [line[i] for i in before])
            start |= sum(value << line[i] for i, value in preset.items())
            end, free = _known(row, [line[i] for i in after])
            yield Demand(x, start, end, free | garbage)


def check(demanded: list[Demand], circuit: Circuit, seed: int, *, exact: bool = True) -> None:
    """Raise WrongError where the circuit does anything else.

    `exact`: no constant phase either, where nothing is measured.
    """
    if not demanded:
        return
    rng = np.random.default_rng(seed)
    weights = rng.uniform(0.5, 1.5, len(demanded)) * np.exp(2j * np.pi * rng.random(len(demanded)))
    vector = np.zeros(1 << circuit.qubits, dtype=complex)
    vector[[demand.start for demand in demanded]] = weights
    seen: dict[tuple[int, str], int] = {}
    for _, state in run_circuit(circuit, vector):
        support = np.flatnonzero(np.abs(state) > 1e-9)
        size = float(np.linalg.norm(state) / np.linalg.norm(weights))
        scale: complex | None = None
        for demand, weight in zip(demanded, weights, strict=True):
            ends = support[(support & ~demand.free) == demand.end]
            ends = ends[np.abs(np.abs(state[ends] / weight) - size) < 1e-9]
            if len(ends) != 1:
                raise WrongError(f"{demand}: {len(ends)} fitting ends")
            ratio = state[ends[0]] / weight * (demand.sign or 1)
            scale = ratio if scale is None else scale
            sign = demand.sign or (1 if abs(ratio - scale) < 1e-9 else -1)
            if abs(ratio - scale * (1 if demand.sign else sign)) > 1e-9:
                raise WrongError(f"{demand}: phase {ratio / scale}")
            chosen = {"sign": sign, "free": int(ends[0] ^ demand.start) & demand.free}
            for name, value in chosen.items():
                if seen.setdefault((demand.x, name), value) != value:
                    raise WrongError(f"{demand}: what is free depends on more than the input")
        if exact and not circuit.bits and scale is not None and abs(scale - 1) > 1e-9:
            raise WrongError(f"phase {scale} for all inputs")
