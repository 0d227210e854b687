"""Room between the signal and the ends of the range."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import NotNegativeLimit
from frontend_sim.scenario.checks.base import CodeCheck


class HeadroomCheck(CodeCheck):
    """At every conversion the pin keeps a distance from both ends of the converter's range."""

    kind: Literal["headroom"] = "headroom"
    at_least: NotNegativeLimit = Field(
        description="least distance from the nearer end; a share is one of the range"
    )
