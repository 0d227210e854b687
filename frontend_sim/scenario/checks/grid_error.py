"""How far a discrete model lies from the exact answer."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import PositiveLsb
from frontend_sim.scenario.checks.base import Check


class GridErrorCheck(Check):
    """The discrete model of the run, or the grid of its limiters, is near enough to exact."""

    kind: Literal["grid-error"] = "grid-error"
    at_most: PositiveLsb = Field(
        description="largest distance from the exact answer at any conversion"
    )
