"""The whole way from a spec to a verified circuit, as one story.

spec -> function -> blocks (embedded and synthesised) -> reduced cascades -> circuits -> the cheapest
-> OpenQASM text -> read back -> verified. Nothing here computes; each step lives in its own room.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

from revsynth.budgeted import lower_the_cheapest
from revsynth.choice import Trial, and_count
from revsynth.circuit.model import Circuit
from revsynth.errors import UndecidedError, UsageError
from revsynth.gather import Gathering
from revsynth.header import header_lines
from revsynth.options import BuildOptions, Oracle
from revsynth.placement import describe_placement, placement_comments
from revsynth.qasm import Program, read, with_header, write
from revsynth.qasm.names import register_names
from revsynth.spec.model import Spec
from revsynth.spec.understand import Understanding, understand
from revsynth.structure import structure_of
from revsynth.synthesis.interface import Block, Task
from revsynth.verification import verify_program
from revsynth.verification.evidence import Evidence, Verdict

Progress = Callable[[str], None]


@dataclass(frozen=True)
class Built:
    """What a build gave, before any file is written. `text` is in `options.format`."""

    spec: Spec
    understanding: Understanding
    options: BuildOptions
    oracle: Oracle
    block: Block
    circuit: Circuit
    text: str
    registers: dict[str, str]
    cost: dict[str, int | None]
    evidence: Evidence
    tried: tuple[Trial, ...]
    stopped_early: bool
    seconds: dict[str, float]


def build(spec: Spec, options: BuildOptions, progress: Progress) -> Built:
    """Build the circuit that `options` ask for and verify its text.

    Raises UsageError for options that do not go with the spec, BudgetError where nothing fits, and
    UndecidedError where verification could not finish (unless `options.unverified`).
    """
    clock = _Clock()
    progress("reading the spec")
    understanding = understand(spec)
    oracle = options.oracle or natural_oracle(spec)
    check_oracle(spec, oracle)
    if options.outputs_any_order and oracle != "inplace":
        raise UsageError(f"{spec.source}: --outputs-any-order is for oracle 'inplace', not '{oracle}'")
    _check_widths(understanding, oracle)
    understanding, network, program = structure_of(understanding, options)
    clock.lap("read")

    task = Task(
        understanding.tabulated,
        oracle,
        controls=options.controls,
        uncompute=options.uncompute,
        aim=options.aim,
        effort=options.effort,
        seed=options.seed,
        lines=options.qubits,
        network=network,
        program=program,
        any_order=options.outputs_any_order,
    )
    layout = register_layout(understanding, oracle, options)
    gathering = Gathering(task, options, progress)
    gathering.run()
    clock.lap("synthesise")
    best, lowered = lower_the_cheapest(
        gathering.blocks, lambda block: _registers_for(block, layout), oracle, options, progress
    )
    clock.lap("lower")

    progress("verifying")
    circuit = best.circuit
    bare = write(circuit, format=options.format, header=())
    verdict = _verify_text(understanding, oracle, best.block, circuit, bare, options, progress)
    evidence = _accept(verdict, options)
    clock.lap("verify")
    cost = best.cost.to_json(ands=and_count(best.block, oracle), cascade=len(best.block.cascade))
    header = header_lines(
        spec,
        oracle,
        options,
        method=best.block.method,
        renamed=layout.names,
        placement=placement_comments(best.block, understanding),
        cost=cost,
        evidence=evidence,
        stopped_early=gathering.stopped_early,
    )
    text = with_header(bare, header, format=options.format)
    _check_opening(text.removesuffix(bare), text, bare)
    clock.lap("write")
    return Built(
        spec, understanding, options, oracle, best.block, circuit, text, dict(layout.names), cost, evidence,
        (*gathering.trials, *lowered), gathering.stopped_early, clock.seconds(),
    )  # fmt: skip


def natural_oracle(spec: Spec) -> Oracle:
    """The oracle form a spec gets when none is asked for."""
    forms: dict[str, Oracle] = {"predicate": "phase", "outputs": "bit", "permutation": "inplace"}
    return forms[spec.kind]


def check_oracle(spec: Spec, oracle: Oracle) -> None:
    """Raise UsageError where the form does not go with the kind of spec, saying which forms do."""
    allowed: dict[str, tuple[Oracle, ...]] = {
        "predicate": ("phase", "bit", "fresh", "compute", "embedded"),
        "outputs": ("bit", "fresh", "compute", "inplace", "embedded"),
        "permutation": ("inplace",),
    }
    if oracle not in allowed[spec.kind]:
        article = "" if spec.kind == "outputs" else "a "
        raise UsageError(
            f"{spec.source}: oracle '{oracle}' does not go with {article}{spec.kind}: "
            f"use {', '.join(allowed[spec.kind])}"
        )


def _check_widths(understanding: Understanding, oracle: Oracle) -> None:
    inputs, outputs = understanding.input_bits, understanding.output_bits
    if oracle == "inplace" and inputs != outputs:
        raise UsageError(
            f"{understanding.spec.source}: oracle 'inplace' needs as many output bits as input bits, "
            f"not {outputs} and {inputs}: use bit, fresh, compute or embedded"
        )


@dataclass(frozen=True)
class Layout:
    """The registers of a file in order, without `work`, and which spec word each is for."""

    registers: tuple[tuple[str, int], ...]
    names: tuple[tuple[str, str], ...]


def register_layout(understanding: Understanding, oracle: Oracle, options: BuildOptions) -> Layout:
    """Registers for the input words, then the output words or `mark`; `embedded` has `line` alone.

    The width of `line` and of `keep` depends on the block and is filled in when it is known (size -1).
    """
    version: Literal[2, 3] = 3 if options.format == "openqasm3" else 2
    inputs = [element for word in understanding.spec.inputs for element in word.elements()]
    outputs: list[tuple[str, int]] = []
    if oracle in ("bit", "fresh", "compute") and understanding.spec.kind == "outputs":
        outputs = [element for word in understanding.outputs for element in word.elements()]
    names = register_names(
        [name for name, _ in (*inputs, *outputs)], version=version, source=understanding.spec.source
    )
    if oracle == "embedded":
        return Layout((("line", -1),), ())
    registers = [(names[name], bits) for name, bits in (*inputs, *outputs)]
    if oracle in ("bit", "fresh", "compute") and understanding.spec.kind == "predicate":
        registers.append(("mark", 1))
    return Layout(tuple(registers), tuple(names.items()))


def _registers_for(block: Block, layout: Layout) -> list[tuple[str, int]]:
    if layout.registers[0][0] == "line":
        return [("line", block.inputs)]
    registers = list(layout.registers)
    if block.keep:
        registers.append(("keep", block.keep))
    return registers


def _verify_text(
    understanding: Understanding,
    oracle: Oracle,
    block: Block,
    circuit: Circuit,
    bare: str,
    options: BuildOptions,
    progress: Progress,
) -> Verdict:
    """Verify what a reader of the file would see. `plain` loses the registers: they are put back first."""
    spec = understanding.spec
    program = read(bare, source=spec.source)
    if not same_gates(program.circuit, circuit):
        raise AssertionError("the text written does not read back as the circuit")
    named = Program(circuit=circuit, version=program.version, comments=program.comments)
    return verify_program(
        spec,
        named,
        oracle=oracle,
        exact_phase=True,
        placement=describe_placement(block, understanding),
        progress=progress,
    )


def _check_opening(opening: str, text: str, bare: str) -> None:
    """What stands before the text that was read back and verified must be comment lines and nothing else."""
    lines = opening.replace("\r", "\n").split("\n")
    if opening + bare != text or lines.pop() or not all(line.startswith("//") for line in lines):
        raise AssertionError("the text written is not the circuit that was verified")


def _accept(verdict: Verdict, options: BuildOptions) -> Evidence:
    if verdict.holds is False:
        found = verdict.counterexample
        raise AssertionError(
            "a defect of revsynth: the circuit built is wrong, so nothing was written "
            f"({found.why if found else 'no input at hand'})"
        )
    if verdict.holds is None and not options.unverified:
        raise UndecidedError(
            f"verification could not finish: {verdict.evidence.detail}; nothing was written "
            "(--unverified writes all the same)"
        )
    return verdict.evidence


def same_gates(one: Circuit, other: Circuit) -> bool:
    """Whether two circuits hold the same operations on the same qubit numbers, whatever the registers."""
    renamed = Circuit(
        other.registers, other.bit_registers, one.kind, one.offset, one.operand, one.condition, one.bit,
        one.angles, one.conditions,
    )  # fmt: skip
    return one.qubits == other.qubits and one.bits == other.bits and renamed == other


class _Clock:
    """Wall-clock seconds by stage."""

    def __init__(self) -> None:
        self.started = time.monotonic()
        self._last = self.started
        self._laps: dict[str, float] = {}

    def lap(self, name: str) -> None:
        now = time.monotonic()
        self._laps[name] = round(now - self._last, 4)
        self._last = now

    def seconds(self) -> dict[str, float]:
        return {**self._laps, "total": round(self._last - self.started, 4)}
