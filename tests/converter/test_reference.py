"""The reference: what its errors do to codes, its noise, and what is refused."""

from __future__ import annotations

from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from digitizing import constant, digitized

from frontend_sim.converter import Adc, OversamplingAdc
from frontend_sim.errors import ModelError, ScenarioError
from frontend_sim.randomness import TILE


def adc(reference: dict[str, Any], **values: Any) -> Adc:
    """Return a converter of 1 kHz and 24 bits, 0 to 2 V, with a reference."""
    return Adc(**{"rate": 1e3, "bits": 24, "high": 2.0, "reference": reference, **values})


def test_a_high_reference_reads_low() -> None:
    """At 1 % too much the range is 2.02 V: 1 V reads as 1/1.01 V, zero stays zero."""
    made = adc({"error": "1 %"})
    assert digitized(made, constant(1.0), 3).voltage == pytest.approx(1.0 / 1.01, abs=made.lsb)
    assert digitized(made, constant(0.0), 3).voltage == pytest.approx(0.0, abs=made.lsb)
    assert not np.any(digitized(made, constant(2.01), 3).overrange)
    assert np.all(digitized(made, constant(2.021), 3).overrange)


@pytest.mark.parametrize(("temperature", "ratio"), [(298.15, 1.002), (348.15, 1.0045)])
def test_drift_counts_from_25_degrees(temperature: float, ratio: float) -> None:
    """0.2 % of initial error and 50 ppm/K: at 75 degC 0.45 % in all."""
    made = adc({"error": "0.2 %", "drift": "50 ppm/K"})
    found = digitized(made, constant(1.5), 2, temperature=temperature).voltage
    assert found == pytest.approx(1.5 / ratio, abs=made.lsb)


def test_noise_is_multiplied() -> None:
    """100 ppm rms: 100 uV rms at 1 V, half of that at 0.5 V, none at 0 V; no colour.

    Over 1e5 conversions, within 4.5 standard errors.
    """
    count = 100_000
    made = adc({"noise": "100 ppm"})
    noise = digitized(made, constant(1.0), count).voltage - 1.0
    error = 4.5 / np.sqrt(count)
    assert np.std(noise) == pytest.approx(100e-6, rel=error)
    assert abs(np.mean(noise[1:] * noise[:-1])) / 1e-8 < error
    half = digitized(made, constant(0.5), count).voltage - 0.5
    # The same noise, halved; 1/r is linear to its square, 1e-4 of it.
    np.testing.assert_allclose(half, 0.5 * noise, atol=made.lsb)
    assert np.std(digitized(made, constant(0.0), 1000).voltage) == 0.0


def test_a_filter_correlates_noise() -> None:
    """R C of 4 ms at 1 kHz: neighbours are correlated by exp(-1/4), the rms is kept."""
    count = 8 * TILE
    made = adc({"noise": "100 ppm", "filter_time_constant": "4 ms"})
    noise = digitized(made, constant(1.0), count, seed=2).voltage - 1.0
    error = 4.5 * np.sqrt(9.0 / count)
    for lag in (1, 4, 12):
        correlation = np.mean(noise[lag:] * noise[:-lag]) / 1e-8
        assert correlation == pytest.approx(np.exp(-lag / 4.0), abs=error)
    assert np.mean(noise**2) / 1e-8 == pytest.approx(1.0, abs=np.sqrt(2.0) * error)


def test_averaging_does_not_remove_filtered_noise() -> None:
    """64 conversions within 64 us: white noise falls by 8, noise filtered with 10 ms stays.

    The mean of n values with correlation exp(-h/T) keeps 1 - n h / (3 T) of its variance, to first
    order: 0.998 here.
    """
    burst = {"count": 64, "shift": 0, "interval": "1 us"}
    count, values = 20_000, {"bits": 16, "averaging": burst}
    white = digitized(adc({"noise": "1000 ppm"}, **values), constant(1.0), count).voltage
    slow = adc({"noise": "1000 ppm", "filter_time_constant": "10 ms"}, **values)
    filtered = digitized(slow, constant(1.0), count).voltage
    assert np.std(white) == pytest.approx(1e-3 / 8.0, rel=4.5 / np.sqrt(2.0 * count))
    # Neighbouring results are correlated by exp(-0.1), so about 20 of them count as one.
    assert np.std(filtered) == pytest.approx(1e-3, rel=4.5 * np.sqrt(10.0 / count))


def test_noise_does_not_depend_on_cuts() -> None:
    """White or filtered, the noise of a look depends on the seed and its number alone."""
    for constant_of in (0.0, 3e-3):
        made = adc({"noise": "100 ppm", "filter_time_constant": constant_of})
        assert made.reference is not None
        factor, pattern = made.reference.factor, made.pattern
        whole = factor(pattern, 0, 40_000, 7)
        parts = [factor(pattern, a, b, 7) for a, b in pairwise([0, 1, 16_384, 20_000, 40_000])]
        np.testing.assert_array_equal(np.concatenate(parts), whole)


def test_oversampling_averages_the_reference_too() -> None:
    """White reference noise of a modulator passes the filter like any other noise."""
    made = OversamplingAdc(
        modulator_rate=1e5, decimation=50, order=2, bits=24, high=2.0,
        reference={"noise": "1000 ppm"},
    )  # fmt: skip
    count = 5000
    noise = digitized(made, constant(1.0), count).voltage - 1.0
    # Neighbours of a sinc² filter are correlated by a quarter: a little less than count free ones.
    expected = 1e-3 * made.sinc.noise_gain
    assert np.std(noise) == pytest.approx(expected, rel=5.0 / np.sqrt(2.0 * count))


@pytest.mark.parametrize(
    ("reference", "message"),
    [
        ({"voltage": "1.8 V"}, r"range from 0 V to 2 V reaches beyond .* reference of 1.8 V"),
        ({"voltage": 0.0}, "above 0"),
        ({"error": "-60 %"}, "error must lie between -50 % and 100 %"),
        ({"error": "100 %"}, "error must lie between -50 % and 100 %"),
        ({"error": "1 V"}, "fraction"),
        ({"noise": "3 %"}, "noise must be at most 2% of the reference"),
        ({"noise": "-1 ppm"}, "at least 0"),
        ({"drift": "10 ppm"}, "drift"),
        ({"filter_time_constant": "-1 ms"}, "at least 0"),
        ({"ratio": 1}, "unknown here"),
    ],
)
def test_impossible_references_are_refused(reference: dict[str, Any], message: str) -> None:
    """Each with a message of its own."""
    with pytest.raises(ScenarioError, match=message):
        adc(reference)


def test_a_reference_may_just_reach_the_range() -> None:
    """2 V of reference give 0 to 2 V, and -2 to 2 V."""
    adc({"voltage": "2 V"})
    adc({"voltage": "2 V"}, low=-2.0)


def test_a_drift_out_of_all_reason_is_refused_before_the_run() -> None:
    """1 %/K over 100 K leaves no reference; the message tells the temperature and the drift."""
    made = adc({"drift": "-10000 ppm/K"})
    with pytest.raises(ModelError, match=r"drifts to 0 times .* 125 degC.*lower reference.drift"):
        made.digitizer(0, 398.15)
