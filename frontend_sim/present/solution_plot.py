"""The plot of a solution: the margin of each check over the key, and where it passes."""

from __future__ import annotations

import math
import os
from pathlib import Path
from textwrap import fill
from typing import TYPE_CHECKING

from frontend_sim.present.colours import GREEN, LIMIT, MARK, SERIES
from frontend_sim.present.figure_file import check_plot_target, legend_text, new_figure, save_figure

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.axis import Axis
    from matplotlib.figure import Figure

    from frontend_sim.solve import Solution, Varied

PLAIN_UNITS = ("K", "LSB", "1", "dB", "bit", "m/s^2", "1/K")
"""Units that take no prefix on an axis."""

FEW_DECADES = 2.5
"""Of fewer decades more than their beginnings are labelled."""

LINEAR_BELOW = 0.1
"""Margins below this share of their limit are drawn to scale, larger ones by their logarithm."""


def plot_solution(
    solution: Solution, path: str | os.PathLike[str], overwrite: bool = False
) -> Path:
    """Draw a solution into a PNG or SVG file.

    For each check its margin as a share of its limit, over the values that were tried: above zero
    it holds. What passes is shaded, and the answer is marked.

    Parameters
    ----------
    path : ends in .png or .svg
    overwrite : whether a file that is there may be replaced

    Raises
    ------
    OutputError
        If the path cannot be written as asked for.
    """
    check_plot_target(path, overwrite)
    return save_figure(solution_figure(solution), path, overwrite)


def solution_figure(solution: Solution) -> Figure:
    """Return the figure of a solution, to draw on or to show elsewhere."""
    figure = new_figure(9.0, 5.5)
    axes = figure.subplots()
    axes.set_xscale(solution.key.domain.scale)
    factor = label_axis(axes.xaxis, solution.key)
    _draw_margins(axes, solution, factor)
    for number, (low, high) in enumerate(solution.ranges()):
        axes.axvspan(factor * low, factor * high, color=GREEN, alpha=0.15, linewidth=0.0,
                     label="passes" if number == 0 else None)  # fmt: skip
    axes.axhline(0.0, color=LIMIT, linewidth=1.2, label="limit")
    if solution.value is not None:
        axes.axvline(factor * solution.value, color=MARK, linestyle="--", linewidth=1.2,
                     label=f"answer {solution.key.text(solution.value)}")  # fmt: skip
    axes.set_yscale("symlog", linthresh=LINEAR_BELOW)
    axes.set_ylabel("margin, as a share of the limit")
    axes.grid(True, color="0.9", linewidth=0.6)
    axes.set_axisbelow(True)
    axes.legend(loc="best", fontsize="small", framealpha=0.9)
    axes.set_title(fill(solution.sentences()[0], 100).replace("$", r"\$"), loc="left",
                   fontsize="medium")  # fmt: skip
    return figure


def _draw_margins(axes: Axes, solution: Solution, factor: float) -> None:
    from frontend_sim.solve.trial import score_of

    points: dict[str, tuple[list[float], list[float]]] = {}
    for trial in solution.trials:
        for row in trial.results:
            score = score_of(row)
            if math.isfinite(score):
                x, y = points.setdefault(row.name, ([], []))
                x.append(factor * trial.values[0])
                y.append(score)
    for number, (name, (x, y)) in enumerate(points.items()):
        colour = SERIES[number % len(SERIES)]
        axes.plot(x, y, marker="o", markersize=4.0, linewidth=1.2, color=colour,
                  label=legend_text(name))  # fmt: skip


def label_axis(axis: Axis, key: Varied) -> float:
    """Name an axis after a key, with its unit and prefixes, and return the factor of its values."""
    from matplotlib.ticker import EngFormatter, MaxNLocator

    if key.domain.scale == "log":
        _mark_decades(axis, key)
    elif key.whole:
        axis.set_major_locator(MaxNLocator(integer=True))
    name = key.key.replace("$", r"\$")
    if key.of_tolerance:
        axis.set_label_text(f"{name} [%]")
        return 100.0
    if key.symbol and key.symbol not in PLAIN_UNITS:
        axis.set_major_formatter(EngFormatter(unit=key.symbol))
        axis.set_label_text(name)
        return 1.0
    axis.set_label_text(f"{name} [{key.symbol}]" if key.symbol else name)
    return 1.0


def _mark_decades(axis: Axis, key: Varied) -> None:
    """Label 1, 2 and 5 of few decades, of many their beginnings."""
    from matplotlib.ticker import LogLocator, NullFormatter, ScalarFormatter

    low, *_, high = key.domain.spread(2)
    few = math.log10(high / low) < FEW_DECADES
    axis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0) if few else (1.0,)))
    axis.set_minor_formatter(NullFormatter())
    axis.set_major_formatter(ScalarFormatter())
