"""What sensors add to the linear model: a curve with a range, and a pole that moves."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.integrate import quad

from frontend_sim.analog.limits import Segments
from frontend_sim.analog.limits.sensor_curve import SensorCurve, left
from frontend_sim.analog.limits.variable_pole import VariablePole

Real = NDArray[np.float64]


def pieces(values: list[tuple[float, float]], length: float = 1.0) -> Segments:
    """Return pieces of equal length from their ends; a jump where they do not meet."""
    begin, end = (np.array(column) for column in zip(*values, strict=True))
    jumps = np.flatnonzero(begin[1:] != end[:-1]) + 1
    lengths = np.full(len(values), length)
    return Segments(lengths, begin, end, np.zeros(len(values)), 0.0, jumps)


def test_the_range_is_left_for_as_long_as_the_line_is_beyond_it() -> None:
    """Lines that cross an end count in part, from the crossing on or up to it."""
    span = pieces([(0.0, 0.5), (0.5, 1.5), (1.5, 1.0), (1.0, -1.0), (-1.0, -1.0)], 2.0)
    found = left(span, 0.0, 1.0)
    assert found.time == pytest.approx([1.0 + 2.0, 1.0 + 2.0], rel=1e-15)
    assert found.piece.tolist() == [1, 3]
    assert found.since == pytest.approx([1.0, 1.0], rel=1e-15)


def test_inside_the_range_nothing_is_told() -> None:
    """The ends themselves belong to the range."""
    found = left(pieces([(0.0, 1.0), (1.0, 0.0)]), 0.0, 1.0)
    assert found.time.tolist() == [0.0, 0.0]
    assert found.piece.tolist() == [-1, -1]


def test_a_curve_is_taken_at_both_sides_of_a_jump() -> None:
    """Its deviation from the gain, with no memory of what was before."""
    curve = SensorCurve(range(1), 2.0, lambda u: u**2, -10.0, 10.0)
    state = curve.start(3.0, 6.0)
    assert state.tolist() == [3.0]
    state, ends, begins, _ = curve.advance(state, pieces([(3.0, 4.0), (1.0, 0.0)]))
    assert ends.tolist() == [8.0, 0.0]
    assert begins.tolist() == [-1.0]
    assert state.tolist() == [0.0]


def moving(rate: float = 5.0) -> VariablePole:
    """Return a pole that stays, or moves with the input, in front of a straight target."""
    return VariablePole(range(1), lambda u: np.full(len(u), rate), lambda u: 3.0 * u, -9.0, 9.0)


def test_a_pole_that_stays_is_exact_behind_a_line() -> None:
    """y' = r (3 u - y), u from 0 to 2: the ramp of a first-order section, in closed form."""
    span = pieces([(0.0, 2.0)], 0.7)
    _, ends, _, _ = moving().advance(moving().start(0.0, 0.0), span)
    slope = 6.0 / 0.7
    expected = slope * (0.7 - (1.0 - np.exp(-3.5)) / 5.0)
    assert ends[0] == pytest.approx(expected, rel=1e-14)


@pytest.mark.parametrize("rate", [0.0, 1e-9, 1e-6, 1e-4, 1.0, 1e3, 1e12])
def test_short_and_stiff_pieces_keep_their_digits(rate: float) -> None:
    """From a pole that hardly moves to one that is there at once, against a quadrature."""
    pole = moving(rate)
    _, ends, _, _ = pole.advance(np.array([0.0, 0.0]), pieces([(0.0, 1.0)]))
    if rate <= 1.0:
        response, _ = quad(lambda s: 3.0 * s * rate * np.exp(-rate * (1.0 - s)), 0.0, 1.0)
        assert ends[0] == pytest.approx(response, rel=1e-9, abs=1e-300)
    else:
        assert ends[0] == pytest.approx(3.0 * (1.0 - 1.0 / rate), rel=1e-12)


def test_the_deviation_is_less_what_the_linear_blocks_give() -> None:
    """It never jumps, and the state goes on from call to call."""
    pole, span = moving(), pieces([(0.0, 1.0), (2.0, 2.0), (2.0, 2.0)], 0.1)
    whole = pole.advance(pole.start(0.0, 0.0), span)[1]
    first = pole.advance(pole.start(0.0, 0.0), pieces([(0.0, 1.0), (2.0, 2.0)], 0.1))
    assert first[2].tolist() == [whole[0]]
    second = pole.advance(first[0], pieces([(2.0, 2.0)], 0.1))
    assert second[1][0] == whole[2]
    linear = Segments(span.length, span.begin, span.end, np.ones(3), 1.0, span.jumps)
    shifted = pole.advance(np.array([-1.0, 0.0]), linear)[1]
    np.testing.assert_allclose(shifted, whole - 1.0, rtol=0, atol=1e-15)
