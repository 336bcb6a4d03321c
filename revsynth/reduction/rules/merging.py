"""Two gates on one target whose controls are the same or differ at one line become none or one."""

from __future__ import annotations

from collections.abc import Iterator

from revsynth.reduction.masks import Masked
from revsynth.reduction.rules.model import Rule


def merge(gates: Masked) -> Iterator[Masked]:
    """Nothing for equal gates; else one gate where the controls differ at exactly one line.

    Opposite literals there: the literal goes, as ab XOR a(not b) = a. One literal missing there: the other
    turns round, as a XOR ab = a(not b).
    """
    (target, positive, negative), (other, other_positive, other_negative) = gates
    if target != other:
        return
    differ = (positive ^ other_positive) | (negative ^ other_negative)
    if not differ:
        yield ()
    elif not differ & (differ - 1):
        if (positive | negative) & differ and (other_positive | other_negative) & differ:
            yield ((target, positive & ~differ, negative & ~differ),)
        else:
            both = (positive | other_positive, negative | other_negative)
            yield ((target, both[0] ^ differ, both[1] ^ differ),)


MERGING = Rule(
    name="merging",
    size=2,
    source="deletion: Miller, Maslov, Dueck, DAC 2003; one line apart: the XOR of two products, elementary",
    rewrite=merge,
)
