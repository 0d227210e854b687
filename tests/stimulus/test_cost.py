"""What an analytic stimulus costs: nodes for instants and events, whatever the grid."""

from __future__ import annotations

from typing import Any

import pytest

from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import interval_kernels, simulate

STIMULI: list[dict[str, Any]] = [
    {"kind": "step", "after": 1.0, "at": 1.234e-3},
    {"kind": "ramp", "slope": 10.0, "at": 1.234e-3},
    {"kind": "sine", "amplitude": 1.0, "frequency": 777.0},
    {"kind": "pulse", "high": 1.0, "width": 0.3e-3, "period": 1.7e-3, "rise": 1e-5},
    {"kind": "half-sine", "peak": 1.0, "length": 3e-3},
    {"kind": "double-exponential", "peak": 1.0, "front_time": 1e-4, "half_time": 1e-3},
    {"kind": "chirp", "amplitude": 1.0, "start_frequency": 1e2, "stop_frequency": 1e3,
     "length": 8e-3},
]  # fmt: skip


@pytest.fixture
def nodes(monkeypatch: pytest.MonkeyPatch) -> list[int]:
    """Collect how many intervals the compiled march goes through."""
    counted: list[int] = []
    march = interval_kernels.march

    def counting(x: Any, start: Any, steps: Any, *rest: Any) -> None:
        counted.append(len(steps))
        march(x, start, steps, *rest)

    monkeypatch.setattr(interval_kernels, "march", counting)
    return counted


def _run(stimulus: dict[str, Any], grid_rate: float) -> Any:
    return simulate(
        Scenario.model_validate(
            {
                "stimulus": stimulus,
                "chain": [{"kind": "butterworth", "order": 4, "corner": 900.0}],
                # The clock is not even, so that every conversion is a node of its own.
                "adc": {
                    "rate": 5e3, "bits": 12, "low": -2.0, "high": 2.0, "first": 1e-5,
                    "aperture_jitter": 1e-9,
                },
                "simulation": {"duration": 0.01, "grid_rate": grid_rate},
            }
        )
    )  # fmt: skip


@pytest.mark.parametrize("stimulus", STIMULI, ids=lambda s: s["kind"])
def test_the_grid_rate_costs_nothing(stimulus: dict[str, Any], nodes: list[int]) -> None:
    """A thousand times the grid rate: as many nodes, about one for each conversion and event."""
    coarse = _run(stimulus, 20e3)
    count, (drive,) = sum(nodes), Scenario.model_validate(coarse.scenario).stimulus.drives((1,))
    nodes.clear()
    fine = _run(stimulus, 20e6)
    assert sum(nodes) == count
    assert list(fine.pin) == list(coarse.pin)
    events = drive.events(0.0, float(coarse.time[-1]))  # type: ignore[union-attr]  # no points here
    assert len(coarse.time) - 1 <= count <= len(coarse.time) + len(events)
