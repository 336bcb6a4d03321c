"""The text of `inspect`: an analysis laid out for a terminal, without colours, about 100 columns at most."""

from __future__ import annotations

import textwrap
from collections.abc import Iterator, Mapping
from typing import Any

from revsynth.logic.analysis import SHOWN_CYCLES, Analysis, OutputFacts, PermutationFacts
from revsynth.one_line import one_line
from revsynth.spec.model import Word

WIDTH = 100
_LABEL = 20


def text(analysis: Analysis) -> str:
    """All sections, a blank line between them; warnings are left to whoever shows it."""
    sections = [
        _heading(analysis),
        _words("Inputs", analysis.inputs, analysis.labels),
        _words("Outputs", analysis.outputs, analysis.labels),
        _domain(analysis),
        _marked(analysis),
        _function(analysis),
        _bits(analysis),
        _permutation(analysis),
        _embedding(analysis),
    ]
    return "\n\n".join("\n".join(section) for section in map(list, sections) if section)


def _row(label: str, value: str) -> str:
    """`  label      value`, the value wrapped under itself."""
    lead = f"  {label:<{_LABEL}}"
    if len(label) >= _LABEL:
        lead = f"  {label}  "
    return textwrap.fill(
        value, WIDTH, initial_indent=lead, subsequent_indent=" " * (_LABEL + 2), break_on_hyphens=False
    )


def _plural(count: int, noun: str) -> str:
    return f"{count:,} {noun}" if count == 1 else f"{count:,} {noun}s"


def _share(part: int, whole: int) -> str:
    if whole == 0:
        return "none at all"
    percent = 100 * part / whole
    shown = f"{percent:.1f}" if percent >= 0.1 or part == 0 else f"{percent:.2g}"
    return f"{part:,} of {whole:,} ({shown} %)"


def _heading(analysis: Analysis) -> Iterator[str]:
    kinds = {
        "predicate": f"a predicate on {_plural(analysis.input_bits, 'input bit')}",
        "outputs": f"{_plural(analysis.input_bits, 'input bit')} to "
        f"{_plural(analysis.output_bits, 'output bit')}",
        "permutation": f"a permutation of {_plural(1 << analysis.input_bits, 'value')}, "
        f"in place on {_plural(analysis.input_bits, 'bit')}",
    }
    yield f"{one_line(analysis.title or analysis.source)}: {kinds[analysis.kind]}"


def _words(label: str, words: tuple[Word, ...], labels: Mapping[str, str]) -> Iterator[str]:
    if not words:
        return
    yield label
    for word in words:
        size = _plural(word.bits, "bit") + (", signed" if word.signed else "")
        yield _row(word.name, size if word.count is None else f"{_plural(word.count, 'word')} of {size}")
        named = [
            f"{bit} is {one_line(name)}" for bit, name in labels.items() if bit.startswith(f"{word.name}[")
        ]
        if named:
            yield _row("", ", ".join(named))


def _domain(analysis: Analysis) -> Iterator[str]:
    total = 1 << analysis.input_bits
    yield "Domain"
    if analysis.condition is None:
        yield _row("every input", f"{total:,}")
    else:
        yield _row("where", one_line(analysis.condition))
        yield _row("inputs", _share(analysis.domain, total))
    if analysis.free:
        yield _row("free values", f"at {_plural(analysis.free, 'input')} of the domain")


def _marked(analysis: Analysis) -> Iterator[str]:
    if analysis.marked is None:
        return
    yield "Marked"
    yield _row("inputs", _share(analysis.marked, analysis.domain) + " of the domain")
    for shown in analysis.marked_first:
        yield _row("", _in_words(shown))
    left = analysis.marked - len(analysis.marked_first)
    if left > 0:
        yield _row("", f"and {left:,} more")


def _in_words(values: dict[str, Any]) -> str:
    return ", ".join(f"{name} = {value}" for name, value in values.items())


def _balance(fact: OutputFacts) -> str:
    if fact.balanced:
        return "balanced"
    return f"{fact.ones:,} ones, {fact.zeros:,} zeros" + (f", {fact.free:,} free" if fact.free else "")


def _groups(groups: tuple[tuple[str, ...], ...]) -> str:
    return "; ".join("{" + _runs(group) + "}" for group in groups)


def _runs(names: tuple[str, ...]) -> str:
    """Names in order, three or more bits of a word in a row shortened to `a[2]...a[5]`."""
    runs: list[list[str]] = []
    for name in names:
        if runs and name == _next_name(runs[-1][-1]):
            runs[-1].append(name)
        else:
            runs.append([name])
    return ", ".join(f"{run[0]}...{run[-1]}" if len(run) > 2 else ", ".join(run) for run in runs)


def _next_name(name: str) -> str:
    """The name of the bit above, `a[3]` after `a[2]`; empty for the name of a one-bit word."""
    stem, bracket, index = name.rpartition("[")
    return f"{stem}[{int(index[:-1]) + 1}]" if bracket else ""


def _function(analysis: Analysis) -> Iterator[str]:
    """The facts of the function as a whole, each with what it means."""
    some_free = analysis.free > 0 or analysis.domain < 1 << analysis.input_bits
    yield "Function"
    if len(analysis.facts) == 1:
        fact = analysis.facts[0]
        yield _row("balance", _balance(fact))
        yield _row("degree", _degree(fact, some_free))
        yield _row("affine", _affine(fact, some_free))
        yield _row("linear inputs", _linear(fact))
    elif analysis.facts:
        exact = all(fact.degree_exact for fact in analysis.facts)
        yield _row("degree", f"{'' if exact else 'at most '}{analysis.degree} (the largest of the bits)")
        yield _row("affine", "yes, every bit: CNOT and NOT suffice" if analysis.affine else "no")
    unused = _runs(analysis.without_effect)
    note = " (with free values chosen so)" if some_free and unused else ""
    yield _row("inputs of no effect", (unused or "none") + note)
    yield _row("symmetric inputs", _groups(analysis.symmetric) or "none")
    if analysis.bound is not None:
        yield _row("ANDs, at least", f"{analysis.bound.ands}: {analysis.bound.why}")
    else:
        yield _row("ANDs, at least", "0" if analysis.affine else "no bound known")


def _degree(fact: OutputFacts, some_free: bool) -> str:
    if not fact.degree_exact:
        return f"at most {fact.degree}, with free values chosen well"
    return f"{fact.degree}" + (" at best, with free values chosen well" if some_free else "")


def _affine(fact: OutputFacts, some_free: bool) -> str:
    if fact.affine is None:
        return "no"
    return ("can be chosen so: " if some_free else "yes: ") + fact.affine


def _linear(fact: OutputFacts) -> str:
    if not fact.linear:
        return "none"
    return f"{', '.join(fact.linear)} (each only turns the result over)"


def _bits(analysis: Analysis) -> Iterator[str]:
    """A table of the output bits, where there are several."""
    if len(analysis.facts) < 2:
        return
    names = max(len("bit"), *(len(fact.name) for fact in analysis.facts))
    counts = max(len("ones"), *(len(f"{fact.ones:,}") for fact in analysis.facts))
    yield "Output bits"
    yield f"  {'bit':<{names}}  {'ones':>{counts}}  degree  notes"
    for fact in analysis.facts:
        degree = f"{'' if fact.degree_exact else '<='}{fact.degree}"
        lead = f"  {fact.name:<{names}}  {fact.ones:>{counts},}  {degree:>6}  "
        notes = "; ".join(_notes(fact)) or "-"
        yield textwrap.fill(
            notes, WIDTH, initial_indent=lead, subsequent_indent=" " * len(lead), break_on_hyphens=False
        )


def _notes(fact: OutputFacts) -> Iterator[str]:
    if fact.free:
        yield f"{fact.free:,} free"
    if fact.balanced:
        yield "balanced"
    if fact.affine is not None:
        yield f"= {fact.affine}"
        return
    if fact.linear:
        yield f"linear in {', '.join(fact.linear)}"
    if fact.without_effect:
        yield f"without {_runs(fact.without_effect)}"
    if fact.symmetric:
        yield f"symmetric in {_groups(fact.symmetric)}"


def _permutation(analysis: Analysis) -> Iterator[str]:
    if analysis.bijective is None or analysis.output_bits == 0:
        return
    facts = analysis.permutation
    if facts is None:
        if analysis.kind == "outputs" and analysis.input_bits == analysis.output_bits:
            yield "One-to-one"
            yield _row("bijective", "no: some output value occurs more than once")
        return
    yield "One-to-one"
    yield _row("bijective", "yes")
    if facts.cycles is None:
        yield _row("images", f"{facts.free:,} are free")
        yield _row("parity", "can be chosen even: exchanging two free images turns it over")
        return
    known = facts.cycles
    yield _row("fixed points", f"{known.fixed_points:,}")
    yield _row("cycles", _cycles(facts))
    yield _row("order", f"{known.order:,} repetitions give the identity")
    if not known.odd:
        yield _row("parity", "even")
    elif analysis.input_bits >= 4:
        yield _row(
            "parity",
            "odd: gates with at most 2 controls are even on 4 or more lines, so every gate set below "
            "`cascade` needs one work qubit",
        )
    else:
        yield _row("parity", "odd")


def _cycles(facts: PermutationFacts) -> str:
    assert facts.cycles is not None
    cycles = facts.cycles.cycles
    shown = [f"{count:,} of length {length:,}" for length, count in cycles[:SHOWN_CYCLES]]
    if len(cycles) > SHOWN_CYCLES:
        shown.append(f"{len(cycles) - SHOWN_CYCLES} other lengths up to {cycles[-1][0]:,}")
    return ", ".join(shown)


def _embedding(analysis: Analysis) -> Iterator[str]:
    found = analysis.embedding
    if found is None or analysis.kind == "permutation":
        return
    yield "Embedding in place"
    yield _row("same output value", f"for {_plural(found.multiplicity, 'input')} at most")
    at_most = "" if found.exact else "at most "
    yield _row(
        "lines",
        f"{at_most}{found.lines}: the larger of {_plural(analysis.input_bits, 'input bit')} and "
        f"{_plural(analysis.output_bits, 'output bit')} + {found.garbage} garbage "
        f"(ceil(log2 {found.multiplicity:,}))",
    )
    if found.constants:
        start = "starts" if found.constants == 1 else "start"
        yield _row("", f"{at_most}{_plural(found.constants, 'line')} {start} in a constant")
    if not found.exact:
        yield _row("", "free output bits are too many to choose them best: less may do")
