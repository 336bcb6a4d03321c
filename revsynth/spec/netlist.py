"""A combinational netlist: what BLIF, bench, AIGER and Bristol files are read into.

A *signal* is `2 * number`, or `2 * number + 1` for its complement. Number 0 is the constant 0, numbers
1 ... inputs are the input bits (bit i of the combined index is number i + 1), gate i is number
`inputs + 1 + i`. It says what the file says and nothing of how it is best built: building and checking each
translate it on their own.
"""

from __future__ import annotations

from collections.abc import Hashable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Literal, NamedTuple, TypeAlias, TypeVar

Signal: TypeAlias = int
GateKind: TypeAlias = Literal["and", "or", "xor", "cover"]

FALSE: Signal = 0
TRUE: Signal = 1

MOST_BITS = 1_000_000
"""Input bits, and output bits, of a netlist."""


class NetlistGate(NamedTuple):
    """One gate of any number of operands.

    An `and` of nothing is 1, an `or` and a `xor` of nothing are 0. A `cover` is 1 where one of its rows fits:
    character i of a row is what operand i must be (`0`, `1`, or `-` for either).
    """

    kind: GateKind
    operands: tuple[Signal, ...]
    rows: tuple[str, ...] = ()


@dataclass(frozen=True)
class Netlist:
    """Gates in topological order: operands have smaller numbers than the gate. Outputs: lowest bit first."""

    inputs: int
    gates: tuple[NetlistGate, ...]
    outputs: tuple[Signal, ...]

    def with_inputs(self, order: Sequence[int]) -> Netlist:
        """The same netlist with its inputs in another order: new bit i is what was bit order[i]."""
        if list(order) == list(range(self.inputs)):
            return self
        place = {old: new for new, old in enumerate(order)}

        def moved(signal: Signal) -> Signal:
            number = signal >> 1
            return 2 * (place[number - 1] + 1) + (signal & 1) if 1 <= number <= self.inputs else signal

        gates = tuple(
            NetlistGate(kind, tuple(map(moved, operands)), rows) for kind, operands, rows in self.gates
        )
        return Netlist(self.inputs, gates, tuple(map(moved, self.outputs)))


Name = TypeVar("Name", bound=Hashable)


class LoopError(Exception):
    """Gates that feed each other in a circle; `names` holds the circle."""

    def __init__(self, names: Sequence[object]) -> None:
        self.names = tuple(names)
        super().__init__(" -> ".join(map(str, names)))


def in_order(operands: Mapping[Name, Sequence[Name]]) -> list[Name]:
    """The gates, each behind those that it reads; otherwise as they are listed.

    Names without an entry are inputs. Linear in time, without recursion. Raises LoopError where gates feed
    each other in a circle.
    """
    done: set[Name] = set()
    order: list[Name] = []
    for first in operands:
        if first in done:
            continue
        path: list[tuple[Name, Iterator[Name]]] = [(first, iter(operands[first]))]
        waiting = {first}
        while path:
            name, rest = path[-1]
            for needed in rest:
                if needed in waiting:
                    names: list[Name] = [entry for entry, _ in path]
                    raise LoopError([*names[names.index(needed) :], needed])
                if needed in operands and needed not in done:
                    path.append((needed, iter(operands[needed])))
                    waiting.add(needed)
                    break
            else:
                path.pop()
                waiting.discard(name)
                done.add(name)
                order.append(name)
    return order
