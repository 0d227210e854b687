"""Linearity from the codes of a sine: the arcsine histogram."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.converter.adc import Adc
from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real, codes_of, finite, positive, samples
from frontend_sim.measure.linearity.confidence import Counts, deviate, width_confidence
from frontend_sim.measure.linearity.histogram import CodeDensity, code_density
from frontend_sim.measure.linearity.in_order import misplaced
from frontend_sim.measure.linearity.linearity import Levels, Linearity, linearity_of
from frontend_sim.measure.linearity.transitions import ideal_levels


def sine_linearity(
    codes: ArrayLike,
    adc: Adc,
    *,
    amplitude: float | None = None,
    offset: float | None = None,
    confidence: float = 0.99,
    values: ArrayLike | None = None,
) -> Linearity:
    """Measure INL and DNL from the codes of a sine at random or evenly spread phases,

        level[k] = offset - amplitude · cos(pi C[k] / N),

    C[k] the samples below the change to code k. The sine must be clean, its frequency without
    relation to the rate, and it should reach beyond both ends of the range by several times the
    noise. Source: J. Doernberg, H.-S. Lee and D. A. Hodges 1984, and IEEE 1241 (from memory).

    Parameters
    ----------
    codes : shape (N,) [counts]
    adc : that they come from, for its range and codes
    amplitude, offset : of the sine at the input, for gain and offset errors [V]; left out, only
        INL and DNL are told, which do not depend on them
    confidence : share of intervals that hold the true value
    values : what was converted, shape (N,) [V]; where it is known, so are the phases, and evenly
        spread ones tell far more than random ones do

    Raises
    ------
    MeasureError
        If there are too few samples or codes, or only one of amplitude and offset is given.
    """
    if (amplitude is None) != (offset is None):
        raise MeasureError("gain and offset need both the amplitude and the offset of the sine")
    density = code_density(codes, adc)
    share = np.cumsum(density.counts[:-1]) / density.total
    scale = 1.0 if amplitude is None else positive(amplitude, "the amplitude", "V")
    centre = 0.0 if offset is None else finite(offset, "the offset")
    level = centre - scale * np.cos(np.pi * share)
    # d level = scale pi sin(pi share) d share, and the share is binomial.
    slope = scale * np.pi * np.sin(np.pi * share)
    unsure = deviate(confidence) * np.sqrt(share * (1.0 - share) / density.total)
    # A code of one LSB gets the share of the time that the sine spends in it.
    edges = level[0] + np.linspace(0.0, 1.0, len(level)) * (level[-1] - level[0])
    turn = np.arccos(np.clip((centre - edges) / scale, -1.0, 1.0)) / np.pi
    expected = np.diff(turn)
    widths = width_confidence(density.counts[1:-1], expected, density.total, confidence)
    if values is not None:
        of = codes_of(codes), samples(values)
        phases = _phases_of(*of, density, turn, deviate(confidence))
        unsure = _narrower(unsure, phases.unsure, phases.uneven)
        either = (phases.unsure[:-1] + phases.unsure[1:]) / expected
        widths = _narrower(widths, either, phases.bunched)
    levels = Levels(level, slope * unsure, amplitude is not None)
    return linearity_of(density, levels, widths, ideal_levels(adc, density), confidence)


RANDOM = 1.63
"""D sqrt(N) that random phases exceed in one record of a hundred. Source: Smirnov 1948, "Table for
estimating the goodness of fit of empirical distributions" (from memory)."""

RARE = 0.01
"""Share of records of random phases that are taken for bunched."""


@dataclass(frozen=True, eq=False)
class _Phases:
    """How evenly the phases of a record lie.

    Parameters
    ----------
    unsure : how far the share of samples below each level may be off, shape (K - 1,) [1]
    uneven : whether they are less even than random ones, as those of a few cycles
    bunched : whether they are so within the widths of codes, as those of a frequency that a small
        ratio ties to the rate, which come back before they have been everywhere
    """

    unsure: Real
    uneven: bool
    bunched: bool


def _narrower(by_chance: Real, known: Real, worse: bool) -> Real:
    """Return half an interval: the one of random phases holds if these are no worse."""
    return known if worse else np.minimum(by_chance, known)


def _phases_of(
    codes: Counts, values: Real, density: CodeDensity, turn: Real, deviations: float
) -> _Phases:
    """Return what the values that were converted tell of the phases.

    The phase of a sample, folded into half a cycle, is arccos((centre - value) / amplitude) / pi.
    Below a level lie all samples whose phase is below its own, so that the share is off by no more
    than the largest distance of the phases' distribution from an even one, D of Kolmogorov (1933).
    That sees what adds up over many codes; what each code gets is seen by the chi-square of the
    samples in codes of one LSB. Noise puts some on the wrong side of a level: m of them, in the
    order of what was converted, as of a ramp; see ``in_order``.

    Parameters
    ----------
    turn : phases at which codes of one LSB would change, shape (K - 1,) [half cycles]
    """
    from scipy.special import chdtri

    low, high = float(np.min(values)), float(np.max(values))
    cosine = (low + high - 2.0 * values) / (high - low) if high > low else np.zeros(len(values))
    phase = np.sort(np.arccos(np.clip(cosine, -1.0, 1.0)) / np.pi)
    even = np.arange(len(phase) + 1) / len(phase)
    far = max(float(np.max(even[1:] - phase)), float(np.max(phase - even[:-1])))
    expected = len(phase) * np.diff(turn)
    apart = np.diff(np.searchsorted(phase, turn)) - expected
    bunched = float(np.sum(apart**2 / expected)) > chdtri(len(expected), RARE)
    order = np.argsort(values, kind="stable")
    wrong = misplaced(codes[order] - density.lowest, density.counts)
    noisy = np.maximum(wrong, np.mean(wrong))
    unsure = np.asarray(far + deviations * np.sqrt(2.0 * noisy) / len(values))
    return _Phases(unsure, far * math.sqrt(len(values)) > RANDOM, bool(bunched))
