"""A scan: several channels, each with its own chain, and one converter that visits them in turn."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from frontend_sim.analog.chain import chain_of
from frontend_sim.converter import clock
from frontend_sim.converter.digitizer import Converted
from frontend_sim.scenario.channel_scenario import ChannelScenario
from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.scenario.signal import PIN
from frontend_sim.scenario.spread import stages_at
from frontend_sim.simulation.arriving import Arriving
from frontend_sim.simulation.engine import Progress, Simulation
from frontend_sim.simulation.kernels import Index, Real
from frontend_sim.simulation.linear import Axis
from frontend_sim.simulation.noise import NoisePath
from frontend_sim.simulation.run import GridReport, Run, RunBlock
from frontend_sim.simulation.scan_charge import Charge, SeparateCharge, SharedCharge
from frontend_sim.simulation.scan_pins import ScanPins, SeparatePins
from frontend_sim.simulation.scan_tapped import TappedCharge, input_section
from frontend_sim.simulation.shared_pins import SharedPins
from frontend_sim.simulation.shared_row import Behind
from frontend_sim.simulation.steps import StimulusSteps, WaveformSteps, block_of
from frontend_sim.simulation.turns import Turns

LOOKS = 1 << 17
"""Looks of all channels computed at once, about."""


@dataclass(frozen=True, eq=False)
class ScanRun:
    """A finished run of a scan.

    Parameters
    ----------
    channels : name -> the channel's run, in the order of the file
    notes : what was decided on the way, of all channels
    """

    scenario: ScanScenario
    channels: dict[str, Run]
    notes: tuple[str, ...] = ()


class ScanSimulation:
    """A scan made ready to run.

    Parameters
    ----------
    scenario : what to simulate
    scans : whole scans computed at once; it bounds memory and never changes a code
    progress : called with 0 now and then while grids are searched for

    Attributes
    ----------
    channels : name -> the channel as a scenario of its own, with its checks
    count : number of conversions, those that are thrown away included
    duration : [s]

    Raises
    ------
    InputError
        If a circuit is unusable, a stimulus cannot be read, or the run would be empty.
    """

    def __init__(
        self,
        scenario: ScanScenario,
        scans: int | None = None,
        progress: Progress | None = None,
    ) -> None:
        """Prepare every channel and the converter that they share."""
        self.scenario = scenario
        self.duration = scenario.run_length()
        rhythm, adc = scenario.rhythm, scenario.sampling_adc
        self._turns = Turns(rhythm)
        self.channels: dict[str, ChannelScenario] = {
            channel.channel: channel for channel in scenario.channels(self.duration)
        }
        # They look at every conversion, also at those that are thrown away.
        visits = [rhythm.visiting(adc, i, discarded=True) for i in range(len(self.channels))]
        self._simulations = [
            Simulation(channel.model_copy(update={"adc": each}), progress=progress)
            for channel, each in zip(self.channels.values(), visits, strict=True)
        ]
        self._adc = rhythm.sequence(adc)
        self.count = self._adc.code_count(self.duration)
        if rhythm.simultaneous:
            held = rhythm.visiting(adc, 0)
            self.count = held.code_count(self.duration) * rhythm.conversions
        temperature = scenario.environment.temperature
        self._digitizer = self._adc.digitizer(scenario.seed, temperature)
        self._scans = scans or max(LOOKS // self._turns.looks, 1)

    @property
    def notes(self) -> tuple[str, ...]:
        """What was decided on the way, whole after the last block; a channel's own by its name."""
        return tuple(
            f"{name}: {note}"
            for name, simulation in zip(self.channels, self._simulations, strict=True)
            for note in simulation.notes
        )

    def notes_of(self, name: str) -> tuple[str, ...]:
        """Return what was decided on the way for one channel, whole after the last block."""
        return self.simulation(name).notes

    def grid_of(self, name: str) -> GridReport | None:
        """Return how good the grid of a channel was, known after the last block."""
        return self.simulation(name).grid

    def simulation(self, name: str) -> Simulation:
        """Return the simulation of one channel, which answers for its chain at any instant."""
        return self._simulations[list(self.channels).index(name)]

    def blocks(
        self, progress: Progress | None = None, discarded: bool = False
    ) -> Iterator[tuple[str, RunBlock]]:
        """Run, and return conversions and waveform of the channels block by block.

        Blocks of one channel are in order of time; each comes with the channel's name.

        Parameters
        ----------
        progress : called with the share that is done, from 0 to 1
        discarded : whether to return the conversions that the scan throws away as well
        """
        digitizer, looks = self._digitizer, clock.look_count(self._adc, self.count)
        pins, conversion, held = self._pins(), digitizer.start(), np.empty(0)
        charge = self._charge(pins)
        keeping = [_Keeping.of(each, self._turns.rhythm.period) for each in self._simulations]
        step = self._scans * self._turns.looks
        for start in range(0, looks, step):
            stop = min(start + step, looks)
            instants = self._instants(start, stop)
            pin = pins.advance(start, instants)
            noise = self._noise(keeping, start, len(instants))
            if charge is not None:
                held = charge.advance(start, instants)
                more = held - pin + charge.noise(start, len(pin))
                noise = more if noise is None else more + noise
                held = held[self._turns.rhythm.looks - 1 :: self._turns.rhythm.looks]
            conversion, converted = digitizer.convert(conversion, start, instants, pin, noise)
            for i, (name, kept) in enumerate(zip(self.channels, keeping, strict=True)):
                rows = self._turns.conversions(i, len(converted.codes), discarded)
                yield name, kept.block(converted, rows, held)
                for block in kept.waveforms(float(instants[-1]), stop == looks):
                    yield name, block
            if progress is not None:
                progress(stop / looks)
        pins.finish()

    def _instants(self, start: int, stop: int) -> Real:
        """Return when the pin is sampled; at once for all looks of a simultaneous scan."""
        if not self._turns.rhythm.simultaneous:
            return self._digitizer.instants(start, stop)
        looks = self._turns.looks
        scans = range(start // looks, -(-stop // looks))
        first = [self._digitizer.instants(scan * looks, scan * looks + 1) for scan in scans]
        return np.repeat(np.concatenate(first), looks)[: stop - start]

    def _pins(self) -> ScanPins:
        """Return what the converter finds at its pin."""
        scenario = self.scenario
        if not scenario.scan.chain:
            return SeparatePins(self._simulations, self._turns)
        temperature = scenario.environment.temperature
        shared = chain_of(stages_at(scenario.scan.chain, temperature), temperature)
        behind = Behind.of(shared, input_section(self._simulations[0]))
        return SharedPins(self._simulations, self._turns, behind, self._adc)

    def _charge(self, pins: ScanPins) -> Charge | None:
        """Return what is held of the pin, where the converter has an input network."""
        if self.scenario.sampling_adc.input is None:
            return None
        if isinstance(pins, SharedPins):
            return TappedCharge(self._simulations, self.scenario, self._turns, pins)
        kind = SeparateCharge if self._turns.rhythm.simultaneous else SharedCharge
        return kind(self._simulations, self.scenario, self._turns)

    def _noise(self, keeping: list[_Keeping], start: int, count: int) -> Real | None:
        """Return what the circuits of the channels add at some looks, None where it is nothing."""
        if all(kept.noise is None for kept in keeping):
            return None
        added, scans = np.zeros(count), start // self._turns.looks
        for i, kept in enumerate(keeping):
            rows = self._turns.rows(i, count)
            if kept.noise is not None and len(rows):
                first = self._turns.count(i, scans)
                kept.noise_state, values = kept.noise.advance(
                    kept.noise_state, first, first + len(rows)
                )
                added[rows] = values
        return added


class _Keeping:
    """What goes on beside the pin of one channel: noise, stimulus, waveforms."""

    def __init__(
        self,
        noise: NoisePath | None,
        arriving: StimulusSteps | None,
        waveform: WaveformSteps | None,
    ) -> None:
        self.noise = noise
        self.noise_state = noise.start() if noise is not None else np.empty(0)
        self._arriving, self._waveform = arriving, waveform
        self._done = 0

    @classmethod
    def of(cls, channel: Simulation, period: float) -> _Keeping:
        arriving = None
        if channel.scenario.stimulus_unit != PIN:
            adc = channel.scenario.adc
            axis = Axis(period, 3.0 * period + 2.0 * adc.first + adc.latest)
            arriving = StimulusSteps(Arriving.along(channel.drives, axis))
        return cls(channel.noise_path, arriving, channel.waveform_steps())

    def block(self, converted: Converted, rows: Index, held: Real) -> RunBlock:
        """Return some of the conversions as a block.

        Parameters
        ----------
        held : at the last look of each conversion; empty where nothing is held
        """
        names = ("time", "pin", "codes", "voltage", "overrange")
        part = Converted(self._done, *(getattr(converted, name)[rows] for name in names))
        self._done += len(rows)
        made = block_of(part, self._arriving, self._waveform)
        return replace(made, held=held[rows]) if len(held) else made

    def waveforms(self, time: float, whole: bool) -> Iterator[RunBlock]:
        """Return the waveforms up to a time [s], or the whole rest."""
        if self._waveform is not None:
            yield from self._waveform.until(time, self._done, whole)


def simulate_scan(
    scenario: ScanScenario, progress: Progress | None = None, discarded: bool = False
) -> ScanRun:
    """Run a scan and return the arrays of its channels; parameters as ``ScanSimulation.blocks``.

    Raises
    ------
    InputError
        If the scenario cannot be run, see ``ScanSimulation``.
    """
    simulation = ScanSimulation(scenario, progress=progress)
    found: dict[str, list[RunBlock]] = {name: [] for name in simulation.channels}
    for name, block in simulation.blocks(progress, discarded):
        found[name].append(block)
    runs = {
        name: Run.of(
            simulation.channels[name],
            blocks,
            simulation.grid_of(name),
            simulation.notes_of(name),
        )
        for name, blocks in found.items()
    }
    return ScanRun(scenario, runs, simulation.notes)
