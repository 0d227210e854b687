"""Effective number of bits."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import Bits
from frontend_sim.scenario.checks.tone import ToneCheck


class EffectiveBitsCheck(ToneCheck):
    """Noise and distortion are no more than those of an ideal converter of so many bits."""

    kind: Literal["effective-bits"] = "effective-bits"
    at_least: Bits = Field(description="fewest effective bits")
