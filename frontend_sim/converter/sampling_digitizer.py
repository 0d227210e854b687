"""Looks become codes, each rounded by itself; several may then be made one."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter.digitizer import Converted, Digitizer
from frontend_sim.converter.quantizer import Quantizer, converted_voltage, read_back
from frontend_sim.quantities import REFERENCE_TEMPERATURE

if TYPE_CHECKING:
    from frontend_sim.converter.adc import Adc

Real = NDArray[np.float64]
Codes = NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class Rest:
    """Conversions whose result is not complete: codes, dither [LSB] and flags, shape (K,) each."""

    codes: Codes
    dither: Real
    overrange: NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class SamplingDigitizer(Digitizer):
    """A sampling converter ready to run."""

    adc: Adc

    @classmethod
    def of(cls, adc: Adc, seed: int, temperature: float = REFERENCE_TEMPERATURE) -> Self:
        """Work out the levels, and see that the reference is one. Raises InputError if not."""
        if adc.reference is not None:
            adc.reference.level(temperature)
        return cls(adc, seed, temperature, Quantizer.of(adc, seed))

    def start(self) -> Rest:
        """Return the state before the first look: nothing is left over."""
        return Rest(np.empty(0, np.int64), np.empty(0), np.empty(0, np.bool_))

    def convert(
        self, state: Rest, start: int, instants: Real, pin: Real, noise: Real | None = None
    ) -> tuple[Rest, Converted]:
        """Return what is left over after some looks, and the codes that they complete."""
        adc, stop = self.adc, start + len(pin)
        voltage = pin if noise is None else pin + noise
        seen = converted_voltage(adc, voltage, start, self.seed, self.temperature)
        dither = np.zeros(0)
        if adc.dither is not None:
            dither = adc.dither.values(start, stop, self.seed)
            seen = seen + adc.core_lsb * dither
        codes, overrange = self.quantizer.codes(seen)
        if adc.averaging is None:
            read = self._read(codes, dither)
            return state, Converted(start, instants, pin, codes, read, overrange)
        whole = Rest(
            np.concatenate([state.codes, codes]),
            np.concatenate([state.dither, dither]),
            np.concatenate([state.overrange, overrange]),
        )
        return self._averaged(whole, start, instants, pin)

    def _averaged(
        self, whole: Rest, start: int, instants: Real, pin: Real
    ) -> tuple[Rest, Converted]:
        """Return what is left over, and the results of what is complete.

        Parameters
        ----------
        whole : conversions not yet used, those of earlier calls first
        start, instants, pin : of the looks that are new
        """
        adc, looks = self.adc, self.adc.looks
        assert adc.averaging is not None
        earlier = len(whole.codes) - len(pin)
        count = len(whole.codes) // looks
        used = count * looks
        codes = adc.averaging.of_sums(np.sum(whole.codes[:used].reshape(count, looks), axis=1))
        taken = used if adc.dither is not None else 0
        dither = np.sum(whole.dither[:taken].reshape(-1, looks), axis=1) / looks
        flags = np.logical_or.reduce(whole.overrange[:used].reshape(count, looks), axis=1)
        newest = np.arange(1, count + 1) * looks - 1 - earlier
        rest = Rest(whole.codes[used:], whole.dither[taken:], whole.overrange[used:])
        read, first = self._read(codes, dither), (start - earlier) // looks
        return rest, Converted(first, instants[newest], pin[newest], codes, read, flags)

    def _read(self, codes: Codes, dither: Real) -> Real:
        """Return what firmware reads: codes, less the dither where it is taken off again."""
        voltage = read_back(self.adc, codes)
        if self.adc.dither is None or not self.adc.dither.subtractive:
            return voltage
        return np.asarray(voltage - self.adc.core_lsb * dither)
