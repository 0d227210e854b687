"""``frontend-sim validate``: check scenario files, run nothing."""

from __future__ import annotations

import tomllib
from pathlib import Path

import click

from frontend_sim.cli.console import print_json
from frontend_sim.cli.options import PATH, json_option
from frontend_sim.cli.status import HOLDS, WRONG_INPUT
from frontend_sim.errors import InputError


@click.command("validate")
@click.argument("files", nargs=-1, required=True, type=PATH)
@json_option
def command(files: tuple[Path, ...], as_json: bool) -> int:
    """Check FILES of scenarios and sets, with all that they read, and run nothing.

    Exit status: 0 all files are right, 2 one of them is wrong.
    """
    faults = [_fault_of(file) for file in files]
    if as_json:
        rows = zip(files, faults, strict=True)
        print_json([{"file": str(file), "error": fault} for file, fault in rows])
    for file, fault in zip(files, faults, strict=True):
        if fault is not None:
            click.echo(f"error: {fault}", err=True)
        elif not as_json:
            click.echo(f"{file}: right")
    return WRONG_INPUT if any(faults) else HOLDS


def _fault_of(file: Path) -> str | None:
    from frontend_sim.scenario import load_scenario

    try:
        if _is_set(file):
            from frontend_sim.replay import read_set

            read_set(file)
            return None
        scenario = load_scenario(file)
        if scenario.check:  # the measures take a while to load
            from frontend_sim.measure.checks.impossible import refuse_impossible_checks

            refuse_impossible_checks(scenario, str(file))
    except InputError as error:
        return str(error)
    return None


def _is_set(file: Path) -> bool:
    """Return whether a file is a set; what cannot be read is told as a scenario is."""
    from frontend_sim.scenario.content import read_text
    from frontend_sim.scenario.set_marks import looks_like_a_set

    try:
        data = tomllib.loads(read_text(file))
    except (InputError, ValueError, RecursionError):
        return False
    return looks_like_a_set(data)
