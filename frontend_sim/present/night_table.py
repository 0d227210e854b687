"""What a night says: for the terminal, and for programs."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, Literal

from frontend_sim.measure.statistics import PassRate, Percentile, RankCorrelation
from frontend_sim.present.numbers import fixed
from frontend_sim.present.result_table import STYLES, checked
from frontend_sim.summary import CheckSummary, MeasureSummary, NightSummary

FEWEST = 3
"""With fewer runs there is no spread to tell."""

if TYPE_CHECKING:
    from rich.console import RenderableType


def night_tables(summary: NightSummary) -> tuple[RenderableType, ...]:
    """Return how the checks of a night spread, what they follow, and the yield of the draws.

    What fails and the worst runs stand in ``replay_tables``.
    """
    from rich.table import Table
    from rich.text import Text

    if summary.runs < FEWEST or not summary.checks:
        return ()
    drawn = summary.rate is not None
    table = Table(title=f"Spread over the {'draws' if drawn else 'runs'}", title_justify="left")
    for name in ("check", "yield", "5 %", "median", "95 %", "follows"):
        if drawn or name != "yield":
            side: Literal["left", "right"] = "left" if name in ("check", "follows") else "right"
            table.add_column(name, justify=side, overflow="fold")
    for check in summary.checks:
        spread = [shown(each.value, check) for each in check.percentiles] or ["", "", ""]
        rate = [] if not drawn else ["" if check.rate is None else share(check.rate)]
        cause = check.cause
        follows = "" if cause is None else f"{cause.parameter} ({cause.coefficient:+.2f})"
        style = STYLES["fails"] if check.fails else ""
        table.add_row(Text(check.name), *rate, *spread, Text(follows), style=style)
    if summary.rate is None:
        return (table,)
    which = f" of {summary.group}, the worst group," if summary.group else ""
    told = f"{summary.rate.passed:,} of {summary.rate.total:,} draws{which} hold, 95 % interval"
    return (table, Text(f"yield: {share(summary.rate)}: {told}"))


def share(rate: PassRate) -> str:
    """Return a yield with its interval, in percent."""
    # One run of all is seen: 1 of 1000 is 0.1 %.
    digits = max(1, len(str(rate.total - 1)) - 2)
    percent = [fixed(100.0 * end, digits) for end in (rate.rate, rate.low, rate.high)]
    return f"{percent[0]} % ({percent[1]} to {percent[2]} %)"


def shown(value: float, check: CheckSummary) -> str:
    """Return a value of a check with its unit, see ``checked``."""
    return checked(value, check.unit)


def night_data(summary: NightSummary) -> dict[str, Any]:
    """Return what a night says as plain data for JSON; None for what is not there."""
    return {
        "title": summary.table.title,
        "runs": summary.runs,
        "planned": summary.table.planned,
        "counts": dict(summary.counts),
        "yield": rate_data(summary.rate),
        "yield_group": summary.group,
        "checks": [_check_data(summary, check) for check in summary.checks],
        "measures": [_measure_data(summary, measure) for measure in summary.measures],
        "errors": [{"run": name, "error": error} for name, error in summary.errors],
        "warnings": list(summary.warnings),
        "digest": summary.table.digest,
    }


def rate_data(rate: PassRate | None) -> dict[str, Any] | None:
    """Return a yield as plain data."""
    return None if rate is None else {**vars(rate), "rate": rate.rate}


def _check_data(summary: NightSummary, check: CheckSummary) -> dict[str, Any]:
    run = check.worst
    limits = check.limits
    return {
        "name": check.name,
        "unit": check.unit,
        "runs": check.runs,
        "fails": check.fails,
        "yield": rate_data(check.rate),
        "group": check.group,
        "worst": {
            "run": summary.table.names[run],
            "value": _finite(float(check.column.value[run])),
            "limit": _finite(float(check.column.limit[run])),
            "margin": _finite(float(check.column.margin[run])),
            "parameters": summary.parameters_of(run),
        },
        "percentiles": [
            _percentile_data(each, check.rate is not None) for each in check.percentiles
        ],
        "tolerance_limits": None
        if limits is None
        else {key: _finite(value) for key, value in vars(limits).items()},
        "draws_needed": None if check.rate is None else check.draws_needed,
        "causes": _cause_data(check.causes),
    }


def _measure_data(summary: NightSummary, measure: MeasureSummary) -> dict[str, Any]:
    drawn = bool(summary.population.drawn.any())
    return {
        "name": measure.name,
        "unit": measure.unit,
        "runs": measure.runs,
        "group": measure.group,
        **{
            which: {
                "run": summary.table.names[run], "value": _finite(float(measure.values[run])),
            }
            for which, run in (("lowest", measure.lowest), ("highest", measure.highest))
        },
        "percentiles": [_percentile_data(each, drawn) for each in measure.percentiles],
        "causes": _cause_data(measure.causes),
    }  # fmt: skip


def _cause_data(causes: Sequence[RankCorrelation]) -> list[dict[str, Any]]:
    return [
        {
            "parameter": cause.parameter,
            "rank_correlation": cause.coefficient,
            "probability": cause.probability,
        }
        for cause in causes
    ]


def _percentile_data(percentile: Percentile, drawn: bool) -> dict[str, float | None]:
    """Return a percentile as plain data; of what was chosen, not drawn, it has no interval."""
    told = {key: _finite(value) for key, value in vars(percentile).items()}
    return told if drawn else {**told, "low": None, "high": None, "confidence": None}


def _finite(value: float) -> float | None:
    return value if math.isfinite(value) else None
