"""How one converter takes its turns at several channels."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import Field, model_validator

from frontend_sim.analog.stages import AnyStage
from frontend_sim.quantities import Frequency, PositiveTime, Time
from frontend_sim.scenario.rules import fault
from frontend_sim.stimulus import AnyStimulus
from frontend_sim.values import Value


class Channel(Value):
    """One input of the multiplexer: what arrives there, and the circuit before it."""

    name: str = Field(
        min_length=1, max_length=60, description="name of the channel in tables, plots and records"
    )
    stimulus: AnyStimulus = Field(description="what arrives at the channel's first stage")
    chain: tuple[AnyStage, ...] = Field(
        default=(), description="the channel's stages, in order from the sensor to the multiplexer"
    )

    @model_validator(mode="after")
    def _name_is_one_line(self) -> Self:
        if not self.name.isprintable():
            raise fault(["name"], "the name must be one line of text")
        return self

    @property
    def stimulus_unit(self) -> str:
        """SI unit of the stimulus: V, or what the first sensor of the chain takes."""
        from frontend_sim.scenario.signal import signal_units

        return signal_units(self.chain)[0]


class Scan(Value):
    """The turns of a scan; every one visits one channel, and all together make a period.

    In a visit the multiplexer switches to the channel, ``settle`` passes, and ``dwell`` conversions
    follow, adc.rate per second, each sampled at the end of its interval; at the end of the slot the
    multiplexer switches on. The first conversion of the run is sampled at adc.first.
    """

    order: tuple[str, ...] | None = Field(
        default=None,
        description="names of the channels in the order of their visits, a channel as often as it "
        "is wanted; left out, each one once in the order of the file",
        json_schema_extra={"examples": [["oil", "water", "oil", "air"]]},
    )
    sampling: Literal["sequential", "simultaneous"] = Field(
        default="sequential",
        description="sequential: each channel is sampled in its own slot; simultaneous: a "
        "sample-and-hold for each channel takes all of them at the start of a scan",
    )
    slot: PositiveTime | None = Field(
        default=None,
        description="time of one visit; left out, settle + dwell / adc.rate, which is 1 / adc.rate "
        "unless more is asked for",
    )
    dwell: Annotated[int, Field(ge=1, le=65536, strict=True)] = Field(
        default=1, description="conversions in one visit"
    )
    discard: Annotated[int, Field(ge=0, strict=True)] = Field(
        default=0, description="conversions at the start of each visit that are thrown away"
    )
    settle: Time = Field(
        default=0.0, description="wait between the switch and the first conversion of a visit"
    )
    skew_frequency: Frequency | None = Field(
        default=None,
        description="frequency at which the skew is told in degrees; left out, that of each "
        "channel's stimulus",
    )
    chain: tuple[AnyStage, ...] = Field(
        default=(),
        description="stages behind the multiplexer, which all channels share and which must settle "
        "from one channel to the next; linear and without a transport delay",
    )

    @model_validator(mode="after")
    def _some_conversion_is_kept(self) -> Self:
        if self.discard >= self.dwell:
            raise fault(
                ["discard"],
                f"discard {self.discard} leaves no conversion of a visit, which has {self.dwell} "
                f"(dwell); lower discard, or raise dwell to {self.discard + 1} or more",
            )
        return self
