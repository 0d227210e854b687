"""Several conversions that the converter itself makes one of."""

from __future__ import annotations

from typing import Annotated, Literal

import numpy as np
from numpy.typing import NDArray
from pydantic import Field

from frontend_sim.quantities import PositiveTime
from frontend_sim.values import Value

Codes = NDArray[np.int64]


class Averaging(Value):
    """The converter adds up ``count`` codes and shifts the sum to the right,

    code = floor((sum of codes + round) / 2^shift), round = 2^(shift - 1) for nearest, 0 for down.
    """

    count: Annotated[int, Field(ge=2, le=65536, strict=True)] = Field(
        description="conversions in one result"
    )
    shift: Annotated[int, Field(ge=0, le=16, strict=True)] = Field(
        default=0, description="bits by which the sum is shifted to the right"
    )
    rounding: Literal["down", "nearest"] = Field(
        default="down",
        description="down: the bits shifted out are lost, half an LSB on average; nearest: half a "
        "code is added first",
    )
    interval: PositiveTime | None = Field(
        default=None,
        description="between the conversions of one result; left out, they are spread evenly",
    )

    @property
    def scale(self) -> float:
        """Codes of a result for one code of a conversion, count / 2^shift."""
        return self.count / 2.0**self.shift

    def of_sums(self, totals: Codes) -> Codes:
        """Return the results of sums of ``count`` codes each, of their shape."""
        half = (1 << self.shift) >> 1 if self.rounding == "nearest" else 0
        return np.asarray((totals + half) >> self.shift)
