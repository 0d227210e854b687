"""The noise burst: its rms value, its spectrum, its seeds, and that no cut of time shows."""

from __future__ import annotations

from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy import signal

from frontend_sim.stimulus.drive import UniformDrive
from frontend_sim.stimulus.noise_burst import POINTS_PER_CYCLE, TILE, NoiseBurst
from frontend_sim.stimulus.sum import Sum

Real = NDArray[np.float64]

BANDWIDTH = 1000.0
RATE = POINTS_PER_CYCLE * BANDWIDTH


def _drive(key: tuple[int, ...] = (7, 1), **values: Any) -> UniformDrive:
    burst = NoiseBurst(**{"rms": 0.3, "bandwidth": BANDWIDTH, "length": 40.0, **values})
    (drive,) = burst.drives(key)
    assert isinstance(drive, UniformDrive)
    return drive


def _points(drive: UniformDrive, length: float = 40.0) -> Real:
    return drive.points(1, int(length * RATE))


def test_rms_is_what_was_asked() -> None:
    """Over 40 s and eight seeds, each within 3.5 standard errors, all together within 3.

    Half a share of 1/sqrt(2 B T) is the standard error of the rms of noise of bandwidth B over T.
    The signal counts between its points too, so it is looked at anywhere between them.
    """
    error = 1.0 / np.sqrt(2.0 * BANDWIDTH * 40.0) / np.sqrt(2.0)
    times = np.arange(1, int(40.0 * RATE) - 1) / RATE
    fine = np.concatenate([times[share::4] + 0.25 * share / RATE for share in range(4)])
    shares = []
    for seed in range(8):
        values = _drive((seed, 5)).values(fine)
        shares.append(np.sqrt(np.mean(values**2)) / 0.3 - 1.0)
    assert np.max(np.abs(shares)) < 3.5 * error
    assert abs(np.mean(shares)) < 3.0 * error / np.sqrt(8.0)


def test_the_values_are_gaussian() -> None:
    """Skewness and excess kurtosis of 40 000 independent values within 4 standard errors."""
    values = _points(_drive())[:: POINTS_PER_CYCLE // 2] / 0.3
    count = len(values)
    assert abs(np.mean(values**3)) < 4.0 * np.sqrt(15.0 / count)
    assert abs(np.mean(values**4) - 3.0) < 4.0 * np.sqrt(96.0 / count)
    assert abs(np.mean(values)) < 4.0 / np.sqrt(count)


def test_the_spectrum_is_flat_and_ends() -> None:
    """Welch: flat to 0.9 B at about rms²/B, a quarter of it at B, 55 dB down from 1.1 B on."""
    values = _points(_drive(length=100.0), 100.0)
    f, density = signal.welch(values, RATE, "blackman", 1024)
    share = density / (0.3**2 / BANDWIDTH)
    flat = share[(f > 0.05 * BANDWIDTH) & (f < 0.88 * BANDWIDTH)]
    level = np.mean(flat)
    assert level == pytest.approx(1.0, abs=0.05)
    assert np.max(np.abs(flat / level - 1.0)) < 5.0 / np.sqrt(100.0 * RATE / 1024.0)
    assert share[np.argmin(np.abs(f - BANDWIDTH))] == pytest.approx(0.25, rel=0.2)
    assert np.max(share[f > 1.13 * BANDWIDTH]) < 10.0**-5.5


def test_lines_between_points_droop_as_stated() -> None:
    """Lines multiply the spectrum by sinc²(f/rate): -0.09 dB at 0.9 B, -47 dB at 15 B.

    A whole burst, which begins and ends at zero, seen at its points and four times as densely.
    """
    drive = _drive(length=0.5)
    points = np.fft.rfft(drive.points(0, int(0.5 * RATE)))
    fine = np.fft.rfft(drive.values(np.arange(4 * 0.5 * RATE) / (4.0 * RATE))) / 4.0
    factor = {share: fine[int(share * BANDWIDTH * 0.5)] for share in (0.9, 15.0, 15.4)}
    for share, value in factor.items():
        base = int(share * BANDWIDTH * 0.5)
        mirror = base if share < 8.0 else int(RATE * 0.5) - base
        loss = 20.0 * np.log10(np.abs(value / points[mirror]))
        # The sum of four points in a cell stands for the integral: right to 2 % of the droop.
        assert loss == pytest.approx(40.0 * np.log10(np.sinc(share / POINTS_PER_CYCLE)), rel=0.07)


def test_same_seed_same_burst() -> None:
    """The burst depends on its key alone, and another key gives an independent one."""
    one, again = _points(_drive()), _points(_drive())
    np.testing.assert_array_equal(one, again)
    for key in ((8, 1), (7, 2), (7, 1, 0)):
        other = _points(_drive(key))
        independent = 2.0 * BANDWIDTH * 40.0
        assert abs(np.mean(one * other) / 0.09) < 4.0 / np.sqrt(independent)


def test_terms_of_a_sum_are_independent() -> None:
    """Equal bursts as terms of a sum, and of a sum in a sum, share no noise."""
    burst = {"kind": "noise-burst", "rms": 0.3, "bandwidth": BANDWIDTH, "length": 40.0}
    nested = {"kind": "sum", "term": [burst, burst]}
    stimulus = Sum.model_validate({"term": [burst, burst, nested]})
    rows = []
    for drive in (*stimulus.drives((7,)), _drive((7,))):
        assert isinstance(drive, UniformDrive)
        rows.append(_points(drive))
    correlation = np.corrcoef(rows) - np.eye(5)
    assert np.max(np.abs(correlation)) < 4.0 / np.sqrt(2.0 * BANDWIDTH * 40.0)


@given(cuts=st.lists(st.integers(-20, 5 * TILE), min_size=2, max_size=8))
@settings(max_examples=25, deadline=None)
def test_cuts_never_show(cuts: list[int]) -> None:
    """Any cut of the points gives the same bits, across the tiles they are made in too."""
    drive = _drive(length=4.2 * TILE / RATE)
    edges = sorted({-20, *cuts, 5 * TILE})
    whole = drive.points(-20, 5 * TILE)
    parts = [drive.points(a, b) for a, b in pairwise(edges)]
    np.testing.assert_array_equal(np.concatenate(parts), whole)


def test_the_burst_begins_and_ends_at_zero() -> None:
    """Nothing before ``at`` and after ``at + length``; the ends join on without a jump."""
    drive = _drive(at=0.5, length=0.25)
    times = np.array([0.0, 0.25, 0.5, 0.75, 0.7500001, 1.0, 50.0])
    np.testing.assert_array_equal(drive.values(times), 0.0)
    inside = drive.values(np.linspace(0.5, 0.75, 1000)[1:-1])
    assert np.all(inside != 0.0)
    assert drive.initial == 0.0


def test_rms_scales() -> None:
    """Doubled rms, doubled values, bit by bit; none at all is silence."""
    np.testing.assert_array_equal(_points(_drive(rms=0.6)), 2.0 * _points(_drive()))
    np.testing.assert_array_equal(_points(_drive(rms=0.0)), 0.0)
