"""Many chains that differ in the values of their parts, over one row of recorded points."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.linear import Linear
from frontend_sim.simulation.path import State
from frontend_sim.simulation.uniform import UniformPath

MOST_VALUES = 1 << 23
"""Most outputs of all chains that are held at once, 64 MB."""


@dataclass(frozen=True, eq=False)
class Draws:
    """Chains that step over the same points at the same instants, side by side.

    A tile of points is read once and goes through every chain while it is near, so that a further
    chain costs its matrix products alone. Each chain takes the very steps that it takes by itself:
    the results are the same, bit by bit.

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

        They can where each is driven by the same recording, on a uniform grid of points, and every
        instant falls on one of the points at a fixed stride.
        """
        paths = [_only_path(model) for model in models]
        found = [path for path in paths if path is not None]
        if not found or len(found) < len(paths):
            return None
        first = found[0]
        if not first.on_points or any(not _alike(path, first) for path in found):
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
        y = np.empty((len(self.paths), len(instants)))
        tile, stride = self.paths[0].tile, self.paths[0].stride
        states = [path.start() for path in self.paths]
        head = min(tile, len(instants))  # the first tile knows how the run begins
        states = self._each(states, 0, instants[:head], y[:, :head])
        whole = len(instants) // tile * tile
        moving = [state.x.copy() for state in states]
        for done in range(head, whole, tile):
            node = (done - 1) * stride
            points = self.paths[0].drive.points(node, node + tile * stride + 1)
            for path, x, row in zip(self.paths, moving, y, strict=True):
                path.lifted.advance(x, points, row[None, done : done + tile])
        if head < whole:
            states = [State(x, (whole - 1) * stride) for x in moving]
        if max(head, whole) < len(instants):
            self._each(states, whole, instants[whole:], y[:, whole:])
        if any(self.offsets):
            y += np.array(self.offsets)[:, None]
        return y

    def _each(self, states: list[State], number: int, instants: Real, y: Real) -> list[State]:
        """Advance every chain through some instants in the usual way."""
        after = []
        for path, state, row in zip(self.paths, states, y, strict=True):
            moved, (row[:],) = path.advance(state, number, instants)
            after.append(moved)
        return after


def _only_path(model: Linear) -> UniformPath | None:
    """Return the one path of a model, None where there are several, or it is of another kind."""
    if len(model.groups) != 1 or len(model.groups[0].paths) != 1 or model.count != 1:
        return None
    path = model.groups[0].paths[0]
    return path if isinstance(path, UniformPath) else None


def _alike(path: UniformPath, other: UniformPath) -> bool:
    same = path.drive is other.drive and path.stride == other.stride and path.tile == other.tile
    return same and path.on_points


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
