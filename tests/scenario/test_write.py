"""A scenario made in Python becomes a file, and comes back."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st
from scenario_kinds import STAGE_SAMPLES, STIMULUS_SAMPLES
from scenario_samples import BASE

from frontend_sim.analog.stages.rc_lowpass import RcLowpass
from frontend_sim.converter.adc import Adc
from frontend_sim.scenario import Scenario, SimulationSettings, parse_scenario, scenario_text
from frontend_sim.stimulus.step import Step


def test_the_text_is_what_an_engineer_would_write() -> None:
    """Units with prefixes, the kind first, no key that has its default."""
    scenario = Scenario(
        title='Invented "example"',
        stimulus=Step(after=1.5),
        chain=(RcLowpass(name="input filter", resistance=10e3, capacitance=4.7e-9),),
        adc=Adc(rate=20e3, bits=12, high=3.3),
        simulation=SimulationSettings(duration=0.01),
    )
    assert scenario_text(scenario) == (
        "format = 1\n"
        'title = "Invented \\"example\\""\n'
        "\n"
        "[stimulus]\n"
        'kind = "step"\n'
        'after = "1.5 V"\n'
        "\n"
        "[[chain]]\n"
        'kind = "rc-lowpass"\n'
        'name = "input filter"\n'
        'resistance = "10 kohm"\n'
        'capacitance = "4.7 nF"\n'
        "\n"
        "[adc]\n"
        'rate = "20 kHz"\n'
        "bits = 12\n"
        'high = "3.3 V"\n'
        "\n"
        "[simulation]\n"
        'duration = "10 ms"\n'
    )


@pytest.mark.parametrize("sample", [*STIMULUS_SAMPLES, *STAGE_SAMPLES], ids=lambda s: s["kind"])
def test_every_kind_comes_back(sample: dict[str, object]) -> None:
    """A written scenario of any kind reads as the same values."""
    stimulus = sample if sample in STIMULUS_SAMPLES else {"kind": "step", "before": 300, "after": 1}
    probe = [{"kind": "rtd", "excitation_current": 1e-3}] if sample["kind"] == "thermal-lag" else []
    scenario = Scenario.model_validate(
        {
            "stimulus": stimulus,
            "chain": [sample, *probe] if sample in STAGE_SAMPLES else [],
            "adc": {"rate": 1e3, "bits": 8, "high": 1.0},
            "simulation": {"duration": 1.0},
        }
    )
    again = parse_scenario(scenario_text(scenario))
    assert again.resolved() == scenario.resolved()


@given(
    st.floats(1e-3, 1e9),
    st.floats(1e-18, 1e-1),
    st.floats(-1e6, 1e6).filter(lambda value: value == 0.0 or abs(value) > 1e-20),
    st.integers(0, 2**63 - 1),
    st.text(max_size=200),
)
def test_no_digit_is_lost(
    resistance: float, capacitance: float, after: float, seed: int, title: str
) -> None:
    """Whatever the numbers and texts are, they come back the same."""
    scenario = Scenario(
        title=title,
        seed=seed,
        stimulus=Step(after=after),
        chain=(RcLowpass(resistance=resistance, capacitance=capacitance),),
        adc=Adc(rate=1e3, bits=8, high=1.0),
        simulation=SimulationSettings(duration=1.0),
    )
    assert parse_scenario(scenario_text(scenario)).resolved() == scenario.resolved()


def test_a_text_that_was_read_is_written_equal() -> None:
    """Reading and writing changes the notation, not the values."""
    scenario = parse_scenario(BASE)
    assert parse_scenario(scenario_text(scenario)).resolved() == scenario.resolved()


def test_files_below_the_folder_are_written_relative_to_it(tmp_path: Path) -> None:
    """A scenario and its recording can be moved together."""
    text = BASE.replace('kind = "step"\nafter = "1 V"', 'kind = "recording"\nfile = "a/b.csv"')
    scenario = parse_scenario(text, tmp_path)
    written = tomllib.loads(scenario_text(scenario, tmp_path))
    assert written["stimulus"]["file"] == "a/b.csv"
    elsewhere = tomllib.loads(scenario_text(scenario, tmp_path / "other"))
    assert elsewhere["stimulus"]["file"] == (tmp_path / "a" / "b.csv").as_posix()
    assert tomllib.loads(scenario_text(scenario))["stimulus"] == elsewhere["stimulus"]
