"""The chain of a run as functions of time, in the way that was picked for it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, Protocol

from frontend_sim.analog.chain import Chain
from frontend_sim.analog.cut import CutChain
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.limited import Limited
from frontend_sim.simulation.linear import Axis, GridMethod, Initial, Linear
from frontend_sim.stimulus.drive import Drive


class Model(Protocol):
    """Some points of a chain as functions of time: ``Linear``, or ``Limited``."""

    def before(self) -> Real:
        """Return the points' values before t = 0, shape (points,)."""

    def start(self) -> Any:
        """Return the states at t = 0."""

    def advance(self, states: Any, number: int, instants: Real) -> tuple[Any, Real]:
        """Return the states at the last instant and the points' values, shape (points, K)."""


@dataclass(frozen=True)
class Stepping:
    """How time is stepped: exactly, or by a discrete model; and on which grid limiters go.

    Parameters
    ----------
    method : a discrete model of the chain, None for the exact steps
    rate : of the limiters' grid; None without limiters [Hz]
    """

    method: GridMethod | None = None
    rate: float | None = None


@dataclass(frozen=True, eq=False)
class Models:
    """Makes models of one chain with its drives; ``cut`` is None for a linear chain."""

    chain: Chain
    cut: CutChain | None
    drives: tuple[Drive, ...]
    initial: Initial
    duration: float

    def model(self, points: Sequence[int], axis: Axis, stepping: Stepping) -> Model:
        """Return some points of the chain as functions of time. Raises as ``Limited.of`` does."""
        if self.cut is None:
            return Linear.of(self.chain, self.drives, points, self.initial, axis, stepping.method)
        assert stepping.rate is not None
        return Limited.of(
            self.cut,
            self.drives,
            points,
            self.initial,
            axis,
            stepping.rate,
            self.duration,
            stepping.method,
        )
