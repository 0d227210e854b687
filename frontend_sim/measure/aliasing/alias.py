"""What of a stimulus folds, where it lands, and how large it is there; known before any run."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.converter import AnyAdc
from frontend_sim.measure.aliasing.sieve import Sieve
from frontend_sim.measure.aliasing.source import Band, Line
from frontend_sim.measure.arrays import Real
from frontend_sim.measure.level import decibel
from frontend_sim.measure.spectrum.folding import folded

PER_BAND = 4001
"""Frequencies at which the gain is looked at over a band."""


@dataclass(frozen=True)
class Alias:
    """A line or a band that the converter folds down.

    Parameters
    ----------
    source : what it comes from
    frequency, up_to : where it is in the stimulus; one frequency for a line [Hz]
    lands, lands_up_to : where it shows in the codes, by the true rate [Hz]
    measure : whether the level is a peak value or an rms value; "" where none is known
    arrives : level in the stimulus, in its unit
    volts : level in the codes, behind chain and converter [V]
    lsb : the same [LSB]
    full_scale : the same against a sine that fills the range, of the same measure [dB]
    attenuation : how far the gain for it lies below the largest gain of the chain [dB]
    """

    source: str
    frequency: float
    up_to: float
    lands: float
    lands_up_to: float
    measure: Literal["peak", "rms", ""]
    arrives: float | None
    volts: float | None
    lsb: float | None
    full_scale: float | None
    attenuation: float | None

    @property
    def below_source(self) -> float | None:
        """Level in the codes over that in the stimulus; per unit of the stimulus [dB]."""
        if self.arrives is None or self.volts is None:
            return None
        return decibel(self.volts / self.arrives) if self.arrives > 0.0 else None


@dataclass(frozen=True, eq=False)
class Folder:
    """Chain and converter, as they meet what folds.

    Parameters
    ----------
    chain : up to the pin;  adc : behind it
    largest : largest gain of the chain [1]
    """

    chain: Chain
    adc: AnyAdc
    largest: float

    @property
    def rate(self) -> float:
        """Codes per second, by a right clock [Hz]."""
        return self.adc.true_rate

    def gain(self, frequency: Real) -> Real:
        """Return |H| · |D| of chain and converter at frequencies [Hz], of their shape [1]."""
        chain = np.abs(self.chain.response(frequency))
        return np.asarray(chain * Sieve.of(self.adc).gain(frequency))

    def of_lines(self, lines: Sequence[Line], most: int, least: float) -> list[Alias]:
        """Return what becomes of lines; of many the strongest, by their level in the codes.

        Parameters
        ----------
        most : the largest number of lines that are all told
        least : where they are more, those below are left out [LSB]
        """
        if not lines:
            return []
        gains = self.gain(np.array([line.frequency for line in lines]))
        volts = gains * np.array([line.amplitude for line in lines])
        chosen = np.arange(len(lines))
        if len(lines) > most:
            strongest = np.argsort(-volts, kind="stable")[:most]
            chosen = strongest[volts[strongest] >= least * self.adc.lsb]
        return [self._of_line(lines[place], float(volts[place])) for place in chosen.tolist()]

    def _of_line(self, line: Line, volts: float) -> Alias:
        lands = folded(line.frequency, self.rate)
        return self.alias(
            line.source, (line.frequency,) * 2, (lands,) * 2, "peak", line.amplitude, volts
        )

    def of_band(self, band: Band) -> Alias:
        """Return what becomes of a band: the highest peak of a sweep, the rms value of noise."""
        ends, lands = (band.low, band.high), folded_band(band.low, band.high, self.rate)
        if band.peak is None and band.density is None:
            return self.alias(band.source, ends, lands, "", None, None)
        frequency = np.linspace(band.low, band.high, PER_BAND)
        gain = self.gain(frequency)
        if band.peak is not None:
            volts = band.peak * float(np.max(gain))
            return self.alias(band.source, ends, lands, "peak", band.peak, volts)
        assert band.density is not None
        shape = np.ones(PER_BAND)
        if band.flat < band.high:
            shape = np.clip((band.high - frequency) / (band.high - band.flat), 0.0, 1.0)
        arrives, volts = (
            math.sqrt(band.density * float(np.trapezoid((shape * row) ** 2, frequency)))
            for row in (1.0, gain)
        )
        return self.alias(band.source, ends, lands, "rms", arrives, volts)

    def alias(
        self,
        source: str,
        ends: tuple[float, float],
        lands: tuple[float, float],
        measure: Literal["peak", "rms", ""],
        arrives: float | None,
        volts: float | None,
    ) -> Alias:
        """Return an alias with its levels worked out; the parameters are those of ``Alias``."""
        if arrives is None or volts is None:
            return Alias(source, *ends, *lands, measure, None, None, None, None, None)
        full = 0.5 * (self.adc.high - self.adc.low)
        full = full / math.sqrt(2.0) if measure == "rms" else full
        gain = volts / arrives if arrives > 0.0 else 0.0
        against = math.inf
        if 0.0 < self.largest < math.inf:
            against = -decibel(gain / self.largest)
        return Alias(
            source, *ends, *lands, measure, arrives, volts, volts / self.adc.lsb,
            decibel(volts / full), against,
        )  # fmt: skip


def folded_band(low: float, high: float, rate: float) -> tuple[float, float]:
    """Return the ends of where a band shows up between zero and half the rate [Hz]."""
    half = 0.5 * rate
    if high - low >= half:
        return 0.0, half
    ends = [folded(low, rate), folded(high, rate)]
    turn = math.floor(high / half)
    if turn > math.floor(low / half):
        # The band reaches over a multiple of half the rate: an even one is zero, an odd one half.
        ends.append(half if turn % 2 else 0.0)
    return min(ends), max(ends)
