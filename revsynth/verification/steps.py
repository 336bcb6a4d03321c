"""Elementary steps of a circuit in flat arrays: eight million of them take 300 MB, as objects some 3 GB."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, fields
from typing import Any, Final, NamedTuple, overload

import numpy as np
from numpy.typing import NDArray

FLIP: Final = 0
"""NOT on `target` where all literals hold."""
TURN: Final = 1
"""The phase omega**amount, omega = exp(i pi/4), where all literals hold."""
ANGLE: Final = 2
"""The phase exp(i angle), no multiple of pi/4, where all literals hold."""
HADAMARD: Final = 3
"""H on `target`."""
MEASURE: Final = 4
"""`target` is measured in the Z basis into `bit`."""
RESET: Final = 5
"""`target` is measured, the outcome is lost, and it is set to 0."""


class Step(NamedTuple):
    """One elementary step. `condition` indexes the circuit's conditions, `source` its operations."""

    act: int
    literals: tuple[int, ...]
    target: int
    amount: int
    angle: float
    condition: int
    bit: int
    source: int


@dataclass(frozen=True, eq=False)
class Steps(Sequence[Step]):
    """A sequence of steps that makes its objects only when they are asked for.

    Step i has the literals `literal[offset[i] : offset[i + 1]]`; the other arrays have an entry a step.
    Types: act, amount uint8; target, condition, bit, source, literal int32; angle float64; offset int64.
    """

    act: NDArray[np.uint8]
    target: NDArray[np.int32]
    amount: NDArray[np.uint8]
    angle: NDArray[np.float64]
    condition: NDArray[np.int32]
    bit: NDArray[np.int32]
    source: NDArray[np.int32]
    offset: NDArray[np.int64]
    literal: NDArray[np.int32]

    @classmethod
    def of(cls, steps: Sequence[Step]) -> Steps:
        """The same steps in arrays."""
        if isinstance(steps, Steps):
            return steps
        columns = zip(*steps, strict=True) if steps else ((),) * 8
        act, literals, target, amount, angle, condition, bit, source = columns
        return cls(
            np.array(act, dtype=np.uint8),
            np.array(target, dtype=np.int32),
            np.array(amount, dtype=np.uint8),
            np.array(angle, dtype=np.float64),
            np.array(condition, dtype=np.int32),
            np.array(bit, dtype=np.int32),
            np.array(source, dtype=np.int32),
            starts([len(some) for some in literals]),
            np.array([literal for some in literals for literal in some], dtype=np.int32),
        )

    def take(self, order: NDArray[np.int64]) -> Steps:
        """The steps with these indices, in this order."""
        width = np.diff(self.offset)[order]
        offset = starts(width)
        within = np.arange(offset[-1], dtype=np.int64) - np.repeat(offset[:-1], width)
        literal = self.literal[np.repeat(self.offset[:-1][order], width) + within]
        chosen = {name: getattr(self, name)[order] for name in _BY_STEP}
        return Steps(**chosen, offset=offset, literal=literal)

    def followed_by(self, other: Steps) -> Steps:
        """These steps, then the others."""
        joined: dict[str, Any] = {
            name: np.concatenate([getattr(self, name), getattr(other, name)])
            for name in (*_BY_STEP, "literal")
        }
        return Steps(**joined, offset=np.concatenate([self.offset, self.offset[-1] + other.offset[1:]]))

    def __len__(self) -> int:
        return len(self.act)

    @overload
    def __getitem__(self, index: int) -> Step: ...
    @overload
    def __getitem__(self, index: slice) -> Steps: ...
    def __getitem__(self, index: int | slice) -> Step | Steps:
        if isinstance(index, slice):
            return self.take(np.arange(len(self), dtype=np.int64)[index])
        place = range(len(self))[index]
        literals = self.literal[self.offset[place] : self.offset[place + 1]].tolist()
        act, target, amount, angle, condition, bit, source = (
            getattr(self, name)[place].item() for name in _BY_STEP
        )
        return Step(act, tuple(literals), target, amount, angle, condition, bit, source)

    def __iter__(self) -> Iterator[Step]:
        literal = self.literal.tolist()
        offset = self.offset.tolist()
        rows = zip(*(getattr(self, name).tolist() for name in _BY_STEP), strict=True)
        begin = 0
        for end, (act, target, amount, angle, condition, bit, source) in zip(offset[1:], rows, strict=True):
            yield Step(act, tuple(literal[begin:end]), target, amount, angle, condition, bit, source)
            begin = end

    @property
    def measurements(self) -> int:
        """How many measurements and resets there are."""
        return int((self.act >= MEASURE).sum())


_BY_STEP = tuple(field.name for field in fields(Steps) if field.name not in ("offset", "literal"))


def starts(width: Sequence[int] | NDArray[np.int64]) -> NDArray[np.int64]:
    """Where each of some pieces in a row begins, and where the last one ends."""
    offset = np.zeros(len(width) + 1, dtype=np.int64)
    np.cumsum(width, out=offset[1:])
    return offset
