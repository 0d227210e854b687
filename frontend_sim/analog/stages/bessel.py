"""Bessel filter."""

from __future__ import annotations

from typing import Literal

from frontend_sim.analog.prototypes import Prototype, bessel
from frontend_sim.analog.stages.filters import Filter


class Bessel(Filter):
    """Maximally flat group delay (of the low pass); the corner is at -3.01 dB.

    Source: W. E. Thomson 1949, "Delay networks having maximally flat frequency characteristics".
    """

    kind: Literal["bessel"] = "bessel"

    def prototype(self) -> Prototype:
        """Return the roots of the reverse Bessel polynomial, scaled to the -3 dB corner."""
        return bessel(self.order)
