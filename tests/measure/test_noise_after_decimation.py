"""The noise budget behind the filter of an oversampling converter, or an average."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from frontend_sim.measure.noise_budget import noise_budget
from frontend_sim.scenario.circuit import circuit_of
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate

NOISY = {
    "kind": "noninverting-amplifier", "gain": 10, "gain_bandwidth": "1 MHz",
    "voltage_noise": "200 nV/sqrt(Hz)",
}  # fmt: skip
SINC = {
    "kind": "oversampling", "modulator_rate": "256 kHz", "data_rate": "1 kHz", "order": 3,
    "bits": 24, "low": "-2.5 V", "high": "2.5 V",
}  # fmt: skip
AVERAGE = {"rate": "1 kHz", "bits": 24, "low": "-2.5 V", "high": "2.5 V"}


def scenario(adc: dict[str, Any], corner: float = 100e3, seconds: float = 4.0) -> Scenario:
    """Make an invented noisy amplifier at rest in front of a converter."""
    return Scenario.model_validate(
        {
            "seed": 3,
            "stimulus": {"kind": "step", "after": 0.0},
            "chain": [NOISY, {"kind": "butterworth", "order": 2, "corner": corner}],
            "adc": adc,
            "simulation": {"duration": seconds},
        }
    )


@pytest.mark.parametrize(
    "adc",
    [
        SINC,
        SINC | {"input_noise": "3 uV"},
        AVERAGE | {"averaging": {"count": 16, "shift": 4}},
        AVERAGE | {"averaging": {"count": 16, "interval": "2 us"}, "input_noise": "100 uV"},
    ],
)
@pytest.mark.parametrize("corner", [300.0, 100e3])
def test_the_budget_is_the_noise_of_the_codes(adc, corner):
    """A run's codes vary as the budget says, within four standard errors of a variance."""
    values = scenario(adc, corner)
    budget = noise_budget(circuit_of(values), values.adc, 0.1)
    voltage = simulate(values).voltage[10:]
    # Correlated where the corner lies below the rate: a tenth of the codes are independent then.
    independent = len(voltage) if corner > 1e3 else len(voltage) / 3.0
    assert np.var(voltage) == pytest.approx(budget.rms**2, rel=4.0 * np.sqrt(2.0 / independent))
    assert budget.filtered


def test_white_noise_is_cut_to_the_noise_bandwidth_of_the_filter():
    """The variance is that of the taps over samples that an exponential correlates."""
    values = scenario(SINC, corner=20e6)
    plain = AVERAGE | {"rate": "256 kHz"}
    before = noise_budget(circuit_of(values), scenario(plain, 20e6).adc, 0.1)
    after = noise_budget(circuit_of(values), values.adc, 0.1)
    # The amplifier's own pole, at 100 kHz, still correlates samples of 256 kHz by exp(-2.45).
    rho = np.exp(-2.0 * np.pi * 100e3 / 256e3)
    taps = values.adc.sinc.taps
    lags = np.correlate(taps, taps, mode="full")
    at = np.abs(np.arange(len(lags)) - len(taps) + 1)
    assert after.rms / before.rms == pytest.approx(np.sqrt(lags @ rho**at), rel=1e-2)


def test_one_look_for_a_code_is_the_pin_itself():
    """A plain converter's budget is that of the pin, and says so."""
    values = scenario(AVERAGE)
    budget = noise_budget(circuit_of(values), values.adc, 0.1)
    assert not budget.filtered
