"""Preferred numbers of IEC 60063."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.errors import QuantityError
from frontend_sim.quantities import SERIES, preferred
from frontend_sim.quantities.preferred import mantissas

# IEC 60063, from memory, the standard was not at hand.
E12 = (100, 120, 150, 180, 220, 270, 330, 390, 470, 560, 680, 820)
E48 = (
    100, 105, 110, 115, 121, 127, 133, 140, 147, 154, 162, 169, 178, 187, 196, 205,
    215, 226, 237, 249, 261, 274, 287, 301, 316, 332, 348, 365, 383, 402, 422, 442,
    464, 487, 511, 536, 562, 590, 619, 649, 681, 715, 750, 787, 825, 866, 909, 953,
)  # fmt: skip
END_OF_E96 = (806, 825, 845, 866, 887, 909, 931, 953, 976)
END_OF_E192 = (898, 909, 920, 931, 942, 953, 965, 976, 988)


def test_the_series_are_those_of_the_standard() -> None:
    """Published rows, among them the one member, 920, that is not by the rule."""
    assert mantissas("E3") == (100, 220, 470)
    assert mantissas("E6") == (100, 150, 220, 330, 470, 680)
    assert mantissas("E12") == E12
    assert mantissas("E48") == E48
    assert mantissas("E96")[-9:] == END_OF_E96
    assert mantissas("E192")[-9:] == END_OF_E192


@pytest.mark.parametrize("series", SERIES)
def test_a_series_has_its_count_rises_and_is_half_of_the_next(series: str) -> None:
    """E24 has 24 different members; up to E24, and from E48 on, each holds the coarser ones."""
    members = mantissas(series)
    assert len(set(members)) == int(series[1:])
    assert list(members) == sorted(members)
    finer = {"E3": "E6", "E6": "E12", "E12": "E24", "E48": "E96", "E96": "E192"}.get(series)
    if finer is not None:
        assert members == mantissas(finer)[::2]


@given(st.floats(1e-15, 1e12), st.sampled_from(SERIES))
def test_neighbours_enclose_a_value(value: float, series: str) -> None:
    """Below and above are neighbours in the series, the nearest is one of the two by ratio."""
    found = preferred(value, series)
    assert found.below <= value * (1 + 1e-9)
    assert found.above >= value * (1 - 1e-9)
    assert found.nearest in (found.below, found.above)
    other = found.above if found.nearest == found.below else found.below
    assert abs(math.log(found.nearest / value)) <= abs(math.log(other / value)) * (1 + 1e-9) + 1e-15
    for member in (found.below, found.above):
        assert preferred(member, series).member
        digits = f"{member:.2e}"
        assert round(float(digits.split("e")[0]) * 100) in mantissas(series)


@pytest.mark.parametrize(
    ("value", "series", "below", "nearest", "above"),
    [
        (4.8e3, "E24", 4.7e3, 4.7e3, 5.1e3),
        (4.7e-9, "E6", 4.7e-9, 4.7e-9, 4.7e-9),
        (10.3e3, "E96", 10.2e3, 10.2e3, 10.5e3),
        (9.9e5, "E24", 9.1e5, 1e6, 1e6),
        (0.999999e3, "E192", 988.0, 1e3, 1e3),
        (919.0, "E192", 909.0, 920.0, 920.0),
        (1.2247, "E3", 1.0, 1.0, 2.2),
    ],
)
def test_rounding(value: float, series: str, below: float, nearest: float, above: float) -> None:
    """Values over the ends of decades, on members, and in between."""
    found = preferred(value, series)
    assert (found.below, found.nearest, found.above) == (below, nearest, above)


@pytest.mark.parametrize(
    ("value", "series", "message"),
    [
        (0.0, "E24", "above 0"),
        (-1.0, "E24", "above 0"),
        (math.inf, "E24", "above 0"),
        (math.nan, "E24", "above 0"),
        (1.0, "E23", "no series 'E23'; did you mean"),
    ],
)
def test_what_has_no_preferred_number(value: float, series: str, message: str) -> None:
    """A value that is not above zero, and a series that is none."""
    with pytest.raises(QuantityError, match=message):
        preferred(value, series)
