"""Keys lead to values and back: what ``solve``, sets and comparisons vary."""

from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.errors import ScenarioError
from frontend_sim.quantities import CAPACITANCE, FREQUENCY, RESISTANCE, Part
from frontend_sim.scenario import Scenario, load_scenario, parse_scenario
from frontend_sim.scenario.key import find, number_at, numeric_keys, read_number
from frontend_sim.scenario.vary import with_values
from frontend_sim.scenario.walk import key_text

ROOT = Path(__file__).parents[2]
FILES = sorted((ROOT / "scenarios").rglob("*.toml"))

TEXT = """
[stimulus]
kind = "step"
after = "1 V"

[[chain]]
kind = "rc-lowpass"
name = "input filter"
resistance = { value = "10 kohm", tolerance = "1 %", drift = "50 ppm/K", series = "E24" }
capacitance = "4.7 nF"

[[chain]]
kind = "gain"
gain = 2

[adc]
rate = "20 kHz"
bits = 12
high = "3.3 V"

[simulation]
duration = "10 ms"

[[check]]
kind = "settling"
within = "0.5 LSB"
before = "5 ms"
"""


def scenario() -> Scenario:
    """Return a scenario whose parts have names and spread."""
    return parse_scenario(TEXT)


def runnable() -> list[Path]:
    """Return the example files that are scenarios of one channel."""
    return [file for file in FILES if "[[chain]]" in file.read_text(encoding="utf-8")]


@pytest.mark.parametrize("file", runnable(), ids=lambda file: file.stem)
def test_every_number_of_every_example_goes_out_and_in(file: Path) -> None:
    """A value put back, as a number or as its own text, leaves the scenario's digest as it was."""
    example = load_scenario(file)
    digest = example.digest()
    for key in numeric_keys(example):
        found = find(example, key)
        assert key_text(example, found.path).removesuffix(".value") == key
        assert with_values(example, {key: found.value}).digest() == digest, key
        assert with_values(example, {key: found.text()}).digest() == digest, key


def test_an_item_is_found_by_name_and_by_place() -> None:
    """A stage is called by its name or by its place from 1; both lead to the same value."""
    for key in ("chain[input filter].resistance", "chain[1].resistance", "chain[ 1 ].resistance"):
        found = find(scenario(), key)
        assert found.path == ("chain", 0, "resistance")
        assert found.value.nominal == 1e4
        assert found.dimension is RESISTANCE
    assert find(scenario(), "chain[1].capacitance").dimension is CAPACITANCE
    assert find(scenario(), "adc.rate").dimension is FREQUENCY


def test_a_part_keeps_its_spread() -> None:
    """A new nominal value, as text or number, keeps tolerance, drift and series."""
    for value in ("12 kohm", 12e3, "12k"):
        part = with_values(scenario(), {"chain[1].resistance": value}).chain[0].resistance  # type: ignore[union-attr] # an RC section
        assert part == Part(12e3, 0.01, 50e-6, "E24")
    plain = with_values(scenario(), {"chain[1].resistance": Part(5e3)}).chain[0].resistance  # type: ignore[union-attr] # an RC section
    assert plain == 5e3


def test_parts_of_a_part_change_alone_and_together() -> None:
    """Tolerance, drift and value of one part are keys of their own."""
    values = {"chain[1].resistance.tolerance": "5 %", "chain[1].resistance.value": "22 kohm"}
    part = with_values(scenario(), values).chain[0].resistance  # type: ignore[union-attr] # an RC section
    assert part == Part(22e3, 0.05, 50e-6, "E24")


def test_values_change_together() -> None:
    """Two values that fit only together are taken together."""
    with pytest.raises(ScenarioError, match="reversed"):
        with_values(scenario(), {"adc.low": "5 V"})
    both = with_values(scenario(), {"adc.low": "5 V", "adc.high": "6 V"})
    assert (both.adc.low, both.adc.high) == (5.0, 6.0)


def test_the_source_is_dropped() -> None:
    """A varied scenario does not carry the text of the one it came from."""
    assert scenario().source
    assert not with_values(scenario(), {"adc.bits": 10}).source


@pytest.mark.parametrize(
    ("key", "value", "told"),
    [
        ("adc.rte", 1, "did you mean 'rate'"),
        ("chain[input fliter].gain", 1, "did you mean 'input filter'"),
        ("chain[3].gain", 1, "it has 2, counted from 1"),
        ("adc.rate.x", 1, "no keys inside"),
        ("adc.reference.noise", 1, "give it there first"),
        ("adc[1]", 1, "is no array"),
        ("", 1, "a key is empty"),
        ("[1]", 1, "is no key"),
        ("adc rate", 1, "is no key"),
        ("adc.rate", "3 V", "unit of voltage"),
        ("adc.rate", -3, "must be above 0 Hz"),
        ("adc.bits", 99, "from 4 to 32"),
        ("chain[1].resistance", "13.7 kohm", "E24"),
        ("chain[1].resistance.tolerance", "200 %", "tolerance"),
        ("check[1].before", "1 h", "before"),
    ],
)
def test_wrong_keys_and_values_are_named(key: str, value: object, told: str) -> None:
    """Every wrong key or value is refused with a message of ours that names it."""
    with pytest.raises(ScenarioError, match=told):
        with_values(scenario(), {key: value})


def test_a_number_is_asked_of_a_key_without_one() -> None:
    """A key that holds text is refused where a number is needed, with keys that have one."""
    with pytest.raises(ScenarioError, match="has no number"):
        number_at(scenario(), "chain[1].name")
    assert number_at(scenario(), "adc.bits") == 12
    assert read_number(scenario(), "chain[1].resistance", "4k7") == 4700.0
    with pytest.raises(ScenarioError, match="chain"):
        read_number(scenario(), "chain[1].resistance", "3 V")


@given(st.text(max_size=30))
@settings(deadline=None)  # the first example loads libraries
def test_any_text_is_a_key_or_refused(text: str) -> None:
    """No text makes the reader of keys fail in another way than by our own error."""
    try:
        find(scenario(), text)
    except ScenarioError:
        return


@given(st.floats(min_value=1.0, max_value=1e6))
@settings(deadline=None)
def test_a_number_comes_back_as_itself(ohms: float) -> None:
    """Any resistance put in is what is read back, to the last bit."""
    varied = with_values(scenario(), {"chain[1].resistance": Part(ohms)})
    assert number_at(varied, "chain[1].resistance") == ohms
