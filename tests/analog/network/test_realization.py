"""The state space of all-pass sections against the exact rational functions that it stands for."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.analog.network.realization import input_columns, state_matrix

POLES: dict[str, list[complex]] = {
    "none": [],
    "one": [-3.0],
    "pair": [complex(-1.0, 7.0), complex(-1.0, -7.0)],
    "equal": [-2.0, -2.0, -2.0, complex(-1, 1), complex(-1, -1), complex(-1, 1), complex(-1, -1)],
    "far apart": [-1e-6, -1.0, -1e6, -1e12],
    "on the axis": [0.0, 5j, -5j, 9j, -9j, -2.0],
    "sharp": [complex(-1e-7, 1.0), complex(-1e-7, -1.0), -3.0],
    "crowd": [complex(-(1.1**k)) for k in range(16)],
}


def _numerators(poles: list[complex]) -> dict[str, tuple[Fraction, ...]]:
    """Return some numerators, up to the degree of the denominator."""
    rng = np.random.default_rng(len(poles))
    size = np.exp(np.mean(np.log([max(abs(p), 1.0) for p in poles]))) if poles else 1.0
    n = len(poles)
    rows = {
        "constant": [1.0] + [0.0] * n,
        "highest": [0.0] * n + [1.0],
        "any": list(rng.standard_normal(n + 1)),
        "mixed": [float(rng.standard_normal() / size**k) for k in range(n + 1)],
    }
    return {
        name: tuple(Fraction(value) for value in np.trim_zeros(row, "b"))
        for name, row in rows.items()
    }


@pytest.mark.parametrize("name", POLES)
def test_columns_give_their_transfer_functions(name: str) -> None:
    """c (s - a)^-1 b + d of the rounded matrices at 60 digits, to 1e-14 of the largest value.

    The last bit of |p| moves a resonance by that share of it, so a sharp one may be off by Q bits.
    """
    poles = POLES[name]
    sharpest = max((abs(p) / -p.real for p in poles if p.real < 0.0), default=1.0)
    share = 1e-14 + 2e-16 * sharpest
    numerators = _numerators(poles)
    a, c = state_matrix(poles)
    columns = input_columns(poles, numerators)
    frequencies = np.logspace(-8, 14, 45)
    with mp.workdps(60):
        inverses = [_inverse(a, c, 1j * w) for w in frequencies]
        for source, (b, d) in columns.items():
            true = np.array([_true(poles, numerators[source], 1j * w) for w in frequencies])
            found = np.array(
                [complex(sum(row[i] * b[i] for i in range(len(b))) + d) for row in inverses]
            )
            assert np.max(np.abs(found - true)) <= share * np.max(np.abs(true))


def _inverse(a: Any, c: Any, s: complex) -> Any:
    """Return c (s - a)^-1."""
    n = len(c)
    if n == 0:
        return []
    system = mp.mpc(s) * mp.eye(n) - mp.matrix(a.tolist())
    return list(mp.lu_solve(system.T, mp.matrix(c.tolist())))


def _true(poles: list[complex], numerator: tuple[Fraction, ...], s: complex) -> complex:
    top = mp.fsum(
        mp.mpf(value.numerator) / value.denominator * mp.mpc(s) ** k
        for k, value in enumerate(numerator)
    )
    bottom = mp.mpf(1)
    for pole in poles:
        bottom *= mp.mpc(s) - mp.mpc(pole)
    return complex(top / bottom)


@given(
    rates=st.lists(st.floats(-6.0, 9.0).map(lambda x: -(10.0**x)), min_size=1, max_size=8),
)
@settings(max_examples=50, deadline=None)
def test_matrix_is_lower_triangular_with_its_poles(rates: list[float]) -> None:
    """Real poles stand on the diagonal, slow ones first, each row as large as its own rate."""
    a, c = state_matrix([complex(rate) for rate in rates])
    np.testing.assert_array_equal(np.triu(a, 1), 0.0)
    np.testing.assert_array_equal(np.diag(a), sorted(rates, reverse=True))
    assert np.all(np.abs(a) <= 2.0 * np.abs(np.diag(a))[:, None])
    np.testing.assert_array_equal(c, 1.0)
