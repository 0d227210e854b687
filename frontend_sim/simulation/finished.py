"""What measures, tables and plots ask of a finished run; a run and a record both have it."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation.run import GridReport

Real = NDArray[np.float64]


class Finished(Protocol):
    """The conversions of a finished run: of a ``Run``, a ``Record``, or what was kept of one."""

    @property
    def scenario(self) -> Scenario:
        """What was simulated."""

    @property
    def time(self) -> Real:
        """Sampling instants, shape (K,) [s]."""

    @property
    def pin(self) -> Real:
        """Exact analog values at these instants, shape (K,) [V]."""

    @property
    def held(self) -> Real:
        """Voltages of the sampling capacitor, shape (K,) [V]; empty without an input network."""

    @property
    def codes(self) -> NDArray[np.int64]:
        """Codes, shape (K,) [counts]."""

    @property
    def voltage(self) -> Real:
        """The codes read back, shape (K,) [V]."""

    @property
    def overrange(self) -> NDArray[np.bool_]:
        """Where the code was clipped, shape (K,)."""

    @property
    def grid(self) -> GridReport | None:
        """How good a discrete model was; None in the exact mode."""


class RunLike(Finished, Protocol):
    """A finished run with its waveforms and notes, in memory or in a file."""

    @property
    def stimulus(self) -> Real:
        """What arrived at the sensor at the sampling instants, shape (K,) [SI unit of it].

        Empty where it is a voltage.
        """

    @property
    def waveform_time(self) -> Real:
        """Time axis of the waveforms, shape (W,) [s]."""

    @property
    def waveform(self) -> Mapping[str, Real]:
        """Point of the chain -> its waveform, shape (W,) [V]."""

    @property
    def notes(self) -> tuple[str, ...]:
        """What was decided during the run."""
