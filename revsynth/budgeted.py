"""Lowering the blocks that the methods gave, within the budgets for qubits, T gates and depth."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from revsynth.choice import Candidate, Trial, cheapest, estimate, hopeless, planned_t, within
from revsynth.errors import BudgetError
from revsynth.lowering import lower
from revsynth.options import Aim, BuildOptions, Oracle
from revsynth.qasm import prepare
from revsynth.synthesis.interface import Block

LARGE = 20_000
"""Cascades of more gates are compared by their estimated price, and only the cheapest is lowered."""
NARROWED = 2_000
"""Up to this many gates, a circuit that keeps its other budgets is made narrower qubit by qubit."""

Registers = Sequence[tuple[str, int]]


def lower_the_cheapest(
    blocks: Sequence[Block],
    registers_for: Callable[[Block], Registers],
    oracle: Oracle,
    options: BuildOptions,
    progress: Callable[[str], None],
) -> tuple[Candidate, list[Trial]]:
    """The best candidate for the aim, and what each block gave.

    Small blocks are all lowered, of large ones the cheapest by estimate. Raises BudgetError with what was
    needed where nothing fits.
    """
    candidates: list[Candidate] = []
    tried: list[Trial] = []
    misses: list[str] = []
    planned = [(block, planned_t(block, oracle, options)) for block in blocks]
    for block, t in sorted(planned, key=lambda entry: estimate(entry[0], entry[1], options)):
        if candidates and (len(block.cascade) > LARGE or hopeless(t, candidates, options)):
            tried.append(Trial(block.method, t=t, estimated=True))
            continue
        progress(f"{block.method}: lowering {len(block.cascade)} gates")
        try:
            candidates.append(lower_within(block, t, registers_for(block), oracle, options))
            tried.append(Trial.of(candidates[-1]))
        except BudgetError as error:
            misses.append(f"{block.method}: {error}")
            tried.append(Trial(block.method, failed=str(error)))
    if not candidates:
        raise BudgetError("nothing fits the budget: " + "; ".join(dict.fromkeys(misses)))
    return cheapest(candidates, options), tried


def lower_within(
    block: Block, planned: int, registers: Registers, oracle: Oracle, options: BuildOptions
) -> Candidate:
    """The block lowered for the aim; where that misses a budget for T or depth, for that budget instead.

    Raises BudgetError saying what the block needs at least, as far as was found.
    """

    def attempt(aim: Aim, qubits: int | None) -> Candidate:
        circuit = lower(
            block,
            registers,
            oracle=oracle,
            gates=options.gates,
            uncompute=options.uncompute,
            max_qubits=qubits,
            aim=aim,
        )
        return Candidate.of(block, prepare(circuit, options.format), planned)

    found = attempt(options.aim, options.qubits)
    miss = within(found, options)
    if miss is None:
        return found
    budgeted: tuple[tuple[Aim, int | None], ...] = (("t", options.t), ("depth", options.depth))
    for aim, budget in budgeted:
        if budget is None or aim == options.aim:
            continue
        found = attempt(aim, options.qubits)
        miss = within(found, options)
        if miss is None:
            return _narrowed(found, aim, attempt, options) if options.aim == "qubits" else found
    raise BudgetError(miss or "")


def _narrowed(
    found: Candidate, aim: Aim, attempt: Callable[[Aim, int | None], Candidate], options: BuildOptions
) -> Candidate:
    """The same budgets on as few qubits as still keep them."""
    if len(found.block.cascade) > NARROWED:
        return found
    while True:
        try:
            narrower = attempt(aim, found.cost.qubits - 1)
        except BudgetError:
            return found
        if within(narrower, options) is not None:
            return found
        found = narrower
