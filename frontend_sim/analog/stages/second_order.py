"""Second-order section given by its corner and quality factor."""

from __future__ import annotations

import math
from typing import Literal

from pydantic import Field

from frontend_sim.analog.block import Block, second_order
from frontend_sim.analog.factors import cascade
from frontend_sim.analog.stages.base import AnyUnitStage
from frontend_sim.quantities import PartFrequency, PartRatio, PositivePartRatio

SectionResponse = Literal["low-pass", "high-pass", "band-pass", "notch"]


class SecondOrder(AnyUnitStage):
    """Second-order section with w0 = 2 pi corner and quality factor Q

        low-pass   g w0² / (s² + s w0/Q + w0²)      high-pass  g s² / (...)
        band-pass  g s w0/Q / (...)                 notch      g (s² + w0²) / (...)

    Damping ratio 1/(2Q): Q = 0.5 is critically damped, above it overshoots. Source: any control
    textbook, e.g. Ogata, *Modern Control Engineering*.
    """

    kind: Literal["second-order"] = "second-order"
    corner: PartFrequency = Field(description="natural frequency w0 / (2 pi)")
    quality_factor: PositivePartRatio = Field(description="quality factor Q")
    response: SectionResponse = Field(default="low-pass", description="what the section passes")
    gain: PartRatio = Field(default=1.0, description="gain in the pass band")

    def blocks(self) -> tuple[Block, ...]:
        """Return one block of second order, or two of first order up to critical damping."""
        w0 = 2.0 * math.pi * self.corner
        rate = w0 / self.quality_factor
        numerator = {
            "low-pass": (0.0, 0.0, w0 * w0),
            "high-pass": (1.0, 0.0, 0.0),
            "band-pass": (0.0, rate, 0.0),
            "notch": (1.0, 0.0, w0 * w0),
        }[self.response]
        n2, n1, n0 = (self.gain * value for value in numerator)
        if self.quality_factor <= 0.5 and self.response == "low-pass":
            larger = 0.5 * rate + math.sqrt(0.25 * rate * rate - w0 * w0)
            return cascade([], [-w0 * w0 / larger, -larger], n0)
        return (second_order(w0, rate, (n2, n1, n0)),)
