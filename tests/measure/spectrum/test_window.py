"""Windows against scipy.signal, against published numbers, and measured on long records."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.signal import windows as scipy_windows

from frontend_sim.errors import MeasureError
from frontend_sim.measure.spectrum import WINDOWS, Window, window_named

SCIPY = {
    "rectangular": scipy_windows.boxcar,
    "hann": scipy_windows.hann,
    "blackman-harris": scipy_windows.blackmanharris,
    "flat-top": scipy_windows.flattop,
}

# name: noise bandwidth [bins], scalloping [dB], highest side lobe [dB].
# F. J. Harris 1978, table I, from memory: Hann 1.50, 1.42 dB, -32 dB (31.47 more exactly);
# Blackman-Harris 2.00, 0.83 dB, -92 dB; rectangular 1.00, 3.92 dB, -13 dB. The flat top's 3.77 bins
# and 0.01 dB are common in data sheets of analyzers.
PUBLISHED = {
    "rectangular": (1.00, 3.92, 13.26),
    "hann": (1.50, 1.42, 31.47),
    "blackman-harris": (2.00, 0.83, 92.0),
    "flat-top": (3.77, 0.01, 93.0),
}


@pytest.mark.parametrize("name", SCIPY)
@pytest.mark.parametrize("count", [16, 17, 1000])
def test_points_are_those_of_scipy(name, count):
    """The periodic form of scipy.signal gives the same points to rounding."""
    expected = SCIPY[name](count, sym=False)
    assert np.max(np.abs(window_named(name).points(count) - expected)) < 1e-14


@pytest.mark.parametrize("name", WINDOWS)
def test_gain_and_noise_bandwidth_are_those_of_the_points(name):
    """Coherent gain and noise bandwidth from the coefficients equal the sums over all points."""
    window = window_named(name)
    points = window.points(1024)
    assert window.coherent_gain == pytest.approx(np.mean(points), rel=1e-13)
    assert window.noise_bandwidth == pytest.approx(
        1024 * np.sum(points**2) / np.sum(points) ** 2, rel=1e-12
    )


@pytest.mark.parametrize("name", PUBLISHED)
def test_published_numbers(name):
    """Noise bandwidth and scalloping are those of Harris 1978, at printed precision."""
    bandwidth, scalloping, _ = PUBLISHED[name]
    window = window_named(name)
    assert window.noise_bandwidth == pytest.approx(bandwidth, abs=0.005)
    assert -window.scalloping == pytest.approx(scalloping, abs=0.005)


@pytest.mark.parametrize("name", WINDOWS)
def test_transform(name):
    """Scalloping, the end of the main lobe and side lobes are those of a padded transform."""
    window, count, pad = window_named(name), 4096, 64
    points = window.points(count)
    response = np.abs(np.fft.rfft(points, count * pad)) / np.sum(points)
    assert 20.0 * math.log10(response[pad // 2]) == pytest.approx(window.scalloping, abs=1e-3)
    lobes = response[max(window.half_width, 1) * pad :]
    assert -20.0 * math.log10(np.max(lobes)) == pytest.approx(window.side_lobe, abs=0.1)


def test_a_table_that_is_wrong_is_refused():
    """Data is checked when it is made: coefficients whose peak is not one are a typing error."""
    with pytest.raises(MeasureError, match=r"add up to its peak, one, but they give 0\.9"):
        Window("mine", (0.5, 0.4), 30.0, "a slip of the pen")
    with pytest.raises(MeasureError, match="add up"):
        Window("mine", (), 30.0, "nothing")


def test_an_unknown_window_names_the_nearest():
    """A typing error in a name is answered with the name that was meant."""
    with pytest.raises(MeasureError, match="did you mean 'hann'"):
        window_named("han")
