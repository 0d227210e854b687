"""How sure the level of a tone is, from what the record holds beside it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real
from frontend_sim.measure.instants import Instants

NEIGHBOURS = 4
"""Frequencies on either side of a tone at which the rest of the record is looked at."""


@dataclass(frozen=True, eq=False)
class Beside:
    """A record less its tones.

    Parameters
    ----------
    rest : shape (N,) [V]
    weights : of the fit, shape (N,)
    places : where the tones show up [Hz]
    instants : of the samples
    rate : of the samples, None where they have none [Hz]
    width : bins from a tone on that the fit has left alone
    """

    rest: Real
    weights: Real
    places: Sequence[float]
    instants: Instants
    rate: float | None
    width: int

    def deviation(self, place: float) -> float:
        """Return the standard deviation of the amplitude of a tone, rms |a| / sqrt(2) [V],

            a(f) = 2 sum w r exp(-2 pi i f t) / sum w

        over frequencies f beside it. For white noise and equal weights that is noise sqrt(2 / N),
        the bound of Cramér and Rao.

        Parameters
        ----------
        place : where the tone shows up [Hz]

        Raises
        ------
        MeasureError
            If the record is so short that there is no free frequency beside the tone.
        """
        squares = []
        for offset in range(self.width, self.width + NEIGHBOURS):
            for sign in (-1.0, 1.0):
                there = place + sign * offset / self.instants.span
                if self._free(there):
                    turn = np.exp(-1j * self.instants.phase(there))
                    level = 2.0 * np.sum(self.weights * self.rest * turn) / np.sum(self.weights)
                    squares.append(float(abs(level)) ** 2)
        if not squares:
            raise MeasureError(
                f"a record of {self.instants.span:.3g} s leaves no room beside the tone at "
                f"{place:g} Hz to tell its uncertainty; record longer"
            )
        return float(np.sqrt(0.5 * np.mean(squares)))

    def _free(self, frequency: float) -> bool:
        """Return whether a frequency is away from all tones, from zero and half the rate."""
        near = min(abs(frequency - place) for place in (0.0, *self.places))
        below = self.rate is None or frequency < 0.5 * self.rate
        # Half a bin of slack, since neighbours of one tone may lie between bins of another.
        return frequency > 0.0 and below and near * self.instants.span > self.width - 0.5
