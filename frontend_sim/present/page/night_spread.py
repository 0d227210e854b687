"""How the checks of a night spread, and what explains it: the page's part."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from frontend_sim.present.measure_figure import MOST_PANELS, measure_figure
from frontend_sim.present.night_figure import night_figure
from frontend_sim.present.night_table import shown
from frontend_sim.present.page.content import Cell, PageFigure, PageTable, Section, number
from frontend_sim.present.page.render import embedded
from frontend_sim.present.result_table import quantity
from frontend_sim.quantities.counting import counted
from frontend_sim.summary import CheckSummary, MeasureSummary, NightSummary

MOST_CAUSES = 6
MOST_MEASURES = 40


def spread_sections(summary: NightSummary) -> Iterator[Section | None]:
    """Return the sections of distributions and of causes; None where there is nothing to tell."""
    known = [check for check in summary.checks if check.percentiles]
    if not known:
        return
    drawn = bool(np.any(summary.population.drawn))
    which = "draws" if drawn else "runs"
    head = ("check", "5 %", "median", "95 %", *(["95/95 limit"] if drawn else []))
    rows = tuple(
        (
            Cell(f"{check.name}{of_group(check)}"),
            *(number(_percentile(check, place, drawn)) for place in range(3)),
            *([number(_limit(check))] if drawn else []),
        )
        for check in known
    )
    note = (
        "Below each percentile the interval that contains it with 95 % confidence. The 95/95 "
        "limit is the one that 95 % of all that could be drawn keep, with 95 % confidence and "
        "whatever the distribution (Wilks 1941); a check whose runs met both of its limits has "
        "two. An end that the draws do not bound is open."
    )
    if any(np.any(np.isnan(check.column.value[check.column.verdict != ""])) for check in known):
        note += " A run without a value counts as beyond the limit."
    if any(check.group for check in known):
        note += (
            " Draw n has the same parts whatever is varied besides, so that only the draws of one "
            "combination are a sample: numbers are those of the combination below the name, of "
            "which the fewest hold."
        )
    table = PageTable(f"Values over the {which}", head, rows, note if drawn else "")
    figures = tuple(_figure(summary, check) for check in known)
    yield Section("distributions", "Distributions and margins", (), (table,), figures)
    yield _causes(known)


def measure_section(summary: NightSummary) -> Section | None:
    """Return how the measures spread that are no checks, to be unfolded; None where none does.

    It is folded, as nothing in it holds or fails.
    """
    moving = [measure for measure in summary.measures if measure.spreads]
    if not moving:
        return None
    which = "draws" if np.any(summary.population.drawn) else "runs"
    rest, still = len(moving) - MOST_MEASURES, len(summary.measures) - len(moving)
    told = (
        [counted(rest, "more stands", "more stand") + " in the table of the set."]
        if rest > 0
        else []
    )
    told += [f"{counted(still, 'measure')} left out: the same in all runs."] if still else []
    head = ("measure", "lowest", "5 %", "median", "95 %", "highest", "follows")
    rows = tuple(_measure_row(summary, each) for each in moving[:MOST_MEASURES])
    figure = embedded(
        measure_figure(summary, moving),
        f"Histograms of {', '.join(each.name for each in moving[:MOST_PANELS])} over all runs.",
        "How measures spread that are held against nothing.",
    )
    table = PageTable(f"Measures over the {which}", head, rows, " ".join(told))
    return Section("measures", "Measures", (), (table,), (figure,), folded=True)


def _measure_row(summary: NightSummary, measure: MeasureSummary) -> tuple[Cell, ...]:
    def told(value: float) -> str:
        return quantity(value, measure.unit)

    def extreme(run: int) -> str:
        return f"{told(float(measure.values[run]))}\n{summary.table.names[run]}"

    cause = measure.cause
    follows = "" if cause is None else f"{cause.parameter}\n({cause.coefficient:+.2f})"
    return (
        Cell(f"{measure.name}{of_group(measure)}"),
        number(extreme(measure.lowest)),
        *(number(told(each.value)) for each in measure.percentiles),
        number(extreme(measure.highest)),
        Cell(follows),
    )


def _percentile(check: CheckSummary, place: int, drawn: bool) -> str:
    found = check.percentiles[place]
    text = shown(found.value, check)
    if not drawn:
        return text
    ends = [shown(end, check) if math.isfinite(end) else "open" for end in (found.low, found.high)]
    return f"{text}\n{ends[0]} to {ends[1]}"


def _limit(check: CheckSummary) -> str:
    if check.limits is None:
        return f"needs {counted(check.draws_needed, 'draw')}"
    low, high = shown(check.limits.low, check), shown(check.limits.high, check)
    return {"low": f"≥ {low}", "high": f"≤ {high}", "both": f"{low} to {high}"}[check.side]


def _figure(summary: NightSummary, check: CheckSummary) -> PageFigure:
    description = (
        f"Histogram of {check.name} over all runs with its limit; {check.fails} of {check.runs} "
        f"runs fail, the worst margin is {shown(float(check.column.margin[check.worst]), check)}."
    )
    cause = check.cause
    caption = f"{check.name}: how it spreads"
    if cause is not None:
        description += f" Beside it, its values against {cause.parameter}."
        strength = f"rank correlation {cause.coefficient:.2f}"
        caption += f", and how it follows {cause.parameter} ({strength})"
    return embedded(night_figure(summary, check), description, f"{caption}.")


def _causes(checks: list[CheckSummary]) -> Section | None:
    rows = [
        (
            Cell(check.name),
            Cell(cause.parameter),
            number(f"{cause.coefficient:+.2f}"),
            number(f"{100.0 * cause.share:.0f} %"),
            number("< 0.001" if cause.probability < 1e-3 else f"{cause.probability:.2g}"),
        )
        for check in checks
        for cause in check.causes[:MOST_CAUSES]
        if cause.probability < 0.05
    ]
    if not rows:
        return None
    head = ("check", "parameter", "rank correlation", "share of spread", "by chance")
    note = (
        "Spearman's coefficient; a response that turns between the ends of a tolerance shows "
        "little of it. The last column is corrected for the number of parameters; what chance "
        "explains with 5 % or more is left out."
    )
    table = PageTable("Parameters that a check follows", head, tuple(rows), note)
    return Section("causes", "What explains the spread", (), (table,))


def of_group(found: CheckSummary | MeasureSummary) -> str:
    """Return which draws numbers are of, on a line of its own; "" where there is but one group."""
    return f"\n{found.group}" if found.group else ""
