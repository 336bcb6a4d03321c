"""Networks written as Bristol Fashion circuits, the way a user would bring a large one."""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.logic.network import Literal, Network


def bristol_text(network: Network, words: Sequence[int]) -> str:
    """The text of a network; words: width of each input value, the first ones' bits first.

    Every complement is an INV of its own, a constant an EQ; outputs are copied to the last wires.
    """
    if sum(words) != network.inputs:
        raise ValueError(f"words of {sum(words)} bits for {network.inputs} inputs")
    rows: list[str] = []
    wire: dict[Literal, int] = {2 * (1 + i): i for i in range(network.inputs)}

    def put(reads: str, name: str) -> int:
        rows.append(f"{len(reads.split())} 1 {reads} {network.inputs + len(rows)} {name}")
        return network.inputs + len(rows) - 1

    def wire_of(literal: Literal) -> int:
        if literal not in wire:
            wire[literal] = put(str(literal), "EQ") if literal < 2 else put(f"{wire[literal ^ 1]}", "INV")
        return wire[literal]

    gates = zip(network.is_xor.tolist(), network.left.tolist(), network.right.tolist(), strict=True)
    for node, (is_xor, left, right) in enumerate(gates, start=1 + network.inputs):
        wire[2 * node] = put(f"{wire_of(left)} {wire_of(right)}", "XOR" if is_xor else "AND")
    for output in [wire_of(output) for output in network.outputs.tolist()]:
        put(str(output), "EQW")
    head = [
        f"{len(rows)} {network.inputs + len(rows)}",
        " ".join(map(str, (len(words), *words))),
        f"1 {len(network.outputs)}",
    ]
    return "\n".join([*head, "", *rows, ""])
