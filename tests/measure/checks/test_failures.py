"""Where in time checks fail, on runs for which that is plain."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from checked import TAU, made

from frontend_sim.measure.checks import EVALUATIONS, evaluate_checks, failures_in
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.simulation import simulate

STEP_AT, END = 1e-3, 20e-3
SINE = {"kind": "sine", "amplitude": "1.7 V", "offset": "1.65 V", "frequency": "100 Hz"}


def failures(*checks: dict[str, Any], **tables: Any) -> Any:
    """Run the setting, and return where its checks fail, one row for each stretch."""
    scenario = made(*checks, **tables)
    run = simulate(scenario)
    assert "fails" in {row.verdict for row in evaluate_checks(run)}
    return failures_in(Subject(scenario, run))


def test_what_holds_fails_nowhere() -> None:
    """A check that holds beside one that fails adds nothing to where that fails."""
    fails = {"kind": "level", "at": "7 ms", "at_most": "0.5 V"}
    holds = {"kind": "clipping", "at_most": "1 %"}
    assert failures(fails, holds).tolist() == [[7e-3, 7e-3]]


def test_settling_fails_from_the_time_granted_to_the_last_exit() -> None:
    """Of one section, the last exit from 1 % is ln(100) time constants after the step."""
    check = {"kind": "settling", "within": "1 %", "before": "0.1 ms"}
    (found,) = failures(check)
    assert found.tolist() == pytest.approx(
        [STEP_AT + 1e-4, STEP_AT + np.log(100.0) * TAU], rel=1e-9
    )


@pytest.mark.parametrize(
    ("check", "start", "length"),
    [
        ({"kind": "rise-time", "at_most": "10 us"}, np.log(1.0 / 0.9), np.log(9.0)),
        ({"kind": "delay", "at_most": "10 us"}, 0.0, np.log(2.0)),
    ],
)
def test_an_edge_fails_while_it_lasts(check: dict[str, Any], start: float, length: float) -> None:
    """10 to 90 %, and the event to half way, of one section, in time constants."""
    (found,) = failures(check)
    begins = STEP_AT + start * TAU
    assert found.tolist() == pytest.approx([begins, begins + length * TAU], abs=1e-3 * TAU)


@pytest.mark.parametrize(
    "check", [{"kind": "clipping"}, {"kind": "headroom", "at_least": "0 V"}], ids=["codes", "pin"]
)
def test_clipping_fails_where_the_sine_is_beyond_the_range(check: dict[str, Any]) -> None:
    """1.7 V around the middle of 3.3 V, without a chain: at the conversions beyond it."""
    found = failures(check, stimulus=SINE, chain=[])
    time = np.arange(400) / 20e3
    beyond = time[np.abs(1.7 * np.sin(200.0 * np.pi * time)) > 1.65]
    kept = found[:, 0]
    assert np.array_equal(found[:, 1], kept)
    if check["kind"] == "headroom":
        assert kept.tolist() == beyond.tolist()
    else:  # a pin that is nearer to the end than half a code has the last code, unclipped
        assert set(kept) <= set(beyond)
        assert len(beyond) - len(kept) <= 8


def test_a_peak_fails_at_its_conversions_and_an_rms_in_the_whole_run() -> None:
    """The same error, held to its peak and to its rms, from 5 ms on."""
    check = {"kind": "total-error", "at_most": "0.4 LSB", "after": "5 ms"}
    peak = failures(check, stimulus=SINE)
    assert len(peak) > 1
    assert np.array_equal(peak[:, 0], peak[:, 1])
    assert peak.min() >= 5e-3
    whole = failures({**check, "quantity": "rms", "at_most": "0.01 LSB"}, stimulus=SINE)
    assert whole.tolist() == [[5e-3, END]]


@pytest.mark.parametrize(
    ("check", "stretches"),
    [
        ({"kind": "noise", "basis": "run", "at_most": "1 nV", "after": "2 ms"}, [[2e-3, END]]),
        ({"kind": "noise", "basis": "budget", "at_most": "1 nV"}, []),
        ({"kind": "noise-free-bits", "basis": "budget", "at_least": 40}, []),
        ({"kind": "corner", "at_least": "1 MHz"}, []),
        ({"kind": "sinad", "at_least": "200 dB", "frequency": "100 Hz"}, [[0.0, END]]),
    ],
)
def test_a_number_of_all_conversions_fails_at_all_and_one_of_the_circuit_nowhere(
    check: dict[str, Any], stretches: list[list[float]]
) -> None:
    """What is made from the run as a whole has no place in it that is better than another."""
    tables = {"stimulus": SINE, "adc": {"input_noise": "1 mV", "low": -1, "high": 5}}
    assert failures(check, **tables).tolist() == stretches


def test_what_cannot_be_told_fails_in_the_whole_run() -> None:
    """A sine never rests, so nothing settles; where it would have, nobody knows."""
    check = {"kind": "settling", "within": "1 uV", "before": "1 ms"}
    assert failures(check, stimulus=SINE).tolist() == [[0.0, END]]


@pytest.mark.parametrize(
    "check",
    [
        {"kind": "overshoot", "at_most": "1 %"},
        {"kind": "undershoot", "at_most": "1 LSB"},
        {"kind": "droop", "start": "2 ms", "stop": "9 ms", "at_most": "1 %"},
    ],
    ids=lambda check: check["kind"],
)
def test_shapes_fail_near_their_event(check: dict[str, Any]) -> None:
    """A bump, a step back, a sinking top: the stretches begin no earlier than what they are of."""
    chains = {
        "overshoot": [{"kind": "chebyshev", "order": 4, "corner": "2 kHz", "ripple": "3 dB"}],
        "undershoot": [
            {"kind": "poles-zeros", "zeros": [2e4], "poles": [-2e4, -3e4], "gain": -3e4}
        ],
        "droop": [{"kind": "rc-highpass", "resistance": "10k", "capacitance": "1u"}],
    }
    found = failures(check, chain=chains[check["kind"]])
    if check["kind"] == "droop":
        assert found.tolist() == [[2e-3, 9e-3]]
        return
    assert found.min() == STEP_AT
    assert found.max() < STEP_AT + 3e-3


def test_every_kind_that_reads_no_conversions_tells_its_own_place() -> None:
    """Kinds without columns that look at the signal; all others without are of the circuit."""
    without = {kind for kind, each in EVALUATIONS.items() if not each.columns}
    of_the_circuit = {"corner", "rejection", "alias-attenuation", "grid-error"}
    assert without - of_the_circuit == {"rise-time", "delay", "level", "droop"}
