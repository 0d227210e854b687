"""Files of arrays: which array is the signal, which the time, and along which axis time runs."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import RecordingError, nearest
from frontend_sim.quantities.counting import counted
from frontend_sim.stimulus.recording.columns import label, listing, pick, pick_signal
from frontend_sim.stimulus.recording.series import Real, Series, Source, Wanted, stored_half_step


@dataclass(frozen=True, eq=False)
class Array:
    """One array in a file.

    Parameters
    ----------
    name : as the file has it, "" where a file is one array
    shape, dtype : of the array
    read : returns the part of the array that an index selects
    unit : the unit that the file states, or ""
    refusal : why the format itself makes it no array of numbers, or ""
    told : what the log of the run should say of the array, or ""
    """

    name: str
    shape: tuple[int, ...]
    dtype: np.dtype[Any]
    read: Callable[[Any], NDArray[Any]]
    unit: str = ""
    refusal: str = ""
    told: str = ""

    @property
    def _fields(self) -> tuple[str, ...]:
        return self.dtype.names or ()

    @property
    def _along(self) -> int:
        """The axis along which time runs: the longer one."""
        return 1 if len(self.shape) == 2 and self.shape[1] > self.shape[0] else 0

    def complaint(self) -> str | None:
        """Return why the array is no recording, or None."""
        if self.refusal:
            return self.refusal
        if self.dtype.hasobject:
            return "holds Python objects (a pickle), which are refused because reading runs code"
        if self._fields and len(self.shape) == 1:
            return None if self.shape[0] > 0 else "is empty"
        if self.dtype.kind == "c":
            return "is complex; store the real part or the magnitude"
        if self.dtype.kind not in "biuf":
            return f"holds no numbers (type {self.dtype})"
        if len(self.shape) not in (1, 2):
            return f"has {len(self.shape)} dimensions; expected one, or two with channels"
        return None if min(self.shape) > 0 else "is empty"

    def columns(self) -> tuple[str, ...]:
        """Return the names of the columns; those of a plain array have none."""
        if self._fields:
            return self._fields
        others = self.shape[1 - self._along] if len(self.shape) == 2 else 1
        return (self.name,) if others == 1 else ("",) * others

    def notes(self) -> tuple[str, ...]:
        """Tell what the format has to tell, and when time runs along the second axis."""
        told = (self.told,) if self.told else ()
        if self._along == 0 or self.shape[0] == 1:
            return told
        return (*told, f"array of shape {self.shape}: time runs along the longer, second axis")

    def series(self, file: Path, column: int) -> Series:
        """Return one column."""
        names, dtype = self.columns(), self.dtype
        if self._fields:
            dtype = self.dtype[self._fields[column]]
            if dtype.kind not in "biuf" or dtype.shape:
                raise RecordingError(f"{file}: {label(names, column)} holds no numbers ({dtype})")

        def read(first: int, last: int) -> Real:
            part = slice(first, last)
            if self._fields:
                numbers = self.read(part)[self._fields[column]]
            elif len(self.shape) == 1:
                numbers = self.read(part)
            else:
                numbers = self.read((column, part) if self._along else (part, column))
            return np.asarray(numbers, dtype=np.float64)

        named = f"array {self.name!r}" if self.name and len(names) == 1 else label(names, column)
        return Series(
            named, self.unit, self.shape[self._along], read, stored_half_step(dtype),
            lambda position: f"index {position}", dtype.kind in "biu",
        )  # fmt: skip


def source_of(file: Path, arrays: Mapping[str, Array], wanted: Wanted) -> Source:
    """Find signal and time among the arrays of a file.

    Raises RecordingError if the file does not hold them, or holds several and none is chosen.
    """
    signal_array, column = _choose(file, arrays, wanted)
    names = signal_array.columns()
    time_array, time = signal_array, None
    if isinstance(wanted.time, str) and wanted.time not in names:
        time_array, time = _time_array(file, arrays, wanted.time, names), 0
    elif wanted.time is not None:
        time = pick(file, names, wanted.time, "time")
    beside = time if time_array is signal_array else None
    signal = signal_array.series(file, pick_signal(file, names, column, beside))
    seconds = None if time is None else time_array.series(file, time)
    if seconds is not None and seconds.count != signal.count:
        raise RecordingError(
            f"{file}: {signal.label} has {counted(signal.count, 'point')}, but {seconds.label}, "
            f"the time, has {seconds.count}"
        )
    others = [name for name in arrays if name and name != signal_array.name]
    known = listing(names) + (f"; other arrays are {', '.join(others[:12])}" if others else "")
    return Source(signal, seconds, None, signal_array.notes(), known)


def _choose(
    file: Path, arrays: Mapping[str, Array], wanted: Wanted
) -> tuple[Array, int | str | None]:
    """Return the array of the signal, and the column that is asked for in it."""
    column = wanted.column
    if wanted.dataset is not None:
        chosen = _named(file, arrays, wanted.dataset, "dataset")
    elif isinstance(column, str) and column in arrays:
        chosen, column = arrays[column], None
    else:
        usable = [a for a in arrays.values() if a.complaint() is None and a.name != wanted.time]
        if len(usable) > 1:
            raise RecordingError(
                f"{file}: several arrays may be the signal; choose one with dataset = ...: "
                + ", ".join(f"{a.name!r} {a.shape}" for a in usable[:24])
            )
        if not usable and len(arrays) != 1:
            known = ", ".join(
                f"{a.name!r} {a.complaint() or 'is the time'}" for a in arrays.values()
            )
            raise RecordingError(f"{file}: holds no array of numbers ({known or 'it is empty'})")
        chosen = usable[0] if usable else next(iter(arrays.values()))
    complaint = chosen.complaint()
    if complaint is not None:
        named = f" array {chosen.name!r}" if chosen.name else " the array"
        raise RecordingError(f"{file}:{named} {complaint}")
    return chosen, column


def _named(file: Path, arrays: Mapping[str, Array], name: str, key: str) -> Array:
    found = arrays.get(name) or arrays.get(name.strip("/"))
    if found is None:
        raise RecordingError(
            f"{file}: no array {name!r} for {key}{nearest(name, [n for n in arrays if n])}"
        )
    return found


def _time_array(
    file: Path, arrays: Mapping[str, Array], name: str, names: tuple[str, ...]
) -> Array:
    others = {known: array for known, array in arrays.items() if known}
    if not others or (name not in others and name.strip("/") not in others and any(names)):
        pick(file, names, name, "time")
    array = _named(file, others, name, "time")
    complaint = array.complaint()
    if complaint is None and len(array.columns()) > 1:
        complaint = "has several columns; the time must be one"
    if complaint is not None:
        raise RecordingError(f"{file}: array {name!r}, the time, {complaint}")
    return array
