"""Numbers in the sentences that say what to change first."""

from __future__ import annotations

import pytest

from frontend_sim.measure.checks import words


@pytest.mark.parametrize(
    ("factor", "text"),
    [(0.0004, "100 %"), (1.996, "100 %"), (0.88, "12 %"), (1.0234, "2.3 %"), (1.0, "0.1 %"),
     (3.456, "a factor of 3.46")],
)  # fmt: skip
def test_percent_has_no_power_of_ten(factor: float, text: str) -> None:
    """Two digits, and three where they are 100."""
    assert words.percent(factor) == text
