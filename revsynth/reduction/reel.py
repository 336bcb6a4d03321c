"""Gates on their way through a pass, with marks that say where anything is left to look for."""

from __future__ import annotations

from collections.abc import Iterable

from revsynth.reduction.masks import Masks

_FRESH = 1
_CHANGED = 2
_NOWHERE = -(1 << 62)


class Reel:
    """Two stacks: `done` holds the gates up to the current one, `coming` the others, the next one on top.

    A change puts gates back on `coming`, so it costs no more than the gates that it moves. A gate is marked
    where another pass has changed it since this one was last at rest (`fresh`), or this pass has.
    """

    def __init__(self, gates: list[Masks], fresh: Iterable[bool]) -> None:
        self.done: list[Masks] = []
        self.coming = gates[::-1]
        self._marks = bytearray()
        self._coming_marks = bytearray(fresh)[::-1]
        self._last = _NOWHERE

    def advance(self) -> bool:
        """Take the next gate onto `done`; False where there is none."""
        if not self.coming:
            return False
        self.done.append(self.coming.pop())
        mark = self._coming_marks.pop()
        self._marks.append(mark)
        if mark:
            self._last = len(self._marks) - 1
        return True

    def is_settled(self, reach: int) -> bool:
        """Whether the current gate and the `reach` ones before it carry no mark."""
        return len(self._marks) - 1 - self._last > reach

    def replace(self, start: int, gates: list[Masks]) -> None:
        """Put `gates` in the place of the gates from `done[start]` on, to be taken up again."""
        del self.done[start:], self._marks[start:]
        self._last = min(self._last, start - 1)
        if gates:
            self.coming.extend(reversed(gates))
            self._coming_marks.extend(bytes((_FRESH | _CHANGED,)) * len(gates))
        elif self._coming_marks:
            self._coming_marks[-1] = _FRESH | _CHANGED

    def step_back(self, count: int) -> None:
        """Put up to `count` gates back on `coming`, as they are."""
        for _ in range(min(count, len(self.done))):
            self.coming.append(self.done.pop())
            self._coming_marks.append(self._marks.pop())
        self._last = min(self._last, len(self.done) - 1)

    def changed(self) -> list[bool]:
        """For each gate of `done` whether this pass changed it."""
        return [bool(mark & _CHANGED) for mark in self._marks]
