"""The page of a night."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from frontend_sim.comparison import SetComparison
from frontend_sim.measure.statistics import worst_order
from frontend_sim.present.night_table import share, shown
from frontend_sim.present.numbers import engineering, plain
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
from frontend_sim.quantities.counting import counted, share_of
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
    complete = summary.table.complete and not errors
    if fails:
        told = f"Fails in {share_of(fails, runs, 'run')}"
        return "fails", told if complete else f"{told}; incomplete"
    if not complete:
        missing = summary.table.planned - runs
        if not errors and not missing:
            return "open", "Incomplete: it was stopped before it knew whether this is all"
        return "open", f"Incomplete: {counted(errors, 'run')} without a result, {missing:,} missing"
    if not summary.checks:
        return "open", "No check was made"
    return "holds", f"Holds in {share_of(runs, runs, 'run')}"


def _next_thing(summary: NightSummary) -> str:
    broken = [check for check in summary.checks if check.fails]
    if broken:
        first = broken[0]
        name, advice = summary.table.names[first.worst], _advice(summary, first, first.worst)
        return f"{first.name} is worst in {name}" + (f": {advice}" if advice else ".")
    if summary.warnings:
        return summary.warnings[0][:1].upper() + summary.warnings[0][1:] + "."
    if not summary.checks:
        return "Add [[check]] tables to the scenarios to get a verdict."
    return "Nothing fails, and nothing is missing."


def _facts(summary: NightSummary) -> Iterator[tuple[str, str]]:
    yield "runs", f"{summary.runs:,} of {summary.table.planned:,}"
    if summary.rate is not None:
        which = f" of {summary.group}, the worst group" if summary.group else ""
        yield f"yield of {counted(summary.rate.total, 'draw')}{which}, 95 %", share(summary.rate)
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
    drawn = any(check.rate is not None for check in summary.checks)
    head: tuple[str, ...] = ("check", "verdict", "fails in", "worst margin")
    head += ("yield of draws, 95 % interval",) if drawn else ()
    rows = tuple(_check_row(check)[: len(head)] for check in summary.checks)
    tables = [PageTable("Checks, failures first", head, rows)] if rows else []
    failing = _failing_table(summary)
    if failing is not None:
        tables.append(failing)
    if summary.errors:
        listed = tuple((Cell(a), Cell(b, "fails")) for a, b in summary.errors[:MOST_ROWS])
        note = _rest(len(summary.errors) - len(listed))
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
        number(f"{check.fails:,} of {check.runs:,}"),
        number(shown(margin, check)),
        number("" if check.rate is None else f"{share(check.rate)}{of_group(check)}"),
    )


def _failing_table(summary: NightSummary) -> PageTable | None:
    failing = [check for check in summary.checks if check.fails]
    if not failing:
        return None
    records = summary.table.texts("record")
    # Margins of several checks cannot be held against each other: each has its share of the rows.
    each = max(MOST_ROWS // len(failing), 1)
    found = []
    for check in failing[:MOST_ROWS]:
        broken = np.flatnonzero(check.column.verdict == "fails")
        worst = broken[worst_order(check.column.margin[broken])][:each].tolist()
        found += [(check, run) for run in worst]
    rows = tuple(
        (
            Cell(summary.table.names[run]),
            Cell(check.name),
            number(shown(float(check.column.margin[run]), check), "fails"),
            number(shown(float(check.column.value[run]), check)),
            Cell(_advice(summary, check, run)),
            Cell(str(records[run]) or "not kept"),
        )
        for check, run in found
    )
    head = ("run", "check", "margin", "value", "what to change first", "record")
    note = _rest(sum(check.fails for check in failing) - len(found))
    return PageTable("Runs that fail, the worst of each check first", head, rows, note)


def _advice(summary: NightSummary, check: CheckSummary, run: int) -> str:
    """Return what to change first in a run, which is told of the first check that fails there."""
    advice = str(summary.table.texts("advice")[run])
    first = next(each.name for each in summary.table.checks if each.verdict[run] == "fails")
    return advice if not advice or first == check.name else f"{first}: {advice}"


def _rest(rest: int) -> str:
    return counted(rest, "more stands", "more stand") + " in the table of the set." if rest else ""


def _worst_section(summary: NightSummary) -> Section:
    head = ("check", "worst run", "value", "limit", "margin", "parameters there")
    rows = tuple(_worst_row(summary, check) for check in summary.checks)
    text = (
        "The run with the smallest margin of each check; no run of this night is worse. What "
        "was not run may be."
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
    facts = [
        ("set", str(table.path)),
        ("begun", table.created.isoformat(sep=" ", timespec="seconds")),
        *_seeds(summary),
        ("digest of all scenarios and results (SHA-256)", table.digest),
        ("runs", f"{summary.runs:,} of {table.planned:,}"),
    ]
    if summary.rate is not None:
        told = "contains the true one in 95 % of nights at least (Blaker 2000)"
        if summary.group:
            told += "; that of the worst of several groups, picked by chance too, may lie too low"
        facts.append(("interval of a yield", told))
    bases = zip(table.base_names, table.base_texts, strict=True)
    listings = [("The set", table.text), *((f"Scenario {name}", text) for name, text in bases)]
    return origin_section(facts, table.versions, (), (), listings)


def _seeds(summary: NightSummary) -> Iterator[tuple[str, str]]:
    """Tell where seeds come from; scenarios that are replayed without a set file have their own."""
    if not summary.table.text:
        yield "seed of a run", "that of its scenario"
        return
    yield "seed of the set", str(summary.table.seed)
    yield "seed of a run", "from the seed of the set and the name of the run"
