"""The summary of a run: for the terminal, and for programs."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from frontend_sim.measure.acquisition import Acquisition
from frontend_sim.measure.result import verdict_of
from frontend_sim.present.acquisition_rows import acquisition_rows
from frontend_sim.present.aliasing_table import (
    aliasing_in,
    aliasing_summary,
    aliasing_table,
    run_alias_error,
)
from frontend_sim.present.numbers import engineering, fixed, level, plain
from frontend_sim.present.result_table import result_tables
from frontend_sim.quantities import SignalUnit
from frontend_sim.scenario.told_unit import told_unit
from frontend_sim.simulation.finished import RunLike

if TYPE_CHECKING:
    from rich.console import RenderableType
    from rich.table import Table


def run_summary(run: RunLike) -> dict[str, Any]:
    """Return the numbers of a run as plain data for JSON, in SI units; None for what is not there.

    ``difference_rms`` is the rms value of codes read back less pin over the conversions within the
    range: quantization, noise and the converter's own errors together. ``aliasing`` tells what
    folds, and what that does to the codes where it is no long work.
    """
    aliasing = aliasing_in(run)
    told = None if aliasing is None else aliasing_summary(aliasing, run_alias_error(run, aliasing))
    return {**_summary(run), "aliasing": told}


def _summary(run: RunLike) -> dict[str, Any]:
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
        "acquisition": _acquisition(run),
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
    """Return what arrived, in its SI unit: at the conversions, and where a waveform is kept."""
    at_conversions, kept = run.stimulus, run.waveform.get("stimulus", np.empty(0))
    extent = _extent(np.concatenate([at_conversions, kept]))
    if extent is None:
        return None
    mean = float((kept if len(kept) else at_conversions).mean())
    ends = {"first": _first(at_conversions), "last": _first(at_conversions[::-1])}
    return {**extent, "mean": mean, **ends, "unit": run.scenario.stimulus_unit or "1"}


def _grid(run: RunLike) -> dict[str, Any] | None:
    return None if run.grid is None else _plain(vars(run.grid))


def _acquisition(run: RunLike) -> dict[str, Any] | None:
    """Return how well the converter's input network settled; None where it has none."""
    found, held = Acquisition.of(run.scenario), run.held
    if found is None:
        return None
    error = np.abs(held - run.pin) / run.scenario.adc.lsb
    return {**_plain(vars(found)), "largest_error": float(np.max(error)) if len(held) else None}


def _plain(values: dict[str, Any]) -> dict[str, Any]:
    """Leave out what JSON has no word for."""
    return {
        name: None if isinstance(value, float) and not math.isfinite(value) else value
        for name, value in values.items()
    }


def run_tables(run: RunLike) -> tuple[RenderableType, ...]:
    """Return the tables of a run for the terminal: the run, and its results where it has some."""
    results = [vars(result) for result in getattr(run, "results", ())]
    aliasing = aliasing_in(run)
    folds = None
    if aliasing is not None:
        folds = aliasing_table(aliasing, run_alias_error(run, aliasing))
    between = () if folds is None else (folds,)
    return (run_table(run), *between, *result_tables(results))


def run_table(run: RunLike) -> Table:
    """Return the table of a run without its results."""
    from rich.table import Table
    from rich.text import Text

    summary, unit = _summary(run), told_unit(run.scenario)
    table = Table(title=Text(summary["title"] or "Run"), show_header=False, title_justify="left")
    table.add_column("quantity")
    table.add_column("value", justify="right")
    for name, value in _rows(summary, unit):
        table.add_row(name, value)
    return table


def _rows(summary: dict[str, Any], unit: SignalUnit) -> list[tuple[str, str]]:
    count, lsb = summary["conversions"], summary["lsb"]
    rows = [("conversions", f"{count:,} at {engineering(summary['rate'], 'Hz')}")]
    if count == 0:
        return rows
    first, last = engineering(summary["first"], "s", 4), engineering(summary["last"], "s", 4)
    pin, codes = summary["pin"], summary["codes"]
    low, high = engineering(summary["low"], "V"), engineering(summary["high"], "V")
    beyond = summary["overrange"]
    rows += [
        ("from, to", f"{first}, {last}"),
        ("converter", f"{summary['bits']} bits, {low} to {high}, LSB {engineering(lsb, 'V', 4)}"),
        *_stimulus_rows(summary["stimulus"], unit),
        ("pin: lowest", engineering(pin["lowest"], "V", 5)),
        ("pin: mean", engineering(pin["mean"], "V", 5)),
        ("pin: highest", engineering(pin["highest"], "V", 5)),
        ("codes", f"{codes['lowest']} to {codes['highest']}"),
        ("beyond the range", f"{beyond:,} ({plain(100.0 * beyond / count, 3)} %)"),
    ]
    if summary["difference_rms"] is not None:
        rows.append(("codes less pin, rms", f"{fixed(summary['difference_rms'], 3)} LSB"))
    if (found := summary["acquisition"]) is not None:
        found = dict(found)
        rows.append(("held less pin, largest", f"{plain(found.pop('largest_error'), 3)} LSB"))
        rows += acquisition_rows(Acquisition(**found))
    if (grid := summary["grid"]) is not None:
        rate = engineering(grid["grid_rate"], "Hz", 4)
        far = f"{plain(grid['largest_error'], 3)} LSB"
        if grid["method"] == "exact":
            rows += [("limits looked at", rate), ("half that rate changes, at most", far)]
        else:
            rows.append(("discrete model", f"{grid['method']} at {rate}"))
            rows.append(("model less exact, largest", far))
    return rows


def _stimulus_rows(stimulus: dict[str, Any] | None, unit: SignalUnit) -> list[tuple[str, str]]:
    if stimulus is None:
        return []
    names = {
        "lowest": "lowest",
        "mean": "mean",
        "highest": "highest",
        "first": "at the first conversion",
        "last": "at the last conversion",
    }
    return [
        (f"stimulus: {name}", level(stimulus[key], unit, 5))
        for key, name in names.items()
        if stimulus[key] is not None
    ]
