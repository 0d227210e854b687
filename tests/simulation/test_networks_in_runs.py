"""Circuits of real parts in the exact mode, against inverse Laplace transforms at 25 digits."""

from __future__ import annotations

from typing import Any

import mpmath as mp
import numpy as np
import pytest

from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate

SUPPLY: list[tuple[str, str, float]] = [
    ("series", "resistance", 1e4),
    ("shunt", "capacitance", 1e-5),
    ("series", "resistance", 1e-3),
    ("shunt", "capacitance", 1e-8),
    ("series", "resistance", 1e6),
    ("shunt", "capacitance", 1e-12),
]
"""Time constants from 10 ps to 0.1 s: two capacitors joined by a milliohm, behind 10 kohm."""


def _ladder_gain(s: Any) -> Any:
    """Return 1/A of the product of the chain matrices."""
    a, b = mp.mpf(1), mp.mpf(0)
    for place, key, value in SUPPLY:
        z = mp.mpf(value) if key == "resistance" else 1 / (s * mp.mpf(value))
        if place == "series":
            b += a * z
        else:
            a += b / z
    return 1 / a


def _section_gain(s: Any) -> Any:
    """Return a unity-gain Sallen-Key low pass around 2 pi f_u / s, by hand from its nodes."""
    r1, r2, c1, c2 = mp.mpf(1e4), mp.mpf(2e4), mp.mpf(2e-8), mp.mpf(3e-9)
    e = 1 + s / (2 * mp.pi * mp.mpf(2e5))
    # v+ = e out; middle = v+ (1 + s r2 c2); currents into the middle node add up to nothing.
    middle = e * (1 + s * r2 * c2)
    return 1 / (r1 * ((middle - e) / r2 + (middle - 1) * s * c1) + middle)


CHAINS: dict[str, tuple[list[dict[str, Any]], Any, float]] = {
    "ladder": (
        [{"kind": "ladder", "element": [{"place": p, k: v} for p, k, v in SUPPLY]}],
        _ladder_gain,
        31.0,
    ),
    "sallen-key": (
        [
            {
                "kind": "sallen-key",
                "resistance_1": 1e4,
                "resistance_2": 2e4,
                "capacitance_1": 2e-8,
                "capacitance_2": 3e-9,
                "gain_bandwidth": 2e5,
            }
        ],
        _section_gain,
        7321.0,
    ),
}


@pytest.mark.parametrize("name", CHAINS)
def test_step_response_at_every_conversion(name: str) -> None:
    """Within 1e-12 of full scale, whatever lies between the fastest and the slowest part."""
    chain, gain, rate = CHAINS[name]
    scenario = Scenario.model_validate(
        {
            "stimulus": {"kind": "step", "before": 0.0, "after": 1.0, "at": 0.4 / rate},
            "chain": chain,
            "adc": {"rate": rate, "bits": 16, "low": -2.0, "high": 2.0},
            "simulation": {"duration": 8.0 / rate},
        }
    )
    run = simulate(scenario)
    with mp.workdps(25):
        true = [
            float(mp.invertlaplace(lambda s: gain(s) / s, float(t) - 0.4 / rate, method="talbot"))
            if t > 0.4 / rate
            else 0.0
            for t in run.time
        ]
    np.testing.assert_allclose(run.pin, true, rtol=0.0, atol=1e-12)
