"""What changed since an earlier night, as a section of a page."""

from __future__ import annotations

from frontend_sim.comparison import ColumnDifference, SetComparison
from frontend_sim.present.page.content import Cell, PageTable, Section, number
from frontend_sim.present.page.difference import change_table, tone_of
from frontend_sim.present.set_comparison_table import column_text, mean_text
from frontend_sim.quantities.counting import counted

MOST_NAMES = 10


def set_difference_section(comparison: SetComparison) -> Section:
    """Return what changed between two nights."""
    text = [
        f"Compared with {comparison.first}: {counted(comparison.matched, 'run has', 'runs have')} "
        "the same name."
    ]
    for names, word in ((comparison.added, "New"), (comparison.removed, "Gone")):
        if names:
            rest = len(names) - MOST_NAMES
            more = f" and {rest} more" if rest > 0 else ""
            text.append(f"{word}: {', '.join(names[:MOST_NAMES])}{more}.")
    if comparison.varied:
        told = ", ".join(
            f"{key} in {counted(count, 'run')}" for key, count in comparison.varied.items()
        )
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
    return (
        Cell(row.name),
        number(mean_text(row)),
        number(column_text(row, row.peak)),
        number(column_text(row, row.margin)),
        number(str(row.worse)),
        number(str(row.better)),
        Cell(row.words, tone_of(row.finding)),
    )
