"""Which bins of a spectrum belong to the offset, the tone, its harmonics, and which to noise."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import MeasureError
from frontend_sim.measure.spectrum.folding import folded
from frontend_sim.measure.spectrum.spectrum import Spectrum
from frontend_sim.quantities.counting import counted

LEAST_NOISE = 0.25
"""Share of the bins that must be left for the noise."""

Mask = NDArray[np.bool_]


@dataclass(frozen=True)
class Harmonic:
    """One harmonic of the tone, where sampling has put it.

    Parameters
    ----------
    order : 2 for the second harmonic
    frequency : after folding, between zero and half the rate [Hz]
    amplitude : peak value, the noise of its bins included; None where the harmonic folds onto the
        offset, the tone or a lower harmonic and cannot be told from it [V]
    """

    order: int
    frequency: float
    amplitude: float | None


@dataclass(frozen=True, eq=False)
class Lines:
    """The bins of a spectrum, shared out.

    Parameters
    ----------
    tone : first and last bin of the tone
    harmonics : in order
    kept_out : bins of the offset and of the tone, shape (N // 2 + 1,)
    noise : bins of neither offset, tone nor harmonic, shape (N // 2 + 1,)
    """

    tone: tuple[int, int]
    harmonics: tuple[Harmonic, ...]
    kept_out: Mask
    noise: Mask


def lines_of(spectrum: Spectrum, frequency: float, highest: int) -> Lines:
    """Share out the bins.

    Every line takes the bins of the main lobe of the window around it.

    Parameters
    ----------
    frequency : of the tone [Hz]
    highest : order of the highest harmonic

    Raises
    ------
    MeasureError
        If the tone cannot be told from the offset or from half the rate, or no noise is left.
    """
    half, last = spectrum.window.half_width, len(spectrum.frequency) - 1
    tone, centre = _bins(spectrum, frequency), round(frequency / spectrum.resolution)
    # Its mirror images lie around -centre and count - centre; none may reach into its own bins.
    if centre <= 2 * half or 2 * (centre + half) >= spectrum.count:
        raise MeasureError(
            f"a tone of {frequency:.6g} Hz, {frequency / spectrum.resolution:.4g} bins, lies "
            f"within the main lobe of the {spectrum.window.name} window around zero or half the "
            f"rate; record more cycles, at least {2 * half + 1} of them and as many below half the "
            "rate"
        )
    kept_out = np.zeros(last + 1, dtype=np.bool_)
    kept_out[: half + 1] = True
    kept_out[tone[0] : tone[1] + 1] = True
    taken = kept_out.copy()
    harmonics = []
    for order in range(2, highest + 1):
        there = folded(order * frequency, spectrum.rate)
        first, end = _bins(spectrum, there)
        hidden = bool(np.any(taken[first : end + 1]))
        amplitude = None if hidden else float(np.sqrt(2.0 * spectrum.power(first, end)))
        harmonics.append(Harmonic(order, there, amplitude))
        if not hidden:
            taken[first : end + 1] = True
    if np.count_nonzero(~taken) < LEAST_NOISE * len(taken):
        raise MeasureError(
            f"a record of {counted(spectrum.count, 'point')} leaves "
            f"{counted(int(np.count_nonzero(~taken)), 'bin')} for the noise beside the tone and "
            f"{counted(highest - 1, 'harmonic')}; record longer, or ask for fewer harmonics"
        )
    return Lines(tone, tuple(harmonics), kept_out, ~taken)


def _bins(spectrum: Spectrum, frequency: float) -> tuple[int, int]:
    half = spectrum.window.half_width
    centre = round(frequency / spectrum.resolution)
    return max(centre - half, 0), min(centre + half, len(spectrum.frequency) - 1)
