"""What to change first: the advised value passes, and is not far beyond what is needed."""

from __future__ import annotations

import math
import re
from typing import Any

import pytest
from checked import FILTER, STEP, TAU, made, verdicts

from frontend_sim.measure.checks.judge import judge
from frontend_sim.measure.sensitivity.suggestion import Suggestion, suggestion
from frontend_sim.quantities import as_text
from frontend_sim.scenario import Scenario

FULL = {**STEP, "after": "3.3 V"}
PAIR = {"kind": "second-order", "name": "tank", "corner": "1 kHz", "quality_factor": 2.0}
LOW_PASS = {"kind": "butterworth", "name": "aa", "order": 2, "corner": "4 kHz"}
SINE = {"kind": "sine", "amplitude": 1.6, "offset": 1.65, "frequency": "1013 Hz"}


def of(scenario: Scenario, position: int = 0) -> Suggestion:
    """Return the suggestion for a check that fails."""
    result = judge(scenario)[position]
    assert result.verdict == "fails"
    found = suggestion(scenario, position, result)
    assert found is not None
    return found


# name -> (check, tables, key, value that would just pass)
NEEDED: dict[str, tuple[dict[str, Any], dict[str, Any], str, float]] = {
    "settling": (
        {"kind": "settling", "within": "0.5 LSB", "before": "200 us"}, {"stimulus": FULL},
        "chain[input filter].resistance", 200e-6 / (4.7e-9 * math.log(2.0**13)),
    ),
    "corner": ({"kind": "corner", "at_least": "5 kHz"}, {}, "chain[input filter].resistance",
               10e3 / (5e3 * 2.0 * math.pi * TAU)),
    "rejection": (
        {"kind": "rejection", "frequency": 12e3, "deviation": 0, "at_least": "40 dB"},
        {"chain": [LOW_PASS]}, "chain[aa].corner", 12e3 / (1e4 - 1.0) ** 0.25,
    ),
    "level": ({"kind": "level", "at": "1.1 ms", "at_least": "0.95 V"}, {},
              "chain[input filter].resistance", 100e-6 / (4.7e-9 * math.log(20.0))),
    "overshoot": (
        {"kind": "overshoot", "at_most": "10 %"}, {"chain": [PAIR]}, "chain[tank].quality_factor",
        0.5 * math.sqrt(math.pi**2 + math.log(0.1) ** 2) / -math.log(0.1),
    ),
    "tone": ({"kind": "sinad", "at_least": "80 dB"},
             {"stimulus": SINE, "chain": [], "simulation": {"duration": "100 ms"}}, "adc.bits", 14),
}  # fmt: skip


@pytest.mark.parametrize("name", NEEDED)
def test_the_value_passes_and_is_near(name: str) -> None:
    """It lies on the right side of the closed form, within 12 % of it."""
    check, tables, key, needed = NEEDED[name]
    scenario = made(check, **tables)
    found = of(scenario)
    assert found.parameter.key == key
    assert found.value == pytest.approx(needed, rel=0.12)
    assert judge(found.parameter.placed(scenario, found.value))[0].verdict == "holds"
    assert found.others == ()


def test_the_sentence_of_a_run() -> None:
    """Key, direction, from and to; the number in the sentence is the one that passes."""
    check = {"kind": "settling", "within": "0.5 LSB", "before": "200 us"}
    (found,) = verdicts(check, stimulus=FULL)
    told = re.search(
        r"by the sensitivities: lower chain\[input filter\]\.resistance from 10 kohm to (\S+ kohm)"
        r", with which all checks hold$",
        found.advice,
    )
    assert told is not None
    (again,) = verdicts(check, stimulus=FULL, chain=[{**FILTER, "resistance": told.group(1)}])
    assert again.verdict == "holds"


def test_what_else_fails_is_told() -> None:
    """A faster filter settles in time, and lets more through: both are said."""
    scenario = made(
        {"kind": "settling", "within": "0.5 LSB", "before": "200 us"},
        {"kind": "corner", "at_most": "3.5 kHz"},
        stimulus=FULL,
    )
    found = of(scenario)
    assert found.others == ("corner",)
    assert found.text().endswith("with which corner fails")
    assert as_text(found.value, found.parameter.dimension) in found.text()  # type: ignore[arg-type]  # a resistance


def test_no_key_is_no_advice() -> None:
    """Where nothing in the chain helps, the check's own sentence stands alone."""
    scenario = made({"kind": "headroom", "at_least": "1 V"}, chain=[])
    assert suggestion(scenario, 0, judge(scenario)[0]) is None
    (found,) = verdicts({"kind": "headroom", "at_least": "1 V"}, chain=[])
    assert found.advice
    assert "sensitivities" not in found.advice


def test_bits_are_never_lowered() -> None:
    """Coarser codes would make half an LSB wide enough, and nothing better."""
    check = {"kind": "settling", "within": "0.5 LSB", "before": "200 us"}
    assert of(made(check, stimulus=FULL)).parameter.key != "adc.bits"


def test_a_long_run_is_not_made_again() -> None:
    """Advice is bounded: a run of many conversions gets the check's own sentence only."""
    check = {"kind": "sinad", "at_least": "80 dB"}
    (found,) = verdicts(check, stimulus=SINE, chain=[], simulation={"duration": "2 s"})
    assert found.verdict == "fails"
    assert "sensitivities" not in found.advice
