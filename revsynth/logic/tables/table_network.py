"""Networks with few ANDs from a bare truth table, by all the ways of this package, the best first.

Every network is run on all inputs before it is returned. The work is a fixed amount for each effort, and
random choices depend on the seed alone, so that the same call gives the same networks.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

from revsynth.logic.affine_classes import MOST_INPUTS as CLASS_INPUTS
from revsynth.logic.affine_classes import and_counts, chain_of
from revsynth.logic.function import Function
from revsynth.logic.network import Network
from revsynth.logic.network_simulation import tabulate
from revsynth.logic.product_chain import ProductChain, input_table, substituted
from revsynth.logic.structure import inputs_without_effect
from revsynth.logic.tables.peeling import Level, bits_of, peel, table_of
from revsynth.logic.tables.power_maps import LEAST_BITS, MOST_BITS, recognise
from revsynth.logic.tables.product_search import ProductSearch, Table, Work
from revsynth.logic.tables.several_outputs import several_outputs, start_size
from revsynth.logic.tables.small_chains import small_chain
from revsynth.logic.tables.tower_inversion import power_map_chain
from revsynth.options import Effort

MOST_INPUTS = 10
"""Tables of more inputs are refused."""
_COMPLETIONS = 1 << 12
"""So many ways to choose free values are compared at most, where the fewest ANDs are known for each."""


@dataclass(frozen=True)
class Budget:
    """What an effort buys: compiled searches from `compiled_from` inputs on, the level of peeling, the level
    of several outputs, the starts tried for them, search nodes of small chains.
    """

    compiled_from: int
    peeling: Level
    outputs: Level
    starts: int
    nodes: int


_ONCE = ((1,), 1, 1, 1)
BUDGETS: dict[str, Budget] = {
    "low": Budget(
        compiled_from=99,
        peeling=Level(forms=(1, 2, 1), places=16, kept=1, rounds=1, work=Work(4, 1), hope=0.5),
        outputs=Level(*_ONCE, work=Work(4, 1), hope=0.5),
        starts=1,
        nodes=50,
    ),
    "normal": Budget(
        compiled_from=6,
        peeling=Level(forms=(3, 3, 2, 1), places=24, kept=1, rounds=4, work=Work(8, 1 << 12), hope=0.0),
        outputs=Level(*_ONCE, work=Work(8, 1 << 12), hope=0.5),
        starts=3,
        nodes=300,
    ),
    "high": Budget(
        compiled_from=5,
        peeling=Level(forms=(16, 4, 2, 1), places=126, kept=4, rounds=64, work=Work(16, 1 << 14), hope=1.0),
        outputs=Level(*_ONCE, work=Work(64, 1 << 14), hope=0.0),
        starts=4,
        nodes=3000,
    ),
}


def table_network(
    function: Function,
    *,
    effort: Effort = "normal",
    seed: int = 0,
    progress: Callable[[str], None] | None = None,
) -> list[tuple[str, Network]]:
    """(name of the way, network) for a function of at most MOST_INPUTS inputs, fewest ANDs first, then XORs.

    Free values are used, those of single outputs and outside the domain alike. Raises ValueError for more
    inputs.
    """
    if function.inputs > MOST_INPUTS:
        raise ValueError(f"networks from tables are made up to {MOST_INPUTS} inputs, not {function.inputs}")
    say = progress or (lambda _: None)
    idle = inputs_without_effect(function.values, function.care, function.inputs)
    used = [i for i in range(function.inputs) if not idle >> i & 1]
    tables, care = _restricted(function, used)
    images = [2 << i for i in used]
    found: list[tuple[str, Network]] = []
    for name, chain in _ways(tables, care, len(used), BUDGETS[effort], seed):
        network = substituted(chain, function.inputs, images).network()
        wrong = (tabulate(network) ^ function.values) & function.care
        if np.any(wrong):
            raise AssertionError(f"{name}: the network computes another function")
        say(f"{name}: {network.ands} ANDs")
        found.append((name, network))
    return sorted(found, key=lambda pair: (pair[1].ands, pair[1].xors))


def _restricted(function: Function, used: list[int]) -> tuple[list[Table], list[Table]]:
    """Values and care over the inputs that matter, the free values of the others having been made use of."""
    size = 1 << function.inputs
    x = np.arange(size)
    place = np.zeros(size, dtype=np.int64)
    for position, i in enumerate(used):
        place |= (x >> i & 1) << position
    tables, cares = [], []
    for row in range(function.outputs):
        value = np.zeros(1 << len(used), dtype=np.uint8)
        fixed = np.zeros(1 << len(used), dtype=np.uint8)
        np.maximum.at(value, place, _bits(function.values[row], function.inputs))
        np.maximum.at(fixed, place, _bits(function.care[row], function.inputs))
        tables.append(table_of(value))
        cares.append(table_of(fixed))
    return tables, cares


def _bits(column: np.ndarray, inputs: int) -> np.ndarray:
    return bits_of(int.from_bytes(column.astype("<u8").tobytes(), "little"), inputs)


def _ways(
    tables: list[Table], care: list[Table], inputs: int, budget: Budget, seed: int
) -> Iterator[tuple[str, ProductChain]]:
    compiled = inputs >= budget.compiled_from
    everything = (1 << (1 << inputs)) - 1
    complete = all(mask == everything for mask in care)
    if len(tables) == 1:
        yield _one_output(tables[0], care[0], inputs, budget, ProductSearch(seed, compiled))
        if complete:
            return
    else:
        power = _power_map(tables, inputs) if complete else None
        if power is not None:
            yield power
            return
        small = small_chain(tables, inputs, budget.nodes) if inputs <= CLASS_INPUTS else None
        if small is not None:
            yield "small chain", small
    yield from _by_random_products(tables, care, inputs, budget, seed, compiled)


def _one_output(
    table: Table, care: Table, inputs: int, budget: Budget, search: ProductSearch
) -> tuple[str, ProductChain]:
    if inputs <= CLASS_INPUTS:
        return "affine class", chain_of(inputs, _cheapest_completion(table, care, inputs, search))
    return "peeling", peel(table, inputs, search, budget.peeling)


def _cheapest_completion(table: Table, care: Table, inputs: int, search: ProductSearch) -> Table:
    """The free values chosen for fewest ANDs: all choices compared, or 4096 at random."""
    free = [x for x in range(1 << inputs) if not care >> x & 1]
    if not free:
        return table
    choices = search.sample(_COMPLETIONS, 1 << len(free))
    patterns = np.array(sorted(choices), dtype=np.uint32)
    completed = np.full(len(patterns), table, dtype=np.uint32)
    for k, x in enumerate(free):
        completed |= (patterns >> np.uint32(k) & np.uint32(1)) << np.uint32(x)
    return int(completed[int(np.argmin(and_counts(inputs, completed)))])


def _power_map(tables: list[Table], inputs: int) -> tuple[str, ProductChain] | None:
    if len(tables) != inputs or not LEAST_BITS <= inputs <= MOST_BITS:
        return None
    values = [sum((table >> x & 1) << j for j, table in enumerate(tables)) for x in range(1 << inputs)]
    power = recognise(values, inputs)
    chain = None if power is None else power_map_chain(power)
    return None if power is None or chain is None else (f"power map x^{power.exponent}", chain)


def _by_random_products(
    tables: list[Table], care: list[Table], inputs: int, budget: Budget, seed: int, compiled: bool
) -> Iterator[tuple[str, ProductChain]]:
    """Fewer and fewer products; where all outputs are free together, only the fixed inputs count."""
    common = care[0] if all(mask == care[0] for mask in care) else (1 << (1 << inputs)) - 1
    places = np.flatnonzero(bits_of(common, inputs))
    bits = max(1, len(places))

    def narrowed(table: Table) -> Table:
        return table_of(bits_of(table, inputs)[places])

    signals = [narrowed((1 << (1 << inputs)) - 1), *(narrowed(input_table(inputs, i)) for i in range(inputs))]
    wanted = [narrowed(table) for table in tables]
    start = start_size(inputs, bits)
    starts = [start + k // 2 for k in range(budget.starts)] + ([0] if compiled and start else [])
    most = 1 << inputs << 2
    for number, extra in enumerate(starts):
        search = ProductSearch(1000 * seed + number, compiled)
        chain = several_outputs(wanted, signals, bits, search, budget.outputs, extra, most)
        if chain is not None:
            most = len(chain.products) - 1
            yield ("random products" if extra else "one sum after the other"), chain
