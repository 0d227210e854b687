"""How well the parameters of a sine in white noise can be known."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real, finite, positive
from frontend_sim.measure.instants import Instants

LEAST_POINTS = 5

SINGULAR = 1e-12
"""Smallest eigenvalue of the scaled information, against the largest, that is not rounding."""


@dataclass(frozen=True)
class SineBounds:
    """Cramér-Rao bounds: the least standard deviation of any unbiased estimate.

    Parameters
    ----------
    amplitude, offset : [V]
    frequency : 0 where it is known beforehand [Hz]
    phase : at t = 0 [rad]
    """

    amplitude: float
    frequency: float
    phase: float
    offset: float


def cramer_rao(
    amplitude: float,
    frequency: float,
    noise: float,
    count: int,
    *,
    phase: float = 0.0,
    rate: float | None = None,
    times: ArrayLike | None = None,
    known_frequency: bool = False,
) -> SineBounds:
    """Return the Cramér-Rao bounds of the parameters of a sine in white Gaussian noise,

        C = noise² (J' J)^-1,    J[n] = dy(t[n]) / d(amplitude, phase, offset, frequency).

    Many cycles at a rate give the closed forms var(amplitude) = 2 noise²/N, var(offset) =
    noise²/N, var(frequency) = 6 noise² rate² / (pi² amplitude² N (N² - 1)). Source: D. C. Rife and
    R. R. Boorstyn 1974, "Single-tone parameter estimation from discrete-time observations", IEEE
    Trans. Information Theory 20 (from memory).

    Parameters
    ----------
    amplitude, noise : peak value of the sine, rms of the noise [V]
    frequency : [Hz]
    count : samples
    phase : at t = 0 [rad]
    rate, times : of the samples, one of both [Hz], [s]
    known_frequency : whether the frequency is given rather than fitted

    Raises
    ------
    MeasureError
        If the instants cannot tell the parameters apart.
    """
    height = positive(amplitude, "the amplitude", "V")
    exact = positive(frequency, "the frequency", "Hz")
    if not (isinstance(count, int) and count >= LEAST_POINTS):
        raise MeasureError(f"four parameters need at least {LEAST_POINTS} samples, not {count!r}")
    instants = Instants.of(count, rate, times)
    spread = abs(finite(noise, "the noise"))
    return bounds_at(height, exact, spread, finite(phase, "the phase"), instants, known_frequency)


def bounds_at(
    amplitude: float,
    frequency: float,
    noise: float,
    phase: float,
    instants: Instants,
    known_frequency: bool,
) -> SineBounds:
    """Return the Cramér-Rao bounds at instants, see ``cramer_rao``."""
    there = instants.phase(frequency) + phase - instants.phase_at_zero(frequency)
    jacobian = _jacobian(amplitude, there, instants)[:, : 3 if known_frequency else 4]
    scale = np.linalg.norm(jacobian, axis=0)
    normalized = jacobian / np.where(scale > 0.0, scale, 1.0)
    values, vectors = np.linalg.eigh(normalized.T @ normalized)
    if values[0] <= SINGULAR * values[-1]:
        raise MeasureError(
            f"these instants cannot tell amplitude, phase, offset and frequency of a sine of "
            f"{frequency:g} Hz apart; record more cycles, away from zero and half the rate"
        )
    # d(phase at t = 0) = d(phase at the centre) - 2 pi centre d(frequency): the frequency and the
    # phase are estimated around the centre, where they are least correlated.
    arm = 2.0 * np.pi * instants.centre * instants.tick
    rows = np.eye(jacobian.shape[1])
    if not known_frequency:
        rows[1, 3] = -arm
    spread = noise * np.sqrt(np.sum((rows / scale @ vectors) ** 2 / values, axis=1))
    last = 0.0 if known_frequency else float(spread[3])
    return SineBounds(float(spread[0]), last, float(spread[1]), float(spread[2]))


def _jacobian(amplitude: float, phase: Real, instants: Instants) -> Real:
    """Return dy / d(amplitude, phase at the centre, offset, frequency), shape (N, 4)."""
    away = (instants.ticks - instants.centre) * instants.tick
    turning = amplitude * np.cos(phase)
    return np.column_stack(
        [np.sin(phase), turning, np.ones_like(phase), 2.0 * np.pi * away * turning]
    )
