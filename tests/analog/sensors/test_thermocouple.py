"""Thermocouples against an independent package that holds the tables of NIST Monograph 175."""

from __future__ import annotations

from typing import Any, get_args

import numpy as np
import pytest

from frontend_sim.analog.sensors.thermocouple import Letter, limits, seebeck, thermovoltage
from frontend_sim.analog.sensors.thermocouple_tables import TABLES

theirs = pytest.importorskip("thermocouple_its90")

LETTERS: tuple[Letter, ...] = get_args(Letter)


def test_every_type_of_the_scale_is_there() -> None:
    """The eight letters of ITS-90, with the same ranges."""
    assert list(LETTERS) == list(TABLES) == theirs.letters()
    for letter in LETTERS:
        low, high = theirs.get(letter).range
        assert np.subtract(limits(letter), 273.15) == pytest.approx((low, high), abs=1e-9)


@pytest.mark.parametrize("letter", LETTERS)
def test_voltages_agree_at_every_degree(letter: Letter) -> None:
    """At each degree of the tables and between, to 1e-9 mV; the tables print 1e-3 mV.

    Where two ranges meet their functions differ by up to 1e-7 mV, and either may be taken.
    """
    other: Any = theirs.get(letter)
    low, high = other.range
    celsius = np.unique(np.concatenate([np.arange(low, high), np.linspace(low, high, 3001)]))
    meeting = [piece.low for piece in TABLES[letter][1:]]
    celsius = celsius[~np.isin(celsius, meeting)]
    expected = [other.emf(float(t)) for t in celsius]
    found = 1e3 * thermovoltage(letter, celsius + 273.15)
    np.testing.assert_allclose(found, expected, rtol=0, atol=1e-9)
    slopes = [other.seebeck(float(t)) for t in celsius]
    np.testing.assert_allclose(1e3 * seebeck(letter, celsius + 273.15), slopes, rtol=0, atol=1e-9)


# Printed rows of NIST Monograph 175 [degC, mV], from memory.
PRINTED: list[tuple[Letter, float, float]] = [
    ("K", 100.0, 4.096),
    ("K", 1000.0, 41.276),
    ("K", -200.0, -5.891),
    ("J", 100.0, 5.269),
    ("T", 100.0, 4.279),
    ("E", 100.0, 6.319),
    ("N", 100.0, 2.774),
    ("S", 1000.0, 9.587),
    ("R", 1000.0, 10.506),
    ("B", 1000.0, 4.834),
]


@pytest.mark.parametrize(("letter", "celsius", "millivolts"), PRINTED)
def test_printed_rows(letter: Letter, celsius: float, millivolts: float) -> None:
    """Within half of the last printed digit."""
    found = 1e3 * float(thermovoltage(letter, np.array(celsius + 273.15)))
    assert abs(found - millivolts) <= 0.5e-3 + 1e-9


def test_beyond_its_ends_a_type_has_no_voltage() -> None:
    """NaN comes out; the ends themselves are inside, rounding or not."""
    for letter in LETTERS:
        ends = np.array(limits(letter))
        assert np.all(np.isfinite(thermovoltage(letter, ends)))
        assert np.all(np.isnan(thermovoltage(letter, ends + np.array([-0.01, 0.01]))))
