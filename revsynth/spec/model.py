"""What is wanted: words, constants, a domain, and one of predicate, outputs or permutation.

Bit order: bit 0 of a word is the least significant. The combined index of an input counts the words
in declared order, the first lowest, element 0 of an array first, signed words by their bit pattern.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any, Literal, TypeAlias

from revsynth.spec.netlist import Netlist

Constant: TypeAlias = "int | bool | list[Constant]"


@dataclass(frozen=True)
class Word:
    """An input or output word: `bits` wide, or an array of `count` such words (None: no array)."""

    name: str
    bits: int
    signed: bool = False
    count: int | None = None

    @property
    def total_bits(self) -> int:
        """Bits of the word, or of all words of the array together."""
        return self.bits * (1 if self.count is None else self.count)

    def elements(self) -> Iterator[tuple[str, int]]:
        """Yield (name, bits) a register: `a`, or `cell[0]`, `cell[1]`, ... for an array."""
        if self.count is None:
            yield self.name, self.bits
        else:
            for index in range(self.count):
                yield f"{self.name}[{index}]", self.bits

    def to_json(self) -> dict[str, Any]:
        """Bits, and `signed` and `count` where they are not the usual, as a spec file has them."""
        found: dict[str, Any] = {"bits": self.bits}
        if self.signed:
            found["signed"] = True
        if self.count is not None:
            found["count"] = self.count
        return found


@dataclass(frozen=True)
class Predicate:
    """One output bit. Exactly one of the alternatives is not None.

    `table` holds one entry an input, input 0 first: 0, 1 or None where free. `free_of` says where a netlist
    over the free variables of a CNF comes from.
    """

    where: str | None = None
    formula: str | None = None
    table: tuple[int | None, ...] | None = None
    clauses: Clauses | None = None
    cover: Cover | None = None
    netlist: Netlist | None = None
    free_of: FreeVariables | None = None


@dataclass(frozen=True)
class FreeVariables:
    """What a predicate's netlist over the free variables of a CNF was made from.

    variables: input bit i is variable `variables[i]`; values: the netlist's signal for every variable of the
    CNF, variable i at place i - 1.
    """

    clauses: Clauses
    variables: tuple[int, ...]
    values: tuple[int, ...]


@dataclass(frozen=True)
class Clauses:
    """A CNF: clauses of signed variable numbers; variable i is bit i-1 of the word `v`. XOR clauses apart."""

    variables: int
    clauses: tuple[tuple[int, ...], ...]
    xor_clauses: tuple[tuple[int, ...], ...] = ()


@dataclass(frozen=True)
class Cover:
    """A PLA: rows of (input part, output part), column i of the inputs is bit i of the word `v`.

    Input parts hold '0', '1', '-'; output parts hold '0', '1', '-', '~' with the meaning of `kind`.
    """

    inputs: int
    outputs: int
    kind: Literal["f", "fd", "fr", "fdr"]
    rows: tuple[tuple[str, str], ...]


@dataclass(frozen=True)
class Output:
    """One output word: an expression, or a table of one entry an input (None where free).

    `bits` None means just wide enough over the domain; `signed` None means unsigned.
    """

    name: str
    value: str | None = None
    table: tuple[int | None, ...] | None = None
    bits: int | None = None
    signed: bool = False


@dataclass(frozen=True)
class Outputs:
    """A classical subroutine: output words in declared order, or the bits of a PLA cover (word `f`).

    With a netlist the words say only names and `bits`; its outputs are their bits, the first word lowest.
    """

    words: tuple[Output, ...] = ()
    cover: Cover | None = None
    netlist: Netlist | None = None


@dataclass(frozen=True)
class Permutation:
    """A reversible block in place: images of 0, 1, 2, ... (None: free), new values of words, or steps."""

    values: tuple[int | None, ...] | None = None
    map: Mapping[str, str] | None = None
    steps: tuple[str, ...] | None = None


@dataclass(frozen=True)
class Spec:
    """A whole spec as read; `source` is the base name of its file, for messages and headers."""

    inputs: tuple[Word, ...]
    body: Predicate | Outputs | Permutation
    title: str = ""
    constants: Mapping[str, Constant] = field(default_factory=dict)
    domain: str | None = None
    source: str = "spec"
    from_format: str | None = None
    """The format that `--from` named, where the name of the file does not tell it."""
    labels: Mapping[str, str] = field(default_factory=dict)
    """Names that a file gives to single bits, by ours: `{"v[0]": "lamp"}` (from a PLA's .ilb and .ob)."""

    @property
    def kind(self) -> Literal["predicate", "outputs", "permutation"]:
        """Which of the three sections the spec has."""
        if isinstance(self.body, Predicate):
            return "predicate"
        return "outputs" if isinstance(self.body, Outputs) else "permutation"

    @property
    def input_bits(self) -> int:
        """Number of input bits n; inputs are numbered 0 ... 2**n - 1 by the combined index."""
        return sum(word.total_bits for word in self.inputs)
