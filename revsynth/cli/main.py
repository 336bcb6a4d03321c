"""The command line: loads only the command that is asked for, and turns errors into one line."""

from __future__ import annotations

import os
import sys
from importlib import import_module
from typing import Any

import click

COMMANDS = {
    "inspect": "say what a function is: words, marked inputs, degree, symmetry, lines",
    "build": "build a verified circuit from a spec and write it as OpenQASM",
    "verify": "check an OpenQASM file from anywhere against a spec",
    "cost": "count what an OpenQASM file costs",
    "draw": "draw a circuit in the terminal, or as SVG, PNG or PDF",
}
"""One module `revsynth.cli.NAME_command` each, holding the click command `COMMAND`."""


class LazyGroup(click.Group):
    """A group that imports a command when it is run; its own help needs none of them."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = import_module(f"revsynth.cli.{cmd_name}_command").COMMAND
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))


@click.command(cls=LazyGroup, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(package_name="revsynth", message="%(prog)s %(version)s")
def cli() -> None:
    """Reversible circuits from conditions and subroutines: built, counted, verified.

    Start with `revsynth build SPEC -o FILE`. Results go to standard output, progress and warnings to
    standard error. Exit status: 0 done, 1 the answer is no, 2 bad input or usage, 3 undecided,
    130 interrupted.
    """


def main(arguments: list[str] | None = None) -> int:
    """Run the command line and return its exit status."""
    from revsynth.errors import RevsynthError

    try:
        status: Any = cli.main(args=arguments, prog_name="revsynth", standalone_mode=False)
    except click.exceptions.Exit as stop:
        return stop.exit_code
    except click.UsageError as error:
        hint = f" (try: {error.ctx.command_path} --help)" if error.ctx else ""
        click.echo(f"revsynth: {error.format_message()}{hint}", err=True)
        return 2
    except click.ClickException as error:
        click.echo(f"revsynth: {error.format_message()}", err=True)
        return 2
    except RevsynthError as error:
        click.echo(f"revsynth: {error}", err=True)
        return error.exit_status
    except (KeyboardInterrupt, click.Abort):
        click.echo("revsynth: interrupted, nothing was written", err=True)
        return 130
    except BrokenPipeError:
        # The reader of our output has left (head, less): that is its good right.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    return status if isinstance(status, int) else 0


def run() -> None:
    """The console script."""
    sys.exit(main())
