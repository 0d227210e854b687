"""What stands behind a multiplexer, and what a channel connected all the time would make of it."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from frontend_sim.analog.chain import Chain, compose
from frontend_sim.analog.section import Section
from frontend_sim.simulation.engine import Simulation
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.linear import Axis, Linear, States


@dataclass(frozen=True, eq=False)
class Behind:
    """What stands behind the multiplexer: the shared stages, and the input network if there is one.

    Parameters
    ----------
    shared : all of it as one chain
    outputs : numbers of its points that are asked for, the pin first, then the network's taps
    section : the network with its switch closed for ever, see ``switched_network``; else None
    """

    shared: Chain
    outputs: tuple[int, ...]
    section: Section | None = None

    @classmethod
    def of(cls, shared: Chain, section: Section | None = None) -> Behind:
        """Put the network behind the shared stages."""
        pin = len(shared.points) - 1
        if section is None:
            return cls(shared, (pin,))
        taps = range(pin + 2, pin + 2 + len(section.taps))
        return cls(compose([*shared.sections, section]), (pin, *taps), section)

    @property
    def stages(self) -> int:
        """How many of the points are outputs of shared stages."""
        return self.outputs[0]


class Row:
    """A channel's outputs and the shared states behind it, at instants in order."""

    def __init__(self, channel: Simulation, behind: Behind, longest: float) -> None:
        """Start at t = 0.

        Parameters
        ----------
        longest : time between two instants [s]
        """
        self._channel, self._behind, self._longest = channel, behind, longest
        self._model: Linear | None = None
        self._states: States = ()
        self._done = 0

    def advance(self, instants: Real, interval: float | None) -> Real:
        """Return the values at instants, shape (p + n, K).

        Parameters
        ----------
        interval : promises that all instants are that far apart [s]
        """
        if len(instants) == 0:
            return np.empty((len(self._behind.outputs) + self._behind.shared.order, 0))
        if self._model is None:
            axis = Axis(interval or self._longest, self._longest)
            if interval is not None:
                axis = replace(axis, uniform=True, origin=float(instants[0]))
            self._model = _asked_for_states(self._channel, self._behind, axis)
            self._states = self._model.start()
        asked = np.ascontiguousarray(instants)
        self._states, values = self._model.advance(self._states, self._done, asked)
        self._done += len(asked)
        return values


def _asked_for_states(channel: Simulation, behind: Behind, axis: Axis) -> Linear:
    """Return a channel's outputs and the states of the shared stages as functions of time."""
    chain, n = channel.chain, behind.shared.order
    if behind.section is not None:
        chain = compose([*chain.sections, behind.section])
    states = np.zeros((n, chain.order))
    states[:, chain.order - n :] = np.eye(n)
    more = np.zeros(n)
    wider = replace(
        chain,
        c=np.concatenate([chain.c, states]),
        d=np.concatenate([chain.d, more]),
        delay=np.concatenate([chain.delay, np.full(n, channel.chain.delay[-1])]),
        points=(*chain.points, *(f"shared state {i}" for i in range(n))),
        noise_d=np.concatenate([chain.noise_d, np.zeros((n, chain.noise_d.shape[1]))]),
        offset=np.concatenate([chain.offset, more]),
    )
    shift, last = len(chain.points) - len(behind.shared.points), len(chain.points)
    asked = [*(output + shift for output in behind.outputs), *range(last, last + n)]
    initial = channel.scenario.simulation.initial
    return Linear.of(wider, channel.drives, asked, initial, axis)
