"""Points of a chain with limiters: the linear answer, and the answers to what limiters add."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.cut import Place
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.linear import Linear, States
from frontend_sim.simulation.signal import Signal
from frontend_sim.stimulus.drive import Drive


@dataclass(frozen=True, eq=False)
class Answer:
    """What the chain behind one limiter makes of its deviation, at the points behind it.

    Parameters
    ----------
    model : of the chain behind the limiter
    rows : which of the probe's points the model's are
    direct : how much of the deviation each of them sees at once, shape (rows,)
    place : the limiter
    asked : rows of the probe that hold the limiter's input and linear answer, to go on from a point
        of the grid to an instant; empty where that is not done
    rate : of the grid [Hz]
    """

    model: Linear
    rows: tuple[int, ...]
    direct: Real
    place: Place
    asked: tuple[int, ...]
    rate: float

    def advance(
        self, states: States, number: int, instants: Real, signal: Signal, values: Real
    ) -> States:
        """Add the answer to the probe's values in place; return the states at the last instant."""
        drives: list[Drive | None] = [signal.polygon, signal.lines]
        drives = drives[: len(self.model.groups[0].paths)]
        states, added = self.model.advance(states, number, instants, drives)
        if self.asked and signal.past:
            # Before the answer is added: the linear answer at the limiter is one of these points.
            u, v = self.place.both(values[list(self.asked)])
            added += self.direct[:, None] * signal.missed(self.place, self.rate, instants, u, v)
        if np.any(added):
            values[list(self.rows)] += added
        return states


@dataclass(frozen=True, eq=False)
class Probe:
    """Some points of the chain as functions of time, given the deviations of its limiters.

    Parameters
    ----------
    linear : the points, as if nothing limited, and behind them those that the answers ask for
    answers : one for each limiter of the chain so far; None where no point lies behind it
    count : number of points that are returned
    """

    linear: Linear
    answers: tuple[Answer | None, ...]
    count: int

    def before(self) -> Real:
        """Return the points' values before t = 0, shape (points,)."""
        values = self.linear.before()
        for answer in self.answers:
            if answer is not None:
                values[list(answer.rows)] += answer.model.before()
        return values[: self.count]

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
        for answer, state, signal in zip(self.answers, states[1:], deviations, strict=True):
            if answer is None:
                after.append(state)
            else:
                after.append(answer.advance(state, number, instants, signal, values))
        return tuple(after), values[: self.count]
