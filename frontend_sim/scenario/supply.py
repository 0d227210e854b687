"""The source that the excitation of a sensor and the converter's reference have in common."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Annotated, Self

from pydantic import Field, model_validator

from frontend_sim.quantities import (
    REFERENCE_TEMPERATURE,
    Bounds,
    Fraction,
    Frequency,
    Reads,
    Time,
)
from frontend_sim.quantities.dimension import DRIFT
from frontend_sim.stimulus.supply_drive import SupplyDrive
from frontend_sim.values import Value

if TYPE_CHECKING:
    from frontend_sim.analog.stages.base import Stage

LEAST, MOST = 0.5, 2.0
"""A supply that goes beyond these factors of its nominal voltage is none."""


class Supply(Value):
    """A supply off its nominal voltage, by the factor

        e(t) = 1 + error + drift (temperature - 25 degC) + step [t >= at] + ripple sin(2 pi f t).

    A bridge with ``ratiometric = true`` is excited by it, through its excitation_time_constant; a
    converter whose reference has ``ratiometric = true`` compares with it, through its
    filter_time_constant. What both see alike cancels. Constant parts have been there for ever.
    """

    error: Fraction = Field(default=0.0, description="initial error, as a share")
    drift: Annotated[float, Reads(DRIFT, Bounds())] = Field(
        default=0.0, description="change with temperature, from 25 degC on"
    )
    step: Fraction = Field(default=0.0, description="step, as a share of the nominal voltage")
    at: Time = Field(default=0.0, description="instant of the step")
    ripple: Fraction = Field(default=0.0, description="peak of a sine on it, as a share")
    ripple_frequency: Frequency | None = Field(default=None, description="frequency of the ripple")

    @model_validator(mode="after")
    def _sane(self) -> Self:
        if (self.ripple != 0.0) != (self.ripple_frequency is not None):
            raise ValueError("give ripple and ripple_frequency together, or neither")
        self.refuse_far(REFERENCE_TEMPERATURE)
        return self

    def refuse_far(self, temperature: float) -> None:
        """Raise ValueError if the supply goes far from its nominal voltage at a temperature [K]."""
        beside = abs(self.ripple)
        first = 1.0 + self.error + self.drift * (temperature - REFERENCE_TEMPERATURE)
        for level in (first, first + self.step):
            if not LEAST < level - beside <= level + beside < MOST:
                raise ValueError(
                    f"the supply reaches {level - beside:g} or {level + beside:g} times its "
                    f"nominal voltage; it must stay between {LEAST:g} and {MOST:g} times"
                )

    def behind(self, constant: float, temperature: float, scale: float = 1.0) -> SupplyDrive:
        """Return e behind an RC filter.

        Parameters
        ----------
        constant : R · C, 0 for no filter [s];  temperature : of the circuit [K]
        scale : factor of all
        """
        level = 1.0 + self.error + self.drift * (temperature - REFERENCE_TEMPERATURE)
        frequency = self.ripple_frequency or 1.0
        return SupplyDrive(level, self.step, self.at, self.ripple, frequency, constant, scale)


def supply_faults(supply: Supply | None, stages: Sequence[Stage], referred: bool) -> str | None:
    """Return what is wrong with the supply of a scenario, or None.

    Parameters
    ----------
    stages : of the chain;  referred : whether the converter's reference is ratiometric
    """
    excited = [n for n, stage in enumerate(stages, 1) if getattr(stage, "ratiometric", False)]
    if supply is None:
        return None
    if excited and excited != [1]:
        return (
            "a supply moves a ratiometric bridge only where it is the first stage of the chain; "
            f"here stands one at place {excited[-1]}: put it first, and what comes before it into "
            "the stimulus, or leave environment.supply out"
        )
    if not excited and not referred:
        return (
            "nothing in the scenario takes its voltage from the supply; set ratiometric = true in "
            "a resistive-bridge or in adc.reference, or leave environment.supply out"
        )
    return None
