"""What a chain does to each frequency."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Self

from frontend_sim.measure.response.attenuation import Attenuation, attenuation_at
from frontend_sim.measure.response.gain import Corner, LargestGain, corners_of, largest_gain
from frontend_sim.measure.response.group_delay import group_delay_at
from frontend_sim.measure.response.noise_bandwidth import noise_bandwidth
from frontend_sim.measure.response.step_response import StepResponse


@dataclass(frozen=True)
class FrequencyDomain:
    """Gain, corners, delay and bandwidth of a chain.

    Parameters
    ----------
    largest : largest gain, and where
    corners : all -3 dB corners, in order of frequency
    group_delay_dc : at zero frequency [s]
    group_delay_band : where the gain is largest [s]
    attenuations : at half the conversion rate, and at the conversion rate
    noise_bandwidth : infinite where high frequencies pass; None where there is none [Hz]
    """

    largest: LargestGain
    corners: tuple[Corner, ...]
    group_delay_dc: float
    group_delay_band: float
    attenuations: tuple[Attenuation, ...]
    noise_bandwidth: float | None

    @classmethod
    def of(cls, response: StepResponse, rate: float) -> Self:
        """Measure a chain, given by its step response, for a conversion rate [Hz]."""
        largest = largest_gain(response)
        return cls(
            largest,
            corners_of(response, largest),
            group_delay_at(response.roots, 0.0),
            group_delay_at(response.roots, largest.frequency),
            (
                attenuation_at(response, "half the conversion rate", 0.5 * rate, largest.value),
                attenuation_at(response, "the conversion rate", rate, largest.value),
            ),
            noise_bandwidth(response, largest.value),
        )
