"""Points of a chain with limiters: the linear answer, and the answers to what limiters add."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.linear import Linear, States
from frontend_sim.simulation.polygon import Polygon
from frontend_sim.stimulus.drive import Lines

Signal = tuple[Polygon | None, Lines | None]
"""A deviation: a part joined by lines, and a part that is held and jumps; None is zero so far."""


@dataclass(frozen=True, eq=False)
class Answer:
    """What the chain behind one limiter makes of its deviation, at the points behind it.

    Parameters
    ----------
    rows : which of the probe's points these are
    """

    model: Linear
    rows: tuple[int, ...]


@dataclass(frozen=True, eq=False)
class Probe:
    """Some points of the chain as functions of time, given the deviations of its limiters.

    Parameters
    ----------
    linear : the points, as if nothing limited
    answers : one for each limiter of the chain so far; None where no point lies behind it
    """

    linear: Linear
    answers: tuple[Answer | None, ...]

    def before(self) -> Real:
        """Return the points' values before t = 0, shape (points,)."""
        values = _before(self.linear)
        for answer in self.answers:
            if answer is not None:
                values[list(answer.rows)] += _before(answer.model)
        return values

    def start(self) -> tuple[States, ...]:
        """Return the states at t = 0."""
        behind = (() if answer is None else answer.model.start() for answer in self.answers)
        return (self.linear.start(), *behind)

    def advance(
        self,
        states: tuple[States, ...],
        number: int,
        instants: Real,
        deviations: Sequence[Signal],
    ) -> tuple[tuple[States, ...], Real]:
        """Return the states at the last instant and the points' values, shape (points, K).

        Parameters
        ----------
        number : number of the first instant since the start of the run
        instants : increasing, shape (K,) [s]
        deviations : of the limiters, as far as they are known
        """
        held, values = self.linear.advance(states[0], number, instants)
        after = [held]
        for answer, held, signal in zip(self.answers, states[1:], deviations, strict=True):
            if answer is not None:
                drives = signal[: len(answer.model.groups[0].paths)]
                held, added = answer.model.advance(held, number, instants, drives)
                if any(drive is not None for drive in drives):
                    values[list(answer.rows)] += added
            after.append(held)
        return tuple(after), values


def _before(model: Linear) -> Real:
    values = np.empty(model.count)
    for group in model.groups:
        values[list(group.rows)] = group.before
    return values
