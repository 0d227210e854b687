"""How measures spread over a night: small histograms side by side."""

from __future__ import annotations

import math
from collections.abc import Sequence
from textwrap import fill
from typing import TYPE_CHECKING

from frontend_sim.present.drawing import axis_scale, draw_grid, literal, new_figure
from frontend_sim.present.night_figure import draw_bars
from frontend_sim.summary import MeasureSummary, NightSummary

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

COLUMNS = 3
MOST_PANELS = 9
"""Measures that are drawn; the others stand in the table."""


def measure_figure(summary: NightSummary, measures: Sequence[MeasureSummary]) -> Figure:
    """Return the figure of some measures of a night, a histogram for each.

    Parameters
    ----------
    measures : that spread, at least one; at most ``MOST_PANELS`` are drawn
    """
    shown = measures[:MOST_PANELS]
    rows = math.ceil(len(shown) / COLUMNS)
    figure = new_figure(10.0, 0.5 + 1.9 * rows)
    panels = figure.subplots(rows, COLUMNS, squeeze=False).ravel()
    for panel, measure in zip(panels, shown, strict=False):
        _draw(panel, summary, measure)
    for panel in panels[len(shown) :]:
        panel.set_axis_off()
    draw_grid(*panels[: len(shown)])
    handles, labels = panels[0].get_legend_handles_labels()
    figure.legend(handles, labels, loc="outside lower right", ncols=2, fontsize="small",
                  frameon=False)  # fmt: skip
    return figure


def _draw(panel: Axes, summary: NightSummary, measure: MeasureSummary) -> None:
    from matplotlib.ticker import MaxNLocator

    factor, unit = (1.0, "1") if measure.unit in ("", "1") else axis_scale(
        measure.unit, measure.values
    )  # fmt: skip
    draw_bars(panel, factor * measure.values, summary.population.drawn)
    panel.set_title(literal(fill(measure.name, 38)), fontsize="small", loc="left")
    panel.set_xlabel(f"[{unit}]", fontsize="small")
    panel.tick_params(labelsize="small")
    panel.xaxis.set_major_locator(MaxNLocator(4))
    panel.yaxis.set_major_locator(MaxNLocator(3, integer=True))
