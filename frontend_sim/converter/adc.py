"""The sampling converter: it looks at an instant, and rounds what it sees."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal, Self

import numpy as np
from pydantic import Field, model_validator

from frontend_sim.converter.averaging import Averaging
from frontend_sim.converter.base import MOST_DEVIATIONS, Converter
from frontend_sim.converter.dither import Dither
from frontend_sim.converter.input_network import InputNetwork
from frontend_sim.converter.pattern import LookPattern
from frontend_sim.quantities import REFERENCE_TEMPERATURE, TIME, Frequency, as_text
from frontend_sim.values import OPTIONAL_KIND, Value

if TYPE_CHECKING:
    from frontend_sim.converter.digitizer import Digitizer

MOST_RESULT_BITS = 32
"""Bits of the widest averaged result."""


class _Rate(Value):
    """The key that stands before all those that other converters have too."""

    rate: Frequency = Field(description="codes per second: conversions, or averages of several")


class Adc(Converter, _Rate):
    """When the converter looks, and how it rounds what it sees.

    t[k] = first + k / (rate (1 + rate_error)) + aperture_delay + aperture_jitter · normal[k]
    + wander(t); LSB = (high - low) / 2^bits
    """

    kind: Literal["sampling"] = Field(default="sampling", json_schema_extra=OPTIONAL_KIND)
    averaging: Averaging | None = Field(
        default=None, description="several conversions for each result; left out, one"
    )
    dither: Dither | None = Field(
        default=None, description="noise added before the quantizer; left out, none"
    )

    input: InputNetwork | None = Field(
        default=None,
        description="switch and sampling capacitor at the pin; left out, the converter sees the "
        "pin itself and does not load it",
    )

    @model_validator(mode="after")
    def _averaging_fits(self) -> Self:
        averaging = self.averaging
        if averaging is not None and averaging.interval is not None:
            longest = 1.0 / (self.rate * averaging.count)
            if averaging.interval > longest * (1.0 + 1e-9):
                raise ValueError(
                    f"averaging.interval {averaging.interval:g} s is too long: {averaging.count} "
                    f"conversions fit into one period of the rate at intervals of up to "
                    f"{longest:g} s; lower rate or averaging.count"
                )
        width = self.highest_code - self.lowest_code
        if width >= 1 << MOST_RESULT_BITS:
            raise ValueError(
                f"a sum of {averaging.count if averaging else 1} codes of {self.bits} bits needs "
                f"{width.bit_length()} bits; shift it so far to the right that at most "
                f"{MOST_RESULT_BITS} are left"
            )
        if averaging is not None and width < 1:
            raise ValueError(f"averaging.shift of {averaging.shift} leaves no bit of a result")
        return self

    @model_validator(mode="after")
    def _dither_fits(self) -> Self:
        if self.dither is not None and self.dither.width > 2.0 ** (self.bits - 1):
            raise ValueError(
                f"dither.width of {self.dither.width:g} LSB is more than half of the range, "
                f"{2.0 ** (self.bits - 1):g} LSB"
            )
        return self

    @model_validator(mode="after")
    def _instants_keep_their_order(self) -> Self:
        self._refuse_disorder("the conversion period" if self.averaging is None else "the interval")
        return self

    @model_validator(mode="after")
    def _acquisition_fits(self) -> Self:
        if self.input is None:
            return self
        closest = self.pattern.closest
        # Two neighbours may each be off by several standard deviations.
        moved = MOST_DEVIATIONS * self.aperture_jitter
        if self.wander is not None:
            moved += MOST_DEVIATIONS * self.wander.change(closest)
        if not self.input.acquisition_time < closest - moved:
            less = f", less {as_text(moved, TIME, 3)} for jitter and wander" if moved else ""
            raise ValueError(
                f"input.acquisition_time {as_text(self.input.acquisition_time, TIME, 6)} must be "
                f"shorter than the interval between conversions, {as_text(closest, TIME, 6)}{less}"
                ": the switch opens before it closes again; shorten it, or lower the rate"
            )
        return self

    @property
    def looks(self) -> int:
        """Conversions for each result."""
        return 1 if self.averaging is None else self.averaging.count

    @property
    def pattern(self) -> LookPattern:
        """When the converter looks at its pin: evenly, or in a burst for each result."""
        interval = self.averaging.interval if self.averaging is not None else None
        if interval is None:
            return LookPattern(self.first, self.true_rate * self.looks)
        return LookPattern(self.first, self.true_rate, self.looks, interval / self.tempo)

    @property
    def true_rate(self) -> float:
        """Results per second, by a right clock [Hz]."""
        return self.rate * self.tempo

    def last_look(self, code: int) -> int:
        """Return the number of the conversion that completes a result."""
        return (code + 1) * self.looks - 1

    def digitizer(self, seed: int, temperature: float = REFERENCE_TEMPERATURE) -> Digitizer:
        """Return the converter ready to run, see ``Converter.digitizer``."""
        from frontend_sim.converter.sampling_digitizer import SamplingDigitizer

        return SamplingDigitizer.of(self, seed, temperature)

    @property
    def lsb(self) -> float:
        """Width of one code of the result [V]."""
        return self.core_lsb if self.averaging is None else self.core_lsb / self.averaging.scale

    @property
    def lowest_code(self) -> int:
        """Lowest code of a result."""
        return self._result_of(self.core_lowest_code)

    @property
    def highest_code(self) -> int:
        """Highest code of a result."""
        return self._result_of(self.core_highest_code)

    @property
    def code_at_low(self) -> float:
        """Code, also between whole numbers, that stands for ``low``."""
        lowest = self.core_lowest_code
        return lowest if self.averaging is None else lowest * self.averaging.scale

    def _result_of(self, code: int) -> int:
        """Return the result of conversions that all give one code."""
        if self.averaging is None:
            return code
        return int(self.averaging.of_sums(np.array(code * self.averaging.count)))
