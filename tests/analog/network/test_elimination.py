"""Exact elimination: determinant and solution against numpy and against themselves."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.analog.network.elimination import solved


@given(data=st.data(), size=st.integers(1, 6))
@settings(max_examples=100, deadline=None)
def test_any_sparse_system(data: Any, size: int) -> None:
    """M x = r holds exactly, and the determinant is that of numpy; a singular one gives None."""
    entries = st.integers(-4, 4).map(lambda value: value if abs(value) < 4 else 0)
    matrix = [[data.draw(entries) for _ in range(size)] for _ in range(size)]
    right = [Fraction(data.draw(entries), 3) for _ in range(size)]
    rows = [{j: Fraction(v) for j, v in enumerate(row) if v} for row in matrix]
    found = solved(rows, list(right))
    determinant = round(float(np.linalg.det(np.array(matrix, dtype=float))))
    if found is None:
        assert determinant == 0
        return
    assert found[0] == determinant
    for row, value in zip(matrix, right, strict=True):
        assert sum((v * x for v, x in zip(row, found[1], strict=True)), Fraction(0)) == value
