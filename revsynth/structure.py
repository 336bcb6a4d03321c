"""The structure of a spec's function, where there is one to work from: its network."""

from __future__ import annotations

from dataclasses import replace

from revsynth.elaborate import elaborate
from revsynth.elaborate.clauses import free_inputs
from revsynth.elaborate.validity import check_valid
from revsynth.errors import SpecError
from revsynth.logic.in_place_program import Program
from revsynth.logic.network_function import NetworkFunction
from revsynth.options import BuildOptions
from revsynth.spec.model import Outputs, Permutation, Predicate, Spec
from revsynth.spec.understand import Understanding


def structure_of(
    understanding: Understanding, options: BuildOptions
) -> tuple[Understanding, NetworkFunction | None, Program | None]:
    """The understanding (with the warnings that a wide spec gives here), the function's network and program.

    None where the spec is a table, where no method asks for structure, or where the network would be too
    large but a table is at hand. Wide specs are checked to be valid on the way: SpecError, ExpressionError
    name an input at which they are not.
    """
    spec = understanding.spec
    wide = understanding.tabulated is None
    if not _has_structure(spec) or (not wide and options.method not in ("auto", "network")):
        return understanding, None, None
    if isinstance(spec.body, Predicate) and spec.body.free_of is not None:
        found = free_inputs(spec.body.free_of.clauses, options.effort, options.seed)
        return understanding, found.function, None
    try:
        elaboration = elaborate(spec, understanding.outputs or None)
    except SpecError:
        if wide:
            raise
        return understanding, None, None
    if wide:
        check_valid(spec, elaboration)
        warnings = (*understanding.warnings, *elaboration.warnings)
        understanding = replace(understanding, warnings=warnings)
    return understanding, elaboration.function, elaboration.program


def _has_structure(spec: Spec) -> bool:
    """Whether the spec is more than a list of values."""
    body = spec.body
    if isinstance(body, Predicate):
        return body.table is None
    if isinstance(body, Outputs):
        return not body.words or any(word.table is None for word in body.words)
    return isinstance(body, Permutation) and body.values is None
