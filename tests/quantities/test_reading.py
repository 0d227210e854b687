"""Text with units becomes floats in SI, exactly, or one clear error."""

from __future__ import annotations

import math
from decimal import Decimal
from fractions import Fraction as Exact

import numpy as np
import pytest
from dimensions import DIMENSIONS
from hypothesis import example, given
from hypothesis import strategies as st

from frontend_sim.errors import QuantityError
from frontend_sim.quantities import (
    ANGLE,
    CAPACITANCE,
    DECIBEL,
    FRACTION,
    FREQUENCY,
    INDUCTANCE,
    LSB,
    NOISE_DENSITY,
    RATIO,
    RESISTANCE,
    SLOPE,
    TIME,
    VOLTAGE,
    Dimension,
    parse,
    shown,
)


@pytest.mark.parametrize(
    ("text", "dimension", "value"),
    [
        ("10 kohm", RESISTANCE, 10e3),
        ("10kohm", RESISTANCE, 10e3),
        ("10 kΩ", RESISTANCE, 10e3),  # U+03A9, the Greek letter
        ("10 k\u2126", RESISTANCE, 10e3),  # U+2126, the sign
        ("10 kOhm", RESISTANCE, 10e3),
        ("10 ohms", RESISTANCE, 10.0),
        ("2 V/mA", RESISTANCE, 2e3),
        ("4.7 nF", CAPACITANCE, 4.7e-9),
        ("100nF", CAPACITANCE, 1e-7),  # not a code of IEC 60062 with the tolerance letter F
        ("5 µF", CAPACITANCE, 5e-6),  # U+00B5, the sign
        ("5 μF", CAPACITANCE, 5e-6),  # U+03BC, the Greek letter
        ("5 uF", CAPACITANCE, 5e-6),
        ("10 uH", INDUCTANCE, 10e-6),
        ("3.3 V", VOLTAGE, 3.3),
        ("  3.3\u00a0V ", VOLTAGE, 3.3),  # a space that does not break
        ("−5 mV", VOLTAGE, -5e-3),  # U+2212, the sign
        ("+5e-3 V", VOLTAGE, 5e-3),
        ("10_000 V", VOLTAGE, 1e4),
        (".5 V", VOLTAGE, 0.5),
        ("5. V", VOLTAGE, 5.0),
        ("9.1 ms", TIME, 0.0091),
        ("2 min", TIME, 120.0),
        ("1 h", TIME, 3600.0),
        ("1 day", TIME, 86400.0),
        ("20 msec", TIME, 0.02),
        ("20 kHz", FREQUENCY, 20e3),
        ("20 kilohertz", FREQUENCY, 20e3),
        ("360 deg/s", FREQUENCY, 1.0),
        ("2 turn/s", FREQUENCY, 2.0),
        ("2 V/ms", SLOPE, 2000.0),
        ("2 V*s^-1", SLOPE, 2.0),
        ("2 V·s⁻¹", SLOPE, 2.0),
        ("12 nV/sqrt(Hz)", NOISE_DENSITY, 12e-9),
        ("12 nV/√Hz", NOISE_DENSITY, 12e-9),
        ("12 nV/rtHz", NOISE_DENSITY, 12e-9),
        ("12 nV/Hz^0.5", NOISE_DENSITY, 12e-9),
        ("180 deg", ANGLE, math.pi),
        ("90°", ANGLE, math.pi / 2),
        ("0.5 turn", ANGLE, math.pi),
        ("3 mrad", ANGLE, 3e-3),
        ("0.1 %", RATIO, 1e-3),
        ("50 ppm", FRACTION, 50e-6),
        ("2 ‰", FRACTION, 2e-3),
        ("2 mV/V", RATIO, 2e-3),
        ("2", RATIO, 2.0),
        ("20 dB", RATIO, 10.0),
        ("-20 dB", RATIO, 0.1),
        ("0.5 dB", DECIBEL, 0.5),
        ("0.05 LSB", LSB, 0.05),
    ],
)
def test_text_with_a_unit_is_read(text: str, dimension: Dimension, value: float) -> None:
    """Every usual way to write a quantity gives the float nearest to its value in SI."""
    assert parse(text, dimension) == value


DECIMALS = st.decimals(-(10**9), 10**9, allow_nan=False, allow_infinity=False, places=12)


@given(DECIMALS, st.sampled_from([("m", -3), ("u", -6), ("n", -9), ("", 0), ("k", 3)]))
@example(Decimal("9.1"), ("m", -3))
@example(Decimal("0.3"), ("u", -6))
def test_decimals_are_exact(number: Decimal, prefix: tuple[str, int]) -> None:
    """The prefix moves the decimal point: ``9.1 ms`` is the float that Python reads from 9.1e-3."""
    letter, power = prefix
    text = f"{number:f}"
    assert parse(f"{text} {letter}V", VOLTAGE) == float(f"{text}e{power}")


@given(st.integers(1, 10**25), st.integers(-40, -14), st.sampled_from(["V", "mV", "V*min/s"]))
def test_more_digits_than_a_float_has_are_rounded_once(digits: int, power: int, unit: str) -> None:
    """However many digits are given, the result is the float nearest to the exact value."""
    size = {"V": Exact(1), "mV": Exact(1, 1000), "V*min/s": Exact(60)}[unit]
    value = digits * Exact(10) ** power * size
    if Exact(1, 10**24) < value <= 10**12:
        assert parse(f"{digits}e{power} {unit}", VOLTAGE) == float(value)


def test_angular_frequency_is_divided_by_two_pi() -> None:
    """1 krad/s is 1000 / (2 pi) Hz, to the last place."""
    assert parse("1 krad/s", FREQUENCY) == pytest.approx(1000 / (2 * math.pi), rel=2.3e-16, abs=0)
    assert parse("1 rad/ms", FREQUENCY) == parse("1 krad/s", FREQUENCY)


@pytest.mark.parametrize(
    "value", [3, 3.0, np.float64(3), np.float32(3), np.int32(3), Exact(3), Decimal(3)]
)
def test_bare_numbers_are_si(value: object) -> None:
    """A number of any type is taken in the SI unit."""
    assert parse(value, VOLTAGE) == 3.0


WRONG = [
    # text, dimension, what the message must say
    ("4,7 nF", CAPACITANCE, ["decimal point as '.'", '"4.7 nF"']),
    ("10,000 Hz", FREQUENCY, ["comma", "10000", "10.000"]),
    ("10 000 Hz", FREQUENCY, ["without gaps", "'_'"]),
    ("10'000 Hz", FREQUENCY, ["without gaps"]),
    ("1.000.000 Hz", FREQUENCY, ["without gaps"]),
    ("10 KHz", FREQUENCY, ["'KHz' is not a known unit", "'kHz' (kilo)"]),
    ("10 khz", FREQUENCY, ["'kHz' (kilo)"]),
    ("10 MHZ", FREQUENCY, ["'MHz' (mega)", "'mHz' (milli)"]),
    ("10 mhz", FREQUENCY, ["'mHz' (milli)", "'MHz' (mega)"]),
    ("10 KOhm", RESISTANCE, ["'kohm' (kilo)"]),
    ("10 K", RESISTANCE, ["temperature", "'kohm' (kilo)"]),
    ("10 k", RESISTANCE, ["'kohm' (kilo)"]),
    ("2 M", RESISTANCE, ["'Mohm' (mega)"]),
    ("2 m", RESISTANCE, ["length", "'mohm' (milli)"]),
    ("2 m", TIME, ["length", "'ms'", "'min'"]),
    ("2 MS", TIME, ["conductance", "'ms' (milli)"]),
    ("4.7 nF", RESISTANCE, ["'nF' is a unit of capacitance", "10 kohm"]),
    ("20", FREQUENCY, ["unit is missing", '"20 Hz"', "without quotes"]),
    ("kHz", FREQUENCY, ["number is missing"]),
    ("", FREQUENCY, ["empty"]),
    ("   ", FREQUENCY, ["empty"]),
    ("fast", FREQUENCY, ["number is missing"]),
    ("5 fast", FREQUENCY, ["'fast' is not a known unit"]),
    ("nan V", VOLTAGE, ["not a finite number"]),
    ("inf V", VOLTAGE, ["not a finite number"]),
    ("-Infinity V", VOLTAGE, ["not a finite number"]),
    ("1e400 V", VOLTAGE, ["not a finite number"]),
    ("1e99999999999999999999 V", VOLTAGE, ["not a finite number"]),
    ("1e300 V", VOLTAGE, ["beyond the largest voltage", "1e+12 V"]),
    ("1e-300 V", VOLTAGE, ["below the smallest voltage"]),
    ("4.7 MF", CAPACITANCE, ["beyond the largest capacitance"]),
    ("1/2 s", TIME, ["nothing is worked out"]),
    ("2*3 s", TIME, ["nothing is worked out"]),
    ("9**9**9**9**9 s", TIME, ["nothing is worked out"]),
    ("5 s**9**9", TIME, ["not a known unit"]),
    ("5 (s", TIME, ["cannot be read"]),
    ("5 1/s", FREQUENCY, ["ambiguous", "rad/s"]),
    ("100 kSPS", FREQUENCY, ["samples per second in Hz"]),
    ("100 kS/s", FREQUENCY, ["samples per second in Hz"]),
    ("4k7V", RESISTANCE, ["'V' is no letter for a tolerance", "J, K"]),
    ("4r7", RESISTANCE, ['"4R7"']),
    ("4P7", CAPACITANCE, ['"4p7"']),
    ("5 mV", LSB, ["'mV' is not LSB"]),
    ("5 V", DECIBEL, ["'V' is not dB"]),
    ("1e5 dB", RATIO, ["beyond any ratio"]),
    ("5 V", RATIO, ["voltage"]),
    ("0 V" + " " * 200, RATIO, ["voltage"]),
    ("5 " + "s*" * 100 + "s", TIME, ["too long"]),
    ("٣ V", VOLTAGE, ["not a number with a unit"]),  # an Arabic digit
    (10**400, VOLTAGE, ["not a finite number"]),
    (float("nan"), VOLTAGE, ["not a finite number"]),
    (float("inf"), VOLTAGE, ["not a finite number"]),
    (True, VOLTAGE, ["given true"]),
    (None, VOLTAGE, ["given None"]),
    ([1], VOLTAGE, ["given [1]"]),
    ({}, VOLTAGE, ["given a table"]),
]


@pytest.mark.parametrize(("value", "dimension", "parts"), WRONG, ids=lambda v: str(v)[:30])
def test_what_cannot_be_read_is_told(value: object, dimension: Dimension, parts: list[str]) -> None:
    """A message says what was given, why it cannot be read, and what was expected."""
    with pytest.raises(QuantityError) as caught:
        parse(value, dimension)
    message = str(caught.value)
    for part in [*parts, "given ", f"xpected {dimension.noun}, for instance"]:
        assert part in message
    assert len(message) < 400


@given(
    st.one_of(
        st.text(max_size=40),
        st.from_regex(r"[+-]?[0-9.,_ ]{1,8}(e[0-9]{1,6})? ?[A-Za-z*/^()0-9µΩ%° ]{0,14}"),
        st.floats(),
        st.integers(),
        st.none(),
        st.booleans(),
        st.binary(max_size=4),
    ),
    st.sampled_from(DIMENSIONS),
)
def test_junk_gives_a_number_or_our_own_error(value: object, dimension: Dimension) -> None:
    """Nothing but a finite float or a QuantityError comes out, whatever goes in."""
    try:
        number = parse(value, dimension)
    except QuantityError:
        return
    assert math.isfinite(number)


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (True, "true"),
        ('a "b"\n', '"a \\"b\\"\\n"'),
        ("x" * 100, '"' + "x" * 57 + '..."'),
        ([1, "a"], '[1, "a"]'),
        (list(range(9)), "an array of 9 items"),
        ({"a": 1}, "a table"),
        (10**30, "a number of more than 20 digits"),
    ],
)
def test_values_are_shown_as_a_file_has_them(value: object, text: str) -> None:
    """Messages show values in the notation of the file, on one line, and short."""
    assert shown(value) == text
