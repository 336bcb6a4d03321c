"""The `compute` form: products stay in `keep` lines, so that nothing is paid for erasing them.

A product of two literals onto a line known to be 0 takes 4 T, and its erasure is left to the inverse block
(Jones, Phys. Rev. A 87, 2013; Gidney, Quantum 2, 2018). Equal products of unchanged lines are kept once.
"""

from __future__ import annotations

from dataclasses import replace

from revsynth.cascade.model import PHASE, Cascade, Gate
from revsynth.synthesis.interface import Block


def keep_products(block: Block) -> Block | None:
    """The block with every product of two or more literals on a `keep` line of its own, or None.

    None where there is nothing to keep: no gate has three controls, nor two on a line that may hold 1, or a
    gate turns phases. The new keep lines come after the block's own, before its work lines.
    """
    if block.placement is not None or any(gate.target == PHASE for gate in block.cascade):
        return None
    first_keep = block.inputs + block.outputs + block.keep
    kept: list[Gate] = []
    known: dict[tuple[int, int], int] = {}
    made_of: dict[int, list[tuple[int, int]]] = {}
    written = [line < block.inputs for line in range(block.cascade.lines)]
    new_lines = 0

    # New lines are numbered from `lines` on while their number is unknown, and moved into place at the end.
    for gate in block.cascade:
        literals = list(gate.controls)
        direct = 2 if not written[gate.target] else 1
        while len(literals) > 1:
            pair = (min(literals[:2]), max(literals[:2]))
            if len(literals) <= direct and pair not in known:
                break
            if pair not in known:
                line = block.cascade.lines + new_lines
                new_lines += 1
                known[pair] = 2 * line
                for control in pair:
                    made_of.setdefault(control >> 1, []).append(pair)
                kept.append(Gate(line, pair))
            literals = [known[pair], *literals[2:]]
        kept.append(Gate(gate.target, tuple(sorted(literals))))
        written[gate.target] = True
        # A product of a line that has changed is no longer the product of what stands there now.
        for pair in made_of.pop(gate.target, ()):
            known.pop(pair, None)
    if not new_lines:
        return None

    lines = block.cascade.lines + new_lines
    place = [
        line if line < first_keep else line + new_lines if line < block.cascade.lines
        else first_keep + line - block.cascade.lines
        for line in range(lines)
    ]  # fmt: skip
    cascade = Cascade.from_gates(lines, kept).on_lines(lines, tuple(place))
    return replace(
        block, cascade=cascade, keep=block.keep + new_lines, method=f"{block.method}, products kept"
    )
