"""Spread of parts: nominal runs ignore it, drift moves parts with the temperature."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.errors import ModelError, ScenarioError
from frontend_sim.quantities import Part
from frontend_sim.scenario import (
    Scenario,
    check_scenario,
    circuit_of,
    parse_scenario,
    scenario_text,
    spread_parts,
    stages_of,
)
from frontend_sim.simulation import simulate

ADC = {"rate": 1e4, "bits": 16, "high": 5.0}


def scenario(resistance: Any, capacitance: Any, temperature: Any = "25 degC") -> Scenario:
    """Return a step through an RC low pass at a temperature."""
    return Scenario.model_validate(
        {
            "stimulus": {"kind": "step", "after": 1.0},
            "chain": [
                {"kind": "rc-lowpass", "resistance": resistance, "capacitance": capacitance},
                {"kind": "gain", "gain": 2},
            ],
            "environment": {"temperature": temperature},
            "adc": ADC,
            "simulation": {"duration": 0.01},
        }
    )


def corner(found: Scenario) -> float:
    """Return the corner of the chain [rad/s]."""
    (pole,) = circuit_of(found).poles
    return -float(pole.real)


R = {"value": "10 kohm", "tolerance": "5 %", "drift": "100 ppm/K"}
C = {"value": "100 nF", "tolerance": "10 %", "drift": "-2000 ppm/K"}


def test_a_nominal_run_ignores_spread() -> None:
    """At 25 degC the codes are those of parts without spread, and so is the model to the bit."""
    plain, spread = scenario(10e3, 100e-9), scenario(R, C)
    assert corner(plain) == corner(spread)
    assert np.array_equal(simulate(plain).codes, simulate(spread).codes)
    assert stages_of(spread) == spread.chain
    assert plain.digest() != spread.digest()


def test_drift_moves_the_corner() -> None:
    """60 K up: R by 1.006, C by 0.88; the corner moves by the inverse of their product."""
    hot = corner(scenario(R, C, "85 degC"))
    assert hot == pytest.approx(1e3 / (1.006 * 0.88), rel=1e-12)
    cold = corner(scenario(R, C, "-40 degC"))
    assert cold == pytest.approx(1e3 / ((1 - 65e-4) * 1.13), rel=1e-12)
    run = simulate(scenario(R, C, "85 degC"))
    expected = -2.0 * np.expm1(-run.time * 1e3 / (1.006 * 0.88))
    np.testing.assert_allclose(run.pin, expected, rtol=0, atol=1e-12)


def test_thermal_noise_is_that_of_the_temperature() -> None:
    """Its density goes with the root of resistance and absolute temperature."""
    (cold,), (hot,) = (
        circuit_of(scenario({"value": 1e4, "drift": "100 ppm/K"}, 1e-7, t)).sections[0].noise
        for t in ("25 degC", "85 degC")
    )
    expected = np.sqrt(1.006 * 358.15 / 298.15)
    assert hot.density / cold.density == pytest.approx(expected, rel=1e-12)


def test_without_drift_a_temperature_moves_nothing() -> None:
    """It only makes noise."""
    assert corner(scenario(10e3, "100nM", "85 degC")) == corner(scenario(10e3, 100e-9))


def test_the_moved_parts_keep_their_tolerance_and_stages_their_names() -> None:
    """A moved part still spreads around its new value; the rest of a stage is as it was."""
    first, second = stages_of(scenario(R, C, "85 degC"))
    assert first.label(1) == "1 rc-lowpass"
    assert second == scenario(R, C).chain[1]
    moved = first.model_dump()["resistance"]
    assert moved == {"value": pytest.approx(10060.0, rel=1e-12), "tolerance": 0.05}


def test_every_part_with_a_spread_is_listed_with_its_corners() -> None:
    """Paths, names and extremes; 5 % of R and 10 % of C move the corner by -13.42 and +16.96 %.

    The extremes are from the check values, computed there from the closed form.
    """
    r, c = spread_parts(scenario(R, C))
    assert (r.path, c.path) == (("chain", 0, "resistance"), ("chain", 0, "capacitance"))
    assert (r.name, c.name) == ("chain[1].resistance", "chain[1].capacitance")
    assert (r.nominal, r.tolerance, r.drift) == (10e3, 0.05, 1e-4)
    lowest = r.nominal * c.nominal / (r.corners[1] * c.corners[1]) - 1.0
    highest = r.nominal * c.nominal / (r.corners[0] * c.corners[0]) - 1.0
    assert 100.0 * lowest == pytest.approx(-13.42, abs=0.005)
    assert 100.0 * highest == pytest.approx(16.96, abs=0.005)


def test_parts_without_spread_are_not_listed() -> None:
    """A number, and a number that only has to be of a series, do not spread."""
    assert spread_parts(scenario(10e3, {"value": "100 nF", "series": "E6"})) == ()


def test_a_drift_beyond_what_the_part_can_be_is_told() -> None:
    """A resistor cannot drift below zero; the message names stage, key and temperature."""
    text = scenario_text(scenario({"value": 1e4, "drift": "-2 %/K"}, 1e-7, "85 degC"))
    with pytest.raises(ModelError) as caught:
        check_scenario(parse_scenario(text), "hot.toml")
    message = str(caught.value)
    for part in ("hot.toml: line", "chain[1]", "resistance of '1 rc-lowpass'", "-20000 ppm/K",
                 "-2 kohm", "85 degC"):  # fmt: skip
        assert part in message


SPREADS = st.fixed_dictionaries(
    {"value": st.floats(1e-3, 1e9)},
    optional={
        "tolerance": st.floats(1e-6, 0.99),
        "drift": st.floats(-0.01, 0.01).filter(lambda drift: abs(drift) > 1e-9),
    },
)


@given(SPREADS, SPREADS, st.floats(250.0, 370.0))
def test_no_spread_is_lost_in_a_file(
    r: dict[str, float], c: dict[str, float], temperature: float
) -> None:
    """Scenario, text and plain data tell the same, to the last bit, and so has the digest."""
    made = scenario(r, {**c, "value": c["value"] * 1e-12}, temperature)
    again = parse_scenario(scenario_text(made))
    assert again.resolved() == made.resolved()
    assert again.chain == made.chain
    assert again.digest() == Scenario.model_validate(made.resolved()).digest() == made.digest()
    assert [part.path for part in spread_parts(again)] == [part.path for part in spread_parts(made)]


def test_the_text_has_the_spread_on_one_line() -> None:
    """As an engineer would write it; a temperature of 25 degC goes without saying."""
    text = scenario_text(scenario({**R, "series": "E24"}, "100nM"))
    assert (
        'resistance = { value = "10 kohm", tolerance = "5 %", drift = "100 ppm/K", series = "E24" }'
        '\ncapacitance = { value = "100 nF", tolerance = "20 %" }\n' in text
    )
    assert "environment" not in text
    assert '[environment]\ntemperature = "-40 degC"' in scenario_text(scenario(R, C, "-40 degC"))


def test_a_sub_table_is_as_good_as_an_inline_one() -> None:
    """TOML has two ways to write a table; errors are told with their line in both."""
    text = scenario_text(scenario(R, C)).replace(
        'capacitance = { value = "100 nF", tolerance = "10 %", drift = "-2000 ppm/K" }',
        '[chain.capacitance]\nvalue = "100 nF"\ntolerance = "10 %"',
    )
    (stage, _) = parse_scenario(text).chain
    assert stage.model_dump()["capacitance"] == {"value": 1e-7, "tolerance": 0.1}
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(text.replace('"10 %"', '"-10 %"'), ".", "a.toml")
    (problem,) = caught.value.problems
    assert problem.key == "chain[1].capacitance.tolerance (rc-lowpass)"
    assert text.split("\n")[problem.line - 1] == 'tolerance = "10 %"'  # type: ignore[operator]


def test_a_part_made_in_python_is_as_good_as_a_table() -> None:
    """``Part`` is what a table becomes."""
    by_table, by_part = scenario(R, 1e-7), scenario(Part(10e3, 0.05, 1e-4), 1e-7)
    assert by_table == by_part
    assert by_table.digest() == by_part.digest()
