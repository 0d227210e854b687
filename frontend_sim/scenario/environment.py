"""Where the circuit stands."""

from __future__ import annotations

from pydantic import Field

from frontend_sim.quantities import REFERENCE_TEMPERATURE, Temperature
from frontend_sim.values import Value


class Environment(Value):
    """What surrounds the circuit: it makes thermal noise, and moves parts that drift."""

    temperature: Temperature = Field(
        default=REFERENCE_TEMPERATURE,
        description="temperature of the circuit; at 25 degC parts have their nominal values",
    )
