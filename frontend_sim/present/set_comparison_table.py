"""What differs between two nights: for the terminal, and for programs."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

from frontend_sim.comparison import ColumnDifference, SetComparison
from frontend_sim.comparison.series import DIFFERENT
from frontend_sim.present.comparison_table import (
    STYLES,
    attribution_data,
    attribution_table,
    change_data,
    changed_table,
    finite,
    verdict_line,
)
from frontend_sim.present.result_table import checked, quantity
from frontend_sim.quantities.counting import counted

if TYPE_CHECKING:
    from rich.console import RenderableType
    from rich.table import Table

MOST_NAMES = 10


def set_comparison_tables(comparison: SetComparison) -> tuple[RenderableType, ...]:
    """Return the tables of a comparison for the terminal, the verdict last."""
    from rich.text import Text

    title = (
        f"{comparison.first} and {comparison.second}: {counted(comparison.matched, 'run')} in both"
    )
    shown: list[RenderableType] = [Text(title, style="bold"), changed_table(comparison.changed)]
    for names, word in ((comparison.added, "added"), (comparison.removed, "removed")):
        if names:
            rest = len(names) - MOST_NAMES
            more = f" and {rest} more" if rest > 0 else ""
            shown.append(Text(f"{word}: {', '.join(names[:MOST_NAMES])}{more}"))
    if comparison.varied:
        told = ", ".join(
            f"{key} in {counted(count, 'run')}" for key, count in comparison.varied.items()
        )
        shown.append(Text(f"varied keys with other values: {told}"))
    shown.append(_column_table(comparison))
    if comparison.attribution is not None:
        shown.append(attribution_table(comparison.attribution))
    shown.append(verdict_line(comparison.alarms))
    return tuple(shown)


def _column_table(comparison: SetComparison) -> Table:
    from rich.table import Table
    from rich.text import Text

    table = Table(title="Second less first, over all runs", title_justify="left")
    for name in ("name", "mean", "largest", "worst margin", "now fail", "now hold", "finding"):
        table.add_column(name, justify="left" if name in ("name", "finding") else "right")
    for row in comparison.columns:
        cells = (mean_text(row), column_text(row, row.peak), column_text(row, row.margin))
        table.add_row(
            Text(row.name), *cells, str(row.worse), str(row.better), row.words,
            style=STYLES.get(row.finding, ""),
        )  # fmt: skip
    return table


def mean_text(row: ColumnDifference) -> str:
    """Return the mean of the differences, below it its standard error where there is one."""
    mean = column_text(row, row.mean)
    if row.shift is None or not math.isfinite(row.shift.error):
        return mean
    return f"{mean}\n± {column_text(row, row.shift.error)}"


def column_text(row: ColumnDifference, value: float) -> str:
    """Return a number of a check or measure with its unit; "" where there is none."""
    if not math.isfinite(value):
        return ""
    return checked(value, row.unit) if row.of_check else quantity(value, row.unit)


def set_comparison_summary(comparison: SetComparison) -> dict[str, Any]:
    """Return a comparison as plain data for JSON; None for what is not there."""
    return {
        "first": str(comparison.first),
        "second": str(comparison.second),
        "title": comparison.title,
        "matched": comparison.matched,
        "added": list(comparison.added),
        "removed": list(comparison.removed),
        "reseeded": comparison.reseeded,
        "records": comparison.records,
        "differs": comparison.differs,
        "alarms": list(comparison.alarms),
        "changed": [change_data(change) for change in comparison.changed],
        "varied": dict(comparison.varied),
        "columns": [_column_data(row) for row in comparison.columns],
        "attribution": attribution_data(comparison.attribution),
        "notes": list(comparison.notes),
    }


def _column_data(row: ColumnDifference) -> dict[str, Any]:
    return {
        "name": row.name,
        "unit": row.unit,
        "runs": row.runs,
        "mean": finite(row.mean),
        "error": None if row.shift is None else finite(row.shift.error),
        "largest": finite(row.peak),
        "worst_margin_change": finite(row.margin),
        "now_fail": row.worse,
        "now_hold": row.better,
        "exact": row.exact,
        "tolerance": row.tolerance,
        "finding": row.finding,
        "told": row.told,
        "differs": row.finding in DIFFERENT,
    }
