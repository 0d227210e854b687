"""A sine whose frequency sweeps."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property
from typing import Literal

import numpy as np
from pydantic import Field

from frontend_sim.quantities import (
    Angle,
    Frequency,
    PositiveTime,
    SignalDifference,
    SignalLevel,
    Time,
)
from frontend_sim.stimulus.base import Key, Stimulus
from frontend_sim.stimulus.drive import Drive, PiecewiseDrive, Real
from frontend_sim.stimulus.swept_phase import SweptPhase

DEGREE = 12
STRIDE = 0.5
"""Pieces of at most this phase [rad]: at a steady frequency the polynomial leaves out less than
STRIDE^13 / 13! = 2e-14 of the amplitude."""
BEND = 0.01
"""Pieces whose phase departs from a straight line by at most this [rad]. Where the frequency
changes much within half a radian, as at the slow end of a wide sweep, the powers of the bend count
too: below 1e-12 of the amplitude."""


@dataclass(frozen=True, eq=False)
class Sweep(PiecewiseDrive):
    """A sweep as pieces of its own Taylor polynomial.

    A polynomial is the output of a chain of integrators, so it is a linear generator too. The
    state i is the i-th derivative over w^i, with w the highest angular frequency of the sweep.
    """

    amplitude: float
    start: float
    stop: float
    at: float
    length: float
    phase: float
    offset: float
    logarithmic: bool

    @property
    def _fastest(self) -> float:
        return 2.0 * np.pi * max(self.start, self.stop)

    @property
    def generator(self) -> Real:
        """A chain of integrators, and a held offset."""
        g = np.zeros((DEGREE + 2, DEGREE + 2))
        np.fill_diagonal(g[:DEGREE, 1 : DEGREE + 1], self._fastest)
        return g

    @property
    def readout(self) -> Real:
        """The value of the polynomial, and the offset."""
        r = np.zeros(DEGREE + 2)
        r[0] = r[-1] = 1.0
        return r

    @property
    def initial(self) -> float:
        """Return the offset."""
        return self.offset

    @cached_property
    def _swept(self) -> SweptPhase:
        logarithmic = self.logarithmic and self.start != self.stop
        return SweptPhase(self.start, self.stop, self.length, logarithmic)

    def events(self, start: float, stop: float) -> Real:
        """Return both ends of the sweep and the joints of the pieces in (start, stop].

        The joints are those of equal phase and those of equal time, each piece being short enough
        in both.
        """
        first, last = (min(max(t - self.at, 0.0), self.length) for t in (start, stop))
        joints = [self._of_equal_phase(first, last), self._of_equal_time(first, last)]
        ends = [self.at, self.at + self.length]
        times = np.unique(np.concatenate([ends, *(self.at + since for since in joints)]))
        return times[(times > start) & (times <= stop) & (times <= ends[1])]

    def _of_equal_phase(self, first: float, last: float) -> Real:
        """Return the joints after equal parts of all turns, from about first to last [s]."""
        total, before, after = self._swept.turns(np.array([self.length, first, last]))
        pieces = max(math.ceil(total * 2.0 * math.pi / STRIDE), 1)
        lowest = max(int(before / total * pieces) - 2, 0)
        highest = min(int(after / total * pieces) + 3, pieces)
        return self._swept.time_of(np.arange(lowest, highest) * (total / pieces))

    def _of_equal_time(self, first: float, last: float) -> Real:
        """Return the joints after equal times, from about first to last [s].

        Over a piece t the phase bends by pi |slope| t² in a linear sweep; in a logarithmic one of
        growth g by g t / 2 of the phase of the piece.
        """
        if self._swept.logarithmic:
            longest = 2.0 * BEND / STRIDE / abs(self._swept.growth)
        elif self.start != self.stop:
            longest = math.sqrt(BEND * self.length / (math.pi * abs(self.stop - self.start)))
        else:
            return np.empty(0)
        pieces = max(math.ceil(self.length / longest), 1)
        lowest = max(int(first / self.length * pieces) - 1, 0)
        highest = min(int(last / self.length * pieces) + 2, pieces)
        return np.arange(lowest, highest, dtype=np.float64) * (self.length / pieces)

    def states(self, times: Real) -> Real:
        """Return the scaled derivatives of the sweep.

        With f = exp(j p), f' = j p' f and by Leibniz' rule
        f^(k+1) = j sum_i C(k, i) p^(i+1) f^(k-i).
        """
        within = np.clip(times, self.at, self.at + self.length)
        f = [np.exp(1j * (2.0 * np.pi * self._swept.cycles(within, self.at) + self.phase))]
        rates = self._phase_derivatives(within - self.at)
        for k in range(DEGREE):
            terms = [math.comb(k, i) * rates[i] * f[k - i] for i in range(min(k + 1, len(rates)))]
            f.append(1j * np.sum(terms, axis=0))
        inside = (times >= self.at) & (times < self.at + self.length)
        columns = [np.where(inside, self.amplitude * value.imag, 0.0) for value in f]
        return np.column_stack([*columns, np.full(len(times), self.offset)])

    def _phase_derivatives(self, since: Real) -> list[Real]:
        """Return p', p'', ... over the powers of the fastest angular frequency."""
        w, growth = self._fastest, self._swept.growth
        if self._swept.logarithmic:
            first = 2.0 * np.pi * self.start * np.exp(growth * since) / w
            return [first * (growth / w) ** i for i in range(DEGREE)]
        first = 2.0 * np.pi * (self.start + growth * since) / w
        return [first, np.full(len(since), 2.0 * np.pi * growth / w**2)]


class Chirp(Stimulus):
    """A sine that sweeps from one frequency to another; outside the sweep the value is the offset.

    linear: f(t) = start + (stop - start) t / length;
    logarithmic: f(t) = start · (stop / start)^(t / length).
    """

    kind: Literal["chirp"] = "chirp"
    amplitude: SignalDifference = Field(description="peak value of the sine")
    start_frequency: Frequency = Field(description="frequency at the beginning of the sweep")
    stop_frequency: Frequency = Field(description="frequency at the end of the sweep")
    length: PositiveTime = Field(description="length of the sweep")
    at: Time = Field(default=0.0, description="instant at which the sweep begins")
    phase: Angle = Field(default=0.0, description="phase at the beginning of the sweep")
    offset: SignalLevel = Field(default=0.0, description="value that the sine swings around")
    sweep: Literal["linear", "logarithmic"] = Field(
        default="linear", description="how the frequency grows with time"
    )

    def drives(self, key: Key) -> tuple[Drive, ...]:
        """Return one sweep."""
        return (
            Sweep(
                self.amplitude,
                self.start_frequency,
                self.stop_frequency,
                self.at,
                self.length,
                self.phase,
                self.offset,
                self.sweep == "logarithmic",
            ),
        )

    def highest_frequency(self) -> float:
        """Return the higher end of the sweep [Hz]."""
        return max(self.start_frequency, self.stop_frequency)
