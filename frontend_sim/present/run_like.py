"""What tables and plots of a run ask for; a run and a record both have it."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation.run import GridReport

Real = NDArray[np.float64]


class RunLike(Protocol):
    """A finished run, in memory or in a file; names as in ``simulation.run.Run``."""

    @property
    def scenario(self) -> Scenario:
        """The scenario of the run."""

    @property
    def time(self) -> Real:
        """Sampling instants, shape (K,) [s]."""

    @property
    def pin(self) -> Real:
        """Exact analog values at these instants, shape (K,) [V]."""

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
    def waveform_time(self) -> Real:
        """Time axis of the waveforms, shape (W,) [s]."""

    @property
    def waveform(self) -> Mapping[str, Real]:
        """Point of the chain -> its waveform, shape (W,) [V]."""

    @property
    def grid(self) -> GridReport | None:
        """How good a discrete model was; None in the exact mode."""

    @property
    def notes(self) -> tuple[str, ...]:
        """What was decided during the run."""
