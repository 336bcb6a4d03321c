"""Circuits with fewest ANDs for functions of a few signals, put straight into a builder.

Quadratic functions are brought to a sum of products of independent affine forms (L. E. Dickson, "Linear
groups", 1901): half their rank in ANDs, which is the least. Cubic and quartic functions of up to four inputs
that are affine where some affine form l is 0 become affine + l * (a function of three inputs). What is left
comes from `affine_classes`.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

from revsynth.logic.affine_classes import circuit
from revsynth.logic.and_reduction.form_builder import FormBuilder
from revsynth.logic.network import FALSE, Literal, Network
from revsynth.logic.network_builder import NetworkBuilder

Affine = int
"""A sum of variables: bit 0 the constant, bit 1 + i variable i."""


@dataclass(frozen=True)
class Plan:
    """value = affine + the sum of products + the sum of nested products, an affine form times a plan each.

    variants: other (affine, products) of one cost with the same value, where there is one product.
    """

    affine: Affine
    products: tuple[tuple[Affine, Affine], ...]
    nested: tuple[tuple[Affine, Plan], ...] = ()
    other: Network | None = None
    variants: tuple[tuple[Affine, tuple[tuple[Affine, Affine], ...]], ...] = ()


class CutBuilder(NetworkBuilder):
    """A builder that can be asked for an XOR without making it."""

    def xor_at_hand(self, a: Literal, b: Literal) -> bool:
        """Whether a XOR b is there already."""
        a, b = (a & -2, b & -2) if a < b else (b & -2, a & -2)
        return a << 32 | b in self._xors


def build_function(builder: NetworkBuilder, leaves: Sequence[Literal], table: int) -> Literal:
    """The literal of a function of up to five leaves; bit x of the table: leaf i is bit i of x."""
    return _place(builder, leaves, plan_of(len(leaves), table))


def _place(builder: NetworkBuilder, leaves: Sequence[Literal], plan: Plan) -> Literal:
    if plan.other is not None:
        return builder.copy(plan.other, leaves)[0]
    affine, products = plan.affine, plan.products
    if plan.variants and isinstance(builder, (CutBuilder, FormBuilder)):
        affine, products = min(plan.variants, key=lambda variant: _missing(builder, leaves, variant))
    total = _sum(builder, leaves, affine)
    for one, other in products:
        product = builder.and_(_sum(builder, leaves, one), _sum(builder, leaves, other))
        total = builder.xor(total, product)
    for factor, rest in plan.nested:
        inner = _place(builder, leaves, rest)
        total = builder.xor(total, builder.and_(_sum(builder, leaves, factor), inner))
    return total


def _terms(leaves: Sequence[Literal], affine: Affine) -> list[Literal]:
    return [leaf for i, leaf in enumerate(leaves) if affine >> (1 + i) & 1]


def _missing(
    builder: CutBuilder | FormBuilder,
    leaves: Sequence[Literal],
    variant: tuple[Affine, tuple[tuple[Affine, Affine], ...]],
) -> int:
    """XORs that a variant would add."""
    affine, products = variant
    missing = 0
    for form in (affine, *products[0]):
        terms = _terms(leaves, form)
        missing += max(len(terms) - 1, 0)
        if any(builder.xor_at_hand(a, b) for k, a in enumerate(terms) for b in terms[:k]):
            missing -= 1
    return missing


def _sum(builder: NetworkBuilder, leaves: Sequence[Literal], affine: Affine) -> Literal:
    """The literal of an affine form, beginning with two terms whose XOR is there already."""
    terms = _terms(leaves, affine)
    if len(terms) > 2 and isinstance(builder, (CutBuilder, FormBuilder)):
        for k, a in enumerate(terms):
            partner = next((b for b in terms[:k] if builder.xor_at_hand(a, b)), None)
            if partner is not None:
                terms.remove(a)
                terms.remove(partner)
                terms = [builder.xor(a, partner), *terms]
                break
    total: Literal = FALSE ^ (affine & 1)
    for term in terms:
        total = builder.xor(total, term)
    return total


@lru_cache(maxsize=1 << 16)
def plan_of(inputs: int, table: int) -> Plan:
    """How to build a function of at most five inputs with fewest ANDs."""
    found = _plan(inputs, table)
    return Plan(0, (), (), circuit(inputs, table)) if found is None else found


def _plan(inputs: int, table: int) -> Plan | None:
    form = normal_form(inputs, table)
    degree = max((m.bit_count() for m in range(1 << inputs) if form >> m & 1), default=0)
    if degree <= 2:
        return _quadratic(inputs, form)
    if inputs > 4:
        return None
    if inputs == 3:
        # abc + alpha ab + beta ac + gamma bc is (a + gamma)(b + beta)(c + alpha), up to an affine form.
        a, b, c = 2 | form >> 6 & 1, 4 | form >> 5 & 1, 8 | form >> 3 & 1
        inner = Plan(0, ((b, c),))
        rest = table ^ _table(3, Plan(0, (), ((a, inner),)))
        return Plan(_quadratic(3, normal_form(3, rest)).affine, (), ((a, inner),))
    return _by_hyperplane(inputs, table)


def _by_hyperplane(inputs: int, table: int) -> Plan | None:
    """affine + l * h with h of three inputs, for the l of fewest terms that fits."""
    for factor in sorted(range(2, 2 << inputs), key=lambda form: (form.bit_count(), form)):
        affine = _affine_where_zero(inputs, table, factor)
        if affine is None:
            continue
        pivot = (factor >> 1).bit_length() - 1
        # Where the factor is 1 its last variable is the sum of the others: h does not need it.
        substitute = factor ^ 1 ^ (2 << pivot)
        h = 0
        for x in range(1 << (inputs - 1)):
            low = x & ((1 << pivot) - 1)
            y = low | (x >> pivot) << (pivot + 1)
            y |= _value(substitute, y) << pivot
            h |= ((table >> y & 1) ^ _value(affine, y)) << x
        inner = _plan(inputs - 1, h)
        assert inner is not None
        return Plan(affine, (), ((factor, _renamed(inner, pivot)),))
    return None


def _affine_where_zero(inputs: int, table: int, factor: Affine) -> Affine | None:
    """An affine form that agrees with the function wherever the factor is 0; None where there is none."""
    pivot = (factor >> 1).bit_length() - 1
    substitute = factor ^ (2 << pivot)

    def at(y: int) -> int:
        return table >> (y | _value(substitute, y) << pivot) & 1

    affine = at(0)
    for i in range(inputs):
        if i != pivot and at(1 << i) != affine & 1:
            affine |= 2 << i
    for x in range(1 << inputs):
        if not x >> pivot & 1 and at(x) != _value(affine, x):
            return None
    return affine


def _renamed(plan: Plan, pivot: int) -> Plan:
    """The plan with a variable squeezed in before variable `pivot`."""

    def moved(affine: Affine) -> Affine:
        low = affine & ((2 << pivot) - 1)
        return low | (affine ^ low) << 1

    return Plan(
        moved(plan.affine),
        tuple((moved(a), moved(b)) for a, b in plan.products),
        tuple((moved(a), _renamed(rest, pivot)) for a, rest in plan.nested),
    )


def _quadratic(inputs: int, form: int) -> Plan:
    """Dickson's reduction: while a term x y is left, (x + what y meets)(y + what x meets) takes it out."""
    affine = form & 1
    meets = [0] * inputs
    for i in range(inputs):
        affine |= (form >> (1 << i) & 1) << (1 + i)
        for j in range(i):
            if form >> (1 << i | 1 << j) & 1:
                meets[i] |= 1 << j
                meets[j] |= 1 << i
    products = []
    while any(meets):
        x = min((i for i in range(inputs) if meets[i]), key=lambda i: (meets[i].bit_count(), i))
        y = (meets[x] & -meets[x]).bit_length() - 1
        one, other = 1 << x | meets[y] & ~(1 << x), 1 << y | meets[x] & ~(1 << y)
        products.append((2 * one, 2 * other))
        affine ^= 2 * (one & other)
        for i in range(inputs):
            if one >> i & 1:
                meets[i] ^= other & ~(1 << i)
            if other >> i & 1:
                meets[i] ^= one & ~(1 << i)
    return Plan(affine, tuple(products), variants=_variants(affine, products))


def _variants(
    affine: Affine, products: list[tuple[Affine, Affine]]
) -> tuple[tuple[Affine, tuple[tuple[Affine, Affine], ...]], ...]:
    """The ways of fewest terms to write affine + one product: p q, p (p + q), q (p + q), complements."""
    if len(products) != 1:
        return ()
    p, q = products[0]
    found = []
    for one, other, extra in ((p, q, 0), (p, p ^ q, p), (q, p ^ q, q)):
        for c in (0, 1):
            for d in (0, 1):
                # (one + c)(other + d) = one other + d one + c other + c d
                rest = affine ^ extra ^ (one if d else 0) ^ (other if c else 0) ^ (c & d)
                weight = sum(max((form >> 1).bit_count() - 1, 0) for form in (one, other))
                found.append((weight + (rest >> 1).bit_count(), (rest, ((one ^ c, other ^ d),))))
    least = min(weight for weight, _ in found)
    return tuple(variant for weight, variant in found if weight == least)


def normal_form(inputs: int, table: int) -> int:
    """The algebraic normal form: bit m is the coefficient of the product of the variables in m."""
    for i in range(inputs):
        low = sum(1 << x for x in range(1 << inputs) if not x >> i & 1)
        table ^= (table & low) << (1 << i)
    return table


def _value(affine: Affine, x: int) -> int:
    return ((affine >> 1 & x).bit_count() ^ affine) & 1


def _plan_value(plan: Plan, x: int) -> int:
    value = _value(plan.affine, x)
    for one, other in plan.products:
        value ^= _value(one, x) & _value(other, x)
    for factor, rest in plan.nested:
        value ^= _value(factor, x) & _plan_value(rest, x)
    return value


def _table(inputs: int, plan: Plan) -> int:
    return sum(_plan_value(plan, x) << x for x in range(1 << inputs))
