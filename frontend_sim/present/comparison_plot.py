"""Both runs, and their difference."""

from __future__ import annotations

import os
from pathlib import Path
from textwrap import fill
from typing import TYPE_CHECKING

import numpy as np

from frontend_sim.archive import Record
from frontend_sim.comparison import RecordComparison
from frontend_sim.comparison.instants import Common, by_instant, by_number
from frontend_sim.present.colours import BLUE, LIMIT, MARK, ORANGE
from frontend_sim.present.decimation import shown_points
from frontend_sim.present.figure_file import check_plot_target, legend_text, new_figure, save_figure
from frontend_sim.present.numbers import plain, prefix_of

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure


def plot_comparison(
    comparison: RecordComparison,
    first: Record,
    second: Record,
    path: str | os.PathLike[str],
    overwrite: bool = False,
) -> Path:
    """Draw both records and their difference into a PNG or SVG file.

    Raises
    ------
    OutputError
        If the path cannot be written as asked for.
    """
    check_plot_target(path, overwrite)
    return save_figure(comparison_figure(comparison, first, second), path, overwrite)


def comparison_figure(comparison: RecordComparison, first: Record, second: Record) -> Figure:
    """Return the figure: pins of both, the difference of the pins, the difference of the codes.

    Differences are drawn at instants that both runs have; the tolerance is a band.
    """
    figure = new_figure(10.0, 7.6)
    axes = list(figure.subplots(3, 1, height_ratios=[2.4, 1.2, 1.2], sharex=True))
    times = first.time, second.time
    last = max((float(time[-1]) for time in times if len(time)), default=0.0)
    factor, letter = prefix_of(last)
    _draw_both(axes[0], (first, second), comparison, factor)
    pin = next((row for row in comparison.series if row.name == "pin"), None)
    if pin is None or pin.count == 0:
        for panel in axes[1:]:
            panel.set_axis_off()
            panel.text(0.5, 0.5, "no common instants", ha="center", transform=panel.transAxes)
    else:
        numbered = pin.told.startswith("by number")
        common = by_number(len(times[0]), len(times[1])) if numbered else by_instant(*times)
        _draw_differences(axes[1:], (first, second), common, factor)
        for panel in axes[1:]:
            _draw_tolerance(panel, pin.tolerance)
    axes[-1].set_xlabel(f"time [{letter}s]")
    told = "; ".join(comparison.alarms) or "no difference beyond noise and tolerance"
    title = f"{fill(comparison.title or 'Two runs', 90)}\n{fill(told, 110)}"
    figure.suptitle(title.replace("$", r"\$"))  # a dollar sign would begin a formula
    for each in axes:
        each.grid(True, color="0.9", linewidth=0.6)
        each.set_axisbelow(True)
    return figure


def _draw_both(
    axes: Axes, runs: tuple[Record, Record], comparison: RecordComparison, factor: float
) -> None:
    largest = max(float(np.max(np.abs(run.pin), initial=0.0)) for run in runs)
    volts, letter = prefix_of(largest)
    names = (comparison.first, comparison.second)
    for run, name, colour, width in zip(runs, names, (BLUE, ORANGE), (2.2, 1.0), strict=True):
        pin = run.pin
        kept = shown_points(pin)
        label = legend_text(str(name.name))
        axes.plot(factor * run.time[kept], volts * pin[kept], color=colour, linewidth=width,
                  label=label)  # fmt: skip
    axes.set_ylabel(f"pin [{letter}V]")
    axes.legend(loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=2, fontsize="small",
                frameon=False)  # fmt: skip


def _draw_differences(
    axes: list[Axes], runs: tuple[Record, Record], common: Common, factor: float
) -> None:
    first, second = runs
    lsb = first.scenario.adc.lsb
    time = factor * first.time[common.first]
    for panel, field, noun in zip(axes, ("pin", "voltage"), ("pins", "codes"), strict=True):
        one, other = getattr(first, field)[common.first], getattr(second, field)[common.second]
        difference = (other - one) / lsb
        kept = shown_points(difference)
        panel.plot(time[kept], difference[kept], color=MARK, linewidth=0.8)
        mean = float(np.mean(difference))
        panel.axhline(mean, color=ORANGE, linewidth=1.0, label=f"mean {plain(mean, 3)} LSB")
        panel.set_ylabel(f"{noun}, second −\nfirst [LSB]")
        panel.legend(loc="upper right", fontsize="small", framealpha=0.9)


def _draw_tolerance(axes: Axes, tolerance: float) -> None:
    for limit in (-tolerance, tolerance) if tolerance > 0.0 else ():
        axes.axhline(limit, color=LIMIT, linestyle="--", linewidth=1.0)
