"""`revsynth inspect`."""

from __future__ import annotations

from typing import Any

import click

from revsynth.cli.common import clear_progress, echo_json, load_spec, progress_line, spec_options, warn


@click.command("inspect")
@click.argument("spec", required=False)
@spec_options
@click.option("--json", "as_json", is_flag=True, help="One JSON object on standard output.")
def COMMAND(spec: str | None, as_json: bool, **inline: Any) -> None:  # noqa: N802
    """Say what the function of SPEC is, before anything is built.

    Words and domain, marked inputs, balance, degree, inputs that do not matter, symmetric groups, whether
    it is affine or one-to-one, and the lines that an embedding in place needs.

    \b
    Example:
      revsynth inspect specs/beacons.toml
      revsynth inspect --where "a * b == 35" --input a=4 --input b=4
    """
    wanted = load_spec(spec, **inline)
    from revsynth.api import inspect
    from revsynth.elaborate.overview import Overview, text
    from revsynth.logic.analysis import describe

    progress_line()("reading the spec")
    found = inspect(wanted)
    clear_progress()
    warn(found.warnings)
    if as_json:
        echo_json(found.to_json())
    else:
        click.echo(text(found) if isinstance(found, Overview) else describe(found))
