"""Mains and its harmonics, whose frequency strays from the nominal one."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real, positive, samples
from frontend_sim.measure.instants import Instants
from frontend_sim.measure.mains.tones import ToneLevels, tone_levels
from frontend_sim.measure.spectrum.window import WINDOWS

PER_BIN = 8
"""Frequencies tried per bin of the record."""

LEAST_POINTS = 16


def mains_levels(
    values: ArrayLike,
    rate: float,
    *,
    mains: float = 50.0,
    deviation: float = 0.01,
    harmonics: int = 1,
) -> ToneLevels:
    """Measure mains hum and its harmonics in a record.

    The fundamental is the strongest line within mains (1 ± deviation), under a Hann window, and the
    harmonics are whole multiples of it. All are then fitted at once, see ``tone_levels``. A mains
    that wanders within the record by more than a bin, 1 / duration, reads too low; measure shorter
    stretches then.

    Parameters
    ----------
    values : shape (N,) [V]
    rate : samples per second [Hz]
    mains : nominal frequency [Hz]
    deviation : how far the true frequency may lie from it, as a share [1]
    harmonics : how many tones, the fundamental included

    Raises
    ------
    MeasureError
        If a harmonic lies above half the rate, or the record is too short.
    """
    row = samples(values, LEAST_POINTS)
    nominal, exact = positive(mains, "the mains frequency", "Hz"), positive(rate, "the rate", "Hz")
    if not (isinstance(harmonics, int) and harmonics >= 1):
        raise MeasureError(f"the number of harmonics must be 1 or more, not {harmonics!r}")
    if not 0.0 <= deviation < 0.5:
        raise MeasureError(f"the deviation must be a share from 0 to 0.5, not {deviation!r}")
    highest = harmonics * nominal * (1.0 + deviation)
    if highest >= 0.5 * exact:
        most = int(0.5 * exact / (nominal * (1.0 + deviation)))
        raise MeasureError(
            f"harmonic {harmonics} of {nominal:g} Hz reaches {highest:g} Hz, at or above half the "
            f"rate, {0.5 * exact:g} Hz, where it cannot be told from what folds onto it; ask for "
            f"at most {most}, or record at a higher rate"
        )
    fundamental = nominal
    if deviation > 0.0:
        fundamental = _strongest(row, exact, nominal * (1.0 - deviation), nominal * (1 + deviation))
    return tone_levels(row, [k * fundamental for k in range(1, harmonics + 1)], rate=exact)


def _strongest(values: Real, rate: float, low: float, high: float) -> float:
    """Return the frequency of the strongest line in a band, under a Hann window [Hz]."""
    from scipy.optimize import minimize_scalar
    from scipy.signal import zoom_fft

    instants = Instants.of(len(values), rate=rate)
    windowed = (values - np.mean(values)) * WINDOWS["hann"].points(len(values))
    count = int(np.ceil((high - low) * instants.span * PER_BIN)) + 2
    grid = np.linspace(low, high, count)
    lines = np.abs(zoom_fft(windowed, [low, high], count, fs=rate, endpoint=True))
    peak = int(np.argmax(lines))

    def height(frequency: float) -> float:
        return -float(np.abs(np.sum(windowed * np.exp(-1j * instants.phase(frequency)))))

    left, right = grid[max(peak - 1, 0)], grid[min(peak + 1, count - 1)]
    found = minimize_scalar(
        height, bounds=(left, right), method="bounded", options={"xatol": 1e-4 / instants.span}
    )
    return float(found.x)
