"""The analog-to-digital converter as the scenario describes it."""

from __future__ import annotations

import math
from typing import Annotated, Literal, Self

from pydantic import Field, model_validator

from frontend_sim.quantities import (
    Fraction,
    Frequency,
    NotNegativeVoltage,
    Time,
    Voltage,
)
from frontend_sim.values import Value

CodeFormat = Literal["straight-binary", "offset-binary", "twos-complement"]
Rounding = Literal["nearest", "down"]

MOST_JITTER = 0.05
"""Largest rms jitter as a share of the conversion period; instants then stay in order."""

FEWEST_ROUNDINGS = 16.0
"""Least width of a code in units of the last place of the range's ends."""


class Adc(Value):
    """When the converter looks, and how it rounds what it sees.

    t[k] = first + k / rate + aperture_delay + aperture_jitter · normal[k]
    LSB = (high - low) / 2^bits
    """

    rate: Frequency = Field(description="conversions per second")
    bits: Annotated[int, Field(ge=4, le=32, strict=True)] = Field(description="number of bits")
    low: Voltage = Field(default=0.0, description="voltage at the lower end of the range")
    high: Voltage = Field(description="voltage at the upper end of the range")
    code: CodeFormat | None = Field(
        default=None,
        description="how codes are counted; left out, straight-binary for a range from zero up "
        "and offset-binary for one that reaches below zero",
    )
    rounding: Rounding = Field(
        default="nearest",
        description="nearest: code edges half an LSB beside the code's voltage; down: at it",
    )
    first: Time = Field(default=0.0, description="instant of the first conversion")
    aperture_delay: Time = Field(
        default=0.0, description="from the nominal instant to the moment of sampling"
    )
    aperture_jitter: Time = Field(default=0.0, description="rms jitter of that moment")
    offset: Voltage = Field(default=0.0, description="offset error, added to the input")
    gain_error: Fraction = Field(
        default=0.0,
        description="gain error: the input counts 1 + gain_error times, from zero volts",
    )
    input_noise: NotNegativeVoltage = Field(
        default=0.0, description="rms noise of a conversion, referred to the input"
    )

    @model_validator(mode="after")
    def _possible(self) -> Self:
        if not self.low < self.high:
            raise ValueError(
                f"the range is reversed or empty: low {self.low:g} V must lie below high "
                f"{self.high:g} V"
            )
        furthest = max(abs(self.low), abs(self.high))
        if self.lsb < FEWEST_ROUNDINGS * math.ulp(furthest):
            raise ValueError(
                f"a code of {self.lsb:g} V is lost in the rounding of {furthest:g} V; take fewer "
                "bits, or put the range nearer to zero"
            )
        if self.code == "offset-binary" and not self.low < 0.0 < self.high:
            raise ValueError(
                "offset-binary codes need a range with zero inside; take straight-binary, or a "
                "low below 0 V"
            )
        if self.aperture_jitter > MOST_JITTER / self.rate:
            raise ValueError(
                f"aperture_jitter {self.aperture_jitter:g} s must be at most {MOST_JITTER:.0%} of "
                f"the conversion period, {MOST_JITTER / self.rate:g} s"
            )
        if self.gain_error <= -1.0:
            raise ValueError("gain_error must be above -100 %")
        return self

    @property
    def lsb(self) -> float:
        """Width of one code [V]."""
        return (self.high - self.low) / 2.0**self.bits

    @property
    def code_format(self) -> CodeFormat:
        """How codes are counted, the default filled in."""
        if self.code is not None:
            return self.code
        return "offset-binary" if self.low < 0.0 < self.high else "straight-binary"

    @property
    def lowest_code(self) -> int:
        """Code at the lower end of the range."""
        return -(1 << (self.bits - 1)) if self.code_format == "twos-complement" else 0

    @property
    def highest_code(self) -> int:
        """Code at the upper end of the range."""
        return self.lowest_code + (1 << self.bits) - 1
