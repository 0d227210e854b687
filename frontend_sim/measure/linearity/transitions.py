"""The levels at which the codes of the ideal converter change."""

from __future__ import annotations

import numpy as np

from frontend_sim.converter.adc import Adc
from frontend_sim.measure.arrays import Real
from frontend_sim.measure.linearity.histogram import CodeDensity


def ideal_levels(adc: Adc, density: CodeDensity) -> Real:
    """Return the level of each change between the codes seen, shape (K - 1,) [V].

    low + (code - lowest code) LSB for rounding down; half an LSB lower for rounding to nearest.
    Offset and gain error of the converter are what is measured, and do not count here.
    """
    codes = density.lowest + 1 + np.arange(len(density.counts) - 1)
    half = 0.5 if adc.rounding == "nearest" else 0.0
    return np.asarray(adc.low + (codes - adc.lowest_code - half) * adc.lsb)
