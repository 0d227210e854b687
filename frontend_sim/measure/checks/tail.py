"""How a point of a linear chain comes to its final value, exactly and at any instant."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.chain import Chain, compose
from frontend_sim.measure.checks.events import JUST_BEFORE
from frontend_sim.measure.response.decay import Decay
from frontend_sim.measure.response.excursions import furthest, last_exit
from frontend_sim.measure.response.roots import without_hidden_drift
from frontend_sim.simulation.linear import Axis, Initial, Linear
from frontend_sim.stimulus.drive import Drive

FINEST = 1e-9
"""Excursions are searched down to this share of the largest distance from the end."""


@dataclass(frozen=True, eq=False)
class Tail:
    """The exact way of the last point of a chain to its end, from an instant on.

    Parameters
    ----------
    lack : states in the end less the states at the instant, shape (n,)
    jump : what the stimulus brings to the point at the instant without delay, with its sign
        against what is left to go
    """

    chain: Chain
    lack: Real
    jump: float

    @classmethod
    def of(
        cls, chain: Chain, drives: Sequence[Drive], initial: Initial, since: float, level: float
    ) -> Tail | None:
        """Take the states of a chain at an instant, from the engine.

        Parameters
        ----------
        chain : up to the point
        initial : where the chain was before t = 0
        since : the instant [s]
        level : at which the stimulus rests from then on

        Returns
        -------
        None where a mode never dies out.

        Raises
        ------
        ModelError
            If the chain would have drifted away on what it rested at before the run.
        """
        chain = without_hidden_drift(chain)
        if not np.all(chain.poles.real < 0.0):
            return None
        lack = chain.settled(level) - _states(chain, drives, initial, since)
        earlier = np.array([since * (1.0 - JUST_BEFORE) if since > 0.0 else -1.0])
        was = sum(float(drive.values(earlier)[0]) for drive in drives)
        if since == 0.0 and initial == "rest":
            was = 0.0
        return cls(chain, lack, float(chain.d[-1]) * (was - level))

    @property
    def delay(self) -> float:
        """Pure delay from the stimulus to the point [s]."""
        return float(self.chain.delay[-1])

    @property
    def arrival(self) -> float:
        """Distance from the end just after the delay is over."""
        return -float(self.chain.c[-1] @ self.lack)

    @property
    def departure(self) -> float:
        """Distance from the end just before the delay is over."""
        return self.arrival + self.jump

    def leaves(self, band: float, chain: Chain | None = None) -> float:
        """Return when the distance from the end exceeds a band for the last time [s].

        It counts from the instant, delay included; 0 where the band is never left. That nothing
        follows is known from the bound of ``Decay``.

        Parameters
        ----------
        band : half its width
        chain : in place of the own one, to see what a change of it does
        """
        decay = self._decay(chain or self.chain, band)
        out = 0.0 if decay is None else last_exit(decay, band)
        if out > 0.0:
            return out + self.delay
        return self.delay if abs(self.departure) > band else 0.0

    def furthest(self, sign: float) -> float:
        """Return the largest value of sign · (point - end) after the delay, at least 0."""
        if self.chain.order == 0:
            return max(sign * self.arrival, 0.0) + 0.0
        floor = FINEST * max(abs(self.arrival), abs(self.departure))
        decay = self._decay(self.chain, floor) if floor > 0.0 else None
        return 0.0 if decay is None else max(furthest(decay, sign)[0], 0.0)

    def _decay(self, chain: Chain, floor: float) -> Decay | None:
        if chain.order == 0:
            return None
        return Decay.to_rest(chain, len(chain.points) - 1, self.lack, floor)


def _states(chain: Chain, drives: Sequence[Drive], initial: Initial, instant: float) -> Real:
    """Return the states of a chain at an instant [s], shape (n,)."""
    size = chain.order
    if size == 0:
        return np.zeros(0)
    # The chain with its states as points: the engine tells points at any instant.
    states = replace(
        chain, c=np.eye(size), d=np.zeros(size), delay=np.zeros(size), offset=np.zeros(size),
        points=tuple(map(str, range(size))), noise_b=np.zeros((size, 0)),
        noise_d=np.zeros((size, 0)),
    )  # fmt: skip
    longest = max(instant, 1.0)
    model = Linear.of(states, drives, range(size), initial, Axis(longest, longest))
    _, found = model.advance(model.start(), 0, np.array([instant]))
    return np.asarray(found[:, 0])


def up_to(chain: Chain, point: int) -> Chain:
    """Return the part of a chain whose output is one of its points."""
    return compose(chain.sections[:point])
