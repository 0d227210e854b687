"""Published effect of dither on the error of a quantizer."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from digitizing import constant, digitized
from scipy import stats

from frontend_sim.converter import Adc
from frontend_sim.converter.dither import Dither
from frontend_sim.converter.dither_error import dither_error

POSITIONS = np.linspace(0.0, 1.0, 41)
COUNT = 20_000


def errors(dither: dict[str, Any], position: float, seed: int) -> Any:
    """Return the errors of many conversions of a constant, in LSB of 1 V."""
    adc = Adc(rate=1e3, bits=8, low=-128.0, high=128.0, dither=dither)
    return digitized(adc, constant(position), COUNT, seed).voltage - position


# Triangular dither of 2 LSB: mean error 0 and total variance LSB²/4 at any input.
# Source: Wannamaker et al. 2000, "A theory of nonsubtractive dither", from memory.
def test_triangular_dither() -> None:
    """Neither mean nor variance of the error depends on the input, over 41 inputs within an LSB.

    Sum of the squared standard scores against chi-squared, at one in a thousand to either side; the
    variance's standard error follows from the fourth moment, which does depend on the input.
    """
    means, variances = [], []
    for number, position in enumerate(POSITIONS):
        error = errors({"shape": "triangular", "width": 2.0}, float(position), number)
        means.append(np.mean(error) / (0.5 / np.sqrt(COUNT)))
        squares = (error - np.mean(error)) ** 2
        variances.append((np.mean(squares) - 0.25) / (np.std(squares) / np.sqrt(COUNT)))
    for scores in (np.array(means), np.array(variances)):
        assert 1e-3 < stats.chi2(len(POSITIONS)).cdf(float(scores @ scores)) < 1.0 - 1e-3
        assert np.max(np.abs(scores)) < 4.5


# Uniform dither of 1 LSB: mean error 0 at any input; the variance swings between 0 and LSB²/4.
# Source: the same, from memory.
def test_uniform_dither() -> None:
    """The mean is free of the input, the variance is u (1 - u) with u the place within an LSB."""
    for number, position in enumerate(POSITIONS):
        error = errors({"shape": "uniform", "width": 1.0}, float(position), number)
        assert abs(np.mean(error)) < 4.5 * 0.5 / np.sqrt(COUNT)
        share = float(position) % 1.0
        assert np.var(error) == pytest.approx(share * (1.0 - share), abs=0.01)


# Taken off again, uniform dither of 1 LSB leaves an error of LSB²/12 that is independent of the
# input. Source: Schuchman 1964, "Dither signals and their effect on quantization noise", from
# memory.
def test_subtractive_dither() -> None:
    """The error is uniform over an LSB at any input, by Kolmogorov's test at one in 10 000."""
    dither = {"shape": "uniform", "width": 1.0, "subtractive": True}
    for number, position in enumerate(POSITIONS[::4]):
        error = errors(dither, float(position), number)
        assert stats.kstest(error + 0.5, "uniform").pvalue > 1e-4
        assert np.var(error) == pytest.approx(1.0 / 12.0, rel=4.5 * np.sqrt(0.8 / COUNT))


@pytest.mark.parametrize(
    ("dither", "variance"),
    [
        ({"shape": "triangular", "width": 2.0}, 1 / 4),
        ({"shape": "uniform", "width": 1.0, "subtractive": True}, 1 / 12),
        ({"shape": "triangular", "width": 2.0, "subtractive": True}, 1 / 12),
    ],
)
def test_closed_form_at_any_input(dither: dict[str, Any], variance: float) -> None:
    """The same values to 1e-12 from the integrals, at 41 inputs and far from zero."""
    for position in (*POSITIONS, -1000.3, 77.77):
        found = dither_error(Dither(**dither), float(position))
        assert found.mean == pytest.approx(0.0, abs=1e-12)
        assert found.rms**2 == pytest.approx(variance, abs=1e-12)
