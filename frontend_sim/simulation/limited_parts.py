"""The parts of a chain with limiters, put together limiter by limiter."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from frontend_sim.analog.cut import CutChain, Place
from frontend_sim.analog.limits import Segments
from frontend_sim.simulation.deviation import Deviation
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.linear import Axis, GridMethod, Initial, Linear
from frontend_sim.simulation.polygon import Polygon
from frontend_sim.simulation.probe import Answer, Probe
from frontend_sim.stimulus.drive import Drive, Lines, UniformDrive


class LimitedParts:
    """The deviations of a chain with limiters, put together one by one along the chain.

    Parameters
    ----------
    cut, drives, initial, rate, duration, grid : as ``Limited.of`` takes them
    """

    def __init__(
        self,
        cut: CutChain,
        drives: tuple[Drive, ...],
        initial: Initial,
        rate: float,
        duration: float,
        grid: GridMethod | None,
    ) -> None:
        """Begin without any limiter."""
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
        rates = [drive.rate for drive in self.drives if isinstance(drive, UniformDrive)]
        events = None
        if self.grid is None:
            # As near to each other as points are: a held recording may jump at each of its own.
            axis = Axis(1.0 / max([self.rate, *rates]), self.duration + delay)
            events = self.probe(points, axis, True)
        interval = 1.0 / min(rates) if rates else 0.0
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
