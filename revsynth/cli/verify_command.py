"""`revsynth verify`."""

from __future__ import annotations

import json
from typing import TYPE_CHECKING, Any

import click

from revsynth.cli.common import (
    clear_progress,
    echo_json,
    load_program,
    load_spec,
    progress_line,
    shown_file,
    spec_options,
    warn,
)
from revsynth.errors import UsageError
from revsynth.one_line import one_line
from revsynth.options import CHOICES

if TYPE_CHECKING:
    from revsynth.verification.evidence import Verdict


@click.command("verify")
@click.argument("paths", nargs=-1, metavar="[SPEC] FILE")
@click.option(
    "--oracle",
    type=click.Choice(CHOICES["oracle"]),
    help="The form. Default: by the registers: mark or outputs mean bit, line means embedded, else phase or "
    "inplace.",
)
@click.option("--exact-phase", is_flag=True, help="Let no constant phase pass. Default: one may.")
@click.option(
    "--negctrl",
    type=click.Choice(["all-zero", "as-published"]),
    help="How to read negctrl(n) with n > 1 in a file from elsewhere.",
)
@spec_options
@click.option("--json", "as_json", is_flag=True, help="One JSON object on standard output.")
def COMMAND(  # noqa: N802
    paths: tuple[str, ...],
    oracle: Any,
    exact_phase: bool,
    negctrl: Any,
    as_json: bool,
    where: str | None,
    **inline: Any,
) -> int:
    """Check that the OpenQASM FILE does what SPEC says, for every input.

    The file may come from anywhere; its header is not believed. Registers are matched by name. Shows an
    input at which the circuit fails, where there is one. Exit status 0 holds, 1 fails, 3 undecided.

    \b
    Example:
      revsynth verify specs/beacons.toml beacons.qasm
      revsynth verify --where "a * b == 35" --input a=4 --input b=4 oracle.qasm
    """
    wanted = 1 if where is not None else 2
    if len(paths) != wanted:
        raise UsageError("give FILE alone with --where" if where is not None else "give SPEC and FILE")
    if paths == ("-", "-"):
        raise UsageError("standard input can be the spec or the circuit, not both")
    spec = load_spec(paths[0] if where is None else None, where, **inline)
    program = load_program(paths[-1], negctrl)
    from revsynth.spec.understand import understand
    from revsynth.verification import verify_program

    warn(understand(spec).warnings)
    verdict = verify_program(spec, program, oracle=oracle, exact_phase=exact_phase, progress=progress_line())
    clear_progress()
    if as_json:
        echo_json(verdict.to_json())
    else:
        click.echo(
            _in_words(
                verdict, shown_file(paths[-1]), form_named=oracle is not None or spec.kind == "permutation"
            )
        )
    return {True: 0, False: 1, None: 3}[verdict.holds]


def _in_words(verdict: Verdict, file: str, form_named: bool) -> str:
    from revsynth.cli.tables import checked

    evidence = verdict.evidence
    if verdict.holds:
        lines = [f"{file}: does what the spec says"]
    elif verdict.holds is None:
        lines = [f"{file}: undecided: {evidence.detail}"]
    else:
        lines = [f"{file}: does not do what the spec says"]
        if not form_named:
            lines.append(f"  form       {verdict.oracle}, by its registers (--oracle names another)")
    found = verdict.counterexample
    if found is not None:
        lines.append(f"  at         {_words(found.inputs)}")
        if found.bits:
            lines.append(f"  that is    {one_line(_words(found.bits))}")
        lines.append(f"  fault      {found.kind}: {found.why}")
        if found.expected:
            lines.append(f"  expected   {_words(found.expected)}")
        if found.got:
            lines.append(f"  got        {_words(found.got)}")
    level: str = evidence.level
    if verdict.holds is False:
        level = "one input decides"
    elif level == "sampled":
        level = "sampled, not a proof"
    how = (
        checked(evidence)
        if verdict.holds and level == "proved"
        else f"{evidence.inputs_checked} inputs checked"
    )
    lines.append(f"  evidence   {level}: {how}")
    lines.extend(f"             {link}" for link in evidence.links)
    if verdict.holds and verdict.global_phase:
        lines.append(
            f"  phase      one constant phase of {verdict.global_phase:.6g} radians, which nobody can observe"
        )
    return "\n".join(lines)


def _words(values: Any) -> str:
    if isinstance(values, dict):
        return ", ".join(f"{name} = {json.dumps(value)}" for name, value in values.items())
    return json.dumps(values)
