"""``frontend-sim inspect``: tell about the chain before any run."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from frontend_sim.cli.console import print_json, print_notes, print_tables
from frontend_sim.cli.options import PATH, json_option, overwrite_option, plot_option

if TYPE_CHECKING:
    from frontend_sim.present.before_run import BeforeRun
    from frontend_sim.scenario import ScanScenario, Scenario


@click.command("inspect")
@click.argument("scenario", type=PATH)
@plot_option("Draw magnitude, phase and step response")
@overwrite_option("the plot if it exists")
@json_option
def command(scenario: Path, plot: Path | None, overwrite: bool, as_json: bool) -> int:
    """Tell what the transfer function of SCENARIO's chain says, without a run.

    Where the response to a step starts and ends, its shape, how long it takes; corners, poles,
    group delay, attenuation; how far discrete models are from exact; what folds; and the verdicts
    on the checks that need no run. Exit status: 0 these hold, 1 one fails, 2 the input is wrong.
    """
    from frontend_sim.measure.checks.impossible import refuse_impossible_checks
    from frontend_sim.measure.response import inspect_scenario
    from frontend_sim.present import check_plot_target, inspection_tables, plot_inspection
    from frontend_sim.scenario import ScanScenario, load_scenario

    values = load_scenario(scenario)
    refuse_impossible_checks(values, str(scenario))
    if plot is not None:
        check_plot_target(plot, overwrite)
    if isinstance(values, ScanScenario):
        return _inspect_scan(values, plot, overwrite, as_json)
    inspection = inspect_scenario(values)
    told = _told(values)
    print_notes((*inspection.notes, *told.notes))
    if plot is not None:  # first, so that a closed pipe does not cost the plot
        plot_inspection(inspection, plot, overwrite=overwrite)
    if as_json:
        print_json({**inspection.as_dict(), **told.summary()})
        return told.status
    print_tables((*inspection_tables(inspection), *told.tables()))
    if plot is not None:
        click.echo(f"plot: {plot}")
    return told.status


def _inspect_scan(scan: ScanScenario, plot: Path | None, overwrite: bool, as_json: bool) -> int:
    """Tell of timing, crosstalk and each channel."""
    from frontend_sim.measure.scan import inspect_scan
    from frontend_sim.present import (
        check_channels_drawn,
        inspection_tables,
        plot_scan_inspection,
        report_tables,
    )

    if plot is not None:
        check_channels_drawn(len(scan.channel), plot)
    inspection = inspect_scan(scan)
    told = {each.channel: _told(each) for each in scan.channels(scan.run_length())}
    status = max(each.status for each in told.values())
    print_notes(inspection.notes)
    if plot is not None:
        plot_scan_inspection(inspection, plot, overwrite=overwrite)
    if as_json:
        whole = inspection.as_dict()
        for name, each in told.items():
            whole["channels"][name].update(each.summary())
        print_json(whole)
        return status
    print_tables(report_tables(inspection.report, inspection.title))
    for name, one in inspection.channels.items():
        click.echo(f"\nChannel {name}")
        print_tables((*inspection_tables(one), *told[name].tables()))
    if plot is not None:
        click.echo(f"plot: {plot}")
    return status


def _told(scenario: Scenario) -> BeforeRun:
    """Return what folds, and the verdicts that need no run."""
    from frontend_sim.present.before_run import BeforeRun

    return BeforeRun.of(scenario)
