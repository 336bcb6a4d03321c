"""Every construction as an exact matrix, in every branch of measurements, and its published counts."""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from revsynth.circuit.cost import measure
from revsynth.circuit.model import Circuit, Guard, Kind, Register
from revsynth.lowering.assemble import assemble
from revsynth.lowering.borrowed_chain import BorrowedChain
from revsynth.lowering.clean_chain import CleanChain
from revsynth.lowering.construction import Construction
from revsynth.lowering.constructions import CONSTRUCTIONS, Style, choose, construction_template, price_of
from revsynth.lowering.direct import Direct
from revsynth.lowering.draft import Tip
from revsynth.lowering.erased_chain import ErasedChain
from revsynth.lowering.expand import expand
from revsynth.lowering.one_line import OneBorrowedLine, OneCleanLine
from tests.lowering.columns import run
from tests.slow_simulator import run_circuit

UNITARY = [(construction, "unitary") for construction in CONSTRUCTIONS]
ERASED = [(ErasedChain(p, inner), "measured") for p in range(1, 5) for inner in CONSTRUCTIONS]
CASES = [
    pytest.param(construction, uncompute, k, id=f"{construction.name} {uncompute} {k}")
    for construction, uncompute in (*UNITARY, *ERASED)
    for k in range(1, 6)
    if construction.needs(k) is not None
]


def circuit_of(construction: Construction, k: int, tip: Tip, gates: str, uncompute: str) -> Circuit:
    """The construction alone; qubits: controls, target, clean, borrowed."""
    needs = construction.needs(k)
    assert needs is not None
    size = k + 1 + sum(needs)
    template = construction_template(construction, k, tip)
    qubits = np.arange(size, dtype=np.int32)
    composite = assemble([template], np.zeros(1, np.int32), np.zeros(1, np.int64), qubits)
    made = expand(composite, Style(gates, uncompute, "t"))
    seen = [Register("seen", made.bits, 0)] if made.bits else []
    conditions = [(Guard((2 * i,)),) for i in range(made.bits)]
    return Circuit(
        [Register("q", size, 0)],
        seen,
        made.kind,
        made.offset,
        made.operand,
        made.condition,
        made.bit,
        {},
        conditions,
    )


@pytest.mark.parametrize("gates", ["clifford+t", "toffoli"])
@pytest.mark.parametrize("tip", list(Tip))
@pytest.mark.parametrize(("construction", "uncompute", "k"), CASES)
def test_a_construction_is_the_exact_matrix(construction, uncompute, k, tip, gates):
    """Controls, target and borrowed qubits in all states (so in all superpositions), clean ones in 0.

    Every branch must have the same weight and no phase of its own.
    """
    needs = construction.needs(k)
    circuit = circuit_of(construction, k, tip, gates, uncompute)
    index = np.arange(1 << circuit.qubits)
    holds = (index & ((1 << k) - 1)) == (1 << k) - 1
    target = (index >> k) & 1
    starts = (index >> (k + 1)) & ((1 << needs.clean) - 1) == 0
    if tip is Tip.FROM_ZERO:
        starts &= target == 0
    if tip is Tip.TO_ZERO:
        starts &= target == holds
    before = np.eye(len(index))[:, starts]
    if tip is Tip.Z:
        wanted = np.diag(np.where(holds & (target == 1), -1.0, 1.0))[:, starts]
    else:
        wanted = np.eye(len(index))[:, np.where(holds, index ^ (1 << k), index)[starts]]
    measured = int((circuit.kind == Kind.MEASURE).sum())
    for branch in itertools.product((0, 1), repeat=measured):
        got = run(circuit, before, branch.__getitem__)
        assert np.abs(got - wanted * 2 ** (-measured / 2)).max() < 1e-9


@pytest.mark.parametrize(
    ("construction", "uncompute"), [(OneBorrowedLine(), "unitary"), (ErasedChain(3, Direct()), "measured")]
)
def test_the_simulator_of_this_room_agrees_with_the_slow_one(construction, uncompute):
    """On a superposition of all inputs with random amplitudes, branch by branch."""
    k = 4
    circuit = circuit_of(construction, k, Tip.NOT, "clifford+t", uncompute)
    rng = np.random.default_rng(1)
    vector = np.zeros(1 << circuit.qubits, dtype=complex)
    vector[: 1 << (k + 1)] = rng.normal(size=1 << (k + 1)) + 1j * rng.normal(size=1 << (k + 1))
    branches = run_circuit(circuit, vector)
    assert len(branches) == 1 << circuit.bits
    for bits, state in branches:
        assert np.abs(run(circuit, vector[:, None], bits.__getitem__)[:, 0] - state).max() < 1e-9


@pytest.mark.parametrize("k", range(3, 12))
def test_unitary_t_counts_are_the_published_ones(k):
    """k - 2 clean qubits: 8k - 9 T, 2k - 3 Toffolis (Maslov, Phys. Rev. A 93, 2016).

    k - 2 borrowed ones: 8(k - 1) T, 8k - 10 CNOTs, 4(k - 2) Toffolis (Barenco et al., Phys. Rev. A 52, 1995,
    Lemma 7.2; Maslov 2016). One clean qubit: 2k - 3 Toffolis (Khattar, Gidney, arXiv 2407.17966).
    """
    for construction, t, toffoli in (
        (CleanChain(), 8 * k - 9, 2 * k - 3),
        (OneCleanLine(), 8 * k - 9, 2 * k - 3),
        (BorrowedChain(), 8 * (k - 1), 4 * (k - 2)),
    ):
        assert measure(circuit_of(construction, k, Tip.NOT, "clifford+t", "unitary")).t == t
        assert measure(circuit_of(construction, k, Tip.NOT, "toffoli", "unitary")).toffoli == toffoli
    assert measure(circuit_of(BorrowedChain(), k, Tip.NOT, "clifford+t", "unitary")).cx == 8 * k - 10


@pytest.mark.parametrize("k", range(3, 12))
def test_one_borrowed_qubit_takes_16k_minus_32_t(k):
    """Below 16k + O(1) T for one borrowed qubit (Barenco et al. 1995, Cor. 7.4); 4k - 8 Toffolis."""
    assert measure(circuit_of(OneBorrowedLine(), k, Tip.NOT, "clifford+t", "unitary")).t == 16 * k - 32
    assert measure(circuit_of(OneBorrowedLine(), k, Tip.NOT, "toffoli", "unitary")).toffoli == 4 * k - 8


@pytest.mark.parametrize("k", range(2, 12))
def test_measured_t_counts_are_the_published_ones(k):
    """k - 1 clean qubits: 4k - 4 T; k - 2: 4k - 1 (Jones, Phys. Rev. A 87, 2013; Gidney, Quantum 2, 2018)."""
    assert (
        measure(circuit_of(ErasedChain(k - 1, Direct()), k, Tip.NOT, "clifford+t", "measured")).t == 4 * k - 4
    )
    if k > 2:
        fewer = circuit_of(ErasedChain(k - 2, Direct()), k, Tip.NOT, "clifford+t", "measured")
        assert measure(fewer).t == 4 * k - 1
        assert measure(fewer).measured == k - 2


def test_a_doubly_controlled_not_takes_seven_t_and_an_and_four():
    """Seven is optimal without measurement (Gosset, Kothari, et al., arXiv 1308.4134)."""
    assert measure(circuit_of(Direct(), 2, Tip.NOT, "clifford+t", "unitary")).t == 7
    assert measure(circuit_of(Direct(), 2, Tip.FROM_ZERO, "clifford+t", "unitary")).t == 4
    assert measure(circuit_of(Direct(), 2, Tip.TO_ZERO, "clifford+t", "unitary")).t == 4
    assert measure(circuit_of(Direct(), 2, Tip.TO_ZERO, "clifford+t", "measured")).t == 0


@pytest.mark.parametrize("k", range(2, 12))
def test_a_z_needs_at_least_k_plus_one_t_for_k_controls(k):
    """Measured or not; Beverland, Campbell, Howard, Kliuchnikov, Quantum Sci. Technol. 5, 2020 (memory)."""
    for uncompute in ("unitary", "measured"):
        choice = choose(k, Tip.Z, k, k, Style("clifford+t", uncompute, "t"))
        assert choice is not None
        assert choice.price.t >= k + 1


@pytest.mark.parametrize("aim", ["t", "qubits", "depth", "gates"])
@pytest.mark.parametrize("uncompute", ["unitary", "measured"])
@pytest.mark.parametrize("gates", ["clifford+t", "toffoli"])
def test_more_scratch_never_costs_more(gates, uncompute, aim):
    """What is chosen is monotone in what is at hand."""
    style = Style(gates, uncompute, aim)
    for k, tip in itertools.product(range(1, 8), Tip):
        for borrowed in range(k):
            keys = [choose(k, tip, clean, borrowed, style) for clean in range(k)]
            prices = [choice.price.key(aim)[0] for choice in keys if choice is not None]
            assert prices == sorted(prices, reverse=True)
            assert (keys[0] is None) == (k >= 3 and borrowed == 0)


@pytest.mark.parametrize("gates", ["clifford+t", "toffoli"])
@pytest.mark.parametrize("uncompute", ["unitary", "measured"])
def test_the_price_of_a_template_is_what_it_costs_when_written_out(gates, uncompute):
    for construction, k in itertools.product(CONSTRUCTIONS, range(1, 9)):
        if construction.needs(k) is None:
            continue
        for tip in Tip:
            price = price_of(construction_template(construction, k, tip), Style(gates, uncompute, "t"))
            cost = measure(circuit_of(construction, k, tip, gates, uncompute))
            assert (price.t, price.gates) == (cost.t + cost.toffoli, cost.gates)
            assert price.depth >= cost.depth


@pytest.mark.parametrize("construction", [OneCleanLine(), OneBorrowedLine(), CleanChain(), BorrowedChain()])
@pytest.mark.parametrize("k", [*range(3, 12), 16, 23, 64])
def test_many_controls_classically(construction, k):
    """In the gate set `toffoli`: all inputs up to 11 controls, above that random ones dense near all ones."""
    needs = construction.needs(k)
    circuit = circuit_of(construction, k, Tip.NOT, "toffoli", "unitary")
    rng = np.random.default_rng(k)
    if k <= 11:
        rows = [((np.arange(1 << k) >> i) & 1).astype(bool) for i in range(k)]
    else:
        rows = list(rng.random((k, 4096)) < 1 - rng.choice([0.0, 0.5, 1.5], size=4096) / k)
    count = len(rows[0])
    rows += [
        np.zeros(count, bool) if i in range(1, 1 + needs.clean) else rng.random(count) < 0.5
        for i in range(1 + sum(needs))
    ]
    state = [row.copy() for row in rows]
    for op in circuit:
        assert op.kind is Kind.X
        product = np.ones(count, dtype=bool)
        for control in op.controls:
            product &= state[control >> 1]
        state[op.targets[0]] ^= product
    assert np.array_equal(state[k], rows[k] ^ np.all(rows[:k], axis=0))
    assert all(np.array_equal(state[i], rows[i]) for i in range(len(rows)) if i != k)


def test_a_construction_is_not_written_where_it_does_not_fit():
    with pytest.raises(ValueError, match="clean tree is not made for 2 controls"):
        construction_template(CleanChain(), 2, Tip.NOT)
