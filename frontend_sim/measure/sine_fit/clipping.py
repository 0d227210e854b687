"""Whether the tops of a sine were cut off."""

from __future__ import annotations

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real

GRAIN = 1e-9
"""Least step between values that counts as one, as a share of the swing."""

MORE_THAN = 3.0
"""A top that holds this factor more samples than the fitted sine puts there is cut off ..."""

AND_MORE_THAN = 4
"""... with so many more, which chance does not do."""


def refuse_clipped(values: Real, model: Real, residual_rms: float) -> None:
    """Raise MeasureError if more samples share an extreme value than the fitted sine explains.

    The sine and Gaussian noise of the residual's rms put P[n] of sample n in the cell around the
    extreme value v whose width q is the distance to the next value,

        P[n] = Phi((v + q/2 - model[n]) / rms) - Phi((v - q/2 - model[n]) / rms).

    Parameters
    ----------
    values : shape (N,) [V]
    model : the fitted sine at the same instants, shape (N,) [V]
    residual_rms : [V]
    """
    for sign, name in ((1.0, "top"), (-1.0, "bottom")):
        found, expected = _at_the_top(sign * values, sign * model, residual_rms)
        if found > MORE_THAN * expected + AND_MORE_THAN:
            raise MeasureError(
                f"the sine is clipped at the {name}: {found} of {len(values)} samples have the "
                f"extreme value {sign * np.max(sign * values):g}, the fitted sine explains "
                f"{expected:.3g}; lower the amplitude, or move the offset away from that end"
            )


def _at_the_top(values: Real, model: Real, rms: float) -> tuple[int, float]:
    """Return how many samples have the largest value, and how many the sine would put there."""
    from scipy.special import ndtr

    highest = float(np.max(values))
    below = values[values < highest]
    if len(below) == 0:
        return 0, 0.0
    swing = float(np.ptp(model))
    step = max(highest - float(np.max(below)), GRAIN * swing)
    spread = max(rms, 1e-3 * GRAIN * swing)
    shares = ndtr((highest + 0.5 * step - model) / spread)
    shares -= ndtr((highest - 0.5 * step - model) / spread)
    return int(np.count_nonzero(values == highest)), float(np.sum(shares))
