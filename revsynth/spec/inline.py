"""A predicate from the command line: `--where`, `--input`, `--constant`, `--domain`."""

from __future__ import annotations

import json
import re
from collections.abc import Sequence
from typing import Any

from revsynth.errors import SpecError
from revsynth.spec.model import Spec
from revsynth.spec.toml_reader import spec_from_document

SOURCE = "command line"
_WIDTH = re.compile(
    r"(?P<bits>[0-9]{1,9})(?P<signed>s)?(?:x(?P<count>[0-9]{1,9})(?P<all_signed>s)?)?", re.ASCII
)


def inline_spec(where: str, inputs: Sequence[str], constants: Sequence[str], domain: str | None) -> Spec:
    """The spec for `--where`; inputs as `a=4`, `k=3s` (signed), `cell=2x5`; constants as `NAME=JSON`.

    In `cell=2x5` the array has 5 words of 2 bits. Raises SpecError naming the option that is wrong.
    """
    document: dict[str, Any] = {"predicate": {"where": where}}
    if not inputs:
        raise SpecError("--where needs the words it reads: --input NAME=BITS", source=SOURCE)
    document["inputs"] = _collect("--input", inputs, _width)
    if constants:
        document["constants"] = _collect("--constant", constants, _constant)
    if domain is not None:
        document["domain"] = {"where": domain}
    return spec_from_document(document, source=SOURCE)


def _collect(option: str, texts: Sequence[str], read: Any) -> dict[str, Any]:
    found: dict[str, Any] = {}
    for text in texts:
        name, equals, value = text.partition("=")
        name = name.strip()
        if not equals:
            example = "a=4" if option == "--input" else "NAME=JSON"
            raise SpecError(f"{option} {text[:40]!r}: write it as {example}", source=SOURCE)
        if name in found:
            raise SpecError(f"{option} {name} is given twice", source=SOURCE)
        found[name] = read(value.strip(), f"{option} {text[:40]!r}")
    return found


def _width(text: str, shown: str) -> dict[str, Any]:
    match = _WIDTH.fullmatch(text)
    if match is None:
        raise SpecError(
            f"{shown}: a width is wanted, such as a=4, k=3s (signed) or cell=2x5 (5 words of 2 bits)",
            source=SOURCE,
        )
    width: dict[str, Any] = {"bits": int(match["bits"])}
    if match["count"]:
        width["count"] = int(match["count"])
    if match["signed"] or match["all_signed"]:
        width["signed"] = True
    return width


def _constant(text: str, shown: str) -> Any:
    try:
        return json.loads(text, parse_constant=_refuse)
    except RecursionError:
        raise SpecError(f"{shown}: lists are nested too deeply", source=SOURCE) from None
    except ValueError:
        raise SpecError(f"{shown}: JSON is wanted, such as edges=[[0, 1], [1, 2]]", source=SOURCE) from None


def _refuse(name: str) -> Any:
    raise ValueError(name)
