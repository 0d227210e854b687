"""A sampling converter whose looks follow another rhythm than that of its own rate."""

from __future__ import annotations

from typing import Self

from pydantic import Field, model_validator

from frontend_sim.converter.adc import Adc
from frontend_sim.converter.base import ROUNDINGS
from frontend_sim.converter.pattern import LookPattern
from frontend_sim.values import validated


class PacedAdc(Adc):
    """A sampling converter that a scan paces: ``rhythm`` says when it looks.

    The converter of a whole scan is one, and so is what a single channel gets of it. ``rate`` is
    the mean number of codes per second.
    """

    rhythm: LookPattern = Field(exclude=True, repr=False, description="when it looks")

    @model_validator(mode="after")
    def _rate_follows(self) -> Self:
        if abs(self.rate - self._mean_rate(self.rhythm, self.looks, self.tempo)) > 1e-9 * self.rate:
            raise ValueError(
                "the rate of a channel follows from the scan that paces it; change it there"
            )
        return self

    @staticmethod
    def _mean_rate(rhythm: LookPattern, looks: int, tempo: float) -> float:
        """Return codes per second by the converter's own clock [Hz]."""
        return rhythm.rate * rhythm.looks / (looks * tempo)

    @classmethod
    def of(cls, adc: Adc, rhythm: LookPattern) -> Self:
        """Return a converter with the range and the errors of another one, and a rhythm.

        Parameters
        ----------
        rhythm : in true time, the errors of the clock's rate in it
        """
        given = {name: getattr(adc, name) for name in type(adc).model_fields}
        rate = cls._mean_rate(rhythm, adc.looks, adc.tempo)
        return validated(cls, {**given, "rate": rate, "first": rhythm.first, "rhythm": rhythm})

    @property
    def pattern(self) -> LookPattern:
        """When the converter looks at its pin."""
        return self.rhythm

    def code_count(self, duration: float) -> int:
        """Return the number of codes whose last look is nominally within [0, duration) [s]."""
        limit = duration - ROUNDINGS * max(duration, abs(self.pattern.first))
        count = max(int((duration - self.code_instant(0)) * self.true_rate), 0)
        while count > 0 and self.code_instant(count - 1) >= limit:
            count -= 1
        while self.code_instant(count) < limit:
            count += 1
        return count
