"""The frequency panels of an inspection."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Literal

import numpy as np
from numpy.typing import NDArray

from frontend_sim.measure.response.gain import Corner
from frontend_sim.present.colours import BLACK, EXACT, GREEN, LIMIT, MARK, ORANGE, PURPLE
from frontend_sim.present.frequency_view import FrequencyView
from frontend_sim.present.numbers import engineering, per_unit, prefix_of

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MODEL_STYLE = {"zoh": (ORANGE, "--"), "foh": (GREEN, "-."), "bilinear": (PURPLE, ":")}
"""Colour and line of each discrete model."""

LABEL_WIDTH = 0.22
"""Room that the label of a corner needs, as a share of the panel."""

LEAST_SHOWN, MOST_SHOWN = 40.0, 240.0
"""The magnitude is shown at least and at most so far below its highest point [dB]."""

FILTER_SHOWN = 140.0
"""The converter's filter is followed so far down: its notches have no end [dB]."""


def draw_magnitude(axes: Axes, view: FrequencyView) -> None:
    """Draw the magnitude, the level of the corners, the corners, half the rate and the rate."""
    axes.semilogx(
        view.frequency, view.magnitude, color=EXACT, linewidth=1.8, label="exact", zorder=3
    )
    for curve in view.models:
        colour, line = MODEL_STYLE[curve.method]
        rate = engineering(view.inspection.models[0].grid_rate, "Hz")
        axes.plot(
            curve.frequency, curve.magnitude, color=colour, linestyle=line, linewidth=1.5,
            label=f"{curve.method} at {rate}", zorder=4,
        )  # fmt: skip
    if view.filtered is not None:
        axes.plot(
            view.frequency, view.filtered, color=BLACK, linewidth=0.9,
            label="with the converter's filter", zorder=2,
        )  # fmt: skip
    low, high = _limits(view)
    axes.set_ylim(low, high)
    one = view.inspection.referred.unit.difference
    axes.set_ylabel("magnitude [dB]" if one == "V" else f"magnitude [dB re 1 {per_unit(one)}]")
    _draw_rates(axes, view, labels=True)
    _draw_corners(axes, view)
    axes.legend(loc=_free_place(view), fontsize="small", framealpha=0.9)


def draw_phase(axes: Axes, view: FrequencyView) -> None:
    """Draw the phase, and with it what a pure delay adds, as far as that stays in view."""
    from matplotlib.ticker import MultipleLocator

    axes.semilogx(view.frequency, view.phase, color=EXACT, linewidth=1.8, zorder=3)
    shown = [view.phase]
    for curve in view.models:
        colour, line = MODEL_STYLE[curve.method]
        axes.plot(
            curve.frequency, curve.phase, color=colour, linestyle=line, linewidth=1.5, zorder=4
        )
        shown.append(curve.phase)
    finite = np.concatenate(shown)
    finite = finite[np.isfinite(finite)]
    lowest, highest = float(np.min(finite)), float(np.max(finite))
    delay = view.inspection.time.delay
    if delay > 0.0:
        turned = view.phase - 360.0 * delay * view.frequency
        axes.plot(view.frequency, turned, color=BLACK, linestyle="--", linewidth=1.0,
                  label=f"with the delay of {engineering(delay, 's')}")  # fmt: skip
        axes.plot([], [], color=EXACT, linewidth=1.8, label="without the delay")
        axes.legend(loc="lower left", fontsize="small", framealpha=0.9)
        lowest = max(float(np.min(turned)), lowest - 360.0)
    step = _degree_step(highest - lowest)
    axes.set_ylim(step * math.floor(lowest / step - 0.2), step * math.ceil(highest / step + 0.2))
    axes.yaxis.set_major_locator(MultipleLocator(step))
    axes.set_ylabel("phase [deg]")
    _draw_rates(axes, view, labels=False)
    _draw_corners(axes, view, labels=False)


def draw_delay(axes: Axes, view: FrequencyView) -> None:
    """Draw the group delay, pure delay included."""
    factor, letter = prefix_of(float(np.max(np.abs(view.delay), initial=0.0)))
    axes.semilogx(view.frequency, factor * view.delay, color=EXACT, linewidth=1.8, zorder=3)
    axes.set_ylabel(f"group delay [{letter}s]")
    axes.set_xlabel("frequency [Hz]")
    axes.set_xlim(view.frequency[0], view.frequency[-1])
    _show_flat(axes, factor * view.delay)
    _draw_rates(axes, view, labels=False)
    _draw_corners(axes, view, labels=False)


def _free_place(view: FrequencyView) -> Literal["lower left", "lower center", "lower right"]:
    """Return where the magnitude leaves room below it: in the third where it stays highest."""
    share = np.log(view.frequency / view.frequency[0])
    third = np.minimum((3.0 * share / share[-1]).astype(np.int64), 2)
    lowest = [float(np.min(view.magnitude[third == number])) for number in range(3)]
    places: tuple[Literal["lower left", "lower center", "lower right"], ...] = (
        "lower left", "lower center", "lower right",
    )  # fmt: skip
    return places[lowest.index(max(lowest))]


def _limits(view: FrequencyView) -> tuple[float, float]:
    """Return the range of the magnitude: all of it, or down to where the rate is well in view."""
    finite = view.magnitude[np.isfinite(view.magnitude)]
    if len(finite) == 0:
        return -20.0, 20.0
    highest, lowest = float(np.max(finite)), float(np.min(finite))
    rate = view.inspection.adc.true_rate
    marked = np.interp([0.5 * rate, rate], view.frequency, view.magnitude)
    if math.isinf(view.inspection.frequency.largest.value):
        # Nothing is to be seen in how near a point of the grid lies to a pole on the axis.
        highest = min(highest, max(float(view.magnitude[0]), float(np.max(marked))) + 60.0)
    bottom = max(lowest, min(highest - LEAST_SHOWN, float(np.min(marked))) - 20.0)
    if view.filtered is not None:
        deepest = float(np.min(view.filtered[np.isfinite(view.filtered)]))
        bottom = min(bottom, max(deepest, highest - FILTER_SHOWN))
    bottom = max(bottom, highest - MOST_SHOWN)
    room = max(0.08 * (highest - bottom), 3.0)
    return bottom - room, highest + 1.8 * room


def _draw_rates(axes: Axes, view: FrequencyView, labels: bool) -> None:
    rate = view.inspection.adc.true_rate
    axes.axvspan(0.5 * rate, view.frequency[-1], color="0.93", zorder=0)
    for frequency in (0.5 * rate, rate):
        axes.axvline(frequency, color=LIMIT, linestyle="--", linewidth=1.0, zorder=2)
    if labels:
        for frequency, side, label in (
            (0.5 * rate, "right", "half the rate"),
            (rate, "left", "rate"),
        ):
            axes.annotate(
                f"{label} {engineering(frequency, 'Hz')}", (frequency, 1.0),
                xycoords=("data", "axes fraction"), xytext=(0, 2), textcoords="offset points",
                ha=side, va="bottom", fontsize="small", color=LIMIT,
            )  # fmt: skip


def _draw_corners(axes: Axes, view: FrequencyView, labels: bool = True) -> None:
    measured = view.inspection.frequency
    for corner in measured.corners:
        axes.axvline(corner.frequency, color=MARK, linestyle=":", linewidth=1.2, zorder=2)
    if not labels or not measured.corners:
        return
    largest = view.inspection.referred.unit.size * measured.largest.value
    level = 20.0 * math.log10(largest) - 10.0 * math.log10(2.0)
    axes.axhline(level, color=MARK, linestyle=":", linewidth=0.8, zorder=2)
    for corner in _labelled(view):
        left, below = _label_side(view, corner)
        axes.annotate(
            f"−3 dB {engineering(corner.frequency, 'Hz', 4)}", (corner.frequency, level),
            xytext=(-4 if left else 4, -3 if below else 3), textcoords="offset points",
            ha="right" if left else "left", va="top" if below else "bottom",
            fontsize="small", color=BLACK, zorder=5,
            bbox={"facecolor": "white", "edgecolor": "none", "alpha": 0.75, "pad": 0.8},
        )  # fmt: skip


def _label_side(view: FrequencyView, corner: Corner) -> tuple[bool, bool]:
    """Return whether a corner's label stands to its left, and whether below the level.

    As a rule it stands beside the pass band, above the level, where the curve is below. Where
    another corner or the edge of the panel is too near, it stands in the pass band, below.
    """
    first, last = view.frequency[0], view.frequency[-1]
    left = corner.side == "lower"
    ends = [first if left else last]
    ends += [each.frequency for each in view.inspection.frequency.corners if each is not corner]
    width = math.log(last / first)
    room = [math.log(end / corner.frequency) / width for end in ends]
    sides = [-each for each in room if each < 0.0] if left else [each for each in room if each > 0]
    near = min(sides, default=0.0) < LABEL_WIDTH
    return (not left, True) if near else (left, False)


def _labelled(view: FrequencyView) -> tuple[Corner, ...]:
    """Return the outermost corners: those between would only cover each other."""
    corners = view.inspection.frequency.corners
    return corners if len(corners) <= 2 else (corners[0], corners[-1])


def _degree_step(span: float) -> float:
    steps = (5.0, 15.0, 45.0, 90.0, 180.0, 360.0)
    return next((step for step in steps if span / step <= 7.0), 720.0)


def _show_flat(axes: Axes, values: NDArray[np.float64]) -> None:
    """Give a constant curve an axis of its own size instead of the range of its rounding."""
    lowest, highest = float(np.min(values)), float(np.max(values))
    size = max(abs(lowest), abs(highest))
    if size == 0.0:
        axes.set_ylim(-1.0, 1.0)
    elif highest - lowest <= 1e-9 * size:
        axes.set_ylim(min(0.0, 1.5 * lowest), max(0.0, 1.5 * highest))
