"""An output that cannot move faster than its slew rate."""

from __future__ import annotations

import math
from typing import Literal

from pydantic import Field

from frontend_sim.analog.block import Block, first_order, gain_block
from frontend_sim.analog.limits import AmplifierLimits
from frontend_sim.analog.stages.base import Stage
from frontend_sim.quantities import Frequency, PositiveSlope


class SlewLimit(Stage):
    """A follower of one pole whose output's slope is limited,

        dy/dt = clip(2 pi f (u - y), -slew_rate_down, slew_rate).

    A step of height H above S / (2 pi f) is slewed until S / (2 pi f) is left of it, and then
    settles with the pole; to within e of its end it takes

        (H - S T) / S + T ln(S T / e),    T = 1 / (2 pi f).

    Without a bandwidth the output follows at once where the slew rate lets it. Source: closed form.
    """

    kind: Literal["slew-limit"] = "slew-limit"
    slew_rate: PositiveSlope = Field(description="steepest rise S of the output")
    slew_rate_down: PositiveSlope | None = Field(
        default=None, description="steepest fall; left out, the same as slew_rate"
    )
    bandwidth: Frequency | None = Field(
        default=None, description="-3 dB corner f of small signals; left out, there is none"
    )

    def blocks(self) -> tuple[Block, ...]:
        """Return the follower of small signals."""
        if self.bandwidth is None:
            return (gain_block(1.0),)
        rate = 2.0 * math.pi * self.bandwidth
        return (first_order(-rate, (0.0, rate)),)

    def limits(self) -> AmplifierLimits:
        """Return the slew rates."""
        return AmplifierLimits(slew_rate=self.slew_rate, slew_rate_down=self.slew_rate_down)

    def settling_time(self, step: float, error: float) -> float:
        """Return how long a rising step takes to stay within an error of its end [s].

        Parameters
        ----------
        step : height of the step [V];  error : [V]
        """
        if self.bandwidth is None:
            return max(step - error, 0.0) / self.slew_rate
        lag = 1.0 / (2.0 * math.pi * self.bandwidth)
        left = min(step, self.slew_rate * lag)
        if error >= left:
            return max(step - error, 0.0) / self.slew_rate
        return (step - left) / self.slew_rate + lag * math.log(left / error)
