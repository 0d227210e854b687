"""The linear least squares below every fit of tones."""

from __future__ import annotations

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real

SEPARABLE = 1e-6
"""Smallest singular value of the normalized columns, against the largest, that still tells."""


def least_squares(columns: Real, values: Real, what: str) -> Real:
    """Return x with the least |columns x - values|, shape (p,).

    Parameters
    ----------
    columns : shape (N, p)
    values : shape (N,)
    what : what the columns are, for the message

    Raises
    ------
    MeasureError
        If the columns are not independent: the samples cannot tell them apart.
    """
    scale = np.linalg.norm(columns, axis=0)
    # A column of zeros is dependent on every other.
    normalized = columns / np.where(scale > 0.0, scale, 1.0)
    found, _, _, singular = np.linalg.lstsq(normalized, values, rcond=None)
    if np.any(scale == 0.0) or singular[-1] <= SEPARABLE * singular[0]:
        raise MeasureError(
            f"these samples cannot tell {what} apart; record longer, and keep away from zero and "
            "half the rate"
        )
    return np.asarray(found / np.where(scale > 0.0, scale, 1.0))
