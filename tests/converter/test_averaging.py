"""Averaging in the converter: sums, shifts, rounding, instants, and what is refused."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from digitizing import constant, digitized
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.converter import Adc
from frontend_sim.converter.quantizer import read_back
from frontend_sim.errors import ScenarioError


def adc(averaging: dict[str, Any] | None, **values: Any) -> Adc:
    """Return a converter of 1 kHz and 12 bits, 0 to 4.096 V, LSB 1 mV."""
    given: dict[str, Any] = {"rate": 1e3, "bits": 12, "high": 4.096, **values}
    return Adc(**given, averaging=averaging)


@given(
    bits=st.integers(4, 16),
    count=st.integers(2, 40),
    shift=st.integers(0, 4),
    rounding=st.sampled_from(["down", "nearest"]),
    code=st.sampled_from(["straight-binary", "offset-binary", "twos-complement"]),
    seed=st.integers(0, 2**32),
)
@settings(max_examples=80, deadline=None)
def test_results_are_sums_shifted_in_whole_numbers(
    bits: int, count: int, shift: int, rounding: Any, code: Any, seed: int
) -> None:
    """Against Python's own integers, for every format; the same signal without averaging is known.

    A shift of a negative sum rounds down, as hardware does it.
    """
    keys: dict[str, Any] = {
        "bits": bits, "low": -1.0, "high": 1.0, "code": code, "input_noise": 0.3,
    }  # fmt: skip
    averaged = adc({"count": count, "shift": shift, "rounding": rounding}, **keys)
    plain = adc(None, **{**keys, "rate": count * 1e3})
    made = digitized(averaged, constant(0.1), 30, seed=seed)
    single = digitized(plain, constant(0.1), 30 * count, seed=seed)
    half = (1 << shift) // 2 if rounding == "nearest" else 0
    for k in range(30):
        group = slice(k * count, (k + 1) * count)
        total = sum(int(value) for value in single.codes[group])
        assert made.codes[k] == (total + half) // (1 << shift)
        assert made.overrange[k] == any(single.overrange[group])
        assert made.time[k] == pytest.approx(single.time[group][-1], rel=1e-14)
    assert np.all(made.codes >= averaged.lowest_code)
    assert np.all(made.codes <= averaged.highest_code)


@pytest.mark.parametrize("code", ["straight-binary", "offset-binary", "twos-complement"])
@pytest.mark.parametrize(("count", "shift"), [(16, 2), (16, 4), (10, 0), (256, 6), (3, 1)])
def test_results_read_back_as_voltages(code: Any, count: int, shift: int) -> None:
    """Of constants in the middle of a code, results err by less than one of their own codes."""
    made = adc({"count": count, "shift": shift}, low=-2.048, high=2.048, code=code)
    assert made.lsb == pytest.approx(1e-3 * 2.0**shift / count, rel=1e-12)
    assert made.full_scale_codes == pytest.approx(4096.0 * count / 2.0**shift, rel=1e-12)
    for step in (-2048, -1, 0, 1, 700, 2047):
        found = digitized(made, constant(1e-3 * step), 2)
        assert np.all(np.abs(found.voltage - 1e-3 * step) <= made.lsb * (1.0 + 1e-9))
        np.testing.assert_array_equal(read_back(made, found.codes), found.voltage)


def test_extra_bits_need_noise() -> None:
    """16 conversions and a shift of 2: two more bits, which tell a third of an LSB only with noise.

    Rounding sums of four steps to the nearest, halves upwards, adds an eighth of a result's code.
    """
    averaging, third = {"count": 16, "shift": 2, "rounding": "nearest"}, 1.0 + 1e-3 / 3.0
    quiet = digitized(adc(averaging), constant(third), 5)
    assert np.all(quiet.voltage == pytest.approx(1.0, abs=1e-12))
    noisy = digitized(adc(averaging, input_noise=1e-3), constant(third), 4000)
    assert np.mean(noisy.voltage) == pytest.approx(third + 0.25e-3 / 8.0, abs=0.02e-3)
    assert np.std(noisy.voltage) == pytest.approx(1e-3 / 4.0 * np.sqrt(1.0 + 1.0 / 12.0), rel=0.1)


def test_rounding_down_loses_half_an_lsb_on_average() -> None:
    """Noisy sums lose (1 - 2^-m)/2 of a code by the shift; rounding to the nearest loses 2^-m/2."""
    losses = {}
    for rounding in ("down", "nearest"):
        made = adc({"count": 16, "shift": 4, "rounding": rounding}, input_noise=10e-3)
        found = digitized(made, constant(2.0), 60_000)
        losses[rounding] = np.mean(found.voltage - 2.0) / 1e-3
    error = 4.5 * 2.55 / np.sqrt(60_000)
    assert losses["down"] == pytest.approx(-0.5 * (1.0 - 1.0 / 16.0), abs=error)
    assert losses["nearest"] == pytest.approx(0.5 / 16.0, abs=error)


def test_instants_of_a_burst_and_of_an_even_row() -> None:
    """4 conversions 2 us apart, or evenly through the period; the time is that of the last one."""
    burst = adc({"count": 4, "interval": "2 us"}, first="1 ms", aperture_delay="1 us")
    looks = burst.digitizer(0).instants(0, 9)
    expected = 1.001e-3 + np.array([0, 2, 4, 6, 1000, 1002, 1004, 1006, 2000]) * 1e-6
    np.testing.assert_allclose(looks, expected, rtol=1e-13)
    made = digitized(burst, lambda times: 1e3 * times, 2)
    np.testing.assert_allclose(made.time, [1.007e-3, 2.007e-3], rtol=1e-13)
    np.testing.assert_allclose(made.pin, 1e3 * made.time, rtol=1e-15)
    even = adc({"count": 4})
    np.testing.assert_allclose(even.digitizer(0).instants(0, 5), np.arange(5) * 0.25e-3, rtol=1e-15)
    assert (burst.digitizer(0).interval, even.digitizer(0).interval) == (2e-6, 0.25e-3)
    assert burst.digitizer(0).longest >= np.max(np.diff(looks))


def test_averaging_takes_dither_off_by_its_mean() -> None:
    """Subtractive dither of 1 LSB, 8 conversions in full: an error of LSB/sqrt(12 · 8)."""
    made = adc({"count": 8}, dither={"shape": "uniform", "width": 1.0, "subtractive": True})
    error = digitized(made, constant(1.0 + 0.37e-3), 20_000).voltage - (1.0 + 0.37e-3)
    assert np.std(error) == pytest.approx(1e-3 / np.sqrt(96.0), rel=0.03)
    assert abs(np.mean(error)) < 4.5 * 1e-3 / np.sqrt(96.0 * 20_000)


def test_both_ends_of_the_widest_result() -> None:
    """65 536 codes of 16 bits fill 32 bits; all ones and all zeros come out whole."""
    made = adc({"count": 65536}, bits=16)
    assert (made.lowest_code, made.highest_code) == (0, 65536 * 65535)
    assert digitized(made, constant(9.0), 1).codes[0] == made.highest_code
    assert digitized(made, constant(-9.0), 1).codes[0] == 0


@pytest.mark.parametrize(
    ("averaging", "values", "message"),
    [
        ({"count": 1}, {}, "greater than or equal to 2"),
        ({"count": 70_000}, {}, "less than or equal to 65536"),
        ({"count": 4.5}, {}, "valid integer"),
        ({"count": 4, "shift": -1}, {}, "greater than or equal to 0"),
        ({"count": 4, "shift": 17}, {}, "less than or equal to 16"),
        ({"count": 4, "rounding": "up"}, {}, "'down' or 'nearest'"),
        ({"count": 4, "interval": "0 s"}, {}, "above 0"),
        ({"count": 4, "interval": "0.3 ms"}, {}, r"interval 0.0003 s is too long: 4 .* 0.00025 s"),
        ({"count": 2, "shift": 1}, {"bits": 32}, None),
        ({"count": 2}, {"bits": 32}, "2 codes of 32 bits needs 33 bits"),
        ({"count": 2, "shift": 16}, {"bits": 4}, "averaging.shift of 16 leaves no bit"),
    ],
)
def test_impossible_averaging_is_refused(
    averaging: dict[str, Any], values: dict[str, Any], message: str | None
) -> None:
    """Each with a message of its own."""
    if message is None:
        adc(averaging, **values)
        return
    with pytest.raises(ScenarioError, match=message):
        adc(averaging, **values)
