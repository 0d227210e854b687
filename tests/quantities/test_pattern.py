"""The pattern that editors get, against the reader itself."""

from __future__ import annotations

import re

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.errors import QuantityError
from frontend_sim.quantities import dimension as dimensions
from frontend_sim.quantities.dimension import Dimension
from frontend_sim.quantities.pattern import pattern
from frontend_sim.quantities.reading import parse
from frontend_sim.quantities.units import SHARES, symbols

DIMENSIONS = sorted(
    {each for each in vars(dimensions).values() if isinstance(each, Dimension)},
    key=lambda each: (each.name, each.unit),
)
NUMBERS = st.one_of(
    st.floats(allow_nan=False, allow_infinity=False).map(repr),
    st.integers(-(10**6), 10**6).map(str),
    st.sampled_from(["1_000.5", ".5", "5.", "+3", "\u22122.5", "1e3", "2E-3", "1e+2", "0"]),
)
SINGLE = st.sampled_from(
    [*symbols(), *SHARES, "dB", "LSB", "bit", "µV", "μF", "kΩ", "\u2126", "µg"]
)
PRODUCTS = st.builds(
    lambda first, sign, second: f"{first}{sign}{second}",
    st.one_of(SINGLE, st.just("1")),
    st.sampled_from(["/", " / ", "*", "·", " ", "/sqrt(", "/√", "^2/", "**2 * "]),
    st.sampled_from(["s", "K", "Hz", "V", "g", "s^2", "s²", "(m/s^2)", "Hz)", "min", "rtHz", "W"]),
)
CODES = st.from_regex(r"-?[0-9]{0,3}[A-Za-zµμ][0-9]{0,3}[A-Z]?", fullmatch=True)
OWN = st.sampled_from([each.unit for each in DIMENSIONS])
BLANKS = st.sampled_from(["", " ", "\t", "\u00a0", "  "])
TEXTS = st.one_of(
    st.builds(
        lambda before, number, blank, unit, after: before + number + blank + unit + after,
        BLANKS, NUMBERS, BLANKS, st.one_of(SINGLE, PRODUCTS, OWN), BLANKS,
    ),
    CODES,
    st.text(max_size=12),
)  # fmt: skip


@given(text=TEXTS)
@settings(max_examples=400, deadline=None)
def test_whatever_the_reader_takes_matches(text):
    """For every dimension: an editor marks nothing that would be read."""
    for dimension in DIMENSIONS:
        try:
            parse(text, dimension)
        except QuantityError:
            continue
        assert re.search(pattern(dimension), text), (text, dimension)


@pytest.mark.parametrize("dimension", DIMENSIONS, ids=lambda each: f"{each.name} {each.unit}")
def test_own_examples_match_and_are_read(dimension):
    """The examples that messages give are matched, and read."""
    for text in re.findall(r'"([^"]+)"', dimension.example):
        parse(text, dimension)
        assert re.search(pattern(dimension), text)


@pytest.mark.parametrize(
    ("dimension", "text"),
    [
        (dimensions.RESISTANCE, "10 kF"), (dimensions.RESISTANCE, "10"),
        (dimensions.RESISTANCE, "10 kOhmm"), (dimensions.CAPACITANCE, "4.7 nH"),
        (dimensions.CAPACITANCE, "4R7"), (dimensions.FREQUENCY, "20 ms"),
        (dimensions.TIME, "20 kHz"), (dimensions.VOLTAGE, "3,3 V"), (dimensions.VOLTAGE, "3.3"),
        (dimensions.VOLTAGE, "3.3 A"), (dimensions.TEMPERATURE, "25 C"),
        (dimensions.TEMPERATURE, "25 V"), (dimensions.FRACTION, "1 V"), (dimensions.ANGLE, "90 K"),
        (dimensions.PRESSURE, "2 N"), (dimensions.DRIFT, "50 ppm"), (dimensions.LSB, "0.5 V"),
        (dimensions.VOLTAGE, "high"), (dimensions.VOLTAGE, ""),
    ],
)  # fmt: skip
def test_a_wrong_unit_is_marked(dimension, text):
    """What the reader refuses most often, the pattern refuses as well."""
    with pytest.raises(QuantityError):
        parse(text, dimension)
    assert not re.search(pattern(dimension), text)


@pytest.mark.parametrize("text", ["50 ppm", "50 %"])
def test_a_drift_without_its_kelvin_is_told(text):
    """The message says what was most likely meant."""
    with pytest.raises(QuantityError, match=rf'per kelvin; write "{text}/K"'):
        parse(text, dimensions.DRIFT)
