"""Undershoot, rise time, delay, latency and recovery against closed forms."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from checked import FILTER, STEP, TAU, beside, made, verdicts

import frontend_sim as fe
from frontend_sim.errors import ScenarioError
from frontend_sim.measure.checks import refuse_impossible

RISE = {"kind": "rise-time", "at_most": "1 ms"}
DELAY = {"kind": "delay", "at_most": "1 ms"}
SURGE: dict[str, Any] = {
    "stimulus": {"kind": "pulse", "low": 1.0, "high": 5.0, "at": "2 ms", "width": "1 ms"},
    "chain": [{"kind": "rail-limit", "name": "rails", "low": 0.0, "high": 2.0}, FILTER],
    "adc": {"rate": "100 kHz", "bits": 16, "high": 3.3},
}


def test_rise_time_of_one_section() -> None:
    """ln 9 time constants, to 1e-9, whatever the conversions; likewise a fall, and other shares."""
    assert verdicts(RISE)[0].value == pytest.approx(TAU * math.log(9.0), rel=1e-9)
    fall = {"kind": "step", "before": "2 V", "after": "1 V", "at": "1.23 ms"}
    assert verdicts(RISE, stimulus=fall)[0].value == pytest.approx(TAU * math.log(9.0), rel=1e-9)
    (found,) = verdicts({**RISE, "lower": "20 %", "upper": "80 %"})
    assert found.value == pytest.approx(TAU * math.log(4.0), rel=1e-9)


def test_rise_time_of_a_ringing_pair_counts_the_first_passage() -> None:
    """With damping ratio 0.2 the pair passes 90 % many times; bisection on its step response."""
    pair = {"kind": "second-order", "corner": "1 kHz", "quality_factor": 2.5}
    z, w = 0.2, 2.0 * math.pi * 1e3
    root = math.sqrt(1.0 - z * z)

    def value(t: float) -> float:
        ring = math.cos(w * root * t) + z / root * math.sin(w * root * t)
        return 1.0 - math.exp(-z * w * t) * ring

    def passes(share: float) -> float:
        low, high = 0.0, math.pi / (w * root)
        for _ in range(100):
            middle = 0.5 * (low + high)
            low, high = (middle, high) if value(middle) < share else (low, middle)
        return low

    (found,) = verdicts(RISE, chain=[pair])
    assert found.value == pytest.approx(passes(0.9) - passes(0.1), rel=1e-8)
    (late,) = verdicts(DELAY, chain=[pair])
    assert late.value == pytest.approx(passes(0.5), rel=1e-8)


def test_delay_counts_transport_and_filter() -> None:
    """ln 2 time constants and every pure delay; a chain without states only has the latter."""
    line = {"kind": "transport-delay", "delay": "0.3 ms"}
    (found,) = verdicts(DELAY, chain=[FILTER, line])
    assert found.value == pytest.approx(0.3e-3 + TAU * math.log(2.0), rel=1e-9)
    assert verdicts(DELAY, chain=[line])[0].value == pytest.approx(0.3e-3, rel=1e-9)
    assert verdicts(DELAY, chain=[])[0].value == 0.0
    (sixty,) = verdicts({**DELAY, "share": "63.212055882855767 %"})
    assert sixty.value == pytest.approx(TAU, rel=1e-9)


def test_edges_behind_a_limit() -> None:
    """A slope of 1 V/ms takes 0.8 ms from 10 to 90 % of a volt, and half of it 0.5 ms."""
    slow = {"kind": "slew-limit", "slew_rate": "1 V/ms"}
    (rise,) = verdicts(RISE, chain=[slow])
    assert rise.value == pytest.approx(0.8e-3, rel=1e-6)
    (late,) = verdicts(DELAY, chain=[slow])
    assert late.value == pytest.approx(0.5e-3, rel=1e-6)


def test_lower_limits_of_times() -> None:
    """An edge that is too fast fails, and the slowest stage is to be made slower."""
    (found,) = verdicts({"kind": "rise-time", "at_least": "1 ms"})
    assert (found.verdict, found.bound) == ("fails", "at least")
    assert found.advice.startswith("make 'input filter' slower")
    with pytest.raises(ScenarioError, match="no limit"):
        made({"kind": "delay"})
    with pytest.raises(ScenarioError, match=r"must lie above lower"):
        made({**RISE, "lower": 0.5, "upper": 0.4})


def test_latency_ends_with_a_conversion() -> None:
    """The first conversion at or after the passage of one half, and what lies between."""
    check = {"kind": "latency", "at_most": "1 ms"}
    late = TAU * math.log(2.0)
    stimulus = {**STEP, "at": "1.031 ms"}
    (found,) = verdicts(check, stimulus=stimulus)
    conversion = math.ceil((1.031e-3 + late) * 20e3) / 20e3
    assert found.value == pytest.approx(conversion - 1.031e-3, rel=1e-9)
    pin = beside("latency: delay of the pin", check, stimulus=stimulus)
    assert pin == pytest.approx(late, rel=1e-9)


def test_latency_of_a_sinc_filter() -> None:
    """Half of a step is through a sinc^3 after 1.5 of its 3 blocks, so by the second code."""
    adc = {"kind": "oversampling", "modulator_rate": "64 kHz", "decimation": 64, "order": 3,
           "bits": 16, "high": 3.3}  # fmt: skip
    scenario = made(
        {"kind": "latency", "at_most": "1 ms"}, stimulus={**STEP, "at": "9.9999 ms"}, chain=[]
    )
    values = scenario.resolved() | {"adc": adc}
    values["check"] = [{"kind": "latency", "at_most": "1 ms"}]
    slow = fe.Scenario.model_validate(values)
    found = next(row for row in fe.evaluate_checks(fe.simulate(slow)) if row.verdict != "none")
    # Blocks of 1 ms; the step begins with a block, its second one brings 5/6, the first 1/6.
    assert found.value == pytest.approx(2e-3 - 1.0 / 64e3 + 1e-7, abs=2e-6)
    assert found.verdict == "fails"
    assert "behind the pin" in found.advice


def test_undershoot_of_an_all_pass() -> None:
    """(w - s)/(w + s) begins at -1 of the step, from there on it rises; behind it a slow filter."""
    check = {"kind": "undershoot", "at_most": "10 %"}
    all_pass = {"kind": "poles-zeros", "poles": [-5e3], "zeros": [5e3], "gain": -1.0}
    assert verdicts(check, chain=[all_pass])[0].value == pytest.approx(1.0, rel=1e-9)
    (found,) = verdicts(check, chain=[all_pass, FILTER])
    t = np.linspace(0.0, 1e-3, 1_000_001)
    a, b = 5e3, 1.0 / TAU
    # Partial fractions of (a - s) b / (s (a + s) (s + b)).
    response = 1.0 - 2.0 * b * np.exp(-a * t) / (b - a) + (a + b) * np.exp(-b * t) / (b - a)
    assert found.value == pytest.approx(-float(np.min(response)), rel=1e-6)
    assert verdicts(check)[0].value == 0.0


@pytest.mark.parametrize("kind", ["undershoot", "rise-time", "delay", "latency"])
def test_what_never_rests_is_refused(kind: str) -> None:
    """Before any run: the stimulus has no event after which it rests."""
    check = {"kind": kind, "at_most": "10 %" if kind == "undershoot" else "1 ms"}
    sine = {"kind": "sine", "amplitude": 1, "frequency": 50}
    with pytest.raises(ScenarioError, match="changes and then rests"):
        refuse_impossible(made(check, stimulus=sine))


def test_recovery_behind_rails() -> None:
    """The rails hold 2 V where 5 V came; behind them the filter falls from 2 V, not from 5 V.

    Both fall with the same time constant, so they differ by 3 V exp(-t/T), which is below 1 LSB
    after T ln(3 V / LSB).
    """
    check = {"kind": "recovery", "within": "1 LSB", "at_most": "2 ms", "after": "3 ms"}
    (found,) = verdicts(check, **SURGE)
    lsb = 3.3 / 2**16
    expected = TAU * math.log(3.0 / lsb)
    assert found.value is not None
    assert found.value == pytest.approx(expected, abs=1.01e-5)
    assert found.verdict == "holds"


def test_recovery_finds_the_end_of_the_overload() -> None:
    """Without limits the pin would be beyond 3.3 V until T ln(4 / 2.3) after the pulse."""
    check = {"kind": "recovery", "within": "1 LSB", "at_most": "2 ms"}
    since = beside("recovery: overload ends", check, **SURGE)
    assert since == pytest.approx(3e-3 + TAU * math.log(4.0 / 2.3), abs=1.01e-5)


def test_recovery_that_cannot_be_told() -> None:
    """No overload, a run that ends too early, a sensor with a curve: each with its reason."""
    check = {"kind": "recovery", "within": "1 LSB", "at_most": "2 ms"}
    (none,) = verdicts(check)
    assert "nothing overloads the converter" in none.method
    (early,) = verdicts(check, **SURGE, simulation={"duration": "3.2 ms"})
    assert "has not recovered when the run ends" in early.method
    rtd = {"kind": "rtd", "excitation_current": "1 mA"}
    warm = {"kind": "step", "before": "20 degC", "after": "30 degC"}
    with pytest.raises(ScenarioError, match="settling from the end of the overload"):
        refuse_impossible(made(check, stimulus=warm, chain=[rtd]))


def test_recovery_of_an_overload_that_never_ends() -> None:
    """A sine that is cut off at the last conversion too has not recovered, and does not hold."""
    check = {"kind": "recovery", "within": "1 LSB", "at_most": "2 ms"}
    loud = {"kind": "sine", "amplitude": 3, "frequency": 97, "offset": 1.6, "phase": "20 deg"}
    (found,) = verdicts(check, stimulus=loud, chain=[], simulation={"duration": "2 ms"})
    assert (found.verdict, found.value) == ("fails", None)
    assert "has not recovered when the run ends" in found.method


def test_settling_after_power_up() -> None:
    """Power that comes at t = 0 is an event there: half an LSB in ln 2^(N+1) time constants.

    The bridge stands on its load; only its excitation begins with the run.
    """
    chain = [{"kind": "gain", "gain": 3.3}, FILTER]
    check = {"kind": "settling", "within": "0.5 LSB", "before": "1 ms"}
    still = {"kind": "step", "before": "1 V", "after": "1 V"}
    (found,) = verdicts(check, stimulus=still, chain=chain, simulation={"initial": "rest"})
    assert found.value == pytest.approx(TAU * math.log(2.0**13), rel=1e-9)


def test_settling_after_an_overload() -> None:
    """From the fall of the pulse on: the rails held 2 V, so the filter has 1 V to fall."""
    check = {"kind": "settling", "within": "1 LSB", "before": "2 ms"}
    (found,) = verdicts(check, **SURGE)
    lsb = 3.3 / 2**16
    assert found.value == pytest.approx(TAU * math.log(1.0 / lsb), abs=1.01e-5)
    assert "conversions" in found.method
