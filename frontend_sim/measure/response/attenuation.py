"""How much of a frequency still comes through."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from frontend_sim.measure.level import decibel
from frontend_sim.measure.response.gain import magnitude_of
from frontend_sim.measure.response.step_response import StepResponse


@dataclass(frozen=True)
class Attenuation:
    """The gain at one frequency against the largest gain and against the gain at zero frequency.

    Parameters
    ----------
    label : what the frequency is
    frequency : [Hz]
    gain : |H| there [1]
    below_largest : 20 lg(|H|max / |H|), infinite where nothing comes through; None where the
        largest gain is zero or infinite [dB]
    below_dc : 20 lg(|H(0)| / |H|), likewise; None where H(0) is zero or infinite [dB]
    """

    label: str
    frequency: float
    gain: float
    below_largest: float | None
    below_dc: float | None


def attenuation_at(
    response: StepResponse, label: str, frequency: float, largest: float
) -> Attenuation:
    """Return the attenuation at a frequency [Hz], given the largest gain [1]."""
    gain = float(magnitude_of(response)(np.array([frequency]))[0])
    dc = abs(response.end) if response.end is not None else math.inf
    return Attenuation(label, frequency, gain, _below(largest, gain), _below(dc, gain))


def _below(reference: float, gain: float) -> float | None:
    if not 0.0 < reference < math.inf:
        return None
    # Minus zero would be printed as such.
    return 0.0 - decibel(gain / reference) + 0.0
