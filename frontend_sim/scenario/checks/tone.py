"""What checks on one converted tone have in common."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from frontend_sim.quantities import Frequency
from frontend_sim.scenario.checks.base import CodeCheck

WindowName = Literal["rectangular", "hann", "blackman-harris", "blackman-harris-7", "flat-top"]


class ToneCheck(CodeCheck):
    """A check on the quality of the one tone in the codes."""

    frequency: Frequency | None = Field(
        default=None,
        description="frequency of the tone, roughly; left out, that of the strongest line",
    )
    harmonics: Annotated[int, Field(ge=2, le=1000, strict=True)] = Field(
        default=10, description="order of the highest harmonic that counts as distortion"
    )
    window: WindowName | None = Field(
        default=None, description="window of the spectrum; left out, the sharpest that serves"
    )
