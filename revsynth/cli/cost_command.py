"""`revsynth cost`."""

from __future__ import annotations

from typing import Any

import click

from revsynth.cli.common import echo_json, load_program, shown_file


@click.command("cost")
@click.argument("file")
@click.option(
    "--negctrl",
    type=click.Choice(["all-zero", "as-published"]),
    help="How to read negctrl(n) with n > 1 in a file from elsewhere.",
)
@click.option("--json", "as_json", is_flag=True, help="One JSON object on standard output.")
def COMMAND(file: str, negctrl: Any, as_json: bool) -> None:  # noqa: N802
    """Count what the OpenQASM FILE costs, gate definitions expanded ('-': standard input).

    \b
    Example:
      revsynth cost beacons.qasm
    """
    from revsynth.circuit.cost import measure
    from revsynth.cli.tables import cost_lines

    cost = measure(load_program(file, negctrl).circuit).to_json(ands=None, cascade=None)
    if as_json:
        echo_json(cost)
    else:
        click.echo("\n".join([shown_file(file), *cost_lines(cost)]))
