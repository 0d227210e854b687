"""Notes on amplifiers that are too slow for the signal, and on currents that meet no resistance."""

from __future__ import annotations

from typing import Any

import pytest

from frontend_sim.measure.response import inspect_scenario
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate

AMPLIFIER = {"kind": "noninverting-amplifier", "gain": 20, "gain_bandwidth": "1 MHz"}
LOW = {"kind": "rc-lowpass", "resistance": "10 kohm", "capacitance": "1 nF"}
CURRENTS = {"kind": "buffer", "bias_current": "100 nA", "current_noise": "1 pA/sqrt(Hz)"}
DIVIDER = {
    "kind": "ladder",
    "element": [
        {"place": "series", "resistance": "30 kohm"},
        {"place": "shunt", "resistance": "10 kohm"},
    ],
}


def scenario(stimulus: dict[str, Any], *chain: dict[str, Any]) -> Scenario:
    """Make an invented scenario."""
    return Scenario.model_validate(
        {
            "stimulus": stimulus,
            "chain": chain,
            "adc": {"rate": "20 kHz", "bits": 12, "low": "-5 V", "high": "5 V"},
            "simulation": {"duration": "1 ms"},
        }
    )


def sine(frequency: float) -> dict[str, Any]:
    """Return a sine of 10 mV."""
    return {"kind": "sine", "amplitude": 0.01, "frequency": frequency}


CHIRP = {
    "kind": "chirp", "amplitude": 0.01, "start_frequency": "100 kHz", "stop_frequency": "1 kHz",
    "length": "1 ms",
}  # fmt: skip
TONES = {
    "kind": "tones",
    "tone": [{"amplitude": 0.01, "frequency": 1e3}, {"amplitude": 0.01, "frequency": 1e5}],
}


@pytest.mark.parametrize(
    "stimulus", [sine(1e5), CHIRP, TONES, {"kind": "sum", "term": [sine(1e3), TONES]}]
)
def test_a_signal_above_the_closed_loop_is_named(stimulus):
    """Both frequencies and the cure are told, by a run and by an inspection."""
    values = scenario(stimulus, AMPLIFIER)
    for notes in (simulate(values).notes, inspect_scenario(values).notes):
        (note,) = [each for each in notes if "closed-loop" in each]
        for part in ("100 kHz", "50 kHz", "gain_bandwidth 1 MHz", "noise gain 20", "20 MHz"):
            assert part in note


@pytest.mark.parametrize("stimulus", [sine(49e3), {"kind": "step", "after": 0.01}])
def test_a_slower_signal_is_not(stimulus):
    """Below the closed-loop bandwidth there is nothing to tell; a step names no frequency."""
    assert not [n for n in simulate(scenario(stimulus, AMPLIFIER)).notes if "closed-loop" in n]


@pytest.mark.parametrize(
    ("before", "parts"),
    [
        (LOW, ("10 kohm", "makes 1 mV", "10 nV/sqrt(Hz)")),
        (DIVIDER, ("7.5 kohm", "makes 750 uV", "7.5 nV/sqrt(Hz)")),
    ],
)
def test_currents_behind_a_passive_stage_are_told_with_their_size(before, parts):
    """Bias current and current noise through the resistance at rest of the stage before."""
    values = scenario(sine(1e3), before, CURRENTS)
    for notes in (simulate(values).notes, inspect_scenario(values).notes):
        (note,) = [each for each in notes if "source_resistance" in each]
        for part in parts:
            assert part in note


def test_a_source_resistance_that_is_given_needs_no_note():
    """The currents then flow through it and are counted."""
    values = scenario(sine(1e3), LOW, CURRENTS | {"source_resistance": "10 kohm"})
    assert not [note for note in simulate(values).notes if "stands behind" in note]


def test_noise_at_a_rail_is_told():
    """Noise is that of the linear circuit; without noise, or away from rails, nothing is told."""
    rails = {
        "kind": "noninverting-amplifier", "gain": 2, "gain_bandwidth": "1 MHz",
        "voltage_noise": "10 nV/sqrt(Hz)", "output_low": "-1 V", "output_high": "1 V",
    }  # fmt: skip
    loud = scenario({"kind": "sine", "amplitude": 1.0, "frequency": 1e3}, rails)
    soft = scenario({"kind": "sine", "amplitude": 0.1, "frequency": 1e3}, rails)
    quiet = loud.model_copy(
        update={"simulation": loud.simulation.model_copy(update={"noise": False})}
    )
    told = [
        any("at a limit" in note for note in simulate(each).notes) for each in (loud, soft, quiet)
    ]
    assert told == [True, False, False]


def test_no_conversion_names_when_the_first_is_done():
    """An oversampling converter gives its first code later than adc.first."""
    with pytest.raises(ValueError, match=r"the first is done at 1.999\d* ms"):
        Scenario.model_validate(
            {
                "stimulus": sine(1e3),
                "adc": {
                    "kind": "oversampling", "modulator_rate": "1 MHz", "data_rate": "2 kHz",
                    "order": 4, "bits": 16, "high": "3 V",
                },
                "simulation": {"duration": "1 ms"},
            }
        )  # fmt: skip
