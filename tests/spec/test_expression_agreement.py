"""Both evaluators against each other, and against Python's own eval as the outside reference."""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import Any
from unittest.mock import patch

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.errors import ExpressionError
from revsynth.spec import lanes, vector
from revsynth.spec.expression import Scope, parse
from revsynth.spec.layout import decode
from revsynth.spec.reference import evaluate
from revsynth.spec.vector import evaluate_all
from tests.spec.agreement import INPUTS, answers, check
from tests.spec.random_expressions import CONSTANTS, SCOPE, WORDS, Text, expressions

EVERY = np.ones(INPUTS, dtype=np.bool_)


@given(expressions())
def test_all_three_agree_for_every_input(text: Text) -> None:
    check(text, EVERY)


@given(expressions(), st.integers(0, 2**32 - 1), st.sampled_from([0.5, 0.1, 0.02]))
def test_all_three_agree_on_some_inputs(text: Text, seed: int, share: float) -> None:
    check(text, np.random.default_rng(seed).random(INPUTS) < share)


@given(expressions(), st.sampled_from([(1, 1), (1, 2), (10**9, 1)]), st.sampled_from([64, 256]))
def test_all_three_agree_however_inputs_are_packed(text: Text, packing: tuple[int, int], chunk: int) -> None:
    small, dense = packing
    with (
        patch.object(lanes, "_SMALL", small),
        patch.object(lanes, "_DENSE", dense),
        patch.object(vector, "_CHUNK", chunk),
    ):
        check(text, EVERY)


OPERANDS = (
    "a",
    "k",
    "cell",
    "edges",
    "table",
    "ragged",
    "mixed",
    "i1",
    "0",
    "-1",
    "2**63",
    "cell[0]",
    "a[0]",
    "[]",
)
OPERANDS += (
    "[1, 2]",
    "(a, k)",
    "edges[0]",
    "[k]",
    "range(a)",
    "[c for c in cell if c]",
    "mixed[1]",
    "sum",
    "",
)
OPERATORS = (
    "+",
    "-",
    "*",
    "//",
    "%",
    "**",
    "<<",
    ">>",
    "&",
    "|",
    "^",
    "==",
    "!=",
    "<",
    " in ",
    " not in ",
    " and ",
    "/",
)
FUNCTIONS = (
    "sum",
    "min",
    "max",
    "any",
    "all",
    "len",
    "range",
    "popcount",
    "parity",
    "distinct",
    "pow",
    "abs",
    "",
)


@st.composite
def damaged(draw: Callable[..., Any]) -> str:
    """An expression with some of its operands, operators and functions replaced."""
    tokens = re.findall(r"\w+|\*\*|//|<<|>>|[<>=!]=|\S|\s+", draw(expressions(3))[0])
    places = [place for place, token in enumerate(tokens) if re.match(r"[^\s()\[\],]", token)]
    for place in draw(st.lists(st.sampled_from(places), min_size=1, max_size=3)):
        token = tokens[place]
        others = FUNCTIONS if token in FUNCTIONS else OPERANDS if re.match(r"\w", token) else OPERATORS
        tokens[place] = draw(st.sampled_from(others))
    return "".join(tokens)


@given(damaged())
def test_damaged_expressions_are_refused_or_evaluated_alike(text: str) -> None:
    scope = Scope(SCOPE.words, {**CONSTANTS, "mixed": [2, [0, 1, 2]]})
    try:
        expression = parse(text, scope)
    except ExpressionError:
        return
    own, failure = answers(lambda index: evaluate(expression, decode(WORDS, index)), EVERY)
    if failure is None:
        assert evaluate_all(expression).tolist() == own
        return
    with pytest.raises(ExpressionError, match=f"^{re.escape(str(failure[1]))}$"):
        evaluate_all(expression)


@pytest.mark.parametrize(
    "text", ["12 // a", "table[a]", "a << k", "1 if a < 4 else a[a]", "a // (k - 5 // a)"]
)
def test_the_first_failing_input_is_named(text: str) -> None:
    expression = parse(text, SCOPE)
    _, failure = answers(lambda index: evaluate(expression, decode(WORDS, index)), EVERY)
    assert failure is not None
    with pytest.raises(ExpressionError) as caught:
        evaluate_all(expression)
    named = ", ".join(f"{name} = {value}" for name, value in decode(WORDS, failure[0]).items())
    assert f" at {named}" in str(caught.value)


CHOSEN = """
a + k
a * k == 12 and all(cell[i] != cell[1 - i] for i in range(2))
a != 0 and 12 // a == 3
a // k if k else 5
a << (k if k > 0 else 0)                        :: shift(a, (k if k > 0 else 0))
a >> (k & 1)
pow(a, 40)                                      :: power(a, 40)
pow(a, k, 7)
pow(3, a, k - 1 or 5)
pow(a, 3, k or 9)
pow(a, -1, 11) if a else 0
pow(3, -a, 7 * (k or 1))
pow(3, a * 1000, 2**40)
pow(a + 2**62, 2, 2**62 + 1)
pow(a + 2**33, 3, 2**33 - 9)
pow(a, k & 3, -11)
(a << 70) * k >> 70
((a + 1) << 59) * 3 // 3 == (a + 1) << 59
(a << 60) + (a << 60)
(a - 2) << 62
(k << 62) << 1
(a + 1 << 61) ^ -1
~a == 5
~(a > 3) + (k < 0) * 2                          :: ~int(a > 3) + (k < 0) * 2
-(a > 3) + +(k < 0)
k and a or cell[0]
not a
True + (a > 3)
a ** a ** 2                                     :: power(a, power(a, 2))
(-a) ** (k & 3)
2 ** (k & 3) * 3 ** a
a in [1, 2, 3] or k not in table
a in table
a * 2**61 in big
a - 1 in [10, 11, 12, 13, 14, 15, 16, 17, 18, 19]
a * a in [0, 1, 4, 2**70, -5, 36, 49, 50, 2, 3]
(a << 62) in [0, 1, 2**62, 2**70, 2**64, 2, 3, 4, 5, 6, 7, 8]
table[k]
table[a]
table[-a]
big[a % 3] + 1
big[a % 3] // (k or 1)
big[1] // (-1 if a else 1)
(big[1] + 0 * a) % (-1 if k else 5)
(big[1] + a) % (k or -1)
(big[1] + a) // (k or -1)
abs(big[1] + a)
-(big[1] + a)
~(big[1] + a)
(big[1] + a) - 1
min(big[1] + a, k, big[0])
max(big[a % 3], 2**63 - 1)
(big[0] - 1 - a) + 1
big[0] - 1 < big[0] + a
[a, 2**64 + 1][k & 1] == big[2]
(big[a % 3] if k else a) > 2**63
(a if k else True) + 2**62 * 2
big[a % 3] & 255 | k ^ big[0]
big[a % 3] >> (a * 30)
big[a % 3] >> (2 ** 40 + a)
k >> (2 ** 70 + a)
a << (2 ** 12) if a == 0 else 0                 :: shift(a, 2 ** 12) if a == 0 else 0
a << (a * 2000)                                 :: shift(a, a * 2000)
(a + 2) ** (a * 1000)                           :: power(a + 2, a * 1000)
(a - 1 if a < 3 else 0) ** (10 ** 6)            :: power(a - 1 if a < 3 else 0, 10 ** 6)
(a << 2050) * (a << 2050)                       :: product(a << 2050, a << 2050)
(a << 2045) * (a << 2045)                       :: product(a << 2045, a << 2045)
(a + 1) ** 1400                                 :: power(a + 1, 1400)
(a & 1) * 2 ** 4095 + 2 ** 4095
-(2 ** 4095) * (a & 3)                          :: product(-(2 ** 4095), a & 3)
3 ** (a + 2580)                                 :: power(3, a + 2580)
(-2) ** (a + 4090)                              :: power(-2, a + 4090)
ragged[a % 3] == [2, 3]
ragged[a % 3] != ragged[k]
[a, cell[0]] in edges
[a, k] == [3, cell[1]]
[[a], [k, 1]] == [[2], [1, cell[0]]]
(a, k) == (1, 1) or (a, k) in [(2, 1), (3, cell[0])]
[c for c in cell if c > k] == [c for c in cell if c < a]
[2, 3] in ragged and [c for c in cell] in ragged
len(ragged[a % 3])
sum(ragged[a % 3])
edges[k][0]
edges[a % 3][k]
sum(edges[a % 3], k)
[c for c in cell if c > 1][0]
[c for c in cell if c > k][-1]
[c for c in cell if c > a][k]
[c for c in cell if c > a][-1] if any(c > a for c in cell) else 9
[[c, k] for c in cell if c != a][0][1]
min(c for c in cell if c >= k)
max(c for c in cell if c >= a)
max([]) if a > 9 else 3
max(cell) - min(cell)
min(range(k, a)) if k < a else 0
sum(c for c in cell if c != k)
sum([c * i for c in cell for i in range(a) if i & 1], k)
sum(c > k for c in cell if c)
all(a % d for d in range(2, a))
any(12 // c == 4 for c in cell)
any([12 // c == 4 for c in cell])
all(12 // c == 4 for c in cell)
all([12 // c == 4 for c in cell])
any(12 // c for c in [1, k, 0])
any([12 // c for c in [1, k, 0]])
all(c and a // c for c in cell)
any(cell) + all(cell) * 2 + any([]) * 4 + all([]) * 8
any(any(x == a for x in range(k)) for _ in cell)
all(all(cell[i] <= cell[j] for j in range(2) if j >= i) for i in range(2))
distinct(a, k, cell[0])
distinct(cell)
distinct([c for c in cell if c > k])
distinct(a, k, cell[0], cell[1], 9, 10, 11)
distinct([a, k, cell[0], cell[1], 2**64, 10, 11])
distinct([a, k, cell[0], cell[1], 9, 10, 11, a + 12])
distinct(table) + distinct(edges[k & 1])
distinct(i * k for i in range(4))
popcount(k) + parity(a) + popcount(a * a)       :: ones(k, 2) + ones(a, 3) % 2 + ones(a * a)
popcount(big[a % 3])                            :: ones(big[a % 3])
popcount((big[0] + a) if k else 3)              :: ones((big[0] + a) if k else 3)
parity(2 ** 70 - a)                             :: ones(2 ** 70 - a) % 2
sum(popcount(c) for c in cell)                  :: sum(ones(c, 2) for c in cell)
popcount(k if a else k)                         :: ones(k if a else k, 2)
popcount(k if a else -1)                        :: ones(k if a else -1)
a[k]                                            :: bit(a, k, 3)
a[cell[0]]                                      :: bit(a, cell[0], 3)
a[2**70 if a > 6 else 1]                        :: bit(a, 2**70 if a > 6 else 1, 3)
k[0] * 2 + k[1]                                 :: bit(k, 0, 2) * 2 + bit(k, 1, 2)
a[0] & ~a[1] | k[0]                             :: bit(a, 0, 3) & ~bit(a, 1, 3) | bit(k, 0, 2)
a[cell[0]:3]                                    :: bits(a, cell[0], 3, 3)
a[:a]                                           :: bits(a, 0, a, 3)
a[k:cell[1]]                                    :: bits(a, k, cell[1], 3)
a[1:3] == cell[0]                               :: bits(a, 1, 3, 3) == cell[0]
a[2:] + a[:2] + a[:] + a[1:1]                   :: bits(a, 2, 3, 3) + bits(a, 0, 2, 3) + a + 0
k[:]                                            :: bits(k, 0, 2, 2)
cell[a & 1][1]                                  :: bit(cell[a & 1], 1, 2)
sum(c[1] for c in cell)                         :: sum(bit(c, 1, 2) for c in cell)
(a if k else a)[1]                              :: bit(a, 1, 3)
[a, a][k][2]                                    :: bit([a, a][k], 2, 3)
sum(a[i] * 4 // 2 ** i for i in range(3))       :: sum(bit(a, i, 3) * 4 // 2 ** i for i in range(3))
sum(a[i:i + 2] for i in range(2))               :: sum(bits(a, i, i + 2, 3) for i in range(2))
len([c for c in cell if c])
len(range(a, 10, 3)) + len(range(10, a, k - 3)) * 100
len(range(a, 10, k))
a in range(k, 9, 2)
a in range(9, k, k - 3)
a in range(2, 7, 2) or k in range(1, -9, -3)
sum(range(a, 0, -3))
sum(i * i for i in range(a, k, -1 if k < a else 1))
range(3, a)[1]
range(a)[k]
range(a, k, -2)[-1]
sum(i * j for i, j in edges)
sum(i * j for i, j in ragged)
sum(x for x, y in [[1, 2], [a, k]])
sum(x for x, y in [ragged[a % 3]])
sum(x - y for x, y in [[c for c in cell if c >= k]])
sum(x - y for [x, y] in [edges[a % 3], cell])
sum(x[0] for x in [cell, edges[a % 3]] if x[0] != a)
sum(_ for _, j in edges if j) + sum(j for _, j in edges)
(edges[0] if a & 1 else cell)[0]
(ragged[a % 3] if k else cell)[-1]
len(table if k else ragged[2])
len(range(a) if k > 0 else range(3, 3 + k * k))
sum(i for i in (table if k else range(a)))
sum(i for i in ([] if a < 2 else [k, a] if k else cell))
1 < a < cell[0] < 5 != k
0 <= a < 12 // (a - 3) or k
a < 3 < 12 // k
a < k in [1, 2]
a > 2 and (a + 200 if k == 0 else a + 210) in [201, 203, 204, 205, 206, 207, 210, 211, 212, 215]
a if a else k if k > 0 else cell[0]
[i for i in range(5) if i != a][k]
a - 3 if a >= 3 else 3 - a
(k < 1) and any(i for i in range(10**4 // (k - 1)))
len(range(10**5 * 5 ** (0 if k else k - 1))) :: len(range(10**5 * power(5, 0 if k else k - 1)))
10**30 // (k - 1)
flags[a & 1] + flags[k]
flags[a & 1] and k
3
True
2**70 if a else 2**71
"""


@pytest.mark.parametrize("line", CHOSEN.strip().splitlines())
def test_all_three_agree_on_chosen_expressions(line: str) -> None:
    ours, _, outside = (part.strip() for part in line.partition("::"))
    check((ours, outside or ours), EVERY)


@pytest.mark.parametrize("line", CHOSEN.strip().splitlines())
def test_chosen_expressions_agree_however_inputs_are_packed(line: str) -> None:
    ours, _, outside = (part.strip() for part in line.partition("::"))
    for dense in (1, 2):
        with (
            patch.object(lanes, "_SMALL", 1),
            patch.object(lanes, "_DENSE", dense),
            patch.object(vector, "_CHUNK", 128),
        ):
            check((ours, outside or ours), EVERY)
