"""Running the methods of synthesis: every block that they give for a task, shortened, in good time."""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import replace

from revsynth.choice import Trial
from revsynth.errors import BudgetError, UndecidedError, UsageError
from revsynth.options import BuildOptions, Effort
from revsynth.shortening import shorten, without_idle_work
from revsynth.spec.limits import MAX_INPUT_BITS
from revsynth.synthesis import any_order
from revsynth.synthesis.interface import Block, Method, Task
from revsynth.synthesis.keeping import keep_products
from revsynth.synthesis.methods import METHODS, WIDE
from revsynth.synthesis.optimal import OPTIMAL
from revsynth.synthesis.transform import TRANSFORM

_LADDER: dict[Effort, tuple[Effort, ...]] = {
    "low": ("low",),
    "normal": ("low", "normal"),
    "high": ("low", "normal", "high"),
}
"""Levels of effort in turn; without a time limit the cheap ones are skipped, see `_levels`."""


SHORT = 100
"""Networks of so many gates are reduced as well, beside the plan as it is: the rules see no lines known to be
in 0, and what they join may cost more than the products held."""


BEATEN = (
    "not asked: a network is at hand, and took fewer T gates wherever both were tried (--effort high asks)"
)


class _TimeIsUpError(Exception):
    """The time limit has passed and there is something to show for it."""


class Gathering:
    """The blocks found so far, what each method said, and whether time ran out."""

    def __init__(self, task: Task, options: BuildOptions, progress: Callable[[str], None]) -> None:
        self.task = task
        self.options = options
        self.blocks: list[Block] = []
        self.trials: list[Trial] = []
        self.stopped_early = False
        self._say = progress
        self._end = None if options.time_limit is None else time.monotonic() + options.time_limit
        self._too_large = False
        self._undecided: UndecidedError | None = None

    def run(self) -> None:
        """Ask every method that is wanted and fits; raises UsageError or BudgetError where none serves.

        Raises UndecidedError where the one method that serves could not decide whether it has an answer.
        """
        fit = self._fitting()
        try:
            for level in _levels(self.options):
                for method in fit:
                    if self._beaten(method):
                        self._add_failed(method, BEATEN)
                        continue
                    self._ask(method, replace(self.task, effort=level))
                    if method.name == "linear" and self.blocks:
                        return
        except _TimeIsUpError:
            self.stopped_early = True
        if not self.blocks:
            raise self._undecided or self._nothing_serves()

    def _fitting(self) -> list[Method]:
        fit = []
        for method in METHODS:
            if asked_for(method, self.options):
                reason = unfit(method, self.task)
                if reason is None and method is OPTIMAL and self.options.method == "auto":
                    reason = OPTIMAL.on_request(self.task)
                if reason is None:
                    fit.append(method)
                else:
                    self.trials.append(Trial(method.name, failed=reason))
        return fit

    def _beaten(self, method: Method) -> bool:
        """Whether `auto` need not ask: a permutation of more lines never had fewer T than a network.

        Of 40 predicates and outputs none came out better by `transform`, which takes up to ten times as long
        as all the others. Where there is a budget, another aim is wanted, or the effort is high, it is asked.
        """
        options = self.options
        return (
            method is TRANSFORM
            and (options.method, options.aim) == ("auto", "t")
            and options.effort != "high"
            and self.task.oracle in ("phase", "bit", "fresh", "compute")
            and (options.qubits, options.t, options.depth) == (None, None, None)
            and any(block.method.startswith("network") for block in self.blocks)
        )

    def _ask(self, method: Method, task: Task) -> None:
        self._progress(f"{method.name}: synthesising, effort {task.effort}")
        try:
            found = any_order.synthesise(method, task, self._progress)
        except BudgetError as error:
            self._add_failed(method, str(error))
            self._too_large = True
            return
        except UndecidedError as error:
            self._undecided = error
            self.trials.append(Trial(method.name, failed=str(error)))
            return
        for block in found:
            if method in WIDE or method is OPTIMAL:
                self._add(without_idle_work(block))
            if method not in WIDE or len(block.cascade) <= SHORT:
                self._progress(f"{block.method}: reducing {len(block.cascade)} gates")
                self._add(shorten(block, task.oracle, self.options, self._progress))

    def _add_failed(self, method: Method, why: str) -> None:
        trial = Trial(method.name, failed=why)
        if trial not in self.trials:
            self.trials.append(trial)

    def _add(self, block: Block) -> None:
        kept = keep_products(block) if self.task.oracle == "compute" else None
        for one in (block, kept):
            if one is not None and not any(_same(one, other) for other in self.blocks):
                self.blocks.append(one)

    def _progress(self, text: str) -> None:
        """Passes the text on; every method comes by here now and then, so it is where time is looked at."""
        self._say(text)
        if self.blocks and self._end is not None and time.monotonic() > self._end:
            raise _TimeIsUpError

    def _nothing_serves(self) -> BudgetError | UsageError:
        """A budget that is too small where more qubits would do, else options that do not suit the spec."""
        roomy = replace(self.task, lines=None)
        short = {m.name for m in METHODS if asked_for(m, self.options) and not unfit(m, roomy)}
        if short and (not self._too_large or self.task.lines is not None):
            misses = (f"{trial.method}: {trial.failed}" for trial in self.trials if trial.method in short)
            return BudgetError("nothing fits the budget: " + "; ".join(misses))
        able = {method.name for method in WIDE} if self.task.tabulated is None else set()
        told = [trial for trial in self.trials if trial.method in able] or self.trials
        reasons = "; ".join(f"{trial.method}: {trial.failed}" for trial in told)
        text = f"no method serves this spec with oracle '{self.task.oracle}': {reasons}"
        return BudgetError(text) if self._too_large else UsageError(text)


def unfit(method: Method, task: Task) -> str | None:
    """Why a method cannot serve the task, in words for the user; None where it can."""
    if task.tabulated is None and method not in WIDE:
        return f"works from a truth table, which goes up to {MAX_INPUT_BITS} input bits"
    return method.unfit(task)


def asked_for(method: Method, options: BuildOptions) -> bool:
    """`linear` has no name of its own on the command line: it recognises what needs no Toffoli at all."""
    return options.method in ("auto", method.name) or (
        method.name == "linear" and options.method == "transform"
    )


def _levels(options: BuildOptions) -> tuple[Effort, ...]:
    """All levels up to the one asked for where time is limited, so that there is something early.

    High effort takes the results of normal effort along: its search is longer, but not always luckier.
    """
    ladder = _LADDER[options.effort]
    if options.time_limit is not None:
        return ladder
    return ladder[1:] if options.effort == "high" else ladder[-1:]


def _same(one: Block, other: Block) -> bool:
    return one.cascade == other.cascade and one.keep == other.keep and one.placement == other.placement
