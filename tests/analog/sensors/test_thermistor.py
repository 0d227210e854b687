"""Thermistors: both models against their own definitions."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.analog.sensors.thermistor import (
    beta_slope,
    by_beta,
    by_steinhart_hart,
    steinhart_hart_slope,
)

KELVIN = np.linspace(220.0, 420.0, 201)
COEFFICIENTS = (1.129148e-3, 2.34125e-4, 8.76741e-8)
"""Of a common 10 kohm part, from memory."""


def test_beta_is_its_definition() -> None:
    """R(T0) = R0, and B = ln(R1/R2) / (1/T1 - 1/T2) for any two temperatures."""
    assert by_beta(1e4, 3950.0, 298.15, np.array(298.15)) == 1e4
    r = by_beta(1e4, 3950.0, 298.15, KELVIN)
    beta = np.log(r[1:] / r[:-1]) / (1.0 / KELVIN[1:] - 1.0 / KELVIN[:-1])
    np.testing.assert_allclose(beta, 3950.0, rtol=1e-9)


@given(
    st.floats(5e-4, 2e-3),
    st.floats(1e-4, 5e-4),
    st.one_of(st.just(0.0), st.floats(1e-12, 1e-6)),
    st.floats(200.0, 450.0),
)
def test_steinhart_hart_solves_its_equation(
    a: float, b: float, c: float, temperature: float
) -> None:
    """Put back into 1/T = a + b ln R + c (ln R)³, the resistance gives the temperature."""
    logarithm = np.log(float(by_steinhart_hart(a, b, c, np.array(temperature))))
    inverse = a + b * logarithm + c * logarithm**3
    assert 1.0 / inverse == pytest.approx(temperature, rel=1e-12)


def test_a_small_third_coefficient_is_nearly_none() -> None:
    """The closed form loses no digits where the cubic is almost a line."""
    a, b, _ = COEFFICIENTS
    line = by_steinhart_hart(a, b, 0.0, KELVIN)
    np.testing.assert_allclose(by_steinhart_hart(a, b, 1e-20, KELVIN), line, rtol=1e-11)


def test_slopes_are_derivatives() -> None:
    """Central differences of ln R; the error of their second order is below 1e-7."""
    step = 1e-3
    for curve, slope in (
        (lambda t: by_beta(1e4, 3950.0, 298.15, t), beta_slope(3950.0, KELVIN)),
        (
            lambda t: by_steinhart_hart(*COEFFICIENTS, t),
            steinhart_hart_slope(*COEFFICIENTS, KELVIN),
        ),
    ):
        difference = np.log(curve(KELVIN + step) / curve(KELVIN - step)) / (2.0 * step)
        np.testing.assert_allclose(slope, difference, rtol=1e-7)
