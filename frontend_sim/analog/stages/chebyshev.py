"""Chebyshev filter of type I."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.analog.prototypes import Prototype, chebyshev
from frontend_sim.analog.stages.filters import Filter
from frontend_sim.quantities import PositiveDecibel


class Chebyshev(Filter):
    """Equal ripple in the pass band, |H|² = 1 / (1 + e² T_n(f/corner)²).

    The corner is the end of the ripple band, not the -3 dB point; ``inspect`` shows both. The
    largest gain is one: an even order has its DC gain one ripple below. Source: any filter
    handbook; common practice.
    """

    kind: Literal["chebyshev"] = "chebyshev"
    ripple: PositiveDecibel = Field(
        default=0.5, le=20.0, description="peak-to-peak ripple in the pass band, in dB"
    )

    def prototype(self) -> Prototype:
        """Return poles on an ellipse."""
        return chebyshev(self.order, self.ripple)
