"""How much of a tone is left behind a front end."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.level import decibel
from frontend_sim.measure.mains.search import mains_levels
from frontend_sim.measure.mains.tones import ToneLevels, tone_levels

SEEN = 4.0
"""A tone is seen where its amplitude is this many standard deviations; chance: exp(-8)."""


@dataclass(frozen=True)
class Rejection:
    """One tone before and after a front end.

    Parameters
    ----------
    frequency : [Hz]
    before, after : peak values [V]; where the tone is not seen afterwards, ``after`` is the largest
        value that could hide
    rejection : 20 lg( before / after ) [dB]
    at_least : whether the tone is not seen afterwards, so that the rejection is a lower bound
    uncertainty : standard deviation of the rejection [dB]
    """

    frequency: float
    before: float
    after: float
    rejection: float
    at_least: bool
    uncertainty: float


def rejections(before: ToneLevels, after: ToneLevels) -> tuple[Rejection, ...]:
    """Compare the same tones before and after a front end.

    Raises
    ------
    MeasureError
        If the tones are not the same, or one of them is not seen before.
    """
    if not np.array_equal(before.frequency, after.frequency):
        raise MeasureError("a rejection needs the same tones before and after")
    found = []
    for index, frequency in enumerate(before.frequency):
        level, sure = float(before.amplitude[index]), float(before.uncertainty[index])
        if not level > SEEN * sure:
            raise MeasureError(
                f"the tone of {frequency:g} Hz is not seen before the front end: {level:.3g} with "
                f"an uncertainty of {sure:.3g}; ask for fewer harmonics, or apply more of it"
            )
        left, doubt = float(after.amplitude[index]), float(after.uncertainty[index])
        hidden = not left > SEEN * doubt
        left = left + SEEN * doubt if hidden else left
        relative = np.hypot(sure / level, doubt / left) if left > 0.0 else 0.0
        ratio = decibel(level / left) if left > 0.0 else np.inf
        spread = float(20.0 / np.log(10.0) * relative)
        found.append(Rejection(float(frequency), level, left, float(ratio), hidden, spread))
    return tuple(found)


def mains_rejection(
    before: ArrayLike,
    after: ArrayLike,
    rate: float,
    *,
    mains: float = 50.0,
    deviation: float = 0.01,
    harmonics: int = 1,
    rate_after: float | None = None,
) -> tuple[Rejection, ...]:
    """Measure how much of the mains and its harmonics a front end leaves.

    The frequency is found in the record before the front end, within the stated deviation, and kept
    for the record behind it, see ``mains_levels``.

    Parameters
    ----------
    before, after : shape (N,), (M,) [V]
    rate : samples per second of the record before [Hz]
    mains, deviation, harmonics : see ``mains_levels``
    rate_after : of the record after; left out, the same [Hz]

    Raises
    ------
    MeasureError
        If the mains is not seen before, or a record is too short.
    """
    found = mains_levels(before, rate, mains=mains, deviation=deviation, harmonics=harmonics)
    there = rate if rate_after is None else rate_after
    return rejections(found, tone_levels(after, [float(f) for f in found.frequency], rate=there))
