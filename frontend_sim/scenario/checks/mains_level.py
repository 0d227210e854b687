"""Mains hum in the codes."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from frontend_sim.quantities import Frequency, PositiveLimit, Share
from frontend_sim.scenario.checks.base import CodeCheck


class MainsLevelCheck(CodeCheck):
    """Mains and its harmonics in the codes stay below a limit, each of them."""

    kind: Literal["mains-level"] = "mains-level"
    at_most: PositiveLimit = Field(
        description="largest peak value of each tone; a share is one of the range"
    )
    frequency: Frequency = Field(default=50.0, description="nominal frequency of the mains")
    deviation: Share = Field(
        default=0.01, description="how far the true frequency may lie from it, as a share"
    )
    harmonics: Annotated[int, Field(ge=1, le=1000, strict=True)] = Field(
        default=1, description="how many tones are looked at, the fundamental included"
    )
