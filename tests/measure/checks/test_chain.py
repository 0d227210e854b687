"""Checks on the chain alone: corner, rejection, aliases."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from checked import FILTER, TAU, beside, made, verdicts
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.errors import ScenarioError
from frontend_sim.measure.checks import evaluate_checks, refuse_impossible
from frontend_sim.simulation import Simulation

CORNER = 1.0 / (2.0 * math.pi * TAU)


def butterworth(order: int, corner: float = 1e3, **keys: Any) -> dict[str, Any]:
    """Return a Butterworth stage."""
    return {"kind": "butterworth", "order": order, "corner": corner, **keys}


def below(order: int, frequency: float, corner: float = 1e3) -> float:
    """Return the attenuation of a Butterworth low pass, 10 lg(1 + (f/fc)^2n) [dB]."""
    return 10.0 * math.log10(1.0 + (frequency / corner) ** (2 * order))


def test_corner_of_one_section() -> None:
    """1 / (2 pi RC), against a limit on either side."""
    checks = [
        {"kind": "corner", "at_least": "3 kHz", "at_most": "4 kHz"},
        {"kind": "corner", "name": "high", "at_least": "5 kHz"},
    ]
    first, second = verdicts(*checks)
    assert first.value == pytest.approx(CORNER, rel=1e-9)
    assert (first.verdict, second.verdict) == ("holds", "fails")
    assert second.margin == pytest.approx(CORNER - 5e3, rel=1e-9)
    assert "raise the corner of 'input filter' by 48 %" in second.advice
    assert pytest.approx(1.476, abs=1e-3) == 5e3 / CORNER


def test_the_advice_on_a_corner_is_right_to_first_order() -> None:
    """Raised by what is advised, one section alone has its corner where it was asked for."""
    (found,) = verdicts({"kind": "corner", "at_least": "10 kHz"})
    factor = float(found.advice.split("factor of ")[1].split(";")[0])
    faster = {**FILTER, "resistance": 10e3 / factor}
    (again,) = verdicts({"kind": "corner", "at_least": "10 kHz"}, chain=[faster])
    assert again.value == pytest.approx(10e3, rel=5e-3)


def test_bands_without_an_end() -> None:
    """A high pass has no upper corner, a low pass no lower one, a gain neither."""
    high_pass = {"kind": "rc-highpass", "resistance": "10k", "capacitance": "4n7"}
    upper, lower = {"kind": "corner", "at_least": 1}, {"kind": "corner", "side": "lower",
                                                       "at_most": "5 kHz"}  # fmt: skip
    assert [row.value for row in verdicts(upper, lower)] == [pytest.approx(CORNER), 0.0]
    found = verdicts(upper, lower, chain=[high_pass])
    assert [row.value for row in found] == [math.inf, pytest.approx(CORNER)]
    assert [row.value for row in verdicts(upper, lower, chain=[])] == [math.inf, 0.0]
    assert all(row.verdict == "holds" for row in found)


def test_a_band_stop_has_its_ends_outside() -> None:
    """The outermost corners count: a notch has none at either end."""
    notch = {
        "kind": "poles-zeros", "zeros": [[0, 1e3], [0, -1e3]], "poles": [[-500, 1e3], [-500, -1e3]],
        "gain": 1.0,
    }  # fmt: skip
    keys = [{"kind": "corner", "at_least": 1}, {"kind": "corner", "side": "lower", "at_most": 1}]
    assert [row.value for row in verdicts(*keys, chain=[notch])] == [math.inf, 0.0]


@pytest.mark.parametrize("order", [1, 2, 4, 6, 8])
def test_rejection_of_butterworth_filters(order: int) -> None:
    """10 lg(1 + (f/fc)^2n) at five times the corner, to 1e-6 dB.

    Source: S. Butterworth 1930, "On the theory of filter amplifiers" (from memory).
    """
    check = {"kind": "rejection", "frequency": "5 kHz", "at_least": "40 dB"}
    (found,) = verdicts(check, chain=[butterworth(order)])
    assert found.value == pytest.approx(below(order, 5e3), abs=1e-6)
    assert found.verdict == ("holds" if below(order, 5e3) >= 40.0 else "fails")


def test_rejection_takes_the_worst_of_a_band_and_of_harmonics() -> None:
    """A low pass is worst at the lowest frequency, 0.9 f, a high pass at the highest, 3.3 f."""
    check = {
        "kind": "rejection", "frequency": "5 kHz", "deviation": "10 %", "harmonics": 3,
        "at_least": "30 dB",
    }  # fmt: skip
    (low,) = verdicts(check, chain=[butterworth(4)])
    assert low.value == pytest.approx(below(4, 4.5e3), abs=1e-6)
    (high,) = verdicts(check, chain=[butterworth(4, 50e3, response="high-pass")])
    assert high.value == pytest.approx(below(4, 50e3, 16.5e3), abs=1e-6)


def test_rejection_from_dc_or_from_the_largest_gain() -> None:
    """A resonance of Q = 5 lifts the largest gain by Q / sqrt(1 - 1/(4 Q²)), and dc not at all."""
    pair = {"kind": "second-order", "corner": "1 kHz", "quality_factor": 5.0}
    check = {"kind": "rejection", "frequency": "10 kHz", "at_least": "10 dB"}
    (dc,) = verdicts({**check, "against": "dc"}, chain=[pair])
    (largest,) = verdicts(check, chain=[pair])
    lift = 20.0 * math.log10(5.0 / math.sqrt(1.0 - 0.01))
    assert largest.value - dc.value == pytest.approx(lift, abs=1e-6)


def test_a_high_pass_has_no_dc_to_count_from() -> None:
    """What cannot be told from the chain is told before the run, with the other choice."""
    high_pass = {"kind": "rc-highpass", "resistance": "10k", "capacitance": "4n7"}
    check = {"kind": "rejection", "frequency": 50, "at_least": 20, "against": "dc"}
    with pytest.raises(ScenarioError, match=r'gain at dc of the chain is 0.*against = "largest"'):
        refuse_impossible(made(check, chain=[high_pass]))


def test_what_a_notch_takes_out_has_no_end() -> None:
    """A zero on the axis attenuates without bound, and that holds any limit."""
    notch = {
        "kind": "poles-zeros", "zeros": [[0, 1e3], [0, -1e3]], "poles": [[-50, 1e3], [-50, -1e3]],
        "gain": 1.0,
    }  # fmt: skip
    check = {"kind": "rejection", "frequency": 1e3 / (2 * math.pi), "at_least": "100 dB"}
    (found,) = verdicts(check, chain=[notch])
    assert found.verdict == "holds"
    assert (found.value or 0.0) > 250.0


@pytest.mark.parametrize("keys", [{}, {"band": "2 kHz"}, {"frequency": "37 kHz"}])
def test_alias_attenuation(keys: dict[str, Any]) -> None:
    """From half the rate on, from the rate less the band on, or at one frequency: Butterworth."""
    at = {"": 10e3, "band": 18e3, "frequency": 37e3}[next(iter(keys), "")]
    check = {"kind": "alias-attenuation", "at_least": "80 dB", **keys}
    chain = [butterworth(4)]
    (found,) = verdicts(check, chain=chain)
    assert found.value == pytest.approx(below(4, at), abs=1e-6)
    lands = beside("alias-attenuation: folds to", check, chain=chain)
    assert lands == pytest.approx(abs(at - 20e3 * round(at / 20e3)), abs=1e-6)


def test_alias_attenuation_counts_from_the_true_rate() -> None:
    """A clock that is 10 % slow folds from 9 kHz on, not from 10 kHz."""
    check = {"kind": "alias-attenuation", "at_least": "80 dB"}
    (found,) = verdicts(check, chain=[butterworth(4)], adc={"rate_error": -0.1})
    assert found.value == pytest.approx(below(4, 9e3), abs=1e-6)
    with pytest.raises(ScenarioError, match="below half the conversion rate, 11 kHz"):
        verdicts({**check, "frequency": "10.5 kHz"}, adc={"rate_error": 0.1})


def test_alias_attenuation_looks_up_to_infinity() -> None:
    """A chain that lets the highest frequencies through again is worst there, and says so."""
    shelf = {"kind": "poles-zeros", "poles": [-1e3], "zeros": [-1e5], "gain": 0.01}
    check = {"kind": "alias-attenuation", "at_least": "50 dB"}
    (found,) = verdicts(check, chain=[shelf])
    near, far = (math.hypot(1.0, rate / (2.0 * math.pi * 10e3)) for rate in (1e3, 1e5))
    expected = 20.0 * math.log10(near / far / 0.01)
    assert found.value == pytest.approx(expected, abs=0.01)
    rising = {"kind": "poles-zeros", "poles": [-1e7, -1e3], "zeros": [-1e5, -1e5], "gain": 1.0}
    (end,) = verdicts(check, chain=[rising])
    assert "at high frequencies" in end.method
    assert end.value == pytest.approx(0.0, abs=1e-9)


def test_a_shift_of_the_corner_is_right_to_first_order() -> None:
    """Far above the corner a low pass of order n falls with its corner to the power n.

    At 10 kHz behind 4th-order 1 kHz: 80 dB; for 100 dB the corner must fall by 10^(20/80) = 1.78,
    which is by 44 %.
    """
    low_pass = butterworth(4, name="anti-alias")
    (found,) = verdicts({"kind": "alias-attenuation", "at_least": "100 dB"}, chain=[low_pass])
    assert "lower the corner of 'anti-alias' by about 44 %" in found.advice
    assert "or raise the order of the filter or the conversion rate" in found.advice


@settings(max_examples=30, deadline=None)
@given(st.floats(10.0, 1e5), st.integers(1, 8), st.floats(0.0, 0.2))
def test_no_frequency_of_a_band_is_worse(frequency: float, order: int, deviation: float) -> None:
    """Wherever the band lies, a Butterworth low pass nowhere in it attenuates less than is told."""
    check = {
        "kind": "rejection", "frequency": frequency, "deviation": deviation, "at_least": 1e-9,
    }  # fmt: skip
    scenario = made(check, chain=[butterworth(order)], simulation={"duration": "1 ms"})
    value = evaluate_checks(Simulation(scenario))[0].value
    inside = np.linspace(frequency * (1 - deviation), frequency * (1 + deviation), 1001)
    least = min(below(order, float(f)) for f in inside)
    assert value == pytest.approx(least, abs=1e-6)
