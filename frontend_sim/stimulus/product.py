"""The product of two signals, exactly as each of them is."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.stimulus.drive import Drive, LineDrive, PiecewiseDrive, Real, UniformDrive


@dataclass(frozen=True, eq=False)
class Product(PiecewiseDrive):
    """u = u_1 u_2, made by the Kronecker product of the states of both generators,

        d(g ⊗ h)/dt = (G ⊗ 1 + 1 ⊗ H) (g ⊗ h).

    Source: the product rule.
    """

    first: PiecewiseDrive
    second: PiecewiseDrive

    @property
    def generator(self) -> Real:
        """G ⊗ 1 + 1 ⊗ H."""
        g, h = self.first.generator, self.second.generator
        total = np.kron(g, np.eye(len(h))) + np.kron(np.eye(len(g)), h)
        return np.asarray(total, dtype=np.float64)

    @property
    def readout(self) -> Real:
        """Kronecker product of both readouts."""
        both = np.kron(self.first.readout, self.second.readout)
        return np.asarray(both, dtype=np.float64)

    @property
    def initial(self) -> float:
        """Product of both initial values."""
        return self.first.initial * self.second.initial

    @property
    def fresh(self) -> float:
        """The shorter one of both."""
        return min(self.first.fresh, self.second.fresh)

    def events(self, start: float, stop: float) -> Real:
        """Return the events of both."""
        return np.union1d(self.first.events(start, stop), self.second.events(start, stop))

    def states(self, times: Real) -> Real:
        """Return the products of every state of the one with every state of the other."""
        g, h = self.first.states(times), self.second.states(times)
        return np.asarray((g[:, :, None] * h[:, None, :]).reshape(len(g), -1))


@dataclass(frozen=True, eq=False)
class PointByPoint(LineDrive):
    """A drive of points as pieces of lines, with an event at each point."""

    points: UniformDrive

    @property
    def initial(self) -> float:
        """Value before the first point."""
        return self.points.initial

    def events(self, start: float, stop: float) -> Real:
        """Return the times of the points."""
        drive = self.points
        first, last = (np.floor((t - drive.origin) * drive.rate) for t in (start, stop))
        number = np.arange(max(first - 1.0, 0.0), last + 2.0)
        times = drive.origin + number / drive.rate
        return np.asarray(times[(times > start) & (times <= stop)])

    def states(self, times: Real) -> Real:
        """Return the value, and the slope to the next point where lines join them."""
        drive = self.points
        if len(times) == 0:
            return np.empty((0, 2))
        index, since = drive.locate(times)
        first, last = int(index.min()), int(index.max()) + 2
        values = drive.points(first, last)
        here = values[index - first]
        if drive.between == "hold":
            return np.column_stack([here, np.zeros(len(here))])
        slope = (values[index - first + 1] - here) * drive.rate
        # Before the first point, the value of it is held.
        slope = np.where(times < drive.origin, 0.0, slope)
        return np.column_stack([here + slope * np.maximum(since, 0.0), slope])


def product(first: Drive, second: PiecewiseDrive) -> Product:
    """Return the product of any drive with one that a linear generator makes."""
    made = first if isinstance(first, PiecewiseDrive) else PointByPoint(first)
    return Product(made, second)
