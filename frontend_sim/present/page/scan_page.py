"""The page of the record of a scan."""

from __future__ import annotations

from dataclasses import replace

from frontend_sim.archive import ScanRecord
from frontend_sim.comparison import RecordComparison
from frontend_sim.measure.result import Result
from frontend_sim.present.page.content import Page, Section
from frontend_sim.present.page.difference import difference_section
from frontend_sim.present.page.origin import caution_section, made
from frontend_sim.present.page.record_page import (
    check_section,
    measure_table,
    record_origin,
    summary_of_checks,
    verdict_of_checks,
)
from frontend_sim.present.page.render import embedded
from frontend_sim.present.part import part_text
from frontend_sim.present.scan_plot import scan_figure
from frontend_sim.quantities.counting import counted


def scan_page(record: ScanRecord, since: RecordComparison | None = None) -> Page:
    """Return the page of a scan; see ``record_page``."""
    results = [*_named(record), *record.results]
    checks = [result for result in results if result.verdict != "none"]
    measures = [result for result in results if result.verdict == "none"]
    broken = [result for result in checks if result.verdict == "fails"]
    tone, verdict = verdict_of_checks(len(checks), len(broken))
    description = (
        f"Codes and pins of {counted(len(record.channels), 'channel')} over time: "
        f"{', '.join(record.channels)}."
    )
    figure = embedded(scan_figure(record), description, "What each channel saw.")
    sections = [check_section(checks), *([difference_section(since)] if since else [])]
    # All channels keep the same stretches.
    told = part_text(next(iter(record.channels.values())))
    sections.append(Section("signal", "The signals", told, (), (figure,)))
    if measures:
        sections.append(Section("measures", "Measures", (), (measure_table(measures),)))
    sections += [record_origin(record), caution_section()]
    counts = [channel.whole_count for channel in record.channels.values()]
    return Page(
        record.title or record.path.name,
        tone,
        verdict,
        summary_of_checks(checks, broken),
        (("channels", f"{len(counts)}"), ("conversions", f"{sum(counts):,}")),
        tuple(sections),
        made(),
    )


def _named(record: ScanRecord) -> list[Result]:
    return [
        replace(result, name=f"{name}: {result.name}")
        for name, channel in record.channels.items()
        for result in channel.results
    ]
