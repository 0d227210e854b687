"""The phase of a sweep far from its start, without loss of digits."""

from __future__ import annotations

from dataclasses import dataclass
from decimal import Decimal, localcontext
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]

DIGITS = 50
"""Of the phase of an anchor: enough for 1e15 cycles of a sweep that hardly sweeps."""

APART = 100.0
"""Cycles from anchor to anchor: so few are counted to better than 1e-13 of one."""


@dataclass(frozen=True, eq=False)
class SweptPhase:
    """Cycles since the start of a sweep, linear or logarithmic in time.

    linear: N(t) = start t + (stop - start) t² / (2 length);
    logarithmic: N(t) = start (exp(g t) - 1) / g, with g = ln(stop / start) / length.

    Parameters
    ----------
    start, stop : frequencies at the ends [Hz]
    length : of the sweep [s]
    logarithmic : False where both frequencies are one
    """

    start: float
    stop: float
    length: float
    logarithmic: bool

    @cached_property
    def growth(self) -> float:
        """Growth of the logarithm of the frequency, or of the frequency itself [1/s], [Hz/s]."""
        return float(self._growth)

    @cached_property
    def _growth(self) -> Decimal:
        with localcontext(prec=DIGITS):
            start, stop, length = map(Decimal, (self.start, self.stop, self.length))
            return ((stop / start).ln() if self.logarithmic else stop - start) / length

    def turns(self, since: Real) -> Real:
        """Return the cycles made in a time since the start, rounded as any product is."""
        return self._counted(since, np.asarray(self.start))

    def time_of(self, turns: Real) -> Real:
        """Invert ``turns``."""
        if self.logarithmic:
            return np.asarray(np.log1p(turns * self.growth / self.start) / self.growth)
        root = np.sqrt(np.maximum(self.start**2 + 2.0 * self.growth * turns, 0.0))
        return np.asarray(2.0 * turns / (self.start + root))

    def cycles(self, times: Real, at: float) -> Real:
        """Return the cycles modulo 1, to about 1e-13 of one.

        They are counted from anchors at fixed places of the sweep, about ``APART`` cycles from one
        another, where the phase is computed with ``DIGITS`` digits.

        Parameters
        ----------
        times : within the sweep, shape (K,) [s]
        at : when it starts [s]
        """
        number = np.floor(self.turns(times - at) / APART)
        known, which = np.unique(number, return_inverse=True)
        anchors = at + self.time_of(known * APART)
        exact = np.array([self._exact(anchor, at) for anchor in anchors.tolist()]).reshape(-1, 2)
        phase, frequency = exact[which].T
        turns = phase + self._counted(times - anchors[which], frequency)
        return np.asarray(turns - np.floor(turns))

    def _counted(self, since: Real, frequency: Real) -> Real:
        """Return the cycles made in a time since an instant at which the frequency is known."""
        if self.logarithmic:
            return np.asarray(frequency * np.expm1(self.growth * since) / self.growth)
        return np.asarray(since * (frequency + 0.5 * self.growth * since))

    def _exact(self, time: float, at: float) -> tuple[float, float]:
        """Return cycles modulo 1 and frequency [Hz] at an instant [s]."""
        with localcontext(prec=DIGITS):
            since, start = Decimal(time) - Decimal(at), Decimal(self.start)
            if self.logarithmic:
                frequency = start * (self._growth * since).exp()
                turns = (frequency - start) / self._growth
            else:
                frequency = start + self._growth * since
                turns = (start + frequency) / 2 * since
            return float(turns % 1), float(frequency)
