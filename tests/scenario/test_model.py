"""Rules between keys, for scenarios made in Python and in files alike."""

from __future__ import annotations

from typing import Any

import pytest

from frontend_sim.errors import ScenarioError
from frontend_sim.scenario import Scenario, SimulationSettings, parse_scenario, scenario_notes

STEP = {"kind": "step", "after": 1.0}
GAIN = {"kind": "gain", "gain": 2.0}
ADC = {"rate": 1e3, "bits": 8, "high": 1.0}


def scenario(**changes: Any) -> Scenario:
    """Make a small scenario."""
    return Scenario.model_validate(
        {"stimulus": STEP, "adc": ADC, "simulation": {"duration": 1.0}, **changes}
    )


def test_prewarp_goes_with_bilinear_below_half_the_grid_rate() -> None:
    """It is refused elsewhere; without a grid rate its limit is not known yet."""
    settings = SimulationSettings(discretization="bilinear", prewarp=1e3)
    assert settings.prewarp == 1e3
    SimulationSettings(discretization="bilinear", prewarp=1e3, grid_rate=2001.0)
    with pytest.raises(ScenarioError, match="half the grid_rate, 1 kHz"):
        SimulationSettings(discretization="bilinear", prewarp=1e3, grid_rate=2000.0)
    for other in ("exact", "zoh", "foh"):
        with pytest.raises(ScenarioError, match='not for "' + other):
            SimulationSettings.model_validate({"discretization": other, "prewarp": 1e3})


def test_auto_is_the_same_as_leaving_the_grid_rate_out() -> None:
    """Both let the program pick."""
    assert SimulationSettings.model_validate({"grid_rate": "auto"}) == SimulationSettings()
    assert SimulationSettings.model_validate({"grid_rate": "1 MHz"}).grid_rate == 1e6


@pytest.mark.parametrize(("given", "value"), [("0.5 LSB", 0.5), ("0.5", 0.5), (0.5, 0.5), (2, 2.0)])
def test_accuracy_is_in_lsb(given: object, value: float) -> None:
    """With its unit or as a bare number."""
    assert SimulationSettings.model_validate({"accuracy": given}).accuracy == value


def test_points_are_named_by_stage_or_by_place_and_kind() -> None:
    """The first point is the stimulus; every name can be kept as a waveform."""
    chain = [GAIN, {**GAIN, "name": "output"}]
    made = scenario(chain=chain)
    assert made.points() == ("stimulus", "1 gain", "output")
    for point in made.points():
        simulation = {"duration": 1.0, "waveform_rate": 1e4, "waveform_points": [point]}
        assert scenario(chain=chain, simulation=simulation).simulation.waveform_points == (point,)


def test_names_are_unique_among_all_points() -> None:
    """A name may neither be another stage's, nor its place and kind, nor the stimulus."""
    for name in ("output", "2 gain", "stimulus"):
        chain = [{**GAIN, "name": name}, GAIN if name == "2 gain" else {**GAIN, "name": "output"}]
        with pytest.raises(ScenarioError, match=f"'{name}' is taken"):
            scenario(chain=chain)
    scenario(chain=[GAIN, GAIN, GAIN])  # without names there is no clash


def test_notes_tell_of_keys_without_effect() -> None:
    """What is allowed but changes nothing is not silent."""
    assert scenario_notes(scenario()) == ()
    exact = scenario(simulation={"duration": 1.0, "grid_rate": 1e6})
    assert "grid_rate has no effect" in scenario_notes(exact)[0]
    given = scenario(
        simulation={"duration": 1.0, "discretization": "zoh", "grid_rate": 1e6, "accuracy": 0.1}
    )
    assert "accuracy has no effect" in scenario_notes(given)[0]


def test_a_run_cannot_be_endless() -> None:
    """More conversions than anybody can store are a slip of the pen."""
    with pytest.raises(ScenarioError, match="conversions, more than 1e"):
        scenario(simulation={"duration": 1e10})


def test_source_is_no_value() -> None:
    """The text does not count when scenarios are stored, digested or written."""
    text = "[stimulus]\nkind='step'\nafter=1\n[adc]\nrate=1e3\nbits=8\nhigh=1\n"
    one = parse_scenario(text + "[simulation]\nduration=1\n")
    other = parse_scenario(text + "# a comment\n[simulation]\nduration=1\n")
    assert one.source != other.source
    assert one.resolved() == other.resolved()
    assert one.digest() == other.digest()
    assert "source" not in one.resolved()


@pytest.mark.parametrize("key", ["waveform_rate", "grid_rate"])
def test_too_many_points_are_a_slip_of_the_pen(key: str) -> None:
    """A waveform and a given grid have at most 1e10 points; the message tells the number."""
    model = {"discretization": "foh"} if key == "grid_rate" else {}
    settings = {"duration": 1.0, **model}
    assert scenario(simulation={**settings, key: 1e10})
    with pytest.raises(
        ScenarioError,
        match=rf"1 s at a {key} of 20 GHz are 2e\+10 points, more than 1e\+10; .*simulation.{key}",
    ):
        scenario(simulation={**settings, key: 2e10})


def test_a_grid_that_a_run_does_not_use_is_not_counted() -> None:
    """With discretization exact, grid_rate is for inspect alone."""
    assert scenario(simulation={"duration": 1.0, "grid_rate": 1e12})


def test_a_negative_part_in_rkm_code_is_told_as_negative() -> None:
    """The sign does not hide that "-4n7" is a capacitance."""
    part = {"kind": "rc-lowpass", "resistance": "4k7", "capacitance": "-4n7"}
    with pytest.raises(ScenarioError, match="must be above 0 F"):
        scenario(chain=[part])
