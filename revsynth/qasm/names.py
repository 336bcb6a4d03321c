"""Register names for the words of a spec, so that no reader of either OpenQASM version stumbles."""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import Literal

from revsynth.errors import SpecError
from revsynth.qasm.vocabulary import OURS, RESERVED

_ELEMENT = re.compile(r"\[([0-9]+)\]")


def register_names(names: Sequence[str], *, version: Literal[2, 3], source: str = "") -> dict[str, str]:
    """The register for each word or array element, in the order given.

    `cell[0]` becomes `cell_0`; a name that either version of OpenQASM reserves gets an underscore behind it
    (`x` becomes `x_`); for OpenQASM 2 a capital first letter gets `r_` before it. `source` names the spec in
    messages.

    Raises:
        SpecError: where a word takes a name that revsynth gives a meaning (`work`, `mark`, ...), or where two
            words end up with the same register.
    """
    registers: dict[str, str] = {}
    owner: dict[str, str] = {}
    for name in names:
        register = _register_name(name, version)
        if register in OURS:
            raise SpecError(
                f"the word '{name}' would be the register '{register}', which revsynth keeps for itself "
                f"({', '.join(OURS)}): rename the word",
                source=source,
            )
        if register in owner:
            raise SpecError(
                f"the words '{owner[register]}' and '{name}' would both be the register '{register}': "
                "rename one of them",
                source=source,
            )
        owner[register] = name
        registers[name] = register
    return registers


def _register_name(name: str, version: Literal[2, 3]) -> str:
    register = _ELEMENT.sub(r"_\1", name)
    if register in RESERVED:
        register += "_"
    if version == 2 and register[0].isupper():
        register = "r_" + register
    return register
