"""The compiled loop behind `every_input`."""

from __future__ import annotations

from functools import cache
from typing import Any


def search(
    is_xor: Any, left: Any, right: Any, inputs: int, top: int, flip: int, begin: int, end: int, values: Any
) -> int:
    """The first word of the blocks begin ... end - 1 in which row `top` (`flip`: its complement) has a 1.

    -1 where there is none.

    A block is 2^12 inputs, 64 words of `values` (uint64, row 0 all 0). Row i + 1 is variable i; rows up to
    variable 11 are filled in, those beyond are written here by the number of the block. Gates follow the
    variables: rows `left` and `right` are their operands.
    """
    words = values.shape[1]
    zeros = values[0]
    for block in range(begin, end):
        for i in range(12, inputs):
            held = (block >> (i - 12)) & 1
            for word in range(words):
                values[i + 1, word] = ~zeros[word] if held else zeros[word]
        for gate in range(is_xor.shape[0]):
            a = left[gate]
            b = right[gate]
            place = inputs + 1 + gate
            if is_xor[gate]:
                for word in range(words):
                    values[place, word] = values[a, word] ^ values[b, word]
            else:
                for word in range(words):
                    values[place, word] = values[a, word] & values[b, word]
        for word in range(words):
            if values[top, word] != (~zeros[word] if flip else zeros[word]):
                return int(block * words + word)
    return -1


@cache
def compiled_search() -> Any:
    """`search`, compiled."""
    from numba import njit

    return njit(cache=True)(search)
