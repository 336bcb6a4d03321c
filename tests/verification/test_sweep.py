"""Sweeping: networks written another way are proved equal, changed ones refuted by an input that shows it."""

from __future__ import annotations

import random
from contextlib import closing

import numpy as np
import pytest

from revsynth.verification.lifting.parities import FALSE, TRUE, Literal, Parities
from revsynth.verification.proof.cone import Cone
from revsynth.verification.proof.sweep import Sweep

CONFLICTS = 20_000
Gate = tuple[str, int, int, int]
"""Kind, operands by place, and the complement bits of the operands."""


def random_gates(inputs: int, count: int, draw: random.Random) -> list[Gate]:
    gates = []
    for place in range(inputs, inputs + count):
        one, other = draw.sample(range(max(place - 12, 0), place), 2)
        gates.append((draw.choice(["and", "and", "or", "xor", "mux"]), one, other, draw.getrandbits(2)))
    return gates


def written(
    parities: Parities, variables: list[Literal], gates: list[Gate], draw: random.Random | None
) -> Literal:
    """The last gate; with `draw`, every gate in one of several equivalent ways."""
    found = list(variables)
    for kind, one, other, signs in gates:
        a, b, c = found[one] ^ (signs & 1), found[other] ^ (signs >> 1), found[one // 2]
        way = 0 if draw is None else draw.randrange(3)
        found.append(_gate(parities, kind, a, b, c, way))
    return found[-1]


def _gate(p: Parities, kind: str, a: Literal, b: Literal, c: Literal, way: int) -> Literal:
    def both(x: Literal, y: Literal) -> Literal:
        if way == 1:  # x (x ^ y ^ 1)
            return p.and_(x, p.xor(x, y) ^ 1)
        if way == 2:  # split over c: x y c ^ x y (c ^ 1)
            return p.xor(p.and_(p.and_(x, c), y), p.and_(x, p.and_(y, c ^ 1)))
        return p.and_(x, y)

    if kind == "and":
        return both(a, b)
    if kind == "or":
        return both(a ^ 1, b ^ 1) ^ 1
    if kind == "xor":
        return p.xor(a, b) if way == 0 else p.xor(both(a, b ^ 1), both(a ^ 1, b))
    return p.xor(both(c, a), both(c ^ 1, b))


@pytest.mark.parametrize("seed", range(25))
def test_rewritten_networks_are_proved_and_changed_ones_refuted(seed: int) -> None:
    draw = random.Random(seed)
    inputs = 14
    gates = random_gates(inputs, 60, draw)
    parities = Parities(seed)
    variables = [parities.free() for _ in range(inputs)]
    one = written(parities, variables, gates, None)
    same = parities.xor(one, written(parities, variables, gates, draw))
    place = draw.randrange(len(gates))
    kind, first, second, signs = gates[place]
    changed = [*gates[:place], (kind, first, second, signs ^ 1), *gates[place + 1 :]]
    other = parities.xor(one, written(parities, variables, changed, draw))
    parities.proofs.finish()
    with closing(Sweep(parities, variables, [same, other])) as sweep:
        assert sweep.zero(same, CONFLICTS).holds
        answer = sweep.zero(other, CONFLICTS)
    truth = everywhere(parities, variables, other)
    assert answer.holds == (not truth.any())
    if answer.holds is False:
        assert truth[sum(bit << i for i, bit in enumerate(answer.inputs))]


def everywhere(parities: Parities, variables: list[Literal], literal: Literal) -> np.ndarray:
    """The literal at every input, by the inputs' number."""
    if literal <= TRUE:
        return np.full(1 << len(variables), literal, dtype=bool)
    numbers = np.arange(1 << len(variables), dtype=np.uint64)
    bits = np.array([numbers >> np.uint64(i) & np.uint64(1) for i in range(len(variables))], dtype=np.uint8)
    words = np.ascontiguousarray(np.packbits(bits, axis=1, bitorder="little")).view("<u8").astype(np.uint64)
    row = Cone(parities, variables, [literal]).values([literal], words)[0]
    return np.unpackbits(row.astype("<u8").view(np.uint8), bitorder="little").astype(bool)


def test_constants_need_no_solver() -> None:
    parities = Parities()
    variables = [parities.free()]
    with closing(Sweep(parities, variables, [FALSE, TRUE])) as sweep:
        assert sweep.zero(FALSE, 1).holds
        assert sweep.zero(TRUE, 1).holds is False
        assert sweep.conflicts == 0


def test_no_time_is_no_answer() -> None:
    """Two ways to multiply, and no conflicts for the solver."""
    from revsynth.verification.proof.obligations import PlainGates
    from revsynth.verification.translation.numbers import Arithmetic

    parities = Parities()
    a = [parities.free() for _ in range(24)]
    b = [parities.free() for _ in range(24)]
    gates = PlainGates(parities)
    rows = Arithmetic(gates).multiply((*a, 0), (*b, 0))
    columns = Arithmetic(gates, by_columns=True).multiply((*b, 0), (*a, 0))
    differ = parities.xor(rows[20], columns[20])
    with closing(Sweep(parities, [*a, *b], [differ])) as sweep:
        assert sweep.zero(differ, 1).holds is None
