"""The stimulus is the physical quantity that the first stage takes."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from frontend_sim.errors import ModelError, RecordingError, ScenarioError
from frontend_sim.scenario import Scenario, check_scenario, parse_scenario, scenario_text
from frontend_sim.scenario.signal import UnitError, signal_units
from frontend_sim.simulation import simulate

END = '[adc]\nrate = "1 kHz"\nbits = 16\nhigh = "5 V"\n[simulation]\nduration = "10 ms"\n'
RTD = '[[chain]]\nkind = "rtd"\nname = "probe"\nexcitation_current = "1 mA"\n'
LAG = '[[chain]]\nkind = "thermal-lag"\ntime_constant = "1 s"\n'
DELAY = '[[chain]]\nkind = "transport-delay"\ndelay = "1 ms"\n'
BRIDGE = (
    '[[chain]]\nkind = "resistive-bridge"\nsensitivity = "2 mV/V"\nfull_scale = "10 bar"\n'
    'excitation = "5 V"\n'
)
DIODE = '[[chain]]\nkind = "photodiode"\nresponsivity = "0.6 A/W"\n'
TRANSIMPEDANCE = '[[chain]]\nkind = "transimpedance-amplifier"\nfeedback_resistance = "1 Mohm"\n'
AMPLIFIER = '[[chain]]\nkind = "noninverting-amplifier"\ngain = 2\n'


def scenario(stimulus: str, chain: str) -> Scenario:
    """Return a scenario from the text of its stimulus and its chain."""
    return parse_scenario(f"[stimulus]\n{stimulus}\n{chain}{END}", ".", "a.toml")


STEP = 'kind = "step"\nbefore = "20 degC"\nafter = "50 degC"'


@pytest.mark.parametrize(
    ("stimulus", "chain", "units"),
    [
        ('kind = "step"\nafter = "1 V"', "", ("V",)),
        ('kind = "step"\nafter = "1 V"', DELAY + AMPLIFIER, ("V", "V", "V")),
        (STEP, RTD, ("K", "V")),
        (STEP, LAG + RTD + AMPLIFIER, ("K", "K", "V", "V")),
        (STEP, DELAY + LAG + RTD, ("K", "K", "K", "V")),
        ('kind = "step"\nafter = "3 bar"', BRIDGE, ("Pa", "V")),
        ('kind = "step"\nafter = "3 kN"', BRIDGE.replace("10 bar", "10 kN"), ("N", "V")),
        ('kind = "step"\nafter = "2 g"', BRIDGE.replace("10 bar", "10 g"), ("m/s^2", "V")),
        ('kind = "step"\nafter = "100 ppm"', BRIDGE.replace("10 bar", "0.2 %"), ("", "V")),
        ('kind = "step"\nafter = "1 uW"', DIODE + TRANSIMPEDANCE, ("W", "A", "V")),
        ('kind = "step"\nafter = "1 uA"', TRANSIMPEDANCE, ("A", "V")),
    ],
)
def test_units_follow_the_chain(stimulus: str, chain: str, units: tuple[str, ...]) -> None:
    """Each point has its unit, and the units come back from a file and from plain data."""
    found = scenario(stimulus, chain)
    assert found.units() == units
    assert found.stimulus_unit == units[0]
    for again in (parse_scenario(scenario_text(found)), Scenario.model_validate(found.resolved())):
        assert again.units() == units
        assert again.resolved() == found.resolved()


@pytest.mark.parametrize(
    ("chain", "position", "message"),
    [
        (LAG, 0, "gives a temperature (K), but the converter takes a voltage (V)"),
        (DIODE, 0, "put a transimpedance-amplifier"),
        (
            RTD + LAG + RTD.replace("probe", "other"),
            0,
            "'probe' gives a voltage (V), but '2 thermal-lag' takes",
        ),
        (AMPLIFIER + TRANSIMPEDANCE, 0, "but '2 transimpedance-amplifier' takes a current (A)"),
        (LAG + AMPLIFIER, 0, "put a sensor between them: rtd, thermistor"),
        (LAG + DELAY + AMPLIFIER, 0, "but '3 noninverting-amplifier' takes a voltage"),
    ],
)
def test_stages_that_do_not_fit_are_told(chain: str, position: int, message: str) -> None:
    """A stage that gives another quantity than the next one takes is named, with what to do."""
    with pytest.raises(ScenarioError) as caught:
        scenario('kind = "step"\nafter = 1', chain)
    assert message in str(caught.value)
    assert f"chain[{position + 1}]" in str(caught.value)


WRONG = [
    ('kind = "step"\nbefore = "20 degC"\nafter = "1 V"', RTD,
     ["stimulus.after", "'V' is a unit of voltage", "'probe' takes a temperature (K)"]),
    ('kind = "step"\nbefore = "20 degC"\nafter = "-300 degC"', RTD,
     ["stimulus.after", 'given "-300 degC"', "absolute zero"]),
    ('kind = "step"\nbefore = "20 degC"\nafter = -1.0', RTD, ["stimulus.after", "absolute zero"]),
    ('kind = "step"\nafter = "20 degC"', RTD,
     ["stimulus.before", "0 K, absolute zero", 'add for instance before = "25 degC"']),
    ('kind = "sine"\namplitude = "5 K"\nfrequency = 1', RTD,
     ["stimulus", "swings around 0 K", "give offset"]),
    ('kind = "noise-burst"\nrms = "5 K"\nbandwidth = 1\nlength = 1', RTD,
     ["swings around 0 K", "add it to a step in a sum"]),
    ('kind = "ramp"\nbefore = "20 degC"\nslope = "2 V/s"', RTD,
     ["stimulus.slope", "expected a slope", '"2 K/s"']),
    ('kind = "step"\nafter = "2 bar"', AMPLIFIER,
     ["stimulus.after", "'bar' is a unit of pressure", "expected a voltage"]),
    ('kind = "step"\nafter = "2 V"', BRIDGE,
     ["stimulus.after", "expected a pressure", "'1 resistive-bridge' takes a pressure (Pa)"]),
    ('kind = "step"\nafter = "2 V"', DELAY + BRIDGE, ["'2 resistive-bridge' takes a pressure"]),
    ('kind = "tones"\n[[stimulus.tone]]\namplitude = "1 A"\nfrequency = 1', AMPLIFIER,
     ["stimulus.tone[1].amplitude", "a unit of current"]),
    ('kind = "sum"\n[[stimulus.term]]\nkind = "step"\nafter = "1 A"', AMPLIFIER,
     ["stimulus.term[1].after (step)", "a unit of current"]),
    ('kind = "sum"\nterm = [{kind = "step", before = 300.0, after = "50 degC"}, '
     '{kind = "sine", amplitude = "5 K", frequency = 1, offset = "10 degC"}]', RTD,
     ["stimulus.term[2]", "added in K", "give this one as differences"]),
    ('kind = "sum"\nterm = [{kind = "pulse", high = "50 degC", width = 1}, '
     '{kind = "sine", amplitude = "5 K", frequency = 1}]', RTD,
     ["stimulus.term[1].low", "0 K, absolute zero"]),
    ('kind = "recording"\nfile = "x.csv"\nrate = 1\nunit = "bar"', AMPLIFIER,
     ["stimulus.unit", "not a unit of voltage", "mV"]),
    ('kind = "recording"\nfile = "x.csv"\nrate = 1\nunit = "mV"', RTD,
     ["stimulus.unit", "not a unit of temperature", "degC"]),
    ('kind = "recording"\nfile = "x.csv"\nrate = 1\noffset = "1 V"', RTD, ["stimulus.offset"]),
]  # fmt: skip


@pytest.mark.parametrize(("stimulus", "chain", "parts"), WRONG)
def test_a_stimulus_of_another_quantity_is_told(
    stimulus: str, chain: str, parts: list[str]
) -> None:
    """The message names the key, the unit given, and what the first sensor takes."""
    with pytest.raises(ScenarioError) as caught:
        scenario(stimulus, chain)
    for part in parts:
        assert part in str(caught.value)
    assert len(caught.value.problems) == 1


def test_all_wrong_units_are_told_at_once() -> None:
    """Each with its line."""
    with pytest.raises(ScenarioError) as caught:
        scenario('kind = "step"\nbefore = "1 A"\nafter = "1 W"', AMPLIFIER)
    assert [problem.key for problem in caught.value.problems] == [
        "stimulus.before",
        "stimulus.after",
    ]
    assert [problem.line for problem in caught.value.problems] == [3, 4]


def test_rest_is_no_temperature() -> None:
    """Before the run a probe at rest would be at absolute zero."""
    with pytest.raises(ScenarioError, match="0 K, absolute zero"):
        parse_scenario(f'[stimulus]\n{STEP}\n{RTD}{END}initial = "rest"\n')


def test_differences_are_counted_from_another_term() -> None:
    """A sum of a temperature and a swing is a temperature."""
    found = scenario(
        'kind = "sum"\nterm = [{kind = "step", before = "20 degC", after = "50 degC"}, '
        '{kind = "sine", amplitude = "5 degC", frequency = 1}]',
        RTD,
    )
    assert Scenario.model_validate(found.resolved()).resolved() == found.resolved()
    assert parse_scenario(scenario_text(found)).resolved() == found.resolved()
    run = simulate(found)
    assert run.pin[0] == pytest.approx(0.1 * (1 + 3.9083e-3 * 50 - 5.775e-7 * 2500), rel=1e-12)


def test_numbers_of_a_recording_are_in_degrees(tmp_path: Path) -> None:
    """A unit that is given, or that the file states, counts from its own zero; else it is K."""
    rows = "t,x\ns,degC\n" + "".join(f"{n},{20 + n}\n" for n in range(5))
    (tmp_path / "stated.csv").write_text(rows)
    (tmp_path / "bare.csv").write_text(rows.replace("s,degC\n", ""))
    pins = []
    for keys in (
        'file = "stated.csv"',
        'file = "bare.csv"\nunit = "degC"',
        'file = "bare.csv"\noffset = "273.15 K"',
        'file = "bare.csv"\nunit = "degF"\nscale = 1.8\noffset = "17.777777777777779 K"',
    ):
        text = f'[stimulus]\nkind = "recording"\ntime = "t"\n{keys}\n{RTD}' + END.replace(
            "1 kHz", "1 Hz"
        ).replace('duration = "10 ms"', 'duration = "4 s"')
        found = parse_scenario(text, tmp_path)
        check_scenario(found)
        pins.append(simulate(found).pin)
    celsius = [20.0, 21.0, 22.0, 23.0]
    expected = [0.1 * (1 + 3.9083e-3 * t - 5.775e-7 * t * t) for t in celsius]
    for pin in pins:
        assert pin == pytest.approx(expected, rel=1e-12)


def test_a_recording_learns_the_unit_of_a_changed_chain(tmp_path: Path) -> None:
    """A copy with another chain reads the same file in the new unit."""
    (tmp_path / "a.csv").write_text("t,x\ns,degC\n0,20\n1,21\n2,22\n")
    text = '[stimulus]\nkind = "recording"\ntime = "t"\nfile = "a.csv"\n'
    volts = parse_scenario(text + AMPLIFIER + END, tmp_path)
    kelvins = volts.model_copy(update={"chain": scenario(STEP, RTD).chain})
    with pytest.raises(RecordingError, match="unit 'degC', which is no voltage"):
        volts.stimulus.notes()
    assert any("read in degC" in note for note in kelvins.stimulus.notes())
    assert volts.stimulus_unit == "V"
    assert kelvins.stimulus_unit == "K"


def test_a_probe_far_beyond_its_range_is_told() -> None:
    """A bare number is in kelvin: 25 K are far below what a platinum thermometer is made for."""
    found = scenario('kind = "step"\nbefore = 25.0\nafter = 30.0', RTD)
    with pytest.raises(
        ModelError, match=r"'probe' gets -248.15 degC, far beyond the sensor's range"
    ):
        simulate(found)


def test_units_of_stages_made_in_python(tmp_path: Path) -> None:
    """The function needs no scenario."""
    stages: Any = scenario(STEP, LAG + RTD).chain
    assert signal_units(stages) == ("K", "K", "V")
    assert signal_units(()) == ("V",)
    with pytest.raises(UnitError):
        signal_units(stages[:1])
