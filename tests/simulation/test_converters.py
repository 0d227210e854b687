"""Whole runs with converters that look more than once for a code."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from digitizing import residual

from frontend_sim.converter import OversamplingAdc
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate
from frontend_sim.simulation.uniform import WAVEFORM_TILE

RC = {"kind": "rc-lowpass", "resistance": "10 kohm", "capacitance": "100 nF"}
BURST = {
    "rate": 2e3, "bits": 16, "low": -1.0, "high": 1.0, "input_noise": 1e-4,
    "averaging": {"count": 16, "shift": 2, "interval": "5 us"},
    "dither": {"shape": "triangular", "width": 2.0},
}  # fmt: skip
CONTINUOUS = {
    "kind": "oversampling", "modulator_rate": 200e3, "order": 3, "decimation": 100, "bits": 24,
    "low": -1.0, "high": 1.0, "input_noise": 1e-6,
    "reference": {"noise": "5 ppm", "filter_time_constant": "1 ms"},
}  # fmt: skip
RESTARTED = {**CONTINUOUS, "conversion": "restarted", "data_rate": 400.0, "aperture_jitter": 1e-8}


def scenario(adc: dict[str, Any], **settings: Any) -> Scenario:
    """Return a sine through an RC section into a converter, 0.6 s long."""
    return Scenario.model_validate(
        {
            "stimulus": {"kind": "sine", "amplitude": 0.8, "frequency": 130.0},
            "chain": [RC],
            "adc": adc,
            "simulation": {"duration": 0.6, **settings},
        }
    )


@pytest.mark.parametrize(
    "adc", [BURST, CONTINUOUS, RESTARTED], ids=["burst", "continuous", "restarted"]
)
@pytest.mark.parametrize("discretization", ["exact", "bilinear"])
def test_blocks_never_show(adc: dict[str, Any], discretization: str) -> None:
    """Codes, times, pins and waveforms are the same bits whatever the block, noise and all."""
    settings = {"discretization": discretization, "waveform_rate": 50e3}
    if discretization != "exact":
        settings["grid_rate"] = 1e6
    whole = simulate(scenario(adc, **settings))
    parts = simulate(scenario(adc, **settings), block=WAVEFORM_TILE)
    for name in ("time", "pin", "codes", "voltage", "overrange", "waveform_time"):
        np.testing.assert_array_equal(getattr(whole, name), getattr(parts, name))
    for name, values in whole.waveform.items():
        np.testing.assert_array_equal(values, parts.waveform[name])
    assert len(whole.codes) == pytest.approx(0.6 * whole.scenario.adc.rate, abs=3)


# 130 Hz is in the band; 3130 and 7130 Hz lie above half the data rate, -37 and -95 dB down.
@pytest.mark.parametrize("frequency", [130.0, 3130.0, 7130.0])
def test_a_tone_passes_chain_and_filter(frequency: float) -> None:
    """The amplitude in the codes is the product of both closed forms, within 0.001 dB."""
    adc = {key: CONTINUOUS[key] for key in CONTINUOUS if key not in ("input_noise", "reference")}
    adc["bits"] = 32
    made = scenario(adc, noise=False)
    sine = {"kind": "sine", "amplitude": 0.9, "frequency": frequency}
    run = simulate(Scenario.model_validate({**made.resolved(), "stimulus": sine}))
    converter = run.scenario.adc
    assert isinstance(converter, OversamplingAdc)
    late = run.time > 0.05  # fifty time constants after the start
    alias = abs((frequency + 1e3) % 2e3 - 1e3)
    found, left = residual(run.voltage[late], run.time[late], alias)
    gain = float(converter.sinc.amplitude(frequency)) / np.hypot(1.0, 2 * np.pi * frequency * 1e-3)
    assert 20.0 * np.log10(found / 0.9) == pytest.approx(20.0 * np.log10(gain), abs=1e-3)
    assert np.std(left) < converter.lsb


def test_noise_of_the_circuit_is_correlated_within_a_burst() -> None:
    """kT/C noise of 1 pF behind 100 Mohm, seen 16 times within 75 us of its own 100 us.

    The mean of a burst has s² / n² times the sum of all exp(-|i - j| h / R C); bursts half a
    second apart share nothing. 4000 of them: 4.5 standard errors are 5 %.
    """
    adc = {"rate": 1e3, "bits": 24, "low": -1e-2, "high": 1e-2,
           "averaging": {"count": 16, "interval": "5 us"}}  # fmt: skip
    stage = {"kind": "rc-lowpass", "resistance": "100 Mohm", "capacitance": "1 pF"}
    run = simulate(
        Scenario.model_validate(
            {
                "stimulus": {"kind": "step", "after": 0.0},
                "chain": [stage],
                "adc": adc,
                "simulation": {"duration": 4.0},
            }
        )
    )
    lag = np.abs(np.subtract.outer(np.arange(16), np.arange(16)))
    share = np.mean(np.exp(-lag * 5e-6 / 1e-4))
    variance = 1.380649e-23 * 298.15 / 1e-12
    assert np.all(run.pin == 0.0)
    found = float(np.var(run.voltage))
    assert found == pytest.approx(variance * share, rel=4.5 * np.sqrt(2.0 / 4000))
