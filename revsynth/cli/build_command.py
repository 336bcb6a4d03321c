"""`revsynth build`."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable
from typing import TYPE_CHECKING, Any

import click

from revsynth.cli.common import F, clear_progress, echo_json, load_spec, progress_line, spec_options, warn
from revsynth.errors import UsageError
from revsynth.one_line import one_line
from revsynth.options import CHOICES, BuildOptions

if TYPE_CHECKING:
    from revsynth.api import Build


def _choice(name: str, text: str, show_default: bool = True) -> Callable[[F], F]:
    values = CHOICES[name]
    default = f" Default: {values[0]}." if show_default else ""
    return click.option(f"--{name}", type=click.Choice(values), default=None, help=text + default)


@click.command("build")
@click.argument("spec", required=False)
@click.option("-o", "output", metavar="FILE", help="Where to write. Default: standard output ('-').")
@_choice("oracle", "Form of the block. Default: phase, bit or inplace by the spec.", show_default=False)
@_choice("gates", "Gate set of the file.")
@_choice("uncompute", "How scratch is erased; 'measured' costs no T and needs OpenQASM 3.")
@click.option("--qubits", type=int, metavar="N", help="The most qubits the file may use. Default: no limit.")
@click.option("--t", type=int, metavar="N", help="The most T gates. Default: no limit.")
@click.option("--depth", type=int, metavar="N", help="The most layers. Default: no limit.")
@_choice("aim", "What to make small first within the budget.")
@_choice("method", "Method of synthesis; 'auto' keeps the cheapest for the aim.")
@_choice("effort", "How much work to do, a fixed amount, not a time.")
@click.option(
    "--time-limit",
    type=float,
    metavar="SECONDS",
    help="Stop earlier with the best so far. Default: no limit.",
)
@_choice("format", "Format of the file; 'plain' is OpenQASM 2 with one register, and a map in FILE.json.")
@_choice("controls", "Whether cascades may use negative controls.")
@click.option("--seed", type=int, metavar="N", help="Seed of random choices. Default: 0.")
@click.option(
    "--outputs-any-order",
    is_flag=True,
    help="Let an in-place block leave its output bits on other lines; 'placement' in the JSON says where.",
)
@click.option("--unverified", is_flag=True, help="Write even where verification could not finish.")
@spec_options
@click.option("--json", "as_json", is_flag=True, help="One JSON object on standard output.")
def COMMAND(  # noqa: N802
    spec: str | None,
    output: str | None,
    as_json: bool,
    where: str | None,
    inputs: tuple[str, ...],
    constants: tuple[str, ...],
    domain: str | None,
    from_format: str | None,
    free_inputs: bool,
    **words: Any,
) -> None:
    """Build a circuit for SPEC, read it back, verify it for every input, and write it.

    Nothing is written unless the circuit was verified. Without -o the circuit goes to standard output and
    the summary to standard error.

    \b
    Forms, for inputs x:
      phase     the sign (-1)^f(x), of a predicate
      bit       y becomes y XOR f(x)
      fresh     the outputs start in 0, which is cheaper
      compute   as fresh, and what undoes it stays in the register keep
      inplace   x becomes p(x), of a permutation or one-to-one outputs
      embedded  the fewest lines: outputs in place of inputs, garbage left

    \b
    Example:
      revsynth build specs/beacons.toml -o beacons.qasm
      revsynth build specs/beacons.toml --uncompute measured --qubits 16 -o beacons.qasm
      revsynth build --where "a * b == 35" --input a=4 --input b=4
    """
    options = BuildOptions(**{name: value for name, value in words.items() if value is not None})
    if spec is not None and output is not None and _same_file(spec, output):
        raise UsageError(f"{output}: this is the spec itself: name another file to write")
    wanted = load_spec(spec, where, inputs, constants, domain, from_format, free_inputs)
    from revsynth.api import build

    built = build(wanted, options=options, progress=progress_line())
    clear_progress()
    warn(built.warnings)
    to_stdout = output in (None, "-", "/dev/stdout")
    if output is not None and not to_stdout:
        built.write(output)
    if as_json:
        echo_json({"title": built.spec.title, "circuit": None if to_stdout else output, **built.to_json()})
        return
    if to_stdout:
        sys.stdout.write(built.text())
    click.echo(_summary(built, None if to_stdout else output), err=to_stdout)


def _same_file(one: str, other: str) -> bool:
    return os.path.isfile(one) and os.path.exists(other) and os.path.samefile(one, other)


def _summary(built: Build, output: str | None) -> str:
    from revsynth.cli.tables import checked, cost_lines

    lines = [one_line(built.spec.title or built.spec.source)]
    function = built.counts
    if function["marked"] is not None:
        lines.append(f"  marked     {function['marked']:,} of {function['domain']:,} inputs")
    how = ", ".join(filter(None, [built.method, built.variant]))
    lines.append(f"  oracle     {built.oracle}, {built.options.gates}, by {how}")
    lines.extend(cost_lines(built.cost))
    evidence = built.evidence
    lines.append(f"  evidence   {evidence.level}: {evidence.detail or checked(evidence)}")
    if built.stopped_early:
        lines.append("  stopped    by the time limit: the best so far")
    if built.options.format == "plain":
        lines.append(f"  in q       {_places(built.qubit_map())}")
    if output is not None:
        lines.append(f"  written    {output}")
    return "\n".join(lines)


def _places(qubits: dict[str, list[int]]) -> str:
    """Where each register is in the one register of the format `plain`: `a 0-3, work 4`."""
    return ", ".join(
        f"{name} {places[0]}" + (f"-{places[-1]}" if len(places) > 1 else "")
        for name, places in qubits.items()
    )
