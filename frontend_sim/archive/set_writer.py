"""What a set of runs gave becomes one HDF5 file: a table with a row for each run, and links."""

from __future__ import annotations

import json
import math
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any, Self

import numpy as np

from frontend_sim.archive.interrupts import uninterrupted
from frontend_sim.archive.inventory import inventory
from frontend_sim.archive.layout import INVENTORY
from frontend_sim.archive.names import dataset_name
from frontend_sim.archive.provenance import PROGRAM
from frontend_sim.archive.set_columns import RUN_NUMBERS, Column, run_columns
from frontend_sim.archive.set_table import (
    BASE,
    COLUMNS,
    RECORD,
    RUNS,
    SET,
    SET_FORMAT,
    SET_FORMAT_VERSION,
    VERSIONS,
    open_set,
)
from frontend_sim.archive.sink import Sink
from frontend_sim.archive.target import new_file, writing
from frontend_sim.archive.text import clean, describe, put_text
from frontend_sim.errors import OutputError, RecordError
from frontend_sim.measure.result import Result

if TYPE_CHECKING:
    import h5py

WIDEST = 300
"""Columns in one dataset: HDF5 holds the description of a row in 64 KiB."""
STRETCH = 4096
"""Rows that are held in memory at once."""


@dataclass(frozen=True)
class SetRow:
    """One run of a set, as the table has it.

    Parameters
    ----------
    run : the columns of ``RUN_COLUMNS``, by name; what is left out is "" or 0
    parameters : key -> its value in this run, a number in SI or text
    results : measures and checks
    """

    run: Mapping[str, Any]
    parameters: Mapping[str, float | str]
    results: tuple[Result, ...] = ()


@dataclass(frozen=True)
class SetHead:
    """What is told of a set as a whole; names as in ``SetTable``.

    ``bases`` tells name, text and resolved values of the scenarios that are varied.
    """

    title: str
    seed: int
    created: datetime
    digest: str
    verdict: str
    complete: bool
    planned: int
    text: str
    versions: Mapping[str, str]
    bases: tuple[tuple[str, str, Mapping[str, Any]], ...]


def write_set(path: Path, head: SetHead, shape: Shape, rows: Iterable[SetRow]) -> None:
    """Write the file of a set, and read it back before it takes its name.

    Parameters
    ----------
    path : where it goes; what is there is replaced
    shape : of the table, from the same rows
    rows : in the order of the set; no more than ``STRETCH`` of them are held at once

    Raises
    ------
    OutputError
        If the file cannot be written; what was there is then unchanged.
    """
    with new_file(path, path, overwrite=True) as temporary:
        with writing(path), temporary.open("x+b", buffering=0) as stream:
            sink = Sink(stream)
            with uninterrupted(), _opened(sink) as file:
                _put_head(file, head)
                _put_columns(file, shape.columns)
                _put_rows(file, shape, rows)
                file.attrs[INVENTORY] = inventory(file)
            sink.check()
        try:
            open_set(temporary)
        except RecordError as error:
            raise OutputError(f"{path} was written but does not read back: {error}") from error


def _opened(sink: Sink) -> h5py.File:
    import h5py

    return h5py.File(sink, "w", libver=("v110", "v110"), track_order=True)


def _put_head(file: h5py.File, head: SetHead) -> None:
    attributes = {
        "format": SET_FORMAT,
        "format_version": SET_FORMAT_VERSION,
        "title": clean(head.title),
        "created": head.created.isoformat(timespec="seconds"),
        "program_version": head.versions[PROGRAM],
        "set_digest": head.digest,
        "seed": head.seed,
        "status": "complete" if head.complete else "incomplete",
        "planned": head.planned,
        "verdict": head.verdict,
    }
    for name, value in attributes.items():
        file.attrs[name] = value
    put_text(file, SET, head.text, "the set file as written")
    put_text(file, VERSIONS, json.dumps(dict(head.versions)), "JSON: versions of the libraries")
    group = file.create_group(BASE)
    names, texts, values = zip(*head.bases, strict=True) if head.bases else ((), (), ())
    put_text(group, "name", names, "the scenarios that the set varies")
    put_text(group, "scenario", texts, "each of them as written")
    put_text(group, "resolved", [json.dumps(each) for each in values], "JSON: values in SI units")


def _put_columns(file: h5py.File, columns: tuple[Column, ...]) -> None:
    import h5py

    texts = ("name", "role", "of", "unit", "bound")
    width = {
        key: max(1, *(len(clean(getattr(column, key)).encode()) for column in columns))
        for key in texts
    }
    dtype = [(key, h5py.string_dtype("utf-8", width[key])) for key in texts] + [("number", "?")]
    rows = [
        (*(clean(getattr(column, key)).encode() for key in texts), column.number)
        for column in columns
    ]
    table = np.array(rows, dtype)
    dataset = file.create_dataset(COLUMNS, data=table, chunks=table.shape, fletcher32=True)
    describe(dataset, "1", "what each column of the runs holds")


@dataclass
class Shape:
    """The columns of a table, and how wide their texts are, found by going through all rows.

    ``units`` tells the unit of each parameter.
    """

    units: Mapping[str, str]
    count: int = 0
    widths: dict[str, int] = field(default_factory=dict)
    parameters: dict[str, bool] = field(default_factory=dict)
    results: dict[str, Result] = field(default_factory=dict)
    judged: set[str] = field(default_factory=set)

    @classmethod
    def of(cls, rows: Iterable[SetRow], units: Mapping[str, str]) -> Self:
        """Go through all rows once."""
        shape = cls(units)
        for row in rows:
            shape._add(row)
        return shape

    def _add(self, row: SetRow) -> None:
        self.count += 1
        for name, value in row.run.items():
            if isinstance(value, str):
                self._widen(name, value)
        for key, value in row.parameters.items():
            text = isinstance(value, str)
            self.parameters[key] = self.parameters.get(key, True) and not text
            # A key with numbers in some runs and text in others becomes a column of text.
            self._widen(f"parameter {key}", value if isinstance(value, str) else repr(value))
        for result in row.results:
            self.results.setdefault(result.name, result)
            if result.verdict != "none":
                self.judged.add(result.name)

    def _widen(self, name: str, text: str) -> None:
        self.widths[name] = max(self.widths.get(name, 1), len(clean(text).encode()))

    @property
    def columns(self) -> tuple[Column, ...]:
        """The columns of the table, names made unlike each other."""
        found = list(run_columns())
        taken = {column.name for column in found}
        for key, number in self.parameters.items():
            unit = self.units.get(key, "") if number else ""
            found.append(Column(_free(key, taken), "parameter", key, unit, "", number))
        for name, result in self.results.items():
            unit = result.unit
            found.append(Column(_free(name, taken), "value", name, unit, result.bound))
            if name in self.judged:
                found += [
                    Column(_free(f"{name} margin", taken), "margin", name, unit),
                    Column(_free(f"{name} limit", taken), "limit", name, unit),
                    Column(_free(f"{name} verdict", taken), "verdict", name, number=False),
                ]
        return tuple(found)

    def kind(self, column: Column) -> Any:
        """Return the type of a column's elements."""
        import h5py

        if column.number:
            return np.dtype(RUN_NUMBERS.get(column.name, "<f8") if column.role == "run" else "<f8")
        if column.role == "verdict":
            return h5py.string_dtype("utf-8", len("holds"))
        name = column.name if column.role == "run" else f"parameter {column.of}"
        return h5py.string_dtype("utf-8", self.widths.get(name, 1))


def _free(name: str, taken: set[str]) -> str:
    """Return a name of a column that no other has."""
    free, number = clean(name), 1
    while free in taken:
        number += 1
        free = f"{clean(name)} ({number})"
    taken.add(free)
    return free


def _put_rows(file: h5py.File, shape: Shape, rows: Iterable[SetRow]) -> None:
    """Write the table in stretches of rows, and a link to each record that is kept."""
    columns = shape.columns
    parts = [columns[at : at + WIDEST] for at in range(0, len(columns), WIDEST)]
    datasets = [_open_runs(file, number, part, shape) for number, part in enumerate(parts)]
    links = file.create_group(RECORD)
    done = 0
    for stretch in _stretches(rows):
        cells = [_cells(row, columns) for row in stretch]
        for number, (dataset, part) in enumerate(zip(datasets, parts, strict=True)):
            at = number * WIDEST
            values = [row[at : at + len(part)] for row in cells]
            dataset[done : done + len(stretch)] = np.array(values, dataset.dtype)
        done += len(stretch)
        for row in stretch:
            _put_link(links, row)


def _open_runs(
    file: h5py.File, number: int, columns: tuple[Column, ...], shape: Shape
) -> h5py.Dataset:
    name = RUNS if number == 0 else f"{RUNS} {number + 1}"
    dtype = np.dtype([(column.name, shape.kind(column)) for column in columns])
    packed: dict[str, Any] = {}
    if shape.count:
        chunk = max(1, min(shape.count, (1 << 19) // dtype.itemsize))
        packed = {"chunks": (chunk,), "fletcher32": True, "shuffle": True, "compression": "gzip"}
    dataset = file.create_dataset(name, shape=(shape.count,), dtype=dtype, **packed)
    describe(dataset, "per column", "one row for each run; /columns tells what the columns hold")
    return dataset


def _put_link(links: h5py.Group, row: SetRow) -> None:
    import h5py

    record = row.run.get("record", "")
    if record:
        links[dataset_name(str(row.run["name"]))] = h5py.ExternalLink(record, "/")


def _stretches(rows: Iterable[SetRow]) -> Iterator[list[SetRow]]:
    stretch: list[SetRow] = []
    for row in rows:
        stretch.append(row)
        if len(stretch) == STRETCH:
            yield stretch
            stretch = []
    if stretch:
        yield stretch


def _cells(row: SetRow, columns: Iterable[Column]) -> tuple[Any, ...]:
    results = {result.name: result for result in row.results}
    return tuple(_cell(row, results, column) for column in columns)


def _cell(row: SetRow, results: Mapping[str, Result], column: Column) -> Any:
    if column.role == "run":
        value = row.run.get(column.name, 0 if column.number else "")
    elif column.role == "parameter":
        value = row.parameters.get(column.of)
    elif column.of not in results:
        value = None
    else:
        value = getattr(results[column.of], column.role)
        value = "" if value == "none" else value
    if column.number:
        return math.nan if value is None or value == "" else value
    text = "" if value is None else value if isinstance(value, str) else repr(value)
    return clean(text).encode()
