"""A chain with limiters and all its drives: the linear answer, and what the limiters add to it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Self

import numpy as np

from frontend_sim.analog.cut import CutChain
from frontend_sim.quantities import TIME, as_text
from frontend_sim.simulation.deviation import Deviation, DeviationState, Keep
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.limited_parts import LimitedParts
from frontend_sim.simulation.linear import Axis, GridMethod, Initial, States
from frontend_sim.simulation.probe import Probe
from frontend_sim.simulation.rows import ROW
from frontend_sim.simulation.uniform import WAVEFORM_TILE
from frontend_sim.stimulus.drive import Drive

GRID_BLOCK = 16 * WAVEFORM_TILE
"""Most points of the grid in one step of the limiters."""
SLOT = 1 << 18
"""Points of the grid for the instants that are asked at once."""


@dataclass(frozen=True, eq=False)
class LimitedState:
    """Where a chain with limiters stands.

    Parameters
    ----------
    known : points of the grid so far;  asked : the last instant [s]
    """

    known: int
    asked: float
    deviations: tuple[DeviationState, ...]
    probe: tuple[States, ...]


@dataclass(frozen=True, eq=False)
class Limited:
    """Some points of a chain with limiters as functions of time; the face is that of ``Linear``.

    With v the linear answer at a limiter and y its true output, the rest of the chain answers to
    v and to the deviation d = y - v apart. The answer to v is that of the linear chain, exact and
    without a grid. The deviation is known at the points of a grid and joined by lines, and steps
    exactly where it jumps; the answer to that is exact again.

    Parameters
    ----------
    rate : of the grid [Hz]
    end : points of the grid in the whole run
    piece : instants that are asked at once, a power of two; 0 if more than a SLOT of the grid lies
        between them, as a rule
    delay : of the whole chain, up to which before an instant deviations are still needed [s]
    lag : the same for what they hold and jump, which is asked by whole rows of instants [s]
    """

    deviations: tuple[Deviation, ...]
    probe: Probe
    rate: float
    end: int
    piece: int
    delay: float
    lag: float

    @classmethod
    def of(
        cls,
        cut: CutChain,
        drives: Sequence[Drive],
        points: Sequence[int],
        initial: Initial,
        axis: Axis,
        rate: float,
        duration: float,
        grid: GridMethod | None = None,
    ) -> Self:
        """Prepare points of a chain, numbered as in the chain that is not cut.

        Parameters
        ----------
        rate : of the limiters' grid [Hz]
        duration : of the run [s]
        grid : a discrete model at the same rate, in place of the exact steps

        Raises
        ------
        ModelError
            If no settled state exists, see ``Chain.settled``.
        """
        between = max(rate * axis.interval, 1.0)
        piece = 0
        if between <= SLOT:
            piece = 1 << min(int(SLOT / between), WAVEFORM_TILE).bit_length() - 1
        else:
            axis = replace(axis, uniform=False)
        parts = LimitedParts(cut, tuple(drives), initial, rate, duration, grid)
        for place in cut.places:
            parts.add(place)
        probe = parts.probe([cut.points[point] for point in points], axis, True)
        delay, end = float(cut.chain.delay[-1]), math.ceil(duration * rate) + 2
        lag = delay + (ROW + 2) * max(axis.interval if axis.uniform else 0.0, 1.0 / rate)
        return cls(tuple(parts.deviations), probe, rate, end, piece, delay, lag)

    def before(self) -> Real:
        """Return the points' values before t = 0, shape (points,)."""
        return self.probe.before()

    def start(self) -> LimitedState:
        """Return the states at t = 0."""
        deviations = tuple(deviation.start() for deviation in self.deviations)
        return LimitedState(0, 0.0, deviations, self.probe.start())

    def advance(
        self, states: LimitedState, number: int, instants: Real
    ) -> tuple[LimitedState, Real]:
        """Return the states at the last instant and the points' values, shape (points, K).

        Parameters
        ----------
        number : number of the first instant since the start of the run
        instants : increasing, shape (K,) [s]
        """
        parts, at = [], 0
        while at < len(instants):
            if self.piece:
                end = ((number + at) // self.piece + 1) * self.piece
                stop = min(end - number, len(instants))
            else:
                states, stop = self._to_slot(states, number + at, instants, at)
            states, values = self._asked(states, number + at, instants[at:stop])
            parts.append(values)
            at = stop
        return states, parts[0] if len(parts) == 1 else np.concatenate(parts, axis=1)

    def _asked(
        self, states: LimitedState, number: int, instants: Real
    ) -> tuple[LimitedState, Real]:
        """Advance through instants at once."""
        known, deviations = self._known(states, float(instants[-1]))
        signals = [deviation.signal for deviation in deviations]
        probe, values = self.probe.advance(states.probe, number, instants, signals)
        return LimitedState(known, float(instants[-1]), deviations, probe), values

    def _to_slot(
        self, states: LimitedState, number: int, instants: Real, at: int
    ) -> tuple[LimitedState, int]:
        """Advance to the slot of instant ``at``, and return the end of the instants in it too.

        The ends of the slots between are asked and not told, so that no more than a slot of the
        grid is ever held.
        """
        length = SLOT / self.rate
        first, slot = (math.floor(t / length) for t in (states.asked, float(instants[at])))
        for passed in range(first + 1, slot + 1):
            states, _ = self._asked(states, number, np.array([passed * length]))
        stop = int(np.searchsorted(instants, (slot + 1) * length))
        return states, max(stop, at + 1)

    def _known(
        self, states: LimitedState, instant: float
    ) -> tuple[int, tuple[DeviationState, ...]]:
        """Advance the deviations to the point behind an instant."""
        needed = math.floor(instant * self.rate) + 3
        until = -(-needed // WAVEFORM_TILE) * WAVEFORM_TILE
        until = max(min(until, self.end), needed)
        point = math.floor((states.asked - self.delay) * self.rate) - 1
        keep = Keep(point, states.asked - self.lag)
        known, deviations = states.known, states.deviations
        while known < until:
            upto = min(known + GRID_BLOCK, until)
            after: list[DeviationState] = []
            for deviation, state in zip(self.deviations, deviations, strict=True):
                before = [earlier.signal for earlier in after]
                after.append(deviation.advance(state, known, upto, keep, before))
            known, deviations = upto, tuple(after)
        return known, deviations

    def notes(self, states: LimitedState) -> tuple[str, ...]:
        """Return which limits were touched, for how long, and when first."""
        return tuple(
            f"the output of {deviation.place.name!r} was at {limit} for {as_text(time, TIME, 3)} "
            f"(first at t = {as_text(first, TIME, 6)})"
            for deviation, state in zip(self.deviations, states.deviations, strict=True)
            for limit, time, first in zip(
                deviation.place.limiter.limits, state.time, state.first, strict=True
            )
            if time > 0.0 and first < (self.end - 2) / self.rate  # the grid goes beyond the run
        )
