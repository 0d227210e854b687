"""What a unit step at the stimulus does at the pin."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Self

from frontend_sim.converter import AnyAdc
from frontend_sim.measure.response.decay import Decay
from frontend_sim.measure.response.settling import Settling, settling_time
from frontend_sim.measure.response.shape import SEARCHED, Shape, shape_of
from frontend_sim.measure.response.step_response import StepResponse

PERCENTAGES = (("1 %", 0.01), ("0.1 %", 0.001))
"""Bands as shares of the reference of ``Shape``."""

SILENT = 1e-200
"""A chain of a gain below this passes nothing."""


@dataclass(frozen=True)
class TimeDomain:
    """Where a step response starts and ends, its shape, and how long it takes.

    Parameters
    ----------
    delay : pure delay of the chain; times count from the step at the stimulus, delay included [s]
    start : value right after the step has come through the delay [1]
    end : value in the end; infinite with a pole at the origin, None where it rings for ever [1]
    shape : the shape in words, overshoot, undershoot
    full_scale_step : the step at the stimulus for which LSB are counted. It is the one that fills
        the range of the ADC, (high - low) / |end|; where a response ends at zero, as high as a
        sine that fills the range from end to end where the gain is largest, (high - low) / |H|max;
        high - low where there is neither [V]
    settlings : how long until the response stays within 1 %, 0.1 % and half an LSB; empty where
        it has no end
    """

    delay: float
    start: float
    end: float | None
    shape: Shape
    full_scale_step: float
    settlings: tuple[Settling, ...]

    @classmethod
    def of(cls, response: StepResponse, largest: float, adc: AnyAdc) -> Self:
        """Measure a step response.

        Parameters
        ----------
        largest : largest gain over all frequencies [1]
        """
        decay = _decay_of(response, SEARCHED * largest) if largest > SILENT else None
        shape = shape_of(response, decay)
        reference = abs(shape.reference_value or 0.0)
        step = (adc.high - adc.low) / (filling_gain(response.end, largest) or 1.0)
        bands = [(label, share * reference) for label, share in PERCENTAGES]
        bands.append(("0.5 LSB", 0.5 * adc.lsb / step))
        finest = min(band for _, band in bands)
        if decay is not None and finest < SEARCHED * largest:
            decay = _decay_of(response, finest)
        settlings = [
            Settling(label, band, settling_time(decay, band, response.delay))
            for label, band in bands
            if response.settles
        ]
        return cls(response.delay, response.start, response.end, shape, step, tuple(settlings))


def filling_gain(end: float | None, largest: float) -> float | None:
    """Return the gain by which a step fills the range: its end, else the largest gain [1].

    None where the chain passes nothing, or without bound.
    """
    candidates = [0.0 if end is None else abs(end), largest]
    return next((gain for gain in candidates if SILENT < gain < math.inf), None)


def _decay_of(response: StepResponse, floor: float) -> Decay | None:
    moving = response.settles and response.chain.order > 0
    return Decay.of(response.chain, floor) if moving else None
