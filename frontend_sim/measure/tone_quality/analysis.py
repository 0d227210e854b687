"""SNR, SINAD, THD, SFDR and effective bits of a record that holds one tone."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real, finite, positive, samples
from frontend_sim.measure.instants import Instants
from frontend_sim.measure.level import decibel
from frontend_sim.measure.sine_fit.free_frequency import LEAST_POINTS, gauss_newton
from frontend_sim.measure.spectrum.coherence import Coherence, coherence_of
from frontend_sim.measure.spectrum.folding import folded
from frontend_sim.measure.spectrum.spectrum import amplitude_spectrum
from frontend_sim.measure.spectrum.window import window_named
from frontend_sim.measure.tone_quality.lines import Mask, lines_of
from frontend_sim.measure.tone_quality.quality import ToneQuality, quality_of
from frontend_sim.quantities.counting import counted

MOST_LEAKAGE = 0.02
"""Largest share of the power of noise and distortion that may be leakage of the tone, 0.09 dB."""

ROUNDING = 1e-13
"""Leakage below this share of the tone's amplitude is rounding."""

TRIED = ("rectangular", "hann", "blackman-harris", "blackman-harris-7")
"""Windows that are tried where none is asked for, from the sharpest to the quietest."""

LEAST_PHASES = 64
"""Fewest different phases of a sine that say something of its noise."""


def tone_quality(
    values: ArrayLike,
    rate: float,
    *,
    window: str | None = None,
    harmonics: int = 10,
    full_scale: float | None = None,
    frequency: float | None = None,
) -> ToneQuality:
    """Measure noise and distortion of the one tone in a record, by its spectrum.

    The tone is found by a four-parameter fit. Whether a window serves is not guessed but measured:
    the fitted tone alone is given the same window, and what it leaves outside its own bins must
    stay below ``MOST_LEAKAGE`` of the noise and distortion that the record shows there. A coherent
    record passes with the rectangular window, other records need a quieter one, and where none is
    quiet enough the measure refuses. Definitions: IEEE 1241, from memory.

    Parameters
    ----------
    values : shape (N,) [V]
    rate : samples per second [Hz]
    window : name of a window; left out, the sharpest that leaks little enough
    harmonics : order of the highest harmonic, 10 as in IEEE 1241
    full_scale : width of the range, for effective bits and levels [V]
    frequency : first guess of the tone's frequency, which may lie above half the rate: the tone is
        then that where it folds to; left out, the strongest line [Hz]

    Raises
    ------
    MeasureError
        If no tone stands out, the record is too short, it repeats a few phases only, or no window
        can tell the tone from the rest.
    """
    row = samples(values, LEAST_POINTS)
    if not (isinstance(harmonics, int) and harmonics >= 1):
        raise MeasureError(f"the highest harmonic must be a number from 1 up, not {harmonics!r}")
    whole = None if full_scale is None else positive(full_scale, "the full scale", "V")
    instants = Instants.of(len(row), rate=rate)
    guess = None if frequency is None else folded(finite(frequency, "the frequency"), rate)
    fit, model = gauss_newton(row, instants, guess)
    coherence = coherence_of(fit.frequency, rate, len(row))
    _refuse_repeats(row, coherence.phases)
    reasons = []
    for name in TRIED if window is None else (window,):
        try:
            spectrum = amplitude_spectrum(row, rate, window_named(name))
            lines = lines_of(spectrum, fit.frequency, harmonics)
        except MeasureError as error:
            if window is not None or name == TRIED[0]:
                raise
            reasons.append(f"{name}: {error}")
            continue
        found = quality_of(spectrum, lines, coherence, fit.offset, whole)
        leak = _leakage(model, rate, name, lines.kept_out)
        if leak <= max(MOST_LEAKAGE**0.5 * found.error_rms, ROUNDING * fit.amplitude):
            return found
        rms = fit.amplitude / math.sqrt(2.0)
        reasons.append(
            f"{name}: the tone leaks {decibel(leak / rms):.1f} dB, noise and distortion "
            f"show {decibel(found.error_rms / rms):.1f} dB"
        )
    raise _no_window(coherence, reasons)


def _no_window(coherence: Coherence, reasons: list[str]) -> MeasureError:
    listed = "\n".join(f"  {reason}" for reason in reasons)
    return MeasureError(
        f"no window tells the tone, {coherence.frequency:.9g} Hz or "
        f"{counted(coherence.cycles, 'cycle')} {coherence.deviation:+.3g} in the record, from its "
        f"own leakage\n{listed}\nmake the record coherent (a whole number of cycles, see "
        "coherent_tone), longer, or use fit_sine"
    )


def _leakage(tone: Real, rate: float, window: str, kept_out: Mask) -> float:
    """Return the rms value that a tone alone shows outside its own bins [V]."""
    spectrum = amplitude_spectrum(tone, rate, window)
    outside = float(np.sum(spectrum.mean_square[~kept_out]))
    return math.sqrt(outside / spectrum.window.noise_bandwidth)


def _refuse_repeats(values: Real, phases: int) -> None:
    """Raise MeasureError if a record only repeats a few samples."""
    if phases >= min(LEAST_PHASES, len(values)):
        return
    if np.array_equal(values[phases:], values[:-phases]):
        raise MeasureError(
            f"the record repeats the same {counted(phases, 'sample')} over and over, so it shows "
            f"{counted(phases, 'phase')} of the tone only, at least {LEAST_PHASES} are needed; "
            "take a number of cycles without common factor with the number of points, see "
            "coherent_tone"
        )
