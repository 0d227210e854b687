"""A whole linear chain with all its drives: superposition of paths, one for each drive."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal, Self

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.analog.discretize import METHODS, Method
from frontend_sim.simulation.grid import GridDrive
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.path import Outputs, Path, State
from frontend_sim.simulation.piecewise import ULPS, PiecewisePath
from frontend_sim.simulation.resampled import Resampled
from frontend_sim.simulation.rows import RowPath, row_length
from frontend_sim.simulation.since import Exponential, SincePoint, Trapezoid
from frontend_sim.simulation.uniform import UniformPath
from frontend_sim.stimulus.drive import Drive, PiecewiseDrive, UniformDrive

Initial = Literal["settled", "rest"]
States = tuple[tuple[State, ...], ...]


@dataclass(frozen=True)
class GridMethod:
    """A discrete model: its name, its rate [Hz], its pre-warp frequency [Hz] if any."""

    method: Method
    rate: float
    prewarp: float | None = None


@dataclass(frozen=True)
class Axis:
    """Where a linear model is asked: the usual interval between instants and the longest [s].

    ``uniform`` promises instants origin + number · interval, for number = 0, 1, 2, ... and no
    others.
    """

    interval: float
    longest: float
    uniform: bool = False
    origin: float = 0.0


@dataclass(frozen=True, eq=False)
class Group:
    """Points of the chain that share one delay, and one path for each drive."""

    rows: tuple[int, ...]
    delay: float
    before: Real
    paths: tuple[Path, ...]


@dataclass(frozen=True, eq=False)
class Linear:
    """Some points of a linear chain as functions of time, the offsets of its stages included.

    Since the chain is linear, each drive advances states of its own in the way that is exact and
    fast for it, and the outputs add up. A point behind a transport delay is asked that much
    earlier; before t = 0 there is the settled value, or nothing where the chain was at rest.
    """

    groups: tuple[Group, ...]
    count: int
    offset: Real

    @classmethod
    def of(
        cls,
        chain: Chain,
        drives: Sequence[Drive],
        points: Sequence[int],
        initial: Initial,
        axis: Axis,
        grid: GridMethod | None = None,
    ) -> Self:
        """Prepare the points of a chain, exact or, with a grid, as a discrete model gives them.

        Raises
        ------
        ModelError
            If no settled state exists, see ``Chain.settled``.
        """
        if grid is not None:
            between: Literal["hold", "line"] = "hold" if grid.method == "zoh" else "line"
            drives = [GridDrive(tuple(drives), grid.rate, between)]
        level = sum(drive.initial for drive in drives)
        x = chain.settled(level) if initial == "settled" else np.zeros(chain.order)
        groups = []
        for delay in sorted(set(chain.delay[list(points)].tolist())):
            rows = tuple(row for row, point in enumerate(points) if chain.delay[point] == delay)
            outputs = Outputs.of(chain, [points[row] for row in rows])
            before = outputs.c @ x + outputs.d * (level if initial == "settled" else 0.0)
            paths = tuple(_path(chain, drive, outputs, initial, axis, grid) for drive in drives)
            groups.append(Group(rows, delay, before, paths))
        return cls(tuple(groups), len(points), chain.offset[list(points)])

    def before(self) -> Real:
        """Return the points' values before t = 0, shape (points,)."""
        values = self.offset.copy()
        for group in self.groups:
            values[list(group.rows)] += group.before
        return values

    def start(self) -> States:
        """Return the states at t = 0."""
        return tuple(tuple(path.start() for path in group.paths) for group in self.groups)

    def advance(
        self,
        states: States,
        number: int,
        instants: Real,
        drives: Sequence[Drive | None] | None = None,
    ) -> tuple[States, Real]:
        """Return the states at the last instant and the points' values, shape (points, K).

        Parameters
        ----------
        number : number of the first instant since the start of the run
        instants : increasing, shape (K,) [s]
        drives : stand in for those that the model was made with, see ``Path``; None has been zero
            all the time
        """
        parts = [
            _advanced(group, held, number, instants, drives)
            for group, held in zip(self.groups, states, strict=True)
        ]
        after = tuple(held for held, _ in parts)
        y = parts[0][1]
        if len(parts) > 1:
            y = np.empty((self.count, len(instants)))
            for group, (_, values) in zip(self.groups, parts, strict=True):
                y[list(group.rows)] = values
        return after, y + self.offset[:, None] if np.any(self.offset) else y


def _advanced(
    group: Group,
    states: tuple[State, ...],
    number: int,
    instants: Real,
    drives: Sequence[Drive | None] | None,
) -> tuple[tuple[State, ...], Real]:
    """Advance the paths of one group, and add their outputs up."""
    earlier = instants - group.delay if group.delay else instants
    if group.delay:
        # What begins at t = 0 is there for an instant that is at it but for rounding.
        earlier[np.abs(earlier) <= ULPS * np.spacing(group.delay)] = 0.0
    begun = int(np.searchsorted(earlier, 0.0))
    before = np.repeat(group.before[:, None], begun, axis=1)
    if begun == len(earlier):
        return states, before
    moved, total = [], None
    at, asked = number + begun, earlier[begun:]
    for i, (path, state) in enumerate(zip(group.paths, states, strict=True)):
        drive = drives[i] if drives is not None else None
        if drives is not None and drive is None:
            moved.append(path.rested(state, at, asked))
            continue
        state, values = path.advance(state, at, asked, drive)
        moved.append(state)
        total = values if total is None else total + values
    if total is None:
        total = np.zeros((len(group.rows), len(asked)))
    return tuple(moved), np.concatenate([before, total], axis=1) if begun else total


def _path(
    chain: Chain,
    drive: Drive,
    outputs: Outputs,
    initial: Initial,
    axis: Axis,
    grid: GridMethod | None,
) -> Path:
    if isinstance(drive, PiecewiseDrive):
        path = PiecewisePath.of(chain, drive, outputs, initial, axis.longest)
        fastest = float(np.max(np.abs(drive.generator), initial=0.0))
        row = row_length(fastest, axis.interval) if axis.uniform else 0
        return RowPath.of(path, axis.interval, row, axis.origin) if row else path
    if axis.uniform and axis.origin == outputs.delay == 0.0 and grid is None:
        times = 1.0 / (axis.interval * drive.rate)
        if round(times) > 1 and abs(times / round(times) - 1.0) < 1e-14:
            drive = Resampled(drive, round(times))
    return _uniform(chain, drive, outputs, initial, axis, grid)


def _uniform(
    chain: Chain,
    drive: UniformDrive,
    outputs: Outputs,
    initial: Initial,
    axis: Axis,
    grid: GridMethod | None,
) -> Path:
    step = 1.0 / drive.rate
    method: Method = grid.method if grid else ("zoh" if drive.between == "hold" else "foh")
    prewarp = grid.prewarp if grid else None
    model = METHODS[method](chain, step, prewarp)
    since: SincePoint
    if method == "bilinear":
        since = Trapezoid(chain, step, prewarp)
    else:
        since = Exponential(chain, drive.between, step, _usual(axis, drive, outputs.delay))
    stride = round(axis.interval * drive.rate)
    even = (
        axis.uniform
        and axis.origin == outputs.delay == drive.origin == 0.0
        and stride >= 1
        and abs(axis.interval * drive.rate - stride) <= 4e-16 * stride
    )
    return UniformPath.of(chain, drive, outputs, model, since, initial, stride, even)


def _usual(axis: Axis, drive: UniformDrive, delay: float) -> float:
    """Return how far behind a point of the drive all instants of an axis lie, if they do [s].

    Infinite where they do not, and where they lie on points.
    """
    stride = axis.interval * drive.rate
    if not axis.uniform or abs(stride - round(stride)) > 1e-9:
        return math.inf
    position = (axis.origin - delay - drive.origin) * drive.rate
    return (position - math.floor(position)) / drive.rate or math.inf
