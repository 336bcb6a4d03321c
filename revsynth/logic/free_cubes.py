"""Which cubes lie wholly on free values, by a table over all cubes.

Adding such a cube to an exclusive sum changes nothing that is fixed.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.cube_codes import Codes, CodeSpace
from revsynth.logic.truth_table import Columns, last_word_mask, unpack

MAX_INPUTS = 13
"""The table has an entry for each of the 3^n cubes: 13 MB for 13 inputs."""


class FreeCubes:
    """The table for `care`, shape (outputs, words). Raises ValueError above MAX_INPUTS or 64 outputs."""

    def __init__(self, care: Columns, inputs: int) -> None:
        if inputs > MAX_INPUTS or care.shape[0] > 64:
            raise ValueError(f"{inputs} inputs, {care.shape[0]} outputs: at most {MAX_INPUTS} and 64")
        self._inputs = inputs
        free = np.zeros(1 << inputs, dtype=np.uint64)
        for output, row in enumerate(care):
            free |= (unpack(row, inputs) == 0).astype(np.uint64) << np.uint64(output)
        table = free.reshape((2,) * inputs)
        for axis in range(inputs):
            zero, one = np.split(table, 2, axis=axis)
            table = np.concatenate([zero, one, zero & one], axis=axis)
        self._table: NDArray[np.uint64] = table.ravel()

    @classmethod
    def of(cls, care: Columns, inputs: int) -> FreeCubes | None:
        """The table, or None where nothing is free or the table would be too large."""
        if inputs > MAX_INPUTS or care.shape[0] > 64 or np.all(care == last_word_mask(inputs)):
            return None
        return cls(care, inputs)

    def outputs(self, codes: Codes) -> NDArray[np.uint64]:
        """A mask for each cube of the outputs at which all its inputs are free."""
        index = np.zeros(codes.shape, dtype=np.int64)
        for i in range(self._inputs - 1, -1, -1):
            index *= 3
            index += ((codes >> np.uint64(2 * i)) & np.uint64(3)).astype(np.int64) - 1
        return self._table[index]

    def __call__(self, codes: Codes) -> NDArray[np.bool_]:
        """Whether each cube is free at all inputs for all the outputs that it feeds."""
        feeds = codes >> np.uint64(2 * self._inputs)
        free: NDArray[np.bool_] = (feeds & ~self.outputs(codes)) == 0
        return free

    def changes(self, codes: Codes) -> tuple[Codes, NDArray[np.int64]]:
        """All changes of one cube in one input place that leave what is fixed: new codes, and whose they are.

        A cube may take another value where the cube of the remaining third value lies on free values.
        """
        shifts = 2 * np.arange(self._inputs, dtype=np.uint64)
        here = (codes[:, None] >> shifts) & np.uint64(3)
        one = np.uint64(1)
        values = ((here % np.uint64(3)) + one, ((here + one) % np.uint64(3)) + one)
        first, second = (codes[:, None] ^ ((here ^ value) << shifts) for value in values)
        owner = np.repeat(np.arange(len(codes)), self._inputs)
        may_first, may_second = self(second.ravel()), self(first.ravel())
        fresh = np.concatenate([first.ravel()[may_first], second.ravel()[may_second]])
        return fresh, np.concatenate([owner[may_first], owner[may_second]])

    def loosen(self, codes: Codes, space: CodeSpace) -> Codes:
        """Drop free cubes and make single changes, all at once, as long as that makes cubes cheaper."""
        codes = codes[~self(codes)]
        while len(codes):
            fresh, owner = self.changes(codes)
            saved = space.price(codes)[owner] - space.price(fresh)
            order = np.argsort(saved, kind="stable")
            order = order[saved[order] > 0]
            if not len(order):
                break
            codes = codes.copy()
            codes[owner[order]] = fresh[order]
            codes = codes[~self(codes)]
        return codes
