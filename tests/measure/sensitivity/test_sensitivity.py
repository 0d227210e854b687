"""Sensitivities against closed forms: powers of parts, rates and times."""

from __future__ import annotations

import json
import math
from typing import Any

import pytest
from checked import FILTER, STEP, TAU, made

from frontend_sim.errors import InputError
from frontend_sim.measure.sensitivity import CheckSensitivity, Sensitivity, sensitivities
from frontend_sim.scenario import Scenario

FULL = {**STEP, "after": "3.3 V"}
SETTLING = {"kind": "settling", "within": "0.5 LSB", "before": "500 us"}
LOG = math.log(2.0**13)
X = 3e3 * 2.0 * math.pi * TAU
"""A frequency of 3 kHz over the corner."""


def found(scenario: Scenario, key: str) -> Sensitivity:
    """Return the sensitivity of the only check by one key."""
    (check,) = sensitivities(scenario, [key])
    (row,) = check.rows
    return row


# name -> (scenario, key, normalized derivative)
POWERS: dict[str, tuple[Scenario, str, float]] = {
    "settling by resistance": (made(SETTLING, stimulus=FULL), "chain[1].resistance", 1.0),
    "settling by capacitance": (made(SETTLING, stimulus=FULL), "chain[1].capacitance", 1.0),
    "settling by the step": (made(SETTLING, stimulus=FULL), "stimulus.after", 1.0 / LOG),
    "settling by the range": (made(SETTLING, stimulus=FULL), "adc.high", -1.0 / LOG),
    "corner by capacitance": (made({"kind": "corner", "at_least": 1e3}), "chain[1].capacitance",
                              -1.0),
    "attenuation by resistance": (
        made({"kind": "rejection", "frequency": "3 kHz", "deviation": 0, "at_least": "1 dB"}),
        "chain[1].resistance", X**2 / (1.0 + X**2),
    ),
    "attenuation of order four by its corner": (
        made({"kind": "rejection", "frequency": "30 kHz", "deviation": 0, "at_least": "1 dB"},
             chain=[{"kind": "butterworth", "order": 4, "corner": "1 kHz"}]),
        "chain[1].corner", -4.0,
    ),
    "attenuation by the rate": (
        made({"kind": "alias-attenuation", "at_least": "1 dB"},
             chain=[{"kind": "butterworth", "order": 4, "corner": "1 kHz"}]),
        "adc.rate", 4.0,
    ),
    "noise by capacitance": (made({"kind": "noise", "at_most": "1 LSB"}), "chain[1].capacitance",
                             -0.5),
    "noise by temperature": (made({"kind": "noise", "at_most": "1 LSB"}),
                             "environment.temperature", 0.5),
    "noise-free bits by the range": (
        made({"kind": "noise-free-bits", "at_least": 8}, adc={"bits": 24}), "adc.high", 1.0,
    ),
    "level by resistance": (
        made({"kind": "level", "at": "1.1 ms", "at_least": "0.5 V"}), "chain[1].resistance",
        -(100e-6 / TAU) * math.exp(-100e-6 / TAU) / -math.expm1(-100e-6 / TAU),
    ),
    "headroom by the gain": (
        made({"kind": "headroom", "at_least": "0.1 V"}, chain=[{"kind": "gain", "gain": 2.0}],
             stimulus={"kind": "step", "before": 0.8, "after": 1.0, "at": 0.001}),
        "chain[1].gain", -2.0 / 1.3,
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", POWERS)
def test_powers(name: str) -> None:
    """The normalized derivative is the power of the law, to 1e-4."""
    scenario, key, power = POWERS[name]
    row = found(scenario, key)
    assert row.resolved
    assert row.normalized == pytest.approx(power, rel=1e-4)


def test_margins_and_tolerances() -> None:
    """1 % more resistance costs a hundredth of the time; 5 % of tolerance five times as much."""
    part = {**FILTER, "resistance": {"value": "10k", "tolerance": "5 %"}}
    row = found(made(SETTLING, stimulus=FULL, chain=[part]), "chain[1].resistance")
    time = LOG * TAU
    assert row.per_percent == pytest.approx(-0.01 * time, rel=1e-5)
    assert row.share_per_percent == pytest.approx(-0.01 * time / (500e-6 - time), rel=1e-5)
    assert row.per_tolerance == pytest.approx(0.05 * time, rel=1e-5)


def test_one_bit_more() -> None:
    """A whole number is changed by one: a bit costs ln 2 time constants."""
    row = found(made(SETTLING, stimulus=FULL), "adc.bits")
    assert row.per_percent == pytest.approx(-math.log(2.0) * TAU, rel=1e-6)


def test_the_strongest_first() -> None:
    """Rows fall in strength; what moves nothing comes last; those not resolved say why."""
    tone = {"kind": "sinad", "at_least": "60 dB"}
    sine = {"kind": "sine", "amplitude": 1.5, "frequency": "1013 Hz", "offset": 1.65}
    gain = {"kind": "gain", "gain": 1.0}
    scenario = made(tone, stimulus=sine, chain=[gain], simulation={"duration": "100 ms"})
    (check,) = sensitivities(scenario)
    sizes = [abs(row.slope.value) for row in check.rows if row.slope.value]
    assert sizes == sorted(sizes, reverse=True)
    groups = [0 if row.moves else 1 if not row.resolved else 2 for row in check.rows]
    assert groups == sorted(groups)
    assert all(row.slope.reason for row in check.rows if not row.resolved)
    assert "adc.bits" in [row.parameter.key for row in check.rows if row.moves]
    values = json.loads(json.dumps(check.as_dict(), allow_nan=False))
    assert len(values["parameters"]) == len(check.rows)


def test_two_calls_agree() -> None:
    """Nothing random differs between two calls: the noise is that of the seed."""
    amplifier = {"kind": "noninverting-amplifier", "gain": 20, "voltage_noise": "20 nV/sqrt(Hz)",
                 "gain_bandwidth": "1 MHz"}  # fmt: skip
    scenario = made({"kind": "noise", "at_most": "9 LSB", "basis": "run"}, chain=[amplifier],
                    stimulus={"kind": "step", "after": 0.1})  # fmt: skip
    first, second = sensitivities(scenario), sensitivities(scenario)
    assert first == second


@pytest.mark.parametrize(
    ("checks", "keys", "message"),
    [
        ([], [], r"no check"),
        ([SETTLING], ["chain[1].resistanc"], "did you mean 'resistance'"),
        ([SETTLING], ["adc.first"], "is zero"),
        ([SETTLING], ["chain[1].name"], "no number"),
    ],
)
def test_what_is_refused(checks: list[Any], keys: list[str], message: str) -> None:
    """A scenario without checks, a wrong key, a number that has no relative change."""
    with pytest.raises(InputError, match=message):
        sensitivities(made(*checks), keys)


def test_a_check_that_cannot_be_told_has_no_number() -> None:
    """Its rows say so, and nothing breaks."""
    (check,) = sensitivities(made({"kind": "sinad", "at_least": "60 dB"}))
    assert isinstance(check, CheckSensitivity)
    assert not any(row.resolved for row in check.rows)
