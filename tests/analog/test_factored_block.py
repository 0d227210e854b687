"""A block that knows its roots is the same model in factors and in matrices."""

from __future__ import annotations

import numpy as np

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import SallenKey, TwinTNotch
from frontend_sim.measure.response.roots import roots_of

SECTION = SallenKey(
    resistance_1=1e4,
    resistance_2=2e4,
    capacitance_1=1e-8,
    capacitance_2=3e-9,
    gain_bandwidth=1e6,
    output_resistance=100.0,
)


def test_polynomials_and_factors_agree() -> None:
    """numerator / denominator is the response, to 1e-9 where neither polynomial cancels."""
    block = SECTION.solution().block
    numerator, denominator = block.polynomials()
    s = 2j * np.pi * np.logspace(0, 8, 33)
    found = np.polyval(numerator, s) / np.polyval(denominator, s)
    np.testing.assert_allclose(found, block.response(s), rtol=1e-9)


def test_poles_are_the_eigenvalues() -> None:
    """The poles that it tells are those of its matrix, and the chain's roots are its own."""
    block = SECTION.solution().block
    eigenvalues = np.sort_complex(np.linalg.eigvals(block.a))
    np.testing.assert_allclose(np.sort_complex(block.poles), eigenvalues, rtol=1e-12)
    np.testing.assert_array_equal(roots_of(chain_of([SECTION])).zeros, block.zeros)


def test_the_response_vanishes_at_a_zero() -> None:
    """At the very zero of a notch, and at zero frequency of nothing at all."""
    notch = TwinTNotch(
        resistance_1=1e4,
        resistance_2=1e4,
        shunt_resistance=5e3,
        capacitance_1=1e-8,
        capacitance_2=1e-8,
        shunt_capacitance=2e-8,
    )
    block = notch.solution().block
    np.testing.assert_array_equal(block.response(block.zeros), 0.0)
    np.testing.assert_allclose(block.response(np.zeros(1)), 1.0, rtol=1e-15)
