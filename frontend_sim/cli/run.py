"""``frontend-sim run``: simulate one scenario and store it."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from frontend_sim.cli.console import print_json, print_notes, print_tables, progress_bar
from frontend_sim.cli.options import PATH, json_option, output_option, overwrite_option, plot_option
from frontend_sim.cli.status import FAILS, HOLDS

if TYPE_CHECKING:
    from frontend_sim.archive import Record, ScanRecord


@click.command("run")
@click.argument("scenario", type=PATH)
@output_option(
    "RECORD.h5",
    "Where the record goes; by default the scenario's name with .h5, in this folder.",
)
@plot_option("Also draw the run")
@overwrite_option("the record and the plot if they exist")
@json_option
def command(
    scenario: Path, output: Path | None, plot: Path | None, overwrite: bool, as_json: bool
) -> int:
    """Simulate SCENARIO and store the run as an HDF5 record.

    Exit status: 0 all checks hold, 1 a check fails, 2 the input is wrong.
    """
    from frontend_sim.archive import open_record, record_run
    from frontend_sim.archive.room import check_room
    from frontend_sim.measure.checks.impossible import refuse_impossible_checks
    from frontend_sim.present import check_channels_drawn, check_plot_target
    from frontend_sim.scenario import ScanScenario, load_scenario
    from frontend_sim.simulation import ScanSimulation, Simulation

    values = load_scenario(scenario)
    refuse_impossible_checks(values, str(scenario))
    target = output or Path(f"{scenario.stem}.h5")
    if plot is not None:
        check_plot_target(plot, overwrite)
        if isinstance(values, ScanScenario):
            check_channels_drawn(len(values.channel), plot)
    with progress_bar(scenario.name) as advance:
        if isinstance(values, ScanScenario):
            simulation: Simulation | ScanSimulation = ScanSimulation(values, progress=advance)
        else:
            simulation = Simulation(values, progress=advance)
    print_notes(check_room(simulation, target))
    with progress_bar(scenario.name) as advance:
        path = record_run(
            simulation,
            target,
            overwrite=overwrite,
            progress=advance,
            inputs=[scenario],
        )
    with open_record(path) as record:
        _tell(record, target, plot, overwrite, as_json)
        return FAILS if record.verdict == "fails" else HOLDS


def _tell(
    record: Record | ScanRecord, target: Path, plot: Path | None, overwrite: bool, as_json: bool
) -> None:
    from frontend_sim.archive import ScanRecord
    from frontend_sim.present import (
        plot_run,
        plot_scan,
        run_summary,
        run_tables,
        scan_summary,
        scan_tables,
    )

    print_notes(record.notes)
    if plot is not None:  # first, so that a closed pipe does not cost the plot
        if isinstance(record, ScanRecord):
            plot_scan(record, plot, overwrite=overwrite)
        else:
            plot_run(record, plot, overwrite=overwrite)
    if as_json:
        told = scan_summary(record) if isinstance(record, ScanRecord) else run_summary(record)
        print_json({"record": str(target), **told})
        return
    print_tables(scan_tables(record) if isinstance(record, ScanRecord) else run_tables(record))
    click.echo(f"record: {target}")
    if plot is not None:
        click.echo(f"plot: {plot}")
