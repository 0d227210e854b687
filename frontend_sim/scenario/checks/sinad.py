"""Signal to noise and distortion of a tone."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import Decibel
from frontend_sim.scenario.checks.tone import ToneCheck


class SinadCheck(ToneCheck):
    """The tone stands far enough above noise and distortion together."""

    kind: Literal["sinad"] = "sinad"
    at_least: Decibel = Field(description="least signal to noise and distortion")
