"""A chain whose last stage is loaded, conversion by conversion, by a sampling capacitor."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from frontend_sim.analog.chain import Chain, compose
from frontend_sim.analog.cut import CutChain
from frontend_sim.analog.port import Port
from frontend_sim.converter.adc import Adc
from frontend_sim.converter.input_network import InputNetwork
from frontend_sim.errors import ScenarioError
from frontend_sim.scenario.input_port import (
    discretization_fault,
    ideal_source_notes,
    input_network_of,
    input_port,
)
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.linear import Axis, Initial
from frontend_sim.simulation.models import Model, Models, Stepping
from frontend_sim.simulation.switched_memory import MemoryState, SwitchedMemory
from frontend_sim.simulation.switched_network import SwitchedNetwork
from frontend_sim.simulation.switched_period import Period, settled_state


def network_of(port: Port, values: InputNetwork) -> SwitchedNetwork:
    """Return the input network behind a port."""
    return SwitchedNetwork.of(port, values.switch_resistance, values.sampling_capacitance)


def switched_input(scenario: Scenario) -> SwitchedInput | None:
    """Return the input network of a scenario's converter at its temperature, if it has one.

    Raises
    ------
    ModelError
        See ``input_port``; or a drift takes a part to a value that it cannot have.
    ScenarioError
        If the run goes by a discrete model, whose grid knows no switch.
    """
    found = input_network_of(scenario)
    if found is None:
        return None
    if (fault := discretization_fault(scenario)) is not None:
        raise ScenarioError(fault)
    adc, values = found
    network = network_of(input_port(scenario, values), values)
    return SwitchedInput(adc, values, network, ideal_source_notes(scenario, values))


@dataclass(frozen=True, eq=False)
class InputSignals:
    """What the signal alone does at one input: the network with its switch closed for ever.

    It is linear like any chain, so that every drive, recording and limiter advances it as usual, at
    the instants and one acquisition before each of them. The alternation of the switch is a
    recursion over the instants on top of it, ``SwitchedMemory``.

    Parameters
    ----------
    model : gives the taps of ``SwitchedNetwork.section``, behind the pin
    order : number of states of the closed network
    """

    model: Model
    order: int

    def level(self) -> float:
        """Return the pin's voltage before t = 0 [V]."""
        return float(self.model.before()[0])

    def start(self) -> Any:
        """Return the states at t = 0."""
        return self.model.start()

    def advance(
        self, states: Any, number: int, instants: Real
    ) -> tuple[Any, tuple[Real, Real, Real]]:
        """Return the states at the last instant; z there, z at the closing and the pin at it.

        Parameters
        ----------
        number : number of the first instant;  instants : of sampling, shape (K,) [s]

        Returns
        -------
        z has shape (order, K), the pin (K,) [V].
        """
        states, values = self.model.advance(states, number, instants)
        m = self.order
        return states, (values[1 : 1 + m], values[1 + m : 1 + 2 * m], values[-1])


@dataclass(frozen=True, eq=False)
class SwitchedInput:
    """The input network of a converter behind a chain, ready to make models.

    Parameters
    ----------
    values : at the temperature of the circuit
    network : with the output of the last stage in it
    notes : what had to be decided
    """

    adc: Adc
    values: InputNetwork
    network: SwitchedNetwork
    notes: tuple[str, ...] = ()

    def chain(self, chain: Chain) -> Chain:
        """Return a chain with the network behind it, its switch closed for ever."""
        return compose([*chain.sections, self._section(False)])

    def signals(self, models: Models, axis: Axis, stepping: Stepping) -> InputSignals:
        """Return what the signal does at the network.

        Parameters
        ----------
        models : of the chain without the network
        axis : of the instants of sampling
        """
        pin = len(models.chain.points) - 1
        points = [pin, *range(pin + 2, pin + 2 + self.network.tap_count)]
        longer = replace(axis, longest=axis.longest + self.values.acquisition_time)
        return InputSignals(
            self.extended(models).model(points, longer, stepping), self.network.order
        )

    def memory(self, longest: float) -> SwitchedMemory:
        """Return the recursion over visits that are at most ``longest`` apart [s]."""
        starts = self.values.starts(self.adc.low, self.adc.high)
        pattern, taken = self.adc.pattern, self.values.acquisition_time
        usual = tuple(dict.fromkeys([pattern.closest, pattern.widest]))
        return SwitchedMemory.of([self.network], taken, starts, longest, usual)

    def _section(self, taps: bool) -> Any:
        section = self.network.section(self.values.acquisition_time)
        return section if taps else replace(section, taps=())

    def extended(self, models: Models) -> Models:
        """Return models of the chain with the network behind it, its switch closed for ever.

        The voltage of the capacitor is the first point behind the pin, and then come the taps.
        """
        section = self._section(True)
        chain = compose([*models.chain.sections, section])
        cut: CutChain | None = None
        if models.cut is not None:
            sections = [*models.cut.chain.sections, section]
            added = range(len(sections), len(sections) + 1 + len(section.taps))
            points = (*models.cut.points, *added)
            cut = replace(models.cut, chain=compose(sections), points=points)
        return replace(models, chain=chain, cut=cut)

    def first(self, memory: SwitchedMemory, initial: Initial, level: float) -> MemoryState:
        """Return the state before the first look, after looks in the same rhythm for ever.

        Parameters
        ----------
        initial : "settled": they saw ``level`` [V]; "rest": nothing is left of them, all is zero
        """
        period = self.period()
        if initial == "settled":
            return settled_state(memory, period, np.array([level]))
        return memory.state(0.0, period.instants[-1:] - period.length)

    def period(self) -> Period:
        """Return the looks of one result, at their nominal instants."""
        pattern = self.adc.pattern
        instants = pattern.between(0, pattern.looks) + self.adc.aperture_delay
        return Period(np.zeros(pattern.looks, np.int64), instants, 1.0 / pattern.rate)
