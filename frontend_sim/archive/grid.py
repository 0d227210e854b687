"""The report on a discrete model, as rows of ``/measure``."""

from __future__ import annotations

from collections.abc import Iterable
from math import nan

from frontend_sim.measure.result import Result
from frontend_sim.simulation.run import GridReport

_ROWS = (
    ("grid rate", "grid_rate", "Hz"),
    ("grid error, estimated", "estimate", "LSB"),
    ("grid error, largest", "largest_error", "LSB"),
    ("grid error, rms", "rms_error", "LSB"),
    ("frequency warping at half the rate", "warping", "1"),
)


def grid_results(grid: GridReport | None) -> tuple[Result, ...]:
    """Return the report as results, whose method is that of the discrete model."""
    if grid is None:
        return ()
    return tuple(
        Result(name, getattr(grid, field), unit, method=grid.method) for name, field, unit in _ROWS
    )


def grid_of(results: Iterable[Result]) -> GridReport | None:
    """Find the report among the results of a record again."""
    found = {result.name: result for result in results}
    if _ROWS[0][0] not in found:
        return None
    numbers = {field: found[name].value for name, field, _ in _ROWS}
    estimate = numbers.pop("estimate")
    known = {field: nan if value is None else value for field, value in numbers.items()}
    return GridReport(method=found[_ROWS[0][0]].method, estimate=estimate, **known)
