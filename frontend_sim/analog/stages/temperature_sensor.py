"""What sensors of temperature have in common."""

from __future__ import annotations

from pydantic import Field

from frontend_sim.analog.stages.curved_sensor import CurvedSensor
from frontend_sim.quantities import REFERENCE_TEMPERATURE, TEMPERATURE, Temperature, as_text


class TemperatureSensor(CurvedSensor):
    """A sensor whose output is a curve of its temperature."""

    operating_temperature: Temperature = Field(
        default=REFERENCE_TEMPERATURE,
        description="temperature at which inspect and noise take the curve's tangent",
    )

    def units(self) -> tuple[str, str]:
        """Return temperature in, volts out."""
        return ("K", "V")

    def operating_point(self) -> float:
        """Return the operating temperature [K]."""
        return self.operating_temperature

    def shown(self, signal: float) -> str:
        """Return a temperature in degrees."""
        return as_text(signal, TEMPERATURE, 6)
