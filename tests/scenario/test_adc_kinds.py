"""The kinds of converter in scenario files: read, written, in the schema, and refused."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

import jsonschema
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scenario_samples import BASE, MARK, marked_line

from frontend_sim.converter import ADCS, Adc, OversamplingAdc
from frontend_sim.errors import ScenarioError
from frontend_sim.scenario import json_schema, parse_scenario, scenario_text
from frontend_sim.scenario.model import Scenario

SAMPLING = 'rate = "20 kHz"\nbits = 12\nhigh = "3.3 V"\n'
OVERSAMPLING = (
    'kind = "oversampling"\nmodulator_rate = "256 kHz"\norder = 3\nbits = 24\nhigh = 2.5\n'
)

SAMPLES = [
    SAMPLING,
    'kind = "sampling"\n' + SAMPLING,
    SAMPLING + 'rate_error = "20 ppm"\n[adc.wander]\nshape = "sinusoidal"\nrms = "1 ns"\n'
    'frequency = "5 Hz"\nphase = "30 deg"\n',
    SAMPLING + '[adc.wander]\nshape = "gauss-markov"\nrms = "1 ns"\ncorrelation_time = "1 s"\n',
    SAMPLING + '[adc.reference]\nvoltage = "3.3 V"\nerror = "0.1 %"\ndrift = "20 ppm/K"\n'
    'noise = "5 ppm"\nfilter_time_constant = "1 ms"\n',
    SAMPLING + '[adc.nonlinearity]\nshape = "s-shape"\npeak = "-2 LSB"\n'
    'capacitor_mismatch = "0.1 %"\n',
    SAMPLING + '[adc.nonlinearity]\ntable = "a.csv"\ntable_holds = "dnl"\n',
    SAMPLING + '[adc.averaging]\ncount = 16\nshift = 2\nrounding = "nearest"\ninterval = "1 us"\n',
    SAMPLING + '[adc.dither]\nshape = "triangular"\nwidth = "2 LSB"\nsubtractive = true\n',
    OVERSAMPLING + "decimation = 512\n",
    OVERSAMPLING + 'data_rate = "500 Hz"\ninput_noise = "1 uV"\n',
    OVERSAMPLING + 'decimation = 64\nconversion = "restarted"\ndata_rate = "10 Hz"\n'
    '[adc.reference]\nnoise = "5 ppm"\n',
]


def scenario(adc: str) -> str:
    """Return the sample scenario with another converter."""
    start, end = BASE.index("[adc]"), BASE.index("[simulation]")
    return f"{BASE[:start]}[adc]\n{adc}\n{BASE[end:]}"


def refusal(text: str) -> str:
    """Return the one message with which a scenario is refused."""
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(text, name="wrong.toml")
    assert len(caught.value.problems) == 1
    return str(caught.value)


@pytest.mark.parametrize("adc", SAMPLES, ids=range(len(SAMPLES)))
def test_every_table_comes_back_and_is_in_the_schema(adc: str, tmp_path: Path) -> None:
    """Read, written as text, read again: the same values; and an editor finds nothing wrong."""
    text = scenario(adc)
    jsonschema.Draft202012Validator(json_schema()).validate(tomllib.loads(text))
    made = parse_scenario(text, tmp_path)
    again = parse_scenario(scenario_text(made, tmp_path), tmp_path)
    assert again.resolved() == made.resolved()
    assert type(again.adc) is type(made.adc) is ADCS[made.adc.kind]
    assert Scenario.model_validate(made.resolved()).adc == made.adc


def test_a_kind_is_written_only_where_it_is_not_the_usual_one() -> None:
    """Files of sampling converters stay as they were."""
    assert "kind" not in tomllib.loads(scenario_text(parse_scenario(scenario(SAMPLING))))["adc"]
    over = parse_scenario(scenario(OVERSAMPLING + "decimation = 512"))
    assert tomllib.loads(scenario_text(over))["adc"]["kind"] == "oversampling"


@given(
    modulator_rate=st.floats(1e3, 1e7),
    decimation=st.integers(2, 2**20),
    order=st.integers(1, 5),
    bits=st.integers(4, 32),
    rate_error=st.floats(-0.1, 0.1).map(lambda value: round(value, 9)),
    noise=st.floats(1e-9, 0.02),
    peak=st.floats(0.001, 0.9),
)
@settings(max_examples=40, deadline=None)
def test_no_digit_of_an_oversampling_converter_is_lost(
    modulator_rate: float,
    decimation: int,
    order: int,
    bits: int,
    rate_error: float,
    noise: float,
    peak: float,
) -> None:
    """Whatever the numbers are, they come back the same."""
    adc = OversamplingAdc(
        modulator_rate=modulator_rate, decimation=decimation, order=order, bits=bits, high=2.0,
        rate_error=rate_error, reference={"noise": noise},
        nonlinearity={"shape": "bow", "peak": peak},
    )  # fmt: skip
    made = Scenario(stimulus={"kind": "step", "after": 1.0}, adc=adc, simulation={"duration": 1e4})
    assert parse_scenario(scenario_text(made)).adc == adc


@given(
    count=st.integers(2, 1000),
    width=st.floats(1e-3, 100.0),
    rms=st.floats(1e-12, 1e-9),
    time=st.floats(1e-3, 1e6),
    mismatch=st.floats(1e-9, 0.1),
)
@settings(max_examples=40, deadline=None)
def test_no_digit_of_a_sampling_converter_is_lost(
    count: int, width: float, rms: float, time: float, mismatch: float
) -> None:
    """The same for averaging, dither, wander and capacitors."""
    adc = Adc(
        rate=1e3, bits=12, high=2.0, averaging={"count": count},
        dither={"shape": "uniform", "width": width},
        wander={"shape": "gauss-markov", "rms": rms, "correlation_time": time},
        nonlinearity={"capacitor_mismatch": mismatch},
    )  # fmt: skip
    made = Scenario(stimulus={"kind": "step", "after": 1.0}, adc=adc, simulation={"duration": 1.0})
    assert parse_scenario(scenario_text(made)).adc == adc


@pytest.mark.parametrize(
    ("adc", "parts"),
    [
        (f'kind = "delta" {MARK}\n{SAMPLING}', ["adc.kind", "unknown kind", "sampling"]),
        (f"kind = 5 {MARK}\n{SAMPLING}", ["adc.kind: given 5", "one of sampling, oversampling"]),
        (f'{SAMPLING}order = 3 {MARK}\n', ["adc.order: unknown key here"]),
        (f"{SAMPLING}avergaing = 3 {MARK}\n", ["did you mean 'averaging'?"]),
        (f'{OVERSAMPLING}decimation = 8\nrate = "5 Hz" {MARK}\n', ["[adc] of kind \"sampling\""]),
        (f'{OVERSAMPLING}data_rate = "51 Hz" {MARK}', ["decimation of 5019.60784", "whole number"]),
        (f"{OVERSAMPLING}decimation = 1 {MARK}", ["given 1", "whole number from 2 to 1048576"]),
        (OVERSAMPLING, ["give decimation or data_rate"]),
        (
            f'{SAMPLING}[adc.wander]\nshape = "sinusoidal"\nrms = "1 s" {MARK}\nfrequency = 1',
            ["wander changes by", "no slow wander"],
        ),
        (
            f'{SAMPLING}[adc.reference]\nvoltage = "2.5 V" {MARK}',
            ["0 V to 3.3 V reaches beyond", "reference of 2.5 V"],
        ),
        (
            f'{SAMPLING}[adc.reference]\nnoise = "1 mV" {MARK}',
            ["adc.reference.noise", 'given "1 mV"', "fraction"],
        ),
        (
            f'{SAMPLING}[adc.nonlinearity]\nshape = "bow"\npeak = "1 mV" {MARK}',
            ["adc.nonlinearity.peak", "not LSB"],
        ),
        (
            f'{SAMPLING}[adc.nonlinearity]\nshape = "banana" {MARK}\npeak = 1',
            ['given "banana"', '"bow", "s-shape"'],
        ),
        (
            f"{SAMPLING}[adc.averaging]\ncount = 1.5 {MARK}",
            ["adc.averaging.count", "whole number from 2 to 65536"],
        ),
        (
            f'{SAMPLING}[adc.dither]\nshape = "uniform"\nwidth = 1\nsubtractive = 1 {MARK}',
            ["adc.dither.subtractive", "true or false"],
        ),
        (f"{SAMPLING}[[adc.dither]] {MARK}\nwidth = 1", ["write [adc.dither] with single"]),
    ],
)  # fmt: skip
def test_wrong_converters_are_told_with_key_and_line(adc: str, parts: list[str]) -> None:
    """One message; the line is that of the key, or that of its table where a rule is broken."""
    text = scenario(adc)
    message = refusal(text)
    for part in parts:
        assert part in message
    line, header = marked_line(text), BASE[: BASE.index("[adc]")].count("\n") + 1
    told = int(message.split("line ")[1].split(":")[0])
    assert header <= told <= (line or told)


def test_one_fault_is_told_once(tmp_path: Path) -> None:
    """A wrong modulator rate is not also called a wrong data rate."""
    text = scenario(OVERSAMPLING.replace('"256 kHz"', '"256 kV"') + 'data_rate = "500 Hz"')
    assert "adc.modulator_rate" in refusal(text)


def test_keys_of_all_kinds_are_explained() -> None:
    """Every converter says in its schema what it is, and only the usual one may go unnamed."""
    parts: dict[str, Any] = json_schema()["$defs"]
    assert "kind" not in parts["Adc"]["required"]
    assert "kind" in parts["OversamplingAdc"]["required"]
    for name in ("Adc", "OversamplingAdc"):
        assert parts[name]["properties"]["kind"]["description"]
