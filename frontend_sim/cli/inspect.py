"""``frontend-sim inspect``: tell about the chain before any run."""

from __future__ import annotations

from pathlib import Path

import click

from frontend_sim.cli.console import print_json, print_notes, print_tables


@click.command("inspect")
@click.argument("scenario", type=click.Path(path_type=Path))
@click.option(
    "--plot",
    type=click.Path(path_type=Path),
    metavar="FILE",
    help="Draw magnitude, phase and step response into FILE, .png or .svg.",
)
@click.option("--overwrite", is_flag=True, help="Replace the plot if it exists.")
@click.option("--json", "as_json", is_flag=True, help="Print results as JSON.")
def command(scenario: Path, plot: Path | None, overwrite: bool, as_json: bool) -> None:
    """Tell what the transfer function of SCENARIO's chain says, without a run.

    Where the response to a step starts and ends, its shape, how long it takes; corners, poles,
    group delay, attenuation; and how far discrete models are from exact.
    """
    from frontend_sim.measure.response import inspect_scenario
    from frontend_sim.present import inspection_tables, plot_inspection
    from frontend_sim.scenario import load_scenario

    inspection = inspect_scenario(load_scenario(scenario))
    print_notes(inspection.notes)
    if plot is not None:  # first, so that a closed pipe does not cost the plot
        plot_inspection(inspection, plot, overwrite=overwrite)
    if as_json:
        print_json(inspection.as_dict())
        return
    print_tables(inspection_tables(inspection))
    if plot is not None:
        click.echo(f"plot: {plot}")
