"""A recorded signal as a stimulus."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated, Literal, Self

from pydantic import Field, PrivateAttr, model_validator

from frontend_sim.errors import QuantityError
from frontend_sim.quantities import (
    Frequency,
    Instant,
    PositiveRatio,
    PositiveTime,
    Ratio,
    SignalDifference,
)
from frontend_sim.stimulus.base import Key, Stimulus
from frontend_sim.stimulus.drive import Between, Drive
from frontend_sim.stimulus.levels import LevelFault
from frontend_sim.stimulus.recording.duplicates import Duplicates
from frontend_sim.stimulus.recording.keys import (
    Column,
    FilePath,
    Name,
    Package,
    SignalUnit,
    TimeUnit,
)
from frontend_sim.stimulus.recording.missing import Missing
from frontend_sim.stimulus.recording.prepare import prepared
from frontend_sim.stimulus.recording.units import signal_factor_of


class Recording(Stimulus):
    """u = number · scale · unit + offset, at the instants of the file; t = 0 at ``start``.

    Formats, policies and examples stand in ``docs/recordings.md``.
    """

    kind: Literal["recording"] = "recording"
    package: Package | None = Field(
        default=None,
        description="installed Python package that the file is a part of, for open example data",
    )
    file: FilePath = Field(
        description="file of the recording, relative to the scenario, or to the package: "
        ".csv .tsv .txt .wav .npy .npz .h5 .hdf5 .mat"
    )
    column: Column | None = Field(
        default=None,
        description="name or number, from 1, of the signal's column; left out, the only one",
    )
    channel: Annotated[int, Field(ge=1, strict=True)] | None = Field(
        default=None, description="number of the channel, from 1: another name for a column number"
    )
    dataset: Name | None = Field(
        default=None,
        description="array of the signal in a file of several: path in HDF5, name in NPZ and MAT",
    )
    time: Column | None = Field(
        default=None,
        description="name or number, from 1, of the time column, or the name of the array of times",
    )
    rate: Frequency | None = Field(
        default=None, description="points per second, where there is no time column"
    )
    time_unit: TimeUnit | None = Field(
        default=None,
        description="unit of the time column; left out, as the file says, else s",
        examples=["ms"],
    )
    timestamps: Literal["auto", "as-given", "uniform"] = Field(
        default="auto",
        description="auto: uniform where the rounding of the time stamps explains all deviations; "
        "as-given: never mind the rounding; uniform: ignore jitter and take the mean rate",
    )
    duplicates: Duplicates = Field(
        default="error", description="what to do with several points of the same time"
    )
    missing: Missing = Field(
        default="error",
        description="what to do with points without a value (empty, NaN, overload): refuse, hold "
        "the last value, join by a line, or put zero in the file's own numbers",
    )
    longest_gap: PositiveTime | None = Field(
        default=None,
        description="longest time between two points that is bridged; left out, any, and told",
    )
    between: Between = Field(
        default="line", description="what the signal does between two points: line or hold"
    )
    unit: SignalUnit | None = Field(
        default=None,
        description="unit of the numbers; left out, as the file says, or the signal's own in SI "
        "where it says nothing that is known",
        examples=["mV"],
    )
    scale: Ratio = Field(default=1.0, description="factor of the numbers, before the offset")
    offset: SignalDifference = Field(default=0.0, description="what is added last")
    start: Instant | None = Field(
        default=None,
        description="where playback begins, on the recording's own time axis; "
        "left out, at the first point",
    )
    end: Instant | None = Field(
        default=None,
        description="where playback ends, on the recording's own time axis; left out, at its end",
    )
    speed: PositiveRatio = Field(
        default=1.0, description="playback-rate factor; 2 plays twice as fast"
    )
    beyond: Literal["error", "hold"] = Field(
        default="error",
        description="what to do when the run lasts longer: refuse it, or hold the last value",
    )

    _signal: str = PrivateAttr(default="V")

    @model_validator(mode="after")
    def _keys_agree(self) -> Self:
        if self.time is not None and self.rate is not None:
            raise ValueError("time and rate are both given; keep one")
        if self.column is not None and self.channel is not None:
            raise ValueError("column and channel are both given; they mean the same, keep one")
        if self.time is None:
            for key in ("time_unit", "timestamps", "duplicates"):
                if getattr(self, key) != type(self).model_fields[key].default:
                    raise ValueError(f"{key} means nothing without a time column; give time")
        if self.scale == 0.0:
            raise ValueError("a scale of 0 leaves nothing of the recording")
        if self.start is not None and self.end is not None and self.end <= self.start:
            raise ValueError(f"end, {self.end:g} s, must be after start, {self.start:g} s")
        return self

    @property
    def signal(self) -> str:
        """SI unit of the signal that the first stage takes."""
        return self._signal

    def measured_in(self, signal: str) -> Self:
        """Return the same recording as a signal in another SI unit."""
        if signal == self._signal:
            return self
        copy = self.model_copy()
        copy._signal = signal
        return copy

    def foreign_levels(self, signal: str) -> list[LevelFault]:
        """Return what is in units of something else: the offset, or the numbers themselves."""
        faults = super().foreign_levels(signal)
        if self.unit is not None:
            try:
                signal_factor_of(self.unit, signal)
            except QuantityError as error:
                faults.append(LevelFault(("unit",), str(error)))
        return faults

    def written_level(self) -> str:
        """Return one of the unit that the numbers are in, where the file tells it."""
        return f"1 {self.unit}" if self.unit is not None else super().written_level()

    def is_absolute(self) -> bool:
        """Return that a recording is given by its values."""
        return True

    @property
    def picked(self) -> int | str | None:
        """The column or channel that was asked for."""
        return self.channel if self.column is None else self.column

    def drives(self, key: Key) -> tuple[Drive, ...]:
        """Return the points; a second drive where playback starts between two of them.

        Raises RecordingError if the file does not hold what is asked for.
        """
        return prepared(self).drives

    def known_length(self) -> float | None:
        """Return the length as played [s]; None where the last value is held beyond it.

        On a uniform grid the last point lasts one interval, so N points last N / rate; with
        irregular time stamps the recording ends at the last one.
        """
        return None if self.beyond == "hold" else prepared(self).length

    def files(self) -> tuple[Path, ...]:
        """Return the file."""
        return (self.file,)

    def notes(self) -> tuple[str, ...]:
        """Return what was decided while the file was read."""
        return prepared(self).notes
