"""What a spectrum tells of a tone: its level, and what else there is."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from frontend_sim.measure.level import decibel, effective_bits, quotient
from frontend_sim.measure.spectrum.coherence import Coherence
from frontend_sim.measure.spectrum.spectrum import Spectrum
from frontend_sim.measure.tone_quality.lines import Harmonic, Lines


@dataclass(frozen=True)
class ToneQuality:
    """Noise and distortion of one tone, by the definitions of IEEE 1241 (from memory).

    Parameters
    ----------
    frequency, amplitude, offset : of the tone, amplitude as peak value [Hz], [V], [V]
    noise_rms : of all that is neither offset, tone nor harmonic, up to half the rate [V]
    noise_density : the same per root of bandwidth, one-sided [V/sqrt(Hz)]
    error_rms : of all that is neither offset nor tone [V]
    harmonics : second to highest
    spur_frequency, spur_amplitude : strongest bin beside offset and tone [Hz], [V]
    window : name of the window
    coherence : how the tone lies in the record
    full_scale : width of the range, None where it was not given [V]
    """

    frequency: float
    amplitude: float
    offset: float
    noise_rms: float
    noise_density: float
    error_rms: float
    harmonics: tuple[Harmonic, ...]
    spur_frequency: float
    spur_amplitude: float
    window: str
    coherence: Coherence
    full_scale: float | None

    @property
    def rms(self) -> float:
        """Rms value of the tone, amplitude / sqrt(2) [V]."""
        return self.amplitude / math.sqrt(2.0)

    @property
    def snr(self) -> float:
        """Signal to noise, without the harmonics [dB]."""
        return decibel(quotient(self.rms, self.noise_rms))

    @property
    def sinad(self) -> float:
        """Signal to noise and distortion [dB]."""
        return decibel(quotient(self.rms, self.error_rms))

    @property
    def thd(self) -> float:
        """Root sum square of the harmonics over the tone, below zero; NaN if none is told [dB].

        The noise in the harmonics' own bins counts as theirs, as in IEEE 1241.
        """
        told = [each.amplitude for each in self.harmonics if each.amplitude is not None]
        return decibel(math.hypot(*told) / self.amplitude) if told else math.nan

    @property
    def sfdr(self) -> float:
        """Tone over the strongest other bin, spurious-free dynamic range [dB].

        A spur between two bins shows less by up to the scalloping of the window.
        """
        return decibel(quotient(self.amplitude, self.spur_amplitude))

    @property
    def effective_bits(self) -> float:
        """Effective number of bits; without a full scale, as if the tone filled it."""
        whole = 2.0 * self.amplitude if self.full_scale is None else self.full_scale
        return effective_bits(self.error_rms, whole)

    @property
    def level(self) -> float | None:
        """Level of the tone against a sine that fills the range, None without one [dB]."""
        if self.full_scale is None:
            return None
        return decibel(2.0 * self.amplitude / self.full_scale)

    @property
    def hidden(self) -> tuple[int, ...]:
        """Orders of the harmonics that fold onto another line and are not counted in the THD."""
        return tuple(each.order for each in self.harmonics if each.amplitude is None)


def quality_of(
    spectrum: Spectrum,
    lines: Lines,
    coherence: Coherence,
    offset: float,
    full_scale: float | None,
) -> ToneQuality:
    """Add up the bins.

    The bins of tone and offset hold noise too: as much as the other bins hold on average. A bin
    stands for 1 / B of its mean square, B the noise bandwidth of the window in bins.
    """
    square = spectrum.mean_square / spectrum.window.noise_bandwidth
    each = float(np.mean(square[lines.noise]))
    bins = len(square) - 1  # the bin at zero is the offset's alone
    noise = each * bins
    beside = float(np.sum(square[~lines.kept_out]))
    error = beside + each * (np.count_nonzero(lines.kept_out) - 1)
    amplitude = np.where(lines.kept_out, 0.0, spectrum.amplitude)
    spur = int(np.argmax(amplitude))
    return ToneQuality(
        frequency=coherence.frequency,
        amplitude=math.sqrt(2.0 * spectrum.power(*lines.tone)),
        offset=offset,
        noise_rms=math.sqrt(noise),
        noise_density=math.sqrt(noise / (0.5 * spectrum.rate)),
        error_rms=math.sqrt(error),
        harmonics=lines.harmonics,
        spur_frequency=float(spectrum.frequency[spur]),
        spur_amplitude=float(amplitude[spur]),
        window=spectrum.window.name,
        coherence=coherence,
        full_scale=full_scale,
    )
