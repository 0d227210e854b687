"""Stages behind a multiplexer, which must settle from one channel to the next.

Let z be the states of the shared stages, and z_i those that they would have if channel i were
connected all the time: the chain of the channel and the shared stages are then one linear chain,
which the engine steps exactly. While channel i is connected both obey dz/dt = A z + B u_i(t), so
their difference decays by itself,

    z(t) - z_i(t) = exp(A (t - w)) (z(w) - z_i(w)),

from the switch at w on, and z is continuous at a switch. No grid is needed, and the channels are
stepped independently, at their looks and at the switches beside them.

Where the clock is even, the instants of each column (all begins of the visits at one place of the
scan, all their first looks, ...) are an even row, and exp(A t) is one matrix for each column.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.exponential import expm1
from frontend_sim.converter.paced import PacedAdc
from frontend_sim.simulation import kernels
from frontend_sim.simulation.engine import Simulation
from frontend_sim.simulation.kernels import Index, Real
from frontend_sim.simulation.shared_period import late
from frontend_sim.simulation.shared_row import Behind, Row
from frontend_sim.simulation.since import Exponential
from frontend_sim.simulation.turns import Turns

MOST_COLUMNS = 16
"""With more looks in a visit its columns are too many to be stepped each by itself."""


@dataclass(frozen=True, eq=False)
class Visits:
    """Visits in a row: when they begin and end [s], and what they look at.

    Parameters
    ----------
    start : number of the first visit
    begin, end : shape (V,)
    looks : instants of the looks, shape (V, W); of a visit that is cut off the last one repeated
    """

    start: int
    begin: Real
    end: Real
    looks: Real


@dataclass(frozen=True, eq=False)
class Connected:
    """What visits would find if their channel were connected all the time.

    Parameters
    ----------
    outputs : at the looks, the pin first, shape (p, V, W) [V]
    begin, end : the shared states at begin and end of the visits, shape (V, n) each [V]
    """

    outputs: Real
    begin: Real
    end: Real


class SharedPins:
    """The pin behind shared stages, see ``ScanPins``."""

    def __init__(
        self, channels: Sequence[Simulation], turns: Turns, behind: Behind, adc: PacedAdc
    ) -> None:
        """Start all channels, and the shared stages settled on the first one.

        Parameters
        ----------
        behind : the stages behind the multiplexer
        adc : the converter of the whole scan
        """
        self._turns, self._behind, self._shared = turns, behind, behind.shared
        self.taps = np.empty((len(behind.outputs) - 1, 0))
        """The taps of the input network at the looks that were advanced last, shape (p - 1, K)."""
        shared = behind.shared
        rhythm, tempo = turns.rhythm, adc.tempo
        self._slot, self._period = rhythm.slot / tempo, rhythm.period / tempo
        # The clock's first switch, as late as the looks are.
        self._first = adc.first + adc.aperture_delay - rhythm.lead / tempo
        steady = adc.aperture_jitter == 0.0 and adc.wander is None
        self._even = steady and turns.visit <= MOST_COLUMNS
        longest = 2.0 * self._period + abs(self._first) + adc.first + adc.latest
        at_switch = -1 - behind.stages
        self._rest = [shared.settled(float(each.chain.offset[at_switch])) for each in channels]
        rows = turns.visit + 2 if self._even else 1
        self._rows = [
            [Row(channels[i], behind, longest) for _ in range(rows)]
            for i in (rhythm.order if self._even else range(len(channels)))
        ]
        self._decay = Exponential(shared, "hold", longest)
        self._after: Real | None = None
        self._switch = max(self._first, 0.0)

    def advance(self, start: int, instants: Real) -> Real:
        """Return the pin at some looks, see ``ScanPins``."""
        visits = self._visits(start, instants)
        found = self._by_columns(visits) if self._even else self._by_channels(visits)
        steps = self._steps(visits)
        apart = self._apart(found, steps)
        self._after = found.end[-1] + steps[-1] @ apart[-1]
        self._switch = float(visits.end[-1])
        outputs = found.outputs + self._left(visits, apart)
        flat = outputs.reshape(len(outputs), -1)[:, : len(instants)]
        self.taps = flat[1:]
        return np.ascontiguousarray(flat[0])

    def finish(self) -> None:
        """Do nothing: no grid is used."""

    def _visits(self, start: int, instants: Real) -> Visits:
        width = self._turns.visit
        count = -(-len(instants) // width)
        padded = np.pad(instants, (0, count * width - len(instants)), mode="edge")
        looks = padded.reshape(count, width)
        end = looks[:, -1].copy()
        if self._turns.rhythm.spare:
            number = np.arange(count) + start // width + 1
            end = np.maximum(self._first + number * self._slot, end)
        begin = np.concatenate([[self._switch], end[:-1]])
        return Visits(start // width, begin, end, looks)

    def _by_columns(self, visits: Visits) -> Connected:
        """Ask for each column of each place of the scan by itself: an even row of instants."""
        order, width = self._turns.rhythm.order, self._turns.visit
        found, count = self._nothing(visits), len(self._behind.outputs)
        for place, i in enumerate(order):
            mine = slice(place, None, len(order))
            begin, *looks, end = self._rows[place]
            # The very first begin may lie before the run, and nothing is asked of it.
            asked = slice(len(order), None, len(order)) if place == visits.start else mine
            states = begin.advance(visits.begin[asked], self._period)[count:]
            found.begin[asked] = states.T + self._rest[i]
            for column, row in enumerate(looks):
                values = row.advance(visits.looks[mine, column], self._period)
                found.outputs[:, mine, column] = values[:count]
                if column == width - 1 and not self._turns.rhythm.spare:
                    found.end[mine] = values[count:].T + self._rest[i]
            if self._turns.rhythm.spare:
                states = end.advance(visits.end[mine], self._period)[count:]
                found.end[mine] = states.T + self._rest[i]
        return found

    def _by_channels(self, visits: Visits) -> Connected:
        """Ask for all instants of each channel in one row, whatever lies between them."""
        order, spare = self._turns.rhythm.order, self._turns.rhythm.spare
        found, count = self._nothing(visits), len(self._behind.outputs)
        channel = np.resize(np.array(order), len(visits.begin))
        columns = [visits.begin[:, None], visits.looks]
        if spare:  # else the last look is the end
            columns.append(visits.end[:, None])
        instants = np.concatenate(columns, axis=1)
        for i, (row,) in enumerate(self._rows):
            mine: Index = np.flatnonzero(channel == i)
            values = row.advance(instants[mine].ravel(), None)
            shaped = values.reshape(len(values), len(mine), instants.shape[1])
            found.outputs[:, mine] = shaped[:count, :, 1 : 1 + self._turns.visit]
            found.begin[mine] = shaped[count:, :, 0].T + self._rest[i]
            found.end[mine] = shaped[count:, :, -1].T + self._rest[i]
        return found

    def _nothing(self, visits: Visits) -> Connected:
        count, n = len(visits.begin), self._shared.order
        outputs = np.zeros((len(self._behind.outputs), *visits.looks.shape))
        return Connected(outputs, np.zeros((count, n)), np.zeros((count, n)))

    def _steps(self, visits: Visits) -> Real:
        """Return exp(A t) over each visit, shape (V, n, n), or (1, n, n) for all of them."""
        n = self._shared.order
        if self._even:
            return np.asarray((np.eye(n) + expm1(self._shared.a * self._slot))[None])
        since = visits.end - visits.begin
        columns = np.tile(np.eye(n), (len(since), 1))
        self._decay_in_place(columns, np.repeat(since, n))
        return columns.reshape(len(since), n, n).transpose(0, 2, 1)

    def _decay_in_place(self, states: Real, since: Real) -> None:
        nothing = np.zeros(len(states))
        self._decay.advance(states, nothing, nothing, since)

    def _apart(self, found: Connected, steps: Real) -> Real:
        """Return how far the shared states are from those of the visit's channel, at its begin."""
        count, n = found.begin.shape
        first = np.zeros(n) if self._after is None else self._after - found.begin[0]
        apart = np.empty((count, n))
        apart[0] = first
        if count > 1 and n:
            powers = np.ascontiguousarray(steps - np.eye(n))
            which = np.arange(count - 1) if len(powers) > 1 else np.zeros(count - 1, np.int64)
            sums = np.ascontiguousarray(found.end[:-1] - found.begin[1:])
            kernels.recur(first.copy(), powers, kernels.reach(powers), which, sums, apart[1:])
        return apart

    def _left(self, visits: Visits, apart: Real) -> Real:
        """Return what is left of earlier channels at the looks, shape (p, V, W) [V]."""
        outputs = self._behind.outputs
        left = np.zeros((len(outputs), *visits.looks.shape))
        for place, output in enumerate(outputs):
            if self._even:
                tempo = self._turns.rhythm.slot / self._slot
                for column, time in enumerate(self._turns.rhythm.look_times):
                    row = late(self._shared, output, time / tempo)[None]
                    into = left[place, :, column][None]
                    kernels.readout(apart, np.zeros(len(apart)), row, np.zeros(1), into)
                continue
            states = np.repeat(apart, self._turns.visit, axis=0)
            since = (visits.looks - visits.begin[:, None]).ravel() - self._shared.delay[output]
            self._decay_in_place(states, since)
            left[place] = (states @ self._shared.c[output]).reshape(visits.looks.shape)
        return left
