"""What has to be 0 for every start if a lifted circuit does what its spec says in its oracle form."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from revsynth.circuit.model import Qubit
from revsynth.verification.evidence import FaultKind
from revsynth.verification.lifting.account import Account
from revsynth.verification.lifting.model import Lifted
from revsynth.verification.lifting.parities import FALSE, TRUE, Literal, Parities
from revsynth.verification.proof.cone import Cone
from revsynth.verification.translation import Translation


class PlainGates:
    """Translations are written into the nodes of a lifting, so that equal XORs meet at once."""

    def __init__(self, parities: Parities) -> None:
        self.both = parities.and_
        self.differ = parities.xor


@dataclass(frozen=True)
class Obligation:
    """`literal` is 1 exactly where something is wrong; bit: the output bit, -1 for all else."""

    kind: FaultKind
    literal: Literal
    why: str
    qubit: Qubit = -1
    bit: int = -1
    operation: int = -1


@dataclass(frozen=True)
class Obligations:
    """All of them, and the constant phase that is left if they hold, in radians."""

    all: tuple[Obligation, ...]
    global_phase: float


def obligations(
    lifted: Lifted, account: Account, translation: Translation, *, phase: bool, reference: Sequence[int]
) -> Obligations:
    """The account's claims, and the outputs (or the sign, in a phase oracle) against the translation.

    reference: a start inside the domain by start variable; what must be constant is compared with it.
    """
    parities = lifted.parities
    found = []
    for claim in account.claims:
        literal = claim.literal
        if claim.constant and literal > TRUE:
            literal ^= _at(lifted, [literal], reference)[0]
        why = claim.why or "it does not end as it must"
        found.append(Obligation(claim.kind, literal, why, claim.qubit, operation=claim.operation))
    sign = account.sign
    if phase:
        (wanted,), (free,) = translation.bits, translation.free
        wrong = parities.xor(sign, wanted)
        constant = _at(lifted, [wrong], reference)[0]
        wrong = parities.all_of([translation.domain, free ^ 1, wrong ^ constant])
        found.append(Obligation("phase", wrong, "the sign is not the value of the spec", bit=0))
    else:
        constant = _at(lifted, [sign], reference)[0]
        for bit, (output, wanted, free) in enumerate(
            zip(account.outputs, translation.bits, translation.free, strict=True)
        ):
            wrong = parities.all_of([translation.domain, free ^ 1, parities.xor(output, wanted)])
            found.append(Obligation("output", wrong, "it is not the value of the spec", bit=bit))
    left = [one for one in found if one.literal != FALSE]
    turn = math.remainder(lifted.sixteenths * math.pi / 8 + lifted.radians + math.pi * constant, 2 * math.pi)
    return Obligations(tuple(left), turn)


def _at(lifted: Lifted, literals: Sequence[Literal], start: Sequence[int]) -> list[int]:
    """The values of literals for one start; outcomes that they rest on count as 0."""
    bits = [*start, *[0] * (len(lifted.variables) - len(start))]
    words = np.array(bits, dtype=np.uint64)[:, None]
    cone = Cone(lifted.parities, lifted.variables, literals)
    return [int(value[0]) & 1 for value in cone.values(literals, words)]
