"""The types of a record's columns."""

from __future__ import annotations

import pytest
from archived import scenario

from frontend_sim.archive.layout import code_type


@pytest.mark.parametrize(
    ("bits", "low", "code", "expected"),
    [
        (4, 0.0, "straight-binary", "<u1"),
        (8, 0.0, "straight-binary", "<u1"),
        (8, -1.0, "twos-complement", "<i1"),
        (9, -1.0, "twos-complement", "<i2"),
        (12, -1.0, "offset-binary", "<u2"),
        (16, -1.0, "twos-complement", "<i2"),
        (17, 0.0, "straight-binary", "<u4"),
        (32, 0.0, "straight-binary", "<u4"),
        (32, -1.0, "twos-complement", "<i4"),
    ],
)
def test_codes_take_the_smallest_type(bits: int, low: float, code: str, expected: str) -> None:
    """Each width and each way of counting has the smallest integer that holds all its codes."""
    adc = {"rate": 1e3, "bits": bits, "low": low, "high": 1.0, "code": code}
    assert code_type(scenario(adc=adc).adc) == expected
