"""`revsynth draw`."""

from __future__ import annotations

import shutil
import sys
from collections.abc import Callable
from typing import TYPE_CHECKING, Any

import click

from revsynth.cli.common import echo_json, load_program
from revsynth.errors import UsageError
from revsynth.one_line import one_line

if TYPE_CHECKING:
    from revsynth.circuit.model import Circuit


@click.command("draw")
@click.argument("file")
@click.option("-o", "output", metavar="FILE", help="An .svg, .png or .pdf to write; the terminal without it.")
@click.option(
    "--width",
    type=click.IntRange(40, 10_000),
    metavar="COLUMNS",
    help="Width of the terminal drawing. Default: the terminal's.",
)
@click.option("--ascii", "ascii_only", is_flag=True, help="Plain ASCII in the terminal.")
@click.option("--title", default="", metavar="TEXT", help="A title over the drawing.")
@click.option("--json", "as_json", is_flag=True, help="One JSON object on standard output.")
@click.option(
    "--negctrl",
    type=click.Choice(["all-zero", "as-published"]),
    help="How to read negctrl(n) with n > 1 in a file from elsewhere.",
)
def COMMAND(  # noqa: N802
    file: str,
    output: str | None,
    width: int | None,
    ascii_only: bool,
    title: str,
    negctrl: Any,
    as_json: bool,
) -> None:
    """Draw the circuit of the OpenQASM FILE in the terminal, or as a picture with -o.

    Long circuits are wrapped into rows. Words are labelled; bit 0 of a word is its first line. Dots wait
    for 1, rings for 0; dots alone are a controlled Z. FILE '-' is standard input.

    \b
    Example:
      revsynth draw beacons.qasm
      revsynth draw beacons.qasm -o beacons.svg
    """
    if output is not None and (width is not None or ascii_only):
        raise UsageError("--width and --ascii are for the terminal: leave them out with -o")
    circuit = load_program(file, negctrl).circuit
    if output is None:
        drawing = _text(circuit, width, ascii_only)
        if title:
            drawing = f"{one_line(title)}\n\n{drawing}"
        if not as_json:
            click.echo(drawing)
    else:
        _write_picture(circuit, output, title)
    if as_json:
        text = None if output is not None else drawing.splitlines()
        echo_json({"circuit": file, "drawing": output, "text": text, "qubits": circuit.qubits})


def _text(circuit: Circuit, width: int | None, ascii_only: bool) -> str:
    from revsynth.report.terminal import draw_text

    columns = width or shutil.get_terminal_size((100, 24)).columns
    encoding = (sys.stdout.encoding or "ascii").lower()
    return draw_text(circuit, width=columns, ascii_only=ascii_only or "utf" not in encoding)


def _write_picture(circuit: Circuit, output: str, title: str) -> None:
    ending = output.rpartition(".")[2].lower()
    if ending not in ("svg", "png", "pdf"):
        raise UsageError(f"{output}: draw writes .svg, .png or .pdf, by the ending of the name")
    from revsynth.files import write_whole
    from revsynth.report.circuit_svg import draw_svg
    from revsynth.report.export import svg_to_pdf, svg_to_png

    picture = draw_svg(circuit, title=title)
    convert: dict[str, Callable[[str], bytes]] = {"svg": str.encode, "png": svg_to_png, "pdf": svg_to_pdf}
    write_whole(output, convert[ending](picture))
