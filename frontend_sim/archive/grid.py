"""The report on a discrete model, or on the grid of limiters, as rows of ``/measure``."""

from __future__ import annotations

from collections.abc import Iterable
from math import nan

from frontend_sim.measure.result import Result
from frontend_sim.simulation.run import GridReport

EXACT = "exact"
"""Method of a report on limiters: exact steps between the points of their grid."""

_ROWS = (
    ("grid rate", "grid_rate", "Hz"),
    ("grid error, estimated", "estimate", "LSB"),
    ("grid error, largest", "largest_error", "LSB"),
    ("grid error, rms", "rms_error", "LSB"),
    ("frequency warping at half the rate", "warping", "1"),
)
_LIMITER_ROWS = (
    ("limits looked at, rate", "grid_rate", "Hz"),
    ("limits, error of the grid at most", "estimate", "LSB"),
    ("limits, half that rate changes at most", "largest_error", "LSB"),
    ("limits, half that rate changes, rms", "rms_error", "LSB"),
)


def grid_results(grid: GridReport | None) -> tuple[Result, ...]:
    """Return the report as results, whose method is that of the discrete model."""
    if grid is None:
        return ()
    rows = _LIMITER_ROWS if grid.method == EXACT else _ROWS
    return tuple(
        Result(name, getattr(grid, field), unit, method=grid.method) for name, field, unit in rows
    )


def grid_of(results: Iterable[Result]) -> GridReport | None:
    """Find the report among the results of a record again."""
    found = {result.name: result for result in results}
    # Records of the first program have the rows of a discrete model for limiters too.
    rows = next((rows for rows in (_ROWS, _LIMITER_ROWS) if rows[0][0] in found), None)
    if rows is None:
        return None
    numbers = {field: found[name].value for name, field, _ in rows}
    estimate = numbers.pop("estimate")
    known = {field: nan if value is None else value for field, value in numbers.items()}
    known.setdefault("warping", 0.0)
    return GridReport(method=found[rows[0][0]].method, estimate=estimate, **known)
