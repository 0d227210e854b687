"""Differences of two series: how large, where, and whether noise explains them."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from frontend_sim.measure.statistics import Shift, series_shift

Real = NDArray[np.float64]

Finding = Literal[
    "same",
    "within noise",
    "within tolerance",
    "not judged",
    "added",
    "differs",
    "removed",
    "not comparable",
]

DIFFERENT: tuple[Finding, ...] = ("differs", "removed", "not comparable")
"""Findings that matter."""


@dataclass(frozen=True)
class SeriesDifference:
    """Second less first, at the points that both have.

    Parameters
    ----------
    name : ``pin``, ``codes``, ``noise``, or the point of a waveform
    unit : of the numbers below, LSB of the first run for voltages
    count : number of points compared
    mean, rms, peak : of the difference, zero where it is rounding; of noise, the first's rms, the
        second's, and the change
    where : instant of the peak [s], None without one
    shift : of the mean, with its error; None where seeds play no part
    visible : smallest change that would be told from noise; 0 where seeds play no part
    tolerance : that was given
    finding : what it comes to
    told : how points were matched, or why it cannot be compared
    of_noise : whether mean, rms and peak are the first's rms, the second's, and the change
    """

    name: str
    unit: str
    count: int
    mean: float
    rms: float
    peak: float
    where: float | None
    shift: Shift | None
    visible: float
    tolerance: float
    finding: Finding
    told: str
    of_noise: bool = False


def exact_difference(
    name: str, unit: str, time: Real, difference: Real, rounding: float, tolerance: float, told: str
) -> SeriesDifference:
    """Return a difference in which chance plays no part: its peak counts.

    Parameters
    ----------
    difference : second less first at instants ``time`` [s], shape (K,)
    rounding : what may be the rounding of either
    """
    mean, rms, peak, where = extent(time, difference)
    if peak <= rounding:
        finding: Finding = "same"
        mean = rms = peak = 0.0
    else:
        finding = "within tolerance" if peak <= tolerance else "differs"
    return SeriesDifference(
        name, unit, len(time), mean, rms, peak, where, None, 0.0, tolerance, finding, told
    )


def noisy_difference(
    name: str,
    unit: str,
    time: Real,
    difference: Real,
    noise: Real,
    tolerance: float,
    level: float,
    told: str,
    slow: float = 0.0,
) -> SeriesDifference:
    """Return a difference that is judged by its mean against its noise.

    Parameters
    ----------
    noise : what of the difference is noise; the error of the mean is taken from it
    level : rate of false alarms that is accepted [1]
    slow : standard error that no averaging within the run reveals, in ``unit``
    """
    mean, rms, peak, where = extent(time, difference)
    found = series_shift(noise)
    shift = replace(found, mean=mean, error=math.hypot(found.error, slow))
    if peak == 0.0:
        finding: Finding = "same"
    else:
        finding = judged(shift, tolerance, level)
    return SeriesDifference(
        name, unit, len(time), mean, rms, peak, where, shift, shift.visible(level), tolerance,
        finding, told,
    )  # fmt: skip


def judged(shift: Shift, tolerance: float, level: float) -> Finding:
    """Return what a shift comes to: more than noise, and more than the tolerance, or not."""
    if shift.probability() >= level:
        return "within noise"
    return "differs" if shift.probability(tolerance) < level else "within tolerance"


def noise_change(first: Real, second: Real, tolerance: float, level: float) -> SeriesDifference:
    """Return whether the rms noise changed, from what codes lie above the pin, shape (K,) [LSB].

    The squares of two runs are compared batch by batch, so that slow noise counts for what it is.
    """
    one, other = first - np.mean(first), second - np.mean(second)
    before, after = (float(np.sqrt(np.mean(row**2))) for row in (one, other))
    shift = series_shift(other**2 - one**2)
    allowed = (before + tolerance) ** 2 - before**2
    finding: Finding = "same" if np.array_equal(one, other) else judged(shift, allowed, level)
    smallest = math.sqrt(before**2 + shift.visible(level)) - before
    return SeriesDifference(
        "noise", "LSB", len(one), before, after, after - before, None, shift, smallest, tolerance,
        finding, "rms of codes read back less pin", of_noise=True,
    )  # fmt: skip


def not_comparable(name: str, unit: str, why: str) -> SeriesDifference:
    """Return that two series have nothing in common."""
    nan = math.nan
    return SeriesDifference(
        name, unit, 0, nan, nan, nan, None, None, nan, 0.0, "not comparable", why
    )


def extent(time: Real, difference: Real) -> tuple[float, float, float, float | None]:
    """Return mean, rms and largest magnitude of a difference, and the instant of that [s]."""
    if len(difference) == 0:
        return math.nan, math.nan, math.nan, None
    place = int(np.argmax(np.abs(difference)))
    rms = float(np.sqrt(np.mean(difference**2)))
    return float(np.mean(difference)), rms, abs(float(difference[place])), float(time[place])
