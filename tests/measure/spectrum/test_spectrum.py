"""Spectra against closed forms: tones, noise, constants, and the conservation of power."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sines import sine

from frontend_sim.errors import MeasureError
from frontend_sim.measure.spectrum import (
    WINDOWS,
    amplitude_spectrum,
    coherence_of,
    coherent_tone,
    folded,
)


@pytest.mark.parametrize("name", WINDOWS)
@pytest.mark.parametrize("count", [256, 255])
def test_a_tone_on_a_bin_shows_its_peak_value(name, count):
    """Offset, tone and alternation stand at their bins with their own values."""
    values = sine(40, count, amplitude=0.7, offset=-0.25)
    spectrum = amplitude_spectrum(values, 1000.0, name)
    assert spectrum.amplitude[40] == pytest.approx(0.7, rel=1e-12)
    assert spectrum.amplitude[0] == pytest.approx(0.25, rel=1e-12)
    assert spectrum.frequency[40] == pytest.approx(40 * 1000.0 / count, rel=1e-15)
    half = spectrum.window.half_width
    assert spectrum.power(40 - half, 40 + half) == pytest.approx(0.5 * 0.7**2, rel=1e-10)


def test_the_alternation_at_half_the_rate():
    """+1, -1, +1, ... has amplitude one and mean square one, not one half."""
    spectrum = amplitude_spectrum((-1.0) ** np.arange(64), 64.0, "rectangular")
    assert spectrum.frequency[-1] == 32.0
    assert spectrum.amplitude[-1] == pytest.approx(1.0, rel=1e-14)
    assert spectrum.mean_square[-1] == pytest.approx(1.0, rel=1e-14)


@settings(max_examples=50, deadline=None)
@given(seed=st.integers(0, 2**32), count=st.integers(16, 300))
def test_power_is_conserved(seed, count):
    """Without a window the mean squares of all bins add up to that of the record (Parseval)."""
    values = np.random.default_rng(seed).standard_normal(count) + 0.3
    spectrum = amplitude_spectrum(values, 1.0, "rectangular")
    assert np.sum(spectrum.mean_square) == pytest.approx(np.mean(values**2), rel=1e-12)


@pytest.mark.parametrize("name", WINDOWS)
def test_density_of_white_noise(name):
    """White noise of rms s at rate f shows the density s sqrt(2 / f), whatever the window.

    The mean over 2^16 bins of squares with a relative deviation of one each, some of them
    correlated, is within 2 % of its expectation.
    """
    values = 0.02 * np.random.default_rng(4).standard_normal(2**17)
    spectrum = amplitude_spectrum(values, 48e3, name)
    assert np.mean(spectrum.density**2) == pytest.approx(0.02**2 * 2.0 / 48e3, rel=0.02)


def test_levels_against_full_scale():
    """A sine that fills the range is at 0 dBFS, half of it at -6.0206 dBFS."""
    spectrum = amplitude_spectrum(sine(10, 100, amplitude=1.65), 1.0, "rectangular")
    assert spectrum.dbfs(3.3)[10] == pytest.approx(0.0, abs=1e-12)
    assert spectrum.dbfs(6.6)[10] == pytest.approx(-6.0206, abs=1e-4)


@settings(max_examples=50, deadline=None)
@given(scale=st.floats(1e-9, 1e9), shift=st.integers(0, 255), name=st.sampled_from(sorted(WINDOWS)))
def test_scale_and_time_shift(scale, shift, name):
    """Amplitudes scale with the signal; a coherent tone looks the same at any start."""
    values = sine(21, 256)
    first = amplitude_spectrum(values, 1.0, name).amplitude
    moved = amplitude_spectrum(scale * np.roll(values, shift), 1.0, name).amplitude
    assert np.max(np.abs(moved / scale - first)) < 1e-12


def test_coherent_sampling():
    """82 MHz, 2503 cycles in 8192 points: 25.0544434 MHz. Source: IEEE 1241, list of values."""
    tone = coherent_tone(25.054e6, 82e6, 8192)
    assert (tone.cycles, tone.count, tone.common_factor) == (2503, 8192, 1)
    assert tone.frequency == pytest.approx(25.0544434e6, abs=0.05)
    assert tone.coherent
    assert coherence_of(tone.frequency, 82e6, 8192).coherent


def test_a_tone_that_leaks_is_not_coherent():
    """A hundred-thousandth of a bin off, -95 dB leak, however many cycles the record holds."""
    beside = coherence_of(999_983.0 + 1e-5, 2.0**22, 2**22)
    assert beside.common_factor == 1
    assert 10.0 * np.log10(beside.leakage) == pytest.approx(-94.8, abs=0.1)
    assert not beside.coherent


@settings(max_examples=200, deadline=None)
@given(count=st.integers(3, 5000), share=st.floats(1e-3, 0.499))
def test_the_coherent_tone_is_the_nearest(count, share):
    """The tone found has no common factor with the record, and no nearer one is like it."""
    tone = coherent_tone(share * 1e3, 1e3, count)
    assert np.gcd(tone.cycles, count) == 1
    assert 0 < tone.cycles < 0.5 * count
    every = np.arange(1, (count + 1) // 2)
    good = every[np.gcd(every, count) == 1]
    assert abs(tone.cycles - share * count) <= np.min(np.abs(good - share * count)) + 1e-9


def test_leakage_of_a_tone_beside_its_bin():
    """1 - sinc²(d) of the power leaves the bin: measured on a spectrum without a window."""
    for deviation in (1e-6, 1e-3, 0.2):
        spectrum = amplitude_spectrum(sine(1000 + deviation, 8192), 8192.0, "rectangular")
        left = 0.5 - spectrum.mean_square[1000]
        expected = coherence_of(1000.0 + deviation, 8192.0, 8192).leakage
        # The image at the negative frequency disturbs by a few parts in 1000 of sqrt(leakage).
        assert left / 0.5 == pytest.approx(expected, rel=5e-3, abs=3e-12 + 1e-3 * expected**0.5)


@pytest.mark.parametrize(
    ("frequency", "place"), [(0.0, 0.0), (30.0, 30.0), (50.0, 50.0), (70.0, 30.0), (1010.0, 10.0)]
)
def test_folding(frequency, place):
    """Tones above half of 100 Hz show up mirrored and shifted into 0 to 50 Hz."""
    assert folded(frequency, 100.0) == pytest.approx(place, abs=1e-12)
    number = np.arange(32)
    assert np.cos(2 * np.pi * frequency * number / 100.0) == pytest.approx(
        np.cos(2 * np.pi * place * number / 100.0), abs=1e-11
    )


@pytest.mark.parametrize(
    ("values", "rate", "message"),
    [
        (np.ones(15), 1.0, "has 15 samples, this measure needs at least 16; record longer"),
        (np.full(20, np.nan), 1.0, "sample 0 of the record is nan, the first of 20"),
        (np.full(20, 1e200), 1.0, "not numbers below 1e"),
        (np.ones((20, 2)), 1.0, "measure each channel by itself"),
        (["1", "2"], 1.0, "must hold real numbers"),
        (np.ones(20) * 1j, 1.0, "must hold real numbers"),
        ([[1.0], [1.0, 2.0]], 1.0, "must be one row of real numbers"),
        (np.ones(20), 0.0, "the rate must be a number above zero"),
        (np.ones(20), float("nan"), "the rate must be a number above zero"),
        (np.ones(20), "1 kHz", "the rate must be a number above zero and below 1e.30, but '1 kHz'"),
    ],
)
def test_what_cannot_be_measured_is_refused(values, rate, message):
    """One message tells what was given, the limit and what to do."""
    with pytest.raises(MeasureError, match=message):
        amplitude_spectrum(values, rate)


def test_tones_that_cannot_be_coherent_are_refused():
    """Above half the rate there is no such tone, and two points hold none."""
    with pytest.raises(MeasureError, match="ask for the tone that it folds to"):
        coherent_tone(60.0, 100.0, 1024)
    with pytest.raises(MeasureError, match="take at least 3 points"):
        coherent_tone(10.0, 100.0, 2)
