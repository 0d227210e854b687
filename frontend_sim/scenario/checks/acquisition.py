"""How well the sampling capacitor settles."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import PositiveLsb
from frontend_sim.scenario.checks.base import CodeCheck


class AcquisitionCheck(CodeCheck):
    """What the sampling capacitor holds is near enough to the voltage of the pin without a load."""

    kind: Literal["acquisition"] = "acquisition"
    at_most: PositiveLsb = Field(default=0.5, description="largest error of acquisition")
    of: Literal["run", "step", "steady"] = Field(
        default="run",
        description="run: at the conversions of the run; step: what one acquisition leaves of the "
        "largest step within the range; steady: for inputs that rest at the ends of the range",
    )
