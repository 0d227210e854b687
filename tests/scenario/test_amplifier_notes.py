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


SENSORS = [
    # R p (1 - p) + R_w, beside the load: 2.6 kohm and 10 kohm.
    (
        {"kind": "potentiometer", "resistance": "10 kohm", "excitation_voltage": "3 V",
         "wiper_resistance": "100 ohm", "load_resistance": "10 kohm"},
        "50 %", "2.063 kohm", "206 uV",
    ),
    (
        {"kind": "resistive-bridge", "resistance": "350 ohm", "sensitivity": "2 mV/V",
         "full_scale": "10 bar", "excitation": "5 V"},
        "1 bar", "350 ohm", "35 uV",
    ),
    # 10 kohm at 25 degC, beside 30 kohm.
    (
        {"kind": "thermistor", "nominal_resistance": "10 kohm", "beta": "3950 K",
         "excitation_voltage": "3 V", "series_resistance": "30 kohm"},
        "25 degC", "7.5 kohm", "750 uV",
    ),
    # 100 ohm at 0 degC, fed by a current; and with two leads beside a divider's resistor.
    (
        {"kind": "rtd", "excitation_current": "1 mA", "operating_temperature": "0 degC"},
        "25 degC", "100 ohm", "10 uV",
    ),
    (
        {"kind": "rtd", "excitation_voltage": "1 V", "series_resistance": "102 ohm",
         "wiring": "two-wire", "lead_resistance": "1 ohm", "operating_temperature": "0 degC"},
        "25 degC", "51 ohm", "5.1 uV",
    ),
    ({"kind": "thermocouple", "type": "K", "resistance": "20 ohm"}, "25 degC", "20 ohm", "2 uV"),
    (
        {"kind": "ac-coupled-source", "capacitance": "1 uF", "source_resistance": "1 kohm",
         "load_resistance": "100 kohm"},
        "1 V", "100 kohm", "10 mV",
    ),
    (
        {"kind": "photodiode", "responsivity": "0.5 A/W", "load_resistance": "10 kohm"},
        "1 uW", "10 kohm", "1 mV",
    ),
    (
        {"kind": "current-shunt", "resistance": "10 mohm", "filter_resistance": "100 ohm",
         "filter_capacitance": "1 nF"},
        "1 A", "100 ohm", "10 uV",
    ),
    ({"kind": "clamp", "high": "3 V", "resistance": "1 kohm"}, "1 V", "1 kohm", "100 uV"),
    # An inductance at the output, whose impedance has no bound, is none at rest.
    (
        {"kind": "ladder", "element": [
            {"place": "series", "resistance": "1 kohm"},
            {"place": "shunt", "capacitance": "1 nF"},
            {"place": "series", "inductance": "10 uH", "series_resistance": "2 ohm"}]},
        "1 V", "1.002 kohm", "100 uV",
    ),
]  # fmt: skip


@pytest.mark.parametrize(("sensor", "level", "ohms", "volts"), SENSORS)
def test_currents_through_the_resistance_of_a_sensor_are_told(sensor, level, ohms, volts):
    """100 nA through what each has in the file."""
    values = scenario({"kind": "step", "before": level, "after": level}, sensor, CURRENTS)
    (note,) = [each for each in inspect_scenario(values).notes if "stands behind" in each]
    assert f"whose resistance is {ohms}: at the input its bias current of 100 nA makes {volts}" in (
        note
    )


def behind(amplifier: dict[str, Any], before: dict[str, Any] = LOW) -> list[str]:
    """Return what is told of an amplifier with input currents behind 10 kohm."""
    values = scenario(sine(1e3), before, {**CURRENTS, **amplifier})
    return [each for each in inspect_scenario(values).notes if "is not in its circuit" in each]


FILTER = {"resistance_1": "10 kohm", "resistance_2": "10 kohm", "capacitance_1": "10 nF",
          "capacitance_2": "4.7 nF"}  # fmt: skip
INVERTING = {"kind": "inverting-amplifier", "input_resistance": "10 kohm",
             "feedback_resistance": "100 kohm"}  # fmt: skip
DIFFERENCE = {"kind": "difference-amplifier", "input_resistance": "10 kohm",
              "feedback_resistance": "100 kohm", "noninverting_input_resistance": "10 kohm",
              "reference_resistance": "100 kohm"}  # fmt: skip


@pytest.mark.parametrize(
    ("amplifier", "parts"),
    [
        # -100 / 20, while the bias current goes through the feedback resistor as before.
        (INVERTING, ("gain at rest is -5 instead of -10;", "add 10 kohm to its input_resistance")),
        # Half of 10 kohm at each input: 100 / 15 of the difference.
        (DIFFERENCE, ("gain at rest is 6.6667 instead of 10;", ": with it", "put a buffer")),
        # A gain of one; 100 nA and 1 pA/sqrt(Hz) through 10 kohm.
        (
            {"kind": "sallen-key", **FILTER},
            ("bias current of 100 nA adds 1 mV", "up to 10 nV/sqrt(Hz)", "to its resistance_1"),
        ),
        # More by the gain of the section.
        (
            {"kind": "sallen-key", **FILTER, "feedback_resistance": "1 kohm",
             "ground_resistance": "2 kohm"},
            ("bias current of 100 nA adds 1.5 mV", "to its resistance_1"),
        ),
        # Stable below K = 1 + (R1 + R2)/R1: 12 by itself, 2.9 with 11 kohm for R1.
        (
            {"kind": "sallen-key", "resistance_1": "1 kohm", "resistance_2": "10 kohm",
             "capacitance_1": "10 nF", "capacitance_2": "10 nF",
             "feedback_resistance": "30 kohm", "ground_resistance": "10 kohm"},
            ("with it the circuit is unstable", "would oscillate", "put a buffer"),
        ),
    ],
)  # fmt: skip
def test_what_a_resistance_before_an_amplifier_would_do(amplifier, parts):
    """Gain and currents at rest, with the source's resistance in the circuit, and the cure."""
    (note,) = behind(amplifier)
    for part in ("whose resistance of 10 kohm", *parts):
        assert part in note


@pytest.mark.parametrize(
    ("amplifier", "before"),
    [
        # Ideal resistances that load nothing; a capacitor in front; a source that drives.
        ({"kind": "inverting-amplifier", "gain": -10}, LOW),
        ({"kind": "sallen-key", "response": "high-pass", **FILTER}, LOW),
        (INVERTING, {"kind": "buffer"}),
        # 10 ohm beside 10 kohm change the gain by 0.1 %, and by less than that beside 1 Mohm.
        (
            {"kind": "inverting-amplifier", "input_resistance": "1 Mohm",
             "feedback_resistance": "1 Mohm"},
            {**LOW, "resistance": "10 ohm"},
        ),
    ],
)  # fmt: skip
def test_what_loads_nothing_is_not_told(amplifier, before):
    """No note where nothing changes at rest."""
    assert behind(amplifier, before) == []


def test_behind_a_capacitor_the_gain_is_not_that_at_rest():
    """A high pass has its resistance for currents alone: signals see the capacitor beside it."""
    high = {"kind": "rc-highpass", "resistance": "10 kohm", "capacitance": "1 uF"}
    assert behind(INVERTING, high) == []
    (note,) = behind({"kind": "sallen-key", **FILTER}, high)
    assert "adds 1 mV" in note
    assert "gain" not in note


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
