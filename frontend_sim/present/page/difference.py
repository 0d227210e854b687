"""What changed since an earlier record, as a section of a page."""

from __future__ import annotations

import math
from collections.abc import Sequence

from frontend_sim.comparison import Change, RecordComparison, ResultDifference, SeriesDifference
from frontend_sim.comparison.series import DIFFERENT, Finding
from frontend_sim.measure.result import Result
from frontend_sim.present.comparison_table import result_text
from frontend_sim.present.numbers import engineering, plain
from frontend_sim.present.page.content import Cell, PageTable, Section, Tone, number


def difference_section(comparison: RecordComparison) -> Section:
    """Return what changed between two records."""
    text = [f"Compared with {comparison.first.name}."]
    if not comparison.changed:
        text.append("No parameter changed.")
    if not comparison.differs:
        text.append("Nothing differs by more than noise and tolerance.")
    tables = []
    if comparison.changed:
        tables.append(change_table(comparison.changed))
    tables.append(_series_table(comparison.series))
    if comparison.results:
        tables.append(_result_table(comparison.results))
    return Section("changes", "What changed", (*text, *comparison.notes), tuple(tables))


def change_table(changed: Sequence[Change]) -> PageTable:
    """Return changed parameters."""
    rows = tuple(
        (Cell(row.key), Cell(row.first or "not there"), Cell(row.second or "not there"))
        for row in changed
    )
    return PageTable("Changed parameters", ("parameter", "before", "now"), rows)


def tone_of(finding: Finding) -> Tone:
    """Return how a finding is meant."""
    if finding in DIFFERENT:
        return "fails"
    return "open" if finding == "not judged" else ""


def _series_table(rows: Sequence[SeriesDifference]) -> PageTable:
    head = ("signal", "mean", "error of mean", "rms", "peak", "at", "finding")
    return PageTable("Now less before", head, tuple(map(_series_row, rows)))


def _series_row(row: SeriesDifference) -> tuple[Cell, ...]:
    def told(value: float) -> Cell:
        return number(f"{plain(value, 3)} {row.unit}" if math.isfinite(value) else "")

    if row.of_noise:
        rms = f"{plain(row.mean, 3)} before, {plain(row.rms, 3)} {row.unit} now"
        cells = [number(text) for text in ("", "", rms, "", "")]
        return (Cell(row.name), *cells, Cell(row.finding, tone_of(row.finding)))
    error = told(row.shift.error) if row.shift is not None else number("exact")
    at = "" if row.where is None or not row.peak else engineering(row.where, "s", 4)
    return (
        Cell(row.name),
        told(row.mean),
        error,
        told(row.rms),
        told(row.peak),
        number(at),
        Cell(row.finding, tone_of(row.finding)),
    )


def _result_table(rows: Sequence[ResultDifference]) -> PageTable:
    head = ("measure or check", "before", "now", "change", "verdict", "finding")
    return PageTable("Measures and checks", head, tuple(map(_result_row, rows)))


def _result_row(row: ResultDifference) -> tuple[Cell, ...]:
    def told(side: Result | None) -> str:
        if side is None:
            return "not there"
        return "none" if side.value is None else result_text(row, side.value, side.unit)

    change = "" if math.isnan(row.change) else result_text(row, row.change)
    verdict = row.flip or (row.second.verdict if row.second is not None else "")
    return (
        Cell(row.name),
        number(told(row.first)),
        number(told(row.second)),
        number(change),
        Cell(verdict if verdict != "none" else ""),
        Cell(row.words, tone_of(row.finding)),
    )
