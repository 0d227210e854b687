"""A stage given by the polynomials of its transfer function."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import Field, model_validator

from frontend_sim.analog.block import Block
from frontend_sim.analog.factors import cascade, roots_of
from frontend_sim.analog.stages.base import AnyUnitStage
from frontend_sim.errors import ModelError

Coefficient = Annotated[float, Field(strict=True)]
Coefficients = Annotated[tuple[Coefficient, ...], Field(min_length=1, max_length=21)]


class Polynomial(AnyUnitStage):
    """H(s) = numerator(s) / denominator(s), coefficients of s, the highest power first.

    Polynomials above the second order are factored before use, since a long polynomial loses its
    roots to rounding; one that cannot be factored faithfully is refused.
    """

    kind: Literal["polynomial"] = "polynomial"
    numerator: Coefficients = Field(
        description="coefficients of s, highest power first, s in rad/s"
    )
    denominator: Coefficients = Field(
        description="coefficients of s, highest power first, s in rad/s"
    )

    @model_validator(mode="after")
    def _realizable(self) -> Self:
        if not any(self.denominator):
            raise ValueError("the denominator is zero")
        try:
            self.blocks()
        except ModelError as error:
            raise ValueError(str(error)) from None
        return self

    def blocks(self) -> tuple[Block, ...]:
        """Return the cascade of first- and second-order blocks."""
        if not any(self.numerator):
            return cascade([], [], 0.0)
        leading = next(value for value in self.numerator if value)
        lowest = next(value for value in self.denominator if value)
        return cascade(roots_of(self.numerator), roots_of(self.denominator), leading / lowest)
