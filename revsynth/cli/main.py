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


@click.command(
    cls=LazyGroup,
    invoke_without_command=True,
    subcommand_metavar="COMMAND [ARGS]...",
    context_settings={"help_option_names": ["-h", "--help"]},
)
@click.version_option(package_name="revsynth", message="%(prog)s %(version)s")
@click.pass_context
def cli(ctx: click.Context) -> None:
    """Reversible circuits from conditions and subroutines: built, counted, verified.

    Start with `revsynth build SPEC -o FILE`. Results go to standard output, progress and warnings to
    standard error. Exit status: 0 done, 1 the answer is no, 2 bad input or usage, 3 undecided,
    130 interrupted.
    """
    if ctx.invoked_subcommand is None:
        click.echo(ctx.get_help(), err=True)
        ctx.exit(2)


def main(arguments: list[str] | None = None) -> int:
    """Run the command line and return its exit status."""
    from revsynth.errors import RevsynthError

    try:
        status: Any = cli.main(args=arguments, prog_name="revsynth", standalone_mode=False)
        sys.stdout.flush()
    except click.exceptions.Exit as stop:
        return stop.exit_code
    except click.UsageError as error:
        hint = f" (try: {error.ctx.command_path} --help)" if error.ctx else ""
        _complain(f"{error.format_message()}{hint}")
        return 2
    except click.ClickException as error:
        _complain(error.format_message())
        return 2
    except RevsynthError as error:
        _complain(str(error))
        return error.exit_status
    except (KeyboardInterrupt, click.Abort):
        _complain("interrupted, nothing was written")
        return 130
    except BrokenPipeError:
        # The reader of our output has left (head, less): that is its good right.
        _give_up_output()
        return 0
    except OSError as error:
        _give_up_output()
        _complain(f"{error.filename or 'standard output'}: {error.strerror or error}")
        return 2
    return status if isinstance(status, int) else 0


def _complain(message: str) -> None:
    """An error is one line, whatever names and texts it quotes."""
    from revsynth.one_line import one_line

    click.echo(f"revsynth: {one_line(message)}", err=True)


def _give_up_output() -> None:
    """Let what is still buffered for standard output go nowhere, so that Python's exit does not try again."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def run() -> None:
    """The console script."""
    sys.exit(main())
