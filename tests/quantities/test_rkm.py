"""Codes of IEC 60062, with a letter in place of the decimal point."""

from __future__ import annotations

from fractions import Fraction as Exact

import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.quantities import (
    CAPACITANCE,
    INDUCTANCE,
    RESISTANCE,
    Dimension,
    parse,
)


@pytest.mark.parametrize(
    ("code", "dimension", "value"),
    [
        ("R47", RESISTANCE, 0.47),
        ("4R7", RESISTANCE, 4.7),
        ("470R", RESISTANCE, 470.0),
        ("4K7", RESISTANCE, 4.7e3),
        ("4k7", RESISTANCE, 4.7e3),
        ("47K", RESISTANCE, 47e3),
        ("4M7", RESISTANCE, 4.7e6),
        ("1G", RESISTANCE, 1e9),
        ("1T0", RESISTANCE, 1e12),
        ("5L0", RESISTANCE, 5e-3),
        ("p10", CAPACITANCE, 0.1e-12),
        ("p332", CAPACITANCE, 0.332e-12),
        ("3p32", CAPACITANCE, 3.32e-12),
        ("33p", CAPACITANCE, 33e-12),
        ("3n32", CAPACITANCE, 3.32e-9),
        ("150n", CAPACITANCE, 150e-9),
        ("1µ5", CAPACITANCE, 1.5e-6),
        ("1u5", CAPACITANCE, 1.5e-6),
        ("10m", CAPACITANCE, 10e-3),
        ("10u", INDUCTANCE, 10e-6),
    ],
)
def test_code_of_iec_60062_is_read(code: str, dimension: Dimension, value: float) -> None:
    """The letter stands in place of the decimal point. IEC 60062, examples from memory."""
    assert parse(code, dimension) == value


@given(st.integers(0, 10**5), st.integers(0, 10**4), st.sampled_from("LRKMGT"))
def test_any_code_equals_its_decimal(whole: int, fraction: int, letter: str) -> None:
    """A code is the decimal number with the point at its letter, times the letter's power."""
    power = {"L": -3, "R": 0, "K": 3, "M": 6, "G": 9, "T": 12}[letter]
    expected = float(Exact(f"{whole}.{fraction}") * Exact(10) ** power)
    if expected != 0.0:
        assert parse(f"{whole}{letter}{fraction}", RESISTANCE) == expected
