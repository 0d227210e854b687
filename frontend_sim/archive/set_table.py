"""The table of a set of runs: all parameters, measures and verdicts, read from its HDF5 file."""

from __future__ import annotations

import json
import os
from dataclasses import dataclass
from datetime import datetime
from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from frontend_sim.archive.inventory import inventory
from frontend_sim.archive.layout import INVENTORY
from frontend_sim.archive.reading import reading
from frontend_sim.archive.set_columns import Column
from frontend_sim.errors import RecordError

if TYPE_CHECKING:
    import h5py

SET_FORMAT = "frontend_sim set"
SET_FORMAT_VERSION = 1
SET_FILE = "set.h5"
"""Name of the set's file in its directory."""
PREVIOUS_FILE = "set.previous.h5"
"""Name of the file of the last complete night that gave something else."""

RUNS, COLUMNS, BASE, RECORD, SET, VERSIONS = "runs", "columns", "base", "record", "set", "versions"

Real = NDArray[np.float64]
Text = NDArray[np.str_]


@dataclass(frozen=True, eq=False)
class CheckColumn:
    """One check of a set, over all runs; shapes (R,).

    Parameters
    ----------
    name : of the check
    unit, bound : as ``Result`` has them; of a check with two limits see ``bound_in``
    value, limit, margin : NaN where a run has none
    verdict : "holds", "fails", or "" where a run does not have this check
    """

    name: str
    unit: str
    bound: str
    value: Real
    limit: Real
    margin: Real
    verdict: Text

    @cached_property
    def bounds(self) -> Text:
        """On which side the limit of each run stands: of two limits each has its nearer one."""
        beyond = self.value - self.limit
        high, low = abs(self.margin + beyond), abs(self.margin - beyond)
        return np.select([high < low, low < high], ["at most", "at least"], self.bound)

    def bound_in(self, run: int) -> str:
        """Return on which side the limit of a run stands, see ``bounds``."""
        return str(self.bounds[run])


@dataclass(frozen=True, eq=False)
class SetTable:
    """What a replayed set gave: one row for each run, in the order of the set.

    Parameters
    ----------
    path : of its file
    title, seed, created : of the set, and when its directory was first made
    digest : of all scenarios and outcomes; the same for the same set, however it was run
    complete : whether every run of the set gave a result
    planned : runs that the set has; the table has those that were run
    text : the set file as written, "" where the set is a directory or a pattern
    versions : of this program and its libraries
    columns : of ``runs``, in their order
    runs : structured array, shape (R,); ``numbers`` and ``texts`` give one column
    base_names, base_texts, base_values : of the scenarios that are varied: name, file as written,
        and the resolved values
    """

    path: Path
    title: str
    seed: int
    created: datetime
    digest: str
    complete: bool
    planned: int
    text: str
    versions: dict[str, str]
    columns: tuple[Column, ...]
    runs: NDArray[np.void]
    base_names: tuple[str, ...]
    base_texts: tuple[str, ...]
    base_values: tuple[dict[str, Any], ...]

    def numbers(self, column: str) -> Real:
        """Return a column of numbers, shape (R,)."""
        return np.asarray(self.runs[column], dtype=np.float64)

    def texts(self, column: str) -> Text:
        """Return a column of text, shape (R,)."""
        return np.char.decode(self.runs[column], "utf-8")

    @cached_property
    def names(self) -> tuple[str, ...]:
        """Names of the runs."""
        return tuple(self.texts("name").tolist())

    @property
    def verdicts(self) -> Text:
        """Verdict of each run: "holds", "fails", "none" or "error"."""
        return self.texts("verdict")

    @cached_property
    def parameters(self) -> dict[str, Real | Text]:
        """Key that the set varies -> its value in each run, numbers in SI or text."""
        return {
            column.of: self.numbers(column.name) if column.number else self.texts(column.name)
            for column in self.columns
            if column.role == "parameter"
        }

    @cached_property
    def checks(self) -> tuple[CheckColumn, ...]:
        """Every check of the set, with its values over all runs."""
        found: dict[str, dict[str, Column]] = {}
        for column in self.columns:
            if column.of and column.role != "parameter":
                found.setdefault(column.of, {})[column.role] = column
        return tuple(
            CheckColumn(
                name,
                parts["value"].unit,
                parts["value"].bound,
                self.numbers(parts["value"].name),
                self.numbers(parts["limit"].name),
                self.numbers(parts["margin"].name),
                self.texts(parts["verdict"].name),
            )
            for name, parts in found.items()
            if "verdict" in parts
        )

    @cached_property
    def measures(self) -> dict[str, Real]:
        """Name of a mere measure -> its value in each run; its unit stands in ``columns``."""
        judged = {check.name for check in self.checks}
        return {
            column.of: self.numbers(column.name)
            for column in self.columns
            if column.role == "value" and column.of not in judged
        }

    def record_path(self, run: str) -> Path | None:
        """Return the path of a run's record, None where none is kept.

        Raises
        ------
        RecordError
            If there is no such run.
        """
        name = str(self.texts("record")[self.position(run)])
        return self.path.parent / name if name else None

    def position(self, run: str) -> int:
        """Return the row of a run. Raises RecordError if there is none of this name."""
        if run not in self._positions:
            raise RecordError(f"{self.path} has no run {run!r}; it has {len(self.runs)} others")
        return self._positions[run]

    @cached_property
    def _positions(self) -> dict[str, int]:
        return {name: position for position, name in enumerate(self.names)}


def open_set(path: str | os.PathLike[str]) -> SetTable:
    """Read the table of a set.

    Parameters
    ----------
    path : of the set's file, or of the directory that ``replay`` wrote

    Raises
    ------
    RecordError
        If there is none, or it is damaged or of another kind.
    """
    import h5py

    place = Path(path)
    place = place / SET_FILE if place.is_dir() else place
    if not place.is_file():
        raise RecordError(
            f"{place}: there is no such file; it is written by 'frontend-sim replay SET -o DIR'"
        )
    if not h5py.is_hdf5(place):
        raise RecordError(f"{place} is not an HDF5 file; replay its set again")
    with reading(place, "its content"), h5py.File(place, "r") as file:
        if str(file.attrs.get("format", "")) != SET_FORMAT:
            raise RecordError(
                f"{place} is HDF5, but no set of this program: its root has no attribute "
                f"format = {SET_FORMAT!r}"
            )
        _refuse_newer(place, int(file.attrs["format_version"]))
        if inventory(file) != file.attrs[INVENTORY]:
            raise ValueError("text or attributes differ from what was written")
        return _Reader(place, file).table()


def is_set(path: str | os.PathLike[str]) -> bool:
    """Return whether a path is, or holds, the file of a replayed set; it is not read whole."""
    import h5py

    place = Path(path)
    if place.is_dir():
        place = place / SET_FILE
        if place.is_file():
            return True  # whoever opens it is told what is wrong with it
    try:
        with h5py.File(place, "r") as file:
            return str(file.attrs.get("format", "")) == SET_FORMAT
    except (OSError, RuntimeError, KeyError):  # damaged in some way or other
        return False


def _refuse_newer(path: Path, version: int) -> None:
    if version > SET_FORMAT_VERSION:
        raise RecordError(
            f"{path} has format version {version}; this program reads versions up to "
            f"{SET_FORMAT_VERSION}: install a newer one"
        )


@dataclass(frozen=True)
class _Reader:
    """Reads format version 1."""

    path: Path
    file: h5py.File

    def table(self) -> SetTable:
        head = dict(self.file.attrs)
        return SetTable(
            path=self.path,
            title=str(head["title"]),
            seed=int(head["seed"]),
            created=datetime.fromisoformat(head["created"]),
            digest=str(head["set_digest"]),
            complete=head["status"] == "complete",
            planned=int(head["planned"]),
            text=str(self.file[SET].asstr()[()]),
            versions=json.loads(self.file[VERSIONS].asstr()[()]),
            columns=tuple(self._columns()),
            runs=self._runs(),
            base_names=self._texts("name"),
            base_texts=self._texts("scenario"),
            base_values=tuple(map(json.loads, self._texts("resolved"))),
        )

    def _columns(self) -> list[Column]:
        rows = self.file[COLUMNS][...]
        fields = ("name", "role", "of", "unit", "bound")
        return [
            Column(**{key: bytes(row[key]).decode() for key in fields}, number=bool(row["number"]))  # type: ignore[arg-type]  # the role is one of those written
            for row in rows
        ]

    def _runs(self) -> NDArray[np.void]:
        """Return the table; where it is too wide for one dataset, its parts side by side."""
        names = sorted((name for name in self.file if name.startswith(RUNS)), key=_number)
        parts = [self.file[name][...] for name in names]
        if len(parts) == 1:
            whole: NDArray[np.void] = parts[0]
            return whole
        dtype = [(name, part.dtype[name]) for part in parts for name in part.dtype.names]
        joined = np.empty(len(parts[0]), dtype)
        for part in parts:
            for name in part.dtype.names:
                joined[name] = part[name]
        return joined

    def _texts(self, name: str) -> tuple[str, ...]:
        return tuple(map(str, self.file[f"{BASE}/{name}"].asstr()[...]))


def _number(name: str) -> int:
    return int(name.removeprefix(RUNS).strip() or 1)
