"""The whole inspection of a scenario."""

from __future__ import annotations

import json
import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.measure.response import Inspection, inspect_scenario
from frontend_sim.scenario.model import Scenario

LOW = {"kind": "rc-lowpass", "resistance": "10 kohm", "capacitance": "4.7 nF"}
HIGH = {"kind": "rc-highpass", "resistance": "10 kohm", "capacitance": "4.7 nF"}
DOUBLE = {"kind": "gain", "gain": 2}


def scenario(*stages: dict[str, Any], bits: int = 12, **simulation: Any) -> Scenario:
    """Make a scenario: a step, some stages, and an ADC of 3.3 V at 20 kHz."""
    return Scenario.model_validate(
        {
            "title": "invented",
            "stimulus": {"kind": "step", "before": 0.0, "after": 1.0},
            "chain": stages,
            "adc": {"rate": "20 kHz", "bits": bits, "high": "3.3 V"},
            "simulation": simulation,
        }
    )


def inspected(*stages: dict[str, Any], **simulation: Any) -> Inspection:
    """Inspect a scenario."""
    return inspect_scenario(scenario(*stages, **simulation))


@pytest.mark.parametrize("bits", [4, 12, 16, 24, 32])
def test_half_an_lsb_of_a_full_scale_step(bits):
    """RC ln 2^(N+1), whatever gain follows: the step is the one that fills the range."""
    found = inspect_scenario(scenario(LOW, DOUBLE, bits=bits))
    times = {each.label: each.time for each in found.time.settlings}
    tau = 10e3 * 4.7e-9
    assert times["0.5 LSB"] == pytest.approx(tau * math.log(2.0 ** (bits + 1)), rel=1e-9)
    assert times["1 %"] == pytest.approx(tau * math.log(100.0), rel=1e-9)
    assert times["0.1 %"] == pytest.approx(tau * math.log(1000.0), rel=1e-9)
    assert found.time.full_scale_step == pytest.approx(1.65, rel=1e-15)


def test_a_clock_that_is_off_attenuates_at_its_own_rate():
    """20 kHz and 2 % more: |H| of one pole at 10.2 kHz and 20.4 kHz, where codes fold."""
    nominal = scenario(LOW)
    off = nominal.model_copy(update={"adc": nominal.adc.model_copy(update={"rate_error": 0.02})})
    half, whole = inspect_scenario(off).frequency.attenuations
    assert (half.frequency, whole.frequency) == (pytest.approx(10.2e3), pytest.approx(20.4e3))
    for found in (half, whole):
        x = 2.0 * math.pi * found.frequency * 10e3 * 4.7e-9
        assert found.below_dc == pytest.approx(10.0 * math.log10(1.0 + x * x), rel=1e-12)


def test_two_sections_with_gain_two():
    """From 0 to 4 times the step, critically damped, as the issue's example wants it."""
    found = inspected(LOW, DOUBLE, LOW, DOUBLE)
    assert (found.time.start, found.time.end) == (0.0, 4.0)
    assert found.time.shape.word == "critically damped"
    assert found.order == 2
    assert len(found.poles) == 2


def test_a_narrow_band_pass_at_32_bits():
    """Its step is that of a full-range sine at its centre, and the ring is followed to its end.

    y = exp(-a t) sin(wd t) w0/(Q wd), so |y| leaves the band for the last time within a period of
    the time at which its envelope does.
    """
    found = inspect_scenario(
        scenario(
            {"kind": "second-order", "corner": 1e3, "quality_factor": 1e4, "response": "band-pass"},
            bits=32,
        )
    )
    assert found.time.full_scale_step == pytest.approx(3.3, rel=1e-9)
    expected = 2e4 / (2e3 * math.pi) * math.log(1e-4 * 2.0**33)
    assert found.time.settlings[-1].time == pytest.approx(expected, abs=1e-3)


def test_notes():
    """Passive sections in a row, and a pre-warp out of reach, are told."""
    notes = "\n".join(inspected(LOW, HIGH, discretization="bilinear", prewarp="15 kHz").notes)
    assert "'1 rc-lowpass' and '2 rc-highpass' are passive and stand in a row" in notes
    assert "prewarp 15000 Hz is not below half the grid rate, 10000 Hz" in notes
    assert inspected(LOW, DOUBLE, LOW).notes == ()


def test_models_at_the_grid_rate():
    """All three models are compared at the scenario's grid rate."""
    found = inspected(LOW, grid_rate="1 MHz")
    assert [model.method for model in found.models] == ["zoh", "foh", "bilinear"]
    assert {model.grid_rate for model in found.models} == {1e6}
    assert found.models[2].corners[0].warping < 0.0


@pytest.mark.parametrize(
    ("stage", "note"),
    [
        ({"kind": "poles-zeros", "poles": [0.0]}, "drifts away without bound"),
        ({"kind": "poles-zeros", "poles": [[0.0, 5.0], [0.0, -5.0]]}, "rings for ever"),
    ],
)
def test_what_never_settles_says_so(stage, note):
    """No settling times, no corner, and a note that tells why."""
    found = inspected(stage)
    assert found.time.settlings == ()
    assert found.frequency.corners == ()
    assert any(note in text for text in found.notes)


def test_as_dict_is_json():
    """Plain data without NaN; infinities are null."""
    found = inspected(HIGH).as_dict()
    text = json.dumps(found, allow_nan=False)
    assert json.loads(text) == found
    assert found["frequency"]["largest"]["frequency"] is None
    assert found["adc"] == {
        "rate": 20e3, "bits": 12, "low": 0.0, "high": 3.3, "lsb": 3.3 / 4096,
    }  # fmt: skip
    assert "response" not in found


stage_values = st.one_of(
    st.fixed_dictionaries(
        {
            "kind": st.sampled_from(["rc-lowpass", "rc-highpass"]),
            "resistance": st.floats(1.0, 1e7),
            "capacitance": st.floats(1e-12, 1e-3),
        }
    ),
    st.fixed_dictionaries(
        {
            "kind": st.just("gain"),
            "gain": st.floats(-1e3, 1e3).filter(lambda gain: gain == 0.0 or abs(gain) > 1e-9),
        }
    ),
    st.fixed_dictionaries({"kind": st.just("transport-delay"), "delay": st.floats(1e-9, 1.0)}),
    st.fixed_dictionaries(
        {
            "kind": st.sampled_from(["butterworth", "bessel", "chebyshev"]),
            "order": st.integers(1, 8),
            "corner": st.floats(1e-2, 1e6),
            "response": st.sampled_from(["low-pass", "high-pass"]),
        }
    ),
    st.fixed_dictionaries(
        {
            "kind": st.just("second-order"),
            "corner": st.floats(1e-2, 1e6),
            "quality_factor": st.floats(0.05, 50.0),
            "response": st.sampled_from(["low-pass", "high-pass", "band-pass", "notch"]),
        }
    ),
    st.fixed_dictionaries(
        {
            "kind": st.just("poles-zeros"),
            "poles": st.lists(st.floats(-1e6, -1e-6) | st.just(0.0), max_size=3),
        }
    ),
)


@settings(max_examples=15, deadline=None)
@given(stages=st.lists(stage_values, max_size=4))
def test_any_chain_can_be_inspected(stages):
    """Whatever the user puts together, numbers come out that JSON can carry, none of them NaN."""
    found = inspected(*stages)
    json.dumps(found.as_dict(), allow_nan=False)
    assert "nan" not in json.dumps(found.as_dict())
    for settling in found.time.settlings:
        assert settling.time >= found.time.delay
    assert np.all(np.isfinite([corner.frequency for corner in found.frequency.corners]))
