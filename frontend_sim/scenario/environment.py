"""Where the circuit stands."""

from __future__ import annotations

from typing import Self

from pydantic import Field, model_validator

from frontend_sim.quantities import REFERENCE_TEMPERATURE, Temperature
from frontend_sim.scenario.supply import Supply
from frontend_sim.values import Value


class Environment(Value):
    """What surrounds the circuit: it makes thermal noise, and moves parts that drift."""

    temperature: Temperature = Field(
        default=REFERENCE_TEMPERATURE,
        description="temperature of the circuit; at 25 degC parts have their nominal values",
    )
    supply: Supply | None = Field(
        default=None,
        description="source that the excitation of a bridge and the converter's reference share; "
        "left out, it never changes",
    )

    @model_validator(mode="after")
    def _supply_stays_near(self) -> Self:
        if self.supply is not None:
            self.supply.refuse_far(self.temperature)
        return self
