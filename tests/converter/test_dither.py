"""Dither: its distribution, what it makes of the error, and what is refused."""

from __future__ import annotations

from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from digitizing import constant, digitized
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import integrate, stats

from frontend_sim.converter import Adc
from frontend_sim.converter.dither import Dither
from frontend_sim.converter.dither_error import dither_error
from frontend_sim.errors import ScenarioError

SHAPES = ("uniform", "triangular")


def adc(**values: Any) -> Adc:
    """Return a converter of 10 bits with an LSB of 1 V, -512 to 512 V."""
    return Adc(**{"rate": 1e3, "bits": 10, "low": -512.0, "high": 512.0, **values})


@pytest.mark.parametrize("shape", SHAPES)
def test_values_are_spread_as_told(shape: Any) -> None:
    """Kolmogorov's test at one in a thousand; ends, mean and rms; no colour."""
    dither, count = Dither(shape=shape, width=3.0), 100_000
    values = dither.values(0, count, 5)
    scaled = (values + 1.5) / 3.0
    law = stats.uniform() if shape == "uniform" else stats.triang(0.5)
    assert stats.kstest(scaled, law.cdf).pvalue > 1e-3
    assert np.max(np.abs(values)) <= 1.5
    assert abs(np.mean(values[1:] * values[:-1])) < 4.5 * np.var(values) / np.sqrt(count)
    grid = np.linspace(-2.0, 2.0, 4001)
    np.testing.assert_allclose(dither.density(grid), law.pdf((grid + 1.5) / 3.0) / 3.0, atol=1e-9)


@pytest.mark.parametrize("shape", SHAPES)
def test_values_depend_on_their_place_alone(shape: Any) -> None:
    """Any cut of the looks gives the same dither, another seed another."""
    dither = Dither(shape=shape, width=1.0)
    whole = dither.values(0, 40_000, 1)
    parts = [dither.values(a, b, 1) for a, b in pairwise([0, 5, 16_384, 16_390, 40_000])]
    np.testing.assert_array_equal(np.concatenate(parts), whole)
    assert np.any(dither.values(0, 10, 2) != whole[:10])


@given(
    shape=st.sampled_from(SHAPES),
    width=st.floats(0.01, 5.0),
    subtractive=st.booleans(),
    position=st.floats(-3.0, 3.0),
)
@settings(max_examples=60, deadline=None)
def test_closed_form_against_an_integral(
    shape: Any, width: float, subtractive: bool, position: float
) -> None:
    """Mean and rms of the error against SciPy's adaptive integral over the density."""
    dither = Dither(shape=shape, width=width, subtractive=subtractive)
    law = stats.uniform() if shape == "uniform" else stats.triang(0.5)
    cuts = [c + 0.5 - position for c in range(-9, 9) if abs(c + 0.5 - position) < 0.5 * width]

    def moment(power: int, about: float) -> float:
        def integrand(d: float) -> float:
            error = np.floor(position + d + 0.5) - position - (d if subtractive else 0.0)
            return float(law.pdf(d / width + 0.5) / width * (error - about) ** power)

        edges = np.unique([-0.5 * width, 0.0, 0.5 * width, *cuts])
        return sum(integrate.quad(integrand, a, b)[0] for a, b in pairwise(edges))

    found = dither_error(dither, position)
    mean = moment(1, 0.0)
    assert found.mean == pytest.approx(mean, abs=1e-9)
    assert found.rms**2 == pytest.approx(moment(2, mean), abs=1e-9)


@pytest.mark.parametrize("position", [0.0, 0.1, 0.25, 0.37, 0.5, 0.8])
@pytest.mark.parametrize(
    "dither",
    [
        {"shape": "uniform", "width": 1.0},
        {"shape": "triangular", "width": 2.0},
        {"shape": "triangular", "width": 1.0},
        {"shape": "uniform", "width": 1.0, "subtractive": True},
        {"shape": "triangular", "width": 2.0, "subtractive": True},
        {"shape": "uniform", "width": 0.5, "subtractive": True},
    ],
    ids=lambda given: "-".join(map(str, given.values())),
)
def test_runs_have_the_error_of_the_closed_form(dither: dict[str, Any], position: float) -> None:
    """Mean and rms over 40 000 conversions of a constant, within 4.5 standard errors."""
    count = 40_000
    made = adc(dither=dither)
    error = digitized(made, constant(position), count, seed=6).voltage - position
    expected = dither_error(Dither(**dither), position)
    spread = max(expected.rms, 1e-9)
    assert abs(np.mean(error) - expected.mean) <= 4.5 * spread / np.sqrt(count) + 1e-12
    fourth = np.mean((error - np.mean(error)) ** 4) / spread**4
    error_of_rms = spread * np.sqrt(max(fourth - 1.0, 1e-3) / (4.0 * count))
    assert abs(np.std(error) - expected.rms) < 4.5 * error_of_rms + 1e-3 * spread


def test_without_dither_the_error_is_the_input() -> None:
    """The staircase itself: what dither is there to remove."""
    for position in (0.0, 0.3, -0.4, 0.5, 7.49):
        found = dither_error(None, position)
        assert found.mean == np.floor(position + 0.5) - position
        assert found.rms == 0.0


def test_taking_it_off_leaves_codes_alone() -> None:
    """Codes are what the converter gives; only the voltage that is read back differs."""
    plain = adc(dither={"shape": "uniform", "width": 1.0})
    taken = adc(dither={"shape": "uniform", "width": 1.0, "subtractive": True})
    one, other = (digitized(made, constant(0.3), 500, seed=1) for made in (plain, taken))
    np.testing.assert_array_equal(one.codes, other.codes)
    assert plain.dither is not None
    values = plain.dither.values(0, 500, 1)
    np.testing.assert_allclose(one.voltage - other.voltage, values, rtol=0, atol=1e-12)


@pytest.mark.parametrize(
    ("dither", "message"),
    [
        ({"shape": "uniform", "width": 0.0}, "above 0 LSB"),
        ({"shape": "uniform", "width": "1 mV"}, "not LSB"),
        ({"shape": "uniform"}, "missing"),
        ({"shape": "gaussian", "width": 1.0}, "'uniform' or 'triangular'"),
        ({"shape": "uniform", "width": 513.0}, "513 LSB is more than half of the range, 512 LSB"),
        ({"shape": "uniform", "width": 1.0, "subtractive": "yes"}, "valid boolean"),
    ],
)
def test_impossible_dither_is_refused(dither: dict[str, Any], message: str) -> None:
    """Each with a message of its own."""
    with pytest.raises(ScenarioError, match=message):
        adc(dither=dither)
