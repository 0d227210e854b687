"""What one limiter adds to the linear answer, point by point of a grid."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from frontend_sim.analog.cut import Place
from frontend_sim.analog.limits import Touched
from frontend_sim.simulation.jumps import NO_JUMP, jump_times, slack
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.linear import States
from frontend_sim.simulation.pieces import Jumps, Pieces, Stretch, pieces_of
from frontend_sim.simulation.polygon import Polygon
from frontend_sim.simulation.probe import Probe
from frontend_sim.simulation.signal import Past, Signal
from frontend_sim.stimulus.drive import Drive, Lines

NEAR = 1e-9
"""An input that bends within this share of a step from a point of the grid bends at the point."""


@dataclass(frozen=True)
class Keep:
    """From where on a deviation is still needed: a point of the grid, and a time for jumps [s]."""

    point: int
    time: float


@dataclass(frozen=True, eq=False)
class DeviationState:
    """Where a deviation stands: at a point of the grid.

    Parameters
    ----------
    grid, events : states of the probes;  count : jumps so far
    limiter : state of the limiter
    u, v : input and linear answer at the point, after its jump
    fresh : when they jump at the point [s]; None where they do not
    level : all jumps of the deviation so far, added up [V]
    signal : the deviation, as far back as it is needed
    time, first : how long each limit was touched, and when first, shape (L,) [s]
    """

    grid: tuple[States, ...]
    events: tuple[States, ...]
    count: int
    limiter: Real
    u: float
    v: float
    fresh: float | None
    level: float
    signal: Signal
    time: Real
    first: Real


@dataclass(frozen=True, eq=False)
class Deviation:
    """A limiter on a grid: d = y - v at every point, and at the jumps between points.

    Parameters
    ----------
    rate : of the grid [Hz]
    grid : gives u, and v where the limiter stands for states
    events : the same at jumps of the stimulus; None for a discrete model, which knows none
    drives : the stimulus, asked for its jumps
    delay : from the stimulus to the limiter [s]
    interval : longest interval between the points of a recording [s]
    remembers : whether the deviation is asked between the points of the grid
    at_once : the deviation at t = 0, where a discrete model cannot know of a jump; else None [V]
    """

    place: Place
    rate: float
    grid: Probe
    events: Probe | None
    drives: tuple[Drive, ...]
    delay: float
    interval: float
    at_once: float | None = None
    remembers: bool = False

    def start(self) -> DeviationState:
        """Return the state at t = 0, before what happens there."""
        u, v = self.place.both(self.grid.before()[:, None])
        limiter = self.place.limiter.start(float(u[0]), float(v[0]))
        d = float(limiter[0])
        first = d if self.at_once is None else self.at_once
        zero = d == 0.0 and first == 0.0
        polygon = None if zero else Polygon(self.rate, d, 0, np.array([first]))
        size = len(self.place.limiter.limits)
        never = np.full(size, np.inf)
        events = self.events.start() if self.events is not None else ()
        return DeviationState(
            self.grid.start(), events, 0, limiter, float(u[0]), float(v[0]),
            0.0, 0.0, Signal(polygon, None), np.zeros(size), never,
        )  # fmt: skip

    def advance(
        self,
        state: DeviationState,
        done: int,
        until: int,
        keep: Keep,
        before: Sequence[Signal],
    ) -> DeviationState:
        """Advance to point ``until`` - 1 of the grid.

        Parameters
        ----------
        done : number of the first point that is not known yet
        keep : from where on the signal is still needed
        before : deviations of the limiters before this one, known as far as to ``until`` - 1
        """
        times = np.arange(done, until) / self.rate
        grid, values = self.grid.advance(state.grid, done, times, before)
        u, v = self.place.both(values)
        events, jumps = self._jumps(state, done, until, before)
        if done:
            first, u, v = done - 1, np.append(state.u, u), np.append(state.v, v)
        else:
            first = 0
        fresh = state.fresh
        if len(u) < 2:
            return replace(state, grid=grid, events=events, u=float(u[0]), v=float(v[0]))
        pieces = pieces_of(Stretch(self.rate, first, u, v, fresh), jumps)
        limiter, d, begun, touched = self.place.limiter.advance(state.limiter, pieces.segments)
        level, signal = self._signal(state, first, keep, pieces, d, begun)
        if self.remembers:
            past = Past(pieces, float(state.limiter[0]), d, begun)
            signal = replace(signal, past=state.signal.past).remembered(past, keep.point)
        time, when = _counted(state, touched, pieces)
        count = state.count + (len(jumps.times) if jumps is not None else 0)
        return DeviationState(
            grid, events, count, limiter, *pieces.last, pieces.fresh, level, signal, time, when
        )

    def _jumps(
        self, state: DeviationState, done: int, until: int, before: Sequence[Signal]
    ) -> tuple[tuple[States, ...], Jumps | None]:
        """Return u and v on both sides of the jumps behind point done - 1, up to until - 1."""
        if self.events is None:
            return (), None
        ends = np.array([max(done - 1, 0), until - 1]) / self.rate
        near = slack(ends, self.interval)
        start, stop = ends + near - self.delay
        # What jumps later on comes as a bend to an input that only bends where a drive jumps.
        times = self.delay + jump_times(
            self.drives, float(start), float(stop), self.interval, bends=self.place.jumps
        )
        if not self.place.jumps:
            # The input only bends there, which a piece may do at its ends.
            position = times * self.rate
            times = times[np.abs(position - np.rint(position)) > NEAR + 1e-13 * position]
        apart = slack(times, self.interval)
        sides = np.column_stack([times - apart, times + apart]).reshape(-1)
        if self.events.answers:
            # Not to lose sight of the deviations before, which are not kept for ever.
            sides = np.append(sides, max(ends[1], float(np.max(sides, initial=0.0))))
        if len(sides) == 0:
            return state.events, None
        events, values = self.events.advance(state.events, 2 * state.count, sides, before)
        if len(times) == 0:
            return events, None
        rows = np.array(self.place.both(values))[:, : 2 * len(times)]
        return events, Jumps(times, rows[:, ::2], rows[:, 1::2])

    def _signal(
        self,
        state: DeviationState,
        first: int,
        keep: Keep,
        pieces: Pieces,
        d: Real,
        begun: Real,
    ) -> tuple[float, Signal]:
        """Split the deviation into held jumps and a part that lines join; add it to the signal."""
        polygon, lines = state.signal.polygon, state.signal.lines
        starts = pieces.segments.jumps
        left = np.where(starts > 0, d[starts - 1], state.limiter[0])
        size = np.abs(begun) + np.abs(left) + np.abs(pieces.segments.begin[starts])
        heights = np.where(np.abs(begun - left) > NO_JUMP * size, begun - left, 0.0)
        if self.events is None or not np.any(heights):
            level = state.level
            joined = pieces.on_grid(d - level if level else d)
        else:
            at, level = np.flatnonzero(heights), state.level
            levels = level + np.cumsum(heights[at])
            held = np.append(level, levels)[np.searchsorted(starts[at], np.arange(len(d)), "right")]
            joined, level = pieces.on_grid(d - held), float(levels[-1])
            lines = _grown(lines, pieces.jumps[at], levels)
        if polygon is None and not np.any(joined):
            return level, Signal(None, _trimmed(lines, keep.time))
        if polygon is None:
            polygon = Polygon(self.rate, 0.0, first, np.zeros(1))
        lines = _trimmed(lines, keep.time)
        return level, Signal(polygon.grown(joined, keep.point), lines)


def _grown(lines: Lines | None, breaks: Real, levels: Real) -> Lines:
    if lines is None:
        return Lines.of(0.0, breaks, levels)
    return Lines.of(lines.initial, np.append(lines.breaks, breaks), np.append(lines.levels, levels))


def _trimmed(lines: Lines | None, keep: float) -> Lines | None:
    """Return the lines without the breaks before a time, but for the last of them."""
    if lines is None:
        return None
    drop = int(np.searchsorted(lines.breaks, keep, side="right")) - 1
    if drop <= 0:
        return lines
    return Lines.of(float(lines.levels[drop - 1]), lines.breaks[drop:], lines.levels[drop:])


def _counted(state: DeviationState, touched: Touched, pieces: Pieces) -> tuple[Real, Real]:
    """Return for how long each limit was touched so far, and when first."""
    found = touched.piece >= 0
    when = np.where(found, pieces.begins(np.maximum(touched.piece, 0)) + touched.since, np.inf)
    return state.time + touched.time, np.minimum(state.first, when)
