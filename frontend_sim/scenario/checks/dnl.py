"""How unequal codes are."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import PositiveLsb
from frontend_sim.scenario.checks.inl import LinearityCheck


class DnlCheck(LinearityCheck):
    """The differential nonlinearity stays below a limit, to either side."""

    kind: Literal["dnl"] = "dnl"
    at_most: PositiveLsb = Field(description="largest distance of a code's width from one LSB")
