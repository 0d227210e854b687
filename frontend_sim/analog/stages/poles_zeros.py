"""A stage given by its poles, zeros and gain."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import BeforeValidator, Field, model_validator

from frontend_sim.analog.block import Block
from frontend_sim.analog.factors import cascade
from frontend_sim.analog.stages.base import AnyUnitStage
from frontend_sim.errors import ModelError
from frontend_sim.quantities import Factor


def _pair(value: object) -> object:
    """Accept a bare number for a real root."""
    if isinstance(value, (int, float)) and not isinstance(value, bool):
        return (value, 0.0)
    if isinstance(value, complex):
        return (value.real, value.imag)
    return value


Part = Annotated[float, Field(strict=True)]

Root = Annotated[
    tuple[Part, Part],
    BeforeValidator(_pair, json_schema_input_type=float | tuple[float, float]),
]


class PolesZeros(AnyUnitStage):
    """H(s) = gain · prod(s - zero) / prod(s - pole).

    A root is a number, or ``[real, imaginary]`` with its conjugate listed too, in rad/s. Equal
    poles and poles at the origin are allowed, poles in the right half plane are not.
    """

    kind: Literal["poles-zeros"] = "poles-zeros"
    poles: tuple[Root, ...] = Field(
        default=(),
        max_length=40,
        description="poles: a number, or [real, imaginary]",
        json_schema_extra={"unit": "rad/s"},
    )
    zeros: tuple[Root, ...] = Field(
        default=(),
        max_length=40,
        description="zeros: a number, or [real, imaginary]",
        json_schema_extra={"unit": "rad/s"},
    )
    gain: Factor = Field(default=1.0, description="multiplies the products of the differences")

    @model_validator(mode="after")
    def _realizable(self) -> Self:
        try:
            self.blocks()
        except ModelError as error:
            raise ValueError(str(error)) from None
        return self

    def blocks(self) -> tuple[Block, ...]:
        """Return the cascade of first- and second-order blocks."""
        zeros = [complex(*root) for root in self.zeros]
        return cascade(zeros, [complex(*root) for root in self.poles], self.gain)
