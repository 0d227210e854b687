"""What every converter has in common: its range, its codes, its errors."""

from __future__ import annotations

import math
from abc import abstractmethod
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Literal, Self

import numpy as np
from pydantic import Field, model_validator

from frontend_sim.converter.nonlinearity import Nonlinearity
from frontend_sim.converter.reference import Reference
from frontend_sim.converter.wander import Wander
from frontend_sim.quantities import (
    REFERENCE_TEMPERATURE,
    Fraction,
    NotNegativeVoltage,
    Time,
    Voltage,
)
from frontend_sim.values import Value

if TYPE_CHECKING:
    from frontend_sim.converter.digitizer import Digitizer
    from frontend_sim.converter.pattern import LookPattern

CodeFormat = Literal["straight-binary", "offset-binary", "twos-complement"]
Rounding = Literal["nearest", "down"]

MOST_JITTER = 0.05
"""Largest rms jitter as a share of the shortest interval between looks."""

MOST_WANDER = 0.01
"""Largest rms change of the wander from one look to the next, as a share of the same."""

MOST_DEVIATIONS = 12.0
"""Standard deviations of jitter and of wander that are left room for."""

MOST_RATE_ERROR = 0.1
"""A clock that is further off its rate is a wrong rate."""

FEWEST_ROUNDINGS = 16.0
"""Least width of a code in units of the last place of the range's ends."""

ROUNDINGS = 4.0 * math.ulp(1.0)
"""An instant that is nearer to the end of a run than this share of its size lies at the end."""


class Converter(Value):
    """Range and codes of a converter, its clock's errors and its static errors.

    LSB = (high - low) / 2^bits
    """

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
    first: Time = Field(
        default=0.0, description="instant of the first conversion, or of the start of a modulator"
    )
    rate_error: Fraction = Field(
        default=0.0, description="the clock runs 1 + rate_error times as fast as its nominal rate"
    )
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
    wander: Wander | None = Field(default=None, description="slow wander of the clock")
    reference: Reference | None = Field(
        default=None, description="errors of the reference voltage; left out, there are none"
    )
    nonlinearity: Nonlinearity | None = Field(
        default=None, description="how codes lie off the straight line; left out, they do not"
    )

    @model_validator(mode="after")
    def _possible(self) -> Self:
        if not self.low < self.high:
            raise ValueError(
                f"the range is reversed or empty: low {self.low:g} V must lie below high "
                f"{self.high:g} V"
            )
        furthest = max(abs(self.low), abs(self.high))
        if self.core_lsb < FEWEST_ROUNDINGS * math.ulp(furthest):
            raise ValueError(
                f"a code of {self.core_lsb:g} V is lost in the rounding of {furthest:g} V; take "
                "fewer bits, or put the range nearer to zero"
            )
        if self.code == "offset-binary" and not self.low < 0.0 < self.high:
            raise ValueError(
                "offset-binary codes need a range with zero inside; take straight-binary, or a "
                "low below 0 V"
            )
        if self.gain_error <= -1.0:
            raise ValueError("gain_error must be above -100 %")
        if abs(self.rate_error) > MOST_RATE_ERROR:
            raise ValueError(f"rate_error must be at most {MOST_RATE_ERROR:.0%} to either side")
        if self.reference is not None:
            self.reference.refuse_range(self.low, self.high)
        if self.nonlinearity is not None:
            self.nonlinearity.refuse_bits(self.bits)
        return self

    def _refuse_disorder(self, interval: str) -> None:
        """Raise ValueError if looks could change their order; ``interval`` names the shortest."""
        closest = self.pattern.closest
        if self.aperture_jitter > MOST_JITTER * closest:
            raise ValueError(
                f"aperture_jitter {self.aperture_jitter:g} s must be at most {MOST_JITTER:.0%} of "
                f"{interval}, {MOST_JITTER * closest:g} s"
            )
        change = self.wander.change(closest) if self.wander is not None else 0.0
        if change > MOST_WANDER * closest:
            raise ValueError(
                f"wander changes by {change:.3g} s rms within {interval}; more than "
                f"{MOST_WANDER:.0%} of it, {MOST_WANDER * closest:.3g} s, is no slow wander: lower "
                "wander.rms, or make it slower"
            )

    @property
    @abstractmethod
    def pattern(self) -> LookPattern:
        """When the converter looks at its pin, by its own clock with its rate error."""

    @property
    @abstractmethod
    def true_rate(self) -> float:
        """Codes per second, by a right clock [Hz]."""

    @abstractmethod
    def last_look(self, code: int) -> int:
        """Return the number of the look that completes a code, numbers from 0."""

    def code_count(self, duration: float) -> int:
        """Return the number of codes whose last look is nominally within [0, duration) [s].

        For a converter without averaging these are all k with first + k/rate below the duration.
        """
        position = (duration - self.code_instant(0)) * self.true_rate
        whole = max(abs(position), duration * self.true_rate, 1.0)
        return max(math.ceil(position - ROUNDINGS * whole), 0)

    def code_instant(self, code: int) -> float:
        """Return the nominal instant of the look that completes a code [s]."""
        return float(self.pattern.at(np.array([self.last_look(code)]))[0])

    @abstractmethod
    def digitizer(self, seed: int, temperature: float = REFERENCE_TEMPERATURE) -> Digitizer:
        """Return the converter ready to run.

        Parameters
        ----------
        seed : of everything random in it
        temperature : of the circuit [K]

        Raises
        ------
        InputError
            If a table cannot be read or does not fit, or the reference drifts out of its limits.
        """

    @property
    def latest(self) -> float:
        """How late delay and wander may make a look, the very first one too [s]."""
        wander = 0.0 if self.wander is None else MOST_DEVIATIONS * self.wander.rms
        return self.aperture_delay + wander

    @property
    def look_noise(self) -> float:
        """Rms noise of one look at the input [V]."""
        return self.input_noise

    @property
    def tempo(self) -> float:
        """How fast the clock runs, 1 for a right one [1]."""
        return 1.0 + self.rate_error

    @property
    def code_format(self) -> CodeFormat:
        """How codes are counted, the default filled in."""
        if self.code is not None:
            return self.code
        return "offset-binary" if self.low < 0.0 < self.high else "straight-binary"

    @property
    def core_lsb(self) -> float:
        """Width of one code of the quantizer [V]."""
        return (self.high - self.low) / 2.0**self.bits

    @property
    def core_lowest_code(self) -> int:
        """Code of the quantizer at the lower end of the range."""
        return -(1 << (self.bits - 1)) if self.code_format == "twos-complement" else 0

    @property
    def core_highest_code(self) -> int:
        """Code of the quantizer at the upper end of the range."""
        return self.core_lowest_code + (1 << self.bits) - 1

    @property
    def lsb(self) -> float:
        """Width of one code, as firmware gets it [V]."""
        return self.core_lsb

    @property
    def lowest_code(self) -> int:
        """Lowest code that firmware can get."""
        return self.core_lowest_code

    @property
    def highest_code(self) -> int:
        """Highest code that firmware can get."""
        return self.core_highest_code

    @property
    def code_at_low(self) -> float:
        """Code, also between whole numbers, that stands for ``low``: where reading back starts."""
        return self.lowest_code

    @property
    def full_scale_codes(self) -> float:
        """Width of the range in codes, as firmware gets them [counts]."""
        return (self.high - self.low) / self.lsb

    def files(self) -> tuple[Path, ...]:
        """Return the files that the converter is read from."""
        table = self.nonlinearity.table if self.nonlinearity is not None else None
        return () if table is None else (table,)
