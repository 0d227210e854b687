"""A run in progress: the pin at instant after instant, and what is kept beside it."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from frontend_sim.converter.digitizer import Converted
from frontend_sim.simulation.accuracy import Distance
from frontend_sim.simulation.arriving import Arriving
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.models import Model
from frontend_sim.simulation.run import RunBlock
from frontend_sim.simulation.uniform import WAVEFORM_TILE


class PinSteps:
    """The pin of one chain, on its way through time, and what it is compared with.

    Parameters
    ----------
    model : gives the pin
    reference : what the model is compared with, None for nothing
    lsb : unit of the distance [V]
    """

    def __init__(self, model: Model, reference: Model | None, lsb: float) -> None:
        """Start both at t = 0."""
        self.model = model
        self.states: Any = model.start()
        self.distance = Distance()
        self._reference, self._lsb = reference, lsb
        self._reference_states = reference.start() if reference is not None else None

    def advance(self, number: int, instants: Real) -> Real:
        """Return the pin at instants in order, the first of them number ``number``, shape (K,)."""
        self.states, (pin,) = self.model.advance(self.states, number, instants)
        if self._reference is not None:
            self._reference_states, (true,) = self._reference.advance(
                self._reference_states, number, instants
            )
            self.distance.add((pin - true) / self._lsb)
        return np.asarray(pin)


class StimulusSteps:
    """What arrives at a sensor, on its way through the conversions."""

    def __init__(self, arriving: Arriving) -> None:
        """Start at t = 0."""
        self._arriving, self._states = arriving, arriving.start()

    def advance(self, number: int, instants: Real) -> Real:
        """Return the stimulus at the instants of codes, shape (K,) [SI unit]."""
        self._states, values = self._arriving.advance(self._states, number, instants)
        return values


class WaveformSteps:
    """The kept waveforms of one chain, on their way through time.

    Parameters
    ----------
    model : gives the points
    rate : points per second [Hz];  count : of them in the whole run
    names : of the points of the chain
    block : points computed at once
    """

    def __init__(
        self, model: Model, rate: float, count: int, names: tuple[str, ...], block: int
    ) -> None:
        """Start at t = 0."""
        self._model, self._rate, self._count = model, rate, count
        self._names, self._block = names, block
        self._states, self._done = model.start(), 0

    def until(self, time: float, conversion: int, whole: bool) -> Iterator[RunBlock]:
        """Return the waveforms up to a time [s], to a multiple of tiles, or the whole rest.

        Parameters
        ----------
        conversion : number of the next conversion
        """
        tiles = int(time * self._rate) // WAVEFORM_TILE * WAVEFORM_TILE
        until = self._count if whole else min(tiles, self._count)
        while self._done < until:
            upto = min(self._done + self._block, until)
            times = np.arange(self._done, upto, dtype=np.float64) / self._rate
            self._states, values = self._model.advance(self._states, self._done, times)
            yield self._kept(conversion, times, values)
            self._done = upto

    def named(self, values: Real | None = None) -> dict[str, Real]:
        """Return rows by the names of their points; without values, empty ones."""
        rows = values if values is not None else [np.empty(0)] * len(self._names)
        return dict(zip(self._names, rows, strict=True))

    def _kept(self, start: int, times: Real, values: Real) -> RunBlock:
        none, codes = np.empty(0), np.empty(0, np.int64)
        flags = np.empty(0, np.bool_)
        return RunBlock(start, none, none, codes, none, flags, times, self.named(values))


def block_of(
    part: Converted, arriving: StimulusSteps | None, waveform: WaveformSteps | None
) -> RunBlock:
    """Return conversions as a block of a run, with the names of its waveforms."""
    codes = (part.codes, part.voltage, part.overrange)
    stimulus = arriving.advance(part.start, part.time) if arriving is not None else np.empty(0)
    kept = (np.empty(0), waveform.named() if waveform is not None else {}, stimulus)
    return RunBlock(part.start, part.time, part.pin, *codes, *kept)
