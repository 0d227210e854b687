"""How far the codes lie from what they stand for."""

from __future__ import annotations

from typing import Literal, Self

from pydantic import Field, model_validator

from frontend_sim.quantities import PositiveLimit, Ratio, Voltage
from frontend_sim.scenario.checks.alias_error import QUANTITY, ErrorQuantity
from frontend_sim.scenario.checks.base import CodeCheck
from frontend_sim.scenario.rules import fault


class TotalErrorCheck(CodeCheck):
    """The codes read back lie within a limit of gain · quantity + offset, at every conversion."""

    kind: Literal["total-error"] = "total-error"
    at_most: PositiveLimit = Field(
        description="largest error, referred to the pin; a share is one of the range"
    )
    quantity: ErrorQuantity = Field(default="peak", description=QUANTITY)
    gain: Ratio | None = Field(
        default=None,
        description="volts at the pin for one SI unit of the quantity, as firmware takes it; left "
        "out, the gain of the chain's nominal parts at zero frequency",
    )
    offset: Voltage | None = Field(
        default=None,
        description="voltage at the pin that firmware takes for zero; left out, 0 V, or, behind a "
        "sensor, what its nominal parts give",
    )
    reads: Literal["line", "curve"] = Field(
        default="line",
        description="what firmware takes the quantity from: the straight line of gain and offset, "
        "or the sensor's own nominal curve",
    )
    band_limited: bool = Field(
        default=False,
        description="whether the codes stand for the stimulus under a perfect band limit at half "
        "the rate, so that what is kept out beyond it is no error",
    )

    @model_validator(mode="after")
    def _line_or_curve(self) -> Self:
        given = [key for key in ("gain", "offset") if getattr(self, key) is not None]
        if self.reads == "curve" and given:
            raise fault(given[:1], 'belongs to a line; leave it out, or take reads = "line"')
        return self

    @model_validator(mode="after")
    def _some_gain(self) -> Self:
        if self.gain == 0.0:
            raise fault(["gain"], "a gain of 0 makes no quantity of a voltage; leave it out")
        return self
