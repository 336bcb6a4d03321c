"""Limits of expressions: beyond them is a clear error, before time or memory runs out."""

from __future__ import annotations

MAX_BITS = 4096
"""No literal, product, power or left shift may have more bits than this."""

MAX_STEPS = 200_000
"""Loop iterations of one expression for one input, an upper bound worked out before it runs."""

MAX_DEPTH = 100
"""Levels of nesting. A chain such as a + b - c + ... is one level; Python reads some thousands of links."""

MAX_CHARACTERS = 100_000
"""Length of an expression's text."""

MAX_INPUT_BITS = 24
"""Input bits of a spec that is evaluated for every input."""

MAX_WIDE_BITS = 1 << 16
"""Input bits of a spec that is never tabulated."""
