"""How long the envelope of a narrow band is delayed."""

from __future__ import annotations

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.measure.response.roots import Roots


def group_delay(roots: Roots, frequency: Real) -> Real:
    """Return the group delay -d arg H / dw at frequencies [Hz], shape (K,) [s],

        tau(w) = delay + sum_p Re 1/(jw - p) - sum_z Re 1/(jw - z).

    It is the real part of the logarithmic derivative of the transfer function, not a difference
    of a wrapped phase; the jump of the phase by pi at a zero on the axis is no delay.
    """
    s = (2j * np.pi * np.asarray(frequency, dtype=np.float64)).astype(np.complex128)
    return np.asarray(-roots.logarithmic_derivative(s).real + 0.0)


def group_delay_at(roots: Roots, frequency: float) -> float:
    """Return the group delay at one frequency, the pure delay alone at infinity [s]."""
    if np.isinf(frequency):
        return roots.delay
    return float(group_delay(roots, np.array([frequency]))[0])
