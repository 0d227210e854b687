"""When samples were taken: at a rate, or at instants that are given."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real, increasing, positive
from frontend_sim.stimulus.phase import cycles

NEARLY = 0.1
"""Instants that stray by less than this share of the interval from a grid count as a grid."""


@dataclass(frozen=True, eq=False)
class Instants:
    """Instants in ticks: t = ticks · tick.

    At a rate the ticks are whole numbers, which keeps the phase of a sine exact; instants that are
    given have ticks of one second.

    Parameters
    ----------
    ticks : increasing, shape (N,) [ticks]
    tick : [s]
    rate : samples per second; None where the instants lie on no grid [Hz]
    """

    ticks: Real
    tick: float
    rate: float | None

    @classmethod
    def of(cls, count: int, rate: float | None = None, times: ArrayLike | None = None) -> Instants:
        """Take either a rate, from t = 0 on, or the instants themselves.

        Raises
        ------
        MeasureError
            If both or neither are given, or if they are not usable.
        """
        if rate is not None and times is None:
            exact = positive(rate, "the rate", "Hz")
            return cls(np.arange(count, dtype=np.float64), 1.0 / exact, exact)
        if times is not None and rate is None:
            row = increasing(times, count)
            return cls(row, 1.0, _grid_rate(row))
        raise MeasureError("give either the rate of the samples or their instants")

    @property
    def centre(self) -> float:
        """Middle between the first and the last instant [ticks]."""
        return 0.5 * float(self.ticks[0] + self.ticks[-1])

    @property
    def span(self) -> float:
        """Time that the samples stand for: from the first to the last and one interval more [s]."""
        count = len(self.ticks)
        return float(self.ticks[-1] - self.ticks[0]) * self.tick * count / max(count - 1, 1)

    def phase(self, frequency: float) -> Real:
        """Return 2 pi f (t - centre), less whole turns, shape (N,) [rad].

        Parameters
        ----------
        frequency : [Hz]
        """
        return 2.0 * np.pi * cycles(frequency * self.tick, self.ticks - self.centre)

    def phase_at_zero(self, frequency: float) -> float:
        """Return 2 pi f (0 - centre), less whole turns [rad]."""
        return float(2.0 * np.pi * cycles(frequency * self.tick, np.array([-self.centre]))[0])


def _grid_rate(times: Real) -> float | None:
    if len(times) < 2:
        return None
    interval = float(times[-1] - times[0]) / (len(times) - 1)
    stray = times - times[0] - interval * np.arange(len(times))
    return 1.0 / interval if float(np.max(np.abs(stray))) < NEARLY * interval else None
