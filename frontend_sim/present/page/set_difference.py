"""What changed since an earlier night, as a section of a page."""

from __future__ import annotations

import math

from frontend_sim.comparison import ColumnDifference, SetComparison
from frontend_sim.present.page.content import Cell, PageTable, Section, number
from frontend_sim.present.page.difference import change_table, tone_of
from frontend_sim.present.result_table import quantity

MOST_NAMES = 10


def set_difference_section(comparison: SetComparison) -> Section:
    """Return what changed between two nights."""
    text = [f"Compared with {comparison.first}: {comparison.matched} runs have the same name."]
    for names, word in ((comparison.added, "New"), (comparison.removed, "Gone")):
        if names:
            rest = len(names) - MOST_NAMES
            more = f" and {rest} more" if rest > 0 else ""
            text.append(f"{word}: {', '.join(names[:MOST_NAMES])}{more}.")
    if comparison.varied:
        told = ", ".join(f"{key} in {count} runs" for key, count in comparison.varied.items())
        text.append(f"Varied keys with other values: {told}.")
    if not comparison.changed:
        text.append("No value of the scenarios changed.")
    if not comparison.differs:
        text.append("Nothing differs by more than noise and tolerance.")
    tables = [change_table(comparison.changed)] if comparison.changed else []
    tables.append(column_table(comparison))
    notes = tuple(f"{note[:1].upper()}{note[1:]}." for note in comparison.notes)
    return Section("changes", "What changed", (*text, *notes), tuple(tables))


def column_table(comparison: SetComparison) -> PageTable:
    """Return how every check and measure differs over all runs."""
    head = (
        "check or measure", "mean change", "largest change", "worst margin", "now fail",
        "now hold", "finding",
    )  # fmt: skip
    note = (
        "Now less before, over all runs that both nights have. A mean with an error was judged "
        "against the noise of the runs, one without is exact."
    )
    return PageTable("Now less before", head, tuple(map(_row, comparison.columns)), note)


def _row(row: ColumnDifference) -> tuple[Cell, ...]:
    mean = _told(row.mean, row.unit)
    if row.shift is not None and math.isfinite(row.shift.error):
        mean += f" ± {_told(row.shift.error, row.unit)}"
    return (
        Cell(row.name),
        number(mean),
        number(_told(row.peak, row.unit)),
        number(_told(row.margin, row.unit)),
        number(str(row.worse)),
        number(str(row.better)),
        Cell(row.told if row.finding == "differs" else row.finding, tone_of(row.finding)),
    )


def _told(value: float, unit: str) -> str:
    return quantity(value, unit) if math.isfinite(value) else ""
