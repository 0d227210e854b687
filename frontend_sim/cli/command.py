"""The command ``frontend-sim`` and its exit status."""

from __future__ import annotations

import os
import select
import signal
import sys
import threading
from collections.abc import Iterator, Sequence
from contextlib import contextmanager, suppress
from importlib import import_module
from typing import NoReturn

import click

from frontend_sim.cli.status import HOLDS, INTERRUPTED, WRONG_INPUT
from frontend_sim.errors import FrontendSimError, Interrupted

_COMMANDS = {
    "run": "simulate one scenario and store it",
    "inspect": "tell about the chain before any run",
    "validate": "check scenario files, run nothing",
    "replay": "run a set of scenarios, resume it, summarize it",
    "sensitivity": "tell which part, rate or time moves the checks most",
    "solve": "find the least wait, the lowest rate, ... that passes",
    "compare": "tell what changed between runs, and why",
    "report": "write a page to read in the morning",
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

    Exit status: 0 all checks hold, 1 a check fails, 2 the input is wrong, 3 a set is incomplete,
    130 interrupted.
    """


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command and return its exit status; a user never meets a traceback."""
    _silence_plots()
    try:
        with _ended_like_ctrl_c():
            status = command.main(arguments, prog_name="frontend-sim", standalone_mode=False)
            _flush()
    except click.ClickException as error:
        error.show(sys.stderr)
        return WRONG_INPUT
    except (KeyboardInterrupt, click.Abort, Interrupted):
        _tell("interrupted; nothing half written is left", INTERRUPTED)
        if arguments is None:
            _leave(INTERRUPTED)
        return INTERRUPTED
    except (BrokenPipeError, SystemExit):  # click turns the one into the other
        # Where the reader went away, as `head` does, nothing is wrong and nothing is left.
        closed = _output_is_closed()
        _forget_output()
        if closed:
            return HOLDS
        return _tell("error: a process or a reader of messages went away; try again", WRONG_INPUT)
    except FrontendSimError as error:
        return _tell(f"error: {error}", WRONG_INPUT)
    except MemoryError:
        text = "the run does not fit into memory; shorten it, or keep or step fewer points"
        return _tell(f"error: {text}", WRONG_INPUT)
    except OSError as error:
        # Files are written by the library, which has errors of its own; this is standard output.
        _forget_output()
        text = f"results cannot be written to standard output: {error.strerror}"
        return _tell(f"error: {text}", WRONG_INPUT)
    return status if isinstance(status, int) else HOLDS


def _tell(text: str, status: int) -> int:
    with suppress(OSError):  # where nobody reads messages either, the status is left
        click.echo(text, err=True)
    return status


def _silence_plots() -> None:
    """Keep what Matplotlib logs of its own folders, where it may not write, off the terminal."""
    import logging

    logging.getLogger("matplotlib").setLevel(logging.ERROR)


def _leave(status: int) -> NoReturn:
    """End the process, in which everything is cleaned up by now.

    Python itself would end it by a signal where the interruption came in the middle of code that
    a library makes as it loads.
    """
    with suppress(OSError, ValueError):
        _flush()
    os._exit(status)


def _flush() -> None:
    if sys.stdout is not None:
        sys.stdout.flush()


def _output_is_closed() -> bool:
    """Return whether standard output is a pipe that nobody reads any more."""
    if not hasattr(select, "poll"):
        return True  # the system cannot tell, and no other pipe is as likely
    poll = select.poll()
    try:
        poll.register(sys.stdout.fileno(), select.POLLOUT)
    except (AttributeError, OSError, ValueError):
        return False  # there is no file below it
    return any(event & (select.POLLERR | select.POLLHUP) for _, event in poll.poll(0))


def _forget_output() -> None:
    """Let nothing that waits for standard output be written at the end of the process."""
    with suppress(OSError, ValueError):
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


@contextmanager
def _ended_like_ctrl_c() -> Iterator[None]:
    """Make a scheduler's end of a run (SIGTERM, SIGHUP) the same as Ctrl-C: it cleans up."""
    if threading.current_thread() is not threading.main_thread():
        yield
        return
    numbers = [getattr(signal, name) for name in ("SIGTERM", "SIGHUP") if hasattr(signal, name)]
    before = {
        number: signal.signal(number, signal.default_int_handler)
        for number in numbers
        if signal.getsignal(number) is not signal.SIG_IGN  # as nohup has it for a whole night
    }
    try:
        yield
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)
