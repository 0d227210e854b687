"""Quantities are written as engineers write them, and lose nothing."""

from __future__ import annotations

import pytest
from dimensions import DIMENSIONS
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.quantities import (
    CAPACITANCE,
    LSB,
    RATIO,
    RESISTANCE,
    SLOPE,
    TIME,
    VOLTAGE,
    Dimension,
    as_text,
    parse,
)


@given(st.floats(-1e12, 1e12).filter(lambda x: x == 0 or abs(x) > 1e-20))
def test_a_float_written_with_its_unit_reads_back_the_same(value: float) -> None:
    """``as_text`` loses nothing, whatever prefix it picks."""
    assert parse(as_text(value, VOLTAGE), VOLTAGE) == value


@given(st.sampled_from(DIMENSIONS), st.floats(1e-9, 1e4))
def test_every_dimension_is_written_and_read_back(dimension: Dimension, value: float) -> None:
    """The round trip holds for every dimension."""
    assert parse(as_text(value, dimension), dimension) == value


@pytest.mark.parametrize(
    ("value", "dimension", "text"),
    [
        (4.7e-9, CAPACITANCE, "4.7 nF"),
        (0.0091, TIME, "9.1 ms"),
        (0.0, TIME, "0 s"),
        (-3.3, VOLTAGE, "-3.3 V"),
        (1e5, RESISTANCE, "100 kohm"),
        (2000.0, SLOPE, "2000 V/s"),
        (0.1, RATIO, "0.1"),
        (0.05, LSB, "0.05 LSB"),
        (1e-20, TIME, "0.00001 fs"),
    ],
)
def test_quantities_are_written_as_an_engineer_writes(
    value: float, dimension: Dimension, text: str
) -> None:
    """The exponent is a multiple of three, and digits are as few as they can be."""
    assert as_text(value, dimension) == text


def test_digits_may_be_cut() -> None:
    """For messages, significant digits can be limited."""
    assert as_text(1 / 3, TIME, 4) == "333.3 ms"
