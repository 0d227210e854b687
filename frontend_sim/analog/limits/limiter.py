"""What every limiter has in common."""

from __future__ import annotations

from abc import ABC, abstractmethod
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from frontend_sim.analog.block import Real

Index = NDArray[np.int64]

ALONG = np.empty((2, 0))
"""Pieces that follow one another."""


@dataclass(frozen=True, eq=False)
class Segments:
    """A stretch of time in pieces, over each of which a limiter's input goes in a line.

    Parameters
    ----------
    length : of each piece, shape (S,) [s]
    begin, end : input at the begin and at the end of each piece, shape (S,)
    linear : what the replaced blocks alone would give at the end of each piece, shape (S,)
    linear_begin : the same at the begin of the first piece
    jumps : numbers of the pieces that begin with another input than the one before ended with,
        shape (J,)
    apart : where each piece stands on its own, d and v at its begin, shape (2, S); then nothing
        is carried from piece to piece
    """

    length: Real
    begin: Real
    end: Real
    linear: Real
    linear_begin: float
    jumps: Index
    apart: Real = field(default_factory=lambda: ALONG)


@dataclass(frozen=True, eq=False)
class Touched:
    """How long a limit was touched, and where first.

    Parameters
    ----------
    time : per limit, in all pieces together, shape (L,) [s]
    piece : number of the piece where each limit was touched first, -1 for never, shape (L,)
    since : from the begin of that piece, shape (L,) [s]
    """

    time: Real
    piece: Index
    since: Real

    @classmethod
    def none(cls, count: int) -> Touched:
        """Return that none of some limits was touched."""
        return cls(np.zeros(count), np.full(count, -1, np.int64), np.zeros(count))


class Limiter(ABC):
    """The nonlinear part of a stage, in place of some of its linear blocks.

    With u the input of the replaced blocks and v what they alone would make of it, the limiter
    gives the deviation d = y - v of the true output y. The rest of the chain is linear, so it
    answers to v + d with the sum of its answers, and d is zero wherever nothing limits.

    replaced : numbers of the blocks, among the stage's ``blocks()``, that the limiter stands for;
        those before them stand before the limiter, those after them behind it. An empty range
        stands between two blocks and replaces none
    limits : what each limit is called in messages, after "at" ("its upper rail")
    bends : whether the output bends where a limit begins or ends. It is then computed anew at
        instants between the points of a grid; else lines between the points are good enough
    raised : whether the limiter itself knows what constants make of the output of its stage
    """

    replaced: range
    limits: tuple[str, ...] = ()
    bends: bool = True
    raised: bool = False

    @abstractmethod
    def start(self, u: float, v: float) -> Real:
        """Return the state before t = 0, with the input at rest, shape (n,); the first is d."""

    @abstractmethod
    def advance(self, state: Real, span: Segments) -> tuple[Real, Real, Real, Touched]:
        """Advance over pieces of time.

        Returns
        -------
        state at the end; d at the end of each piece, shape (S,); d at the begin of the pieces that
        start with a jump, shape (J,); which limits were touched
        """


def continuous(state: Real, deviation: Real, jumps: Index) -> Real:
    """Return d at the begin of the pieces ``jumps`` where it never jumps: as at the end before."""
    return np.where(jumps > 0, deviation[jumps - 1], state[0])
