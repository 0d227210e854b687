"""What differs between two runs: for the terminal, and for programs."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING, Any

from frontend_sim.comparison import (
    Attribution,
    Change,
    RecordComparison,
    ResultDifference,
    SeriesDifference,
)
from frontend_sim.comparison.series import DIFFERENT
from frontend_sim.present.numbers import engineering, plain
from frontend_sim.present.result_table import checked, quantity

if TYPE_CHECKING:
    from rich.console import RenderableType
    from rich.table import Table

STYLES = {
    "differs": "bold red",
    "removed": "bold red",
    "not comparable": "bold red",
    "not judged": "yellow",
    "within tolerance": "green",
    "within noise": "green",
}


def comparison_tables(comparison: RecordComparison) -> tuple[RenderableType, ...]:
    """Return the tables of a comparison for the terminal, the verdict last."""
    from rich.text import Text

    title = f"{comparison.first} and {comparison.second}"
    shown: list[RenderableType] = [Text(title, style="bold"), changed_table(comparison.changed)]
    shown.append(_series_table(comparison.series))
    if comparison.results:
        shown.append(_result_table(comparison.results))
    if comparison.attribution is not None:
        shown.append(attribution_table(comparison.attribution))
    shown.append(verdict_line(comparison.alarms))
    return tuple(shown)


def verdict_line(alarms: Sequence[str]) -> RenderableType:
    """Return the last line: what differs, or that nothing does."""
    from rich.text import Text

    if alarms:
        return Text(f"differs: {'; '.join(alarms)}", style=STYLES["differs"])
    return Text("nothing differs by more than noise and tolerance", style="green")


def changed_table(changed: Sequence[Change]) -> RenderableType:
    """Return the table of changed parameters, or a sentence where there is none."""
    from rich.table import Table
    from rich.text import Text

    if not changed:
        return Text("no parameter changed")
    table = Table(title="Changed parameters", title_justify="left")
    for name in ("parameter", "first", "second", "ratio"):
        table.add_column(name, justify="right" if name == "ratio" else "left")
    for change in changed:
        ratio = "" if change.ratio is None else plain(change.ratio, 4)
        first, second = Text(change.first or "-"), Text(change.second or "-")
        table.add_row(Text(change.key), first, second, ratio)
    return table


def _series_table(rows: Sequence[SeriesDifference]) -> Table:
    from rich.table import Table
    from rich.text import Text

    table = Table(title="Second less first", title_justify="left")
    for name in ("signal", "mean", "error of mean", "rms", "peak", "at", "finding"):
        table.add_column(name, justify="left" if name in ("signal", "finding") else "right")
    for row in rows:
        cells = _noise_cells(row) if row.of_noise else _series_cells(row)
        table.add_row(Text(row.name), *cells, row.finding, style=STYLES.get(row.finding, ""))
    return table


def _series_cells(row: SeriesDifference) -> list[str]:
    if row.count == 0:
        return [row.told, "", "", "", ""]
    error = "" if row.shift is None else _with_unit(row.shift.error, row.unit)
    at = "" if row.where is None or row.peak == 0.0 else engineering(row.where, "s", 4)
    mean, rms, peak = (_with_unit(value, row.unit) for value in (row.mean, row.rms, row.peak))
    return [mean, error, rms, peak, at]


def _noise_cells(row: SeriesDifference) -> list[str]:
    """Return the cells of noise, whose numbers are the rms of both runs and the change."""
    return ["", "", f"{plain(row.mean, 3)} to {plain(row.rms, 3)} {row.unit}", "", ""]


def _with_unit(value: float, unit: str) -> str:
    return f"{plain(value, 3)} {unit}".rstrip() if math.isfinite(value) else ""


def _result_table(rows: Sequence[ResultDifference]) -> Table:
    from rich.table import Table
    from rich.text import Text

    table = Table(title="Measures and checks", title_justify="left")
    for name in ("name", "first", "second", "change", "margin", "verdict", "finding"):
        left = name in ("name", "verdict", "finding")
        table.add_column(name, justify="left" if left else "right")
    for row in rows:
        table.add_row(Text(row.name), *_result_cells(row), style=STYLES.get(row.finding, ""))
    return table


def result_text(row: ResultDifference, value: float, unit: str = "") -> str:
    """Return a number of a result with its unit; a share in percent where it is a check.

    Parameters
    ----------
    unit : in place of that of the row
    """
    sides = (side.verdict for side in (row.first, row.second) if side is not None)
    tell = quantity if all(verdict == "none" for verdict in sides) else checked
    return tell(value, unit or row.unit)


def _result_cells(row: ResultDifference) -> list[str]:
    def told(value: float | None) -> str:
        return "none" if value is None or math.isnan(value) else result_text(row, value)

    first, second = ("-" if side is None else told(side.value) for side in (row.first, row.second))
    margin = "" if row.second is None or row.second.margin is None else told(row.second.margin)
    verdicts = [side.verdict for side in (row.first, row.second) if side is not None]
    verdict = " to ".join(dict.fromkeys(verdicts)).replace("none", "")
    change = "" if math.isnan(row.change) else result_text(row, row.change)
    if row.shift is not None and math.isfinite(row.shift.error):
        change = f"{told(row.shift.mean)} ± {told(row.shift.error)}"
    return [first, second, change, margin, verdict, row.words]


def attribution_table(attribution: Attribution) -> Table:
    """Return which parameter moved which measure, and what they do together beyond the sum."""
    from rich.table import Table
    from rich.text import Text

    table = Table(title="What each change does alone", title_justify="left")
    for name in ("measure", "parameter", "moves it by"):
        table.add_column(name, justify="right" if name == "moves it by" else "left")
    for measure, unit in attribution.units.items():
        total = attribution.total[measure]
        if not math.isfinite(total):
            continue
        known = [(row.key, row.moved.get(measure, 0.0)) for row in attribution.shares]
        moved = sorted((pair for pair in known if pair[1]), key=lambda pair: -abs(pair[1]))
        if not moved and total == 0.0:
            continue
        margin = measure in attribution.margins
        name = f"{measure}: margin" if margin else measure
        remainder = attribution.remainder(measure)
        for key, value in moved:
            table.add_row(Text(name), Text(key), _moved(value, unit, margin))
        table.add_row(Text(name), "beyond the sum", _moved(remainder, unit, margin))
        table.add_row(Text(name), "all together", _moved(total, unit, margin), style="bold")
        table.add_section()
    for row in attribution.shares:
        if row.fault:
            table.add_row("", Text(row.key), Text(f"cannot be run alone: {row.fault}"))
    return table


def _moved(value: float, unit: str, of_check: bool) -> str:
    if value == 0.0:
        return "none"
    told = checked(value, unit) if of_check else quantity(value, unit)
    return f"+{told}" if value > 0.0 else told


def comparison_summary(comparison: RecordComparison) -> dict[str, Any]:
    """Return a comparison as plain data for JSON; None for what is not there."""
    return {
        "first": str(comparison.first),
        "second": str(comparison.second),
        "title": comparison.title,
        "seeds": list(comparison.seeds),
        "differs": comparison.differs,
        "alarms": list(comparison.alarms),
        "changed": [change_data(change) for change in comparison.changed],
        "series": [_series_data(row) for row in comparison.series],
        "results": [_result_data(row) for row in comparison.results],
        "attribution": attribution_data(comparison.attribution),
        "notes": list(comparison.notes),
    }


def change_data(change: Change) -> dict[str, Any]:
    """Return a changed parameter as plain data."""
    return {
        "key": change.key,
        "first": change.first,
        "second": change.second,
        "ratio": change.ratio,
    }


def _series_data(row: SeriesDifference) -> dict[str, Any]:
    names = ("mean", "rms", "peak", "where")
    if row.of_noise:
        names = ("first", "second", "change", "where")
    numbers = dict(zip(names, (row.mean, row.rms, row.peak, row.where), strict=True))
    return {
        "name": row.name,
        "unit": row.unit,
        "count": row.count,
        **{name: finite(value) for name, value in numbers.items()},
        "error": None if row.shift is None else finite(row.shift.error),
        "visible": finite(row.visible),
        "tolerance": row.tolerance,
        "finding": row.finding,
        "told": row.told,
        "differs": row.finding in DIFFERENT,
    }


def _result_data(row: ResultDifference) -> dict[str, Any]:
    sides = {
        name: None
        if side is None
        else {
            "value": finite(side.value),
            "margin": finite(side.margin),
            "limit": finite(side.limit),
            "verdict": side.verdict,
        }
        for name, side in (("first", row.first), ("second", row.second))
    }
    return {
        "name": row.name,
        "unit": row.unit,
        **sides,
        "change": finite(row.change),
        "margin_change": finite(row.margin_change),
        "flip": row.flip,
        "noisy": row.noisy,
        "tolerance": row.tolerance,
        "finding": row.finding,
        "differs": row.finding in DIFFERENT,
    }


def attribution_data(attribution: Attribution | None) -> dict[str, Any] | None:
    """Return an attribution as plain data."""
    if attribution is None:
        return None
    return {
        "units": dict(attribution.units),
        "margins": sorted(attribution.margins),
        "total": {name: finite(value) for name, value in attribution.total.items()},
        "parameters": [
            {
                "key": row.key,
                "moved": {name: finite(value) for name, value in row.moved.items()},
                "fault": row.fault,
            }
            for row in attribution.shares
        ],
        "remainder": dict(_remainders(attribution)),
    }


def _remainders(attribution: Attribution) -> Iterator[tuple[str, float | None]]:
    for name in attribution.total:
        yield name, finite(attribution.remainder(name))


def finite(value: float | None) -> float | None:
    """Return a number that JSON has a word for, None for any other."""
    return None if value is None or not math.isfinite(value) else value
