"""What a stage refuses: parameters that contradict each other or give no circuit."""

from __future__ import annotations

from typing import Any

import pytest

from frontend_sim.analog.stages import STAGES
from frontend_sim.errors import ScenarioError

WRONG: list[tuple[str, dict[str, Any], str]] = [
    ("rc-lowpass", {"resistance": 0, "capacitance": 1e-9}, "above 0"),
    ("rc-highpass", {"resistance": 1e3, "capacitance": "-1 nF"}, "above 0"),
    ("rc-lowpass", {"resistance": 1e3}, "missing"),
    ("gain", {"gain": "5 V"}, "ratio"),
    ("noninverting-amplifier", {}, "give either gain, or feedback_resistance"),
    ("noninverting-amplifier", {"gain": 0.5}, "greater than or equal to 1"),
    ("noninverting-amplifier", {"gain": 2, "ground_resistance": 1e3}, "give either gain"),
    ("noninverting-amplifier", {"feedback_resistance": 1e3}, "together"),
    ("inverting-amplifier", {"gain": 2}, "less than 0"),
    ("inverting-amplifier", {"feedback_resistance": 1e3}, "together"),
    ("second-order", {"corner": 1e3, "quality_factor": 0}, "above 0"),
    ("butterworth", {"order": 0, "corner": 1e3}, "greater than or equal to 1"),
    ("butterworth", {"order": 13, "corner": 1e3}, "less than or equal to 12"),
    ("butterworth", {"order": 2.5, "corner": 1e3}, "valid integer"),
    ("butterworth", {"order": 2}, "needs corner alone"),
    (
        "bessel",
        {"order": 2, "corner": 1e3, "response": "band-pass"},
        "needs lower_corner and upper",
    ),
    ("bessel", {"order": 2, "corner": 1e3, "lower_corner": 10.0}, "needs corner alone"),
    (
        "chebyshev",
        {"order": 2, "response": "band-stop", "lower_corner": 2e3, "upper_corner": 1e3},
        "must lie below upper_corner",
    ),
    ("chebyshev", {"order": 2, "corner": 1e3, "ripple": 0}, "above 0"),
    ("poles-zeros", {"poles": [-1.0], "zeros": [-1.0, -2.0]}, "2 zeros stand against 1 pole;"),
    ("poles-zeros", {"poles": [[-1.0, 2.0]]}, "without its conjugate"),
    ("poles-zeros", {"poles": [True]}, "valid tuple"),
    ("polynomial", {"numerator": [1.0], "denominator": [0.0, 0.0]}, "denominator is zero"),
    ("polynomial", {"numerator": [1.0, 0.0, 0.0], "denominator": [1.0, 5.0]}, "2 zeros stand"),
    ("polynomial", {"numerator": [], "denominator": [1.0]}, "at least 1 item"),
    ("transport-delay", {"delay": "-1 us"}, "at least 0"),
]


@pytest.mark.parametrize(("kind", "values", "message"), WRONG)
def test_what_makes_no_circuit_is_refused(kind: str, values: dict[str, Any], message: str) -> None:
    """Each contradiction is told in words of its own."""
    with pytest.raises(ScenarioError, match=message):
        STAGES[kind].model_validate({"kind": kind, **values})


@pytest.mark.parametrize("kind", STAGES)
def test_unknown_keys_are_refused(kind: str) -> None:
    """A key that a kind does not know is never passed over."""
    with pytest.raises(ScenarioError, match="unknown here"):
        STAGES[kind].model_validate({"kind": kind, "resistence": 1.0})


def test_a_stage_is_a_frozen_value() -> None:
    """Equal parameters make equal stages, which can be hashed and not be changed."""
    one, other = (STAGES["gain"].model_validate({"gain": 2.0}) for _ in range(2))
    assert one == other
    assert hash(one) == hash(other)
    with pytest.raises(ScenarioError, match="gain: a value is frozen"):
        one.gain = 3.0  # type: ignore[attr-defined]  # the attempt is the test
