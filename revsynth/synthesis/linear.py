"""The method `linear`: affine functions and wire permutations, by NOT, CNOT and SWAP (three CNOTs) only.

It is tried first, because nothing beats a circuit without any T gate. Free values count: the function is
affine where some choice of them makes it so.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from revsynth.cascade.model import PHASE, Cascade, Gate
from revsynth.embed.in_place import fewest_lines
from revsynth.embed.target import MAX_LINES
from revsynth.synthesis.affine import CaredHull, Echelon, Form, affine_outputs
from revsynth.synthesis.cnot import addition_tree, cnot_circuit, place_nots
from revsynth.synthesis.interface import Block, Placement, Progress, Task, silent

NAME = "linear"


@dataclass(frozen=True)
class _Rows:
    """Independent affine forms of the outputs over `lines` lines; bit `lines` of a form is the constant."""

    lines: int
    forms: tuple[Form, ...]


class Linear:
    """Affine functions (see the module)."""

    name = NAME

    def unfit(self, task: Task) -> str | None:
        """A reason, in words, where the function is not affine or not reversible as asked."""
        found = self._solve(task)
        return found if isinstance(found, str) else None

    def synthesise(self, task: Task, progress: Progress = silent) -> list[Block]:
        """One block. Raises ValueError where `unfit` has a reason."""
        found = self._solve(task)
        if isinstance(found, str):
            raise ValueError(found)
        return [found]

    def _solve(self, task: Task) -> Block | str:
        found = affine_outputs(task.function)
        if isinstance(found, int):
            return f"output bit {found} is not an affine function of the inputs"
        forms, hulls = found
        if task.oracle == "phase":
            return _phase(task, forms)
        if task.oracle in ("bit", "fresh", "compute"):
            return _added(task, forms)
        if task.oracle == "inplace":
            return _in_place(task, forms, hulls)
        return _embedded(task, forms, hulls)


LINEAR = Linear()


def _phase(task: Task, forms: list[Form]) -> Block | str:
    """A Z on each variable of the form; the constant is a phase gate without literals."""
    inputs = task.function.inputs
    if len(forms) != 1:
        return f"a phase oracle has one output bit, not {len(forms)}"
    gates = [Gate(PHASE, (2 * bit,)) for bit in range(inputs) if (forms[0] >> bit) & 1]
    if (forms[0] >> inputs) & 1:
        gates.append(Gate(PHASE))
    return Block(Cascade.from_gates(inputs, gates), NAME, inputs)


def _added(task: Task, forms: list[Form]) -> Block:
    """CNOTs from the inputs, or from outputs that are finished, to the outputs."""
    inputs, outputs = task.function.inputs, task.function.outputs
    plan = addition_tree(forms, fresh=task.oracle != "bit")
    gates: list[Gate] = []
    if task.oracle == "bit":
        gates += [_cnot(inputs + parent, inputs + output) for output, parent, _ in reversed(plan)
                  if parent is not None]  # fmt: skip
    for output, parent, rest in plan:
        if parent is not None:
            gates.append(_cnot(inputs + parent, inputs + output))
        gates += [_cnot(bit, inputs + output) for bit in range(inputs) if (rest >> bit) & 1]
        if (rest >> inputs) & 1:
            gates.append(Gate(inputs + output))
    return Block(Cascade.from_gates(inputs + outputs, gates), NAME, inputs, outputs)


def _in_place(task: Task, forms: list[Form], hulls: list[CaredHull]) -> Block | str:
    inputs, outputs = task.function.inputs, task.function.outputs
    if inputs != outputs:
        return f"{inputs} input bits but {outputs} output bits: not reversible in place"
    rows = _independent(inputs, inputs, forms, hulls)
    if rows is None:
        return "no affine choice of the free values is one-to-one"
    return Block(_circuit(rows.lines, rows.forms), NAME, inputs)


def _embedded(task: Task, forms: list[Form], hulls: list[CaredHull]) -> Block | str:
    """Inputs on the first lines; each output on a line that its form reads; the other lines untouched."""
    function = task.function
    lines = _fewest_affine_lines(task, forms, hulls)
    if lines is None:
        return "the affine form needs more lines than the fewest possible"
    rows = _independent(function.inputs, lines, forms, hulls)
    if rows is None:
        return "no affine choice of the free values fits on the fewest lines"
    after = _pivot_lines(rows)
    whole: list[Form] = [1 << line for line in range(lines)]
    for form, line in zip(rows.forms, after, strict=True):
        whole[line] = form
    placement = Placement(
        before=tuple(range(function.inputs)),
        preset=tuple((line, 0) for line in range(function.inputs, lines)),
        after=after,
    )
    return Block(_circuit(lines, whole), NAME, lines, placement=placement)


def _fewest_affine_lines(task: Task, forms: list[Form], hulls: list[CaredHull]) -> int | None:
    """The fewest lines of any embedding, where an affine one fits on them.

    Where every input is cared for they are inputs + outputs - rank, known without a table.
    """
    function = task.function
    if all(not hull.vanishing for hull in hulls):
        rank = Echelon()
        for form in forms:
            rank.add(form & ((1 << function.inputs) - 1))
        return function.inputs + function.outputs - len(rank)
    if max(function.inputs, function.outputs) > MAX_LINES + 4:
        return None
    return fewest_lines(function)


def _independent(inputs: int, lines: int, forms: list[Form], hulls: list[CaredHull]) -> _Rows | None:
    """Forms over `lines` lines that equal the given ones where it matters, their linear parts independent.

    What may be added to a form freely: forms that vanish on its cared inputs, and lines that start in 0.
    Outputs with the least freedom choose first.
    """
    presets = [1 << line for line in range(inputs, lines)]
    linear = (1 << lines) - 1
    span = Echelon()
    chosen: dict[int, Form] = {}
    for output in sorted(range(len(forms)), key=lambda one: (len(hulls[one].vanishing), one)):
        free = [_widened(form, inputs, lines) for form in hulls[output].vanishing]
        form = _widened(forms[output], inputs, lines)
        for candidate in _candidates(form, free + presets, output, lines):
            if span.add(candidate & linear):
                chosen[output] = candidate
                break
        else:
            return None
    return _Rows(lines, tuple(chosen[output] for output in range(len(forms))))


def _widened(form: Form, inputs: int, lines: int) -> Form:
    return (form & ((1 << inputs) - 1)) | ((form >> inputs) << lines)


def _candidates(form: Form, free: list[Form], output: int, lines: int) -> list[Form]:
    """Forms equal to `form` where it matters: first the line of the same number alone, if it is one.

    With one free form at a time every independent choice is met: if the form and all these sums lie in a
    subspace, so does every sum.
    """
    stay = Echelon()
    for other in free:
        stay.add(other)
    first = []
    if output < lines and not stay.reduce(form ^ (1 << output))[0]:
        first.append(1 << output)
    sums = sorted((form ^ other for other in free), key=lambda one: (one.bit_count(), one))
    return [*first, form, *sums]


def _pivot_lines(rows: _Rows) -> tuple[int, ...]:
    """A line for each form such that those forms, and the other lines themselves, are independent."""
    order = sorted(range(len(rows.forms)), key=lambda one: (rows.forms[one].bit_count(), one))
    reduced: list[tuple[int, int]] = []
    place: dict[int, int] = {}
    for output in order:
        rest = rows.forms[output] & ((1 << rows.lines) - 1)
        for pivot, row in reduced:
            if rest & pivot:
                rest ^= row
        wanted = rest & rows.forms[output] or rest
        pivot = wanted & -wanted
        reduced = [(p, row ^ rest if row & pivot else row) for p, row in reduced]
        reduced.append((pivot, rest))
        place[output] = pivot.bit_length() - 1
    return tuple(place[output] for output in range(len(rows.forms)))


def _circuit(lines: int, forms: Sequence[Form]) -> Cascade:
    """CNOTs for the linear part, NOTs for the constants where they are fewest."""
    steps = cnot_circuit([form & ((1 << lines) - 1) for form in forms])
    constant = sum(((form >> lines) & 1) << line for line, form in enumerate(forms))
    position, mask = place_nots(steps, constant)
    gates = [_cnot(control, target) for control, target in steps]
    gates[position:position] = [Gate(line) for line in range(lines) if (mask >> line) & 1]
    return Cascade.from_gates(lines, gates)


def _cnot(control: int, target: int) -> Gate:
    return Gate(target, (2 * control,))
