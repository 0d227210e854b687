"""The clock's slow errors: rate, sinusoidal and random wander, and what is refused."""

from __future__ import annotations

from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from digitizing import digitized
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.converter import Adc, AnyAdc, OversamplingAdc
from frontend_sim.converter.clock import (
    look_count,
    nominal_instants,
    sampling_instants,
)
from frontend_sim.errors import ScenarioError
from frontend_sim.randomness import TILE
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate

SINUSOIDAL = {"shape": "sinusoidal", "rms": "10 ns", "frequency": "50 Hz", "phase": "90 deg"}
RANDOM = {"shape": "gauss-markov", "rms": "30 ns", "correlation_time": "5 ms"}


def adc(**values: Any) -> Adc:
    """Return a converter of 10 kHz but for the given values."""
    return Adc(**{"rate": 1e4, "bits": 12, "high": 1.0, **values})


def test_a_fast_clock_comes_early() -> None:
    """+100 ppm: conversion k is at first + k / 10 001 Hz, and 10 001 of them fit into a second."""
    fast = adc(rate_error="100 ppm", first=1e-3)
    np.testing.assert_allclose(
        sampling_instants(fast, 0, 5, 0), 1e-3 + np.arange(5) / 10001.0, rtol=1e-15
    )
    assert adc(rate_error="100 ppm").code_count(1.0) == 10001
    assert adc(rate_error="-100 ppm").code_count(1.0) == 9999
    assert fast.true_rate == pytest.approx(10001.0, rel=1e-15)


def test_a_sinusoidal_wander_is_the_sine_of_the_nominal_time() -> None:
    """d = sqrt(2) rms sin(2 pi f t + phase), within the rounding of the instants."""
    wandering = adc(wander=SINUSOIDAL)
    nominal = nominal_instants(wandering, 0, 1000)
    expected = np.sqrt(2.0) * 10e-9 * np.sin(2.0 * np.pi * 50.0 * nominal + 0.5 * np.pi)
    found = sampling_instants(wandering, 0, 1000, 0) - nominal
    np.testing.assert_allclose(found, expected, rtol=0, atol=3e-17)


def test_a_random_wander_has_its_rms_and_correlation() -> None:
    """Within 4.5 standard errors, the memory of 50 conversions counted in."""
    wandering, count = adc(wander=RANDOM), 16 * TILE
    found = sampling_instants(wandering, 0, count, 8) - nominal_instants(wandering, 0, count)
    error = 4.5 * np.sqrt(2.0 * (1.0 + 100.0) / count)
    assert np.mean(found**2) / 30e-9**2 == pytest.approx(1.0, abs=error)
    for lag in (1, 20, 50, 150):
        correlation = np.mean(found[lag:] * found[:-lag]) / 30e-9**2
        assert correlation == pytest.approx(np.exp(-lag / 50.0), abs=error)


def test_a_slope_meets_the_true_instants() -> None:
    """A ramp of 1 V/s read at wandering, jittered, delayed instants is these instants, in V.

    Slope errors are not linearized: the pin is taken where the clock really looks.
    """
    clocked = adc(
        wander=RANDOM, rate_error="20 ppm", aperture_delay="2 us", aperture_jitter="1 us", bits=32
    )
    made = digitized(clocked, lambda times: times, 2000, seed=3)
    np.testing.assert_array_equal(made.time, sampling_instants(clocked, 0, 2000, 3))
    np.testing.assert_array_equal(made.pin, made.time)
    assert np.max(np.abs(made.voltage - made.time)) <= 0.5 * clocked.lsb * (1.0 + 1e-6)


KINDS = st.one_of(
    st.builds(lambda rate: {"rate": rate}, st.floats(1.0, 1e8)),
    st.builds(
        lambda rate, count, share: {
            "rate": rate, "averaging": {"count": count, "interval": share / (rate * count)},
        },
        st.floats(1.0, 1e6), st.integers(2, 64), st.floats(0.01, 1.0),
    ),
    st.builds(
        lambda rate, decimation, order, conversion: {
            "modulator_rate": rate, "decimation": decimation, "order": order,
            "conversion": conversion,
        },
        st.floats(1e3, 1e8), st.integers(2, 100), st.integers(1, 5),
        st.sampled_from(["continuous", "restarted"]),
    ),
)  # fmt: skip


@given(
    kind=KINDS,
    jitter=st.sampled_from([0.0, 1e-6, 0.01, 0.05]),
    change=st.floats(1e-6, 0.0099),
    memory=st.floats(1.5, 1e6),
    shape=st.sampled_from(["sinusoidal", "gauss-markov"]),
    rate_error=st.floats(-0.1, 0.1),
    seed=st.integers(0, 2**63 - 1),
    cuts=st.lists(st.integers(0, 20_000), max_size=5),
)
@settings(max_examples=60, deadline=None)
def test_looks_stay_in_order_and_cuts_never_show(
    kind: dict[str, Any],
    jitter: float,
    change: float,
    memory: float,
    shape: str,
    rate_error: float,
    seed: int,
    cuts: list[int],
) -> None:
    """At any rate, rhythm, jitter and wander that is let pass, instants increase strictly.

    None lies further from the one before, or the first from t = 0, than the engine is told.
    """
    make: type[AnyAdc] = OversamplingAdc if "decimation" in kind else Adc
    plain = make(**kind, bits=12, high=1.0, rate_error=rate_error)
    closest = plain.pattern.closest
    if shape == "sinusoidal":
        frequency = 1.0 / (memory * closest)
        rms = change * closest / (2.0 * np.pi * frequency * closest)
        wander = {"shape": shape, "rms": rms, "frequency": frequency}
    else:
        rms = change * closest / np.sqrt(-2.0 * np.expm1(-1.0 / memory))
        wander = {"shape": shape, "rms": rms, "correlation_time": memory * closest}
    clocked = make(
        **kind, bits=12, high=1.0, rate_error=rate_error, wander=wander,
        aperture_jitter=0.999999 * jitter * closest,
    )  # fmt: skip
    edges = sorted({0, *cuts, 20_000})
    parts = [sampling_instants(clocked, a, b, seed) for a, b in pairwise(edges)]
    whole = sampling_instants(clocked, 0, 20_000, seed)
    np.testing.assert_array_equal(np.concatenate(parts), whole)
    assert np.all(np.diff(whole) > 0.0)
    assert np.max(np.diff(whole, prepend=0.0)) <= clocked.digitizer(seed).longest
    far = sampling_instants(clocked, 10**7, 10**7 + 50, seed)
    assert np.all(np.diff(far) > 0.0)


@pytest.mark.parametrize(
    "wander",
    [
        {"shape": "sinusoidal", "rms": "0.5 s", "frequency": "1 mHz", "phase": "90 deg"},
        {"shape": "gauss-markov", "rms": "0.5 s", "correlation_time": "1e7 s"},
    ],
)
def test_a_clock_far_ahead_finds_the_pin(wander: dict[str, Any]) -> None:
    """A first look hundreds of periods late still sees 1 - exp(-t / RC), within 1e-12."""
    scenario = Scenario.model_validate(
        {
            "format": 1,
            "title": "a clock far ahead",
            "seed": 3,
            "stimulus": {"kind": "step", "before": 0.0, "after": 1.0},
            "chain": [{"kind": "rc-lowpass", "resistance": 1e4, "capacitance": 1e-4}],
            "adc": {"rate": 1e3, "bits": 12, "high": 1.0, "wander": wander},
            "simulation": {"duration": 0.1},
        }
    )
    run = simulate(scenario)
    assert run.time[0] > 0.5
    np.testing.assert_allclose(run.pin, -np.expm1(-run.time), rtol=0, atol=1e-12)


@given(kind=KINDS, codes=st.integers(1, 5000))
@settings(max_examples=200)
def test_the_count_is_that_of_the_last_looks(kind: dict[str, Any], codes: int) -> None:
    """A run ends right after the look that completes code k: it has k + 1 codes, or else k."""
    make: type[AnyAdc] = OversamplingAdc if "decimation" in kind else Adc
    made = make(**kind, bits=12, high=1.0, first=1e-3)
    instant = float(made.pattern.at(np.array([made.last_look(codes - 1)]))[0])
    period = 1.0 / made.true_rate
    assert made.code_count(instant + 0.001 * period) == codes
    assert made.code_count(instant - 0.001 * period) == codes - 1
    assert look_count(made, codes) == made.last_look(codes - 1) + 1
    assert look_count(made, 0) == 0
    assert made.code_instant(0) <= instant


@pytest.mark.parametrize(
    ("values", "message"),
    [
        ({"wander": {"shape": "sinusoidal", "rms": 1e-9}}, "sinusoidal wander needs frequency"),
        ({"wander": {"shape": "gauss-markov", "rms": 1e-9}}, "needs correlation_time"),
        ({"wander": {**RANDOM, "frequency": 5.0}}, "gauss-markov wander has no frequency"),
        ({"wander": {**SINUSOIDAL, "correlation_time": 5.0}}, "has no correlation_time"),
        ({"wander": {**RANDOM, "phase": 1.0}}, "has no phase"),
        ({"wander": {**RANDOM, "shape": "random"}}, "'sinusoidal' or 'gauss-markov'"),
        ({"wander": {**RANDOM, "rms": -1.0}}, "at least 0"),
        ({"wander": {**RANDOM, "correlation_time": 0.0}}, "above 0"),
        ({"wander": {**RANDOM, "rms": "10 us"}}, r"1.99e-06 s rms within the conversion period"),
        ({"wander": {**SINUSOIDAL, "rms": "10 ms"}}, "no slow wander"),
        ({"rate_error": "11 %"}, "rate_error must be at most 10%"),
        ({"rate_error": "1 Hz"}, "fraction"),
        ({"aperture_jitter": "5.1 us"}, "at most 5% of the conversion period"),
        (
            {"aperture_jitter": "1 us", "averaging": {"count": 10, "interval": "10 us"}},
            "at most 5% of the interval, 5e-07 s",
        ),
    ],
)
def test_clocks_out_of_order_are_refused(values: dict[str, Any], message: str) -> None:
    """Each with a message of its own, the number and the limit in it."""
    with pytest.raises(ScenarioError, match=message):
        adc(**values)
