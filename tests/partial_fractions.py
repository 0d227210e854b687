"""An independent step response at 60 digits, from partial fractions of H(s)/s."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from typing import Any

import mpmath as mp
import numpy as np
from numpy.typing import NDArray

DIGITS = 60


def step_response(
    zeros: Sequence[complex], poles: Sequence[complex], gain: float, times: Sequence[float]
) -> NDArray[np.float64]:
    """Return the step response of gain · prod(s - zero) / prod(s - pole) at times.

    H(s)/s is expanded over (s - p)^-(k+1), each of which is t^k exp(p t)/k! in time; the
    coefficients solve a linear system at as many points as there are unknowns.
    """
    with mp.workdps(DIGITS):
        terms = _expansion(zeros, poles, gain)
        values = []
        for time in times:
            t = mp.mpf(float(time))
            parts = [w * t**k * mp.exp(p * t) / mp.factorial(k) for w, p, k in terms]
            values.append(float(mp.fsum(parts).real))
    return np.array(values)


def _expansion(
    zeros: Sequence[complex], poles: Sequence[complex], gain: float
) -> list[tuple[Any, Any, int]]:
    counted = Counter([0j, *(complex(p) for p in poles)])
    basis = [(mp.mpc(p), k) for p, count in counted.items() for k in range(count)]
    sizes = [abs(mp.mpc(p)) for p in poles if p != 0.0] or [mp.mpf(1)]
    least, spread = min(sizes), max(sizes) / min(sizes)
    n = len(basis)
    matrix, right = mp.matrix(n, n), mp.matrix(n, 1)
    for row in range(n):
        # Points off the real axis, spread over the sizes of the poles.
        s = least * spread ** (mp.mpf(row) / n) * mp.mpc(mp.mpf(1) / 3, 1 + mp.mpf(row) / 3)
        for column, (p, k) in enumerate(basis):
            matrix[row, column] = s / (s - p) ** (k + 1)
        top, bottom = mp.mpf(gain), mp.mpf(1)
        for zero in zeros:
            top *= s - mp.mpc(zero)
        for pole in poles:
            bottom *= s - mp.mpc(pole)
        right[row] = top / bottom
    weights = mp.lu_solve(matrix, right)
    return [(weights[i], p, k) for i, (p, k) in enumerate(basis)]
