"""Linearity from the codes of a sine: the arcsine histogram."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.converter.adc import Adc
from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import finite, positive
from frontend_sim.measure.linearity.confidence import deviate, width_confidence
from frontend_sim.measure.linearity.histogram import code_density
from frontend_sim.measure.linearity.linearity import Levels, Linearity, linearity_of
from frontend_sim.measure.linearity.transitions import ideal_levels


def sine_linearity(
    codes: ArrayLike,
    adc: Adc,
    *,
    amplitude: float | None = None,
    offset: float | None = None,
    confidence: float = 0.99,
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
    spread = np.sqrt(share * (1.0 - share) / density.total)
    levels = Levels(level, deviate(confidence) * slope * spread, amplitude is not None)
    # A code of one LSB gets the share of the time that the sine spends in it.
    edges = level[0] + np.linspace(0.0, 1.0, len(level)) * (level[-1] - level[0])
    turn = np.arccos(np.clip((centre - edges) / scale, -1.0, 1.0))
    expected = np.diff(turn) / np.pi
    return linearity_of(
        density,
        levels,
        width_confidence(density.counts[1:-1], expected, density.total, confidence),
        ideal_levels(adc, density),
        confidence,
    )
