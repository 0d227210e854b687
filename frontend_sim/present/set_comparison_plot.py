"""Two nights, check by check, and their differences."""

from __future__ import annotations

from textwrap import fill
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.archive.set_table import SetTable
from frontend_sim.comparison import ColumnDifference, SetComparison
from frontend_sim.present.colours import BLUE, LIMIT, MARK, ORANGE
from frontend_sim.present.drawing import axis_scale, draw_grid, literal, new_figure
from frontend_sim.quantities.counting import counted

Real = NDArray[np.float64]

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

MOST_CHECKS = 8
"""So many checks are drawn, those with the most flipped verdicts first."""


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
        scale, unit = axis_scale(
            row.unit, np.concatenate([earlier[row.name].value, later[row.name].value])
        )
        for check, colour, width, name in (
            (earlier[row.name], BLUE, 2.4, "first"), (later[row.name], ORANGE, 1.2, "second"),
        ):  # fmt: skip
            values = scale * check.value[check.verdict != ""]
            draw_shares(left, values, color=colour, linewidth=width, label=name)
        limits = np.unique(later[row.name].limit)
        for limit in limits[np.isfinite(limits)][:8].tolist():
            left.axvline(scale * limit, color=LIMIT, linestyle="--", linewidth=1.2)
        name = literal(row.name)
        left.set_xlabel(f"{name} [{unit}]")
        left.set_ylabel("share of runs below")
        left.legend(fontsize="small", framealpha=0.9)
        _draw_differences(right, row, scale, unit)
    if not rows:
        panels[0][0].set_axis_off()
        panels[0][1].set_axis_off()
        panels[0][0].text(0.0, 0.5, "both nights have no check in common", wrap=True)
    told = "differs" if comparison.differs else "no difference beyond noise and tolerance"
    title = literal(fill(comparison.title or "Two nights", 90))
    figure.suptitle(f"{title}\n{counted(comparison.matched, 'run')} in both, limits dashed: {told}")
    return figure


def draw_shares(axes: Axes, values: Real, **style: Any) -> None:
    """Draw the share of runs below a value; one without a value is not below any."""
    ordered = np.sort(np.where(np.isnan(values), np.inf, values))
    finite = np.isfinite(ordered)
    if finite.any():
        shares = np.arange(1, len(ordered) + 1) / len(ordered)
        axes.step(ordered[finite], shares[finite], where="post", **style)
    axes.set_ylim(0.0, 1.04)
    draw_grid(axes)


def _draw_differences(axes: Axes, row: ColumnDifference, scale: float, unit: str) -> None:
    """Draw the difference of each run, in the unit of the values where all of them are zero."""
    if np.any(row.difference):
        scale, unit = axis_scale(row.unit, row.difference)
    difference = scale * row.difference
    axes.plot(difference, color=MARK, marker=".", markersize=3.0, linestyle="none")
    axes.axhline(0.0, color="black", linewidth=0.6)
    for limit in (-row.tolerance, row.tolerance) if row.tolerance else ():
        axes.axhline(scale * limit, color=LIMIT, linestyle="--", linewidth=1.0)
    axes.set_xlabel("run, in the order of the first night")
    axes.set_ylabel(f"second − first [{unit}]")
    axes.set_title(row.words, fontsize="medium")
    draw_grid(axes)
