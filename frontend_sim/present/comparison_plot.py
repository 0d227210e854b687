"""Both runs, and their difference."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from textwrap import fill
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from frontend_sim.archive import Record, ScanRecord
from frontend_sim.comparison import RecordComparison, SeriesDifference
from frontend_sim.comparison.again import named
from frontend_sim.comparison.instants import by_instant, by_numbers
from frontend_sim.present.colours import BLUE, LIMIT, MARK, ORANGE
from frontend_sim.present.decimation import broken, shown_points
from frontend_sim.present.drawing import draw_grid, legend_text, literal, new_figure, write_out
from frontend_sim.present.numbers import plain, prefix_of
from frontend_sim.simulation.stretches import breaks_in

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure


Real = NDArray[np.float64]

CONSTANT = 1e-6
"""Share of a difference by which it may move and be drawn against zero, not against rounding."""


def comparison_figure(
    comparison: RecordComparison, first: Record | ScanRecord, second: Record | ScanRecord
) -> Figure:
    """Return the figure: pins of both, the difference of the pins, the difference of the codes.

    Differences are drawn at instants that both runs have; the tolerance is a band. Of scans each
    channel is a row.
    """
    pairs = dict(_pairs(comparison, first, second))
    factor, letter = prefix_of(max(pair.last for pair in pairs.values()))
    if len(pairs) == 1:
        figure = new_figure(10.0, 7.6)
        rows = figure.subplots(3, 1, height_ratios=[2.4, 1.2, 1.2], sharex=True).reshape(1, 3)
        lowest, width = rows[0, 2:], 110
    else:
        figure = new_figure(16.0, 1.4 + 2.7 * len(pairs))
        rows = figure.subplots(len(pairs), 3, width_ratios=[1.5, 1.0, 1.0], sharex=True)
        lowest, width = rows[-1], 180
    for panels, (name, pair) in zip(rows, pairs.items(), strict=True):
        pair.draw(panels, factor)
        panels[0].set_title(literal(name), loc="right", fontsize="medium")
    for panel in lowest:
        panel.set_xlabel(f"time [{letter}s]")
    _name_files(rows[0, 0], comparison)
    figure.align_ylabels()
    told = "; ".join(comparison.alarms) or "no difference beyond noise and tolerance"
    title = f"{fill(comparison.title or 'Two runs', 90)}\n{fill(told, width)}"
    figure.suptitle(literal(title))
    return figure


def _pairs(
    comparison: RecordComparison, first: Record | ScanRecord, second: Record | ScanRecord
) -> Iterator[tuple[str, _Pair]]:
    """Return the runs of both records by channel; a record of one channel has no name for it."""
    series = {row.name: row for row in comparison.series}
    one, other = (
        run.channels if isinstance(run, ScanRecord) else {"": run} for run in (first, second)
    )
    for name in dict.fromkeys((*one, *other)):
        pin = series[named(name, "pin") if name else "pin"]
        yield name, _Pair((one.get(name), other.get(name)), pin)


def _name_files(panel: Axes, comparison: RecordComparison) -> None:
    """Tell above a panel which file has which colour."""
    from matplotlib.lines import Line2D

    files = (comparison.first, comparison.second)
    lines = [
        Line2D([], [], color=colour, linewidth=width, label=legend_text(file.name))
        for file, (colour, width) in zip(files, _STYLES, strict=True)
    ]
    panel.legend(
        handles=lines, loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=2, fontsize="small",
        frameon=False,
    )  # fmt: skip


_STYLES = ((BLUE, 2.2), (ORANGE, 1.0))
"""Colour and width of the lines of the first and the second run."""


@dataclass(frozen=True, eq=False)
class _Pair:
    """Two runs side by side.

    Parameters
    ----------
    runs : first and second; None where a scan does not have the channel
    pin : how the pins differ
    """

    runs: tuple[Record | None, Record | None]
    pin: SeriesDifference

    @property
    def last(self) -> float:
        """Instant of the last conversion [s]."""
        times = (run.time for run in self.runs if run is not None)
        return max((float(time[-1]) for time in times if len(time)), default=0.0)

    def draw(self, panels: Sequence[Axes], factor: float) -> None:
        """Draw the pins, their difference and that of the codes into three panels.

        Parameters
        ----------
        factor : units of the axis of time in a second
        """
        draw_grid(*panels)
        self._draw_pins(panels[0], factor)
        first, second = self.runs
        for panel in panels[1:] if self.pin.count == 0 else ():
            panel.set_yticks([])
            panel.text(0.5, 0.5, self.pin.told, ha="center", transform=panel.transAxes)
        if self.pin.count and first is not None and second is not None:
            for panel, (noun, time, difference) in zip(
                panels[1:], self._differences(first, second), strict=True
            ):
                _draw_difference(panel, noun, factor * time, difference, self.pin.tolerance)

    def _draw_pins(self, panel: Axes, factor: float) -> None:
        pins = [None if run is None else run.pin for run in self.runs]
        largest = max(float(np.max(np.abs(pin), initial=0.0)) for pin in pins if pin is not None)
        volts, letter = prefix_of(largest)
        for run, pin, (colour, width) in zip(self.runs, pins, _STYLES, strict=True):
            if run is not None and pin is not None:
                time, pin = broken(breaks_in(run, run.time), factor * run.time, pin)
                kept = shown_points(pin)
                panel.plot(time[kept], volts * pin[kept], color=colour, linewidth=width)
        panel.set_ylabel(f"pin [{letter}V]")
        write_out(panel)

    def _differences(self, first: Record, second: Record) -> Iterator[tuple[str, Real, Real]]:
        """Return what differs, at common instants [s], by how much [LSB]."""
        times = first.time, second.time
        numbered = self.pin.told.startswith("by number")
        common = by_numbers(first.numbers, second.numbers) if numbered else by_instant(*times)
        lsb, time = first.scenario.adc.lsb, times[0][common.first]
        pins = second.pin[common.second] - first.pin[common.first]
        codes = second.voltage[common.second] - first.voltage[common.first]
        breaks = np.union1d(breaks_in(first, time), breaks_in(second, time))
        time, pins, codes = broken(breaks, time, pins / lsb, codes / lsb)
        if self.pin.finding == "same":
            pins = 0.0 * pins  # what is left is rounding
        yield "pins", time, pins
        yield "codes", time, codes


def _draw_difference(
    panel: Axes, noun: str, time: Real, difference: Real, tolerance: float
) -> None:
    kept = shown_points(difference)
    panel.plot(time[kept], difference[kept], color=MARK, linewidth=0.8)
    mean = float(np.nanmean(difference))
    panel.axhline(mean, color=ORANGE, linewidth=1.0, label=f"mean {plain(mean, 3)} LSB")
    if float(np.nanmax(difference) - np.nanmin(difference)) <= CONSTANT * abs(mean):
        panel.axhline(0.0, color="black", linewidth=0.6)
    panel.set_ylabel(f"{noun}, second −\nfirst [LSB]")
    panel.legend(
        loc="lower right", bbox_to_anchor=(1.0, 1.0), fontsize="small", frameon=False,
        borderaxespad=0.1,
    )  # fmt: skip
    for limit in (-tolerance, tolerance) if tolerance > 0.0 else ():
        panel.axhline(limit, color=LIMIT, linestyle="--", linewidth=1.0)
