"""Settling of a slew-limited step, against its closed form."""

from __future__ import annotations

import math

import numpy as np
import pytest

from frontend_sim.analog.stages import SlewLimit
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate

SETTLED = 4.76183e-6
"""(dV - SR T) / SR + T ln(SR T / e) for 4 V, 1 V/us, 1 MHz, e = 4/8192 V: closed form, computed."""


def test_the_closed_form() -> None:
    """The stage's own formula gives the published figure to its last digit."""
    stage = SlewLimit(slew_rate=1e6, bandwidth=1e6)
    assert stage.settling_time(4.0, 4.0 / 8192.0) == pytest.approx(SETTLED, abs=5e-12)
    lag = 1.0 / (2.0 * math.pi * 1e6)
    assert stage.settling_time(0.1, 0.001) == pytest.approx(lag * math.log(100.0), rel=1e-14)
    assert SlewLimit(slew_rate=1e6).settling_time(4.0, 0.5) == 3.5e-6


@pytest.mark.parametrize("bandwidth_from", ["slew-limit", "noninverting-amplifier"])
@pytest.mark.parametrize("grid_rate", [None, 10e6, 7.3e6])
def test_a_run_settles_within_one_conversion(bandwidth_from: str, grid_rate: float | None) -> None:
    """A run at 1 GHz sees the band entered at 4.76183 us, to its own step of 1 ns, on any grid.

    The pin also follows the closed form to 1e-9 of full scale: slew, then exp(-t/T).
    """
    stage = {
        "slew-limit": {"kind": "slew-limit", "slew_rate": "1 V/us", "bandwidth": "1 MHz"},
        "noninverting-amplifier": {
            "kind": "noninverting-amplifier", "gain": 1, "gain_bandwidth": "1 MHz",
            "slew_rate": "1 V/us",
        },
    }[bandwidth_from]  # fmt: skip
    scenario = Scenario.model_validate(
        {
            "stimulus": {"kind": "step", "after": 4.0, "at": 0.0},
            "chain": [stage],
            "adc": {"rate": 1e9, "bits": 16, "high": 5.0},
            "simulation": {"duration": 10e-6, "grid_rate": grid_rate},
        }
    )
    run = simulate(scenario)
    inside = np.abs(4.0 - run.pin) <= 4.0 / 8192.0
    entered = run.time[np.argmax(inside)]
    assert abs(entered - SETTLED) <= 1e-9
    lag, slewed = 1.0 / (2.0 * math.pi * 1e6), 4e-6 - 1.0 / (2.0 * math.pi * 1e6)
    left = np.where(
        run.time < slewed, 4.0 - 1e6 * run.time, 1e6 * lag * np.exp((slewed - run.time) / lag)
    )
    np.testing.assert_allclose(run.pin, 4.0 - left, rtol=0, atol=5e-9)
