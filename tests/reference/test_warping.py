"""The published warping of the bilinear model, found on a whole run."""

from __future__ import annotations

import numpy as np
import pytest

from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate


def test_a_notch_is_found_3108_percent_too_low() -> None:
    """Bilinear warping at f/fs = 0.1 is -3.108 %: (2/T) tan(wT/2) (computed).

    In the bilinear model a notch at 0.1 fs swallows a sine that much below 0.1 fs, which the exact
    mode lets through. Half a unit of the last printed digit leaves 1e-5 of the sine.
    """
    rate = 100e3
    notch = rate * 0.1
    sine = notch * (1.0 - 0.03108)
    values = {
        "stimulus": {"kind": "sine", "amplitude": 1.0, "frequency": sine},
        "chain": [{"kind": "second-order", "corner": notch, "quality_factor": 1.0,
                   "response": "notch"}],
        "adc": {"rate": rate, "bits": 16, "low": -1.0, "high": 1.0},
        "simulation": {"duration": 4e-3},
    }  # fmt: skip
    exact = simulate(Scenario.model_validate(values))
    settings = {"duration": 4e-3, "discretization": "bilinear", "grid_rate": rate}
    warped = simulate(Scenario.model_validate({**values, "simulation": settings}))
    late = exact.time > 2e-3
    assert np.max(np.abs(warped.pin[late])) < 2e-5
    # |1 - x²|/sqrt((1 - x²)² + (x/Q)²) at x = 1 - 0.03108.
    x = 1.0 - 0.03108
    passed = (1.0 - x * x) / np.hypot(1.0 - x * x, x)
    assert np.max(np.abs(exact.pin[late])) == pytest.approx(passed, rel=0.02)
