"""The values of a converter's input network."""

from __future__ import annotations

from typing import Any

import pytest

from frontend_sim.converter.adc import Adc
from frontend_sim.converter.input_network import InputNetwork
from frontend_sim.errors import ScenarioError

PARTS = {
    "switch_resistance": "1 kohm",
    "sampling_capacitance": "20 pF",
    "acquisition_time": "1 us",
}


def network(**keys: Any) -> InputNetwork:
    """Return an input network with some keys of its own."""
    return InputNetwork.model_validate({**PARTS, **keys})


@pytest.mark.parametrize(
    ("keys", "starts", "furthest"),
    [
        ({}, (1.0, 0.0, 0.0), 4.0),
        ({"holds": "zero"}, (0.0, 0.0, 0.0), 3.0),
        ({"holds": "mid-scale"}, (0.0, 1.0, 0.0), 2.0),
        ({"holds": "voltage", "held_voltage": "2 V"}, (0.0, 2.0, 0.0), 3.0),
        ({"precharge_share": "75 %"}, (0.25, 0.0, 0.75), 1.0),
        ({"holds": "mid-scale", "precharge_share": "75 %"}, (0.0, 0.25, 0.75), 0.5),
        ({"holds": "zero", "precharge_share": 1}, (0.0, 0.0, 1.0), 0.0),
    ],
)
def test_what_the_capacitor_starts_from(
    keys: dict[str, Any], starts: tuple[float, float, float], furthest: float
) -> None:
    """Start and largest step for a range from -1 V to 3 V, counted by hand."""
    made = network(**keys)
    assert made.starts(-1.0, 3.0) == starts
    assert made.furthest(-1.0, 3.0) == furthest


@pytest.mark.parametrize(
    ("keys", "message"),
    [
        ({"holds": "voltage"}, "needs held_voltage"),
        ({"held_voltage": "1 V"}, 'for holds = "voltage" only'),
        ({"switch_resistance": "0 ohm"}, "above 0 ohm"),
        ({"sampling_capacitance": "0 pF"}, "above 0 F"),
        ({"acquisition_time": "0 s"}, "above 0 s"),
        ({"precharge_share": "101 %"}, "most"),
        ({"source_resistance": "-1 ohm"}, "least"),
    ],
)
def test_values_that_cannot_be(keys: dict[str, Any], message: str) -> None:
    """Values without a meaning are refused with the reason."""
    with pytest.raises(ScenarioError, match=message):
        network(**keys)


@pytest.mark.parametrize(
    ("keys", "fits"),
    [
        ({"rate": 999e3}, True),
        ({"rate": 1e6}, False),
        ({"rate": 900e3, "aperture_jitter": 5e-9}, True),
        ({"rate": 900e3, "aperture_jitter": 10e-9}, False),
        ({"rate": 100e3, "averaging": {"count": 9, "interval": "1.1 us"}}, True),
        ({"rate": 100e3, "averaging": {"count": 9, "interval": "1 us"}}, False),
        ({"rate": 999e3, "rate_error": "0.2 %"}, False),
    ],
)
def test_an_acquisition_needs_room_between_looks(keys: dict[str, Any], fits: bool) -> None:
    """The acquisition of 1 us must be shorter than the least interval less jitter."""
    values = {"bits": 12, "high": 1.0, "input": PARTS, **keys}
    if fits:
        Adc.model_validate(values)
        return
    with pytest.raises(ScenarioError, match="acquisition_time 1 us must be shorter"):
        Adc.model_validate(values)
