"""Every reason for which an expression is refused, with expressions that show it.

One table makes the messages and tests them: each `examples` entry is refused for that very reason in
the scope  a = 4 bits, k = 3 bits signed, cell = 5 words of 2 bits,
edges = [[0, 1], [1, 2], [2, 4]], table = [3, 1, 4, 1, 5], mixed = [3, [1, 2]], empty = [],
broken = 1.5 (a float, so no constant), huge = [2**5000].
Fields in braces are filled where the refusal is made: `{text}` is the part of the expression at fault,
`{at}` the input at which an operation is undefined.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Refusal:
    """A message with fields in braces, and expressions that must be refused with it."""

    message: str
    examples: tuple[str, ...]


# --- the text cannot be read ---------------------------------------------------------------------

EMPTY = Refusal(
    "the expression is empty; write one such as a + 3 or a == 3", ("", "   ", "\n \n", "# nothing\n")
)
TOO_LONG = Refusal(
    "the expression has {length} characters; at most {limit} are allowed", ("a + " * 30_000 + "a",)
)
TOO_DEEP = Refusal(
    "the expression is nested more than {limit} levels deep, or has thousands of operators in a row; "
    "split it up",
    (
        "~" * 101 + "a",
        "-" * 20_000 + "a",
        "not " * 3000 + "a",
        "(" * 150 + "a" + ")" * 150,
        "a + (" * 101 + "a" + ")" * 101,
        "1 if a else " * 120 + "2",
        "a ** " * 3000 + "a",
        "a + " * 20_000 + "a",
    ),
)
NOT_ASCII = Refusal(
    "the character {text!r} is not allowed{hint}", ("a \u2260 3", "\u00e9 == 1", "a \u00d7 2", "\uff41 == 1")
)
QUOTE = Refusal(
    "text in quotes is not allowed; write numbers, such as 5 or 0b101",
    ("a == '5'", 'a == "5"', "f'{a}'", "b'5'"),
)
BRACKET_OPEN = Refusal("{text!r} is never closed", ("(a", "cell[0", "a + (k * (a + 1)", "(a]"))
BRACKET_CLOSE = Refusal("{text!r} closes nothing", ("a)", "a) + (k", "cell]", "a}"))
SYNTAX = Refusal(
    "this is not an expression ({reason}){hint}",
    (
        "a +",
        "a = 3",
        "a && k",
        "a || k",
        "!a",
        "a b",
        "a <> 3",
        "a ? 1 : 0",
        "3a",
        "a; k",
        "if a: k",
        "a => k",
        "0b12",
        "a\x00",
        "9" * 5000,
        "return a",
        "*cell",
        "for i in edges",
        "a += 1",
        "import a",
        "\ud800",
    ),
)

# --- parts that the language does not have -------------------------------------------------------

FLOAT = Refusal(
    "{text} is not an integer; expressions are over whole numbers", ("a == 1.5", "a * 1e3", "a == 2j")
)
LITERAL = Refusal(
    "{text} is no number; literals are integers, True and False", ("a == None", "a if ... else 1")
)
HUGE_LITERAL = Refusal("a literal of {bits} bits; at most {limit} are allowed", ("a == 0x1" + "0" * 1200,))
TRUE_DIVISION = Refusal("/ gives fractions; write // for whole numbers", ("a / 2 == 1", "1 + a / k"))
MATRIX_PRODUCT = Refusal("@ is not an operator here; write * for products", ("a @ k",))
IDENTITY = Refusal(
    "'is' compares objects, not numbers; write == or !=", ("a is 3", "a is not 3", "a < 1 is True")
)
ATTRIBUTE = Refusal(
    "{text} has a dot; there are no attributes or methods here",
    ("a.real", "cell.count(1)", "(3).bit_length()"),
)
LAMBDA = Refusal("lambda is not allowed; write the expression itself", ("lambda x: x", "(lambda: a)()"))
WALRUS = Refusal("':=' is not allowed; write == to compare", ("(a := 3)", "a := 3"))
STARRED = Refusal(
    "a starred part is not allowed; name the parts or pass the list itself",
    ("distinct(*cell)", "sum([*cell])", "min(*cell, a)"),
)
DICTIONARY = Refusal(
    "braces are not allowed; write a list in square brackets",
    ("a in {1, 2}", "len({})", "a in {x for x in cell}", "{x: 1 for x in cell}", "len({1: 2})"),
)
AWAIT = Refusal("await and async are not allowed", ("await a", "sum(x async for x in cell)"))
YIELD = Refusal("yield is not allowed", ("(yield a)", "(yield from cell)"))
OTHER = Refusal("{text} is not allowed here", ("a[0:1, 2]", "sum([1 for i in cell[0:1, 1]])"))
KEYWORD = Refusal(
    "{name}() takes no named argument '{argument}'; pass values by position only",
    ("sum(cell, start=1)", "max(cell, key=abs)", "min(cell, default=0)", "min(**a)"),
)
CALL = Refusal(
    "only functions can be called; the functions are {functions}",
    (
        "a(3)",
        "cell(0)",
        "table[0](1)",
        "foo(a)",
        "int(a)",
        "eval(1)",
        "__import__(1)",
        "Xor(a, k)",
        "a(3)(4)",
    ),
)
ARITY = Refusal(
    "{name}() takes {wanted}, not {given}",
    (
        "abs()",
        "abs(a, k)",
        "pow(a)",
        "pow(a, 2, 3, 4)",
        "len()",
        "sum(cell, 1, 2)",
        "range() == 1",
        "min()",
        "any(a, k)",
        "distinct()",
        "popcount(a, k)",
        "parity()",
        "all()",
        "range(1, 2, 3, 4) == 1",
    ),
)
UNCALLED = Refusal("{name} is a function; write {name}(...)", ("abs", "a + min", "len == 3"))
UNKNOWN_NAME = Refusal(
    "there is no name '{name}'; the names here are {names}", ("b", "a + A", "cell[i]", "pi", "Xor")
)
CONSTANT = Refusal(
    "the constant '{name}' must be an integer of at most {limit} bits, a truth value, or a list of them",
    ("broken + a", "len(huge)"),
)
SHADOW = Refusal(
    "the loop variable '{name}' hides {what} of that name; choose another name",
    (
        "sum(a for a in cell)",
        "sum(1 for cell in edges)",
        "sum(1 for i, i in edges)",
        "sum(1 for table in cell)",
        "sum(i for i in cell for i in cell)",
        "any(any(i for i in cell) for i in cell)",
        "sum(abs for abs in cell)",
    ),
)
LOOP_NAME = Refusal(
    "'{name}' cannot be a loop variable: {why}", ("sum(_x for _x in cell)", "sum(1 for __ in cell)")
)
LOOP_TARGET = Refusal(
    "{text} cannot be a loop variable; write a name, or names with commas",
    (
        "sum(1 for cell[0] in edges)",
        "sum(1 for (i, (j, k2)) in edges)",
        "sum(1 for *i, j in edges)",
        "sum(1 for () in edges)",
    ),
)

# --- parts that do not fit together --------------------------------------------------------------

NOT_A_NUMBER = Refusal(
    "{text} is a list where a number is wanted; index it, or use sum, min, max, any, all or len",
    (
        "cell + 1",
        "cell",
        "edges and a",
        "not cell",
        "abs(cell)",
        "-edges",
        "a if cell else k",
        "[a, k]",
        "a, k",
        "cell == 3",
        "3 == cell",
        "popcount(cell)",
        "min(cell, 1)",
        "a[cell]",
        "edges[0]",
        "sum(edges)",
        "any(edges)",
        "sum(cell, cell)",
        "cell[0, 1]",
        "distinct(edges[0], edges[1])",
        "[] or 1",
        "range(3)",
    ),
)
NOT_A_LIST = Refusal(
    "{text} is a number where a list is wanted",
    (
        "len(a)",
        "sum(a)",
        "any(a)",
        "a in 3",
        "a not in k",
        "min(a)",
        "max(3)",
        "distinct(a)",
        "sum(x for x in a)",
        "sum(1 for i, j in cell)",
        "len(3)",
        "[x for x in 5] == []",
    ),
)
GENERATOR = Refusal(
    "a comprehension without square brackets goes only into sum, min, max, any, all or distinct; write [...]",
    (
        "len(x for x in cell)",
        "a in (x for x in cell)",
        "sum(y for y in (x for x in cell))",
        "(x for x in cell)",
        "x for x in cell",
        "abs(x for x in cell)",
        "(x for x in cell)[0]",
    ),
)
MIXED = Refusal(
    "{text} is partly a number and partly a list",
    (
        "mixed[a] + 1",
        "sum(mixed)",
        "(a if k else cell) + 1",
        "[a, cell][k]",
        "sum(sum(m) for m in mixed)",
        "3 in mixed",
    ),
)
LIST_COMPARISON = Refusal(
    "lists are compared only by ==, != and in",
    ("cell < [1, 2]", "cell < edges", "[a] >= [k]", "edges[0] > edges[1]"),
)
FORMS = Refusal(
    "a list goes with a list and a tuple with a tuple; write both {left} and {right} as lists [...]",
    (
        "(a, k) in edges",
        "[a, k] == (1, 2)",
        "[0, 1, 2] == range(3)",
        "range(3) == range(3)",
        "range(a) in edges",
    ),
)
NO_BITS = Refusal(
    "{text} has no bits of its own, only a word has; write ({text}) >> i & 1",
    (
        "(a + 1)[0]",
        "table[0][1]",
        "5[0]",
        "(a or k)[0]",
        "min(a, k)[0]",
        "a[0][0]",
        "sum(i[0] for i in range(3))",
        "abs(k)[0:2]",
    ),
)
LIST_SLICE = Refusal(
    "a part of a list is not allowed; write [{text}[i] for i in range(lo, hi)]",
    ("sum(cell[1:3])", "len(table[:2])", "edges[0][:1] == [0]"),
)
SLICE_STEP = Refusal("a step is not allowed in bits x[lo:hi]", ("a[0:4:2]", "a[::1]"))
BIT_RANGE = Refusal(
    "bit {index} of {text} does not exist; it has bits 0 to {last}",
    ("a[4]", "a[-1]", "k[3]", "cell[0][2]", "a[10**9]", "0 and a[7]", "sum(c[2] for c in cell)"),
)
SLICE_RANGE = Refusal(
    "bits {lo}:{hi} of {text} do not exist; 0 <= lo <= hi <= {bits} is wanted",
    ("a[0:5]", "a[2:1]", "a[-1:2]", "a[5:]", "a[:9]", "a[:-1]", "k[1:4]", "cell[0][1:3]"),
)
INDEX_RANGE = Refusal(
    "item {index} of {text} does not exist; it has {length}",
    ("cell[5]", "table[5]", "table[-6]", "edges[0][2]", "empty[0]", "[a, k][2]", "edges[3][0]"),
)
UNPACK = Refusal(
    "{text} cannot take the {given} of each list apart; {wanted} wanted",
    ("sum(i for i, j, k2 in edges)", "sum(i for (i,) in edges)", "sum(i for i, j in [[1, 2, 3]])"),
)
TOO_MANY_STEPS = Refusal(
    "this may take {steps} steps for one input; at most {limit} are allowed",
    (
        "sum(i for i in range(10**6))",
        "sum(1 for i in range(1000) for j in range(1000))",
        "a in range(10**9)",
        "len(range(a ** 40))",
        "sum(sum(range(1000)) for i in range(1000))",
        "any(a == i for i in range(2**18))",
        "sum(range(10**30))",
        "sum([[1 for i in range(700)][0] for j in range(700)])",
    ),
)

# --- undefined where an input reaches it ---------------------------------------------------------

DIVISION = Refusal(
    "division by zero{at}; guard it as in x != 0 and 12 // x == 3, or leave such inputs out of [domain]",
    ("1 // 0", "12 // a", "a % (a - 3)", "a != 0 or 12 // a", "sum(12 // c for c in cell)"),
)
NEGATIVE_SHIFT = Refusal(
    "negative shift count {count}{at}; counts are 0 or more",
    ("1 << -1", "a >> k", "a << k", "a >> (a - 5)", "0 << -1"),
)
NEGATIVE_EXPONENT = Refusal(
    "negative exponent {count}{at}; exponents are 0 or more",
    ("2 ** -1", "a ** k", "pow(a, k)", "pow(2, a - 1)", "0 ** -1"),
)
TOO_LARGE = Refusal(
    "the result would have more than {limit} bits{at}; for powers modulo m use pow(x, k, m)",
    (
        "a ** 10**9",
        "1 << 10**9",
        "a << 2**40",
        "2 ** (1 << 14)",
        "(a << 4000) * (a << 4000)",
        "2 ** 10**30",
        "(a + 2) ** (a * 1000)",
    ),
)
MODULUS = Refusal("pow() modulo zero{at}; a modulus is not 0", ("pow(a, 2, 0)", "pow(2, k, a)"))
NO_INVERSE = Refusal(
    "{base} has no inverse modulo {modulus}{at}; a negative exponent needs one",
    ("pow(a, -1, 6)", "pow(2, -1, 4)", "pow(a, k, 15)"),
)
NEGATIVE_POPCOUNT = Refusal(
    "{name} of the negative number {value}{at}; only a signed word counts its bit pattern",
    ("popcount(-1)", "parity(k + 0)", "popcount(a - 1)", "popcount(~a)", "parity(1 - a)"),
)
BIT_REACHED = Refusal(
    "bit {index} of a word{at}; it has bits 0 to {last}",
    ("a[k]", "a[a]", "all(a[i] for i in range(5))", "k[a % 4]"),
)
SLICE_REACHED = Refusal(
    "bits {lo}:{hi} of a word{at}; 0 <= lo <= hi <= {bits} is wanted",
    ("a[a:]", "a[:a]", "a[1:k]", "sum(a[i:i + 2] for i in range(4))"),
)
INDEX_REACHED = Refusal(
    "item {index} of a list{at}; it has {length} items, numbered from 0",
    ("cell[a]", "table[a]", "table[k - 2]", "edges[a][0]", "[c for c in cell if c > 9][0]", "[1, a][k]"),
)
UNPACK_REACHED = Refusal(
    "a list of {given}{at}, where {wanted} are taken apart",
    ("sum(i for i, j in [[c for c in cell if c > a], [1, 2]])", "sum(i for i, j in [[1, 2], [3]])"),
)
EMPTY_LIST = Refusal(
    "{name}() of an empty list{at}; give it at least one item",
    ("min([])", "max(empty)", "min(c for c in cell if c > a)"),
)
RANGE_STEP = Refusal(
    "range() with step 0{at}; a step is not 0", ("len(range(1, 4, 0))", "sum(range(0, 8, a))")
)

REFUSALS: dict[str, Refusal] = {
    name: value for name, value in globals().items() if isinstance(value, Refusal)
}
"""Every refusal by its name, in the order above."""
