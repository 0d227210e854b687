"""What the named filter families have in common: order, response and corner frequencies."""

from __future__ import annotations

from abc import abstractmethod
from typing import Annotated, Self

from pydantic import Field, model_validator

from frontend_sim.analog.block import Block
from frontend_sim.analog.prototypes import Prototype, Response, filter_blocks
from frontend_sim.analog.stages.base import AnyUnitStage
from frontend_sim.quantities import PartFrequency

Order = Annotated[int, Field(ge=1, le=12, strict=True)]


class Filter(AnyUnitStage):
    """A filter of a named family, given by its low-pass prototype."""

    order: Order = Field(
        description="order of the low-pass prototype, 1 to 12; a band response has twice as many "
        "poles"
    )
    response: Response = Field(default="low-pass", description="what the filter passes")
    corner: PartFrequency | None = Field(
        default=None, description="corner frequency of a low-pass or high-pass response"
    )
    lower_corner: PartFrequency | None = Field(
        default=None, description="lower corner frequency of a band response"
    )
    upper_corner: PartFrequency | None = Field(
        default=None, description="upper corner frequency of a band response"
    )

    @model_validator(mode="after")
    def _corners_suit_the_response(self) -> Self:
        band = self.response in ("band-pass", "band-stop")
        one = self.corner is not None
        two = (self.lower_corner is not None, self.upper_corner is not None)
        if band and (one or not all(two)):
            raise ValueError(f"a {self.response} response needs lower_corner and upper_corner")
        if not band and (not one or any(two)):
            raise ValueError(f"a {self.response} response needs corner alone")
        lower, upper = self._corners()
        if band and not lower < upper:
            raise ValueError(f"lower_corner {lower:g} Hz must lie below upper_corner {upper:g} Hz")
        return self

    def _corners(self) -> tuple[float, float]:
        if self.corner is not None:
            return self.corner, self.corner
        assert self.lower_corner is not None
        assert self.upper_corner is not None
        return self.lower_corner, self.upper_corner

    @abstractmethod
    def prototype(self) -> Prototype:
        """Return the low-pass prototype with its corner at 1 rad/s."""

    def blocks(self) -> tuple[Block, ...]:
        """Return the cascade of first- and second-order blocks."""
        return filter_blocks(self.prototype(), self.response, *self._corners())
