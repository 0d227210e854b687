"""A converter ready to run: what the engine asks of it, whatever its kind."""

from __future__ import annotations

from abc import ABC, abstractmethod
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter.base import MOST_DEVIATIONS, Converter
from frontend_sim.converter.clock import sampling_instants
from frontend_sim.converter.quantizer import Quantizer

Real = NDArray[np.float64]
Codes = NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class Converted:
    """Some codes in a row.

    Parameters
    ----------
    start : number of the first of them
    time : true instant of the last look at the pin that is in each code, shape (K,) [s]
    pin : exact voltage at the pin at that instant, shape (K,) [V]
    codes : shape (K,) [counts]
    voltage : what firmware reads from them, shape (K,) [V]
    overrange : where a look or the code was beyond the range, shape (K,)
    """

    start: int
    time: Real
    pin: Real
    codes: Codes
    voltage: Real
    overrange: NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class Digitizer(ABC):
    """A converter with its tables read, its seed and its temperature.

    The engine asks when the pin is looked at, finds the pin's voltage there, and hands it over in
    order of time; any cut of the looks gives the same codes, bit by bit.

    Parameters
    ----------
    adc, seed, temperature : as ``Converter.digitizer`` takes them
    quantizer : with its levels worked out
    """

    adc: Converter
    seed: int
    temperature: float
    quantizer: Quantizer

    @property
    def interval(self) -> float:
        """Usual interval between looks [s]."""
        return self.adc.pattern.closest

    @property
    def longest(self) -> float:
        """Longest interval without a look, from t = 0 on, jitter and wander in it [s]."""
        adc, pattern = self.adc, self.adc.pattern
        widest = pattern.widest
        if adc.wander is not None:
            widest += MOST_DEVIATIONS * adc.wander.change(widest)
        return max(adc.first + adc.latest, widest) + pattern.closest

    def instants(self, start: int, stop: int) -> Real:
        """Return the true instants of looks start to stop - 1, increasing [s]."""
        return sampling_instants(self.adc, start, stop, self.seed)

    @abstractmethod
    def start(self) -> Any:
        """Return the state before the first look."""

    @abstractmethod
    def convert(
        self, state: Any, start: int, instants: Real, pin: Real, noise: Real | None = None
    ) -> tuple[Any, Converted]:
        """Return the state after some looks, and the codes that they complete.

        Parameters
        ----------
        start : number of the first look, the one after the last of the call before
        instants : of the looks, as ``instants`` gives them, shape (K,) [s]
        pin : exact voltage at the pin there, shape (K,) [V]
        noise : what the circuit adds to it, shape (K,) or (1,) [V]
        """
