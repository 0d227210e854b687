"""The values that are looked at lie within the bounds, and are short to write."""

from __future__ import annotations

from decimal import Decimal

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.solve.domain import Continuous, preferred_numbers, usual_scale, whole_numbers


def digits(value: float) -> int:
    """Return the number of significant digits of a float."""
    return len(Decimal(repr(value)).normalize().as_tuple().digits)


@settings(max_examples=200, deadline=None)
@given(
    low=st.floats(1e-9, 1e9), ratio=st.floats(1.001, 1e6), points=st.integers(3, 40),
    power=st.integers(2, 6), log=st.booleans(),
)  # fmt: skip
def test_points_lie_in_order_between_the_bounds(
    low: float, ratio: float, points: int, power: int, log: bool
) -> None:
    """Bounds as they are given, all between them increasing, with few digits."""
    domain = Continuous(low, low * ratio, 10.0**-power, "log" if log else "linear")
    found = domain.spread(points)
    assert (found[0], found[-1]) == (low, low * ratio)
    assert list(found) == sorted(set(found))
    assert 2 <= len(found) <= points
    if log:
        assert all(digits(value) <= power + 1 for value in found[1:-1])


@settings(max_examples=200, deadline=None)
@given(low=st.floats(1e-9, 1e9), gap=st.floats(1e-7, 1.0), power=st.integers(2, 6))
def test_halving_ends_within_the_tolerance(low: float, gap: float, power: int) -> None:
    """A middle lies between its ends; there is none once they are near enough."""
    domain = Continuous(low / 2.0, low * 4.0, 10.0**-power, "log")
    a, b, steps = low, low * (1.0 + gap), 0
    while (middle := domain.between(a, b)) is not None:
        assert a < middle < b
        b, steps = middle, steps + 1
    assert steps <= domain.narrowings(2)
    assert b - a <= 2.0 * 10.0**-power * b


def test_a_round_number_between_neighbours_is_preferred() -> None:
    """Between 4.4998 and 4.5001 lies 4.5; between 187.22 and 187.23 nothing shorter."""
    domain = Continuous(1.0, 1e3, 1e-4, "log")
    assert domain.plainest(4.4998, 4.5001) == 4.5
    assert domain.plainest(187.22, 187.23) is None


def test_members() -> None:
    """Whole numbers include both ends; preferred numbers cross decades, those at the ends too."""
    assert whole_numbers(4, 7).values == (4.0, 5.0, 6.0, 7.0)
    found = preferred_numbers(470.0, 2200.0, "E6").values
    assert found == (470.0, 680.0, 1000.0, 1500.0, 2200.0)
    assert preferred_numbers(471.0, 2190.0, "E6").values == (680.0, 1000.0, 1500.0)
    assert preferred_numbers(1e-9, 1e-8, "E3").values == (1e-9, 2.2e-9, 4.7e-9, 1e-8)


@pytest.mark.parametrize(
    ("low", "high", "scale"), [(1.0, 9.0, "linear"), (1.0, 11.0, "log"), (-1.0, 5.0, "linear")]
)
def test_the_usual_scale(low: float, high: float, scale: str) -> None:
    """More than a decade above zero is a matter of ratios."""
    assert usual_scale(low, high) == scale
