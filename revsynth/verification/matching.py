"""Which qubit of a file plays which part: registers are matched to the spec's words by name."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

from revsynth.circuit.model import Circuit, Qubit
from revsynth.errors import UsageError
from revsynth.options import Oracle
from revsynth.qasm.names import register_names
from revsynth.spec.model import Word
from revsynth.spec.understand import Understanding
from revsynth.verification.line_placement import (
    Lines,
    is_line_comment,
    lines_from_comments,
    lines_from_object,
)

if TYPE_CHECKING:
    from revsynth.qasm import Program

FORMS: dict[str, tuple[Oracle, ...]] = {
    "predicate": ("phase", "bit", "fresh", "compute", "embedded"),
    "outputs": ("bit", "fresh", "compute", "inplace", "embedded"),
    "permutation": ("inplace",),
}
"""The oracle forms that go with each kind of spec."""


@dataclass(frozen=True)
class Roles:
    """What each qubit of a circuit is for; qubits in no list are scratch: they start and end in 0.

    inputs: the qubit that holds input bit i (combined index) at the start.
    outputs: the qubit that holds output bit j at the end; empty for a phase oracle.
    kept: qubits that start in 0 and may end in any basis state that depends on the input alone (`keep`).
    lent: qubits that start in any state and must end in it.
    preset: (qubit, 0 or 1) for lines of an embedded block that start so; leftover: its garbage.
    foreign: names of registers that the spec does not know and that count as scratch.
    """

    oracle: Oracle
    inputs: tuple[Qubit, ...]
    outputs: tuple[Qubit, ...] = ()
    kept: tuple[Qubit, ...] = ()
    lent: tuple[Qubit, ...] = ()
    preset: tuple[tuple[Qubit, int], ...] = ()
    leftover: tuple[Qubit, ...] = ()
    foreign: tuple[str, ...] = ()


def match(
    understanding: Understanding,
    program: Program,
    oracle: Oracle | None,
    placement: Mapping[str, Any] | None,
) -> Roles:
    """Find the roles, and the form by the registers present where `oracle` is None.

    Raises UsageError where a register is missing or too short, or the form does not go with the spec.
    """
    matcher = _Matcher(understanding, program)
    form = oracle or matcher.natural_form()
    if form not in FORMS[understanding.spec.kind]:
        article = "" if understanding.spec.kind == "outputs" else "a "
        raise matcher.error(
            f"oracle '{form}' does not go with {article}{understanding.spec.kind}: "
            f"use {', '.join(FORMS[understanding.spec.kind])}"
        )
    if form == "embedded":
        return matcher.embedded(placement)
    return matcher.by_words(form, placement)


class _Matcher:
    def __init__(self, understanding: Understanding, program: Program) -> None:
        self.understanding = understanding
        self.circuit: Circuit = program.circuit
        self.comments: Sequence[str] = program.comments
        version: Literal[2, 3] = 2 if program.version.startswith("2") else 3
        spec = understanding.spec
        self.inputs = _elements(spec.inputs)
        self.outputs = _elements(understanding.outputs) if spec.kind == "outputs" else []
        self.names = register_names(
            [name for name, _ in (*self.inputs, *self.outputs)], version=version, source=spec.source
        )

    def error(self, message: str) -> UsageError:
        return UsageError(f"{self.understanding.spec.source}: {message}")

    def natural_form(self) -> Oracle:
        """`mark` or an output register means bit, `line` embedded, else phase or inplace."""
        if self.circuit.register("line") is not None:
            return "embedded"
        kind = self.understanding.spec.kind
        if kind == "permutation":
            return "inplace"
        if kind == "predicate":
            return "bit" if self.circuit.register("mark") is not None else "phase"
        present = any(self._find(name) is not None for name, _ in self.outputs)
        fits = self.understanding.output_bits == self.understanding.input_bits
        return "bit" if present or not fits else "inplace"

    def _find(self, name: str) -> str | None:
        """The register for a word: under its written name, or under its own."""
        for candidate in (self.names[name], name):
            if self.circuit.register(candidate) is not None:
                return candidate
        return None

    def by_words(self, form: Oracle, placement: Mapping[str, Any] | None = None) -> Roles:
        """Roles where registers bear the names of words."""
        inputs = self._qubits_of(self.inputs)
        outputs: list[Qubit] = []
        taken = {self._find(name) for name, _ in self.inputs}
        if form in ("bit", "fresh", "compute"):
            if self.understanding.spec.kind == "predicate":
                outputs = self._register("mark", 1, "the predicate's output")
                taken.add("mark")
            else:
                outputs = self._qubits_of(self.outputs)
                taken |= {self._find(name) for name, _ in self.outputs}
        elif form == "inplace":
            if self.understanding.output_bits != len(inputs):
                raise self.error(
                    f"oracle 'inplace' needs as many output bits as input bits, not "
                    f"{self.understanding.output_bits} and {len(inputs)}"
                )
            outputs = self._in_order(inputs, placement)
        kept = self._members("keep") if form == "compute" else ()
        taken |= {"work", "lent"} | ({"keep"} if kept else set())
        return Roles(
            form,
            tuple(inputs),
            tuple(outputs),
            kept=kept,
            lent=self._members("lent"),
            foreign=tuple(r.name for r in self.circuit.registers if r.name not in taken and r.size),
        )

    def _in_order(self, inputs: list[Qubit], placement: Mapping[str, Any] | None) -> list[Qubit]:
        """The qubits of the outputs of an in-place block: the inputs', or as placement or comments have it.

        Lines are numbered as the input bits are. Comments that name no line leave the natural order.
        """
        after = self.outputs or self.inputs
        if placement is not None:
            lines = lines_from_object(placement, self.inputs, after, len(inputs))
        elif any(is_line_comment(comment) for comment in self.comments):
            lines = lines_from_comments(self.comments, self.inputs, after, len(inputs))
        else:
            return inputs
        if not isinstance(lines, str) and lines.before != tuple(range(len(inputs))):
            lines = "placement: the inputs of an in-place block are in their own registers"
        if isinstance(lines, str):
            raise self.error(lines)
        return [inputs[line] for line in lines.after]

    def _members(self, name: str) -> tuple[Qubit, ...]:
        register = self.circuit.register(name)
        return () if register is None else tuple(register.members)

    def _qubits_of(self, elements: Sequence[tuple[str, int]]) -> list[Qubit]:
        found: list[Qubit] = []
        for name, bits in elements:
            found.extend(self._register(self._find(name) or self.names[name], bits, f"the word {name}"))
        return found

    def _register(self, name: str, size: int, what: str) -> list[Qubit]:
        register = self.circuit.register(name)
        if register is None:
            raise self.error(
                f"the circuit has no register {name} of {_qubits(size)} for {what}; it has {self._present()}"
            )
        if register.size != size:
            raise self.error(
                f"register {name} has {_qubits(register.size)}, {what} has {size} bit{'s' * (size != 1)}; "
                f"the circuit has {self._present()}"
            )
        return list(register.members)

    def _present(self) -> str:
        present = ", ".join(f"{register.name}[{register.size}]" for register in self.circuit.registers)
        return present or "no registers"

    def embedded(self, placement: Mapping[str, Any] | None) -> Roles:
        """Roles of the register `line`, from the placement given or from the file's comment lines."""
        register = self.circuit.register("line")
        if register is None:
            raise self.error(f"an embedded block needs the register line; the circuit has {self._present()}")
        after = _elements(self.understanding.outputs) or [("mark", 1)]
        if placement is not None:
            lines = lines_from_object(placement, self.inputs, after, register.size)
        else:
            lines = lines_from_comments(self.comments, self.inputs, after, register.size)
        if isinstance(lines, str):
            raise self.error(lines)
        return self._roles_of(lines, register.start, register.size)

    def _roles_of(self, lines: Lines, start: Qubit, size: int) -> Roles:
        outputs = tuple(start + line for line in lines.after)
        return Roles(
            "embedded",
            tuple(start + line for line in lines.before),
            outputs,
            lent=self._members("lent"),
            preset=tuple((start + line, value) for line, value in lines.preset),
            leftover=tuple(q for q in range(start, start + size) if q not in outputs),
            foreign=tuple(
                r.name for r in self.circuit.registers if r.name not in ("line", "work", "lent") and r.size
            ),
        )


def _elements(words: Sequence[Word]) -> list[tuple[str, int]]:
    return [element for word in words for element in word.elements()]


def _qubits(count: int) -> str:
    return f"{count} qubit{'s' * (count != 1)}"
