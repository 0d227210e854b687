"""The steps by which ``AmplifierLoop`` goes through a piece, and how long they may be."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.analog.block import Real
from frontend_sim.analog.exponential import expm1

LEVELS = 48
"""Halvings of the longest piece: event times are found to 4e-15 of it."""

FIRST = 0.1
"""First step after a jump or an event, times the fastest rate of the circuit."""

FINE = 0.5
"""Norm of the circuit times a step over which a Taylor series converges fast."""

FOLLOWED = 0.5
"""Longest step while a pole rings on, times its magnitude."""

LASTING, BRIEF = 16.0, 3.0
"""So many times its decay a pole is followed after a jump or an event: one that rings (Q above 1)
down to 1e-7; of the others, which hardly overshoot, the begin."""


@dataclass(frozen=True, eq=False)
class LoopSteps:
    """Steps of a circuit, free and held, over ``unit`` · 2^i.

    Parameters
    ----------
    unit : the smallest step, a power of two [s]
    first, fine : levels i of the first step after an event, and of a Taylor series
    steps : exp(M unit 2^i) - I of [x, u, du/dt, slope], free and held, shape (2, levels, N, N)
    rates : dx/dt from the same, free and held, shape (2, n, N) [1/s]
    lasting : how long each pole is followed after an event, shape (poles,) [s]
    longest : the longest step that follows it, in units, shape (poles,)
    """

    unit: float
    first: int
    fine: int
    steps: Real
    rates: Real
    lasting: Real
    longest: NDArray[np.int64]

    @classmethod
    def of(cls, free: Real, held: Real, top: int) -> Self:
        """Tabulate the steps for pieces of up to 2^top seconds.

        Parameters
        ----------
        free, held : dx/dt from x, u and du/dt, and from x, u and slope, shape (n, n + 2) [1/s]
        """
        unit = 2.0 ** (top - LEVELS)
        n = len(free)
        poles = poles_of(free, held)
        fastest = float(np.max(np.abs(poles))) * unit
        norm = max(float(np.max(np.sum(np.abs(m[:, :n]), axis=1))) for m in (free, held)) * unit
        first = _level(FIRST, fastest)
        poles = poles[poles.real < 0.0]
        rings = np.abs(poles) > -2.0 * poles.real
        lasting = np.where(rings, LASTING, BRIEF) / -poles.real
        longest = np.clip(FOLLOWED / (np.abs(poles) * unit), 2.0**first, 2.0**62)
        rates = np.zeros((2, n, n + 3))
        rates[0, :, : n + 2], rates[1][:, [*range(n + 1), n + 2]] = free, held
        steps = np.array([_doublings(_closed(way) * unit) for way in rates])
        return cls(unit, first, _level(FINE, norm), steps, rates, lasting, longest.astype(np.int64))


def poles_of(free: Real, held: Real) -> NDArray[np.complex128]:
    """Return the poles of both circuits [rad/s]."""
    n = len(free)
    found = [np.linalg.eigvals(m[:, :n]) for m in (free, held)]
    return np.concatenate(found).astype(np.complex128)


def _level(most: float, rate: float) -> int:
    """Return the level of the longest step that, times a rate per unit, is at most so much."""
    return min(max(math.floor(math.log2(most / max(rate, 1e-300))), 0), LEVELS)


def _closed(rates: Real) -> Real:
    """Return the system of x and its inputs, of which u grows by du/dt, and the rest stays."""
    n, size = rates.shape
    system = np.zeros((size, size))
    system[:n], system[n, n + 1] = rates, 1.0
    return system


def _doublings(step: Real) -> Real:
    """Return exp(M 2^i) - I for i = 0 ... LEVELS, shape (LEVELS + 1, N, N)."""
    steps = [expm1(step)]
    for _ in range(LEVELS):
        steps.append(2.0 * steps[-1] + steps[-1] @ steps[-1])
    return np.array(steps)
