"""What every way through time has in common: a state, and a function that advances it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Protocol

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.simulation.kernels import Real


@dataclass(frozen=True, eq=False)
class Outputs:
    """The rows of the chain's output equation that a path reads, with one delay in common.

    Parameters
    ----------
    c : shape (p, n);  d : shape (p,);  delay : [s]
    """

    c: Real
    d: Real
    delay: float

    @classmethod
    def of(cls, chain: Chain, points: list[int]) -> Outputs:
        """Take some points of a chain, all of the same delay."""
        return cls(
            np.ascontiguousarray(chain.c[points]),
            np.ascontiguousarray(chain.d[points]),
            float(chain.delay[points[0]]),
        )


@dataclass(frozen=True, eq=False)
class State:
    """Where a path stands: the states of the chain and the node that they belong to.

    Parameters
    ----------
    x : states of the chain, shape (n,)
    node : index of the last point of a uniform drive, or time of the last node [s]
    """

    x: Real
    node: float


class Path(Protocol):
    """A chain together with one drive: a frozen value that advances a state through instants."""

    def start(self) -> State:
        """Return the state at t = 0."""

    def advance(
        self,
        state: State,
        number: int,
        instants: Real,
        drive: Any = None,
    ) -> tuple[State, Real]:
        """Return the state at the last instant, and the outputs, shape (p, K).

        Parameters
        ----------
        number : number of the first of these instants since t = 0
        instants : in order, not before the state's own time, at least 0, shape (K,) [s]
        drive : stands in for the drive that the path was made with, as far as the signal is known
            from the state's own time on; it has the same generator, or the same rate
        """

    def rested(self, state: State, number: int, instants: Real) -> State:
        """Return the state at the last instant, where state and drive were zero all the time."""
