"""Numbers as engineers write them."""

from __future__ import annotations

import math
from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.present.numbers import (
    difference,
    engineering,
    fixed,
    level,
    per_unit,
    plain,
    prefix_of,
    quantity,
)
from frontend_sim.quantities import FREQUENCY, SignalUnit, parse


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (4700.0, "Hz", "4.70 kHz"),
        (1.23e-5, "s", "12.3 us"),
        (0.0, "V", "0 V"),
        (-0.0, "V", "0 V"),
        (-3.3, "V", "-3.30 V"),
        (999.4, "Hz", "999 Hz"),
        (999.6, "Hz", "1.00 kHz"),
        (1e-3, "V", "1.00 mV"),
        (9.995e-4, "V", "1.00 mV"),
        (1e6, "ohm", "1.00 Mohm"),
        (8.056640625e-4, "V", "806 uV"),
        (1e-15, "F", "1.00 fF"),
        (1e-17, "F", "0.0100 fF"),
        (3e-21, "F", "3.00e-6 fF"),
        (5e12, "Hz", "5.00 THz"),
        (5e16, "Hz", "50000 THz"),
        (5e20, "Hz", "5.00e+8 THz"),
        (math.inf, "Hz", "infinite"),
        (-math.inf, "V", "-infinite"),
        (math.nan, "V", "nan"),
    ],
)
def test_engineering(value, unit, text):
    """Three digits, a prefix of the SI; rounding up carries into the next prefix."""
    assert engineering(value, unit) == text


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (2.665, "2.66 V"),
        (2.675, "2.68 V"),
        (0.125, "125 mV"),
        (1.0005, "1.00 V"),
        (1.125, "1.12 V"),
    ],
)
def test_halves_go_to_the_even_digit(value, text):
    """The decision is made on the decimal text that a reader sees, halves to even."""
    assert engineering(value, "V") == text


@pytest.mark.parametrize(
    ("value", "decimals", "unit", "text"),
    [
        (10.8301, 2, "%", "10.83 %"),
        (-3.0103, 2, "dB", "-3.01 dB"),
        (0.125, 2, "", "0.12"),
        (0.375, 2, "", "0.38"),
        (-0.001, 2, "%", "0.00 %"),
        (1e300, 0, "", "1" + 300 * "0"),
        (math.inf, 2, "dB", "infinite"),
    ],
)
def test_fixed(value, decimals, unit, text):
    """So many decimals, no sign where nothing is left."""
    assert fixed(value, decimals, unit) == text


@pytest.mark.parametrize(
    ("value", "text"),
    [(0.70710678, "0.7071"), (0.5, "0.5000"), (1e-6, "1.000e-6"), (21276.6, "21280"), (0.0, "0")],
)
def test_plain(value, text):
    """Four digits without a prefix."""
    assert plain(value) == text


finite = st.floats(1e-12, 1e13).flatmap(lambda size: st.sampled_from([size, -size]))


@given(value=finite, digits=st.integers(2, 9))
def test_engineering_reads_back(value, digits):
    """The scenario's own reader gets the value back, to half a unit of the last digit."""
    size = abs(value)
    back = parse(engineering(size, "Hz", digits), FREQUENCY)
    assert abs(back - size) <= 0.5000001 * 10.0 ** (math.floor(math.log10(size)) + 1 - digits)


@given(value=finite, digits=st.integers(2, 9))
def test_engineering_shows_the_digits_asked_for(value, digits):
    """From 1 to 999 before the point, and as many digits as asked for."""
    number = engineering(value, "V", digits).split()[0]
    assert Decimal(1) <= abs(Decimal(number)) < Decimal(1000) or digits < 3
    assert len(Decimal(number).as_tuple().digits) == digits or "e" in number or digits < 3


@given(value=st.floats(allow_nan=True, allow_infinity=True), digits=st.integers(1, 17))
def test_any_float_can_be_written(value, digits):
    """No float makes the formatting fail, in none of its forms."""
    for text in (engineering(value, "V", digits), plain(value, digits), fixed(value, digits)):
        assert text.strip() == text
        assert text


@given(value=st.floats(1e-14, 1e14))
def test_axis_prefix(value):
    """The axis shows its largest value as a number from 1 to 1000."""
    factor, letter = prefix_of(value)
    assert 0.999 <= value * factor <= 1000.0
    assert engineering(value, "V").split()[1] == f"{letter}V"


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (1e-6, "W", "1.00 uW"),
        (2.5e5, "Pa", "250 kPa"),
        (0.5, "", "0.500"),
        (19.6133, "m/s^2", "19.6 m/s^2"),
        (5.0, "K", "5.00 K"),
    ],
)
def test_quantities_have_the_unit_of_their_signal(value: float, unit: str, text: str) -> None:
    """Prefixes where a unit takes them; nobody writes millikelvins squared."""
    assert quantity(value, unit) == text


def test_levels_of_temperature_are_in_degrees() -> None:
    """Other levels are as differences are; gains are volts per unit."""
    assert level(298.15, SignalUnit.of("K"), 4) == "25.00 degC"
    assert difference(25.0, SignalUnit.of("K"), 4) == "25.00 K"
    assert level(2.0, SignalUnit.of("V")) == "2.00 V"
    assert level(5e4, SignalUnit.of("Pa", "1 bar")) == "500 mbar"
    assert difference(9.80665e-3, SignalUnit.of("m/s^2", "1 g")) == "0.00100 g"
    assert [per_unit(unit) for unit in ("V", "K", "m/s^2", "g", "")] == [
        "V/V", "V/K", "V/(m/s^2)", "V/g", "V",
    ]  # fmt: skip
