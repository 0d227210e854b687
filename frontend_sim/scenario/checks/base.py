"""What every check has in common."""

from __future__ import annotations

from typing import Any, ClassVar

from pydantic import Field, SerializerFunctionWrapHandler, model_serializer

from frontend_sim.quantities import Time
from frontend_sim.values import Value


class Check(Value):
    """Something that must hold, with its limit.

    A check is a value: it says what is asked. What the answer is, ``frontend_sim.measure.checks``
    finds out.
    """

    instants: ClassVar[tuple[str, ...]] = ()
    """Keys that are instants of the run, which must lie before its end."""

    name: str = Field(
        default="", max_length=60, description="name of the check in tables, plots and records"
    )
    channel: str | None = Field(
        default=None,
        description="channel of a scan that must hold; left out, each of them must",
    )

    @model_serializer(mode="wrap")
    def _without_empty_channel(self, handler: SerializerFunctionWrapHandler) -> dict[str, Any]:
        """Leave the channel out where there is none: the digest of a scenario never had it."""
        values: dict[str, Any] = handler(self)
        if values.get("channel", "") is None:
            del values["channel"]
        return values

    def latest(self) -> tuple[str, float] | None:
        """Return the key of the latest instant that is asked about, and the instant [s]."""
        given = [(key, getattr(self, key)) for key in self.instants]
        known = [(key, float(time)) for key, time in given if time is not None]
        return max(known, key=lambda pair: pair[1], default=None)


class PointCheck(Check):
    """A check on one point of the chain."""

    point: str | None = Field(
        default=None,
        description='point of the chain that is looked at: "stimulus" or the name of a stage (a '
        'stage without a name is called by its place and kind, "2 gain"); left out, the '
        "converter's pin",
        json_schema_extra={"examples": ["input filter"]},
    )


class CodeCheck(Check):
    """A check on the codes of a run."""

    instants = ("after",)

    after: Time = Field(
        default=0.0, description="conversions from this instant on count; left out, all of them"
    )
