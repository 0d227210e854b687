"""Overshoot, level and droop against closed forms."""

from __future__ import annotations

import math
from typing import Any

import pytest
from checked import FILTER, STEP, TAU, beside, made, verdicts

from frontend_sim.errors import ScenarioError
from frontend_sim.measure.checks import refuse_impossible


@pytest.mark.parametrize("quality", [0.6, 0.7071, 1.0, 3.0])
def test_overshoot_of_a_pair(quality: float) -> None:
    """exp(-pi z / sqrt(1 - z²)) of the step, z = 1 / (2 Q) (any control textbook, from memory).

    The peak lies between conversions, and is found there.
    """
    z = 0.5 / quality
    expected = math.exp(-math.pi * z / math.sqrt(1.0 - z * z))
    pair = {"kind": "second-order", "corner": "1.37 kHz", "quality_factor": quality}
    (found,) = verdicts({"kind": "overshoot", "at_most": "10 %"}, chain=[pair])
    assert found.value == pytest.approx(expected, rel=1e-9)
    assert found.verdict == ("holds" if expected <= 0.1 else "fails")


def test_overshoot_of_a_fall_in_volts() -> None:
    """A fall overshoots downwards; a limit in volts compares volts."""
    fall = {"kind": "step", "before": "3 V", "after": "1 V", "at": "1 ms"}
    pair = {"kind": "second-order", "corner": "1 kHz", "quality_factor": 1.0}
    (found,) = verdicts({"kind": "overshoot", "at_most": "0.4 V"}, stimulus=fall, chain=[pair])
    expected = 2.0 * math.exp(-math.pi / math.sqrt(3.0))
    assert (found.value, found.unit) == (pytest.approx(expected, rel=1e-9), "V")


def test_no_overshoot_of_one_section() -> None:
    """One real pole goes to its end from one side; a chain without states is there at once."""
    limit = {"kind": "overshoot", "at_most": "0 %"}
    assert verdicts(limit)[0].value == 0.0
    assert verdicts(limit, chain=[])[0].value == 0.0


def test_a_lead_overshoots_at_once() -> None:
    """A zero below the pole: the jump itself is the highest point, gain 3 against 1 at the end."""
    lead = {"kind": "poles-zeros", "poles": [-3e3], "zeros": [-1e3], "gain": 3.0}
    (found,) = verdicts({"kind": "overshoot", "at_most": "10 %"}, chain=[lead])
    assert found.value == pytest.approx(2.0, rel=1e-9)


def test_overshoot_names_the_pair_with_the_least_damping() -> None:
    """The advice is to damp the stage that rings."""
    ringing = {"kind": "second-order", "name": "tank", "corner": 2e3, "quality_factor": 4.0}
    (found,) = verdicts({"kind": "overshoot", "at_most": "1 %"}, chain=[FILTER, ringing])
    assert found.advice.startswith("give 'tank' more damping")
    assert "quality factor of 4" in found.advice


@pytest.mark.parametrize(
    ("tables", "reason"),
    [
        ({"stimulus": {"kind": "sine", "amplitude": 1, "frequency": 50}}, "then rests"),
        (
            {"chain": [{"kind": "rc-highpass", "resistance": "1k", "capacitance": "1u"}]},
            "returns to where it was",
        ),
        ({"stimulus": {"kind": "step", "before": 1, "after": 1}}, "returns to where it was"),
    ],
)
def test_what_has_no_overshoot_is_refused(tables: dict[str, Any], reason: str) -> None:
    """Before any run it is told that nothing tells which way an overshoot would go."""
    with pytest.raises(ScenarioError, match=reason):
        refuse_impossible(made({"kind": "overshoot", "at_most": "1 %"}, **tables))


def test_level_between_conversions() -> None:
    """1 - exp(-t/tau) at an instant that no conversion meets, to 1e-12 of the step."""
    at = 1e-3 + 73.21e-6
    (found,) = verdicts({"kind": "level", "at": at, "at_least": "0.7 V", "at_most": "0.75 V"})
    expected = -math.expm1(-73.21e-6 / TAU)
    assert found.value == pytest.approx(expected, abs=1e-12)
    assert found.verdict == "fails"
    assert found.limit == 0.75
    assert (found.bound, found.margin) == ("at most", pytest.approx(0.75 - expected, abs=1e-12))
    assert "lower the level by" in found.advice


@pytest.mark.parametrize(
    ("least", "most", "limit"), [(0.0, 2.0, 0.0), (0.9, 2.0, 0.9), (-5.0, 1.1, 1.1), (None, 3, 3)]
)
def test_the_nearer_limit_is_told(least: float | None, most: float | None, limit: float) -> None:
    """Of two limits the one with less margin is the result; 1 V lies in the middle of the first."""
    keys = {"at_least": least, "at_most": most}
    given = {key: value for key, value in keys.items() if value is not None}
    (found,) = verdicts({"kind": "level", "at": "15 ms", **given})
    assert found.limit == limit
    assert found.verdict == "holds"


def test_level_of_a_point_and_at_a_jump() -> None:
    """The stimulus has its new value at the instant of the step itself, and the pin not yet."""
    both = [
        {"kind": "level", "at": "1 ms", "at_least": 1.0, "point": "stimulus"},
        {"kind": "level", "at": "1 ms", "at_most": 0.0},
    ]
    assert [found.value for found in verdicts(*both)] == [1.0, pytest.approx(0.0, abs=1e-15)]


def test_droop_behind_a_high_pass() -> None:
    """1 - exp(-T/tau), and a tilt of the height · droop / T."""
    coupling = {"kind": "rc-highpass", "name": "coupling", "resistance": "1M", "capacitance": "1u"}
    pulse = {"kind": "pulse", "high": "2 V", "at": "2 ms", "width": "12 ms"}
    check = {"kind": "droop", "start": "2 ms", "stop": "12 ms", "at_most": "0.5 %"}
    expected = -math.expm1(-10e-3 / 1.0)
    (found,) = verdicts(check, stimulus=pulse, chain=[coupling])
    assert found.value == pytest.approx(expected, rel=1e-9)
    assert found.verdict == "fails"
    # ln(1 - 0.995%) / ln(1 - 0.5%) of the time constant are needed.
    factor = math.log1p(-expected) / math.log1p(-0.005)
    assert factor == pytest.approx(1.995, abs=1e-3)
    assert "lengthen the time constant of 'coupling' by" in found.advice
    tilt = beside("droop: tilt", check, stimulus=pulse, chain=[coupling])
    assert tilt == pytest.approx(-2.0 * expected / 10e-3, rel=1e-9)


def test_droop_counts_from_a_baseline() -> None:
    """Left out it is the rest before the run, here 1 V; given, the height is another."""
    coupling = {"kind": "rc-highpass", "resistance": "1M", "capacitance": "1u"}
    pulse = {"kind": "pulse", "high": "2 V", "at": "2 ms", "width": "12 ms"}
    times = {"kind": "droop", "start": "2 ms", "stop": "12 ms", "at_most": "5 %"}
    (found,) = verdicts({**times, "baseline": "1 V"}, stimulus=pulse, chain=[coupling])
    assert found.value == pytest.approx(-2.0 * math.expm1(-10e-3), rel=1e-9)
    flat = {"kind": "droop", "start": "2 ms", "stop": "12 ms", "at_most": "5 %"}
    (none,) = verdicts(flat, stimulus=STEP | {"at": 0.0, "before": "1 V", "after": "2 V"})
    assert none.value == pytest.approx(0.0, abs=1e-15)
    (rest,) = verdicts(flat, stimulus={"kind": "step", "before": "1 V", "after": "1 V"})
    assert (rest.verdict, rest.value) == ("fails", None)
    assert "has no height" in rest.method
