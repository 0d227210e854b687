"""How a run is computed, and what is kept of it."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import BeforeValidator, Field, StrictBool, model_validator

from frontend_sim.quantities import FREQUENCY, Frequency, PositiveLsb, PositiveTime, as_text
from frontend_sim.scenario.rules import fault
from frontend_sim.values import Value

Discretization = Literal["exact", "zoh", "foh", "bilinear"]


def _auto_or(value: object) -> object:
    return None if value == "auto" else value


class SimulationSettings(Value):
    """How the run is computed and what is kept of it."""

    duration: PositiveTime | None = Field(
        default=None,
        description="conversions are taken for t in [0, duration); left out, the length of the "
        "recording",
    )
    discretization: Discretization = Field(
        default="exact",
        description="exact, or a discrete model of the chain at grid_rate: zoh (step-invariant), "
        "foh (ramp-invariant), bilinear (trapezoidal)",
    )
    grid_rate: Annotated[Frequency | None, BeforeValidator(_auto_or)] = Field(
        default=None,
        description="points per second of a discrete model, and of the grid on which rails, slew "
        'rates, clamps and curved sensors are followed; "auto", or left out, picks the coarsest '
        "multiple of the conversion rate (or of a recording's rate) whose estimated error stays "
        "below accuracy. With discretization exact and a linear chain it changes nothing in a run; "
        "inspect then shows how far discrete models at this rate are from exact",
        json_schema_extra={"examples": ["auto", "1 MHz"]},
    )
    accuracy: PositiveLsb = Field(
        default=0.05, description='largest error of a grid picked by "auto"'
    )
    prewarp: Frequency | None = Field(
        default=None, description="frequency that the bilinear model keeps exactly"
    )
    initial: Literal["settled", "rest"] = Field(
        default="settled",
        description="before t = 0 the chain has settled on the stimulus's first value, or is at "
        "rest",
    )
    noise: StrictBool = Field(
        default=True,
        description="whether codes carry the noise of the circuit: thermal noise of resistors, "
        "voltage and current noise of amplifiers; pin and waveform stay free of it",
    )
    waveform_rate: Frequency | None = Field(
        default=None, description="points per second of the kept waveforms; left out, none is kept"
    )
    waveform_points: tuple[str, ...] | None = Field(
        default=None,
        description='points of the chain whose waveform is kept: "stimulus" or names of stages (a '
        'stage without a name is called by its place and kind, "2 gain"); left out, all of them',
        json_schema_extra={"examples": [["stimulus", "input filter"]]},
    )

    @model_validator(mode="after")
    def _prewarp_suits_the_model(self) -> Self:
        if self.prewarp is None:
            return self
        if self.discretization != "bilinear":
            raise fault(
                ["prewarp"],
                f'prewarp has a meaning for discretization = "bilinear" only, not for '
                f'"{self.discretization}"; take prewarp out, or choose "bilinear"',
            )
        if self.grid_rate is not None and not self.prewarp < 0.5 * self.grid_rate:
            raise fault(
                ["prewarp"],
                f"prewarp {as_text(self.prewarp, FREQUENCY, 6)} must lie below half the grid_rate, "
                f"{as_text(0.5 * self.grid_rate, FREQUENCY, 6)}",
            )
        return self

    @model_validator(mode="after")
    def _points_need_a_rate(self) -> Self:
        points = self.waveform_points
        if points is None:
            return self
        if self.waveform_rate is None:
            raise fault(
                ["waveform_points"],
                "waveform_points needs waveform_rate, the points per second that are kept; add "
                'for instance waveform_rate = "100 kHz", or take waveform_points out',
            )
        if not points:
            raise fault(
                ["waveform_points"],
                "waveform_points names no point; name one, or leave waveform_points out for all of "
                "them, or leave waveform_rate out for none",
            )
        for position, point in enumerate(points):
            if point in points[:position]:
                raise fault(["waveform_points", position], f"{point!r} is listed twice")
        return self
