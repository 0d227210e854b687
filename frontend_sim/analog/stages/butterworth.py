"""Butterworth filter."""

from __future__ import annotations

from typing import Literal

from frontend_sim.analog.prototypes import Prototype, butterworth
from frontend_sim.analog.stages.filters import Filter


class Butterworth(Filter):
    """Maximally flat magnitude, |H|² = 1 / (1 + (f/corner)^(2 order)); the corner is at -3.01 dB.

    Source: S. Butterworth 1930, "On the theory of filter amplifiers".
    """

    kind: Literal["butterworth"] = "butterworth"

    def prototype(self) -> Prototype:
        """Return poles equally spaced on the left half of the unit circle."""
        return butterworth(self.order)
