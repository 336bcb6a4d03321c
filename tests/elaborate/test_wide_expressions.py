"""Elaborated expressions over wide words, against the reference evaluator at random and extreme inputs."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from revsynth.elaborate import elaborate
from revsynth.errors import ExpressionError
from revsynth.spec.expression import Scope, parse
from revsynth.spec.model import Output, Outputs, Spec, Word
from revsynth.spec.reference import evaluate
from tests.elaborate.samples import at, run, some_inputs

WORDS = (
    Word("x", 64),
    Word("y", 64),
    Word("s", 40, signed=True),
    Word("n", 6),
    Word("cell", 24, count=3),
    Word("t", 24, signed=True),
)
CONSTANTS: dict[str, Any] = {"table": [3, -1, 4, 1, -5, 9, 2, 6, 5, 3, 5], "edges": [[0, 1], [1, 2], [2, 0]]}
SCOPE = Scope({word.name: word for word in WORDS}, CONSTANTS)
BITS = 300


def check(text: str, seed: int) -> None:
    """The network gives what the reference says at 64 inputs, and fails where it does."""
    expression = parse(text, SCOPE)
    spec = Spec(WORDS, Outputs((Output("f", text, bits=BITS),)), constants=CONSTANTS)
    found = elaborate(spec)
    indices = some_inputs(WORDS, seed)
    values = run(found.function.values, indices)
    fails = [any(parts) for parts in zip(*(run(one.network, indices) for one in found.checks), strict=True)]
    for sample, index in enumerate(indices):
        words = at(WORDS, index)
        try:
            wanted = int(evaluate(expression, words)) % (1 << BITS)
        except ExpressionError:
            wanted = None
        if wanted is None:
            assert fails, (text, words)
            assert fails[sample], (text, words)
        else:
            assert not (fails and fails[sample]), (text, words)
            assert values[sample] == wanted, (text, words)


@st.composite
def wide(draw: Callable[..., Any], depth: int = 3) -> str:
    """An expression whose operations are not too wide to be built quickly."""
    if depth == 0:
        words = ["x", "y", "s", "t", "n", "cell[0]", "cell[n % 3]", "x[n]", "y[8:40]", "s[3:]"]
        return draw(st.sampled_from([*words, "7", "2**40 + 1", "-3", "1000"]))
    one, other = draw(wide(depth - 1)), draw(wide(draw(st.integers(0, depth - 1))))
    return draw(
        st.sampled_from(
            [
                f"({one} + {other})",
                f"({one} - {other})",
                f"({one} & {other})",
                f"({one} | {other})",
                f"({one} ^ {other})",
                f"(({one}) % 2**32 * ({other}) % 2**32)",
                f"({one}) // 10",
                f"({one}) % 1000",
                f"({one}) % -96",
                f"({one}) // -7",
                f"(({one}) % 2**40 // (({other}) % 2**20))",
                f"(({one}) % (({other}) % 2**20 - 2**19))",
                f"(({one}) >> n)",
                f"((({one}) % 2**40) << n)",
                f"({one} if {other} else {one} + 1)",
                f"({one} < {other})",
                f"({one} == {other} or {one} > 5)",
                f"({one} >= {other} and {other})",
                f"min({one}, {other})",
                f"max({one}, {other}, 3)",
                f"abs({one})",
                f"(~({one}))",
                f"(not {one})",
                f"popcount(abs({one}))",
                f"parity(abs({one}))",
                f"sum(c{depth} * 3 - {other} for c{depth} in cell if c{depth} != {one})",
                f"table[({one}) % 11]",
                f"(({one}) in [1, 5, 2**30, 77, 1000])",
                f"(({one}) % 256) ** 3",
                f"pow(({one}), 5, 1009)",
                f"distinct({one}, {other}, n)",
            ]
        )
    )


@settings(max_examples=40)
@given(wide(), st.integers(0, 2**32))
@example("x * y + s * t", 1)
@example("x // y", 2)
@example("s % t", 3)
@example("s // t", 4)
@example("(x + y) % 2**64 == 12345678901234567890", 5)
@example("x << (n + 100)", 6)
@example("all(cell[i] != cell[j] for i, j in edges)", 7)
@example("sum(x[i] for i in range(64)) >= 20", 8)
@example("pow(x, 65537, 2**31 - 1)", 9)
@example("pow(t, -1, 1009)", 10)
@example("t ** (n % 4) - cell[0] ** 2", 11)
@example("(x << n | x >> (64 - n)) % 2**64 + (x >> n + 1 ^ x << (64 - (n + 1))) % 2**64 * 2**70", 13)
@example("(cell[0] >> n) + (cell[0] << (24 - n)) & 0xFFFFFF", 14)
@example("((t >> n % 9) + (t << (24 - n % 9)) & 0xFFFFFF) + (x << n | x >> (63 - n)) % 2**64", 15)
@example("x // 2**63 - (x % 3) * (y // 641)", 12)
def test_samples_are_what_the_reference_says(text: str, seed: int) -> None:
    check(text, seed)


@pytest.mark.parametrize(
    "divisor", [3, 5, 7, 9, 10, 11, 12, 13, 60, 100, 127, 255, 641, 1000, 65537, 2**31 - 1]
)
def test_constant_divisors_of_either_sign(divisor: int) -> None:
    check(f"x // {divisor} + (x % {divisor}) * 2**70 + (s // {divisor}) * 2**150", divisor)
    check(f"s % {divisor} + (x // -{divisor}) * 2**70 + (s % -{divisor}) * 2**150 + t % {divisor}", divisor)
