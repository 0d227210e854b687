"""The converter's parameters: ranges, code formats, and what is refused."""

from __future__ import annotations

from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.converter.adc import Adc
from frontend_sim.converter.base import MOST_JITTER
from frontend_sim.errors import ScenarioError


def adc(**values: Any) -> Adc:
    """Return a converter of 1 kHz and 12 bits, 0 to 4.096 V, but for the given values."""
    return Adc(**{"rate": 1e3, "bits": 12, "high": 4.096, **values})


@pytest.mark.parametrize(
    ("values", "lowest", "highest", "name"),
    [
        ({}, 0, 4095, "straight-binary"),
        ({"low": -4.096}, 0, 4095, "offset-binary"),
        ({"low": -4.096, "high": 0.0}, 0, 4095, "straight-binary"),
        ({"low": 1.0, "high": 3.0, "bits": 4}, 0, 15, "straight-binary"),
        ({"low": -1.0, "code": "straight-binary"}, 0, 4095, "straight-binary"),
        ({"low": -1.0, "code": "twos-complement", "bits": 4}, -8, 7, "twos-complement"),
        ({"code": "twos-complement", "bits": 16}, -32768, 32767, "twos-complement"),
        ({"low": -5.0, "high": 5.0, "code": "twos-complement", "bits": 32},
         -2147483648, 2147483647, "twos-complement"),
        ({"bits": 32}, 0, 4294967295, "straight-binary"),
    ],
)  # fmt: skip
def test_codes_are_counted_as_the_format_says(
    values: dict[str, Any], lowest: int, highest: int, name: str
) -> None:
    """The default follows the range; the number of codes is always 2^bits."""
    made = adc(**values)
    assert made.code_format == name
    assert (made.lowest_code, made.highest_code) == (lowest, highest)


@given(bits=st.integers(4, 32), low=st.floats(-10.0, 10.0).map(lambda v: round(v, 6)))
def test_the_codes_share_the_range_evenly(bits: int, low: float) -> None:
    """2^bits LSB make up the range."""
    made = adc(bits=bits, low=low, high=low + 3.0)
    assert made.lsb * 2.0**bits == pytest.approx(3.0, rel=1e-13)


@pytest.mark.parametrize(
    ("values", "message"),
    [
        ({"bits": 0}, "greater than or equal to 4"),
        ({"bits": 3}, "greater than or equal to 4"),
        ({"bits": 33}, "less than or equal to 32"),
        ({"bits": 12.5}, "valid integer"),
        ({"bits": "12"}, "valid integer"),
        ({"rate": 0}, "above 0"),
        ({"rate": "20 kV"}, "frequency"),
        ({"low": 5.0}, "reversed or empty"),
        ({"low": 4.096}, "reversed or empty"),
        ({"code": "offset-binary"}, "range with zero inside"),
        ({"code": "gray"}, "straight-binary"),
        ({"rounding": "up"}, "nearest"),
        ({"first": -1.0}, "at least 0"),
        ({"aperture_delay": "-1 ns"}, "at least 0"),
        ({"aperture_jitter": 0.051e-3}, "at most 5% of the conversion period"),
        ({"gain_error": -1.0}, "above -100 %"),
        ({"input_noise": -1e-6}, "at least 0"),
        ({"low": 1e6, "high": 1e6 + 1e-3, "bits": 32}, "lost in the rounding"),
        ({"bit": 12}, "unknown here"),
    ],
)
def test_impossible_converters_are_refused(values: dict[str, Any], message: str) -> None:
    """Each with a message of its own."""
    with pytest.raises(ScenarioError, match=message):
        adc(**values)


def test_limits_themselves_are_possible() -> None:
    """4 and 32 bits, the largest jitter, a gain error just above -100 %."""
    for bits in (4, 32):
        assert adc(bits=bits).bits == bits
    assert adc(aperture_jitter=MOST_JITTER / 1e3).aperture_jitter == 5e-5
    assert adc(gain_error="-99.9 %").gain_error == pytest.approx(-0.999)
