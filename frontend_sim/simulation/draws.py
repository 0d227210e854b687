"""Many chains that differ in the values of their parts, over one row of recorded points."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property, lru_cache
from typing import Self

import numpy as np

from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.lifted import Lifted
from frontend_sim.simulation.linear import Linear
from frontend_sim.simulation.path import State
from frontend_sim.simulation.resampled import Resampled
from frontend_sim.simulation.uniform import UniformPath
from frontend_sim.stimulus.drive import Between, UniformDrive

MOST_VALUES = 1 << 23
"""Most outputs of all chains that are held at once, 64 MB."""
BESIDE = 8
"""Chains in one product: few, so that what a tile gives stays near the processor."""


@dataclass(frozen=True, eq=False)
class Draws:
    """Chains that step over the same points at the same instants, side by side.

    A tile of points is read once and goes through every chain while it is near, a few chains at a
    time, so that a further chain costs its matrix products alone. Each chain takes the very steps
    that it takes by itself: the results are the same, bit by bit.

    Parameters
    ----------
    paths : of the pin of each chain, on an even row of instants
    offsets : constant at the pin of each, shape (D,)
    """

    paths: tuple[UniformPath, ...]
    offsets: tuple[float, ...]

    @classmethod
    def of(cls, models: Sequence[Linear]) -> Self | None:
        """Take models of one point each, or return None where they cannot go side by side.

        They can where they are of one order, each is driven by the same recording, on a uniform
        grid of points, and every instant falls on one of the points at a fixed stride.
        """
        paths = [_only_path(model) for model in models]
        found = [path for path in paths if path is not None]
        if not found or len(found) < len(paths):
            return None
        first = found[0]
        if any(not _alike(path, first) for path in found):
            return None
        return cls(tuple(found), tuple(float(model.offset[0]) for model in models))

    def outputs(self, instants: Real) -> Real:
        """Return the point of every chain at the instants.

        Parameters
        ----------
        instants : number · interval for number = 0, 1, 2, ..., shape (K,) [s]

        Returns
        -------
        Shape (D, K).
        """
        first = self.paths[0]
        tile, stride, drive = first.tile, first.stride, _ReadOnce(first.drive)
        y = np.empty((len(self.paths), len(instants)))
        head = min(tile, len(instants))  # the first tile knows how the run begins
        whole = max(len(instants) // tile * tile, head)
        states = self._each([path.start() for path in self.paths], drive, 0, instants[:head], y)
        x = np.array([state.x for state in states])
        for done in range(head, whole, tile):
            node = (done - 1) * stride
            points = drive.points(node, node + tile * stride + 1)
            for group, lifted in self._beside:
                found = np.empty((1, len(lifted.free), tile))
                lifted.advance(x[group], points, found)
                y[group, done : done + tile] = found[0]
        if whole < len(instants):
            states = [State(one, (whole - 1) * stride) for one in x]
            self._each(states, drive, whole, instants[whole:], y)
        if any(self.offsets):
            y += np.array(self.offsets)[:, None]
        return y

    @cached_property
    def _beside(self) -> list[tuple[slice, Lifted]]:
        groups = [slice(at, at + BESIDE) for at in range(0, len(self.paths), BESIDE)]
        return [
            (group, Lifted.beside([path.lifted for path in self.paths[group]])) for group in groups
        ]

    def _each(
        self, states: Sequence[State], drive: UniformDrive, number: int, instants: Real, y: Real
    ) -> list[State]:
        """Advance every chain by itself through some instants."""
        after, part = [], slice(number, number + len(instants))
        for path, state, row in zip(self.paths, states, y, strict=True):
            moved, (row[part],) = path.advance(state, number, instants, drive)
            after.append(moved)
        return after


class _ReadOnce(UniformDrive):
    """A drive that keeps the points which it was asked for last: the next chain asks for them too.

    Parameters
    ----------
    drive : the same signal
    """

    rate: float
    origin: float
    between: Between
    initial: float

    def __init__(self, drive: UniformDrive) -> None:
        self.rate, self.origin = drive.rate, drive.origin
        self.between, self.initial = drive.between, drive.initial
        self._points = lru_cache(maxsize=1)(drive.points)

    def points(self, first: int, last: int) -> Real:
        return self._points(first, last)


def _only_path(model: Linear) -> UniformPath | None:
    """Return the one path of a model, None where there are several, or it is of another kind."""
    if len(model.groups) != 1 or len(model.groups[0].paths) != 1 or model.count != 1:
        return None
    path = model.groups[0].paths[0]
    return path if isinstance(path, UniformPath) else None


def _alike(path: UniformPath, other: UniformPath) -> bool:
    same = path.drive is other.drive and path.stride == other.stride and path.tile == other.tile
    same = same and path.on_points and not isinstance(path.drive, Resampled)
    return same and path.lifted.alike == other.lifted.alike


@dataclass(frozen=True, eq=False)
class Known:
    """One point of a chain whose values at all instants are known already, see ``Model``.

    Parameters
    ----------
    values : at every instant of the axis from number 0, shape (K,)
    past : before t = 0
    """

    values: Real
    past: float = 0.0

    def before(self) -> Real:
        """Return the value before t = 0, shape (1,)."""
        return np.array([self.past])

    def start(self) -> None:
        """Return nothing: there is no state."""

    def advance(self, states: None, number: int, instants: Real) -> tuple[None, Real]:
        """Return the values at the instants, shape (1, K)."""
        return None, self.values[None, number : number + len(instants)]
