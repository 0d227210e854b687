"""How far samples go beyond the two levels of a transition."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.measure.transition.levels import Transition


@dataclass(frozen=True)
class Excursions:
    """The furthest samples beyond either level, as shares of the height of the transition.

    The peak of the signal between samples can be higher.

    Parameters
    ----------
    overshoot : beyond the final level, 0 where no sample is [1]
    overshoot_time : of that sample [s]
    undershoot : to the other side of the initial level, 0 where no sample is [1]
    undershoot_time : of that sample [s]
    """

    overshoot: float
    overshoot_time: float
    undershoot: float
    undershoot_time: float


def excursions_of(
    times: ArrayLike,
    values: ArrayLike,
    *,
    initial: float | None = None,
    final: float | None = None,
) -> Excursions:
    """Measure overshoot and undershoot of a transition.

    Parameters
    ----------
    times : increasing, shape (N,) [s]
    values : shape (N,) [V]
    initial, final : levels [V]; left out, the first and the last sample

    Raises
    ------
    MeasureError
        See ``Transition.of``.
    """
    transition = Transition.of(times, values, initial, final)
    progress = transition.progress
    highest, lowest = int(np.argmax(progress)), int(np.argmin(progress))
    return Excursions(
        max(float(progress[highest]) - 1.0, 0.0),
        float(transition.times[highest]),
        max(-float(progress[lowest]), 0.0),
        float(transition.times[lowest]),
    )
