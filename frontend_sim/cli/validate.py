"""``frontend-sim validate``: check scenario files, run nothing."""

from __future__ import annotations

from pathlib import Path

import click

from frontend_sim.cli.console import print_json
from frontend_sim.errors import InputError


@click.command("validate")
@click.argument("files", nargs=-1, required=True, type=click.Path(path_type=Path))
@click.option("--json", "as_json", is_flag=True, help="Print results as JSON.")
def command(files: tuple[Path, ...], as_json: bool) -> int:
    """Check scenario FILES with all that they read, and run nothing.

    Exit status: 0 all files are right, 2 one of them is wrong.
    """
    from frontend_sim.scenario import load_scenario

    faults: dict[str, str | None] = {}
    for file in files:
        try:
            load_scenario(file)
            faults[str(file)] = None
        except InputError as error:
            faults[str(file)] = str(error)
    if as_json:
        print_json([{"file": name, "error": fault} for name, fault in faults.items()])
    for name, fault in faults.items():
        if fault is not None:
            click.echo(f"error: {fault}", err=True)
        elif not as_json:
            click.echo(f"{name}: right")
    return 2 if any(faults.values()) else 0
