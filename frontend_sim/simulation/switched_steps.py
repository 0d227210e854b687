"""The voltage that a single input's sampling capacitor holds, look by look."""

from __future__ import annotations

import math

import numpy as np

from frontend_sim.analog.noise import BOLTZMANN
from frontend_sim.converter.digitizer import Converted
from frontend_sim.randomness import normal, stream
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.linear import Initial
from frontend_sim.simulation.switched import InputSignals, SwitchedInput
from frontend_sim.simulation.switched_memory import Visits


class HeldSteps:
    """The held voltage on its way through the looks of a converter.

    Parameters
    ----------
    network : the input network
    signals : of the chain behind which it stands
    initial : how the run begins
    noise : rms noise of the sampling capacitor, 0 for none [V];  seed : of it
    """

    def __init__(
        self,
        network: SwitchedInput,
        signals: InputSignals,
        initial: Initial,
        noise: float,
        seed: int,
    ) -> None:
        """Start before the first look."""
        pattern = network.adc.pattern
        self._memory = network.memory(2.0 * (pattern.widest + pattern.closest))
        self._signals, self._states = signals, signals.start()
        self._state = network.first(self._memory, initial, signals.level())
        self._looks, self._noise, self._key = network.adc.looks, noise, stream(seed, NOISE)

    def advance(self, number: int, instants: Real) -> Real:
        """Return what is held at looks ``number`` and on, shape (K,) [V]."""
        self._states, (ended, begun, pin) = self._signals.advance(self._states, number, instants)
        visits = Visits(
            np.zeros(len(instants), np.int64),
            instants,
            self._memory.rows(0, ended),
            self._memory.rows(0, begun),
            pin,
        )
        self._state, held, _ = self._memory.advance(self._state, visits)
        return held

    def added(self, start: int, held: Real, pin: Real, noise: Real | None) -> Real:
        """Return what the held voltage is more than the pin without its load, with its noise [V].

        Parameters
        ----------
        start : number of the first look
        noise : of the circuit [V]
        """
        total = held - pin
        if noise is not None:
            total = total + noise
        if self._noise > 0.0:
            total = total + self._noise * normal(self._key, start, start + len(pin))
        return total

    def of_codes(self, start: int, held: Real, part: Converted) -> Real:
        """Return what was held at the last look of each code, shape of the codes [V].

        Parameters
        ----------
        start : number of the first look of ``held``
        """
        codes = part.start + np.arange(len(part.codes))
        return np.asarray(held[(codes + 1) * self._looks - 1 - start])


NOISE = "sampling capacitor noise"
"""Name of the stream of random numbers."""


def capacitor_noise(capacitance: float, temperature: float) -> float:
    """Return sqrt(k T / C), what a resistance leaves on a capacitor whatever its size [V].

    Source: H. Nyquist 1928 and J. B. Johnson 1928, with the equipartition of energy.

    Parameters
    ----------
    capacitance [F];  temperature [K]
    """
    return math.sqrt(BOLTZMANN * temperature / capacitance)
