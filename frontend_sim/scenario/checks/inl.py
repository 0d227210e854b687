"""How far code levels lie off a straight line."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import PositiveLsb
from frontend_sim.scenario.checks.base import CodeCheck

BY = (
    "signal whose codes are counted: a sine beyond both ends of the range, or a slow ramp or "
    "triangle; left out, as the stimulus is"
)


class LinearityCheck(CodeCheck):
    """A check on the levels at which codes change, counted in the codes of the run."""

    by: Literal["sine", "ramp"] | None = Field(default=None, description=BY)


class InlCheck(LinearityCheck):
    """The integral nonlinearity stays below a limit, to either side."""

    kind: Literal["inl"] = "inl"
    at_most: PositiveLsb = Field(description="largest distance from the line")
    line: Literal["end-point", "best-fit"] = Field(
        default="end-point",
        description="line that counts: through the first and the last level, or the nearest to all",
    )
