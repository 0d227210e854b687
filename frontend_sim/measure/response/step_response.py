"""The response of a chain to a unit step, exact at any time."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.chain import Chain
from frontend_sim.analog.exponential import augmented, expm1
from frontend_sim.measure.response.ladder import Ladder
from frontend_sim.measure.response.roots import Roots, roots_of, without_hidden_drift


@dataclass(frozen=True, eq=False)
class StepResponse:
    """What the pin does after the stimulus steps from 0 to 1 V at t = 0, from rest.

    Parameters
    ----------
    chain : without hidden drift, see ``without_hidden_drift``
    roots : its poles, zeros and gain
    start : value right after the step has arrived, y(0+) = d [1]
    end : value in the end, the DC gain; infinite where a pole at the origin drifts away, None
        where an undamped pair of poles rings for ever [1]
    delay : pure delay; times of ``values`` count from the step at the stimulus [s]
    """

    chain: Chain
    roots: Roots
    start: float
    end: float | None
    delay: float

    @classmethod
    def of(cls, chain: Chain) -> Self:
        """Take the step response of a chain."""
        reduced = without_hidden_drift(chain)
        roots = roots_of(reduced)
        return cls(
            reduced, roots, float(reduced.d[-1]), _end_of(reduced, roots), float(chain.delay[-1])
        )

    @property
    def settles(self) -> bool:
        """Whether every mode dies out, so that there is an end to settle to."""
        return bool(np.all(self.roots.poles.real < 0.0)) or self.roots.silent

    def values(self, times: Real) -> Real:
        """Return the response at times [s], shape (K,) [1]; before the delay is over it is zero.

        The step is a generator of one held state appended to the chain (Van Loan 1978), and the
        joint system is advanced by its exponentials over powers of two.
        """
        since = np.asarray(times, dtype=np.float64) - self.delay
        arrived = since >= 0.0
        rational = self.without_delay(np.where(arrived, since, 0.0))
        return np.where(arrived, rational, 0.0)

    def evenly(self, step: float, count: int) -> Real:
        """Return the response at 0, 1, ..., ``count`` steps after its arrival, shape (count + 1,).

        Equal steps share their exponentials, so this costs far less than as many single times.
        """
        chain = self.chain
        if chain.order == 0:
            return np.full(count + 1, self.start)
        system = augmented(chain.a, chain.b, np.zeros((1, 1)), np.ones(1))
        ladder = Ladder.of_steps(expm1(system * step), 2 * count)
        state = np.zeros((chain.order + 1, 1))
        state[-1] = 1.0
        states = ladder.fill(state, 0, count.bit_length())[: count + 1, :-1, 0]
        return np.asarray(states @ chain.c[-1] + self.start)

    def without_delay(self, times: Real) -> Real:
        """Return the response at times at least 0, counted from the arrival of the step."""
        chain = self.chain
        if chain.order == 0 or len(times) == 0:
            return np.full(len(times), self.start)
        system = augmented(chain.a, chain.b, np.zeros((1, 1)), np.ones(1))
        ladder = Ladder.of(system, float(np.max(times)))
        states = np.zeros((chain.order + 1, len(times)))
        states[-1] = 1.0
        states = ladder.advance(states, np.asarray(times, dtype=np.float64))
        return np.asarray(chain.c[-1] @ states[:-1] + self.start)


def _end_of(chain: Chain, roots: Roots) -> float | None:
    """Return H(0), infinite with a pole at the origin, None with an undamped pair."""
    if roots.silent:
        return 0.0
    if roots.undamped:
        return None
    if np.any(roots.zeros == 0.0):
        return 0.0
    if np.any(roots.poles == 0.0):
        # Each factor s - zero is negative at s = 0+ where the zero lies right of it.
        right = int(np.sum((roots.zeros.imag == 0.0) & (roots.zeros.real > 0.0)))
        return roots.sign * (-1.0) ** right * np.inf
    return float(np.real(chain.without_delay().response(np.zeros(1))[0]))
