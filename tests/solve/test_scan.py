"""Scans are solved like scenarios of one channel; checks are named by channel."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import pytest

import frontend_sim as fe
from frontend_sim.measure.checks.judge import check_names, judge
from frontend_sim.measure.sensitivity import sensitivities
from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.simulation import ScanSimulation
from frontend_sim.solve import keep_proof, solve_for

STEP = {"kind": "step", "before": 0, "after": "3.3 V", "at": "1 ms"}
FILTER = {"kind": "rc-lowpass", "name": "flow filter", "resistance": "10k", "capacitance": "10n"}
TABLES: dict[str, Any] = {
    "channel": [
        {"name": "flow", "stimulus": STEP, "chain": [FILTER]},
        {"name": "level", "stimulus": {"kind": "step", "before": 1, "after": 1}},
    ],
    "adc": {"rate": "20 kHz", "bits": 12, "high": 3.3},
    "simulation": {"duration": "20 ms"},
    "check": [
        {"kind": "headroom", "at_least": "0 V"},
        {"kind": "settling", "channel": "flow", "within": "0.5 LSB", "before": "500 us"},
    ],
}


@pytest.fixture(scope="module")
def scan() -> ScanScenario:
    """An invented scan of two channels, one of which settles too late."""
    return ScanScenario.model_validate(TABLES)


def test_verdicts_are_those_of_the_record(scan: ScanScenario, tmp_path: Path) -> None:
    """Named by channel, as the record has them."""
    rows = judge(scan)
    assert [row.name for row in rows] == list(check_names(scan))
    assert "flow: settling" in check_names(scan)
    fe.record_run(ScanSimulation(scan), tmp_path / "scan.h5")
    with fe.open_record(tmp_path / "scan.h5") as record:
        assert record.verdict == "fails"
    assert [row.name for row in rows if row.verdict == "fails"] == ["flow: settling"]


def test_the_closed_form_and_its_proof(scan: ScanScenario, tmp_path: Path) -> None:
    """The largest resistor that settles in time; both sides run forward to their verdicts."""
    found = solve_for(scan, "channel[flow].chain[1].resistance", "1k", "100k", "most")
    assert found.value == pytest.approx(500e-6 / (10e-9 * math.log(2.0**13)), rel=1.001e-4)
    keep_proof(found, tmp_path)
    for name, verdict in (("passes", "holds"), ("fails", "fails")):
        again = fe.load_scenario(tmp_path / f"{name}.toml")
        assert isinstance(again, ScanScenario)
        with fe.open_record(tmp_path / f"{name}.h5") as record:
            assert record.verdict == verdict


def test_named_checks_and_sensitivities(scan: ScanScenario) -> None:
    """A check of one channel counts alone; its wait goes with its resistor."""
    found = solve_for(scan, "check[2].before", "10 us", "5 ms", "least", checks=["flow: settling"])
    assert found.value == pytest.approx(1e-4 * math.log(2.0**13), rel=1.001e-4)
    checks = sensitivities(scan, ["channel[flow].chain[1].resistance"])
    named = {check.name: check.rows[0] for check in checks}
    assert named["flow: settling"].normalized == pytest.approx(1.0, rel=1e-5)
    assert named["level: headroom"].slope.value == 0.0
