"""`revsynth draw`."""

from __future__ import annotations

import shutil
import sys
from collections.abc import Callable
from typing import Any

import click

from revsynth.cli.common import load_program
from revsynth.errors import UsageError


@click.command("draw")
@click.argument("file")
@click.option("-o", "output", metavar="FILE", help="An .svg, .png or .pdf to write instead.")
@click.option(
    "--width", type=click.IntRange(40, 10_000), metavar="COLUMNS", help="Width of the terminal drawing."
)
@click.option("--ascii", "ascii_only", is_flag=True, help="Plain ASCII in the terminal.")
@click.option("--title", default="", help="A title over the picture.")
@click.option(
    "--negctrl",
    type=click.Choice(["all-zero", "as-published"]),
    help="How to read negctrl(n) with n > 1 in a file from elsewhere.",
)
def COMMAND(  # noqa: N802
    file: str, output: str | None, width: int | None, ascii_only: bool, title: str, negctrl: Any
) -> None:
    """Draw the circuit of the OpenQASM FILE in the terminal, or as a picture with -o.

    Long circuits are wrapped into rows. Words are labelled; bit 0 of a word is its first line.

    \b
    Example:
      revsynth draw beacons.qasm
      revsynth draw beacons.qasm -o beacons.svg
    """
    circuit = load_program(file, negctrl).circuit
    if output is None:
        from revsynth.report.terminal import draw_text

        columns = width or shutil.get_terminal_size((100, 24)).columns
        encoding = (sys.stdout.encoding or "ascii").lower()
        click.echo(draw_text(circuit, width=columns, ascii_only=ascii_only or "utf" not in encoding))
        return
    ending = output.rpartition(".")[2].lower()
    if ending not in ("svg", "png", "pdf"):
        raise UsageError(f"{output}: draw writes .svg, .png or .pdf, by the ending of the name")
    from revsynth.files import write_whole
    from revsynth.report.circuit_svg import draw_svg
    from revsynth.report.export import svg_to_pdf, svg_to_png

    picture = draw_svg(circuit, title=title)
    convert: dict[str, Callable[[str], bytes]] = {"svg": str.encode, "png": svg_to_png, "pdf": svg_to_pdf}
    write_whole(output, convert[ending](picture))
