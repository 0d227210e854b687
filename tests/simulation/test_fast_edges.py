"""Edges far faster than the limiters' grid, into an amplifier that comes to its rails."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import deviation, simulate

TRAIN = {
    "kind": "pulse", "low": -0.1595485, "high": -1.4554374, "at": 350.192868e-9,
    "width": 36.433495e-9, "rise": 3.1878573e-9, "fall": 12.3055516e-9, "period": 118.9035889e-9,
}  # fmt: skip
NOTCH = {
    "kind": "twin-t-notch", "resistance_1": 270449.998, "resistance_2": 264072.034,
    "shunt_resistance": 115593.132, "capacitance_1": 0.530284151e-12,
    "capacitance_2": 0.586625733e-12, "shunt_capacitance": 1.20750512e-12,
    "gain_bandwidth": 330432010, "open_loop_gain": 36913.08, "output_low": -0.945919925,
    "output_high": 0.954310272,
}  # fmt: skip
RATE = 7.23e6


def pin(grid: float) -> np.ndarray[Any, Any]:
    """Return the pin at every conversion, on a grid for the limits."""
    scenario = {
        "stimulus": TRAIN,
        "chain": [NOTCH],
        "adc": {"rate": RATE, "bits": 24, "low": -50, "high": 50},
        "simulation": {"duration": 2.76e-6, "noise": False, "grid_rate": grid},
    }
    return simulate(Scenario.model_validate(scenario)).pin


def test_edges_between_points_are_met_where_they_bend() -> None:
    """Steps of 35 ns see edges of 3 ns as steps of 0.1 ns do: to rounding, 1e-9 V."""
    np.testing.assert_allclose(pin(4 * RATE), pin(1024 * RATE), rtol=0, atol=1e-9)


def test_without_their_bends_they_would_be_missed(monkeypatch: pytest.MonkeyPatch) -> None:
    """With lines from point to point a pin is 48 mV off, and two grids agree on it by chance."""
    exact, times = pin(4 * RATE), deviation.jump_times
    monkeypatch.setattr(deviation, "jump_times", lambda *given, bends: times(*given))
    assert np.max(np.abs(pin(32 * RATE) - exact)) > 0.01
