"""The rhythm of the looks: uniform rows and bursts, right at any number."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.converter.pattern import LookPattern


@given(
    rate=st.floats(1e-2, 1e9),
    looks=st.integers(1, 50),
    share=st.floats(0.01, 1.0),
    start=st.integers(0, 10**10),
)
def test_bursts_against_fractions(rate: float, looks: int, share: float, start: int) -> None:
    """floor(i / looks) / rate + (i mod looks) · interval, against exact fractions.

    Two divisions, a product and two sums: at most four roundings of the whole.
    """
    interval = share / (rate * looks) if looks > 1 else 0.0
    pattern = LookPattern(0.25, rate, looks, interval)
    for number, found in zip(
        range(start, start + 60), pattern.between(start, start + 60), strict=True
    ):
        burst, place = divmod(number, looks)
        exact = Fraction(0.25) + Fraction(burst) / Fraction(rate) + place * Fraction(interval)
        assert abs(Fraction(float(found)) - exact) <= 4 * Fraction(float(np.spacing(found)))


@pytest.mark.parametrize(
    ("pattern", "closest", "widest", "rate"),
    [
        (LookPattern(1.0, 4.0), 0.25, 0.25, 4.0),
        (LookPattern(0.0, 2.0, 4, 0.125), 0.125, 0.125, 8.0),
        (LookPattern(0.0, 1.0, 3, 0.125), 0.125, 0.75, 8.0),
    ],
)
def test_intervals(pattern: LookPattern, closest: float, widest: float, rate: float) -> None:
    """The shortest and the longest interval are those between the instants; all are floats."""
    gaps = np.diff(pattern.between(0, 50))
    assert (np.min(gaps), np.max(gaps)) == (closest, widest)
    assert (pattern.closest, pattern.widest, pattern.look_rate) == (closest, widest, rate)


def test_any_numbers_can_be_asked_for() -> None:
    """``at`` and ``between`` tell the same."""
    pattern = LookPattern(3e-3, 1e3, 7, 1e-5)
    np.testing.assert_array_equal(
        pattern.at(np.array([5, 8, 20])), pattern.between(0, 21)[[5, 8, 20]]
    )
