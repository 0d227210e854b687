"""Changed parameters are told by their keys."""

from __future__ import annotations

import pytest
from compared import made, varied

from frontend_sim.comparison import changes
from frontend_sim.comparison.changes import Change
from frontend_sim.scenario import Scenario
from frontend_sim.scenario.vary import with_values


def found(first: Scenario, second: Scenario) -> list[Change]:
    """Return the changes from one scenario to another."""
    return list(changes(first.resolved(), second.resolved(), (first, second)))


def test_equal_scenarios_have_no_change() -> None:
    """Title and seed are told apart, so that they are no change of what is simulated."""
    assert found(made(), made(title="Another", seed=5)) == []


def test_a_part_is_told_with_its_key_and_unit() -> None:
    """A part that changed is named as ``with_values`` names it, both values with units."""
    change = found(made(), varied(capacitance="4.8 nF"))[0]
    assert (change.key, change.first, change.second) == (
        "chain[input filter].capacitance",
        "4.7 nF",
        "4.8 nF",
    )
    assert change.ratio == pytest.approx(4.8 / 4.7)


def test_a_tolerance_is_part_of_a_part() -> None:
    """A new tolerance changes the part as a whole."""
    wide = varied(capacitance={"value": "4.7 nF", "tolerance": "10 %"})
    (change,) = found(made(), wide)
    assert change.second == "4.7 nF, tolerance 10 %"


@pytest.mark.parametrize(
    "changed",
    [
        {"chain[input filter].capacitance": "5.6 nF", "adc.bits": 10, "adc.rate": "5 kHz"},
        {"stimulus": {"kind": "step", "after": 1.0, "at": 1e-3}},
        {"chain": [{"kind": "gain", "gain": 2.0}]},
        {"check[1].at_least": "10 mV"},
        {"simulation.waveform_rate": "20 kHz"},
        {"adc.dither": {"shape": "triangular", "width": "2 LSB"}},
    ],
)
def test_changes_make_the_first_scenario_the_second(changed: dict[str, object]) -> None:
    """The values of all changes, set in the first scenario, give the second."""
    first = made()
    second = with_values(first, changed)
    told = {change.key: change.value for change in found(first, second)}
    assert with_values(first, told).digest() == second.digest()


def test_a_stage_more_is_a_change_of_the_chain() -> None:
    """Stages are matched by name; where there are others, the chain as a whole is told."""
    longer = made(chain=[*made().resolved()["chain"], {"kind": "gain", "gain": 2}])
    (change,) = found(made(), longer)
    assert change.key == "chain"
    assert change.first == "rc-lowpass, noninverting-amplifier"
    assert change.second == "rc-lowpass, noninverting-amplifier, gain"


def test_files_are_compared_by_content() -> None:
    """The same recording in another folder is no change, another one under its name is."""
    one = {"stimulus": {"kind": "recording", "file": "/here/pump.csv"}}
    other = {"stimulus": {"kind": "recording", "file": "/there/pump.csv"}}
    digests = {"/here/pump.csv": "a" * 64}, {"/there/pump.csv": "a" * 64}
    assert changes(one, other, files=digests) == ()
    (change,) = changes(one, one, files=(digests[0], {"/here/pump.csv": "b" * 64}))
    assert (change.key, change.first, change.second) == (
        "stimulus.file",
        "pump.csv (aaaaaaaa)",
        "pump.csv (bbbbbbbb)",
    )
