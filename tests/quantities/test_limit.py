"""Limits in volts, LSB and shares: read, kept in their unit, written back."""

from __future__ import annotations

import copy
import pickle

import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.errors import QuantityError
from frontend_sim.quantities import Limit
from frontend_sim.quantities.limit import parse_limit


@pytest.mark.parametrize(
    ("text", "value", "unit"),
    [
        ("0.5 LSB", 0.5, "LSB"),
        ("0.5LSB", 0.5, "LSB"),
        ("1 lsb", 1.0, "LSB"),
        ("1 mV", 1e-3, "V"),
        ("250 uV", 250e-6, "V"),
        ("0.1 %", 1e-3, "1"),
        ("50 ppm", 50e-6, "1"),
        ("1e2 LSB", 100.0, "LSB"),
    ],
)
def test_a_limit_keeps_its_unit(text: str, value: float, unit: str) -> None:
    """Each way to write a limit gives its number and the unit it was given in."""
    assert parse_limit(text) == Limit(value, unit)


@pytest.mark.parametrize("value", [0.5, 1, "0.5", "", "abc", "3 s", "2 ohm", "1 dB", True, [1], {}])
def test_anything_else_is_told(value: object) -> None:
    """A number without a unit, and units of anything else, are refused with examples."""
    with pytest.raises(QuantityError, match=r'limit, for instance "0.5 LSB", "1 mV" or "0.1 %"'):
        parse_limit(value)


def test_a_bare_number_is_told_why() -> None:
    """Bare numbers are in SI elsewhere; here the message says what they could be."""
    with pytest.raises(QuantityError, match="could be in V, in LSB or a share"):
        parse_limit(0.5)


@given(st.floats(1e-20, 1e9), st.sampled_from(["V", "LSB", "1"]))
def test_text_reads_back_as_the_same_limit(value: float, unit: str) -> None:
    """Whatever the number, what is written is read as the very same limit."""
    limit = Limit(value, unit)
    assert parse_limit(limit.text()) == limit
    assert pickle.loads(pickle.dumps(limit)) == limit
    assert copy.deepcopy(limit) == limit


def test_limits_of_other_units_differ() -> None:
    """The number alone says nothing: 1 LSB is no 1 V, and no plain 1."""
    assert Limit(1.0, "LSB") != Limit(1.0, "V")
    assert Limit(1.0, "LSB") != 1.0
    assert len({Limit(1.0, "LSB"), Limit(1.0, "V"), Limit(1.0, "LSB")}) == 2


def test_a_limit_in_volts() -> None:
    """One of the limit's unit in volts, with a code of 1 mV and a whole of 2 V."""
    scales = [Limit(1.0, unit).scale(1e-3, 2.0) for unit in ("V", "LSB", "1")]
    assert scales == [1.0, 1e-3, 2.0]
