"""Fewer ANDs by algebra alone: products with a common operand, and sums of products used only together.

Of the products p l_1, p l_2, ... only sums that something reads matter, and p l_1 + p l_2 = p (l_1 + l_2):
as many ANDs suffice as those sums have rank modulo 1 and p. Products that every reader reads together are one
quadratic form, brought to half its rank in products by Dickson's reduction (L. E. Dickson, "Linear groups",
1901). Both hold for any signals l, so nothing has to be simulated or proved.

The basis is taken from the readers in topological order: what a reader needs is made of operands that stand
before it, so that no cycle can arise.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field

import numpy as np

from revsynth.logic.and_reduction.form_builder import Form, FormBuilder, fits
from revsynth.logic.network import FALSE, Literal, Network

Bits = int
"""A set of ANDs or of readers, by number."""


TRANSPOSED = 1024
"""Readers transposed at a time, a multiple of 8."""


@dataclass
class Forms:
    """A network as products of forms. Bits of a form: 0 the constant, 1 ... the inputs, then the ANDs.

    products[k]: the operands of AND k; outputs: the forms of the outputs.
    """

    inputs: int
    products: list[tuple[Form, Form]]
    outputs: list[Form]

    @property
    def first(self) -> int:
        """The bit of AND 0."""
        return 1 + self.inputs

    def readers(self) -> Iterator[Form]:
        """Both operands of AND 0, of AND 1, ..., and the outputs."""
        for one, other in self.products:
            yield one
            yield other
        yield from self.outputs


@dataclass
class Family:
    """ANDs with the common operand `common`; members, a bit an AND, each common * rest + extra.

    basis and made serve the rebuilding: made are the products so far, after the common operand itself; a row
    of the basis is a form and which of `made` add up to its product with the common operand.
    """

    common: Form
    members: Bits
    rests: dict[int, Form]
    extras: dict[int, Form]
    saved: int = 0
    basis: dict[int, tuple[Form, Bits]] = field(default_factory=dict)
    made: list[Literal] = field(default_factory=list)


@dataclass
class Bundle:
    """ANDs that all readers read together, and the products that their sum needs.

    products: pairs of sets; bit 2 i of a set is the first operand of the i-th member, bit 2 i + 1 the second.
    affine: the set of operands to add.
    """

    members: list[int]
    products: list[tuple[Bits, Bits]]
    affine: Bits
    constant: int

    @property
    def saved(self) -> int:
        return len(self.members) - len(self.products)


def forms_of(network: Network) -> Forms:
    """The forms of a network, equal products merged."""
    builder, outputs = _copied(network)
    return Forms(network.inputs, builder.products, [builder.form(literal) for literal in outputs])


def merge_common_operands(network: Network) -> Network:
    """The network with fewer ANDs where products share an operand or are always read together."""
    if network.ands < 2 or not fits(network):
        return network
    old, outputs = _copied(network)
    forms = Forms(network.inputs, old.products, [old.form(literal) for literal in outputs])
    uses = _uses(forms)
    families, taken = _families(forms, uses)
    bundles = _bundles(forms, uses, taken)
    if not families and not bundles:
        return network
    return _Rebuilding(old, families, bundles).network(outputs)


def _copied(network: Network) -> tuple[FormBuilder, list[Literal]]:
    """A builder that holds the network, equal sums and products merged, no dead gates; the outputs there."""
    for _ in range(2):
        builder = FormBuilder(network.inputs)
        outputs = builder.copy(network, [2 * i for i in range(1, network.inputs + 1)])
        network = builder.build(outputs)
    return builder, outputs


def _uses(forms: Forms) -> list[Bits]:
    """For each AND the readers that name it: the readers' forms transposed, some at a time."""
    ands = len(forms.products)
    size = (ands + 7) // 8
    readers = list(forms.readers())
    columns = np.zeros((ands, (len(readers) + 7) // 8), dtype=np.uint8)
    for begin in range(0, len(readers), TRANSPOSED):
        some = readers[begin : begin + TRANSPOSED]
        rows = b"".join((form >> forms.first).to_bytes(size, "little") for form in some)
        packed = np.frombuffer(rows, dtype=np.uint8).reshape(len(some), size)
        bits = np.unpackbits(packed, axis=1, count=ands, bitorder="little")
        block = np.packbits(bits.T, axis=1, bitorder="little")
        columns[:, begin // 8 : begin // 8 + block.shape[1]] = block
    return [int.from_bytes(column.tobytes(), "little") for column in columns]


def _families(forms: Forms, uses: list[Bits]) -> tuple[list[Family], Bits]:
    """Families that save something, the best first, none sharing an AND; and the ANDs they take."""
    by_operand: dict[Form, list[int]] = {}
    for number, (one, other) in enumerate(forms.products):
        for line in ((one & -2), (other & -2), (one ^ other) & -2):
            by_operand.setdefault(line, []).append(number)
    found = []
    for common, members in by_operand.items():
        if len(members) < 2:
            continue
        family = _family(forms, common, members)
        rank = _rank(family, uses)
        family.saved = len(members) - rank
        if family.saved > 0:
            found.append(family)
    found.sort(key=lambda family: (-family.saved, family.members))
    taken, chosen = 0, []
    for family in found:
        if not family.members & taken:
            taken |= family.members
            chosen.append(family)
    return chosen, taken


def _family(forms: Forms, common: Form, members: list[int]) -> Family:
    """Writes each member as common * rest + extra."""
    rests, extras = {}, {}
    for number in members:
        one, other = forms.products[number]
        if one & -2 == common:
            rests[number], extras[number] = other, other if one & 1 else 0
        elif other & -2 == common:
            rests[number], extras[number] = one, one if other & 1 else 0
        else:
            # one + other = common + c, so one * other = one * (one + common + c) = common * one + (1 + c) one
            c = (one ^ other) & 1
            rests[number], extras[number] = one, 0 if c else one
    return Family(common, sum(1 << number for number in members), rests, extras)


def _rank(family: Family, uses: list[Bits]) -> int:
    """How many products the readers of a family need."""
    basis: dict[int, Form] = {}
    for form in (1, family.common & -2):
        basis[form.bit_length()] = form
    rests = list(family.rests.values())
    rank = 0
    for part in _parts([uses[number] for number in family.rests]):
        total = 0
        for place in _members(part):
            total ^= rests[place]
        while total and (found := basis.get(total.bit_length())) is not None:
            total ^= found
        if total:
            basis[total.bit_length()] = total
            rank += 1
            if rank == len(rests):
                break
    return rank


def _parts(columns: list[Bits]) -> list[Bits]:
    """The different nonempty sets of members that some reader reads together; columns: readers by member."""
    if len(columns) <= 4:
        everybody = 0
        for column in columns:
            everybody |= column
        groups = [(0, everybody)]
        for place, column in enumerate(columns):
            split = [(part, group & ~column) for part, group in groups]
            split += [(part | 1 << place, group & column) for part, group in groups]
            groups = [(part, group) for part, group in split if group]
        return [part for part, _ in groups]
    size = (max(column.bit_length() for column in columns) + 7) // 8
    packed = b"".join(column.to_bytes(size, "little") for column in columns)
    bits = np.unpackbits(np.frombuffer(packed, dtype=np.uint8).reshape(len(columns), size), axis=1)
    rows = np.unique(np.packbits(bits.T, axis=1, bitorder="little"), axis=0)
    parts = [int.from_bytes(row.tobytes(), "little") for row in rows]
    return [part for part in parts if part]


def _members(part: Bits) -> Iterator[int]:
    while part:
        low = part & -part
        yield low.bit_length() - 1
        part ^= low


def _bundles(forms: Forms, uses: list[Bits], taken: Bits) -> list[Bundle]:
    """Sets of ANDs with the same readers whose sum needs fewer products than it has."""
    alike: dict[Bits, list[int]] = {}
    for number, readers in enumerate(uses):
        if readers and not taken >> number & 1:
            alike.setdefault(readers, []).append(number)
    bundles = [_bundle(forms, members) for members in alike.values() if len(members) > 1]
    return [bundle for bundle in bundles if bundle.saved > 0]


def _bundle(forms: Forms, members: list[int]) -> Bundle:
    """Dickson's reduction over independent sums of the members' operands."""
    basis: dict[int, tuple[Form, int]] = {}
    chosen: list[tuple[Bits, int]] = []
    pairs: list[tuple[int, int]] = []
    constants: list[tuple[int, int]] = []
    for place, number in enumerate(members):
        coordinates = []
        for side, form in enumerate(forms.products[number]):
            rest, mix, constant = form & -2, 0, form & 1
            while rest and (found := basis.get(rest.bit_length())) is not None:
                rest ^= found[0]
                mix ^= found[1]
            if rest:
                basis[rest.bit_length()] = rest, mix ^ 1 << len(chosen)
                mix = 1 << len(chosen)
                chosen.append((1 << (2 * place + side), constant))
            coordinates.append((mix, constant))
        pairs.append((coordinates[0][0], coordinates[1][0]))
        constants.append((coordinates[0][1], coordinates[1][1]))
    products, affine, constant = _dickson(len(chosen), pairs, constants)

    def operands(mix: Bits) -> tuple[Bits, int]:
        names = flip = 0
        for i in _members(mix):
            names ^= chosen[i][0]
            flip ^= chosen[i][1]
        return names, flip

    # Chosen operands carry their own constant: where it is 1 the variable is the operand plus 1.
    named = []
    for x, y in products:
        (a, c), (b, d) = operands(x), operands(y)
        named.append((a << 1 | c, b << 1 | d))
    names, flip = operands(affine)
    return Bundle(members, named, names, constant ^ flip)


def _dickson(
    variables: int, pairs: list[tuple[int, int]], constants: list[tuple[int, int]]
) -> tuple[list[tuple[int, int]], int, int]:
    """The sum of (a + c)(b + d) as products of independent linear forms, a linear form and a constant."""
    meets = [0] * variables
    affine = constant = 0
    for (a, b), (c, d) in zip(pairs, constants, strict=True):
        for i in _members(a):
            meets[i] ^= b
        for i in _members(b):
            meets[i] ^= a
        affine ^= a & b ^ (b if c else 0) ^ (a if d else 0)
        constant ^= c & d
    for i in range(variables):
        meets[i] &= ~(1 << i)
    products = []
    while any(meets):
        x = next(i for i in range(variables) if meets[i])
        y = (meets[x] & -meets[x]).bit_length() - 1
        one, other = meets[y], meets[x]
        products.append((one, other))
        affine ^= one & other
        for i in _members(one):
            meets[i] ^= other
        for i in _members(other):
            meets[i] ^= one
        for i in range(variables):
            meets[i] &= ~(1 << i)
    return products, affine, constant


class _Rebuilding:
    """The network built anew gate by gate, its XORs as they were, with the families' and bundles' products.

    A node's value is a literal and the family members that are still to be added to it: these are added, as
    one sum, where an AND or an output reads the node.
    """

    def __init__(self, old: FormBuilder, families: list[Family], bundles: list[Bundle]) -> None:
        self._old = old
        self._products = old.products
        self._families = families
        self._builder = FormBuilder(old.inputs)
        self._family_of = {number: family for family in families for number in family.rests}
        self._bundle_at = {bundle.members[-1]: bundle for bundle in bundles}
        self._bundled = {number for bundle in bundles for number in bundle.members}
        self._values: dict[int, tuple[Literal, Bits]] = {
            node: (2 * node, 0) for node in range(1 + old.inputs)
        }
        self._operands: dict[int, tuple[Literal, Literal]] = {}

    def network(self, outputs: list[Literal]) -> Network:
        """Goes through the gates in order, then the outputs."""
        number = 0
        for node in range(1 + self._old.inputs, len(self._old.forms)):
            gate = self._old.gate_of(2 * node)
            assert gate is not None
            is_xor, left, right = gate
            if is_xor:
                (a, some), (b, others) = self._values[left >> 1], self._values[right >> 1]
                self._values[node] = self._builder.xor(a, b), some ^ others
            else:
                self._values[node] = self._product_value(number, self._read(left), self._read(right))
                number += 1
        return self._builder.build([self._read(literal) for literal in outputs])

    def _product_value(self, number: int, a: Literal, b: Literal) -> tuple[Literal, Bits]:
        self._operands[number] = a, b
        if number in self._bundled:
            bundle = self._bundle_at.get(number)
            return (FALSE if bundle is None else self._bundle_sum(bundle)), 0
        if number in self._family_of:
            return FALSE, 1 << number
        return self._builder.and_(a, b), 0

    def _read(self, literal: Literal) -> Literal:
        """An operand's literal, complete."""
        value, part = self._values[literal >> 1]
        if part:
            for family in self._families:
                mine = part & family.members
                if mine:
                    value = self._builder.xor(value, self._family_sum(family, mine))
            self._values[literal >> 1] = value, 0
        return value ^ (literal & 1)

    def _sum(self, literals: Iterable[Literal]) -> Literal:
        total: Literal = FALSE
        for literal in literals:
            total = self._builder.xor(total, literal)
        return total

    def _family_sum(self, family: Family, part: Bits) -> Literal:
        """The sum of some members: products there already, and one more where they do not suffice."""
        common = self._common(family, part)
        rest = self._sum(self._side(number, family.rests[number]) for number in _members(part))
        extra = self._sum(
            self._side(number, family.extras[number]) for number in _members(part) if family.extras[number]
        )
        form, used = self._eliminated(family, self._builder.form(rest), 0)
        if form:
            made = self._builder.and_(common, rest)
            family.made.append(made)
            name = 1 << (len(family.made) - 1)
            family.basis[form.bit_length()] = form, used ^ name
            used = name
        products = [family.made[i] for i in _members(used)]
        return self._sum([extra, *products])

    def _side(self, number: int, form: Form) -> Literal:
        """The operand of an AND that had this form."""
        one, _ = self._products[number]
        return self._operands[number][0 if form == one else 1]

    def _common(self, family: Family, part: Bits) -> Literal:
        """The common operand; at the first time it is noted that its products with 1 and itself are known."""
        number = next(_members(part))
        one, other = self._products[number]
        a, b = self._operands[number]
        if one & -2 == family.common:
            common = a ^ (one & 1)
        elif other & -2 == family.common:
            common = b ^ (other & 1)
        else:
            common = self._builder.xor(a, b) ^ ((one ^ other) & 1)
        if not family.made:
            family.made.append(common)
            form = self._builder.form(common)
            family.basis[1] = 1, 1
            if form > 1:
                # common (common + c) = (1 + c) common, with c its constant
                family.basis[form.bit_length()] = form & -2, 1 ^ (form & 1)
        return common

    @staticmethod
    def _eliminated(family: Family, form: Form, used: Bits) -> tuple[Form, Bits]:
        while form and (found := family.basis.get(form.bit_length())) is not None:
            form ^= found[0]
            used ^= found[1]
        return form, used

    def _bundle_sum(self, bundle: Bundle) -> Literal:
        """The sum of a bundle's members."""
        operands = [literal for number in bundle.members for literal in self._operands[number]]

        def total(names: Bits) -> Literal:
            return self._sum(operands[i] for i in _members(names))

        result = total(bundle.affine) ^ bundle.constant
        for one, other in bundle.products:
            product = self._builder.and_(total(one >> 1) ^ (one & 1), total(other >> 1) ^ (other & 1))
            result = self._builder.xor(result, product)
        return result
