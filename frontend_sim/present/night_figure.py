"""How a check spreads over a night, and what it follows."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from frontend_sim.present.colours import BLUE, LIMIT, MARK, ORANGE
from frontend_sim.present.drawing import axis_scale, draw_grid, literal, new_figure, write_out
from frontend_sim.present.numbers import prefix_of
from frontend_sim.present.result_table import PREFIXED
from frontend_sim.quantities.counting import counted
from frontend_sim.summary import CheckSummary, NightSummary
from frontend_sim.summary.night_summary import numeric_parameters

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Real = NDArray[np.float64]

ALIKE = 1e-9
"""Relative difference of values that are drawn as one."""

THINNEST = 0.005
"""Share of the width of a panel below which a bar is not seen."""

ALONE = 0.5
"""Room to either side of a bar that stands alone, in its width."""

MOST_DOTS = 4000
"""So many runs are drawn as dots, evenly picked, the worst among them."""


def night_figure(summary: NightSummary, check: CheckSummary) -> Figure:
    """Return the figure of a check: its distribution with its limit, and its strongest cause."""
    numbers = numeric_parameters(summary.table)
    cause = None if check.cause is None else check.cause.parameter
    figure = new_figure(10.0, 3.4)
    panels = figure.subplots(1, 2 if cause else 1, squeeze=False)[0]
    factor, label = _scaled(check)
    _draw_histogram(panels[0], summary, check, factor, label)
    if cause is not None:
        _draw_cause(panels[1], summary, check, numbers[cause], cause, factor, label)
    draw_grid(*panels)
    write_out(*panels)
    return figure


def _scaled(check: CheckSummary) -> tuple[float, str]:
    """Return the factor of the axis of values and its label."""
    factor, unit = axis_scale(check.unit, check.column.value)
    return factor, f"{literal(check.name)} [{unit}]"


def _draw_histogram(
    axes: Axes, summary: NightSummary, check: CheckSummary, factor: float, label: str
) -> None:
    from matplotlib.ticker import MaxNLocator

    value, drawn = check.column.value, summary.population.drawn
    known = np.isfinite(value)
    limits, runs = np.unique(check.column.limit, return_index=True)
    draw_bars(axes, factor * value, drawn, factor * limits)
    told = [check.column.bound_in(run) for run in runs[:8].tolist()]
    for place, (limit, bound) in enumerate(zip(limits.tolist(), told, strict=False)):
        if np.isfinite(limit):
            axes.axvline(factor * limit, color=LIMIT, linestyle="--", linewidth=1.4,
                         label=None if bound in told[:place] else f"limit, {bound}")  # fmt: skip
    lost = int(np.count_nonzero(~known & (check.column.verdict != "")))
    if lost:
        axes.set_title(
            f"without a finite value, and not shown: {counted(lost, 'run')}", fontsize="small"
        )
    axes.set_xlabel(label)
    axes.set_ylabel("runs")
    axes.yaxis.set_major_locator(MaxNLocator(integer=True))
    axes.legend(fontsize="small", framealpha=0.9)


def draw_bars(
    axes: Axes, values: Real, drawn: NDArray[np.bool_], limits: Real | None = None
) -> None:
    """Draw a histogram of values, draws below other runs.

    Parameters
    ----------
    values : in the unit of the axis, shape (R,); what is not finite is not drawn
    drawn : whether a run is a draw, shape (R,)
    limits : that are drawn beside it, shape (L,)
    """
    known = np.isfinite(values)
    sets = [
        (known & drawn, "draws", BLUE),
        (known & ~drawn, "other runs" if drawn.any() else "runs", ORANGE),
    ]
    rows = [(values[which], name, colour) for which, name, colour in sets if which.any()]
    if rows:
        shown, names, colours = zip(*rows, strict=True)
        edges = bin_edges(np.concatenate(shown), limits)
        axes.hist(shown, bins=edges, stacked=True, color=colours, label=names)
        low, high = edges[0], edges[-1]
        if len(edges) == 2 and (limits is None or not np.any((limits < low) | (limits > high))):
            axes.margins(x=ALONE)


def bin_edges(values: Real, limits: Real | None = None) -> list[float]:
    """Return the edges of the bars of a histogram; values too near to be told apart are one bar.

    Parameters
    ----------
    values : finite, at least one
    limits : that are drawn beside it, which bars must be seen next to, and the one bar keeps well
        away from, shape (L,)
    """
    low, high = float(np.min(values)), float(np.max(values))
    beside = np.empty(0) if limits is None else limits[np.isfinite(limits)]
    size = max(abs(low), abs(high))
    thinnest = max(ALIKE * size, THINNEST * float(np.ptp(np.concatenate([beside, [low, high]]))))
    if high - low <= thinnest or thinnest == 0.0:
        far = np.maximum(low - beside, beside - high)
        near = far[far > ALIKE * size]
        half = 0.02 * float(np.min(near)) if len(near) else 0.05 * size or 1.0
        return [low - half, high + half]
    count = max(8, min(60, round(2.0 * math.sqrt(len(values)))))
    edges = np.linspace(low, high, min(count, int((high - low) / thinnest)) + 1)
    return [float(edge) for edge in edges]


def _draw_cause(
    axes: Axes,
    summary: NightSummary,
    check: CheckSummary,
    parameter: Real,
    key: str,
    factor: float,
    label: str,
) -> None:
    value = check.column.value
    known = np.flatnonzero(np.isfinite(value) & np.isfinite(parameter))
    step = max(1, math.ceil(len(known) / MOST_DOTS))
    picked = known[::step]
    unit = summary.unit_of(key)
    if unit == "K":
        parameter, unit = parameter - 273.15, "degC"
    far = float(np.max(np.abs(parameter[known]), initial=0.0))
    scale, letter = prefix_of(far) if unit in PREFIXED else (1.0, "")
    holds = check.column.verdict[picked] != "fails"
    for which, name, colour, marker in (
        (holds, "holds", BLUE, "o"), (~holds, "fails", LIMIT, "x"),
    ):  # fmt: skip
        if which.any():
            chosen = picked[which]
            axes.plot(
                scale * parameter[chosen], factor * value[chosen], linestyle="none",
                marker=marker, markersize=3.5, color=colour, alpha=0.6, label=name,
            )  # fmt: skip
    if check.worst in known:
        axes.plot([scale * parameter[check.worst]], [factor * value[check.worst]], marker="D",
                  linestyle="none", markersize=7, fillstyle="none", color=MARK,
                  label="worst run")  # fmt: skip
    named = literal(key)
    axes.set_xlabel(f"{named} [{letter}{unit}]" if unit not in ("", "1") else named)
    axes.set_ylabel(label)
    axes.legend(fontsize="small", framealpha=0.9)
