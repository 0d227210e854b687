"""Scenarios with checks, and their verdicts, in a line."""

from __future__ import annotations

from typing import Any

from frontend_sim.measure.checks import evaluate_checks
from frontend_sim.measure.result import Result
from frontend_sim.scenario import Scenario
from frontend_sim.simulation import simulate

TAU = 47e-6
"""Time constant of ``FILTER`` [s]."""

FILTER = {"kind": "rc-lowpass", "name": "input filter", "resistance": "10k", "capacitance": "4n7"}

STEP = {"kind": "step", "after": "1 V", "at": "1 ms"}

TABLES: dict[str, Any] = {
    "stimulus": STEP,
    "chain": [FILTER],
    "adc": {"rate": "20 kHz", "bits": 12, "high": 3.3},
    "simulation": {"duration": "20 ms"},
}
"""An invented setting: a step through one section."""


def made(*checks: dict[str, Any], **tables: Any) -> Scenario:
    """Return the setting with checks; keyword arguments replace its tables, or add keys to them."""
    values = dict(TABLES)
    for name, table in tables.items():
        adds = name in ("adc", "simulation")
        values[name] = {**TABLES[name], **table} if adds else table
    return Scenario.model_validate({**values, "check": list(checks)})


def verdicts(*checks: dict[str, Any], **tables: Any) -> list[Result]:
    """Run the setting, and return the verdict on each check, without what was found beside it."""
    found = evaluate_checks(simulate(made(*checks, **tables)))
    return [row for row in found if row.verdict != "none"]


def beside(name: str, *checks: dict[str, Any], **tables: Any) -> float:
    """Run the setting, and return a measure that was found beside a verdict, by its name."""
    found = evaluate_checks(simulate(made(*checks, **tables)))
    value = next(row.value for row in found if row.verdict == "none" and row.name == name)
    assert value is not None
    return value
