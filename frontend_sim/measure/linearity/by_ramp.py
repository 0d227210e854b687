"""Linearity from the codes of a ramp: every voltage is met equally often."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.converter.adc import Adc
from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import codes_of, finite
from frontend_sim.measure.linearity.confidence import deviate, width_confidence
from frontend_sim.measure.linearity.histogram import code_density
from frontend_sim.measure.linearity.in_order import misplaced, steps_unsure
from frontend_sim.measure.linearity.linearity import Levels, Linearity, linearity_of
from frontend_sim.measure.linearity.transitions import ideal_levels


def ramp_linearity(
    codes: ArrayLike,
    adc: Adc,
    *,
    span: tuple[float, float] | None = None,
    confidence: float = 0.99,
) -> Linearity:
    """Measure INL and DNL from the codes of a ramp or a triangle,

        level[k] = low + (high - low) (C[k] - 1/2) / (N - 1),

    C[k] the samples below the change to code k: the change lies between two samples, and the
    middle is taken. Source: IEEE 1241, ramp histogram (from memory).

    The confidence is the better one of two that hold: the binomial one of samples in any order, and
    that of a ramp in the order of time, where only noise puts samples on the wrong side of a level.

    Parameters
    ----------
    codes : in the order of time, shape (N,) [counts]
    adc : that they come from, for its range and codes
    span : lowest and highest voltage of the ramp among the samples, for gain and offset errors [V];
        left out, only INL and DNL are told, which do not depend on them
    confidence : share of intervals that hold the true value

    Raises
    ------
    MeasureError
        If there are too few samples or codes, or the span is empty.
    """
    low, high = (finite(end, "an end of the span") for end in span or (0.0, 1.0))
    if not low < high:
        raise MeasureError(f"the span of the ramp, {low:g} V to {high:g} V, is empty or reversed")
    density = code_density(codes, adc)
    total = density.total
    below = np.cumsum(density.counts[:-1])
    level = np.asarray(low + (high - low) * (below - 0.5) / (total - 1.0), dtype=np.float64)
    share, z = below / total, deviate(confidence)
    any_order = z * total * np.sqrt(share * (1.0 - share) / total)
    relative = codes_of(codes, 1) - density.lowest
    in_order = steps_unsure(misplaced(relative, density.counts), z)
    step = (high - low) / (total - 1.0)
    levels = Levels(level, step * np.minimum(any_order, in_order), span is not None)
    inner = len(level) - 1
    lsb = (below[-1] - below[0]) / inner
    expected = np.full(inner, lsb / total)
    binomial = width_confidence(density.counts[1:-1], expected, total, confidence)
    ordered = np.maximum(in_order[:-1], in_order[1:]) / lsb
    return linearity_of(
        density, levels, np.minimum(binomial, ordered), ideal_levels(adc, density), confidence
    )
