"""Where the walk is: which loop variables are bound, under which condition it gets there, what fails there.

What Python would not evaluate for an input is built all the same, but an operation that is undefined counts
only where it is reached: its condition is joined with those of every `and`, `or`, `if` and comparison chain
on the way.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from revsynth.elaborate.look_up import MOST_GATES
from revsynth.elaborate.values import Value
from revsynth.errors import SpecError
from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.spec.refusals import Refusal


class Path:
    """A conjunction of conditions as a linked list, made into a literal only where something can fail."""

    __slots__ = ("also", "condition", "known", "outer")

    def __init__(self, outer: Path | None, condition: Literal, also: Path | None = None) -> None:
        self.outer = outer
        self.condition = condition
        self.also = also  # a list of conditions alone
        self.known: Literal | None = None

    def literal(self, builder: NetworkBuilder) -> Literal:
        """Where all conditions hold."""
        open_parts: list[Path] = []
        part: Path | None = self
        while part is not None and part.known is None:
            open_parts.append(part)
            part = part.outer
        found = TRUE if part is None or part.known is None else part.known
        for one in reversed(open_parts):
            found = builder.and_(found, one.condition)
            if one.also is not None:
                found = builder.and_(found, one.also.literal(builder))
            one.known = found
        return found


@dataclass
class Build:
    """What one expression's elaboration shares: the builder, its words, and where what is undefined."""

    builder: NetworkBuilder
    words: Mapping[str, Value]
    source: str = ""
    place: str = ""
    failures: dict[Refusal, list[Literal]] = field(default_factory=dict)
    shown: dict[Refusal, dict[str, int | str]] = field(default_factory=dict)

    def check_size(self, more: int = 0) -> None:
        """Raise SpecError where the network is, or would become, too large."""
        if self.builder.gates + more > MOST_GATES:
            raise SpecError(
                f"this needs a network of more than {MOST_GATES:,} gates; narrower words or smaller numbers "
                "are wanted",
                source=self.source,
                place=self.place,
            )


@dataclass(frozen=True)
class Reach:
    """One place of the walk: its loop variables, and the condition under which it is reached."""

    build: Build
    path: Path
    names: Mapping[str, Value] = field(default_factory=dict)

    @property
    def builder(self) -> NetworkBuilder:
        """The builder of the network."""
        return self.build.builder

    def bind(self, names: Mapping[str, Value]) -> Reach:
        """The same place with more loop variables."""
        return replace(self, names={**self.names, **names})

    def narrow(self, condition: Literal) -> Reach | None:
        """The place where a condition holds too; None where it never does."""
        if condition == TRUE:
            return self
        return None if condition == FALSE else replace(self, path=Path(self.path, condition))

    def fail(self, where: Literal, refusal: Refusal, **shown: object) -> None:
        """Say that an operation is undefined where a condition holds and the place is reached."""
        if where == FALSE:
            return
        found = self.builder.and_(where, self.path.literal(self.builder))
        if found != FALSE:
            self.build.failures.setdefault(refusal, []).append(found)
            known = {name: one if isinstance(one, int | str) else "..." for name, one in shown.items()}
            self.build.shown.setdefault(refusal, known)


def start(build: Build) -> Reach:
    """The place where an expression begins: always reached."""
    return Reach(build, Path(None, TRUE))
