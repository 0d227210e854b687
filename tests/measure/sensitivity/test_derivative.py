"""Derivatives by differences, and when they say that they do not know."""

from __future__ import annotations

import math
from collections.abc import Callable

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.measure.sensitivity.derivative import slopes, whole_slope


@settings(max_examples=200, deadline=None)
@given(power=st.floats(-8.0, 8.0), value=st.floats(1e-9, 1e9))
def test_powers(power: float, value: float) -> None:
    """v = c p^k: dv / d(ln p) = k v, to 1e-5 of it."""
    (found,) = slopes(lambda factor: [value * factor**power], [value])
    assert found.value is not None
    # What moves by less than a millionth of the value counts as nothing.
    assert found.value == pytest.approx(power * value, rel=1e-5, abs=2e-6 * value)


def test_several_values_each_by_its_own() -> None:
    """One that is smooth and one that is rounded are told apart."""
    smooth, rounded, none = slopes(
        lambda factor: [3.0 * factor, round(1e2 * factor**2) / 1e2, None], [3.0, 1.0, 1.0]
    )
    assert smooth.value == pytest.approx(3.0, rel=1e-9)
    assert smooth.step == 1e-3
    assert rounded.step > 1e-3
    assert none.value is None
    assert "cannot be told" in none.reason


UNRESOLVED: dict[str, tuple[Callable[[float], float], str]] = {
    "a jump": (lambda factor: float(factor > 1.0), "rounding to codes, noise, or a bend"),
    "noise": (lambda factor: 1.0 + math.sin(1e7 * factor), "rounding to codes, noise"),
    "infinite": (lambda factor: math.inf if factor > 1.0 else 1.0, "cannot be told"),
}


@pytest.mark.parametrize("name", UNRESOLVED)
def test_what_is_not_resolved(name: str) -> None:
    """No number is given where the steps do not agree; the reason is."""
    measured, reason = UNRESOLVED[name]
    (found,) = slopes(lambda factor: [measured(factor)], [measured(1.0)])
    assert found.value is None
    assert reason in found.reason


def test_what_is_refused_tells_why() -> None:
    """A value that the parameter cannot have ends it, with the message."""

    def measured(factor: float) -> list[float]:
        raise ValueError("too large")

    (found,) = slopes(measured, [1.0])
    assert (found.value, "too large" in found.reason) == (None, True)
    (found,) = slopes(measured, [math.inf])
    assert found.reason == "the value is infinite"


def test_a_bend_at_the_value_is_told_by_both_sides() -> None:
    """|p - 1| has no derivative at 1: central differences give none, as the mean of both sides."""
    (found,) = slopes(lambda factor: [1.0 + abs(factor - 1.0)], [1.0])
    assert found.value == 0.0


def test_whole_numbers_change_by_one() -> None:
    """The difference over both neighbours, as a slope by the logarithm."""
    assert whole_slope(11.0, 13.0, 12.0).value == 12.0
    assert whole_slope(None, 13.0, 12.0).value is None
