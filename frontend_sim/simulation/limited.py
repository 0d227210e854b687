"""A chain with limiters and all its drives: the linear answer, and what the limiters add to it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Self

import numpy as np

from frontend_sim.analog.cut import CutChain, Place
from frontend_sim.analog.limits import Segments
from frontend_sim.quantities import TIME, as_text
from frontend_sim.simulation.deviation import Deviation, DeviationState, Keep
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.linear import Axis, GridMethod, Initial, Linear, States
from frontend_sim.simulation.polygon import Polygon
from frontend_sim.simulation.probe import Answer, Probe
from frontend_sim.simulation.rows import ROW
from frontend_sim.simulation.uniform import WAVEFORM_TILE
from frontend_sim.stimulus.drive import Drive, Lines, UniformDrive

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
        make = _Maker(cut, tuple(drives), initial, rate, duration, grid)
        for place in cut.places:
            make.add(place)
        probe = make.probe([cut.points[point] for point in points], axis, True)
        delay, end = float(cut.chain.delay[-1]), math.ceil(duration * rate) + 2
        lag = delay + (ROW + 2) * max(axis.interval if axis.uniform else 0.0, 1.0 / rate)
        return cls(tuple(make.deviations), probe, rate, end, piece, delay, lag)

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


class _Maker:
    """Puts the parts together, limiter by limiter along the chain."""

    def __init__(
        self,
        cut: CutChain,
        drives: tuple[Drive, ...],
        initial: Initial,
        rate: float,
        duration: float,
        grid: GridMethod | None,
    ) -> None:
        self.cut, self.drives, self.initial = cut, drives, initial
        self.rate, self.duration, self.grid = rate, duration, grid
        self.deviations: list[Deviation] = []

    def probe(self, points: Sequence[int], axis: Axis, between: bool) -> Probe:
        """Return a probe for some points of the cut chain, behind the limiters so far.

        ``between`` asks for instants between the points of the grid: where a point sees a limiter
        at once, lines would then be seen in place of the limiter's own output.
        """
        rows, asked = list(points), {}
        for number, one in enumerate(self.deviations):
            seen = np.any(self._direct(one.place, points))
            if between and self.grid is None and one.place.limiter.bends and seen:
                probed = one.place.probed()
                asked[number] = tuple(range(len(rows), len(rows) + len(probed)))
                rows += probed
                self.deviations[number] = replace(one, remembers=True)
        linear = Linear.of(self.cut.chain, self.drives, rows, self.initial, axis, self.grid)
        answers = (
            self._answer(one, rows, axis, asked.get(number, ()))
            for number, one in enumerate(self.deviations)
        )
        return Probe(linear, tuple(answers), len(points))

    def add(self, place: Place) -> None:
        """Put the next limiter in."""
        points = place.probed()
        delay = float(self.cut.chain.delay[place.entry])
        grid = self.probe(points, Axis(1.0 / self.rate, 2.0 / self.rate, uniform=True), False)
        events = None
        if self.grid is None:
            longest = self.duration + delay
            events = self.probe(points, Axis(longest, longest), True)
        interval = max(
            (1.0 / drive.rate for drive in self.drives if isinstance(drive, UniformDrive)),
            default=0.0,
        )
        at_once = None if self.grid is None else self._at_once(place, grid)
        self.deviations.append(
            Deviation(place, self.rate, grid, events, self.drives, delay, interval, at_once)
        )

    def _direct(self, place: Place, points: Sequence[int]) -> Real:
        """Return how much of a limiter's output each point sees at once."""
        chain = self.cut.behind(place)
        return np.array(
            [
                chain.d[point - place.exit]
                if point >= place.exit and chain.delay[point - place.exit] == 0.0
                else 0.0
                for point in points
            ]
        )

    def _answer(
        self, deviation: Deviation, points: Sequence[int], axis: Axis, asked: tuple[int, ...]
    ) -> Answer | None:
        place = deviation.place
        rows = tuple(row for row, point in enumerate(points) if point >= place.exit)
        if not rows:
            return None
        start = deviation.start()
        d = float(start.limiter[0])
        polygon = start.signal.polygon or Polygon(self.rate, d, 0, np.zeros(1))
        drives: list[Drive] = [polygon]
        if self.grid is None:
            drives.append(Lines.of(0.0, [0.0], [0.0]))
        behind = [points[row] for row in rows]
        model = Linear.of(
            self.cut.behind(place),
            drives,
            [point - place.exit for point in behind],
            self.initial,
            axis,
            self.grid,
        )
        return Answer(model, rows, self._direct(place, behind), place, asked, self.rate)

    def _at_once(self, place: Place, grid: Probe) -> float:
        """Return the deviation at t = 0, after a jump there."""
        u0, v0 = place.both(grid.before()[:, None])
        signals = [deviation.start().signal for deviation in self.deviations]
        _, values = grid.advance(grid.start(), 0, np.zeros(1), signals)
        u, v = place.both(values)
        state = place.limiter.start(float(u0[0]), float(v0[0]))
        at = np.zeros(1, np.int64)
        _, _, begun, _ = place.limiter.advance(
            state, Segments(np.zeros(1), u, u, v, float(v0[0]), at)
        )
        return float(begun[0])
