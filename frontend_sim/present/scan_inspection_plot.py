"""The plot of a scan before any run: how every channel responds, one row for each."""

from __future__ import annotations

import os
from pathlib import Path
from textwrap import fill
from typing import TYPE_CHECKING

from frontend_sim.measure.response.inspection import Inspection
from frontend_sim.measure.scan.inspection import ScanInspection
from frontend_sim.present.drawing import draw_grid, literal, new_figure
from frontend_sim.present.figure_file import save_figure
from frontend_sim.present.frequency_panels import draw_magnitude
from frontend_sim.present.frequency_view import FrequencyView
from frontend_sim.present.numbers import engineering
from frontend_sim.present.scan_plot import check_channels_drawn
from frontend_sim.present.step_panels import draw_distance, draw_step
from frontend_sim.present.step_view import StepView
from frontend_sim.quantities.counting import counted

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure


def plot_scan_inspection(
    inspection: ScanInspection, path: str | os.PathLike[str], overwrite: bool = False
) -> Path:
    """Draw the inspection of a scan into a PNG or SVG file.

    A row for each channel: magnitude, response to a unit step, and how that settles; shared stages
    count as if the channel were connected all the time. Parameters and errors as
    ``plot_inspection``.
    """
    check_channels_drawn(len(inspection.channels), path)
    return save_figure(scan_inspection_figure(inspection), path, overwrite)


def scan_inspection_figure(inspection: ScanInspection) -> Figure:
    """Return the figure of a scan's inspection, to draw on or to show elsewhere."""
    channels = inspection.channels
    figure = new_figure(16.0, 1.0 + 3.9 * len(channels))
    rows = figure.subplots(len(channels), 3, squeeze=False)
    for panels, (name, one) in zip(rows, channels.items(), strict=True):
        _draw_channel(list(panels), name, one)
    report = inspection.report
    title = literal(fill(inspection.title or "Scan without a title", 120))
    facts = (
        f"{counted(len(channels), 'channel')}, {report.sampling}, one scan in "
        f"{engineering(report.period, 's', 4)}; each channel from its stimulus to the converter's "
        "pin"
    )
    figure.suptitle(f"{title}\n{facts}")
    return figure


def _draw_channel(panels: list[Axes], name: str, inspection: Inspection) -> None:
    magnitude, step, distance = panels
    view, steps = FrequencyView.of(inspection), StepView.of(inspection)
    draw_magnitude(magnitude, view)
    magnitude.set_xlabel("frequency [Hz]")
    magnitude.set_xlim(view.frequency[0], view.frequency[-1])
    draw_step(step, steps)
    draw_distance(distance, steps)
    # The name stands above the labels of the rates.
    magnitude.set_title(literal(name), loc="left", fontsize="large", pad=20.0)
    draw_grid(*panels)
