"""The voltage that a converter compares its input with."""

from __future__ import annotations

from typing import Annotated, Self

import numpy as np
from numpy.typing import NDArray
from pydantic import Field, StrictBool, model_validator

from frontend_sim.converter.gauss_markov import gauss_markov
from frontend_sim.converter.pattern import LookPattern
from frontend_sim.errors import ModelError
from frontend_sim.quantities import (
    REFERENCE_TEMPERATURE,
    TEMPERATURE,
    Bounds,
    Fraction,
    NotNegativeFraction,
    PositiveVoltage,
    Reads,
    Time,
    as_text,
)
from frontend_sim.quantities.dimension import DRIFT
from frontend_sim.randomness import normal, stream
from frontend_sim.values import Value

Real = NDArray[np.float64]

Drift = Annotated[float, Reads(DRIFT, Bounds())]

LEAST, MOST = 0.5, 2.0
"""A reference that is further off its nominal voltage than these factors is no reference."""

MOST_NOISE = 0.02
"""Largest rms noise as a share of the reference, far above that of any real one."""


class Reference(Value):
    """A reference off its nominal value: the whole range scales with it, about zero volts,

    r = 1 + error + drift (temperature - 298.15 K) + noise · n, and the converter sees pin / r.
    """

    voltage: PositiveVoltage | None = Field(
        default=None,
        description="nominal voltage; the range must lie within minus and plus that. Left out, it "
        "is not checked",
    )
    error: Fraction = Field(default=0.0, description="initial error, as a share")
    drift: Drift = Field(default=0.0, description="change with temperature, from 25 degC on")
    noise: NotNegativeFraction = Field(
        default=0.0, description="rms noise at the converter, behind the filter, as a share"
    )
    filter_time_constant: Time = Field(
        default=0.0,
        description="R times C of the filter in front of the reference pin: noise is correlated "
        "over that time; 0, or left out, it is white from one look at the input to the next",
    )
    ratiometric: StrictBool = Field(
        default=False,
        description="true where the reference is environment.supply, behind the same filter; its "
        "own error, drift and noise come on top",
    )

    @model_validator(mode="after")
    def _sane(self) -> Self:
        if not LEAST < 1.0 + self.error < MOST:
            raise ValueError("error must lie between -50 % and 100 %")
        if self.noise > MOST_NOISE:
            raise ValueError(f"noise must be at most {MOST_NOISE:.0%} of the reference")
        return self

    def refuse_range(self, low: float, high: float) -> None:
        """Raise ValueError if the reference cannot give a range [V]."""
        reach = max(abs(low), abs(high))
        if self.voltage is not None and reach > self.voltage * (1.0 + 1e-12):
            raise ValueError(
                f"the range from {low:g} V to {high:g} V reaches beyond what a reference of "
                f"{self.voltage:g} V can give, {-self.voltage:g} V to {self.voltage:g} V; narrow "
                "low and high, or raise reference.voltage"
            )

    def level(self, temperature: float = REFERENCE_TEMPERATURE) -> float:
        """Return r without its noise at a temperature [K].

        Raises
        ------
        ModelError
            If the drift takes it out of all reason.
        """
        found = 1.0 + self.error + self.drift * (temperature - REFERENCE_TEMPERATURE)
        if not LEAST < found < MOST:
            raise ModelError(
                f"the reference drifts to {found:.4g} times its nominal voltage at "
                f"{as_text(temperature, TEMPERATURE, 6)}; lower reference.drift, "
                f"{self.drift * 1e6:g} ppm/K, or take a temperature nearer to 25 degC"
            )
        return found

    def factor(
        self,
        pattern: LookPattern,
        start: int,
        stop: int,
        seed: int,
        temperature: float = REFERENCE_TEMPERATURE,
    ) -> Real:
        """Return r at looks start to stop - 1, shape (stop - start,) [1]. Raises as ``level``.

        The noise of a look depends on the seed and its number alone.
        """
        level = self.level(temperature)
        if self.noise == 0.0:
            return np.full(max(stop - start, 0), level)
        if self.filter_time_constant == 0.0:
            noise = normal(stream(seed, "reference noise"), start, stop)
        else:
            constant = self.filter_time_constant
            noise = gauss_markov(seed, "filtered reference noise", pattern, constant, start, stop)
        return np.asarray(level + self.noise * noise)
