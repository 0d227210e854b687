"""The only loop over time: pushes blocks of instants through chain and converter."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.analog.cut import CutChain, is_cut
from frontend_sim.converter import clock
from frontend_sim.errors import ScenarioError
from frontend_sim.randomness import stream
from frontend_sim.scenario.amplifier_notes import amplifier_notes
from frontend_sim.scenario.check import scenario_notes
from frontend_sim.scenario.circuit import circuit_of, stages_of
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.rules import conversions_fault
from frontend_sim.scenario.signal import PIN
from frontend_sim.simulation.accuracy import Trials
from frontend_sim.simulation.arriving import Arriving
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.limited import Limited
from frontend_sim.simulation.linear import Axis
from frontend_sim.simulation.models import Model, Models
from frontend_sim.simulation.noise import NoisePath
from frontend_sim.simulation.plan import Plan
from frontend_sim.simulation.ratiometric import SharedReference, excited
from frontend_sim.simulation.run import GridReport, RunBlock
from frontend_sim.simulation.steps import PinSteps, StimulusSteps, WaveformSteps, block_of
from frontend_sim.simulation.switched import InputSignals, SwitchedInput, switched_input
from frontend_sim.simulation.switched_steps import HeldSteps, capacitor_noise
from frontend_sim.simulation.uniform import WAVEFORM_TILE
from frontend_sim.stimulus.drive import Drive

BLOCK = 8 * WAVEFORM_TILE
"""Instants in one block, a multiple of every tile, so that blocks never show in a result."""

NOISE_AT_A_LIMIT = (
    "the noise in the codes is that of the linear circuit, also while an output was at a limit, "
    "where the real circuit passes less of it, or other noise"
)

Progress = Callable[[float], None]


class Simulation:
    """A scenario made ready to run.

    Parameters
    ----------
    scenario : what to simulate
    block : instants computed at once; any multiple of ``WAVEFORM_TILE`` gives the same result
    progress : called with 0 now and then while a grid is searched for

    Attributes
    ----------
    chain : the composed continuous model
    sampler : the converter's input network behind it; None where it has none
    noise_path : noise of the circuit at the conversions; None where there is none
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

    def __init__(
        self, scenario: Scenario, block: int = BLOCK, progress: Progress | None = None
    ) -> None:
        """Compose the chain, open the stimulus, count the conversions, pick the grid."""
        if block <= 0 or block % WAVEFORM_TILE:
            raise ScenarioError(f"block must be a multiple of {WAVEFORM_TILE}, given {block}")
        self.scenario = scenario
        self.chain: Chain = circuit_of(scenario)
        self.drives: tuple[Drive, ...] = scenario.stimulus.drives(stream(scenario.seed, "stimulus"))
        self.duration = _duration(scenario)
        self.count = scenario.adc.code_count(self.duration)
        fault = conversions_fault(scenario.adc, self.duration)
        if fault is not None:
            raise ScenarioError(fault)
        self.notes: tuple[str, ...] = scenario.stimulus.notes()
        temperature = scenario.environment.temperature
        self._digitizer = scenario.adc.digitizer(scenario.seed, temperature)
        self.grid: GridReport | None = None
        self._block = block
        self._pin = [len(self.chain.points) - 1]
        stages = stages_of(scenario)
        cut = CutChain.of(stages, temperature) if is_cut(stages, temperature) else None
        initial = scenario.simulation.initial
        drives = excited(scenario, self.drives)
        self._models = Models(self.chain, cut, drives, initial, self.duration)
        self._shared = SharedReference.of(scenario)
        self.sampler: SwitchedInput | None = switched_input(scenario)
        self._plan = Plan.of(scenario, *self._trials(progress))
        if cut is None:
            self.notes += scenario_notes(scenario)
        self.notes += amplifier_notes(scenario, stages)
        self.notes += self._plan.notes
        self.notes += self.sampler.notes if self.sampler is not None else ()
        self.noise_path = self._noise_path()
        self._known: Model | None = None

    def blocks(self, progress: Progress | None = None) -> Iterator[RunBlock]:
        """Run, and return conversions and waveform block by block, in order of time.

        ``progress`` is called with the share that is done, from 0 to 1.
        """
        adc, digitizer, axis = self.scenario.adc, self._digitizer, self.look_axis()
        steps, waveform = self.pin_steps(axis), self.waveform_steps()
        noise, arriving = self.noise_path, self.stimulus_steps(axis)
        sampler, held = self.held_steps(axis), np.empty(0)
        noise_state = noise.start() if noise else np.empty(0)
        conversion, looks, done = digitizer.start(), clock.look_count(adc, self.count), 0
        for start in range(0, looks, self._block):
            stop = min(start + self._block, looks)
            instants = digitizer.instants(start, stop)
            pin = steps.advance(start, instants)
            added = None
            if noise is not None:
                noise_state, added = noise.advance(noise_state, start, stop)
            if sampler is not None:
                held = sampler.advance(start, instants)
                added = sampler.added(start, held, pin, added)
            if self._shared is not None:
                added = self._shared.added(instants, pin, added)
            conversion, converted = digitizer.convert(conversion, start, instants, pin, added)
            block = block_of(converted, arriving, waveform)
            if sampler is not None:
                block = replace(block, held=sampler.of_codes(start, held, converted))
            yield block
            done = converted.start + len(converted.codes)
            if waveform is not None:
                yield from waveform.until(float(instants[-1]), done, stop == looks)
            if progress is not None:
                progress(stop / looks)
        self.finish(steps)

    def pin_steps(self, axis: Axis) -> PinSteps:
        """Return the converter's pin, to be advanced through instants on an axis."""
        model = self._known or self.pin_model(axis)
        reference = None
        if self._plan.reference is not None:
            reference = self._models.model(self._pin, axis, self._plan.reference)
        return PinSteps(model, reference, self.scenario.adc.lsb)

    def pin_model(self, axis: Axis) -> Model:
        """Return the converter's pin as a function of time, for instants on an axis."""
        return self._models.model(self._pin, axis, self._plan.stepping)

    def know_pin(self, known: Model) -> None:
        """Take the pin at the converter's looks from somewhere else, see ``together``."""
        self._known = known

    def look_instants(self) -> Real:
        """Return the instants of all looks of the converter, shape (K,) [s]."""
        return self._digitizer.instants(0, clock.look_count(self.scenario.adc, self.count))

    def held_steps(self, axis: Axis) -> HeldSteps | None:
        """Return what the sampling capacitor holds, to be advanced beside the pin."""
        if self.sampler is None:
            return None
        settings, values = self.scenario.simulation, self.sampler.values
        noise = 0.0
        if settings.noise and values.noise:
            temperature = self.scenario.environment.temperature
            noise = capacitor_noise(values.sampling_capacitance, temperature)
        signals = self.input_signals(self.sampler, axis)
        return HeldSteps(self.sampler, signals, settings.initial, noise, self.scenario.seed)

    def input_signals(self, sampler: SwitchedInput, axis: Axis) -> InputSignals:
        """Return what the signal alone does at an input network, to be advanced on an axis."""
        return sampler.signals(self._models, axis, self._plan.stepping)

    def stimulus_steps(self, axis: Axis) -> StimulusSteps | None:
        """Return what arrives at a sensor, to be advanced beside the conversions."""
        if self.scenario.stimulus_unit == PIN:
            return None
        return StimulusSteps(Arriving.of(self.drives, self.scenario.adc, axis))

    def waveform_steps(self) -> WaveformSteps | None:
        """Return the waveforms that are kept, to be advanced beside the conversions."""
        rate = self.scenario.simulation.waveform_rate
        if rate is None:
            return None
        interval = 1.0 / rate
        axis = Axis(interval, 2.0 * interval, uniform=True)
        model = self._models.model(self._waveform_points, axis, self._plan.stepping)
        names = tuple(self.chain.points[point] for point in self._waveform_points)
        count = max(math.ceil(self.duration * rate - 1e-9), 1)
        return WaveformSteps(model, rate, count, names, self._block)

    def finish(self, steps: PinSteps) -> None:
        """Take in what is known after the last step: notes, and how good the grid was."""
        if isinstance(steps.model, Limited):
            touched = steps.model.notes(steps.states)
            self.notes += touched
            if touched and self.noise_path is not None:
                self.notes += (NOISE_AT_A_LIMIT,)
        self.grid, note = self._plan.report(self.scenario, steps.distance)
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
        # The usual interval too: how many are computed at once hangs on it.
        steps = np.diff(instants, prepend=0.0)
        longest = float(np.max(steps, initial=1.0 / self.scenario.adc.rate))
        numbers = [self.chain.points.index(point) for point in points]
        model = self._models.model(numbers, Axis(longest, longest), self._plan.stepping)
        _, found = model.advance(model.start(), 0, instants)
        return found

    def look_axis(self) -> Axis:
        """Return the axis of the converter's looks, and whether they are an even row."""
        adc, digitizer = self.scenario.adc, self._digitizer
        even = adc.pattern.widest == adc.pattern.closest and adc.wander is None
        uniform = even and adc.aperture_jitter == 0.0
        origin = adc.first + adc.aperture_delay
        return Axis(digitizer.interval, digitizer.longest, uniform, origin)

    def _trials(self, progress: Progress | None) -> tuple[Models, Trials]:
        """Return what trials of grids are made of: of the pin, or of what samples it."""
        models, points = self._models, self._pin
        if self.sampler is not None:
            models, points = self.sampler.extended(models), [len(self.chain.points)]
        adc, digitizer = self.scenario.adc, self._digitizer
        scale = (
            adc.pattern.look_rate,
            adc.lsb,
            adc.high - adc.low,
            self.scenario.simulation.accuracy,
        )
        looks = clock.look_count(adc, self.count)
        axis, instants = self.look_axis(), digitizer.instants
        return models, Trials(*scale, looks, points, axis, instants, progress)

    @property
    def _waveform_points(self) -> list[int]:
        wanted = self.scenario.simulation.waveform_points
        names = self.chain.points
        return list(range(len(names))) if wanted is None else [names.index(name) for name in wanted]

    def _noise_path(self) -> NoisePath | None:
        """Return the noise of the circuit at the conversions, if it has any and it is wanted."""
        if not self.scenario.simulation.noise:
            return None
        # Noise reaches the sampling capacitor as through a switch that is closed for ever.
        chain = self.chain if self.sampler is None else self.sampler.chain(self.chain)
        model = chain.noise_model(0.1 / self.duration)
        if model.unbounded:
            self.notes += (
                "nothing limits the bandwidth of these noise sources before the converter, so the "
                f"part that reaches it directly is left out: {', '.join(model.unbounded)}; put a "
                "filter behind them, or give the amplifier a gain_bandwidth",
            )
        if not model.names or len(model.a) == 0:  # without states no noise is left
            return None
        return NoisePath.of(model, self.scenario.adc.pattern, self.scenario.seed)


def _duration(scenario: Scenario) -> float:
    if scenario.simulation.duration is not None:
        return scenario.simulation.duration
    known = scenario.stimulus.known_length()
    if known is None:
        raise ScenarioError("simulation.duration is missing: this stimulus never ends by itself")
    return known
