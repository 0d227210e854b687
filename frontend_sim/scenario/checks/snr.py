"""Signal to noise of a tone."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import Decibel
from frontend_sim.scenario.checks.tone import ToneCheck


class SnrCheck(ToneCheck):
    """The tone stands far enough above the noise, harmonics left out."""

    kind: Literal["snr"] = "snr"
    at_least: Decibel = Field(description="least signal to noise")
