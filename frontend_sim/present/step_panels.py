"""The step panels of an inspection."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from frontend_sim.present.colours import BLACK, EXACT, LIMIT, MARK
from frontend_sim.present.frequency_panels import MODEL_STYLE
from frontend_sim.present.numbers import (
    difference,
    engineering,
    fixed,
    per_unit,
    plain,
    prefix_of,
)
from frontend_sim.present.step_view import StepView

if TYPE_CHECKING:
    from matplotlib.axes import Axes

FEW = 60
"""Up to so many points of a discrete model are drawn as dots."""

LABEL_HEIGHT = 0.11
"""Height of a label of two lines, as a share of the panel."""

DECADES = 0.3
"""The distance is shown to this share below its narrowest band."""


def draw_step(axes: Axes, view: StepView) -> None:
    """Draw the response to a unit step, its end, its overshoot and the settling to 1 %."""
    factor, letter = prefix_of(view.settled)
    axes.plot(factor * view.time, view.value, color=EXACT, linewidth=1.8, label="exact", zorder=3)
    _draw_models(axes, view, factor)
    measured, unit = view.inspection.time, view.inspection.referred.unit
    end = None if measured.end is None else unit.size * measured.end
    if end is not None and math.isfinite(end):
        axes.axhline(end, color=MARK, linestyle=":", linewidth=1.0, label=f"end {plain(end)}")
    for settling in measured.settlings[:1]:
        band = unit.size * settling.band
        low, high = (end or 0.0) - band, (end or 0.0) + band
        axes.axhspan(low, high, color=LIMIT, alpha=0.12, zorder=1, label=f"end ± {settling.label}")
    axes.set_xlim(factor * view.time[0], factor * view.settled)
    axes.set_xlabel(f"time after the step [{letter}s]")
    axes.set_ylabel(f"response to a unit step [{per_unit(unit.difference)}]")
    axes.set_title(_shape_text(view), fontsize="medium")
    axes.legend(loc="best", fontsize="small", framealpha=0.9)


def draw_distance(axes: Axes, view: StepView) -> None:
    """Draw how far the response is from its end, with the bands and the times of settling."""
    measured, unit = view.inspection.time, view.inspection.referred.unit
    bands = [
        replace(settling, band=unit.size * settling.band)
        for settling in measured.settlings
        if settling.band > 0.0
    ]
    silent = view.inspection.frequency.largest.value == 0.0
    if not bands or silent or measured.end is None or view.inspection.order == 0:
        axes.set_axis_off()
        axes.text(0.5, 0.5, _never_text(view), ha="center", va="center", transform=axes.transAxes)
        return
    factor, letter = prefix_of(view.settled)
    floor = DECADES * min(settling.band for settling in bands)
    axes.semilogy(
        factor * view.distance_time, np.maximum(view.distance, 1e-3 * floor),
        color=EXACT, linewidth=1.4, zorder=3,
    )  # fmt: skip
    largest = float(np.max(view.distance))
    axes.set_ylim(floor, 2.0 * max(largest, *(settling.band for settling in bands)))
    axes.set_xlim(factor * view.time[0], factor * view.settled)
    low, high = (math.log(each) for each in axes.get_ylim())
    heights = spread_out([(math.log(each.band) - low) / (high - low) for each in bands])
    for settling, height in zip(bands, heights, strict=True):
        axes.axhline(settling.band, color=LIMIT, linestyle="--", linewidth=1.0, zorder=2)
        axes.annotate(
            f"{settling.label}\nafter {engineering(settling.time or 0.0, 's')}",
            (1.0, height), xycoords="axes fraction", xytext=(5, 0),
            # Beside the panel, where no curve can strike it through.
            textcoords="offset points", ha="left", va="center", fontsize="small", color=BLACK,
            annotation_clip=False,
            bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.8},
        )  # fmt: skip
        if settling.time is not None:
            axes.plot([factor * settling.time], [settling.band], "o", color=LIMIT, markersize=5,
                      zorder=4)  # fmt: skip
    axes.set_xlabel(f"time after the step [{letter}s]")
    axes.set_ylabel(f"distance from the end [{per_unit(unit.difference)}]")
    step = difference(measured.full_scale_step, unit)
    axes.set_title(f"Settling; LSB counted for a step of {step}", fontsize="medium")


def spread_out(heights: list[float]) -> list[float]:
    """Return the heights of labels so far apart that none covers another, as shares of a panel.

    Labels that are too near to each other move to both sides of their common middle.
    """
    order = sorted(range(len(heights)), key=heights.__getitem__)
    groups: list[list[int]] = []
    for label in order:
        groups.append([label])
        while len(groups) > 1 and _bottom(groups[-1], heights) < _top(groups[-2], heights):
            last = groups.pop()
            groups[-1] += last
    placed = list(heights)
    for group in groups:
        for number, label in enumerate(group):
            placed[label] = _bottom(group, heights) + (number + 0.5) * LABEL_HEIGHT
    return placed


def _bottom(group: list[int], heights: list[float]) -> float:
    middle = sum(heights[label] for label in group) / len(group)
    return middle - 0.5 * LABEL_HEIGHT * len(group)


def _top(group: list[int], heights: list[float]) -> float:
    return _bottom(group, heights) + LABEL_HEIGHT * len(group)


def _draw_models(axes: Axes, view: StepView, factor: float) -> None:
    for model in view.models:
        colour, line = MODEL_STYLE[model.method]
        few = len(model.time) <= FEW
        axes.plot(
            factor * model.time, model.value, color=colour, zorder=4, markersize=4,
            marker={"zoh": "s", "foh": "^", "bilinear": "o"}[model.method] if few else None,
            linestyle="none" if few else line, linewidth=1.2, fillstyle="none",
            label=f"{model.method} at {engineering(view.inspection.models[0].grid_rate, 'Hz')}",
        )  # fmt: skip


def _shape_text(view: StepView) -> str:
    shape = view.inspection.time.shape
    parts = [f"Step response: {shape.word}"]
    if shape.overshoot is not None and view.inspection.order > 0:
        parts.append(f"overshoot {fixed(100.0 * shape.overshoot, 2, '%')}")
    if shape.undershoot:
        parts.append(f"undershoot {fixed(100.0 * shape.undershoot, 2, '%')}")
    return ", ".join(parts)


def _never_text(view: StepView) -> str:
    measured = view.inspection.time
    if measured.end is None:
        return "The response rings for ever:\nthere is no end to settle to."
    if math.isinf(measured.end):
        return "The response drifts away without bound:\nthere is no end to settle to."
    if view.inspection.order == 0:
        delay = measured.delay
        when = f"after the delay of {engineering(delay, 's')}" if delay else "at once"
        return f"The chain has no states:\nit has settled {when}."
    return "The chain passes nothing:\nit is settled at once."
