"""From a spec to its function as a network, at any width."""

from __future__ import annotations

from revsynth.elaborate.covers import cover_literals
from revsynth.elaborate.explain import OfCover
from revsynth.elaborate.expressions import Expressions
from revsynth.elaborate.formulas import formula_literal
from revsynth.elaborate.linear import modulo_power, plain
from revsynth.elaborate.map_steps import stepped_map
from revsynth.elaborate.model import Check, Elaboration
from revsynth.elaborate.modular_maps import modular_program
from revsynth.elaborate.numbers import pattern_of
from revsynth.elaborate.stepped import elaborate_steps
from revsynth.elaborate.tables import listed_literals
from revsynth.errors import SpecError
from revsynth.logic.in_place_program import after
from revsynth.logic.network import FALSE, TRUE, Literal, Network
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.logic.network_function import NetworkFunction
from revsynth.spec.formula import parse_formula
from revsynth.spec.images import register_of
from revsynth.spec.limits import MAX_INPUT_BITS
from revsynth.spec.model import Cover, Outputs, Permutation, Predicate, Spec, Word
from revsynth.spec.netlist import Netlist
from revsynth.spec.output_words import resolve_width, tabulate
from revsynth.spec.over_domain import OverDomain
from revsynth.spec.pla import OUTPUT_WORD
from revsynth.spec.wide import wide_outputs


def elaborate(spec: Spec, outputs: tuple[Word, ...] | None = None) -> Elaboration:
    """The function of a spec as a network over its input bits, bit i of the combined index as input i.

    `outputs` are the output words with their bits, where they are known already; otherwise a width that is
    left out is worked out up to MAX_INPUT_BITS input bits, and refused beyond. Raises SpecError for what is
    wrong whatever the input is: words without a width, tables of the wrong length, a domain that is empty by
    its structure, networks of too many gates; ExpressionError where an expression is not allowed.
    """
    if isinstance(spec.body, Permutation) and spec.body.steps is not None:
        return _stepped(spec)
    return _Elaborator(spec, outputs).elaborate()


def _stepped(spec: Spec) -> Elaboration:
    """Steps, and their function as one network over the bits at the start."""
    stepped = elaborate_steps(spec)
    if stepped.domain is not None and stepped.domain.outputs[0] == FALSE:
        raise _empty_domain(spec)
    builder = NetworkBuilder(spec.input_bits)
    bits = after(stepped.program, builder, [builder.input(place) for place in range(spec.input_bits)])
    function = NetworkFunction(builder.build(bits), stepped.domain)
    return Elaboration(function, spec.inputs, stepped.checks, stepped.warnings, stepped.program)


def _empty_domain(spec: Spec) -> SpecError:
    return SpecError(
        "no input satisfies it: a domain needs at least one", source=spec.source, place="[domain] where"
    )


class _Elaborator:
    def __init__(self, spec: Spec, outputs: tuple[Word, ...] | None) -> None:
        self.spec = spec
        self.outputs = outputs
        self.builder = NetworkBuilder(spec.input_bits)
        self.expressions = Expressions(spec, self.builder)
        self.checks: list[Check] = []

    def elaborate(self) -> Elaboration:
        """All of it."""
        spec, builder = self.spec, self.builder
        if spec.domain is not None:
            domain = self.expressions.condition(spec.domain, "[domain] where")
            if domain == FALSE:
                raise _empty_domain(spec)
            self.expressions.domain = domain
        body = spec.body
        if isinstance(body, Predicate):
            values, care = self._predicate(body)
            words: tuple[Word, ...] = ()
        elif isinstance(body, Outputs):
            words = self._output_words()
            values, care = self._outputs(body, words)
        else:
            words = spec.inputs
            values, care = self._permutation(body)
        care = builder.and_(care, self.expressions.domain)
        function = NetworkFunction(builder.build(values), None if care == TRUE else builder.build([care]))
        checks = (*self.expressions.checks(), *self.checks)
        program = None
        if isinstance(body, Permutation) and body.map is not None:
            program = modular_program(spec, body.map) or stepped_map(spec, body.map)
        return Elaboration(function, words, checks, tuple(self.expressions.warnings), program)

    def _predicate(self, body: Predicate) -> tuple[list[Literal], Literal]:
        if body.where is not None:
            return [self.expressions.condition(body.where, "[predicate] where")], TRUE
        if body.table is not None:
            return self._listed(body.table, 1, "[predicate] table")
        if body.cover is not None:
            return self._cover(body.cover)
        if body.clauses is not None:
            from revsynth.elaborate.clauses import clause_networks

            return self._copied(clause_networks(body.clauses)[0][1]), TRUE
        if body.netlist is not None:
            return self._netlist(body.netlist), TRUE
        place = "[predicate] formula"
        formula = parse_formula(body.formula or "", self.spec.inputs, source=self.spec.source, place=place)
        return [formula_literal(self.builder, formula)], TRUE

    def _output_words(self) -> tuple[Word, ...]:
        """The output words with their bits."""
        if self.outputs is not None:
            return self.outputs
        if self.spec.input_bits > MAX_INPUT_BITS:
            return wide_outputs(self.spec)
        body = self.spec.body
        assert isinstance(body, Outputs)
        if body.cover is not None:
            return (Word(OUTPUT_WORD, body.cover.outputs),)
        if all(output.bits is not None for output in body.words):
            return tuple(Word(output.name, output.bits or 1, output.signed) for output in body.words)
        over = OverDomain(self.spec)
        return tuple(resolve_width(tabulate(output, over), over) for output in body.words)

    def _outputs(self, body: Outputs, words: tuple[Word, ...]) -> tuple[list[Literal], Literal]:
        if body.cover is not None:
            return self._cover(body.cover)
        if body.netlist is not None:
            return self._netlist(body.netlist), TRUE
        values: list[Literal] = []
        cares: list[Literal] = []
        for output, word in zip(body.words, words, strict=True):
            if output.value is not None:
                place = f"[outputs] {output.name} value"
                values += self._low_bits(output.value, place, word)
                cares.append(TRUE)
            else:
                place = f"[outputs] {output.name} table"
                found, care = self._listed(output.table or (), word.bits, place)
                values += found
                cares.append(care)
        return values, self.builder.any_of(cares)

    def _low_bits(self, text: str, place: str, word: Word) -> list[Literal]:
        _, number = self.expressions.number(text, place)
        kept = plain(self.builder, modulo_power(self.builder, number, word.bits))
        return pattern_of(kept, word.bits)

    def _permutation(self, body: Permutation) -> tuple[list[Literal], Literal]:
        size = self.spec.input_bits
        if body.values is not None:
            return self._listed(body.values, size, "[permutation] values")
        values = [self.builder.input(place) for place in range(size)]
        for name, text in (body.map or {}).items():
            shift, word = register_of(self.spec, name)
            number = self.expressions.word(text, f"[permutation] map {name}", name, word)
            kept = plain(self.builder, modulo_power(self.builder, number, word.bits))
            values[shift : shift + word.bits] = pattern_of(kept, word.bits)
        return values, TRUE

    def _listed(
        self, entries: tuple[int | None, ...], bits: int, place: str
    ) -> tuple[list[Literal], Literal]:
        return listed_literals(self.builder, entries, bits, self.spec.source, place)

    def _cover(self, cover: Cover) -> tuple[list[Literal], Literal]:
        found = cover_literals(self.builder, cover)
        if found.both != FALSE:
            message = f"{self.spec.source}: an output is both on and off: on and off rows may not overlap"
            network = self.builder.build([found.both])
            self.checks.append(Check(network, message, OfCover(cover, self.spec.source)))
        return found.on, self.builder.any_of(found.care)

    def _netlist(self, netlist: Netlist) -> list[Literal]:
        from revsynth.elaborate.netlists import netlist_network

        return self._copied(netlist_network(netlist))

    def _copied(self, network: Network) -> list[Literal]:
        return self.builder.copy(network, [self.builder.input(place) for place in range(self.builder.inputs)])
