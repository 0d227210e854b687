"""Values of a signal: any unit is read, and the signal's own is asked for later."""

from __future__ import annotations

import pickle

import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.errors import QuantityError
from frontend_sim.quantities import (
    SIGNALS,
    TEMPERATURE,
    TEMPERATURE_DIFFERENCE,
    Level,
    Sense,
    as_text,
    level_in,
    parse,
    parse_level,
    signal_dimension,
)


@pytest.mark.parametrize(
    ("text", "kelvin"),
    [
        ("25 degC", 298.15),
        ("25 °C", 298.15),
        ("-40 celsius", 233.15),
        ("77 degF", 298.15),
        ("32 °F", 273.15),
        ("300 K", 300.0),
        ("300 mK", 0.3),
        ("-273.15 degC", 0.0),
    ],
)
def test_temperatures_have_a_zero_of_their_own(text: str, kelvin: float) -> None:
    """Degrees are counted from their own zero, exactly: 0 degC is 273.15 K by definition."""
    assert parse(text, TEMPERATURE) == kelvin


@pytest.mark.parametrize(
    ("text", "kelvin"), [("10 K", 10.0), ("10 degC", 10.0), ("18 degF", 10.0), ("-5 mK", -0.005)]
)
def test_differences_of_temperatures_have_none(text: str, kelvin: float) -> None:
    """A swing of 10 degC is one of 10 K."""
    assert parse(text, TEMPERATURE_DIFFERENCE) == kelvin


@given(st.floats(0.0, 1e6))
def test_a_temperature_is_written_in_degrees_and_reads_back(kelvin: float) -> None:
    """Not a bit is lost on the way through degrees Celsius."""
    assert parse(as_text(kelvin, TEMPERATURE), TEMPERATURE) == kelvin


def test_temperatures_are_written_as_an_engineer_writes() -> None:
    """In degrees Celsius; a beta value is no temperature, and no kilokelvin."""
    assert as_text(298.15, TEMPERATURE) == "25 degC"
    assert as_text(298.15, TEMPERATURE, 3) == "25 degC"
    assert as_text(3950.0, TEMPERATURE_DIFFERENCE) == "3950 K"


@pytest.mark.parametrize(
    ("text", "sense", "unit", "value"),
    [
        ("3.3 V", "value", "V", 3.3),
        ("4 mA", "value", "A", 4e-3),
        ("25 degC", "value", "K", 298.15),
        ("25 degC", "difference", "K", 25.0),
        ("2 g", "value", "m/s^2", 19.6133),
        ("250 mg", "value", "m/s^2", 2.4516625),
        ("1 g_n", "value", "m/s^2", 9.80665),
        ("9.81 m/s²", "value", "m/s^2", 9.81),
        ("2.5 bar", "value", "Pa", 2.5e5),
        ("1 uW", "value", "W", 1e-6),
        ("500 N", "value", "N", 500.0),
        ("2 mm", "value", "m", 2e-3),
        ("50 %", "value", "", 0.5),
        ("0.5", "value", "", 0.5),
        ("2 V/ms", "slope", "V", 2e3),
        ("2 K/s", "slope", "K", 2.0),
        ("1 g/ms", "slope", "m/s^2", 9806.65),
        ("10 %/s", "slope", "", 0.1),
    ],
)
def test_a_level_may_be_in_the_unit_of_any_signal(
    text: str, sense: Sense, unit: str, value: float
) -> None:
    """It is read into SI, remembers what it was, and is that value of its own signal."""
    level = parse_level(text, sense)
    assert float(level) == pytest.approx(value, rel=1e-15)
    assert level.unit == unit
    assert level_in(level, unit, sense) == float(level)


def test_bare_numbers_are_si_of_any_signal() -> None:
    """1.0 is a volt to one stage and a pascal to another."""
    level = parse_level(1.0)
    assert level.unit is None
    assert all(level_in(level, unit, "value") == 1.0 for unit in SIGNALS)


@pytest.mark.parametrize(
    ("text", "unit", "message"),
    [
        ("1 A", "V", "'A' is a unit of current"),
        ("25 degC", "V", "'degC' is a unit of temperature"),
        ("1 V", "K", "expected a temperature"),
        ("0.5", "V", 'the unit is missing; write "0.5 V"'),
        ("-300 degC", "K", "absolute zero"),
    ],
)
def test_a_level_of_something_else_is_told(text: str, unit: str, message: str) -> None:
    """The message names what was given and what the signal is."""
    level = parse_level(text)
    with pytest.raises(QuantityError, match=message):
        level_in(level, unit, "value")


@pytest.mark.parametrize("value", ["1 s", "1 ohm", "fast", "", "1e400 V", True, None, [1]])
def test_what_is_no_signal_is_told_at_once(value: object) -> None:
    """Units that no signal has, and no numbers, need no chain to be refused."""
    with pytest.raises(QuantityError, match="given "):
        parse_level(value)


@given(
    st.floats(-1e6, 1e6).filter(lambda x: x == 0.0 or abs(x) > 1e-20),
    st.sampled_from(list(SIGNALS)),
)
def test_every_signal_is_written_and_read_back(value: float, unit: str) -> None:
    """Differences and slopes in the unit of every signal, to the last bit."""
    for sense in ("difference", "slope"):
        dimension = signal_dimension(unit, sense)
        assert parse(as_text(value, dimension), dimension) == value


def test_a_level_goes_to_another_process() -> None:
    """With what it was given as."""
    level = pickle.loads(pickle.dumps(parse_level("2 g")))
    assert isinstance(level, Level)
    assert (float(level), level.unit, level.given) == (19.6133, "m/s^2", "2 g")
