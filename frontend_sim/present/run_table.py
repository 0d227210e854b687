"""The summary of a run: for the terminal, and for programs."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from frontend_sim.measure.result import verdict_of
from frontend_sim.present.numbers import engineering, fixed, level, plain
from frontend_sim.present.result_table import result_tables
from frontend_sim.present.run_like import RunLike

if TYPE_CHECKING:
    from rich.console import RenderableType
    from rich.table import Table


def run_summary(run: RunLike) -> dict[str, Any]:
    """Return the numbers of a run as plain data for JSON, in SI units; None for what is not there.

    ``difference_rms`` is the rms value of codes read back less pin over the conversions within the
    range: quantization, noise and the converter's own errors together.
    """
    adc, time, pin, voltage = run.scenario.adc, run.time, run.pin, run.voltage
    codes, overrange = run.codes, run.overrange
    inside = ~overrange
    difference = (voltage - pin)[inside] / adc.lsb
    return {
        "title": run.scenario.title,
        "conversions": len(time),
        "rate": adc.rate,
        "first": _first(time),
        "last": _first(time[::-1]),
        "bits": adc.bits,
        "low": adc.low,
        "high": adc.high,
        "lsb": adc.lsb,
        "stimulus": _stimulus(run),
        "pin": _extent(pin),
        "codes": _extent(codes),
        "overrange": int(np.count_nonzero(overrange)),
        "difference_rms": _rms(difference),
        "difference_largest": float(np.max(np.abs(difference))) if len(difference) else None,
        "grid": _grid(run),
        "verdict": verdict_of(getattr(run, "results", ())),
        "results": [_plain(vars(result)) for result in getattr(run, "results", ())],
        "notes": list(run.notes),
    }


def _first(values: Any) -> float | None:
    return float(values[0]) if len(values) else None


def _rms(values: Any) -> float | None:
    return math.sqrt(float(np.mean(values**2))) if len(values) else None


def _extent(values: Any) -> dict[str, Any] | None:
    if len(values) == 0:
        return None
    extent = {"lowest": values.min(), "highest": values.max()}
    return {name: value.item() for name, value in extent.items()} | {"mean": float(values.mean())}


def _stimulus(run: RunLike) -> dict[str, Any] | None:
    """Return what arrived, where its waveform is kept, in its SI unit."""
    values = run.waveform.get("stimulus", ())
    extent = _extent(values)
    return None if extent is None else {**extent, "unit": run.scenario.stimulus_unit or "1"}


def _grid(run: RunLike) -> dict[str, Any] | None:
    return None if run.grid is None else _plain(vars(run.grid))


def _plain(values: dict[str, Any]) -> dict[str, Any]:
    """Leave out what JSON has no word for."""
    return {
        name: None if isinstance(value, float) and not math.isfinite(value) else value
        for name, value in values.items()
    }


def run_tables(run: RunLike) -> tuple[RenderableType, ...]:
    """Return the tables of a run for the terminal: the run, and its results where it has some."""
    results = [vars(result) for result in getattr(run, "results", ())]
    return (_main_table(run_summary(run)), *result_tables(results))


def run_table(run: RunLike) -> Table:
    """Return the table of a run without its results."""
    return _main_table(run_summary(run))


def _main_table(summary: dict[str, Any]) -> Table:
    from rich.table import Table
    from rich.text import Text

    table = Table(title=Text(summary["title"] or "Run"), show_header=False, title_justify="left")
    table.add_column("quantity")
    table.add_column("value", justify="right")
    for name, value in _rows(summary):
        table.add_row(name, value)
    return table


def _rows(summary: dict[str, Any]) -> list[tuple[str, str]]:
    count, lsb = summary["conversions"], summary["lsb"]
    rows = [("conversions", f"{count} at {engineering(summary['rate'], 'Hz')}")]
    if count == 0:
        return rows
    first, last = engineering(summary["first"], "s", 4), engineering(summary["last"], "s", 4)
    pin, codes = summary["pin"], summary["codes"]
    low, high = engineering(summary["low"], "V"), engineering(summary["high"], "V")
    beyond = summary["overrange"]
    rows += [
        ("from, to", f"{first}, {last}"),
        ("converter", f"{summary['bits']} bits, {low} to {high}, LSB {engineering(lsb, 'V', 4)}"),
        *_stimulus_rows(summary["stimulus"]),
        ("pin: lowest", engineering(pin["lowest"], "V", 5)),
        ("pin: mean", engineering(pin["mean"], "V", 5)),
        ("pin: highest", engineering(pin["highest"], "V", 5)),
        ("codes", f"{codes['lowest']} to {codes['highest']}"),
        ("beyond the range", f"{beyond} ({plain(100.0 * beyond / count, 3)} %)"),
    ]
    if summary["difference_rms"] is not None:
        rows.append(("codes less pin, rms", f"{fixed(summary['difference_rms'], 3)} LSB"))
    if (grid := summary["grid"]) is not None:
        rate = engineering(grid["grid_rate"], "Hz", 4)
        far = f"{plain(grid['largest_error'], 3)} LSB"
        if grid["method"] == "exact":
            rows += [("limits looked at", rate), ("half that rate changes, at most", far)]
        else:
            rows.append(("discrete model", f"{grid['method']} at {rate}"))
            rows.append(("model less exact, largest", far))
    return rows


def _stimulus_rows(stimulus: dict[str, Any] | None) -> list[tuple[str, str]]:
    if stimulus is None:
        return []
    unit = stimulus["unit"].removeprefix("1")
    return [
        (f"stimulus: {name}", level(stimulus[name], unit, 5))
        for name in ("lowest", "mean", "highest")
    ]
