"""A bridge and a reference that share a supply: what of its changes reaches the codes."""

from __future__ import annotations

import math
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate

BRIDGE: dict[str, Any] = {
    "kind": "resistive-bridge", "sensitivity": "2 mV/V", "full_scale": "10 bar",
    "excitation": "5 V", "ratiometric": True, "zero_balance": "0.1 mV/V",
}  # fmt: skip
GAIN = {"kind": "gain", "gain": 200}
LOW = {"kind": "rc-lowpass", "resistance": "1 kohm", "capacitance": "1 uF"}
HELD = {"kind": "step", "before": "6 bar", "after": "6 bar"}
LEVEL = 200 * 5.0 * (2e-3 * 0.6 + 0.1e-3)
"""Pin at 6 bar and the nominal supply [V]."""


def scenario(
    supply: dict[str, Any] | None,
    *behind: dict[str, Any],
    stimulus: dict[str, Any] = HELD,
    reference: float | None = 10e-3,
    excitation: float = 1e-3,
    temperature: str = "25 degC",
) -> Scenario:
    """Make an invented load cell; ``reference`` is its filter's time constant, None for its own."""
    adc: dict[str, Any] = {"rate": "5 kHz", "bits": 28, "high": "2.5 V"}
    if reference is not None:
        adc["reference"] = {"ratiometric": True, "filter_time_constant": reference}
    environment: dict[str, Any] = {"temperature": temperature}
    return Scenario.model_validate(
        {
            "stimulus": stimulus,
            "chain": [BRIDGE | {"excitation_time_constant": excitation}, GAIN, *behind],
            "adc": adc,
            "environment": environment | ({} if supply is None else {"supply": supply}),
            "simulation": {"duration": "40 ms", "noise": False},
        }
    )


def test_a_constant_error_cancels_to_the_last_code():
    """Initial error and drift are in excitation and reference alike, whatever the filters."""
    moved = scenario({"error": "3 %", "drift": "100 ppm/K"}, LOW, temperature="85 degC")
    still = scenario(None, LOW, temperature="85 degC")
    np.testing.assert_allclose(simulate(moved).voltage, simulate(still).voltage, atol=2e-8)


def test_without_a_ratiometric_reference_it_does_not():
    """The pin moves by 3 %, and so do the codes."""
    run = simulate(scenario({"error": "3 %"}, reference=None))
    np.testing.assert_allclose(run.voltage, 1.03 * LEVEL, rtol=1e-7)


def test_equal_filters_cancel_a_step_and_the_ripple():
    """With one time constant in both ways and nothing between, nothing is left."""
    supply = {"step": "-4 %", "at": "5 ms", "ripple": "1 %", "ripple_frequency": "100 Hz"}
    run = simulate(scenario(supply, excitation=3e-3, reference=3e-3))
    assert np.ptp(run.pin) > 0.04 * LEVEL
    np.testing.assert_allclose(run.voltage, LEVEL, atol=2e-8)


def test_a_step_leaves_what_the_filters_differ_by():
    """Closed form: (1 + s (1 - exp(-t/T_e))) / (1 + s (1 - exp(-t/T_r)))."""
    run = simulate(scenario({"step": "-4 %", "at": "5 ms"}))
    since = np.maximum(run.time - 5e-3, 0.0)
    ways = [1.0 - 0.04 * (1.0 - np.exp(-since / constant)) for constant in (1e-3, 10e-3)]
    np.testing.assert_allclose(run.pin, LEVEL * ways[0], rtol=0.0, atol=1e-12)
    np.testing.assert_allclose(run.voltage, LEVEL * ways[0] / ways[1], rtol=0.0, atol=2e-8)


def test_everything_at_once_against_an_integrator():
    """A sine of pressure, a step and ripple of the supply, and a low pass in front of the pin."""
    supply = {
        "error": "2 %", "step": "-4 %", "at": "5 ms", "ripple": "1 %", "ripple_frequency": "100 Hz",
    }  # fmt: skip
    sine = {"kind": "sine", "amplitude": "3 bar", "frequency": "40 Hz", "offset": "5 bar"}
    run = simulate(scenario(supply, LOW, stimulus=sine))
    pin, reference = integrated(run.time, lambda t: 5e5 + 3e5 * math.sin(80.0 * math.pi * t))
    np.testing.assert_allclose(run.pin, pin, rtol=0.0, atol=1e-9)
    np.testing.assert_allclose(run.voltage, pin / reference, rtol=0.0, atol=3e-8)


def test_recorded_points_go_through_the_same_product(tmp_path: Path):
    """Lines between recorded points, times the supply."""
    points = np.random.default_rng(5).uniform(2e5, 9e5, 60)
    np.save(tmp_path / "points.npy", points)
    supply = {
        "error": "2 %", "step": "-4 %", "at": "5 ms", "ripple": "1 %", "ripple_frequency": "100 Hz",
    }  # fmt: skip
    stimulus = {
        "kind": "recording", "file": str(tmp_path / "points.npy"), "rate": "1 kHz", "unit": "Pa",
    }  # fmt: skip
    run = simulate(scenario(supply, LOW, stimulus=stimulus))
    at = np.arange(60) / 1e3
    pin, reference = integrated(run.time, lambda t: float(np.interp(t, at, points)), 1e-3)
    np.testing.assert_allclose(run.pin, pin, rtol=0.0, atol=1e-9)
    np.testing.assert_allclose(run.voltage, pin / reference, rtol=0.0, atol=3e-8)
    np.testing.assert_allclose(run.stimulus, np.interp(run.time, at, points), rtol=1e-12)


def integrated(times, pressure, step=math.inf):
    """Return pin and reference by a solver that knows nothing of generators."""

    def supply(t: float) -> float:
        return 1.02 - (0.04 if t >= 5e-3 else 0.0) + 0.01 * math.sin(200.0 * math.pi * t)

    def slope(t: float, y: Any) -> list[float]:
        excitation, reference, pin = y
        bridge = 200 * 5.0 * excitation * (2e-3 * pressure(t) / 1e6 + 0.1e-3)
        return [(supply(t) - excitation) / 1e-3, (supply(t) - reference) / 10e-3,
                (bridge - pin) / 1e-3]  # fmt: skip

    start = [1.02, 1.02, 200 * 5.0 * 1.02 * (2e-3 * pressure(0.0) / 1e6 + 0.1e-3)]
    found, y = [start], start
    for t0, t1 in pairwise(times):
        # A point of the recording and the step fall on conversions; nothing jumps in between.
        middle = (t0, max(t0 + 1e-15, math.nextafter(t1, 0.0)))
        done = solve_ivp(slope, middle, y, rtol=1e-12, atol=1e-14, method="DOP853", max_step=step)
        y = done.y[:, -1].tolist()
        found.append(y)
    _, reference, pin = np.array(found).T
    return pin, reference


@pytest.mark.parametrize(
    ("supply", "chain", "text"),
    [
        ({"error": "1 %"}, [GAIN], "nothing in the scenario takes its voltage from the supply"),
        ({"error": "1 %"}, [{"kind": "gain"} | GAIN, BRIDGE], "only where it is the first stage"),
        ({"ripple": "1 %"}, [BRIDGE, GAIN], "ripple and ripple_frequency together"),
        ({"step": "-60 %"}, [BRIDGE, GAIN], "must stay between"),
        ({"drift": "1 %/K"}, [BRIDGE, GAIN], "must stay between"),
    ],
)
def test_what_cannot_be_is_refused(supply, chain, text):
    """Each message tells what is wrong and what to do."""
    with pytest.raises(ValueError, match=text):
        Scenario.model_validate(
            {
                "stimulus": HELD if chain[0] is BRIDGE else {"kind": "step", "after": 1.0},
                "chain": chain,
                "adc": {"rate": "1 kHz", "bits": 12, "high": "2.5 V"},
                "environment": {"supply": supply, "temperature": "150 degC"},
                "simulation": {"duration": "40 ms"},
            }
        )
