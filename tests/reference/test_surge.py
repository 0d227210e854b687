"""The published time constants of the 1.2/50 us lightning impulse."""

from __future__ import annotations

import pytest

from frontend_sim.stimulus.double_exponential import shape_of


def test_lightning_impulse() -> None:
    """1.2/50 us: 68.2 us, 0.405 us and a factor of 1.037 to a peak of one.

    Source: common tables of the impulse of IEC 60060-1 (from memory).
    """
    shape = shape_of(1.2e-6, 50e-6)
    assert shape.decay == pytest.approx(68.2e-6, abs=0.05e-6)
    assert shape.rise == pytest.approx(0.405e-6, abs=0.0005e-6)
    assert 1.0 / shape.height == pytest.approx(1.037, abs=0.0005)
