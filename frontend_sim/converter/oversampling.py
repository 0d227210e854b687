"""The oversampling converter: a fast modulator, a sinc^K filter, few codes of many bits."""

from __future__ import annotations

from functools import lru_cache
from typing import TYPE_CHECKING, Literal, Self

from pydantic import model_validator

from frontend_sim.converter.base import Converter
from frontend_sim.converter.modulator import Modulator
from frontend_sim.converter.pattern import LookPattern
from frontend_sim.converter.sinc_filter import SincFilter
from frontend_sim.quantities import REFERENCE_TEMPERATURE

if TYPE_CHECKING:
    from frontend_sim.converter.digitizer import Digitizer
    from frontend_sim.converter.sinc_quantities import SincQuantities


@lru_cache(maxsize=16)
def _sinc(order: int, ratio: int, modulator_rate: float) -> SincFilter:
    """Return a filter, which works its weights out once."""
    return SincFilter(order, ratio, modulator_rate)


class OversamplingAdc(Converter, Modulator):
    """A modulator whose samples pass a sinc^K filter before they are rounded.

    H(f) = (sin(pi R f / f_m) / (R sin(pi f / f_m)))^K, f_m = modulator_rate (1 + rate_error);
    LSB = (high - low) / 2^bits. The instant of a code is that of its newest sample. The clock's
    keys are about the modulator's samples; input_noise is that of a code, from white noise of them.
    """

    kind: Literal["oversampling"] = "oversampling"

    @model_validator(mode="after")
    def _instants_keep_their_order(self) -> Self:
        self._refuse_disorder("the modulator's period")
        if self.nonlinearity is not None and self.nonlinearity.capacitor_mismatch > 0.0:
            raise ValueError(
                "nonlinearity.capacitor_mismatch is about a successive-approximation array, which "
                "an oversampling converter has not; take a shape or a table"
            )
        return self

    @property
    def sinc(self) -> SincFilter:
        """The filter, at the rate that the modulator really has."""
        return _sinc(self.order, self.ratio, self.modulator_rate * self.tempo)

    @property
    def continuous(self) -> bool:
        """Whether the filter runs on from code to code."""
        return self.conversion == "continuous"

    @property
    def pattern(self) -> LookPattern:
        """When the modulator takes its samples: evenly, or in a burst for each restarted code."""
        fast = self.modulator_rate * self.tempo
        if self.continuous:
            return LookPattern(self.first, fast)
        return LookPattern(self.first, self.true_rate, self.order * self.ratio, 1.0 / fast)

    @property
    def true_rate(self) -> float:
        """Codes per second, by a right clock [Hz]."""
        return self.rate * self.tempo

    def last_look(self, code: int) -> int:
        """Return the number of the modulator sample that completes a code.

        A filter that runs on gives its first whole value after order · ratio samples.
        """
        blocks = code + self.order if self.continuous else (code + 1) * self.order
        return blocks * self.ratio - 1

    def digitizer(self, seed: int, temperature: float = REFERENCE_TEMPERATURE) -> Digitizer:
        """Return the converter ready to run, see ``Converter.digitizer``."""
        from frontend_sim.converter.decimating_digitizer import DecimatingDigitizer

        return DecimatingDigitizer.of(self, seed, temperature)

    def quantities(self) -> SincQuantities:
        """Return what the filter does, for people who choose its rate and order."""
        from frontend_sim.converter.sinc_quantities import SincQuantities

        return SincQuantities.of(self.sinc, self.continuous)

    @property
    def look_noise(self) -> float:
        """Rms noise of one modulator sample that makes ``input_noise`` of a code [V]."""
        return self.input_noise / self.sinc.noise_gain if self.input_noise else 0.0
