"""How well the chain keeps out what would fold."""

from __future__ import annotations

from typing import Literal, Self

from pydantic import Field, model_validator

from frontend_sim.quantities import Frequency, PositiveDecibel
from frontend_sim.scenario.checks.base import Check
from frontend_sim.scenario.checks.rejection import AGAINST, Reference
from frontend_sim.scenario.rules import fault


class AliasAttenuationCheck(Check):
    """What the conversion rate would fold down is attenuated by enough.

    With neither band nor frequency everything from half the conversion rate on counts.
    """

    kind: Literal["alias-attenuation"] = "alias-attenuation"
    at_least: PositiveDecibel = Field(description="least attenuation")
    band: Frequency | None = Field(
        default=None,
        description="highest frequency of interest: what folds below it, from the conversion rate "
        "less the band on, is looked at",
    )
    frequency: Frequency | None = Field(
        default=None,
        description="an interfering frequency above half the conversion rate, looked at alone",
    )
    against: Reference = Field(default="largest", description=AGAINST)

    @model_validator(mode="after")
    def _one_question(self) -> Self:
        if self.band is not None and self.frequency is not None:
            raise fault(
                ["frequency"], "give band or frequency, not both; write a check for each of them"
            )
        return self
