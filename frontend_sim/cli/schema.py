"""``frontend-sim schema``: print the JSON Schema of the scenario file."""

from __future__ import annotations

import click

from frontend_sim.cli.console import print_json


@click.command("schema")
def command() -> None:
    """Print the JSON Schema of the scenario file, for editors that complete and check TOML."""
    from frontend_sim.scenario import json_schema

    print_json(json_schema())
