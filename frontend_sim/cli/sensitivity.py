"""``frontend-sim sensitivity``: what moves the checks most."""

from __future__ import annotations

from pathlib import Path

import click

from frontend_sim.cli.console import print_json, print_tables, progress_bar
from frontend_sim.cli.options import PATH, json_option, overwrite_option, plot_option


@click.command("sensitivity")
@click.argument("scenario", type=PATH)
@click.option(
    "--key", "keys", multiple=True, metavar="KEY", help="Change only this key; may be repeated."
)
@plot_option("Draw the bars")
@overwrite_option("the plot if it exists")
@json_option
def command(
    scenario: Path, keys: tuple[str, ...], plot: Path | None, overwrite: bool, as_json: bool
) -> None:
    """Tell which part, rate or time moves the checks of SCENARIO most.

    Each number of the scenario is changed by a little to either side, and the checks are made
    anew: normalized derivatives, what 1 % more adds to the margin, what a tolerance can cost.
    """
    from frontend_sim.measure.sensitivity import sensitivities
    from frontend_sim.present import check_plot_target, plot_sensitivities, sensitivity_tables
    from frontend_sim.scenario import load_scenario

    values = load_scenario(scenario)
    if plot is not None:
        check_plot_target(plot, overwrite)
    with progress_bar(scenario.name) as advance:
        found = sensitivities(values, keys, advance)
    if plot is not None:  # first, so that a closed pipe does not cost the plot
        plot_sensitivities(found, plot, overwrite=overwrite)
    if as_json:
        print_json([each.as_dict() for each in found])
        return
    print_tables(sensitivity_tables(found))
    if plot is not None:
        click.echo(f"plot: {plot}")
