"""The unit in which a reader is told of a signal: the one that a file has for it."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.quantities import SIGNALS, SignalUnit, parse


@pytest.mark.parametrize(
    ("si", "written", "name", "size", "zero"),
    [
        ("V", "3.3 mV", "V", 1.0, 0.0),
        ("m/s^2", "-2 g", "g", 9.80665, 0.0),
        ("m/s^2", "500 mg", "mg", 9.80665e-3, 0.0),
        ("m/s^2", "2e1 g_n", "g", 9.80665, 0.0),
        ("m/s^2", "9.81 m/s^2", "m/s^2", 1.0, 0.0),
        ("m/s^2", "9.81 m/s²", "m/s^2", 1.0, 0.0),
        ("Pa", "500 mbar", "bar", 1e5, 0.0),
        ("Pa", "2 kPa", "Pa", 1.0, 0.0),
        ("Pa", "2 g", "Pa", 1.0, 0.0),
        ("", "50 %", "%", 0.01, 0.0),
        ("", "0.5", "", 1.0, 0.0),
        ("K", "", "degC", 1.0, 273.15),
        ("K", "25 °C", "degC", 1.0, 273.15),
        ("K", "300 K", "K", 1.0, 0.0),
        ("K", "77 degF", "degF", 5.0 / 9.0, 459.67 * 5.0 / 9.0),
    ],
)
def test_the_written_unit_is_taken_without_its_prefix(
    si: str, written: str, name: str, size: float, zero: float
) -> None:
    """Standard gravity, the bar and the zeros of temperatures are those of their definitions."""
    unit = SignalUnit.of(si, written)
    assert (unit.name, unit.si) == (name, si)
    assert (unit.size, unit.zero) == pytest.approx((size, zero), rel=1e-14)


@given(
    st.sampled_from([("m/s^2", "g"), ("Pa", "bar"), ("K", "degC"), ("K", "degF"), ("", "%")]),
    st.floats(1.0, 1e4),
)
def test_a_number_reads_back_as_the_value(pair: tuple[str, str], value: float) -> None:
    """What a reader is told, written into a file, is the value again."""
    si, written = pair
    unit = SignalUnit.of(si, f"1 {written}")
    told = f"{unit.number(value)!r} {unit.name}"
    assert parse(told, SIGNALS[si]) == pytest.approx(value, rel=1e-12)


def test_differences_of_temperatures_do_not_count_from_a_zero() -> None:
    """25 degC is 25 above its zero, and 25 K more than 0 degC; in degF both are degF."""
    celsius, fahrenheit = SignalUnit.of("K", "25 degC"), SignalUnit.of("K", "77 degF")
    assert celsius.number(298.15) == pytest.approx(25.0)
    assert (celsius.number_of_difference(25.0), celsius.difference) == (25.0, "K")
    assert fahrenheit.number(298.15) == pytest.approx(77.0)
    assert fahrenheit.number_of_difference(25.0) == pytest.approx(45.0)
    assert fahrenheit.difference == "degF"
