"""What a set file may hold: a scenario or several, and how they are varied."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import AfterValidator, Field, StrictBool, model_validator

from frontend_sim.quantities import PositiveShare, Temperature, Time
from frontend_sim.values import Value

Keep = Literal["nothing", "around-failures", "failures", "all"]
AROUND_FAILURES = "around-failures"
Distribution = Literal["uniform", "normal"]
MOST_RUNS = 1_000_000
"""Runs that a set may have."""

Given = int | float | str | StrictBool
Key = Annotated[str, Field(min_length=1)]
Count = Annotated[int, Field(strict=True, ge=1)]


def _rising(ends: tuple[float, float] | None) -> tuple[float, float] | None:
    if ends is not None and ends[0] >= ends[1]:
        raise ValueError("give the lowest temperature first, then the highest")
    return ends


Ends = Annotated[
    tuple[Temperature, Temperature] | None, AfterValidator(_rising), Field(default=None)
]


class Vary(Value):
    """One key of the scenario, and the values that it takes one after the other."""

    key: Key = Field(description="what is varied, for instance chain[1].resistance")
    values: Annotated[tuple[Given, ...], Field(min_length=1)] | None = Field(
        default=None, description="the values, each as a scenario has it"
    )
    start: Given | None = Field(default=None, alias="from", description="first value of a range")
    stop: Given | None = Field(default=None, alias="to", description="last value of a range")
    points: Annotated[int, Field(strict=True, ge=2)] | None = Field(
        default=None, description="how many values a range has, both ends counted"
    )
    spacing: Literal["linear", "logarithmic"] = Field(
        default="linear", description="equal steps, or equal factors"
    )
    glob: Annotated[str, Field(min_length=1)] | None = Field(
        default=None, description="pattern of files, relative to the set, for stimulus.file"
    )
    together: Annotated[str, Field(min_length=1)] | None = Field(
        default=None,
        description="keys with the same word here change together, value by value; without it "
        "every combination is run",
    )
    name: Annotated[str, Field(min_length=1, max_length=60)] | None = Field(
        default=None, description="what the key is called in the names of runs"
    )

    @model_validator(mode="after")
    def _one_way_to_give_values(self) -> Self:
        is_range = [self.start is not None, self.stop is not None, self.points is not None]
        ways = [self.values is not None, any(is_range), self.glob is not None]
        if sum(ways) != 1:
            raise ValueError(
                "give the values in one way: values = [...], or from, to and points, or glob"
            )
        if any(is_range) and not all(is_range):
            raise ValueError("a range needs from, to and points")
        if self.values is not None and len(set(map(repr, self.values))) < len(self.values):
            raise ValueError("a value is listed twice; every run must differ from the others")
        return self


class Corners(Value):
    """Every combination of the ends of tolerances and of temperature, and the nominal circuit."""

    parts: Annotated[tuple[Key, ...], Field(min_length=1)] | None = Field(
        default=None, description="keys of parts; left out, all that have a tolerance"
    )
    temperature: Ends = Field(
        default=None, description="lowest and highest temperature; left out, that of the scenario"
    )


class DrawnPart(Value):
    """How one part is drawn, where it differs from the others."""

    key: Key = Field(description="of the part")
    distribution: Distribution | None = Field(
        default=None, description="left out, that of all parts"
    )
    group: Annotated[str, Field(min_length=1)] | None = Field(
        default=None,
        description="parts of one group move together: each by the same share of its tolerance, or "
        "by the same row of its file",
    )
    file: Annotated[str, Field(min_length=1)] | None = Field(
        default=None, description="table of measured values, relative to the set; one row per draw"
    )
    column: str | Count | None = Field(
        default=None, description="name or number, from 1, of the column in the file"
    )

    @model_validator(mode="after")
    def _measured_or_computed(self) -> Self:
        if self.file is not None and self.distribution is not None:
            raise ValueError("measured values have the distribution that they have; keep one key")
        if self.column is not None and self.file is None:
            raise ValueError("column means nothing without file")
        return self


class Until(Value):
    """When enough has been drawn; what is asked for must hold together."""

    yield_width: PositiveShare | None = Field(
        default=None,
        alias="yield",
        description="width of the 95 % interval of the yield, at the most",
    )
    digits: Annotated[int, Field(strict=True, ge=1, le=4)] | None = Field(
        default=None,
        description="significant digits of the standard deviation of every check that no further "
        "draw would change, by the adaptive procedure of JCGM 101",
    )
    block: Annotated[int, Field(strict=True, ge=40)] = Field(
        default=200, description="draws that are added at a time"
    )

    @model_validator(mode="after")
    def _something(self) -> Self:
        if self.yield_width is None and self.digits is None:
            raise ValueError('say when it is enough: yield = "2 %", or digits = 2')
        return self


class Draws(Value):
    """Random values of the parts, each within its tolerance."""

    count: Count = Field(description="how many circuits are drawn, with until at the most")
    until: Until | None = Field(
        default=None, description="draw no more than is needed; left out, all are drawn"
    )
    distribution: Distribution = Field(
        default="uniform", description="within the tolerance; normal is cut off at it"
    )
    deviation: PositiveShare = Field(
        default=1 / 3, description="standard deviation of normal, as a share of the tolerance"
    )
    parts: Annotated[tuple[Key, ...], Field(min_length=1)] | None = Field(
        default=None, description="keys of parts; left out, all that have a tolerance"
    )
    temperature: Ends = Field(
        default=None, description="temperatures are drawn evenly between these two"
    )
    part: tuple[DrawnPart, ...] = Field(default=(), description="parts that are drawn otherwise")


class RunSet(Value):
    """A set file: what is run, and what is kept of it."""

    format: Literal[1] = Field(default=1, description="version of the format of set files")
    title: str = Field(default="", max_length=200, description="what the set shows")
    seed: int = Field(
        default=0, ge=0, lt=2**63, strict=True, description="seed of everything random in the set"
    )
    base: Annotated[str, Field(min_length=1)] | None = Field(
        default=None, description="scenario, or another set, that is varied; relative to this file"
    )
    scenarios: Annotated[str, Field(min_length=1)] | None = Field(
        default=None, description="directory or pattern of scenarios, all varied in the same way"
    )
    keep: Keep = Field(
        default="failures",
        description="of which runs the conversions and waveforms are kept as records: all of those "
        "that fail, or what lies around the failures; verdicts and measures always are",
    )
    around: Time | None = Field(
        default=None,
        description="with keep = around-failures, how long before and behind each of them; left "
        "out, 100 conversions",
    )
    vary: tuple[Vary, ...] = Field(default=(), description="keys and their values")
    corners: Corners | None = Field(default=None, description="the ends of all tolerances")
    draws: Draws | None = Field(default=None, description="random parts")

    @model_validator(mode="after")
    def _around_what(self) -> Self:
        if self.around is not None and self.keep != AROUND_FAILURES:
            raise ValueError('around means nothing without keep = "around-failures"')
        return self

    @model_validator(mode="after")
    def _one_source(self) -> Self:
        if (self.base is None) == (self.scenarios is None):
            raise ValueError(
                'name what is run: base = "pump.toml", or scenarios = "night/*.toml"; one of them'
            )
        return self


__all__ = [
    "AROUND_FAILURES",
    "MOST_RUNS",
    "Corners",
    "DrawnPart",
    "Draws",
    "Keep",
    "RunSet",
    "Vary",
]
