"""Listed values, one an input, free where the entry is None."""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.elaborate.look_up import look_up, tables_of
from revsynth.errors import SpecError
from revsynth.logic.network import TRUE, Literal
from revsynth.logic.network_builder import NetworkBuilder


def listed_literals(
    builder: NetworkBuilder, entries: Sequence[int | None], bits: int, source: str, place: str
) -> tuple[list[Literal], Literal]:
    """The low `bits` bits of the entries, and where they are not free; input 0 first.

    Raises SpecError unless there is one entry an input.
    """
    wanted = 1 << builder.inputs
    if len(entries) != wanted:
        raise SpecError(
            f"{len(entries)} entries, but {builder.inputs} input bits need {wanted} (input 0 first)",
            source=source,
            place=place,
        )
    index = [builder.input(position) for position in range(builder.inputs)]
    values: list[int] = []
    for position, entry in enumerate(entries):
        if entry is None:  # as where the highest one of the index is 0: that selection goes
            entry = values[position ^ (1 << position.bit_length() - 1)] if position else 0
        values.append(entry)
    literals = look_up(builder, index, tables_of(values, bits))
    if None not in entries:
        return literals, TRUE
    fixed = tables_of([entry is not None for entry in entries], 1)
    return literals, look_up(builder, index, fixed)[0]
