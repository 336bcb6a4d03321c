"""Linear resubstitution: an AND that is a sum of earlier signals is dropped.

The values of all ANDs on many inputs are reduced by Gaussian elimination over GF(2); an AND in the span of
1, the inputs and the ANDs before it becomes an XOR. Up to `EXHAUSTIVE` inputs the values over all inputs
decide. Beyond, sampled values only propose: a solver proves each sum, its counterexamples join the samples,
and what it cannot decide within its conflicts stays an AND.
"""

from __future__ import annotations

from dataclasses import dataclass

from revsynth.logic.and_reduction.form_builder import Form, FormBuilder, fits
from revsynth.logic.and_reduction.samples import Row, Samples, all_inputs, node_rows
from revsynth.logic.network import FALSE, Literal, Network

EXHAUSTIVE = 20
"""Up to so many inputs the values over all of them are compared, where `Work` allows."""


@dataclass(frozen=True)
class Work:
    """row_bits: ANDs squared times samples, the most that elimination over all inputs may take; ands: the
    most ANDs looked at with samples; conflicts: of a solver for one proof; proofs: how many in all.
    """

    row_bits: int = 60_000_000_000
    ands: int = 1500
    conflicts: int = 500
    proofs: int = 400


def resubstitute(
    network: Network, *, care: Network | None = None, work: Work | None = None, seed: int = 0
) -> Network:
    """The network without ANDs that are sums of earlier signals wherever `care` (None: everywhere) is 1."""
    limits = work or Work()
    if network.ands < 2 or not fits(network):
        return network
    relations: dict[int, Form]
    size = network.ands + network.inputs
    if network.inputs <= EXHAUSTIVE and size * size << network.inputs <= limits.row_bits:
        relations = _over_all_inputs(network, care)
    elif network.ands <= limits.ands:
        relations = _by_samples(network, care, limits, seed)
    else:
        return network
    return _without(network, relations) if relations else network


class Elimination:
    """Rows in echelon form by their top bit, with what each is a sum of.

    A sum here names signals: bit 0 the constant, bits 1 ... the inputs, then the network's ANDs in order.
    """

    def __init__(self) -> None:
        self._basis: dict[int, tuple[Row, Form]] = {}

    def reduce(self, row: Row, form: Form) -> tuple[Row, Form]:
        """The row as far as it can be cancelled, and what it was cancelled with."""
        basis = self._basis
        while row:
            found = basis.get(row.bit_length())
            if found is None:
                break
            row ^= found[0]
            form ^= found[1]
        return row, form

    def add(self, row: Row, form: Form) -> bool:
        """Takes a row in unless it depends on those here; returns whether it was taken."""
        row, form = self.reduce(row, form)
        if row:
            self._basis[row.bit_length()] = row, form
        return bool(row)


def _dependent(network: Network, values: list[Row], mask: Row) -> dict[int, Form]:
    """ANDs (by number) that are sums of earlier signals on the samples in the mask, and the sums."""
    elimination = Elimination()
    elimination.add(mask, 1)
    for i in range(1, network.inputs + 1):
        elimination.add(values[i] & mask, 1 << i)
    found: dict[int, Form] = {}
    first = 1 + network.inputs
    number = 0
    for gate, is_xor in enumerate(network.is_xor.tolist()):
        if is_xor:
            continue
        row, form = elimination.reduce(values[first + gate] & mask, 0)
        if row:
            elimination.add(row, form ^ 1 << (first + number))
        else:
            found[number] = form
        number += 1
    return found


def _over_all_inputs(network: Network, care: Network | None) -> dict[int, Form]:
    columns, width = all_inputs(network.inputs), 1 << network.inputs
    mask = (1 << width) - 1
    if care is not None:
        mask = _output_row(care, columns, width)
    return _dependent(network, node_rows(network, columns, width), mask)


def _output_row(network: Network, columns: list[Row], width: int) -> Row:
    literal = int(network.outputs[0])
    row = node_rows(network, columns, width)[literal >> 1]
    return row ^ ((1 << width) - 1) if literal & 1 else row


def _by_samples(network: Network, care: Network | None, limits: Work, seed: int) -> dict[int, Form]:
    """Proposals from samples, proved by a solver; a counterexample starts the next round."""
    samples = Samples(network.inputs, 2 * (network.ands + network.inputs) + 512, seed)
    proved: dict[int, Form] = {}
    stuck: set[int] = set()
    prover: _Prover | None = None
    proofs = 0
    try:
        while True:
            values = node_rows(network, samples.columns, samples.width)
            mask = (1 << samples.width) - 1
            if care is not None:
                mask = _output_row(care, samples.columns, samples.width)
            proposals = _independent_of(network, values, mask, stuck)
            refuted = False
            confirmed: dict[int, Form] = {}
            for number, form in proposals.items():
                if proved.get(number) == form:
                    confirmed[number] = form
                    continue
                if proofs >= limits.proofs:
                    continue
                proofs += 1
                prover = prover or _Prover(network, care)
                answer = prover.is_sum(number, form, limits.conflicts)
                if answer:
                    confirmed[number] = proved[number] = form
                elif answer is None:
                    stuck.add(number)
                else:
                    samples.add_with_neighbours(prover.counterexample)
                    refuted = True
            if not refuted:
                return confirmed
    finally:
        if prover is not None:
            prover.close()


def _independent_of(network: Network, values: list[Row], mask: Row, stuck: set[int]) -> dict[int, Form]:
    """The proposals without those that the solver could not decide.

    Proposals are sums of ANDs outside the proposals: one that is not confirmed simply stays, and may be
    missing from no other sum.
    """
    return {number: form for number, form in _dependent(network, values, mask).items() if number not in stuck}


class _Prover:
    """A solver that holds the network, and what its last counterexample was."""

    def __init__(self, network: Network, care: Network | None) -> None:
        from revsynth.logic.equivalence import encode
        from revsynth.solver import Solver

        self.counterexample = 0
        self._solver = Solver()
        self._inputs = [self._solver.variable() for _ in range(network.inputs)]
        variables = encode(self._solver, network, self._inputs)
        first = 1 + network.inputs
        ands = [first + gate for gate, is_xor in enumerate(network.is_xor.tolist()) if not is_xor]
        self._ands = [variables[node] for node in ands]
        self._signals = [-variables[0], *self._inputs, *self._ands]
        if care is not None:
            literal = int(care.outputs[0])
            variable = encode(self._solver, care, self._inputs)[literal >> 1]
            self._solver.add([-variable if literal & 1 else variable])

    def close(self) -> None:
        """Frees the solver."""
        self._solver.close()

    def is_sum(self, number: int, form: Form, conflicts: int) -> bool | None:
        """Whether an AND is this sum of signals; None where the conflicts do not suffice."""
        total = self._ands[number]
        while form:
            low = form & -form
            out = self._solver.variable()
            self._solver.add_xor(out, total, self._signals[low.bit_length() - 1])
            total = out
            form ^= low
        answer = self._solver.solve([total], conflicts)
        if answer:
            values = [self._solver.value(variable) for variable in self._inputs]
            self.counterexample = sum(int(value) << i for i, value in enumerate(values))
            return False
        return True if answer is False else None


def _without(network: Network, relations: dict[int, Form]) -> Network:
    """The network with each AND in `relations` replaced by its sum of signals."""
    builder = FormBuilder(network.inputs)
    here: list[Literal] = [FALSE, *(2 * i for i in range(1, network.inputs + 1))]
    signals: list[Literal] = [FALSE ^ 1, *here[1:]]
    rows = zip(network.is_xor.tolist(), network.left.tolist(), network.right.tolist(), strict=True)
    for is_xor, left, right in rows:
        a, b = here[left >> 1] ^ (left & 1), here[right >> 1] ^ (right & 1)
        if is_xor:
            here.append(builder.xor(a, b))
            continue
        number = len(signals) - 1 - network.inputs
        form = relations.get(number)
        if form is None:
            made = builder.and_(a, b)
        else:
            total = 0
            while form:
                low = form & -form
                total ^= builder.form(signals[low.bit_length() - 1])
                form ^= low
            made = builder.realise(total)
        here.append(made)
        signals.append(made)
    return builder.build([here[literal >> 1] ^ (literal & 1) for literal in network.outputs.tolist()])
