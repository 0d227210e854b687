"""Inspection of a chain that begins with a sensor: volts for one unit of the quantity."""

from __future__ import annotations

import io
from typing import Any

import pytest

from frontend_sim.measure.response import inspect_scenario
from frontend_sim.present import inspection_tables
from frontend_sim.scenario import Scenario

ADC = {"rate": 20, "bits": 12, "high": 2.5}


def scenario(stimulus: dict[str, Any], *chain: dict[str, Any]) -> Scenario:
    """Return a scenario with a sensor."""
    return Scenario.model_validate(
        {"stimulus": stimulus, "chain": chain, "adc": ADC, "simulation": {"duration": 1}}
    )


PROBE = scenario(
    {"kind": "step", "before": "20 degC", "after": "30 degC"},
    {"kind": "thermal-lag", "time_constant": 2},
    {"kind": "rtd", "excitation_current": "1 mA", "operating_temperature": "100 degC"},
)
SHOCK = scenario(
    {"kind": "half-sine", "peak": "5 g", "length": "1 ms"},
    {"kind": "accelerometer", "sensitivity": 0.01, "natural_frequency": 2, "quality_factor": 5},
)


def test_a_curve_is_taken_as_its_tangent() -> None:
    """The slope of the Pt100 at 100 degC, 0.3792 ohm/K, times 1 mA; and the reader is told so."""
    found = inspect_scenario(PROBE)
    assert found.unit == "K"
    slope = 0.1 * (3.9083e-3 - 2 * 5.775e-7 * 100)
    assert found.time.end == pytest.approx(slope, rel=1e-12)
    assert any("'2 rtd' is a curve, taken as its tangent at 100 degC" in n for n in found.notes)
    assert found.as_dict()["unit"] == "K"


@pytest.mark.parametrize(
    ("inspected", "parts"),
    [
        (PROBE, ["for a step of 1 K", "379.3 uV/K", "step of 6591 K"]),
        (SHOCK, ["for a step of 1 g", "492.8 mV/g", "step of 25.49 g"]),
    ],
)
def test_the_tables_name_the_unit(inspected: Scenario, parts: list[str]) -> None:
    """Gains are volts per unit of the file, and the step that fills the range is in it too."""
    from rich.console import Console

    stream = io.StringIO()
    console = Console(file=stream, width=120)
    for table in inspection_tables(inspect_scenario(inspected)):
        console.print(table)
    for part in parts:
        assert part in stream.getvalue()
