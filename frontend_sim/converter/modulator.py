"""How fast a modulator runs, and how its samples become codes."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import Field, model_validator

from frontend_sim.quantities import FREQUENCY, Frequency, as_text
from frontend_sim.values import Value

MOST_RATIO = 1 << 20
"""Most modulator samples for one code."""

ROUNDING = 1e-9
"""Share by which rates may disagree, as rounding of a decimal fraction makes them."""


class Modulator(Value):
    """A modulator and its decimation; the ratio is told by decimation, data_rate, or both.

    continuous: data_rate = modulator_rate / R, each code shares samples with the next;
    restarted: every code takes order · R samples of its own, data_rate is how often one is started.
    """

    modulator_rate: Frequency = Field(description="samples of the modulator per second")
    order: Annotated[int, Field(ge=1, le=5, strict=True)] = Field(
        description="K of the sinc^K filter: number of running means in a row"
    )
    decimation: Annotated[int, Field(ge=2, le=MOST_RATIO, strict=True)] | None = Field(
        default=None,
        description="R, modulator samples in one running mean; left out, as data_rate needs it",
    )
    data_rate: Frequency | None = Field(
        default=None,
        description="codes per second; left out, as many as modulator and decimation give",
    )
    conversion: Literal["continuous", "restarted"] = Field(
        default="continuous",
        description="continuous: the filter runs on; restarted: it is emptied for each code, which "
        "takes order times as long",
    )

    @model_validator(mode="after")
    def _rates_agree(self) -> Self:
        if self.decimation is None and self.data_rate is None:
            raise ValueError("give decimation or data_rate; one of them tells the other")
        if self.data_rate is None:
            return self
        given = as_text(self.data_rate, FREQUENCY, 9)
        if self.decimation is None:
            ratio = self.modulator_rate / (self.data_rate * self.periods)
            if abs(ratio - round(ratio)) > ROUNDING * ratio or not 2 <= ratio <= MOST_RATIO:
                raise ValueError(
                    f"data_rate {given} needs a decimation of {ratio:.9g}, which must be a whole "
                    f"number from 2 to {MOST_RATIO}; change data_rate or modulator_rate, or give "
                    "decimation"
                )
            return self
        fastest = self.modulator_rate / (self.decimation * self.periods)
        possible = as_text(fastest, FREQUENCY, 9)
        if self.conversion == "continuous" and abs(self.data_rate / fastest - 1.0) > ROUNDING:
            raise ValueError(
                f"data_rate {given} and decimation {self.decimation} disagree: together with "
                f"modulator_rate they make {possible}; take one of them out"
            )
        if self.data_rate > fastest * (1.0 + ROUNDING):
            raise ValueError(
                f"data_rate {given} is too fast: a restarted code takes {self.periods} times "
                f"{self.decimation} samples, at most {possible}"
            )
        return self

    @property
    def periods(self) -> int:
        """Running means that must pass before the next code: 1, or order where restarted."""
        return 1 if self.conversion == "continuous" else self.order

    @property
    def ratio(self) -> int:
        """R, modulator samples in one running mean."""
        if self.decimation is not None:
            return self.decimation
        assert self.data_rate is not None
        return round(self.modulator_rate / (self.data_rate * self.periods))

    @property
    def rate(self) -> float:
        """Codes per second by the converter's own clock [Hz]."""
        # A continuous rate is told exactly by modulator and ratio; the key may be rounded.
        if self.data_rate is not None and self.conversion == "restarted":
            return min(self.data_rate, self.modulator_rate / (self.ratio * self.order))
        return self.modulator_rate / (self.ratio * self.periods)
