"""Runs without physics, for the tests of what keeps them."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, fields
from typing import Any

import numpy as np

from frontend_sim.archive import Record
from frontend_sim.scenario import Scenario
from frontend_sim.simulation import GridReport, Run, RunBlock

ARRAYS = ("time", "pin", "codes", "voltage", "overrange", "waveform_time")


def scenario(**changes: Any) -> Scenario:
    """Return a small scenario, invented; keyword arguments replace its tables."""
    values: dict[str, Any] = {
        "title": "Invented: a step through one section",
        "seed": 7,
        "stimulus": {"kind": "step", "before": 0.25, "after": 2.5, "at": "1 ms"},
        "chain": [
            {"kind": "rc-lowpass", "name": "input filter", "resistance": "1k", "capacitance": "1u"}
        ],
        "adc": {"rate": "20 kHz", "bits": 12, "high": 3.3, "input_noise": "1 mV"},
        "simulation": {"duration": "10 ms"},
    }
    return Scenario.model_validate({**values, **changes})


def made_run(
    values: Scenario,
    count: int,
    points: tuple[str, ...] = (),
    notes: tuple[str, ...] = (),
    grid: GridReport | None = None,
) -> Run:
    """Return a run of random numbers which uses the whole range of the converter's codes."""
    random = np.random.default_rng(count)
    low, high = values.adc.lowest_code, values.adc.highest_code
    codes = random.integers(low, high, count, endpoint=True)
    codes[:2] = (low, high)[: len(codes[:2])]
    return Run(
        values,
        time=np.cumsum(random.random(count)),
        pin=random.standard_normal(count),
        codes=codes,
        voltage=random.standard_normal(count),
        overrange=random.random(count) < 0.5,
        waveform_time=np.arange(2.0 * count) if points else np.empty(0),
        waveform={point: random.standard_normal(2 * count) for point in points},
        grid=grid,
        notes=notes,
    )


@dataclass
class Cut:
    """A finished run that comes in blocks, as a simulation does: conversions, then waveform.

    ``between`` is called before each block, with its number.
    """

    run: Run
    size: int
    between: Callable[[int], object] = lambda number: None

    @property
    def scenario(self) -> Scenario:
        return self.run.scenario

    @property
    def notes(self) -> tuple[str, ...]:
        return self.run.notes

    @property
    def grid(self) -> GridReport | None:
        return self.run.grid

    def blocks(self, progress: Callable[[float], None] | None = None) -> Iterator[RunBlock]:
        run, none = self.run, np.empty(0)
        empty = dict.fromkeys(run.waveform, none)
        no_codes, no_flags = np.empty(0, np.int64), np.empty(0, np.bool_)
        for number, start in enumerate(range(0, len(run.time), self.size)):
            self.between(number)
            here = slice(start, start + self.size)
            yield RunBlock(
                start, run.time[here], run.pin[here], run.codes[here], run.voltage[here],
                run.overrange[here], none, empty,
            )  # fmt: skip
            there = slice(2 * start, 2 * (start + self.size))
            if run.waveform:
                rows = {point: values[there] for point, values in run.waveform.items()}
                times = run.waveform_time[there]
                yield RunBlock(start, none, none, no_codes, none, no_flags, times, rows)
            if progress is not None:
                progress(min(start + self.size, len(run.time)) / len(run.time))


def assert_same(record: Run | Record, run: Run) -> None:
    """Compare two runs bit by bit, NaN included."""
    for name in ARRAYS:
        np.testing.assert_array_equal(getattr(record, name), getattr(run, name), strict=True)
    assert list(record.waveform) == list(run.waveform)
    for point, values in run.waveform.items():
        np.testing.assert_array_equal(record.waveform[point], values, strict=True)
    assert record.notes == run.notes
    assert as_dict(record.grid) == as_dict(run.grid)
    assert record.scenario == run.scenario


def as_dict(grid: GridReport | None) -> dict[str, Any] | None:
    """Return a report's values, which ``==`` compares."""
    if grid is None:
        return None
    return {field.name: getattr(grid, field.name) for field in fields(grid)}
