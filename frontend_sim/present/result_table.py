"""Measures and verdicts, for the terminal."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from frontend_sim.present.numbers import engineering, plain
from frontend_sim.quantities.counting import share_of

if TYPE_CHECKING:
    from rich.console import RenderableType
    from rich.table import Table
    from rich.text import Text

    from frontend_sim.measure.result import Result

PREFIXED = ("s", "V", "Hz", "V/s", "ohm", "F", "rad/s")
"""Units that are written with a prefix."""

WHOLE = {"conversions": "conversion", "ticks": "tick", "counts": "count", "codes": "code"}
"""Units of what is counted, and of one of them."""

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
        value, limit, margin = (
            checked(row[name], row["unit"]) for name in ("value", "limit", "margin")
        )
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
    verdict = "fails" if broken else "holds"
    share = share_of(broken or len(rows), len(rows), "check")
    return Text(f"verdict: {verdict}, {share}", style=STYLES[verdict])


def checked(value: float | None, unit: str) -> str:
    """Return a number of a check with its unit; plain numbers of checks are shares, as percent.

    What is not a number is ``"none"``; "" where none is.
    """
    if value is None:
        return ""
    if math.isnan(value):
        return "none"
    return quantity(100.0 * value, "%") if unit in ("", "1") else quantity(value, unit)


def quantity(value: float | None, unit: str) -> str:
    """Return a number with its unit, with a prefix where the unit takes one; "" where none is."""
    if value is None:
        return ""
    if unit in PREFIXED:
        return engineering(value, unit, 4)
    if unit in WHOLE and float(value).is_integer():
        return f"{value:.0f} {WHOLE[unit] if abs(value) == 1.0 else unit}"
    return plain(value) if unit in ("", "1") else f"{plain(value)} {unit}"
