"""The shape of a step response in words and numbers."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from frontend_sim.analog.block import Complex
from frontend_sim.measure.response.decay import Decay
from frontend_sim.measure.response.excursions import furthest
from frontend_sim.measure.response.step_response import StepResponse

Word = Literal[
    "no dynamics",
    "first-order",
    "overdamped",
    "critically damped",
    "underdamped",
    "undamped",
    "integrating",
]

Reference = Literal["end value", "largest excursion"]

NEGLIGIBLE = 1e-13
"""Excursions below this share of the reference are rounding, and count as none."""

SEARCHED = 1e-10
"""Excursions are searched as long as one of this share of the largest gain can follow."""


@dataclass(frozen=True)
class Shape:
    """What a unit step does, in the words of control textbooks.

    Parameters
    ----------
    word : "no dynamics", "first-order", "overdamped" (real poles), "critically damped" (real and
        all equal), "underdamped" (complex poles), "undamped" (poles on the imaginary axis),
        "integrating" (a pole at the origin)
    reference : what percentages refer to: the end value, or the largest excursion of a response
        that ends at zero; None where there is no end
    reference_value : its value for a unit step [1]
    overshoot : how far the response goes beyond its end value, as a share of it; of a response
        that ends at zero how far it goes beyond its start, None if that is zero too
    undershoot : how far the response goes to the other side of zero than its reference [1]
    peak, peak_time : largest excursion from zero [1], and when, delay included [s]
    """

    word: Word
    reference: Reference | None
    reference_value: float | None
    overshoot: float | None
    undershoot: float | None
    peak: float | None
    peak_time: float | None


def word_of(poles: Complex) -> Word:
    """Return the shape that the poles give.

    Poles count as equal within what rounding of coefficients does to an m-fold root, eps^(1/m)
    times four and at least 1 ppm. The damping ratio of a pole is -Re p / |p|. Source: any control
    textbook, e.g. Ogata, *Modern Control Engineering* (from memory).
    """
    if len(poles) == 0:
        return "no dynamics"
    if np.any(poles == 0.0):
        return "integrating"
    if np.any(poles.real == 0.0):
        return "undamped"
    if len(poles) == 1:
        return "first-order"
    centre = complex(np.mean(poles))
    tolerance = max(1e-6, 4.0 * float(np.finfo(np.float64).eps) ** (1.0 / len(poles)))
    if np.all(np.abs(poles - centre) <= tolerance * abs(centre)):
        return "critically damped"
    return "underdamped" if np.any(poles.imag != 0.0) else "overdamped"


def shape_of(response: StepResponse, decay: Decay | None) -> Shape:
    """Return the shape of a step response; overshoot is measured on the response itself.

    Parameters
    ----------
    decay : its march, None for a chain without states, or without an end
    """
    word = word_of(response.roots.poles)
    end, start = response.end, response.start
    if not response.settles or end is None:
        return Shape(word, None, None, None, None, None, None)
    (highest, high_time), (lowest, low_time) = _extremes(end, start, decay)
    peak, time = (highest, high_time) if highest >= -lowest else (lowest, low_time)
    reference: Reference = "end value" if end != 0.0 else "largest excursion"
    value = end if end != 0.0 else peak
    if value == 0.0:
        return Shape(word, reference, 0.0, 0.0, 0.0, 0.0, 0.0)
    from_end = (highest - end if value > 0.0 else end - lowest) / abs(value)
    overshoot: float | None = from_end
    if end == 0.0:
        overshoot = abs(peak / start) - 1.0 if start != 0.0 else None
    undershoot = (-lowest if value > 0.0 else highest) / abs(value)
    return Shape(
        word,
        reference,
        value,
        None if overshoot is None else _or_nothing(overshoot),
        _or_nothing(undershoot),
        peak,
        time + response.delay,
    )


def _extremes(
    end: float, start: float, decay: Decay | None
) -> tuple[tuple[float, float], tuple[float, float]]:
    """Return the highest and the lowest value for t >= 0+, each with its time since arrival."""
    if decay is None:
        return (max(start, end), 0.0), (min(start, end), 0.0)
    above, above_time = furthest(decay, 1.0)
    below, below_time = furthest(decay, -1.0)
    # A response that never comes to the other side of its end has its extreme there, at last.
    highest = (end + above, above_time) if above > 0.0 else (end, np.inf)
    lowest = (end - below, below_time) if below > 0.0 else (end, np.inf)
    return highest, lowest


def _or_nothing(share: float) -> float:
    return share if share > NEGLIGIBLE else 0.0
