"""Amplifier data that contradict each other are named, with what to do."""

from __future__ import annotations

from typing import Any

import pytest

from frontend_sim.analog.limits import AmplifierLimits
from frontend_sim.analog.stages import STAGES
from frontend_sim.analog.stages.amplifier_stage import AmplifierStage

Values = dict[str, Any]

BUFFER: Values = {"kind": "buffer"}
GAINED: Values = {"kind": "noninverting-amplifier", "gain": 10}
INVERTING: Values = {"kind": "inverting-amplifier", "gain": -10}
DIODE: Values = {"kind": "transimpedance-amplifier", "feedback_resistance": 1e6}

REFUSED: list[tuple[Values, str]] = [
    ({**BUFFER, "second_pole": 1e6}, "second_pole has no effect without gain_bandwidth or open"),
    ({**BUFFER, "output_resistance": 100}, "output_resistance has no effect without gain_band"),
    ({**BUFFER, "gain_bandwidth": 1e6, "load_capacitance": 1e-9}, "without output_resistance"),
    ({**BUFFER, "gain_bandwidth": 1e6, "load_resistance": 1e3}, "without output_resistance"),
    ({**BUFFER, "voltage_noise_corner": 10}, "voltage_noise_corner has no effect without volt"),
    ({**BUFFER, "current_noise_corner": 10}, "current_noise_corner has no effect without curr"),
    ({**BUFFER, "output_low": 3, "output_high": "0.1 V"}, "rails are reversed"),
    ({**BUFFER, "output_low": 1, "output_high": 1}, "rails are reversed"),
    ({**BUFFER, "slew_rate": "0 V/us"}, "above 0"),
    ({**BUFFER, "slew_rate": "-1 V/us"}, "above 0"),
    ({**BUFFER, "slew_rate": "1 V"}, "slope"),
    ({**BUFFER, "gain_bandwidth": 0}, "above 0"),
    ({**BUFFER, "source_resistance": "-1 kohm"}, "above 0"),
    ({**BUFFER, "voltage_noise": "-1 nV/sqrt(Hz)"}, "at least 0"),
    ({**BUFFER, "voltage_noise": "10 nV"}, "noise density"),
    ({**BUFFER, "current_noise": "1 nV/sqrt(Hz)"}, "current noise density"),
    ({**BUFFER, "bias_current": "1 V"}, "current"),
    ({**BUFFER, "offset_drift": "1 mV"}, "drift of a voltage"),
    ({**BUFFER, "open_loop_gain": 0.9}, "open_loop_gain 0.9 must be above the gain 1"),
    ({**GAINED, "open_loop_gain": "20 dB"}, "open_loop_gain 10 must be above the gain 10"),
    ({**INVERTING, "open_loop_gain": 11}, "open_loop_gain 11 must be above the gain 11"),
    ({**GAINED, "feedback_capacitance": 1e-9}, "feedback_capacitance needs feedback_resistance"),
    ({**INVERTING, "feedback_capacitance": 1e-9}, "feedback_capacitance needs feedback_resistance"),
    ({"kind": "difference-amplifier", "input_resistance": 1e3}, "feedback_resistance: missing"),
    ({**DIODE, "feedback_resistance": "0 ohm"}, "above 0"),
    (
        {**DIODE, "input_capacitance": 1e-9, "gain_bandwidth": 1e6, "second_pole": 1e5},
        "no phase margin.*right half plane.*capacitance across the feedback resistor",
    ),
]


@pytest.mark.parametrize(("values", "message"), REFUSED)
def test_wrong_data_are_named(values: Values, message: str) -> None:
    """One message each, which names the key and its cure."""
    with pytest.raises(ValueError, match=message):
        STAGES[values["kind"]].model_validate(values)


AMPLIFIERS = [kind for kind, stage in STAGES.items() if issubclass(stage, AmplifierStage)]


@pytest.mark.parametrize("kind", AMPLIFIERS)
def test_every_amplifier_has_the_same_data(kind: str) -> None:
    """The keys of the amplifier stand in one base class, and none of them is written twice."""
    own = set(STAGES[kind].__annotations__)
    assert set(AmplifierStage.model_fields) <= set(STAGES[kind].model_fields)
    assert not own & set(AmplifierStage.model_fields) - {"kind", "name"}


def test_limits_are_those_of_the_keys() -> None:
    """Slew rate and rails reach whoever steps the nonlinear amplifier; none is an open range."""
    stage = STAGES["buffer"].model_validate(
        {**BUFFER, "slew_rate": "2 V/us", "output_low": "20 mV", "output_high": "3.2 V"}
    )
    assert stage.limits() == AmplifierLimits(2e6, 0.02, 3.2)
    assert STAGES["buffer"].model_validate(BUFFER).limits() == AmplifierLimits()
    assert STAGES["buffer"].model_validate(BUFFER).limiter() is None
