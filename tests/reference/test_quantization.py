"""Published noise of the ideal quantizer, found on whole runs."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate
from frontend_sim.simulation.run import Run

POINTS = 16384
CYCLES = 2503
"""Without a common factor with POINTS, so every conversion meets another phase."""
RATE = 48e3


def residual_of_sine(run: Run, frequency: float) -> tuple[float, NDArray[np.float64]]:
    """Return the amplitude of the best sine of a known frequency, and what it leaves."""
    k = np.arange(len(run.voltage)) / run.scenario.adc.rate
    angle = 2.0 * np.pi * np.modf(frequency * k)[0]
    columns = np.column_stack([np.sin(angle), np.cos(angle), np.ones(len(k))])
    weights, *_ = np.linalg.lstsq(columns, run.voltage, rcond=None)
    return float(np.hypot(*weights[:2])), run.voltage - columns @ weights


def _run(bits: int, stimulus: dict[str, Any], **adc: Any) -> Run:
    return simulate(
        Scenario.model_validate(
            {
                "stimulus": stimulus,
                "adc": {"rate": RATE, "bits": bits, "low": -1.0, "high": 1.0, **adc},
                "simulation": {"duration": POINTS / RATE},
            }
        )
    )


# Published: 6.0206 N + 1.7609 dB = 49.926, 74.008, 98.091 dB for N = 8, 12, 16.
# Source: W. R. Bennett 1948, "Spectra of quantized signals" (values computed; source from memory).
@pytest.mark.parametrize(("bits", "published"), [(8, 49.926), (12, 74.008), (16, 98.091)])
def test_sine_of_full_scale(bits: int, published: float) -> None:
    """The signal-to-noise ratio of a coherent sine, within 0.05 dB.

    The published ratio takes the error as spread evenly over an LSB. The noise of one sine departs
    from that by up to 0.1 dB, so it is averaged over eight offsets within an LSB. The sine is 1.5
    LSB short of full scale to leave them room; that is added back.
    """
    lsb, noise = 2.0 / 2**bits, []
    amplitude = 1.0 - 1.5 * lsb
    frequency = RATE * CYCLES / POINTS
    for eighth in range(8):
        offset = (eighth / 8.0 - 1.0) * lsb
        sine = {"kind": "sine", "amplitude": amplitude, "frequency": frequency, "offset": offset}
        run = _run(bits, sine)
        assert len(run.codes) == POINTS
        assert not np.any(run.overrange)
        found, residual = residual_of_sine(run, frequency)
        assert found == pytest.approx(amplitude, abs=0.1 * lsb)
        noise.append(np.mean(residual**2))
    ratio = 10.0 * np.log10(0.5 * amplitude**2 / np.mean(noise)) - 20.0 * np.log10(amplitude)
    assert ratio == pytest.approx(published, abs=0.05)


# Source: W. R. Bennett 1948 (from memory): the error of an ideal quantizer is uniform, LSB/sqrt 12.
@pytest.mark.parametrize("bits", [6, 12, 20])
@pytest.mark.parametrize(("rounding", "mean"), [("nearest", 0.0), ("down", -0.5)])
def test_error_of_a_ramp(bits: int, rounding: str, mean: float) -> None:
    """A ramp through the whole range leaves LSB/sqrt 12 rms and the mean of its rounding rule."""
    # The slope is incommensurate with rate and LSB, so the error visits every value evenly.
    slope = 2.0 * RATE / POINTS * (1.0 - 2.0 / np.e / 2**6)
    run = _run(bits, {"kind": "ramp", "before": -1.0, "slope": slope}, rounding=rounding)
    error = (run.voltage - run.pin) / run.scenario.adc.lsb
    assert not np.any(run.overrange)
    assert np.std(error) == pytest.approx(1.0 / np.sqrt(12.0), rel=0.01)
    assert np.mean(error) == pytest.approx(mean, abs=0.01)
