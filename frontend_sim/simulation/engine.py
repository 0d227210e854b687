"""The only loop over time: pushes blocks of instants through chain and converter."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.analog.cut import CutChain
from frontend_sim.converter import clock, quantizer
from frontend_sim.errors import ScenarioError
from frontend_sim.randomness import stream
from frontend_sim.scenario.circuit import circuit_of, stages_of
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation.accuracy import Distance, Trials
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.limited import Limited
from frontend_sim.simulation.linear import Axis
from frontend_sim.simulation.models import Model, Models
from frontend_sim.simulation.noise import NoisePath
from frontend_sim.simulation.plan import Plan
from frontend_sim.simulation.run import GridReport, Run, RunBlock
from frontend_sim.simulation.uniform import WAVEFORM_TILE
from frontend_sim.stimulus.drive import Drive

BLOCK = 8 * WAVEFORM_TILE
"""Instants in one block, a multiple of every tile, so that blocks never show in a result."""

Progress = Callable[[float], None]


@dataclass(frozen=True, eq=False)
class _Axis:
    """A uniform row of instants and the points of the chain that are read there."""

    model: Model
    count: int


class Simulation:
    """A scenario made ready to run.

    Parameters
    ----------
    scenario : what to simulate
    block : instants computed at once; any multiple of ``WAVEFORM_TILE`` gives the same result

    Attributes
    ----------
    chain : the composed continuous model
    count : number of conversions
    duration : [s]
    notes : what was decided on the way; complete after the last block
    grid : distance of a discrete model, or of a grid for limiters, from the exact answer, after
        the last block; else None

    Raises
    ------
    InputError
        If the circuit is unusable, the stimulus cannot be read, or the run would be empty.
    """

    def __init__(self, scenario: Scenario, block: int = BLOCK) -> None:
        """Compose the chain, open the stimulus, count the conversions, pick the grid."""
        if block <= 0 or block % WAVEFORM_TILE:
            raise ScenarioError(f"block must be a multiple of {WAVEFORM_TILE}, given {block}")
        self.scenario = scenario
        self.chain: Chain = circuit_of(scenario)
        self.drives: tuple[Drive, ...] = scenario.stimulus.drives(stream(scenario.seed, "stimulus"))
        self.duration = _duration(scenario)
        self.count = clock.conversion_count(scenario.adc, self.duration)
        if self.count == 0:
            raise ScenarioError(
                f"no conversion falls into the run: the first one is at {scenario.adc.first:g} s, "
                f"the run lasts {self.duration:g} s; lengthen simulation.duration"
            )
        self.notes: tuple[str, ...] = scenario.stimulus.notes()
        self.grid: GridReport | None = None
        self._block = block
        self._pin = [len(self.chain.points) - 1]
        cut = CutChain.of(stages_of(scenario), scenario.environment.temperature)
        initial = scenario.simulation.initial
        self._models = Models.of(self.chain, cut, self.drives, initial, self.duration)
        self._plan = Plan.of(scenario, self._models, self._trials())
        self.notes += self._plan.notes
        self._noise = self._noise_path()

    def blocks(self, progress: Progress | None = None) -> Iterator[RunBlock]:
        """Run, and return conversions and waveform block by block, in order of time.

        ``progress`` is called with the share that is done, from 0 to 1.
        """
        adc, seed = self.scenario.adc, self.scenario.seed
        axis, plan = self._conversion_axis(), self._plan
        model = self._models.model(self._pin, axis, plan.stepping)
        states = model.start()
        reference = None
        if plan.reference is not None:
            reference = self._models.model(self._pin, axis, plan.reference)
        reference_states = reference.start() if reference else None
        distance = Distance()
        waveform = self._waveform_axis()
        waveform_states = waveform.model.start() if waveform else None
        waveform_done = 0
        noise = self._noise
        noise_state = noise.start() if noise else np.empty(0)
        for start in range(0, self.count, self._block):
            stop = min(start + self._block, self.count)
            instants = clock.sampling_instants(adc, start, stop, seed)
            states, (pin,) = model.advance(states, start, instants)
            if reference is not None:
                reference_states, (true,) = reference.advance(reference_states, start, instants)
                distance.add((pin - true) / adc.lsb)
            added = np.zeros(1)
            if noise is not None:
                noise_state, added = noise.advance(noise_state, start, stop)
            yield self._converted(start, instants, pin, added)
            if waveform is not None:
                until = self._waveform_until(waveform.count, stop)
                while waveform_done < until:
                    upto = min(waveform_done + self._block, until)
                    times = np.arange(waveform_done, upto, dtype=np.float64) / self._waveform_rate
                    waveform_states, values = waveform.model.advance(
                        waveform_states, waveform_done, times
                    )
                    yield self._kept(stop, times, values)
                    waveform_done = upto
            if progress is not None:
                progress(stop / self.count)
        if isinstance(model, Limited):
            self.notes += model.notes(states)
        self.grid, note = plan.report(self.scenario, distance)
        self.notes += (note,) if note else ()

    def values(self, points: Sequence[str], instants: Real) -> Real:
        """Return points of the chain at instants of any choice, by the steps of the run itself.

        Parameters
        ----------
        points : names, see ``Scenario.points``
        instants : increasing, from 0 to the end of the run, shape (K,) [s]

        Returns
        -------
        Shape (points, K).
        """
        longest = max(float(instants[-1]), 1.0 / self.scenario.adc.rate) if len(instants) else 1.0
        numbers = [self.chain.points.index(point) for point in points]
        model = self._models.model(numbers, Axis(longest, longest), self._plan.stepping)
        _, found = model.advance(model.start(), 0, instants)
        return found

    def _conversion_axis(self) -> Axis:
        adc = self.scenario.adc
        interval = 1.0 / adc.rate
        return Axis(interval, max(adc.first + adc.aperture_delay, interval) + interval)

    def _trials(self) -> Trials:
        adc, accuracy = self.scenario.adc, self.scenario.simulation.accuracy

        def instants(start: int, stop: int) -> Real:
            return clock.sampling_instants(adc, start, stop, self.scenario.seed)

        scale = (adc.rate, adc.lsb, adc.high - adc.low, accuracy)
        return Trials(*scale, self.count, self._pin, self._conversion_axis(), instants)

    @property
    def _waveform_rate(self) -> float:
        return self.scenario.simulation.waveform_rate or 0.0

    @property
    def _waveform_points(self) -> list[int]:
        wanted = self.scenario.simulation.waveform_points
        names = self.chain.points
        return list(range(len(names))) if wanted is None else [names.index(name) for name in wanted]

    def _waveform_axis(self) -> _Axis | None:
        if self._waveform_rate == 0.0:
            return None
        interval = 1.0 / self._waveform_rate
        axis = Axis(interval, 2.0 * interval, uniform=True)
        model = self._models.model(self._waveform_points, axis, self._plan.stepping)
        return _Axis(model, max(math.ceil(self.duration * self._waveform_rate - 1e-9), 1))

    def _waveform_until(self, count: int, conversions: int) -> int:
        """Return how far the waveform goes after some conversions, at a multiple of tiles."""
        if conversions == self.count:
            return count
        adc = self.scenario.adc
        position = (adc.first + conversions / adc.rate) * self._waveform_rate
        return min(int(position) // WAVEFORM_TILE * WAVEFORM_TILE, count)

    def _noise_path(self) -> NoisePath | None:
        """Return the noise of the circuit at the conversions, if it has any and it is wanted."""
        if not self.scenario.simulation.noise:
            return None
        model = self.chain.noise_model(0.1 / self.duration)
        if model.unbounded:
            self.notes += (
                "nothing limits the bandwidth of these noise sources before the converter, so the "
                f"part that reaches it directly is left out: {', '.join(model.unbounded)}; put a "
                "filter behind them, or give the amplifier a gain_bandwidth",
            )
        if not model.names or len(model.a) == 0:  # without states no noise is left
            return None
        return NoisePath.of(model, 1.0 / self.scenario.adc.rate, self.scenario.seed)

    def _converted(self, start: int, instants: Real, pin: Real, noise: Real) -> RunBlock:
        adc = self.scenario.adc
        voltage = quantizer.converted_voltage(adc, pin + noise, start, self.scenario.seed)
        codes, overrange = quantizer.quantize(adc, voltage)
        read = quantizer.read_back(adc, codes)
        return RunBlock(start, instants, pin, codes, read, overrange, np.empty(0), self._named())

    def _kept(self, start: int, times: Real, values: Real) -> RunBlock:
        none, codes = np.empty(0), np.empty(0, np.int64)
        flags = np.empty(0, np.bool_)
        return RunBlock(start, none, none, codes, none, flags, times, self._named(values))

    def _named(self, values: Real | None = None) -> dict[str, Real]:
        if self._waveform_rate == 0.0:
            return {}
        names = [self.chain.points[point] for point in self._waveform_points]
        rows = values if values is not None else [np.empty(0)] * len(names)
        return dict(zip(names, rows, strict=True))


def _duration(scenario: Scenario) -> float:
    if scenario.simulation.duration is not None:
        return scenario.simulation.duration
    known = scenario.stimulus.known_length()
    if known is None:
        raise ScenarioError("simulation.duration is missing: this stimulus never ends by itself")
    return known


def simulate(scenario: Scenario, progress: Progress | None = None, block: int = BLOCK) -> Run:
    """Run a scenario and return its arrays.

    Parameters
    ----------
    scenario : what to simulate
    progress : called with the share that is done, from 0 to 1
    block : instants computed at once; it bounds memory and never changes a result

    Raises
    ------
    InputError
        If the scenario cannot be run, see ``Simulation``.
    """
    simulation = Simulation(scenario, block)
    blocks = list(simulation.blocks(progress))
    waveform = {
        name: np.concatenate([block.waveform[name] for block in blocks])
        for name in blocks[0].waveform
    }
    return Run(
        scenario,
        np.concatenate([block.time for block in blocks]),
        np.concatenate([block.pin for block in blocks]),
        np.concatenate([block.codes for block in blocks]),
        np.concatenate([block.voltage for block in blocks]),
        np.concatenate([block.overrange for block in blocks]),
        np.concatenate([block.waveform_time for block in blocks]),
        waveform,
        simulation.grid,
        simulation.notes,
    )
