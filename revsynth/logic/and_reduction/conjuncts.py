"""Conjunct propagation: in a conjunction every term may assume the terms before it.

Where t_1 t_2 ... is wanted, t_2 only matters where t_1 is 1. A term is a sum over GF(2) of inputs and ANDs
(its form), so that "t_1 is 1" is a linear equation between them: its last signal is replaced by the others in
all later terms. A literal thus becomes a constant, an XOR ties one variable to the rest, an AND that was
asked for is 1 and one that was excluded is 0, wherever they occur. Terms are rewritten one after the other,
each under the equations of the terms as they now stand, so that the product stays the same.
The terms of a care network are assumed likewise, without being computed.
"""

from __future__ import annotations

from revsynth.logic.and_reduction.form_builder import FormBuilder, fits
from revsynth.logic.network import FALSE, TRUE, Literal, Network

MOST_STEPS = 400_000
"""Terms times gates up to which terms are rewritten, where nothing else is said."""


def propagate_conjuncts(
    network: Network, care: Network | None = None, *, most_steps: int = MOST_STEPS
) -> Network:
    """The network, each output that is a conjunction (or its complement) rewritten term by term.

    The outputs are the same wherever `care` is 1. May have more ANDs than before: what outputs shared is
    rewritten for each of them under its own assumptions.
    """
    if not fits(network) or (care is not None and not fits(care)):
        return network
    gates = Gates(network)
    trees = {literal >> 1: gates.conjunction(literal & -2) for literal in gates.outputs}
    terms = sum(len(tree) for tree in trees.values())
    if terms * network.gates > most_steps or (care is None and terms <= len(trees)):
        return network
    rewriting = _Rewriting(network.inputs)
    given = Equations(rewriting.builder)
    if care is not None and not rewriting.assume_care(Gates(care), given):
        return rewriting.builder.build([FALSE] * len(network.outputs))
    made = {node: rewriting.product(gates, tree, given.copy()) for node, tree in trees.items()}
    return rewriting.builder.build([made[o >> 1] ^ (o & 1) for o in gates.outputs])


class Gates:
    """A network in plain lists, and how often each node is read."""

    def __init__(self, network: Network) -> None:
        self.first = 1 + network.inputs
        self.is_xor: list[bool] = network.is_xor.tolist()
        self.left: list[Literal] = network.left.tolist()
        self.right: list[Literal] = network.right.tolist()
        self.outputs: list[Literal] = network.outputs.tolist()
        self.readers = [0] * network.nodes
        for operand in (*self.left, *self.right, *self.outputs):
            self.readers[operand >> 1] += 1

    def conjunction(self, literal: Literal) -> list[Literal]:
        """The terms of an AND tree, fewest ANDs below first; ANDs read elsewhere too stay whole."""
        terms: dict[Literal, None] = {}
        waiting = [literal]
        while waiting:
            top = waiting.pop()
            gate = (top >> 1) - self.first
            whole = top == literal or self.readers[top >> 1] == 1
            if gate < 0 or top & 1 or self.is_xor[gate] or not whole:
                terms[top] = None
            else:
                waiting += [self.left[gate], self.right[gate]]
        if len(terms) == 1:
            return list(terms)
        below = {term: self._ands_below(term >> 1) for term in terms}
        return sorted(terms, key=lambda term: (below[term], term))

    def _ands_below(self, node: int) -> int:
        first, is_xor = self.first, self.is_xor
        return sum(1 for below in self.cone(node) if below >= first and not is_xor[below - first])

    def cone(self, node: int) -> list[int]:
        """The nodes that a node depends on, itself included, ascending; the constant left out."""
        first, left, right = self.first, self.left, self.right
        seen = {0, node}
        waiting = [node]
        while waiting:
            gate = waiting.pop() - first
            if gate < 0:
                continue
            for operand in (left[gate] >> 1, right[gate] >> 1):
                if operand not in seen:
                    seen.add(operand)
                    waiting.append(operand)
        seen.discard(0)
        return sorted(seen)


class Equations:
    """What is assumed: some signals of a builder as sums of signals before them."""

    def __init__(self, builder: FormBuilder) -> None:
        self._builder = builder
        self._tied: dict[int, Literal] = {}
        self._mask = 0

    def copy(self) -> Equations:
        """A copy that can be added to alone."""
        twin = Equations(self._builder)
        twin._tied, twin._mask = dict(self._tied), self._mask
        return twin

    def reduced(self, literal: Literal) -> Literal:
        """The literal without the signals that are tied to others, the last one first."""
        builder = self._builder
        while found := builder.forms[literal >> 1] & self._mask:
            top = found.bit_length() - 1
            literal = builder.xor(builder.without(literal, top), self._tied[top])
        return literal

    def assume(self, literal: Literal) -> bool | None:
        """Adds "this is 1"; True where that was known, False where it cannot be, None otherwise."""
        rest = self.reduced(literal)
        if rest < 2:
            return bool(rest)
        top = self._builder.forms[rest >> 1].bit_length() - 1
        self._tied[top] = self._builder.without(rest, top) ^ 1
        self._mask |= 1 << top
        return None


class _Rewriting:
    def __init__(self, inputs: int) -> None:
        self.builder = FormBuilder(inputs, shortest=True)

    def assume_care(self, care: Gates, equations: Equations) -> bool:
        """Adds the terms of the care network; False where they contradict each other."""
        literal = care.outputs[0]
        if literal < 2:
            return bool(literal)
        terms = care.conjunction(literal) if not literal & 1 else [literal]
        for term in terms:
            value = self._copied(care, term, equations)
            if equations.assume(value) is False:
                return False
        return True

    def product(self, gates: Gates, terms: list[Literal], equations: Equations) -> Literal:
        """The conjunction, every term under the equations of those before it."""
        values = []
        for number, term in enumerate(terms):
            value = self._copied(gates, term, equations)
            # The last term is assumed by none.
            if number < len(terms) - 1:
                known = equations.assume(value)
            else:
                known = {FALSE: False, TRUE: True}.get(value)
            if known is False:
                return FALSE
            if known is None:
                values.append(value)
        return self.builder.all_of(values)

    def _copied(self, gates: Gates, literal: Literal, equations: Equations) -> Literal:
        """A signal of a network, built with every sum reduced by the equations."""
        builder = self.builder
        here: dict[int, Literal] = {0: FALSE}
        for node in gates.cone(literal >> 1):
            gate = node - gates.first
            if gate < 0:
                here[node] = equations.reduced(2 * node)
                continue
            left, right = gates.left[gate], gates.right[gate]
            a, b = here[left >> 1] ^ (left & 1), here[right >> 1] ^ (right & 1)
            if gates.is_xor[gate]:
                here[node] = builder.xor(a, b)
            else:
                here[node] = equations.reduced(builder.and_(a, b))
        return here[literal >> 1] ^ (literal & 1)
