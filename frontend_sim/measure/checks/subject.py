"""What checks are made on: a scenario, and, once there is one, its run."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.analog.chain import Chain
from frontend_sim.converter import AnyAdc
from frontend_sim.errors import MeasureError
from frontend_sim.measure.response.gain import LargestGain, largest_gain
from frontend_sim.measure.response.step_response import StepResponse
from frontend_sim.randomness import stream
from frontend_sim.scenario.circuit import circuit_of, stages_of
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import Simulation
from frontend_sim.simulation.finished import Finished
from frontend_sim.stimulus.drive import Drive

Real = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Subject:
    """A scenario and its run, with what several checks ask for computed once.

    Parameters
    ----------
    run : None before the run
    prepared : the simulation, where there is one already
    kept : answers that several checks share
    """

    scenario: Scenario
    run: Finished | None = None
    prepared: Simulation | None = None
    kept: dict[Any, Any] = field(default_factory=dict)

    @cached_property
    def simulation(self) -> Simulation:
        """The scenario made ready to run, for the values of points at any instant."""
        return self.prepared or Simulation(self.scenario)

    @property
    def adc(self) -> AnyAdc:
        """The converter."""
        return self.scenario.adc

    @cached_property
    def chain(self) -> Chain:
        """The composed model of the chain."""
        return self.prepared.chain if self.prepared else circuit_of(self.scenario)

    @cached_property
    def drives(self) -> tuple[Drive, ...]:
        """The drives of the stimulus."""
        if self.prepared:
            return self.prepared.drives
        return self.scenario.stimulus.drives(stream(self.scenario.seed, "stimulus"))

    @property
    def duration(self) -> float:
        """Length of the run [s]."""
        given = self.scenario.simulation.duration
        known = self.scenario.stimulus.known_length() if given is None else given
        return math.inf if known is None else known

    @property
    def whole(self) -> float:
        """Width of the converter's range [V]."""
        return self.adc.high - self.adc.low

    @cached_property
    def limited(self) -> bool:
        """Whether something in the chain is not linear."""
        return any(stage.limiter() is not None for stage in stages_of(self.scenario))

    @cached_property
    def response(self) -> StepResponse:
        """The step response of the chain, of small signals where something limits."""
        return StepResponse.of(self.chain)

    @cached_property
    def largest(self) -> LargestGain:
        """The largest gain of the chain."""
        return largest_gain(self.response)

    @property
    def finished(self) -> Finished:
        """The run."""
        if self.run is None:
            raise MeasureError("this check needs a run; simulate the scenario first")
        return self.run

    @cached_property
    def time(self) -> Real:
        """Sampling instants, shape (K,) [s]."""
        return self.finished.time

    @cached_property
    def pin(self) -> Real:
        """Exact analog values at these instants, shape (K,) [V]."""
        return self.finished.pin

    @cached_property
    def held(self) -> Real:
        """Voltages of the sampling capacitor, shape (K,) [V]; empty without an input network."""
        return self.finished.held

    @cached_property
    def voltage(self) -> Real:
        """The codes read back, shape (K,) [V]."""
        return self.finished.voltage

    @cached_property
    def codes(self) -> NDArray[np.int64]:
        """Codes, shape (K,) [counts]."""
        return self.finished.codes

    @cached_property
    def overrange(self) -> NDArray[np.bool_]:
        """Where the code was clipped, shape (K,)."""
        return self.finished.overrange

    def first_after(self, instant: float) -> int:
        """Return the number of the first conversion from an instant on [s].

        Raises
        ------
        MeasureError
            If there is none.
        """
        first = int(np.searchsorted(self.time, instant))
        if first == len(self.time):
            raise MeasureError(
                f"no conversion follows the instant {instant:g} s; the last one is at "
                f"{self.time[-1]:g} s"
            )
        return first

    def point(self, name: str | None) -> int:
        """Return the number of a point of the chain; None is the converter's pin."""
        points = self.chain.points
        return len(points) - 1 if name is None else points.index(name)

    def at_conversions(self, name: str | None) -> Real:
        """Return a point of the chain at all sampling instants, shape (K,) [V]."""
        if self.point(name) == len(self.chain.points) - 1:
            return self.pin
        found: Real = self.simulation.values([str(name)], self.time)[0]
        return found

    def at_instants(self, name: str | None, instants: list[float]) -> Real:
        """Return a point of the chain at increasing instants [s], shape (K,) [V]."""
        names = self.chain.points[self.point(name)]
        return np.asarray(self.simulation.values([names], np.asarray(instants))[0])
