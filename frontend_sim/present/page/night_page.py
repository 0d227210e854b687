"""The page of a night."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from frontend_sim.comparison import SetComparison
from frontend_sim.measure.statistics import worst_order
from frontend_sim.present.night_table import share, shown
from frontend_sim.present.numbers import counted, engineering, plain, share_of
from frontend_sim.present.page.content import (
    Cell,
    Page,
    PageTable,
    Section,
    Tone,
    number,
)
from frontend_sim.present.page.night_spread import measure_section, of_group, spread_sections
from frontend_sim.present.page.origin import caution_section, made, origin_section
from frontend_sim.present.page.set_difference import set_difference_section
from frontend_sim.present.result_table import PREFIXED, SIGNS
from frontend_sim.summary import CheckSummary, NightSummary

MOST_ROWS = 20
"""Failing runs that are listed; the table of the set has all of them."""


def night_page(summary: NightSummary, since: SetComparison | None = None) -> Page:
    """Return the page of a night.

    Parameters
    ----------
    since : what changed since an earlier night, where it was asked for
    """
    tone, verdict = _verdict(summary)
    sections = [_verdict_section(summary)]
    if summary.checks:
        sections.append(_worst_section(summary))
    if since is not None:
        sections.append(set_difference_section(since))
    spread = (*spread_sections(summary), measure_section(summary))
    sections += [section for section in spread if section is not None]
    sections += [_origin(summary), caution_section()]
    return Page(
        summary.table.title or summary.table.path.parent.name,
        tone,
        verdict,
        _next_thing(summary),
        tuple(_facts(summary)),
        tuple(sections),
        made(),
    )


def parameter_text(value: float | str, unit: str) -> str:
    """Return the value of a parameter with its unit."""
    if isinstance(value, str):
        return value
    if unit == "K":
        return f"{plain(value - 273.15, 4)} degC"
    if unit in PREFIXED:
        return engineering(value, unit, 4)
    return f"{plain(value, 5)} {unit}".removesuffix(" 1")


def _verdict(summary: NightSummary) -> tuple[Tone, str]:
    fails, errors, runs = summary.counts["fails"], len(summary.errors), summary.runs
    if fails:
        return "fails", f"Fails in {share_of(fails, runs, 'run')}"
    if errors or not summary.table.complete:
        missing = summary.table.planned - runs
        return "open", f"Incomplete: {counted(errors, 'run')} without a result, {missing} missing"
    if not summary.checks:
        return "open", "No check was made"
    return "holds", f"Holds in {share_of(runs, runs, 'run')}"


def _next_thing(summary: NightSummary) -> str:
    broken = [check for check in summary.checks if check.fails]
    if broken:
        first = broken[0]
        advice = str(summary.table.texts("advice")[first.worst])
        name = summary.table.names[first.worst]
        return f"{first.name} is worst in {name}: {advice}" if advice else f"Worst run: {name}."
    if summary.warnings:
        return summary.warnings[0][:1].upper() + summary.warnings[0][1:] + "."
    if not summary.checks:
        return "Add [[check]] tables to the scenarios to get a verdict."
    return "Nothing fails, and nothing is missing."


def _facts(summary: NightSummary) -> Iterator[tuple[str, str]]:
    yield "runs", f"{summary.runs} of {summary.table.planned}"
    if summary.rate is not None:
        which = f" of {summary.group}, the worst group" if summary.group else ""
        yield f"yield of {summary.rate.total} draws{which}, 95 %", share(summary.rate)
    corners = int(np.count_nonzero(summary.population.corner))
    if corners:
        yield "corners", f"{corners}"
    yield "checks", f"{len(summary.checks)}"
    yield "computing time", _duration(float(np.sum(summary.table.numbers("seconds"))))


def _duration(seconds: float) -> str:
    if seconds < 120.0:
        return f"{seconds:.3g} s"
    return f"{seconds / 60.0:.0f} min" if seconds < 7200.0 else f"{seconds / 3600.0:.1f} h"


def _verdict_section(summary: NightSummary) -> Section:
    head = ("check", "verdict", "fails in", "worst margin", "yield of draws, 95 % interval")
    rows = tuple(_check_row(check) for check in summary.checks)
    tables = [PageTable("Checks, failures first", head, rows)] if rows else []
    failing = _failing_table(summary)
    if failing is not None:
        tables.append(failing)
    if summary.errors:
        listed = tuple((Cell(a), Cell(b, "fails")) for a, b in summary.errors[:MOST_ROWS])
        note = _rest(len(summary.errors))
        tables.append(PageTable("Runs without a result", ("run", "why"), listed, note))
    text = tuple(f"{warning[:1].upper()}{warning[1:]}." for warning in summary.warnings)
    if not summary.checks:
        told = "The scenarios have no check, so nothing was held against a limit."
        text = (told, *text)
    return Section("verdicts", "Verdicts", text, tuple(tables))


def _check_row(check: CheckSummary) -> tuple[Cell, ...]:
    tone: Tone = "fails" if check.fails else "holds"
    margin = float(check.column.margin[check.worst])
    return (
        Cell(check.name),
        Cell(tone, tone),
        number(f"{check.fails} of {check.runs}"),
        number(shown(margin, check)),
        number("" if check.rate is None else f"{share(check.rate)}{of_group(check)}"),
    )


def _failing_table(summary: NightSummary) -> PageTable | None:
    failing = np.flatnonzero(summary.table.verdicts == "fails")
    if len(failing) == 0:
        return None
    advice, records = summary.table.texts("advice"), summary.table.texts("record")
    found = []
    for check in summary.checks:
        broken = np.flatnonzero(check.column.verdict == "fails")
        if len(broken) == 0:
            continue
        worst = broken[worst_order(check.column.margin[broken])][:MOST_ROWS].tolist()
        found += [(check, run) for run in worst]
    rows = tuple(
        (
            Cell(summary.table.names[run]),
            Cell(check.name),
            number(shown(float(check.column.margin[run]), check), "fails"),
            number(shown(float(check.column.value[run]), check)),
            Cell(str(advice[run])),
            Cell(str(records[run]) or "not kept"),
        )
        for check, run in found[:MOST_ROWS]
    )
    head = ("run", "check", "margin", "value", "what to change first", "record")
    return PageTable("Runs that fail, the worst first", head, rows, _rest(len(found)))


def _rest(count: int) -> str:
    rest = count - MOST_ROWS
    return f"{rest} more stand in the table of the set." if rest > 0 else ""


def _worst_section(summary: NightSummary) -> Section:
    head = ("check", "worst run", "value", "limit", "margin", "parameters there")
    rows = tuple(_worst_row(summary, check) for check in summary.checks)
    text = (
        "The run with the smallest margin of each check; no run of this night is worse. What "
        "was not drawn may be."
    )
    return Section(
        "worst", "Worst cases", (text,), (PageTable("Worst run of each check", head, rows),)
    )


def _worst_row(summary: NightSummary, check: CheckSummary) -> tuple[Cell, ...]:
    run, column = check.worst, check.column
    told = [
        f"{key} = {parameter_text(value, summary.unit_of(key))}"
        for key, value in summary.parameters_of(run).items()
    ]
    tone: Tone = "fails" if column.verdict[run] == "fails" else ""
    return (
        Cell(check.name),
        Cell(summary.table.names[run]),
        number(shown(float(column.value[run]), check)),
        number(SIGNS.get(column.bound_in(run), "") + shown(float(column.limit[run]), check)),
        number(shown(float(column.margin[run]), check), tone),
        Cell("\n".join(told) or "nominal"),
    )


def _origin(summary: NightSummary) -> Section:
    table = summary.table
    facts = (
        ("set", str(table.path)),
        ("begun", table.created.isoformat(sep=" ", timespec="seconds")),
        ("seed of the set", str(table.seed)),
        ("seed of a run", "from the seed of the set and the name of the run"),
        ("digest of all scenarios and results (SHA-256)", table.digest),
        ("runs", f"{summary.runs} of {table.planned}"),
        ("interval of a yield", "mid-p, 95 %: half of the probability of what was seen counts"),
    )
    bases = zip(table.base_names, table.base_texts, strict=True)
    listings = [("The set", table.text), *((f"Scenario {name}", text) for name, text in bases)]
    return origin_section(facts, table.versions, (), (), listings)
