"""Two nights, check by check, and their differences."""

from __future__ import annotations

import os
from pathlib import Path
from textwrap import fill
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from frontend_sim.archive.set_table import SetTable
from frontend_sim.comparison import ColumnDifference, SetComparison
from frontend_sim.present.colours import BLUE, LIMIT, MARK, ORANGE
from frontend_sim.present.figure_file import check_plot_target, new_figure, save_figure
from frontend_sim.present.numbers import prefix_of
from frontend_sim.present.result_table import PREFIXED

Real = NDArray[np.float64]

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

MOST_CHECKS = 8
"""So many checks are drawn, those with the most flipped verdicts first."""


def plot_set_comparison(
    comparison: SetComparison,
    first: SetTable,
    second: SetTable,
    path: str | os.PathLike[str],
    overwrite: bool = False,
) -> Path:
    """Draw two nights and their differences into a PNG or SVG file.

    Raises
    ------
    OutputError
        If the path cannot be written as asked for.
    """
    check_plot_target(path, overwrite)
    return save_figure(set_comparison_figure(comparison, first, second), path, overwrite)


def set_comparison_figure(comparison: SetComparison, first: SetTable, second: SetTable) -> Figure:
    """Return the figure: for each check the share of runs below a value, and the differences."""
    later = {check.name: check for check in second.checks}
    rows = [row for row in comparison.columns if row.name in later and row.runs]
    rows.sort(key=lambda row: -(row.worse + row.better))
    rows = rows[:MOST_CHECKS]
    figure = new_figure(10.0, 1.2 + 2.6 * max(len(rows), 1))
    panels = figure.subplots(max(len(rows), 1), 2, squeeze=False)
    earlier = {check.name: check for check in first.checks}
    for (left, right), row in zip(panels, rows, strict=False):
        scale, unit = _scale(
            row.unit, np.concatenate([earlier[row.name].value, later[row.name].value])
        )
        for check, colour, name in (
            (earlier[row.name], BLUE, "first"), (later[row.name], ORANGE, "second"),
        ):  # fmt: skip
            _draw_shares(left, scale * check.value[np.isfinite(check.value)], colour, name)
        limits = np.unique(later[row.name].limit)
        for limit in limits[np.isfinite(limits)][:8].tolist():
            left.axvline(scale * limit, color=LIMIT, linestyle="--", linewidth=1.2)
        name = row.name.replace("$", r"\$")
        left.set_xlabel(f"{name} [{unit}]")
        left.set_ylabel("share of runs below")
        left.legend(fontsize="small", framealpha=0.9)
        _draw_differences(right, row)
    if not rows:
        panels[0][0].set_axis_off()
        panels[0][1].set_axis_off()
        panels[0][0].text(0.0, 0.5, "both nights have no check in common", wrap=True)
    told = "differs" if comparison.differs else "no difference beyond noise and tolerance"
    title = fill(comparison.title or "Two nights", 90).replace("$", r"\$")
    figure.suptitle(f"{title}\n{comparison.matched} runs in both, limits dashed: {told}")
    return figure


def _scale(unit: str, values: Real) -> tuple[float, str]:
    if unit in ("", "1"):
        return 100.0, "%"
    if unit not in PREFIXED:
        return 1.0, unit
    known = np.abs(values[np.isfinite(values)])
    scale, letter = prefix_of(float(np.max(known, initial=0.0)))
    return scale, f"{letter}{unit}"


def _draw_shares(axes: Axes, values: Real, colour: str, name: str) -> None:
    if len(values):
        ordered = np.sort(values)
        axes.step(ordered, np.arange(1, len(ordered) + 1) / len(ordered), where="post",
                  color=colour, label=name)  # fmt: skip
    axes.grid(True, color="0.9", linewidth=0.6)


def _draw_differences(axes: Axes, row: ColumnDifference) -> None:
    scale, unit = _scale(row.unit, row.difference)
    difference = scale * row.difference
    axes.plot(difference, color=MARK, marker=".", markersize=3.0, linestyle="none")
    axes.axhline(0.0, color="black", linewidth=0.6)
    for limit in (-row.tolerance, row.tolerance) if row.tolerance else ():
        axes.axhline(scale * limit, color=LIMIT, linestyle="--", linewidth=1.0)
    axes.set_xlabel("run, in the order of the first night")
    axes.set_ylabel(f"second − first [{unit}]")
    axes.set_title(row.finding if row.finding != "differs" else row.told, fontsize="medium")
    axes.grid(True, color="0.9", linewidth=0.6)
