"""The panels of the plot of a run."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any, Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter import AnyAdc
from frontend_sim.present.colours import BLUE, LIMIT, MARK, ORANGE, SERIES
from frontend_sim.present.decimation import broken, shown_flags, shown_points
from frontend_sim.present.drawing import legend_text, write_out
from frontend_sim.present.numbers import engineering, prefix_of, takes_prefix
from frontend_sim.quantities import SIGNALS, SignalUnit
from frontend_sim.simulation.finished import RunLike
from frontend_sim.simulation.stretches import breaks_in

if TYPE_CHECKING:
    from matplotlib.axes import Axes

Real = NDArray[np.float64]

FEW = 400
"""Up to so many conversions are drawn as dots of their own, which no line joins."""

WAVE_WIDTH, PIN_WIDTH, CODES_WIDTH = 1.1, 1.1, 4.0
"""Widths of the lines; the codes are seen on both sides of the pin [points]."""

DASHES: tuple[Any, ...] = (
    "-", (0, (6, 3)), (0, (2, 2)), (0, (6, 2, 1, 2)), (0, (10, 4)), (0, (4, 2, 1, 2, 1, 2)),
)  # fmt: skip
"""Lines of the points of a chain, in order: what lies beneath shows through the gaps."""

NARROW = 0.05
"""The limits of the range are in view unless the signal spans less than this share of it."""


@dataclass(frozen=True, eq=False)
class Conversions:
    """What the converter saw and gave.

    Parameters
    ----------
    adc : the converter
    time : in the unit of the axis, shape (K,)
    pin, voltage : shape (K,) [V]
    overrange : shape (K,)
    between_time, between : the pin between conversions too, where its waveform is kept; empty
        where it is not; shape (W,), [V]
    held : of the sampling capacitor, shape (K,); empty where there is none [V]
    """

    adc: AnyAdc
    time: Real
    pin: Real
    voltage: Real
    overrange: NDArray[np.bool_]
    between_time: Real = field(default_factory=lambda: np.empty(0))
    between: Real = field(default_factory=lambda: np.empty(0))
    held: Real = field(default_factory=lambda: np.empty(0))

    @classmethod
    def of(cls, run: RunLike, factor: float, between: str = "") -> Self:
        """Return the conversions of a run, or of the part of it that a record keeps.

        Parameters
        ----------
        factor : units of the axis of time in a second
        between : name of the point whose waveform is the pin between conversions; "" for none
        """
        breaks = breaks_in(run, run.time)
        time, pin, voltage = broken(breaks, factor * run.time, run.pin, run.voltage)
        conversions = time, pin, voltage, np.insert(run.overrange, breaks, False)
        held = broken(breaks, run.time, run.held)[1] if len(run.held) else run.held
        if between not in run.waveform:
            return cls(run.scenario.adc, *conversions, held=held)
        waveform_time = run.waveform_time
        gaps = breaks_in(run, waveform_time)
        at, waveform = broken(gaps, factor * waveform_time, run.waveform[between])
        return cls(run.scenario.adc, *conversions, at, waveform, held)

    @property
    def few(self) -> bool:
        """Whether each conversion can be seen for itself."""
        return len(self.time) <= FEW


def draw_codes(axes: Axes, conversions: Conversions) -> None:
    """Draw the pin, the codes read back, the limits of the range and what is beyond them."""
    adc, time = conversions.adc, conversions.time
    factor, letter = prefix_of(max(abs(adc.low), abs(adc.high)))
    dots: dict[str, Any] = {"marker": "o", "markersize": 6.0, "linestyle": "none"}
    _line(
        axes, time, factor * conversions.voltage, color=ORANGE, label="codes read back",
        **(dots if conversions.few else {"linewidth": CODES_WIDTH, "drawstyle": "steps-post"}),
    )  # fmt: skip
    _draw_pin(axes, conversions, factor)
    _draw_limits(axes, conversions, factor)
    marked = shown_flags(conversions.overrange)
    if len(marked):
        axes.plot(
            time[marked], factor * conversions.voltage[marked], "x", color=LIMIT, markersize=6.0,
            label="beyond the range", zorder=4,
        )  # fmt: skip
    axes.set_ylabel(f"voltage [{letter}V]")
    write_out(axes)
    _add_code_axis(axes, adc, factor)
    _add_legend(axes)


def _draw_pin(axes: Axes, conversions: Conversions, factor: float) -> None:
    """Draw the pin; a few conversions are joined by what it did between them, or by nothing."""
    style: dict[str, Any] = {"color": BLUE, "linewidth": PIN_WIDTH, "label": "pin, exact"}
    if not conversions.few:
        _line(axes, conversions.time, factor * conversions.pin, **style)
    elif len(conversions.between) > len(conversions.time):
        _line(axes, conversions.between_time, factor * conversions.between, **style)
    else:
        style |= {"marker": ".", "markersize": 4.0, "linestyle": "none"}
        _line(axes, conversions.time, factor * conversions.pin, **style)


def _draw_limits(axes: Axes, conversions: Conversions, factor: float) -> None:
    """Draw the limits of the range; where the signal is small beside it, tell of them instead."""
    adc, both = conversions.adc, (conversions.pin, conversions.voltage)
    lowest = min(float(np.nanmin(values, initial=np.inf)) for values in both)
    highest = max(float(np.nanmax(values, initial=-np.inf)) for values in both)
    style: dict[str, Any] = {"color": LIMIT, "linestyle": "--", "linewidth": 1.0}
    text = f"ADC range {engineering(adc.low, 'V')} to {engineering(adc.high, 'V')}"
    small = 0.0 < highest - lowest < NARROW * (adc.high - adc.low)
    if small and not np.any(conversions.overrange):
        axes.plot([], [], label=f"{text}, out of view", **style)
        return
    axes.axhline(factor * adc.low, label=text, **style)
    axes.axhline(factor * adc.high, **style)


def _add_code_axis(axes: Axes, adc: AnyAdc, factor: float) -> None:
    """Count codes on the right: code = (voltage - low) / LSB + lowest code."""

    def to_code(voltage: Any) -> Any:
        return (np.asarray(voltage) / factor - adc.low) / adc.lsb + adc.lowest_code

    def to_voltage(code: Any) -> Any:
        return factor * (adc.low + (np.asarray(code) - adc.lowest_code) * adc.lsb)

    right = axes.secondary_yaxis("right", functions=(to_code, to_voltage))
    right.ticklabel_format(useOffset=False)
    right.set_ylabel("code [counts]")


def draw_difference(axes: Axes, conversions: Conversions) -> None:
    """Draw what the codes read back lie above the pin; clipped conversions are left out.

    Where a sampling capacitor is converted, what it held is a second curve: what of the difference
    the acquisition makes, and what noise and rounding do.
    """
    held = conversions.held
    wide = 2.5 if len(held) else 1.0  # seen on both sides of what lies above it
    _draw_above_pin(axes, conversions, conversions.voltage, wide, color=MARK, label="codes")
    axes.axhline(0.0, color="black", linewidth=0.6)
    axes.set_ylabel("codes − pin\n[LSB]")
    if len(held):
        label = "held by the sampling capacitor"
        _draw_above_pin(axes, conversions, held, 1.0, color=BLUE, label=label)
        axes.set_ylabel("less the pin\n[LSB]")
        _add_legend(axes)
    if np.any(conversions.overrange):
        axes.set_title(
            "without conversions beyond the range", loc="right", fontsize="small", color=LIMIT
        )


def _draw_above_pin(
    axes: Axes, conversions: Conversions, values: Real, width: float, **style: Any
) -> None:
    inside = ~conversions.overrange
    difference = (values[inside] - conversions.pin[inside]) / conversions.adc.lsb
    dots: dict[str, Any] = {"marker": "o", "markersize": 3.0 * width, "linestyle": "none"}
    style |= dots if conversions.few else {"linewidth": 0.7 * width}
    kept = shown_points(difference)
    at = np.flatnonzero(inside)[kept]
    # No line leads over what is left out.
    gaps = np.flatnonzero(np.diff(np.cumsum(conversions.overrange)[at])) + 1
    time = np.insert(conversions.time[at], gaps, conversions.time[at][gaps])
    axes.plot(time, np.insert(difference[kept], gaps, np.nan), **style)


def draw_waveforms(axes: Axes, time: Real, waveform: Mapping[str, Real], unit: SignalUnit) -> None:
    """Draw the waveforms of points that are kept and have the same unit.

    Parameters
    ----------
    waveform : name of the point -> values, in SI
    unit : that they are drawn in
    """
    shown, largest = {}, 0.0
    for name in waveform:
        values = (waveform[name] - unit.zero) / unit.size
        kept = shown_points(values)
        shown[name] = time[kept], values[kept]
        largest = max(largest, float(np.nanmax(np.abs(values), initial=0.0)))
    factor, letter = prefix_of(largest) if takes_prefix(unit.name) else (1.0, "")
    for index, (name, (at, values)) in enumerate(shown.items()):
        axes.plot(
            at, factor * values, color=SERIES[index % len(SERIES)],
            # Curves that lie on one another show as bands, and through the gaps of the upper one.
            linewidth=min(WAVE_WIDTH + 0.5 * (len(shown) - 1 - index), 2.6),
            linestyle=DASHES[index % len(DASHES)],
            # A dollar sign would begin a formula, and a name in front of "_" is not shown.
            label=legend_text(name),
        )  # fmt: skip
    noun = "waveforms" if unit.si == "V" else SIGNALS[unit.si].name
    axes.set_ylabel(f"{noun} [{letter}{unit.name or '1'}]")
    _add_legend(axes)


def _line(axes: Axes, time: Real, values: Real, **style: Any) -> None:
    """Draw a series with no more points than columns of pixels can show."""
    kept = shown_points(values)
    axes.plot(time[kept], values[kept], **style)


def _add_legend(axes: Axes) -> None:
    """Put the legend above the panel, where it covers nothing."""
    axes.legend(
        loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=4, fontsize="small", frameon=False,
        borderaxespad=0.2,
    )  # fmt: skip
