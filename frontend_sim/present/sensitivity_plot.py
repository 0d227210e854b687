"""The plot of the sensitivities: bars, the strongest first, one panel for each check."""

from __future__ import annotations

import os
from pathlib import Path
from textwrap import shorten
from typing import TYPE_CHECKING

import numpy as np

from frontend_sim.present.colours import BLUE, MARK, ORANGE
from frontend_sim.present.drawing import axis_scale, draw_grid, literal, new_figure
from frontend_sim.present.figure_file import save_figure
from frontend_sim.present.sensitivity_table import nothing, strongest

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from frontend_sim.measure.sensitivity import CheckSensitivity, Sensitivity

MOST_BARS = 12
"""Weaker parameters are left to the table."""


def plot_sensitivities(
    found: tuple[CheckSensitivity, ...], path: str | os.PathLike[str], overwrite: bool = False
) -> Path:
    """Draw what moves each check into a PNG or SVG file.

    A bar is the normalized derivative, where the value is zero what 1 % more adds to the margin;
    blue is for the better, orange for the worse, as the parameter grows.

    Parameters and errors as ``plot_run``.
    """
    return save_figure(sensitivity_figure(found), path, overwrite)


def sensitivity_figure(found: tuple[CheckSensitivity, ...]) -> Figure:
    """Return the figure of the sensitivities, to draw on or to show elsewhere."""
    shown = [(each, strongest(each)[:MOST_BARS]) for each in found]
    heights = [0.35 * max(len(rows), 1) + 1.1 for _, rows in shown]
    figure = new_figure(9.0, sum(heights) + 0.4)
    panels = figure.subplots(len(shown), 1, squeeze=False, height_ratios=heights)[:, 0]
    for axes, (each, rows) in zip(panels, shown, strict=True):
        _draw(axes, each, rows)
    return figure


def _draw(axes: Axes, found: CheckSensitivity, rows: list[Sensitivity]) -> None:
    name = literal(shorten(found.name, 60))
    if not rows:
        axes.set_axis_off()
        axes.text(0.5, 0.5, f"{name}: {nothing(found)}", ha="center", va="center")
        return
    normalized = all(row.normalized is not None for row in rows)
    values = np.array([(row.normalized if normalized else row.per_percent) or 0.0 for row in rows])
    factor, unit = (1.0, "") if normalized else axis_scale(found.result.unit, values)
    colours = [BLUE if (row.per_percent or 0.0) > 0.0 else ORANGE for row in rows]
    labels = [literal(row.parameter.key) for row in rows]
    axes.barh(labels, factor * values, color=colours)
    axes.invert_yaxis()
    axes.axvline(0.0, color=MARK, linewidth=0.8)
    axes.set_xlabel(
        "normalized derivative, (dv/v) / (dp/p)"
        if normalized
        else f"margin that 1 % more adds [{unit}]"
    )
    axes.set_title(f"What moves {name}: blue adds margin as it grows, orange costs",
                   loc="left", fontsize="medium")  # fmt: skip
    draw_grid(axes, axis="x")
