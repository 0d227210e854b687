"""The page of one record."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

from frontend_sim.archive import Record, ScanRecord
from frontend_sim.comparison import RecordComparison
from frontend_sim.measure.result import Result
from frontend_sim.present.numbers import engineering, fixed
from frontend_sim.present.page.content import Cell, Page, PageTable, Section, Tone, number
from frontend_sim.present.page.difference import difference_section
from frontend_sim.present.page.origin import caution_section, made, origin_section
from frontend_sim.present.page.render import embedded
from frontend_sim.present.part import part_text
from frontend_sim.present.result_table import SIGNS, checked, quantity
from frontend_sim.present.run_plot import run_figure
from frontend_sim.present.run_table import run_summary
from frontend_sim.quantities.counting import counted, share_of


def record_page(record: Record, since: RecordComparison | None = None) -> Page:
    """Return the page of a record.

    Parameters
    ----------
    since : what changed since an earlier record, where it was asked for
    """
    summary = run_summary(record)
    checks = [result for result in record.results if result.verdict != "none"]
    measures = [result for result in record.results if result.verdict == "none"]
    broken = [result for result in checks if result.verdict == "fails"]
    tone, verdict = verdict_of_checks(len(checks), len(broken))
    sections = [check_section(checks), *([difference_section(since)] if since else [])]
    sections.append(_signal_section(record, summary))
    if measures:
        sections.append(Section("measures", "Measures", (), (measure_table(measures),)))
    sections += [record_origin(record), caution_section()]
    return Page(
        record.title or record.path.name,
        tone,
        verdict,
        summary_of_checks(checks, broken),
        tuple(_facts(record, summary)),
        tuple(sections),
        made(),
    )


def verdict_of_checks(checks: int, broken: int) -> tuple[Tone, str]:
    """Return tone and words of a verdict."""
    if checks == 0:
        return "open", "No check was made"
    if broken:
        return "fails", f"Fails: {share_of(broken, checks, 'check')}"
    return "holds", f"Holds: {share_of(checks, checks, 'check')}"


def check_cells(result: Result) -> tuple[Cell, ...]:
    """Return a check as cells: name, verdict, value, limit, margin, what to do."""
    tone: Tone = "fails" if result.verdict == "fails" else "holds"
    limit = (
        f"{SIGNS.get(result.bound, '')}{checked(result.limit, result.unit)}"
        if result.limit is not None
        else ""
    )
    return (
        Cell(result.name),
        Cell(result.verdict, tone),
        number(checked(result.value, result.unit) or "none"),
        number(limit),
        number(
            checked(result.margin, result.unit),
            tone if tone == "fails" and result.margin is not None else "",
        ),
        Cell((result.advice or result.method) if tone == "fails" else ""),
    )


def measure_table(measures: Sequence[Result]) -> PageTable:
    """Return measures with the method by which they were found."""
    rows = tuple(
        (Cell(row.name), number(quantity(row.value, row.unit)), Cell(row.method))
        for row in measures
    )
    return PageTable("Measured numbers", ("measure", "value", "method"), rows)


def check_section(checks: Sequence[Result]) -> Section:
    """Return the verdicts, failures first."""
    if not checks:
        text = "The scenario has no check, so nothing was held against a limit."
        return Section("verdicts", "Verdicts", (text,))
    ordered = sorted(checks, key=lambda result: result.verdict != "fails")
    head = ("check", "verdict", "value", "limit", "margin", "what to change first")
    table = PageTable("Checks, failures first", head, tuple(map(check_cells, ordered)))
    return Section("verdicts", "Verdicts", (), (table,))


def _signal_section(record: Record, summary: dict[str, Any]) -> Section:
    count, beyond = summary["conversions"], summary["overrange"]
    description = (
        f"Pin voltage and codes of {counted(count, 'conversion')} over time with the limits of the "
        f"range, {beyond} of them beyond it; below, codes less pin in LSB, and the waveforms that "
        "were kept."
    )
    figure = embedded(run_figure(record), description, "What the pin did, and what the codes say.")
    return Section("signal", "The signal", part_text(record), (), (figure,))


def summary_of_checks(checks: Sequence[Result], broken: Sequence[Result]) -> str:
    """Return the first failure and what to do about it, or what lies nearest to its limit."""
    if broken:
        first = broken[0]
        return f"{first.name}: {(first.advice or first.method).partition(chr(10))[0]}"
    known = [result for result in checks if result.margin is not None and result.limit]
    if not known:
        return "Nothing fails." if checks else "Add [[check]] tables to the scenario to get one."
    nearest = min(known, key=lambda result: abs((result.margin or 0.0) / (result.limit or 1.0)))
    return f"Nearest to its limit: {nearest.name}, margin {check_cells(nearest)[4].text}."


def _facts(record: Record, summary: dict[str, Any]) -> Iterator[tuple[str, str]]:
    yield "conversions", f"{record.whole_count:,}"
    of_kept = "" if record.stretches is None else ", of those kept"
    if of_kept:
        yield "kept around failures", f"{record.count:,}"
    yield "rate", engineering(summary["rate"], "Hz")
    low, high = engineering(summary["low"], "V"), engineering(summary["high"], "V")
    yield "converter", f"{summary['bits']} bits, {low} to {high}"
    yield f"beyond the range{of_kept}", f"{summary['overrange']:,}"
    if summary["difference_rms"] is not None:
        yield f"codes less pin, rms{of_kept}", f"{fixed(summary['difference_rms'], 3)} LSB"


def record_origin(record: Record | ScanRecord) -> Section:
    """Return how a record was computed."""
    resolved = record.resolved
    facts = (
        ("record", record.path.name),
        ("run", record.created.isoformat(sep=" ", timespec="seconds")),
        ("seed", str(record.seed)),
        ("scenario digest (SHA-256)", record.scenario_digest),
        ("discretization", _discretization(resolved)),
        ("machine", f"{resolved.get('platform', '')} {resolved.get('machine', '')}".strip()),
    )
    listing = ("The scenario", record.scenario_text)
    return origin_section(facts, resolved["versions"], resolved["files"], record.notes, (listing,))


def _discretization(resolved: dict[str, Any]) -> str:
    settings = resolved["scenario"].get("simulation") or {}
    return str(settings.get("discretization", "exact"))
