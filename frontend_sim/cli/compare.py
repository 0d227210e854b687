"""``frontend-sim compare``: what changed between runs, and why."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from frontend_sim.cli.console import print_json, print_notes, print_tables, progress_bar
from frontend_sim.cli.options import PATH, json_option, overwrite_option, plot_option
from frontend_sim.cli.status import FAILS, HOLDS

if TYPE_CHECKING:
    from frontend_sim.archive import Record, ScanRecord
    from frontend_sim.comparison import RecordComparison, Tolerances


@click.command("compare")
@click.argument("runs", nargs=-1, required=True, type=PATH)
@click.option(
    "--tolerance",
    "tolerances",
    multiple=True,
    metavar="TEXT",
    help='How far a difference does not matter: "0.1 LSB" for pin, codes and waveforms, "2 %" for '
    'every measure, "NAME=0.5 dB" for one of them. May be given several times.',
)
@click.option("--attribute", is_flag=True, help="Run again with one changed parameter at a time.")
@click.option(
    "--seeds",
    type=click.IntRange(min=8),
    metavar="N",
    help="Run both again with N seeds to judge measures that noise moves.",
)
@plot_option("Draw both and their difference")
@overwrite_option("the plot if it exists")
@json_option
def command(
    runs: tuple[Path, ...],
    tolerances: tuple[str, ...],
    attribute: bool,
    seeds: int | None,
    plot: Path | None,
    overwrite: bool,
    as_json: bool,
) -> int:
    """Compare RUNS, records or sets: each with the first.

    Exit status: 0 nothing differs by more than noise and tolerance, 1 something does, 2 the input
    is wrong.
    """
    from frontend_sim.comparison import parse_tolerances
    from frontend_sim.errors import InputError
    from frontend_sim.present import check_plot_target

    if len(runs) < 2:
        raise InputError(f"{runs[0]} is compared with what? give two or more records or sets")
    if plot is not None:
        if len(runs) > 2:
            raise InputError("a plot shows two runs; compare the others without --plot")
        check_plot_target(plot, overwrite)
    allowed = parse_tolerances(tolerances)
    asked = _Asked(allowed, attribute, seeds, plot, overwrite, as_json)
    compared = [asked.compare(runs[0], other) for other in runs[1:]]
    if as_json:
        print_json([summary for summary, _ in compared])
    elif plot is not None:
        click.echo(f"plot: {plot}")
    return FAILS if any(differs for _, differs in compared) else HOLDS


class _Asked:
    """What the user asked for besides the runs."""

    def __init__(
        self,
        tolerances: Tolerances,
        attribute: bool,
        seeds: int | None,
        plot: Path | None,
        overwrite: bool,
        as_json: bool,
    ) -> None:
        self.tolerances, self.attribute, self.seeds = tolerances, attribute, seeds
        self.plot, self.overwrite, self.as_json = plot, overwrite, as_json

    def compare(self, first: Path, second: Path) -> tuple[dict[str, Any], bool]:
        """Compare two records or two sets; return the summary, and whether they differ."""
        from frontend_sim.archive.set_table import is_set
        from frontend_sim.errors import InputError

        sets = is_set(first), is_set(second)
        if sets[0] != sets[1]:
            for each in (first, second):
                if not each.exists():
                    raise InputError(f"{each}: there is no such record or set; check the name")
            which = first if sets[0] else second
            raise InputError(f"{which} is a set and the other is none; compare like with like")
        return self.sets(first, second) if sets[0] else self.records(first, second)

    def sets(self, first: Path, second: Path) -> tuple[dict[str, Any], bool]:
        """Compare two sets; return the summary, and whether they differ."""
        from frontend_sim.archive.set_table import open_set
        from frontend_sim.comparison import attribute_sets, compare_sets
        from frontend_sim.errors import InputError
        from frontend_sim.present import save_figure
        from frontend_sim.present.set_comparison_plot import set_comparison_figure
        from frontend_sim.present.set_comparison_table import (
            set_comparison_summary,
            set_comparison_tables,
        )

        if self.seeds is not None:
            raise InputError(
                "--seeds runs single records again; the runs of sets have many seeds already"
            )
        one, other = open_set(first), open_set(second)
        comparison = compare_sets(one, other, self.tolerances)
        if self.attribute:
            with progress_bar("one at a time") as advance:
                found = attribute_sets(one, other, comparison, advance)
            comparison = replace(comparison, attribution=found)
        if self.plot is not None:
            save_figure(set_comparison_figure(comparison, one, other), self.plot, self.overwrite)
        print_notes(comparison.notes)
        if not self.as_json:
            print_tables(set_comparison_tables(comparison))
        return set_comparison_summary(comparison), comparison.differs

    def records(self, first: Path, second: Path) -> tuple[dict[str, Any], bool]:
        """Compare two records; return the summary, and whether they differ."""
        from frontend_sim.archive import ScanRecord, open_record
        from frontend_sim.comparison import compare_runs
        from frontend_sim.present import check_channels_drawn, save_figure
        from frontend_sim.present.comparison_plot import comparison_figure

        with open_record(first) as one, open_record(second) as other:
            for each in (one, other):
                if self.plot is not None and isinstance(each, ScanRecord):
                    check_channels_drawn(len(each.channels), self.plot)
            comparison = self._explained(compare_runs(one, other, self.tolerances), one, other)
            if self.plot is not None:  # first, so that a closed pipe does not cost the plot
                figure = comparison_figure(comparison, one, other)
                save_figure(figure, self.plot, self.overwrite)
        return self._told(comparison)

    def _told(self, comparison: RecordComparison) -> tuple[dict[str, Any], bool]:
        from frontend_sim.present.comparison_table import comparison_summary, comparison_tables

        print_notes(comparison.notes)
        if not self.as_json:
            print_tables(comparison_tables(comparison))
        return comparison_summary(comparison), comparison.differs

    def _explained(
        self, comparison: RecordComparison, one: Record | ScanRecord, other: Record | ScanRecord
    ) -> RecordComparison:
        """Run both again where that was asked for."""
        from frontend_sim.archive import rerun_scenario
        from frontend_sim.comparison import attribute, over_seeds
        from frontend_sim.comparison.records import FALSE_ALARMS

        if self.seeds is not None:
            with progress_bar("seeds") as advance:
                scenarios = rerun_scenario(one), rerun_scenario(other)
                results = over_seeds(
                    *scenarios, comparison.results, self.seeds, FALSE_ALARMS, advance
                )
            comparison = replace(comparison, results=results)
        if self.attribute:
            with progress_bar("one at a time") as advance:
                scenarios = rerun_scenario(one), rerun_scenario(other)
                found = attribute(*scenarios, comparison.changed, advance)
            comparison = replace(comparison, attribution=found)
        return comparison
