"""The plot of a solution: the margin of each check over the key, and where it passes."""

from __future__ import annotations

import math
import os
from pathlib import Path
from textwrap import fill
from typing import TYPE_CHECKING

from frontend_sim.present.colours import GREEN, LIMIT, MARK, SERIES
from frontend_sim.present.drawing import draw_grid, legend_text, literal, new_figure
from frontend_sim.present.figure_file import save_figure
from frontend_sim.present.key_axis import label_axis

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from frontend_sim.solve import Solution

LINEAR_BELOW = 0.1
"""Margins below this share of their limit are drawn to scale, larger ones by their logarithm."""


def plot_solution(
    solution: Solution, path: str | os.PathLike[str], overwrite: bool = False
) -> Path:
    """Draw a solution into a PNG or SVG file.

    For each check its margin as a share of its limit, over the values that were tried: above zero
    it holds. What passes is shaded, and the answer is marked.

    Parameters and errors as ``plot_run``.
    """
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
    draw_grid(axes)
    axes.legend(loc="best", fontsize="small", framealpha=0.9)
    axes.set_title(literal(fill(solution.sentences()[0], 100)), loc="left",
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
