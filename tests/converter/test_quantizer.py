"""What the converter makes of a voltage: edges, clipping, errors, noise, and the way back."""

from __future__ import annotations

from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.converter.adc import Adc
from frontend_sim.converter.quantizer import converted_voltage, quantize, read_back


def _adc(**values: Any) -> Adc:
    return Adc(**{"rate": 1e3, "bits": 12, "high": 4.0, **values})


def _codes(adc: Adc, *voltages: float) -> list[int]:
    return [int(code) for code in quantize(adc, np.array(voltages))[0]]


def _flags(adc: Adc, *voltages: float) -> list[bool]:
    return [bool(flag) for flag in quantize(adc, np.array(voltages))[1]]


@pytest.mark.parametrize("bits", [4, 8, 12, 24, 32])
def test_edges_lie_half_an_lsb_beside_the_code(bits: int) -> None:
    """Rounding to the nearest code: at the edge itself the upper one, one rounding below the lower.

    The range is a power of two, so every edge is a float.
    """
    adc = _adc(bits=bits)
    lsb = 4.0 / 2**bits
    for code in (0, 1, 2, 7, 2 ** (bits - 1) - 1, 2**bits - 2):
        edge = (code + 0.5) * lsb
        assert _codes(adc, edge, np.nextafter(edge, 0.0), edge - 0.25 * lsb) == [
            code + 1, code, code
        ]  # fmt: skip


@pytest.mark.parametrize("bits", [4, 12, 32])
def test_rounding_down_has_its_edges_at_the_codes(bits: int) -> None:
    """At code · LSB the code itself, one rounding below it the one before."""
    adc = _adc(bits=bits, rounding="down")
    lsb = 4.0 / 2**bits
    for code in (1, 2, 9, 2**bits - 1):
        edge = code * lsb
        assert _codes(adc, edge, np.nextafter(edge, 0.0), edge + 0.999 * lsb) == [
            code, code - 1, code
        ]  # fmt: skip


@pytest.mark.parametrize(
    ("code", "expected"),
    [
        ("straight-binary", [0, 1, 8, 15]),
        ("offset-binary", [0, 1, 8, 15]),
        ("twos-complement", [-8, -7, 0, 7]),
    ],
)
def test_formats_of_a_bipolar_converter(code: str, expected: list[int]) -> None:
    """4 bits over -2 to 2 V: the lowest code, the next, zero volts, the highest."""
    adc = _adc(bits=4, low=-2.0, high=2.0, code=code)
    assert _codes(adc, -2.0, -1.75, 0.0, 1.75) == expected
    np.testing.assert_array_equal(read_back(adc, np.array(expected)), [-2.0, -1.75, 0.0, 1.75])


@pytest.mark.parametrize("rounding", ["nearest", "down"])
def test_clipping_is_flagged_where_it_changes_the_code(rounding: str) -> None:
    """The flag begins half an LSB outside the outer codes, or, rounding down, at the range."""
    adc = _adc(bits=4, rounding=rounding)
    lsb = 0.25
    below, above = (-0.5 * lsb, 4.0 - 0.5 * lsb) if rounding == "nearest" else (0.0, 4.0)
    inside = (below, np.nextafter(above, 0.0), 1.0)
    outside = (float(np.nextafter(below, -1.0)) - 1e-16, above, 100.0, -100.0)
    assert _flags(adc, *inside) == [False] * 3
    assert _flags(adc, *outside) == [True] * 4
    assert _codes(adc, *outside) == [0, 15, 15, 0]


def test_extreme_voltages_clip_without_a_warning() -> None:
    """1e12 V at 32 bits is a clipped code, not an overflow."""
    adc = _adc(bits=32, low=-4.0, code="twos-complement")
    assert _codes(adc, 1e12, -1e12) == [2**31 - 1, -(2**31)]
    assert _flags(adc, 1e12, -1e12) == [True, True]


@given(
    bits=st.integers(4, 32),
    low=st.floats(-20.0, 20.0).map(lambda v: round(v, 6)),
    span=st.floats(1e-3, 40.0),
    code=st.sampled_from([None, "straight-binary", "twos-complement"]),
    share=st.floats(0.0, 1.0),
    rounding=st.sampled_from(["nearest", "down"]),
)
@settings(max_examples=300)
def test_codes_survive_the_way_back(
    bits: int, low: float, span: float, code: Any, share: float, rounding: Any
) -> None:
    """The voltage that firmware reads from a code gives that code again, at every format.

    Rounding down, a code's voltage is its own edge; a quarter of an LSB above it the code is sure.
    """
    adc = _adc(bits=bits, low=low, high=low + span, code=code, rounding=rounding)
    middle = adc.lowest_code + int(share * (2**bits - 1))
    codes = np.unique([adc.lowest_code, adc.highest_code, middle, adc.lowest_code + 1])
    inside = 0.25 * adc.lsb if rounding == "down" else 0.0
    again, overrange = quantize(adc, read_back(adc, codes) + inside)
    np.testing.assert_array_equal(again, codes)
    assert not np.any(overrange)


@given(bits=st.integers(4, 16), data=st.lists(st.floats(-9.0, 9.0), min_size=2, max_size=30))
def test_codes_never_fall_while_the_voltage_rises(bits: int, data: list[float]) -> None:
    """The converter is monotonic, clipping included, and errs by half an LSB inside the range."""
    adc = _adc(bits=bits, low=-4.0)
    voltages = np.sort(np.array(data))
    codes, overrange = quantize(adc, voltages)
    assert np.all(np.diff(codes) >= 0)
    error = np.abs(read_back(adc, codes) - voltages)[~overrange]
    assert np.all(error <= 0.5 * adc.lsb * (1.0 + 1e-9))


def test_offset_and_gain_errors_add_to_the_input() -> None:
    """(1 + gain error) · pin + offset, the gain error turning about zero volts."""
    adc = _adc(low=-4.0, offset="2 mV", gain_error="0.5 %")
    seen = converted_voltage(adc, np.array([-1.0, 0.0, 2.0]), 0, 1)
    np.testing.assert_allclose(seen, [-1.003, 0.002, 2.012], rtol=1e-14)
    plain = np.array([0.1, 0.2])
    np.testing.assert_array_equal(converted_voltage(_adc(), plain, 0, 1), plain)


def test_input_noise_has_its_rms_and_no_colour() -> None:
    """Mean, rms and the correlation of neighbours within 4 standard errors over 2e5 conversions."""
    count = 200_000
    noise = converted_voltage(_adc(input_noise=1e-3), np.zeros(count), 0, 4)
    assert np.std(noise) == pytest.approx(1e-3, rel=4.0 / np.sqrt(2.0 * count))
    assert abs(np.mean(noise)) < 4.0 * 1e-3 / np.sqrt(count)
    assert abs(np.mean(noise[1:] * noise[:-1])) < 4.0 * 1e-6 / np.sqrt(count)


@given(cuts=st.lists(st.integers(0, 40_000), max_size=6), seed=st.integers(0, 2**63 - 1))
@settings(max_examples=25, deadline=None)
def test_noise_does_not_depend_on_blocks(cuts: list[int], seed: int) -> None:
    """The noise of conversion k depends on the seed and k alone."""
    adc = _adc(input_noise=1e-3)
    pin = np.linspace(0.0, 4.0, 40_000)
    edges = sorted({0, *cuts, 40_000})
    parts = [converted_voltage(adc, pin[a:b], a, seed) for a, b in pairwise(edges)]
    np.testing.assert_array_equal(np.concatenate(parts), converted_voltage(adc, pin, 0, seed))


def test_noise_and_jitter_share_nothing() -> None:
    """The two streams of one seed are independent."""
    from frontend_sim.converter.clock import nominal_instants, sampling_instants

    count = 100_000
    adc = _adc(input_noise=1.0, aperture_jitter=1e-6)
    noise = converted_voltage(adc, np.zeros(count), 0, 4)
    jitter = sampling_instants(adc, 0, count, 4) - nominal_instants(adc, 0, count)
    assert abs(np.corrcoef(noise, jitter)[0, 1]) < 4.0 / np.sqrt(count)
