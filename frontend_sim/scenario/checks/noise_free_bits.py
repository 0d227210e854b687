"""Bits that noise keeps still."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import Bits
from frontend_sim.scenario.checks.base import CodeCheck
from frontend_sim.scenario.checks.noise import BASIS, NoiseBasis


class NoiseFreeBitsCheck(CodeCheck):
    """Enough of the code's own bits stand still: log2( range / (6.6 rms noise) )."""

    kind: Literal["noise-free-bits"] = "noise-free-bits"
    at_least: Bits = Field(description="fewest noise-free bits")
    basis: NoiseBasis = Field(default="budget", description=BASIS)
