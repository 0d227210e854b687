"""How much of the codes is folded."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import PositiveLimit
from frontend_sim.scenario.checks.base import CodeCheck, PointCheck

ErrorQuantity = Literal["peak", "rms"]

QUANTITY = "peak: the largest size over the run; rms: the root of the mean square"


class AliasErrorCheck(PointCheck, CodeCheck):
    """What lies above half the rate changes the codes by no more than the limit.

    The codes count against those behind a perfect band limit, before rounding.
    """

    kind: Literal["alias-error"] = "alias-error"
    at_most: PositiveLimit = Field(description="largest error; a share is one of the range")
    quantity: ErrorQuantity = Field(default="peak", description=QUANTITY)
