"""A sampling capacitor behind shared stages: one network, whatever channel is connected."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.analog.section import Section
from frontend_sim.scenario.rhythm import Rhythm
from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.simulation.engine import Simulation
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.scan_charge import Charge, memory_of, period_of
from frontend_sim.simulation.shared_period import gain_of, left_over
from frontend_sim.simulation.shared_pins import SharedPins
from frontend_sim.simulation.shared_row import Behind
from frontend_sim.simulation.switched import switched_input
from frontend_sim.simulation.switched_memory import MemoryState, SwitchedMemory, Visits
from frontend_sim.simulation.switched_period import Period, settled_state
from frontend_sim.simulation.turns import Turns


class TappedCharge(Charge):
    """One sampling capacitor behind shared stages, which it loads whatever channel is connected."""

    def __init__(
        self, channels: Sequence[Simulation], scan: ScanScenario, turns: Turns, pins: SharedPins
    ) -> None:
        """Start as if the first channel had been looked at for ever, or at rest."""
        super().__init__(channels, scan, turns)
        rhythm, tempo = turns.rhythm, scan.adc.tempo
        first, found = self.inputs[rhythm.order[0]]
        self._pins, self._memory = pins, memory_of([found], scan, rhythm)
        instants = np.array([scan.adc.first + scan.adc.aperture_delay])
        period = Period(np.zeros(1, np.int64), instants, rhythm.slot / tempo)
        if scan.simulation.initial == "settled":
            level = first.input_signals(found, first.look_axis()).level()
            self._state = settled_state(self._memory, period, np.array([level]))
        else:
            self._state = self._memory.state(0.0, instants - period.length)

    def advance(self, start: int, instants: Real) -> Real:
        """Return what is held at the looks that the pins were advanced to last."""
        self._state, held = _tapped(self._memory, self._state, instants, self._pins.taps)
        return held


def _tapped(
    memory: SwitchedMemory, state: MemoryState, instants: Real, taps: Real
) -> tuple[MemoryState, Real]:
    """Return the state behind some looks at one network, and what is held at them.

    Parameters
    ----------
    taps : z at the looks, z and the pin at their closings, shape (2 m + 1, K)
    """
    m = memory.networks[0].order
    visits = Visits(
        np.zeros(len(instants), np.int64),
        np.ascontiguousarray(instants),
        memory.rows(0, taps[:m]),
        memory.rows(0, taps[m : 2 * m]),
        np.ascontiguousarray(taps[-1]),
    )
    state, held, _ = memory.advance(state, visits)
    return state, held


def input_section(channel: Simulation) -> Section | None:
    """Return the input network behind a channel, its switch closed for ever, with its taps."""
    found = channel.sampler
    return None if found is None else found.network.section(found.values.acquisition_time)


def tapped_matrix(scan: ScanScenario, rhythm: Rhythm, shared: Chain) -> Real:
    """Return what each look has of each channel behind shared stages, shape (K, N) [1].

    It is the fixed point of the scan: the taps of ``shared_period.left_over`` drive the capacitor,
    whose state before a period is solved for. A volt is one at the pin.
    """
    channel = scan.channels(1.0)[0]
    found = switched_input(channel)
    assert found is not None
    section = found.network.section(found.values.acquisition_time)
    behind = Behind.of(shared, section)
    count, gain = len(scan.channel), gain_of(behind.shared, behind.outputs[0])
    taps = left_over(behind.shared, behind.outputs[1:], rhythm, count, scan.adc.tempo) / gain
    rest = behind.shared.c @ behind.shared.settled(1.0) + behind.shared.d
    visited = np.repeat(rhythm.channel_of, rhythm.looks)
    asked = list(behind.outputs[1:])
    taps[:, np.arange(len(visited)), visited] += (rest[asked] / gain)[:, None]
    memory, period = memory_of([found], scan, rhythm), period_of(scan, rhythm)
    base = _held_in_the_end(memory, period, np.zeros(taps.shape[:2]))
    columns = [_held_in_the_end(memory, period, taps[:, :, i]) - base for i in range(count)]
    return np.column_stack(columns)


def _held_in_the_end(memory: SwitchedMemory, period: Period, taps: Real) -> Real:
    """Return what one network holds at the looks of a period that repeats for ever, shape (K,) [V].

    Over a period its state x = [q; held] becomes M x + h; the fixed point solves (I - M) x = h.
    """
    none = memory.state(0.0, period.instants[-1:] - period.length)
    size = none.q.size + 1

    def through(packed: Real, driven: Real) -> tuple[Real, Real]:
        state = replace(none, q=packed[:-1].reshape(none.q.shape), held=float(packed[-1]))
        after, held = _tapped(memory, state, period.instants, driven)
        return np.append(after.q.ravel(), after.held), held

    nothing, still = np.zeros(size), np.zeros_like(taps)
    constant = through(nothing, still)[0]
    matrix = np.column_stack([through(unit, still)[0] - constant for unit in np.eye(size)])
    fixed = np.linalg.solve(np.eye(size) - matrix, through(nothing, taps)[0])
    return through(np.asarray(fixed, np.float64), taps)[1]
