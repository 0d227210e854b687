"""Platinum thermometers against the table of their standard."""

from __future__ import annotations

import numpy as np
import pytest

from frontend_sim.analog.sensors.platinum import HIGHEST, LOWEST, ratio_slope, resistance_ratio

# IEC 60751, table of the Pt100, from memory; the rows are also among the check values.
PT100 = [
    (-200.0, 18.52),
    (-100.0, 60.26),
    (0.0, 100.00),
    (100.0, 138.51),
    (200.0, 175.86),
    (400.0, 247.09),
]


@pytest.mark.parametrize(("celsius", "ohm"), PT100)
def test_table_of_the_standard(celsius: float, ohm: float) -> None:
    """Within half of the last printed digit, with the rounding of the sum itself allowed for."""
    found = 100.0 * float(resistance_ratio(np.array(celsius + 273.15)))
    assert abs(found - ohm) <= 0.005 + 1e-9


def test_the_slope_is_the_derivative() -> None:
    """Central differences over the whole range; the error of their second order is below 1e-7."""
    kelvin = np.linspace(LOWEST, HIGHEST, 1001)
    step = 1e-3
    difference = (resistance_ratio(kelvin + step) - resistance_ratio(kelvin - step)) / (2.0 * step)
    np.testing.assert_allclose(ratio_slope(kelvin), difference, rtol=1e-7, atol=0)


def test_the_curve_is_smooth_at_zero() -> None:
    """The term of the cold side and its slope vanish at 0 degC."""
    around = 273.15 + np.array([-1e-6, 1e-6])
    assert np.diff(resistance_ratio(around))[0] == pytest.approx(2e-6 * 3.9083e-3, rel=1e-6)
    assert np.diff(ratio_slope(around))[0] == pytest.approx(0.0, abs=1e-11)
