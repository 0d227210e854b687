"""The command ``frontend-sim`` and its exit status."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from importlib import import_module

import click

from frontend_sim.errors import FrontendSimError, Interrupted

HOLDS, FAILS, WRONG_INPUT, INTERRUPTED = 0, 1, 2, 130

_COMMANDS = {
    "run": "simulate one scenario and store it",
    "inspect": "tell about the chain before any run",
    "validate": "check scenario files, run nothing",
    "schema": "print the JSON Schema of the scenario file",
}


class _Commands(click.Group):
    """Loads a command when it is called, so that help and typing errors cost nothing."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        return list(_COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        if cmd_name not in _COMMANDS:
            return None
        command: click.Command = import_module(f"frontend_sim.cli.{cmd_name}").command
        return command

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        from frontend_sim.errors import nearest

        name = args[0]
        if name not in _COMMANDS and not name.startswith("-"):
            ctx.fail(f"no command {name!r}{nearest(name, _COMMANDS)}")
        return super().resolve_command(ctx, args)

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        with formatter.section("Commands"):
            formatter.write_dl(list(_COMMANDS.items()))


@click.group(cls=_Commands, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(package_name="frontend-sim", message="%(prog)s %(version)s")
def command() -> None:
    """Simulate sampled sensor front ends: stimulus, analog chain, ADC, codes.

    Exit status: 0 all checks hold, 1 a check fails, 2 the input is wrong, 130 interrupted.
    """


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command and return its exit status; a user never meets a traceback."""
    try:
        status = command.main(arguments, prog_name="frontend-sim", standalone_mode=False)
    except click.ClickException as error:
        error.show(sys.stderr)
        return WRONG_INPUT
    except (KeyboardInterrupt, click.Abort, Interrupted):
        click.echo("interrupted; nothing half written is left", err=True)
        return INTERRUPTED
    except FrontendSimError as error:
        click.echo(f"error: {error}", err=True)
        return WRONG_INPUT
    except MemoryError:
        click.echo(
            "error: the run does not fit into memory; shorten it, or keep fewer waveform points",
            err=True,
        )
        return WRONG_INPUT
    except BrokenPipeError:
        # The reader of a pipe went away, as `head` does; nothing is wrong and nothing is left.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return HOLDS
    return status if isinstance(status, int) else HOLDS
