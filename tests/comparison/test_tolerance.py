"""Tolerances as a user writes them."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.comparison import parse_tolerances
from frontend_sim.errors import InputError


def test_signals_take_lsb_volts_and_nothing() -> None:
    """A tenth of an LSB, a millivolt in LSB, and zero where none is given."""
    assert parse_tolerances(["0.1 LSB"]).of_signal("LSB", 1e-3, 4.0) == pytest.approx(0.1)
    assert parse_tolerances(["1 mV"]).of_signal("LSB", 0.5e-3, 4.0) == pytest.approx(2.0)
    assert parse_tolerances(["1 mV"]).of_signal("V", 0.5e-3, 4.0) == pytest.approx(1e-3)
    assert parse_tolerances([]).of_signal("LSB", 1e-3, 4.0) == 0.0


@pytest.mark.parametrize(
    ("text", "unit", "expected"),
    [
        ("settling=10 us", "s", 10e-6),
        ("settling=5 %", "s", 0.1),
        ("settling=0.5 dB", "dB", 0.5),
        ("settling=0.5", "dB", 0.5),
        ("settling=0.02", "1", 0.02),
        ("5 %", "s", 0.1),
        ("1 LSB", "s", 0.0),
    ],
)
def test_results_take_their_unit_or_a_share(text: str, unit: str, expected: float) -> None:
    """A value of 2 may differ by what is written."""
    found = parse_tolerances([text]).of_result("settling", unit, -2.0)
    assert found == pytest.approx(expected)


@pytest.mark.parametrize("text", ["", "0.1", "LSB", "one LSB", "-1 LSB", "-2 %", "1 kg", "nan %"])
def test_what_is_no_tolerance_is_refused(text: str) -> None:
    """The message shows how to write one."""
    with pytest.raises(InputError, match="is no tolerance"):
        parse_tolerances([text])


@pytest.mark.parametrize("text", ["snr=1 V", "snr=", "snr=-1 dB", "snr=nan", "snr=x %"])
def test_units_that_do_not_fit_are_refused(text: str) -> None:
    """A tolerance in another unit than the result is no guess."""
    with pytest.raises(InputError, match=r"does not fit: snr is measured in dB"):
        parse_tolerances([text]).of_result("snr", "dB", 60.0)


def test_a_name_of_nothing_is_refused() -> None:
    """A typing error in the name of a check is told with the nearest name."""
    with pytest.raises(InputError, match="did you mean 'settling'"):
        parse_tolerances(["setling=1 %"]).refuse_unknown(["settling", "snr"])


@given(st.text(max_size=30))
def test_any_text_is_read_or_refused(text: str) -> None:
    """Whatever is written, it becomes a tolerance or one message."""
    try:
        found = parse_tolerances([text])
        found.of_result("x", "dB", 1.0)
    except InputError:
        return
    assert found.of_signal("LSB", 1e-3, 4.0) >= 0.0
