"""Modulator samples become codes: weighed by the sinc^K filter, then rounded."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter.digitizer import Converted, Digitizer
from frontend_sim.converter.quantizer import Quantizer, converted_voltage, read_back
from frontend_sim.quantities import REFERENCE_TEMPERATURE

if TYPE_CHECKING:
    from frontend_sim.converter.oversampling import OversamplingAdc

Real = NDArray[np.float64]
Flags = NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class Window:
    """What the filter holds between two calls.

    Parameters
    ----------
    samples, beyond : of the running mean that is not complete: what the modulator saw, and where it
        was beyond the range, shape (< R,) each [V]
    sums : of the running means that a later code needs, weighed for each of their K places in a
        code, shape (< K, K) [V]
    spoilt : whether any sample of these was beyond the range, shape (< K,)
    """

    samples: Real
    beyond: Flags
    sums: Real
    spoilt: Flags


@dataclass(frozen=True, eq=False)
class DecimatingDigitizer(Digitizer):
    """An oversampling converter ready to run.

    K R samples in a row are K blocks of R; a code is the sum over b of (weights of place b) times
    (block b). Blocks lie at fixed places and each product is summed by itself, so cuts never show.

    Parameters
    ----------
    adc, seed, temperature, quantizer : see ``Digitizer``
    weights : of the samples at each of the K places, the oldest place first, shape (K, R)
    """

    adc: OversamplingAdc
    weights: Real

    @classmethod
    def of(
        cls, adc: OversamplingAdc, seed: int, temperature: float = REFERENCE_TEMPERATURE
    ) -> Self:
        """Work out weights and levels, and see that the reference is one.

        Raises
        ------
        InputError
            If a table does not fit, or the reference drifts out of its limits.
        """
        if adc.reference is not None:
            adc.reference.level(temperature)
        taps = adc.sinc.taps
        padded = np.concatenate([np.zeros(adc.order * adc.ratio - len(taps)), taps])
        weights = padded.reshape(adc.order, adc.ratio)
        return cls(adc, seed, temperature, Quantizer.of(adc, seed), weights)

    def start(self) -> Window:
        """Return the state before the first sample: nothing is held."""
        none = np.empty(0, np.bool_)
        return Window(np.empty(0), none, np.empty((0, self.adc.order)), none)

    def convert(
        self, state: Window, start: int, instants: Real, pin: Real, noise: Real | None = None
    ) -> tuple[Window, Converted]:
        """Return what is held after some samples, and the codes that they complete."""
        adc, order = self.adc, self.adc.order
        held, hop = len(state.sums), 1 if adc.continuous else order
        begun = len(state.samples)
        after = self._weighed(state, start, pin if noise is None else pin + noise)
        count = max((len(after.sums) - order) // hop + 1, 0)
        blocks = np.arange(count)[:, None] * hop + np.arange(order)
        total = np.zeros(count)
        for place in range(order):
            total = total + after.sums[blocks[:, place], place]
        codes, clipped = self.quantizer.codes(total)
        newest = (blocks[:, -1] - held + 1) * adc.ratio - 1 - begun
        made = Converted(
            ((start - begun) // adc.ratio - held) // hop,
            instants[newest],
            pin[newest],
            codes,
            read_back(adc, codes),
            clipped | after.spoilt[blocks].any(axis=1),
        )
        used = count * hop
        return Window(after.samples, after.beyond, after.sums[used:], after.spoilt[used:]), made

    def _weighed(self, state: Window, start: int, voltage: Real) -> Window:
        """Return what is held with some samples more, before any code is made of it."""
        adc = self.adc
        seen = converted_voltage(adc, voltage, start, self.seed, self.temperature)
        beyond = (seen < adc.low) | (seen > adc.high)
        # No stream of a modulator's bits can stand for more than its range.
        samples = np.concatenate([state.samples, np.clip(seen, adc.low, adc.high)])
        beyond = np.concatenate([state.beyond, beyond])
        count = len(samples) // adc.ratio
        used = count * adc.ratio
        blocks = samples[:used].reshape(count, adc.ratio)
        # NumPy sums each row by itself and in one order, however many rows there are; a matrix
        # product may not.
        sums = np.stack([np.sum(blocks * row, axis=1) for row in self.weights], axis=1)
        spoilt = beyond[:used].reshape(count, adc.ratio).any(axis=1)
        return Window(
            samples[used:],
            beyond[used:],
            np.concatenate([state.sums, sums]),
            np.concatenate([state.spoilt, spoilt]),
        )
