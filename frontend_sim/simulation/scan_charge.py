"""What the sampling capacitors of a scan hold, and what one takes from channel to channel."""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Sequence

import numpy as np

from frontend_sim.randomness import normal, stream
from frontend_sim.scenario.rhythm import Rhythm
from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.simulation.engine import Simulation
from frontend_sim.simulation.kernels import Index, Real
from frontend_sim.simulation.switched import SwitchedInput, switched_input
from frontend_sim.simulation.switched_memory import SwitchedMemory, Visits
from frontend_sim.simulation.switched_period import Period, memory_matrix, settled_state
from frontend_sim.simulation.switched_steps import NOISE, capacitor_noise
from frontend_sim.simulation.turns import Turns


def memory_of(
    networks: Sequence[SwitchedInput], scan: ScanScenario, rhythm: Rhythm
) -> SwitchedMemory:
    """Return the capacitor behind the inputs of all channels."""
    adc, tempo = scan.sampling_adc, scan.adc.tempo
    values = networks[0].values
    period = rhythm.period / tempo
    return SwitchedMemory.of(
        [each.network for each in networks],
        values.acquisition_time,
        values.starts(adc.low, adc.high),
        2.0 * period,
        (period,),
    )


def period_of(scan: ScanScenario, rhythm: Rhythm) -> Period:
    """Return the looks of one scan."""
    adc, tempo = scan.sampling_adc, scan.adc.tempo
    channel = np.repeat(rhythm.channel_of, rhythm.looks)
    instants = adc.first + np.array(rhythm.places()) / tempo + adc.aperture_delay
    return Period(channel, instants, rhythm.period / tempo)


def charge_matrix(scan: ScanScenario, rhythm: Rhythm) -> Real:
    """Return what each look of a scan has of each channel, in the fixed point, shape (K, N) [1].

    Raises
    ------
    ModelError
        If an input network has no settled state.
    """
    networks = [switched_input(channel) for channel in scan.channels()]
    known = [network for network in networks if network is not None]
    return memory_matrix(memory_of(known, scan, rhythm), period_of(scan, rhythm))


class Charge(ABC):
    """What is held of the pin, on its way through the looks of a scan."""

    def __init__(self, channels: Sequence[Simulation], scan: ScanScenario, turns: Turns) -> None:
        """Take the input networks of the channels, which all have the same values."""
        known = [(each, each.sampler) for each in channels]
        self.inputs = [(each, found) for each, found in known if found is not None]
        self._scan, self._turns = scan, turns
        values = self.inputs[0][1].values
        on = scan.simulation.noise and values.noise
        temperature = scan.environment.temperature
        self._noise = capacitor_noise(values.sampling_capacitance, temperature) if on else 0.0
        self._key = stream(scan.seed, NOISE)

    @abstractmethod
    def advance(self, start: int, instants: Real) -> Real:
        """Return what is held at looks ``start`` and on, shape (K,) [V]; see ``ScanPins``."""

    def noise(self, start: int, count: int) -> Real:
        """Return the thermal noise of the capacitor at some looks, shape (count,) [V]."""
        if self._noise == 0.0:
            return np.zeros(count)
        return self._noise * normal(self._key, start, start + count)


class SharedCharge(Charge):
    """One sampling capacitor takes the charge of each channel to the next."""

    def __init__(self, channels: Sequence[Simulation], scan: ScanScenario, turns: Turns) -> None:
        """Start before the first look, after the scan has gone on for ever, or at rest."""
        super().__init__(channels, scan, turns)
        self._memory = memory_of([found for _, found in self.inputs], scan, turns.rhythm)
        self._signals = [each.input_signals(found, each.look_axis()) for each, found in self.inputs]
        self._states = [signals.start() for signals in self._signals]
        period = period_of(scan, turns.rhythm)
        if scan.simulation.initial == "settled":
            levels = np.array([signals.level() for signals in self._signals])
            self._state = settled_state(self._memory, period, levels)
        else:
            last = np.full(len(channels), period.instants[0] - period.length)
            self._state = self._memory.state(0.0, last)

    def advance(self, start: int, instants: Real) -> Real:
        """Return what is held at some looks, see ``Charge``."""
        count, width = len(instants), self._memory.width + 1
        channel: Index = np.empty(count, np.int64)
        ended, begun, pin = np.empty((count, width)), np.empty((count, width)), np.empty(count)
        scans = start // self._turns.looks
        for i, signals in enumerate(self._signals):
            rows = self._turns.rows(i, count)
            if len(rows) == 0:
                continue
            number, asked = self._turns.count(i, scans), np.ascontiguousarray(instants[rows])
            self._states[i], found = signals.advance(self._states[i], number, asked)
            channel[rows], pin[rows] = i, found[2]
            ended[rows] = self._memory.rows(i, found[0])
            begun[rows] = self._memory.rows(i, found[1])
        visits = Visits(channel, instants, ended, begun, pin)
        self._state, held, _ = self._memory.advance(self._state, visits)
        return held


class SeparateCharge(Charge):
    """A sampling capacitor for each channel, as sample-and-holds have."""

    def __init__(self, channels: Sequence[Simulation], scan: ScanScenario, turns: Turns) -> None:
        """Start before the first look."""
        super().__init__(channels, scan, turns)
        found = [each.held_steps(each.look_axis()) for each in channels]
        self._steps = [steps for steps in found if steps is not None]

    def advance(self, start: int, instants: Real) -> Real:
        """Return what is held at some looks, see ``Charge``."""
        held, scans = np.empty(len(instants)), start // self._turns.looks
        for i, steps in enumerate(self._steps):
            rows = self._turns.rows(i, len(instants))
            if len(rows):
                number, asked = self._turns.count(i, scans), np.ascontiguousarray(instants[rows])
                held[rows] = steps.advance(number, asked)
        return held
