"""How much noise there is."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import PositiveLimit
from frontend_sim.scenario.checks.base import CodeCheck

NoiseBasis = Literal["budget", "run"]
NoiseQuantity = Literal["rms", "peak-to-peak"]

BASIS = (
    "where the noise is taken from: the budget of the circuit (sources in the chain and the "
    "converter's input noise, without rounding), or the run (codes read back less the pin, with "
    "rounding)"
)


class NoiseCheck(CodeCheck):
    """The noise stays below a limit."""

    kind: Literal["noise"] = "noise"
    at_most: PositiveLimit = Field(description="largest noise; a share is one of the range")
    quantity: NoiseQuantity = Field(
        default="rms",
        description="rms, or peak-to-peak: 6.6 times the rms of a budget, the largest less the "
        "smallest of a run",
    )
    basis: NoiseBasis = Field(default="budget", description=BASIS)
