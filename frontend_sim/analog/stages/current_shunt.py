"""Current shunt."""

from __future__ import annotations

from typing import Literal, Self

import numpy as np
from pydantic import Field, model_validator

from frontend_sim.analog.block import Block, gain_block
from frontend_sim.analog.noise import NoiseInput, thermal_density
from frontend_sim.analog.stages.base import Stage
from frontend_sim.quantities import Capacitance, NotNegativeInductance, Resistance


class CurrentShunt(Stage):
    """A shunt R with its inductance L, and a filter R_f, C_f across it

        H(s) = (R + s L) / (1 + s R_f C_f)    in V/A.

    An inductance makes the voltage rise with frequency without bound, so it needs the filter; with
    R_f C_f = L / R the two cancel. The filter does not load the shunt. Source: common practice.
    """

    kind: Literal["current-shunt"] = "current-shunt"
    resistance: Resistance = Field(description="resistance R of the shunt")
    inductance: NotNegativeInductance = Field(
        default=0.0, description="inductance L in series with the resistance; needs the filter"
    )
    filter_resistance: Resistance | None = Field(
        default=None, description="resistor R_f of the filter across the shunt"
    )
    filter_capacitance: Capacitance | None = Field(
        default=None, description="capacitor C_f of the filter across the shunt"
    )

    @model_validator(mode="after")
    def _proper(self) -> Self:
        if (self.filter_resistance is None) != (self.filter_capacitance is None):
            raise ValueError("give filter_resistance and filter_capacitance together")
        if self.inductance > 0.0 and self.filter_resistance is None:
            raise ValueError(
                "an inductance alone gives a voltage that rises with frequency without bound; give "
                "filter_resistance and filter_capacitance, the filter that follows the shunt"
            )
        return self

    def units(self) -> tuple[str, str]:
        """Return current in, volts out."""
        return ("A", "V")

    def blocks(self) -> tuple[Block, ...]:
        """Return the filter's pole with the zero of the shunt, or the resistance alone.

        The state is the capacitor's voltage less what a jump of the current makes at once.
        """
        rate = self._rate()
        if rate is None:
            return (gain_block(self.resistance),)
        at_once = self.inductance * rate
        return (Block.of([[-rate]], [rate * (self.resistance - at_once)], [1.0], at_once),)

    def _rate(self) -> float | None:
        if self.filter_resistance is None or self.filter_capacitance is None:
            return None
        return 1.0 / (self.filter_resistance * self.filter_capacitance)

    def resistance_at_rest(self) -> float | None:
        """Return that of the filter, beside which the shunt is nothing [ohm]."""
        return self.filter_resistance

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the thermal noise of shunt and filter, which the filter limits."""
        rate = self._rate()
        column, direct = (np.empty(0), 1.0) if rate is None else (np.array([rate]), 0.0)
        sources = {"resistance": self.resistance, "filter_resistance": self.filter_resistance}
        return tuple(
            NoiseInput(
                f"thermal noise of {key}",
                thermal_density(value, temperature),
                0.0,
                0,
                column,
                direct,
            )
            for key, value in sources.items()
            if value is not None
        )
