"""Published limits of sampling: aperture jitter, coherent records."""

from __future__ import annotations

from math import gcd

import numpy as np
import pytest

from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate

POINTS = 8192
RATE = 82e6


def _voltages(frequency: float, jitter: float) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    run = simulate(
        Scenario.model_validate(
            {
                "seed": 3,
                "stimulus": {"kind": "sine", "amplitude": 0.99, "frequency": frequency},
                "adc": {
                    "rate": RATE,
                    "bits": 24,
                    "low": -1.0,
                    "high": 1.0,
                    "aperture_jitter": jitter,
                },
                "simulation": {"duration": POINTS / RATE},
            }
        )
    )
    assert len(run.voltage) == POINTS
    return run.voltage


# Published: 100 fs rms limit a sine of 100 MHz to 84.04 dB and one of 1 GHz to 64.04 dB,
# -20 log10(2 pi f s). Source: common practice (computed from the closed form).
@pytest.mark.parametrize(("frequency", "published"), [(100e6, 84.04), (1e9, 64.04)])
def test_jitter_limits_the_ratio(frequency: float, published: float) -> None:
    """The signal-to-noise ratio of a jittered run of 24 bits, within 0.2 dB of the limit."""
    values = _voltages(frequency, 100e-15)
    turns = np.arange(POINTS) * (frequency / RATE)
    angle = 2.0 * np.pi * (turns - np.floor(turns))
    columns = np.column_stack([np.sin(angle), np.cos(angle), np.ones(POINTS)])
    weights, *_ = np.linalg.lstsq(columns, values, rcond=None)
    noise = np.std(values - columns @ weights)
    ratio = 20.0 * np.log10(np.hypot(*weights[:2]) / np.sqrt(2.0) / noise)
    assert -20.0 * np.log10(2.0 * np.pi * frequency * 100e-15) == pytest.approx(published, abs=5e-3)
    assert ratio == pytest.approx(published, abs=0.2)


def test_a_coherent_record_has_one_line() -> None:
    """2503 cycles in 8192 points at 82 MHz are 25.0544434 MHz: all else is quantization noise.

    Source: IEEE 1241, coherent sampling (from memory; the value is computed).
    """
    frequency = RATE * 2503 / POINTS
    assert gcd(2503, POINTS) == 1
    assert frequency == pytest.approx(25.0544434e6, abs=0.05)
    spectrum = np.abs(np.fft.rfft(_voltages(frequency, 0.0))) / (POINTS / 2)
    assert np.argmax(spectrum) == 2503
    assert spectrum[2503] == pytest.approx(0.99, rel=1e-6)
    # At 24 bits one line of the noise has about LSB/sqrt(12)·sqrt(2·2/8192) = 8e-10.
    assert np.max(np.delete(spectrum, 2503)) < 8e-9
