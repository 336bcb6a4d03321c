"""What has to be 0 for every start if a lifted circuit does what its spec says in its oracle form."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from types import MappingProxyType

import numpy as np

from revsynth.circuit.model import Qubit
from revsynth.verification.evidence import FaultKind
from revsynth.verification.lifting.account import Account, Claim
from revsynth.verification.lifting.model import Lifted
from revsynth.verification.lifting.parities import FALSE, TRUE, Literal, Parities
from revsynth.verification.matching import Roles
from revsynth.verification.proof.cone import Cone
from revsynth.verification.translation import Translation


class PlainGates:
    """Translations are written into the nodes of a lifting, so that equal XORs meet at once."""

    def __init__(self, parities: Parities) -> None:
        self.both = parities.and_
        self.differ = parities.xor


@dataclass(frozen=True)
class Obligation:
    """`literal` is 1 exactly where something is wrong; bit: the output bit, -1 for all else.

    relative: it is wrong in comparison with the reference, not by itself.
    """

    kind: FaultKind
    literal: Literal
    why: str
    qubit: Qubit = -1
    bit: int = -1
    operation: int = -1
    relative: bool = False


@dataclass(frozen=True)
class Obligations:
    """All of them, and the constant phase that is left if they hold, in radians."""

    all: tuple[Obligation, ...]
    global_phase: float


class UnsettledError(Exception):
    """What would have to be shown cannot be said: nothing is known. The text says why."""


def active(translation: Translation, roles: Roles, parities: Parities) -> Literal:
    """Where anything is demanded at all: everywhere, but for free inputs of in-place and embedded blocks."""
    if roles.oracle not in ("inplace", "embedded"):
        return TRUE
    free = parities.all_of(translation.free)
    return parities.and_(translation.domain, free ^ 1)


def obligations(
    lifted: Lifted,
    account: Account,
    translation: Translation,
    roles: Roles,
    reference: Sequence[int],
    *,
    stand_ins: Mapping[Literal, int] = MappingProxyType({}),
) -> Obligations:
    """The account's claims, and the outputs (or the sign, in a phase oracle) against the translation.

    reference: a start, by start variable, at which everything is demanded; what must be constant is compared
    with it. stand_ins: variables that stand for the spec's values, where it has no translation, and their
    values at the reference. Raises UnsettledError where the constant phase hangs on a start at which nothing
    is demanded.
    """
    return _Owed(lifted, account, translation, roles, reference, stand_ins).all()


class _Owed:
    def __init__(
        self,
        lifted: Lifted,
        account: Account,
        translation: Translation,
        roles: Roles,
        reference: Sequence[int],
        stand_ins: Mapping[Literal, int],
    ) -> None:
        self.lifted = lifted
        self.parities = lifted.parities
        self.account = account
        self.translation = translation
        self.roles = roles
        self.active = active(translation, roles, lifted.parities)
        begun = lifted.variables[: lifted.start_variables]
        self.at_reference = {literal >> 1: bit for literal, bit in zip(begun, reference, strict=True)}
        self.at_reference |= {literal >> 1: value for literal, value in stand_ins.items()}
        self.variables = (*lifted.variables, *stand_ins)
        inputs = set(begun[: len(roles.inputs)])
        self.alone = {literal >> 1: 0 for literal in lifted.variables if literal not in inputs}
        """All that is no input, set to 0: what depends on the inputs alone is the same then."""
        self.found: list[Obligation] = []

    def all(self) -> Obligations:
        for claim in self.account.claims:
            self._claim(claim)
        if self.roles.oracle == "phase":
            constant = self._signs()
        else:
            (constant,) = self._fixed([self.account.sign], {**self.alone, **self.at_reference})
            self._outputs()
        for qubit, literal in self.account.kept:
            self._alone(literal, self.active, qubit)
        self._steady()
        lifted = self.lifted
        turn = lifted.sixteenths * math.pi / 8 + lifted.radians + math.pi * constant
        turn = 0.0 if lifted.random else math.remainder(turn, 2 * math.pi)
        return Obligations(tuple(one for one in self.found if one.literal != FALSE), turn)

    def _owe(self, obligation: Obligation, where: Literal) -> None:
        literal = self.parities.and_(where, obligation.literal)
        self.found.append(replace(obligation, literal=literal))

    def _claim(self, claim: Claim) -> None:
        literal = claim.literal
        if claim.constant:
            (there,) = self._fixed([literal], self.at_reference)
            literal = self.parities.xor(literal, there)
        kind: FaultKind = claim.kind
        if claim.operation >= 0 or (kind == "output" and claim.qubit not in self.roles.outputs):
            kind = "undefined"
        obligation = Obligation(
            kind, literal, claim.why, claim.qubit, operation=claim.operation, relative=claim.constant
        )
        self._owe(obligation, self.active)

    def _signs(self) -> Literal:
        """The sign is the value of the spec, up to what all starts share; free ones hang on inputs alone."""
        parities, sign = self.parities, self.account.sign
        (wanted,), (free,) = self.translation.bits, self.translation.free
        fixed = parities.and_(self.translation.domain, free ^ 1)
        wrong = parities.xor(sign, wanted)
        shared, by_itself = self._fixed([wrong, sign], self.at_reference)
        why = "the sign is not the value of the spec"
        self._owe(Obligation("phase", parities.xor(wrong, shared), why, bit=0, relative=True), fixed)
        here, shared_here = self._fixed([sign, by_itself], self.alone)
        loose = parities.parity((sign, here, by_itself, shared_here))
        why = "the sign, free here, does not depend on the inputs alone"
        self._owe(Obligation("undefined", loose, why), fixed ^ 1)
        return self._fixed([shared], self.alone)[0]

    def _outputs(self) -> None:
        account, parities, domain = self.account, self.parities, self.translation.domain
        rows = zip(account.outputs, self.translation.bits, self.translation.free, strict=True)
        for bit, (output, wanted, free) in enumerate(rows):
            fixed = parities.and_(domain, free ^ 1)
            why = "it is not the value of the spec"
            self._owe(Obligation("output", parities.xor(output, wanted), why, bit=bit), fixed)
            self._alone(output, parities.and_(self.active, fixed ^ 1), self.roles.outputs[bit])

    def _alone(self, literal: Literal, where: Literal, qubit: Qubit) -> None:
        """What is free depends on the inputs alone: not on outcomes, nor on starts of other qubits."""
        if where == FALSE:
            return
        (plain,) = self._fixed([literal], self.alone)
        why = "it is free here, but does not depend on the inputs alone"
        self._owe(Obligation("undefined", self.parities.xor(literal, plain), why, qubit), where)

    def _steady(self) -> None:
        """The constant phase is that of the start 0, which must be the one of the reference."""
        if self.active == TRUE or not self.lifted.steady:
            return
        steady, zero = self.lifted.steady, dict.fromkeys(self.at_reference, 0)
        if self._fixed(steady, zero) != self._fixed(steady, self.at_reference):
            raise UnsettledError("the phase at 0, where nothing is demanded, is not that of other inputs")

    def _fixed(self, literals: Sequence[Literal], values: dict[int, int]) -> list[Literal]:
        """The same literals with values (0 or 1) in place of some variables, by node."""
        if not values or all(literal <= TRUE for literal in literals):
            return list(literals)
        if len(values) == len(self.variables):
            return self._evaluated(literals, values)
        cone = Cone(self.parities, self.variables, literals)
        image: dict[int, Literal] = {0: FALSE}
        for node in cone.variables:
            image[node] = values.get(node, 2 * node)
        for node in cone.gates:
            a, b = self.parities.left[node], self.parities.right[node]
            if image[a] == 2 * a and image[b] == 2 * b:
                image[node] = 2 * node
            else:
                join = self.parities.xor if cone.is_xor(node) else self.parities.and_
                image[node] = join(image[a], image[b])
        return [image[literal >> 1] ^ (literal & 1) for literal in literals]

    def _evaluated(self, literals: Sequence[Literal], values: dict[int, int]) -> list[Literal]:
        cone = Cone(self.parities, self.variables, literals)
        words = np.array([values[node] for node in cone.variables], dtype=np.uint64)[:, None]
        return [int(value[0]) & 1 for value in cone.values(literals, words)]
