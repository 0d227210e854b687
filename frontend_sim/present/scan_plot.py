"""The plot of a scan: every channel below the other, on one axis of time."""

from __future__ import annotations

import os
from pathlib import Path
from textwrap import fill
from typing import TYPE_CHECKING

from frontend_sim.errors import OutputError
from frontend_sim.present.drawing import draw_grid, literal, new_figure
from frontend_sim.present.figure_file import save_figure
from frontend_sim.present.numbers import engineering, prefix_of
from frontend_sim.present.run_panels import Conversions, draw_codes
from frontend_sim.present.scan_like import ScanLike
from frontend_sim.quantities.counting import counted

if TYPE_CHECKING:
    from matplotlib.figure import Figure


MOST_DRAWN = 32
"""A figure of more channels would be taller than a picture can be, and slow to make."""


def check_channels_drawn(count: int, path: object) -> None:
    """Refuse a figure of too many channels.

    Raises
    ------
    OutputError
        If there are more than ``MOST_DRAWN``.
    """
    if count > MOST_DRAWN:
        raise OutputError(
            f"{path}: a plot shows at most {MOST_DRAWN} channels, and this scan has {count}; leave "
            "the plot out, and draw the channels that matter from Python: "
            "fe.plot_run(record.channels[name], path)"
        )


def plot_scan(scan: ScanLike, path: str | os.PathLike[str], overwrite: bool = False) -> Path:
    """Draw a scan, or its record, into a PNG or SVG file; parameters and errors as ``plot_run``."""
    check_channels_drawn(len(scan.channels), path)
    return save_figure(scan_figure(scan), path, overwrite)


def scan_figure(scan: ScanLike) -> Figure:
    """Return the figure of a scan: for each channel the pin, and the codes read back."""
    channels = scan.channels
    figure = new_figure(10.0, 1.6 + 2.5 * len(channels))
    panels = figure.subplots(len(channels), 1, sharex=True, squeeze=False)[:, 0]
    ends = [float(run.time[-1]) for run in channels.values() if len(run.time)]
    factor, letter = prefix_of(max(ends, default=0.0))
    for panel, (name, run) in zip(panels, channels.items(), strict=True):
        draw_codes(panel, Conversions.of(run, factor))
        panel.set_title(literal(name), loc="right", fontsize="medium")
    draw_grid(*panels)
    panels[-1].set_xlabel(f"time [{letter}s]")
    scenario = scan.scenario
    adc, rhythm = scenario.adc, scenario.rhythm
    facts = (
        f"{counted(len(channels), 'channel')}, {scenario.scan.sampling}, one scan in "
        f"{engineering(rhythm.period, 's', 4)}; {adc.bits} bits, {engineering(adc.low, 'V')} to "
        f"{engineering(adc.high, 'V')}"
    )
    title = literal(fill(scenario.title or "Scan without a title", 90))
    figure.suptitle(f"{title}\n{facts}")
    return figure
