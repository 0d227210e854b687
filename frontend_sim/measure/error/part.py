"""One cause of the total error, as a waveform."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from frontend_sim.measure.arrays import Real


@dataclass(frozen=True, eq=False)
class Part:
    """What one cause adds to every code.

    Parameters
    ----------
    name : of the cause
    volts : referred to the converter's pin, shape (K,) [V]
    """

    name: str
    volts: Real

    @cached_property
    def mean(self) -> float:
        """Mean over the run [V]."""
        return float(np.mean(self.volts))

    @cached_property
    def rms(self) -> float:
        """Root mean square over the run, its mean included [V]."""
        return math.sqrt(float(np.mean(self.volts**2)))

    @cached_property
    def peak(self) -> float:
        """Largest size over the run [V]."""
        return float(np.max(np.abs(self.volts)))
