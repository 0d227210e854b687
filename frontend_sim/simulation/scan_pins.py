"""What the converter of a scan finds at its pin: the one place where channels meet."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Protocol

import numpy as np

from frontend_sim.simulation.engine import Simulation
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.steps import PinSteps
from frontend_sim.simulation.turns import Turns


class ScanPins(Protocol):
    """The voltage at the pin of a scan's converter, look by look, whatever channel is connected.

    Here is where one channel may reach another: a shared stage behind the multiplexer, or the
    charge of the sampling capacitor, is another ``ScanPins``.
    """

    def advance(self, start: int, instants: Real) -> Real:
        """Return the pin at some looks, shape (K,) [V].

        Parameters
        ----------
        start : number of the first of these looks, which is the first of a scan
        instants : when the pin is sampled, shape (K,) [s]
        """

    def finish(self) -> None:
        """Take in what is known of the channels after the last look."""


class SeparatePins:
    """Channels that know nothing of each other: each pin is that of the channel's own chain."""

    def __init__(self, channels: Sequence[Simulation], turns: Turns) -> None:
        """Start all channels at t = 0."""
        self._channels, self._turns = channels, turns
        self._steps: list[PinSteps] = [each.pin_steps(each.look_axis()) for each in channels]

    def advance(self, start: int, instants: Real) -> Real:
        """Return the pin at some looks, see ``ScanPins``."""
        pin = np.empty(len(instants))
        scans = start // self._turns.looks
        for i, steps in enumerate(self._steps):
            rows = self._turns.rows(i, len(instants))
            if len(rows):
                number = self._turns.count(i, scans)
                pin[rows] = steps.advance(number, np.ascontiguousarray(instants[rows]))
        return pin

    def finish(self) -> None:
        """Tell the channels how good their grids were."""
        for channel, steps in zip(self._channels, self._steps, strict=True):
            channel.finish(steps)
