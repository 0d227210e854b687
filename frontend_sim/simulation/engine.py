"""The only loop over time: pushes blocks of instants through chain and converter."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.analog.cut import CutChain
from frontend_sim.converter import clock
from frontend_sim.converter.digitizer import Converted
from frontend_sim.errors import ScenarioError
from frontend_sim.randomness import stream
from frontend_sim.scenario.check import scenario_notes
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
        temperature = scenario.environment.temperature
        self._digitizer = scenario.adc.digitizer(scenario.seed, temperature)
        self.grid: GridReport | None = None
        self._block = block
        self._pin = [len(self.chain.points) - 1]
        cut = CutChain.of(stages_of(scenario), scenario.environment.temperature)
        initial = scenario.simulation.initial
        self._models = Models.of(self.chain, cut, self.drives, initial, self.duration)
        self._plan = Plan.of(scenario, self._models, self._trials())
        if all(stage.limiter() is None for stage in stages_of(scenario)):
            self.notes += scenario_notes(scenario)
        self.notes += self._plan.notes
        self._noise = self._noise_path()

    def blocks(self, progress: Progress | None = None) -> Iterator[RunBlock]:
        """Run, and return conversions and waveform block by block, in order of time.

        ``progress`` is called with the share that is done, from 0 to 1.
        """
        adc, digitizer = self.scenario.adc, self._digitizer
        axis, plan = self._look_axis(), self._plan
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
        conversion, looks, done = digitizer.start(), clock.look_count(adc, self.count), 0
        for start in range(0, looks, self._block):
            stop = min(start + self._block, looks)
            instants = digitizer.instants(start, stop)
            states, (pin,) = model.advance(states, start, instants)
            if reference is not None:
                reference_states, (true,) = reference.advance(reference_states, start, instants)
                distance.add((pin - true) / adc.lsb)
            added = None
            if noise is not None:
                noise_state, added = noise.advance(noise_state, start, stop)
            conversion, converted = digitizer.convert(conversion, start, instants, pin, added)
            yield self._block_of(converted)
            done = converted.start + len(converted.codes)
            if waveform is not None:
                until = self._waveform_until(waveform.count, float(instants[-1]), stop == looks)
                while waveform_done < until:
                    upto = min(waveform_done + self._block, until)
                    times = np.arange(waveform_done, upto, dtype=np.float64) / self._waveform_rate
                    waveform_states, values = waveform.model.advance(
                        waveform_states, waveform_done, times
                    )
                    yield self._kept(done, times, values)
                    waveform_done = upto
            if progress is not None:
                progress(stop / looks)
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

    def _look_axis(self) -> Axis:
        """Return the axis of the converter's looks; whether they are number · interval exactly."""
        adc, digitizer = self.scenario.adc, self._digitizer
        even = adc.pattern.widest == adc.pattern.closest and adc.wander is None
        at_once = adc.first == adc.aperture_delay == adc.aperture_jitter == 0.0
        return Axis(digitizer.interval, digitizer.longest, uniform=even and at_once)

    def _trials(self) -> Trials:
        adc, digitizer = self.scenario.adc, self._digitizer
        scale = (
            adc.pattern.look_rate,
            adc.lsb,
            adc.high - adc.low,
            self.scenario.simulation.accuracy,
        )
        looks = clock.look_count(adc, self.count)
        return Trials(*scale, looks, self._pin, self._look_axis(), digitizer.instants)

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

    def _waveform_until(self, count: int, time: float, whole: bool) -> int:
        """Return how far the waveform goes until a time, at a multiple of tiles."""
        if whole:
            return count
        return min(int(time * self._waveform_rate) // WAVEFORM_TILE * WAVEFORM_TILE, count)

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
        return NoisePath.of(model, self.scenario.adc.pattern, self.scenario.seed)

    def _block_of(self, part: Converted) -> RunBlock:
        codes = (part.codes, part.voltage, part.overrange)
        return RunBlock(part.start, part.time, part.pin, *codes, np.empty(0), self._named())

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
