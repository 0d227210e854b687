"""Measures and verdicts, for the terminal."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from frontend_sim.present.numbers import counted, engineering, plain

if TYPE_CHECKING:
    from rich.console import RenderableType
    from rich.table import Table
    from rich.text import Text

    from frontend_sim.measure.result import Result

PREFIXED = ("s", "V", "Hz", "V/s", "ohm", "F", "rad/s")
"""Units that are written with a prefix."""

WHOLE = ("conversions", "ticks", "counts", "codes")
"""Units of what is counted."""

SIGNS = {"at most": "≤ ", "at least": "≥ "}

STYLES = {"fails": "bold red", "holds": "green"}


def result_tables(results: Sequence[dict[str, Any]]) -> tuple[RenderableType, ...]:
    """Return a table of measures, one of checks, and a sentence for each check that fails.

    Parameters
    ----------
    results : rows with the names of ``measure.result.Result``
    """
    measures = [row for row in results if row["verdict"] == "none"]
    checks = [row for row in results if row["verdict"] != "none"]
    shown: list[RenderableType] = []
    if measures:
        shown.append(_measure_table(measures))
    if checks:
        shown.append(_check_table(checks))
        shown.extend(_sentence(row) for row in checks if row["verdict"] == "fails")
        shown.append(_verdict(checks))
    return tuple(shown)


def plain_results(results: Sequence[Result]) -> list[dict[str, Any]]:
    """Return results as plain data for JSON: None for numbers that JSON has no word for."""
    return [
        {
            name: None if isinstance(value, float) and not math.isfinite(value) else value
            for name, value in vars(row).items()
        }
        for row in results
    ]


def _measure_table(rows: Sequence[dict[str, Any]]) -> Table:
    from rich.table import Table
    from rich.text import Text

    table = Table(title="Measures", title_justify="left")
    for name in ("measure", "value", "method"):
        table.add_column(name, justify="right" if name == "value" else "left")
    for row in rows:
        value = quantity(row["value"], row["unit"])
        table.add_row(Text(row["name"]), value, Text(row["method"]))
    return table


def _check_table(rows: Sequence[dict[str, Any]]) -> Table:
    from rich.table import Table
    from rich.text import Text

    table = Table(title="Checks", title_justify="left")
    for name in ("check", "value", "limit", "margin", "verdict"):
        table.add_column(name, justify="left" if name in ("check", "verdict") else "right")
    for row in rows:
        value, limit, margin = (checked_text(row, name) for name in ("value", "limit", "margin"))
        sign = SIGNS.get(row["bound"], "") if limit else ""
        cells = (Text(row["name"]), value or "none", sign + limit, margin, row["verdict"])
        table.add_row(*cells, style=STYLES[row["verdict"]])
    return table


def _sentence(row: dict[str, Any]) -> Text:
    from rich.text import Text

    return Text(f"{row['name']} fails: {row['advice'] or row['method']}", style=STYLES["fails"])


def _verdict(rows: Sequence[dict[str, Any]]) -> Text:
    from rich.text import Text

    broken = sum(row["verdict"] == "fails" for row in rows)
    if broken:
        of = counted(len(rows), "check")
        return Text(f"verdict: fails, {broken} of {of}", style=STYLES["fails"])
    which = "1 check" if len(rows) == 1 else f"all of {len(rows)} checks"
    return Text(f"verdict: holds, {which}", style=STYLES["holds"])


def checked_text(row: dict[str, Any], name: str) -> str:
    """Return a number of a check; plain numbers of checks are shares, and read as percent."""
    value, unit = row[name], row["unit"]
    if value is not None and unit in ("", "1"):
        return quantity(100.0 * value, "%")
    return quantity(value, unit)


def quantity(value: float | None, unit: str) -> str:
    """Return a number with its unit, with a prefix where the unit takes one; "" where none is."""
    if value is None:
        return ""
    if unit in PREFIXED:
        return engineering(value, unit, 4)
    if unit in WHOLE and float(value).is_integer():
        return f"{value:.0f} {unit}"
    return plain(value) if unit in ("", "1") else f"{plain(value)} {unit}"
