"""The settling check: last exits against closed forms, and against the run itself."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from checked import FILTER, STEP, TABLES, TAU, beside, made, verdicts
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.linalg import expm

from frontend_sim.analog.chain import Chain, chain_of
from frontend_sim.errors import ScenarioError
from frontend_sim.measure.checks import evaluate_checks, refuse_impossible
from frontend_sim.measure.checks.settled import PROVEN, SAMPLED
from frontend_sim.scenario import Scenario
from frontend_sim.simulation import Simulation, simulate

Real = NDArray[np.float64]

TICK = 1e-6
"""Of a timer of 1 MHz [s]."""


def check(**keys: Any) -> dict[str, Any]:
    """Return a settling check."""
    return {"kind": "settling", "within": "0.5 LSB", "before": "10 ms", **keys}


@pytest.mark.parametrize("bits", range(8, 17))
def test_first_order_takes_ln_2_to_the_bits_plus_one(bits: int) -> None:
    """A full-scale step through RC settles to half an LSB in RC ln 2^(N+1), closed form.

    The time, to 1e-9 of it; the ticks, exactly; the conversions, within one.
    """
    expected = TAU * (bits + 1) * math.log(2.0)
    tables: dict[str, Any] = {"adc": {"bits": bits, "high": 1.0}}
    (found,) = verdicts(check(), **tables)
    assert found.value == pytest.approx(expected, rel=1e-9)
    assert found.unit == "s"
    assert (found.verdict, found.method) == ("holds", PROVEN)
    assert found.margin == pytest.approx(10e-3 - expected, rel=1e-9)
    timer = check(timer_clock="1 MHz")
    ticks = beside("settling: timer ticks", timer, **tables)
    assert ticks == math.ceil(expected / TICK)
    lost = beside("settling: conversions to discard", timer, **tables)
    assert lost == math.floor(expected * 20e3) + 1  # The event is at a conversion.


@pytest.mark.parametrize("order", [1, 3, 5])
@pytest.mark.parametrize("conversion", ["continuous", "restarted"])
def test_a_sinc_filter_of_any_order_leaves_the_pin_alone(order: int, conversion: str) -> None:
    """The pin settles as it does before a sampling converter: RC ln 2^13 after a full-scale step.

    The first code of a filter of fifth order takes five periods of the rate.
    """
    adc = {
        "kind": "oversampling", "bits": 12, "high": 1.0, "modulator_rate": "320 kHz",
        "order": order, "decimation": 16, "conversion": conversion,
    }  # fmt: skip
    scenario = Scenario.model_validate({**TABLES, "adc": adc, "check": [check()]})
    found = evaluate_checks(simulate(scenario))[0]
    assert found.value == pytest.approx(TAU * 13.0 * math.log(2.0), rel=1e-9)
    assert found.method == PROVEN


@pytest.mark.parametrize(
    ("order", "cycles"), [(1, 1.434), (2, 1.866), (3, 2.763), (4, 3.718), (6, 5.369)]
)
def test_butterworth_rows(order: int, cycles: float) -> None:
    """Corner times settling time to 2^-13 of the step, at three printed decimals.

    The row is that of ``tests/measure/response/test_settling.py``, computed from closed forms.
    """
    low_pass = {"kind": "butterworth", "order": order, "corner": "1 kHz"}
    (found,) = verdicts(check(), chain=[low_pass], adc={"high": 1.0})
    assert found.value == pytest.approx(cycles * 1e-3, abs=0.51e-6)


def test_a_limit_says_what_it_is_a_share_of() -> None:
    """0.1 % of a step from 1 V to 3 V is 2 mV, whatever the range: tau ln 1000."""
    step = {"kind": "step", "before": "1 V", "after": "3 V", "at": "1 ms"}
    (share,) = verdicts(check(within="0.1 %"), stimulus=step)
    (volts,) = verdicts(check(within="2 mV"), stimulus=step)
    assert share.value == pytest.approx(TAU * math.log(1000.0), rel=1e-9)
    assert volts.value == pytest.approx(share.value, rel=1e-9)


def test_a_high_pass_settles_where_it_was() -> None:
    """The share is one of the largest excursion, and the end is the rest before: tau ln 100."""
    high_pass = {"kind": "rc-highpass", "resistance": "10k", "capacitance": "4n7"}
    (found,) = verdicts(check(within="1 %"), chain=[high_pass])
    assert found.value == pytest.approx(TAU * math.log(100.0), rel=1e-9)


def test_a_delay_counts() -> None:
    """The time runs from the event at the stimulus, so a pure delay is part of it."""
    delay = {"kind": "transport-delay", "delay": "1 ms"}
    (found,) = verdicts(check(within="1 %"), chain=[delay, FILTER])
    assert found.value == pytest.approx(1e-3 + TAU * math.log(100.0), rel=1e-9)
    (alone,) = verdicts(check(within="1 %"), chain=[delay])
    assert alone.value == pytest.approx(1e-3, rel=1e-12)
    (nothing,) = verdicts(check(within="1 %"), chain=[])
    assert nothing.value == 0.0


def test_the_event_is_the_last_one_or_the_one_that_is_named() -> None:
    """Of a pulse of five time constants, the fall ends lower than a fall from the full height."""
    width = 5.0 * TAU
    pulse = {"kind": "pulse", "high": "1 V", "at": "1 ms", "width": width}
    last, rise = check(within="0.1 mV"), check(within="50 mV", after="1 ms", before=width)
    (fall,) = verdicts(last, stimulus=pulse)
    top = 1.0 - math.exp(-5.0)
    assert fall.value == pytest.approx(TAU * math.log(top / 1e-4), rel=1e-8)
    (first,) = verdicts(rise, stimulus=pulse)
    assert first.value == pytest.approx(TAU * math.log(20.0), rel=1e-9)
    later = check(within="50 mV", after="1.05 ms", before="100 us")
    (found,) = verdicts(later, stimulus=pulse)
    assert found.value == pytest.approx(TAU * math.log(20.0) - 50e-6, rel=1e-8)


def test_before_the_next_event_is_the_limit() -> None:
    """A time that is granted beyond the next event of the stimulus is a wrong input."""
    pulse = {"kind": "pulse", "high": "1 V", "at": "1 ms", "width": "1 ms", "period": "3 ms"}
    scenario = made(check(after="1 ms", before="1.5 ms"), stimulus=pulse)
    with pytest.raises(ScenarioError, match="the stimulus changes again at 2 ms"):
        refuse_impossible(scenario)
    with pytest.raises(ScenarioError, match="leads to t = 28 ms"):
        refuse_impossible(made(check(before="9 ms"), stimulus=pulse | {"at": "18 ms"}))


def test_the_last_event_far_back_is_found() -> None:
    """The search for the last event goes back to the start of the run, and finds one at t = 0."""
    at_once = {"kind": "step", "after": "1 V"}
    (found,) = verdicts(check(within="1 %"), stimulus=at_once, simulation={"duration": "10 s"})
    assert found.value == pytest.approx(TAU * math.log(100.0), rel=1e-9)
    settled = {"kind": "step", "before": "1 V", "after": "1 V"}
    (from_rest,) = verdicts(check(within="1 %"), stimulus=settled, simulation={"initial": "rest"})
    assert from_rest.value == pytest.approx(TAU * math.log(100.0), rel=1e-9)


@pytest.mark.parametrize("still", [{"before": "1 V", "after": "1 V"}, {"after": "1 V", "at": 1.0}])
def test_nothing_settles_where_nothing_changes(still: dict[str, Any]) -> None:
    """A step of nothing, or one after the end of the run, is told, and no wait holds for it."""
    stimulus = {"kind": "step", **still}
    with pytest.raises(ScenarioError, match="nothing to settle"):
        refuse_impossible(made(check(), stimulus=stimulus))
    (found,) = verdicts(check(), stimulus=stimulus)
    assert (found.verdict, found.value) == ("fails", None)
    (after,) = verdicts(check(after="1 ms"), stimulus=stimulus)
    assert (after.verdict, after.value) == ("holds", 0.0)


def test_terms_of_a_sum_all_count() -> None:
    """Two steps: the time runs from the later one, with what is left of the first."""
    steps = {"kind": "sum", "term": [STEP, {"kind": "step", "after": "0.5 V", "at": "1.1 ms"}]}
    (found,) = verdicts(check(within="1 mV"), stimulus=steps)
    rest = 0.5 + math.exp(-100e-6 / TAU)
    assert found.value == pytest.approx(TAU * math.log(rest / 1e-3), rel=1e-8)


def test_a_point_inside_the_chain() -> None:
    """The first of two sections settles as if it were alone, with an integrator behind it too."""
    slow = {"kind": "rc-lowpass", "resistance": "10k", "capacitance": "47n"}
    (found,) = verdicts(check(within="1 %", point="input filter"), chain=[FILTER, slow])
    assert found.value == pytest.approx(TAU * math.log(100.0), rel=1e-9)
    (stimulus,) = verdicts(check(within="1 %", point="stimulus"), chain=[FILTER, slow])
    assert stimulus.value == 0.0


def test_conversions_where_nothing_is_proven() -> None:
    """A discrete model is looked at where it converts; the method says that it is so."""
    model = {"discretization": "bilinear", "grid_rate": "1 MHz"}
    (found,) = verdicts(check(within="1 %"), simulation=model)
    exact = TAU * math.log(100.0)
    assert found.method == SAMPLED
    assert exact - 1e-6 <= found.value <= exact + 50e-6 + 1e-6


def test_a_slew_limit_is_seen() -> None:
    """A slope of 1 V/ms takes 1 ms longer: 1 ms + tau ln(tau/ms · 100), closed form of a ramp.

    After the ramp the lag is 1 V/ms · tau (its start has died out), which decays with tau.
    """
    slew = {"kind": "slew-limit", "slew_rate": "1 V/ms"}
    (found,) = verdicts(check(within="1 mV"), chain=[slew, FILTER], adc={"rate": "1 MHz"})
    expected = 1e-3 + TAU * math.log(TAU * 1e3 / 1e-3)
    assert found.value == pytest.approx(expected, abs=1.5e-6)
    assert found.verdict == "holds"


def test_a_signal_that_never_rests_needs_its_end_or_time() -> None:
    """A recorded step settles if the run goes on for as long again; a sine never does."""
    ramp = {"kind": "ramp", "slope": "1 V/ms", "at": "1 ms"}
    (moving,) = verdicts(check(), stimulus=ramp)
    assert (moving.verdict, moving.value) == ("fails", None)
    assert "cannot be told: it has not settled" in moving.method
    surge = {"kind": "double-exponential", "peak": 1, "front_time": "20 us", "half_time": "200 us"}
    (decay,) = verdicts(check(within="1 mV"), stimulus=surge)
    assert decay.verdict == "holds"
    (given,) = verdicts(check(within="1 mV", final=0.0), stimulus=surge)
    assert given.value == pytest.approx(decay.value, abs=50.1e-6)
    (short,) = verdicts(check(within="1 uV", before="2 ms"), stimulus=surge, simulation={
        "duration": "4 ms"})  # fmt: skip
    assert "lengthen simulation.duration" in short.method


def test_a_failing_check_names_wait_and_stage() -> None:
    """The wait is the settling time; the slow stage has to be as much faster as the time is over.

    A stage that is 47 us / 4.7 us times slower than the other decides alone: t goes as tau.
    """
    fast = {"kind": "rc-lowpass", "name": "fast", "resistance": "1k", "capacitance": "1n"}
    (found,) = verdicts(check(before="200 us"), chain=[fast, FILTER])
    assert found.verdict == "fails"
    wait = math.ceil(found.value * 1e7) / 10.0
    assert f"lengthen the wait to {wait:g} us" in found.advice
    assert "make 'input filter' faster by" in found.advice
    share = float(found.advice.split("faster by ")[1].split(" %")[0])
    assert share == pytest.approx(100.0 * (found.value / 200e-6 - 1.0), rel=0.05)


@st.composite
def chains(draw: st.DrawFn) -> list[dict[str, Any]]:
    """Draw up to five sections with real or complex poles, close to each other or far apart."""
    stages: list[dict[str, Any]] = []
    base = 10.0 ** draw(st.floats(3.5, 5.0))
    for _ in range(draw(st.integers(1, 5))):
        rate = base * draw(st.sampled_from([1.0, 1.0 + 1e-9, 1.0 + 1e-4, 1.3, 30.0]))
        if draw(st.booleans()):
            damping = draw(st.floats(0.15, 0.95))
            real, imaginary = -damping * rate, rate * math.sqrt(1.0 - damping**2)
            pair = [[real, imaginary], [real, -imaginary]]
            stages.append({"kind": "poles-zeros", "poles": pair, "gain": rate**2})
        else:
            stages.append({"kind": "poles-zeros", "poles": [-rate], "gain": rate})
    return stages


def _distances(chain: Chain, width: float, start: float, stop: float, doublings: int) -> Real:
    """Return |y - y(end)| from start to stop after a step, or after a pulse of finite width.

    Oracle: the states by SciPy's matrix exponential, in 2^doublings equal steps.
    """
    states = np.linalg.solve(chain.a, chain.b)
    if math.isfinite(width):
        states = expm(chain.a * width) @ states - states
    row = (expm(chain.a * start) @ states)[None]
    for level in range(doublings):
        step = expm(chain.a * (stop - start) * 2.0 ** (level - doublings))
        row = np.concatenate([row, row @ step.T])
    return np.abs(row @ chain.c[-1])


@pytest.mark.slow
@settings(max_examples=500, deadline=None)
@given(chains(), st.floats(1e-6, 0.3), st.sampled_from([math.inf, 30e-6, 300e-6]))
def test_no_excursion_follows_and_one_is_missed_a_tick_earlier(
    stages: list[dict[str, Any]], band: float, width: float
) -> None:
    """Random chains up to order 10 with close, equal and complex poles, after a step or a pulse.

    Of 4096 later instants none leaves the band; a millionth of the time earlier the chain does.
    """
    stimulus = STEP
    if math.isfinite(width):
        stimulus = {"kind": "pulse", "high": 1.0, "at": "1 ms", "width": width}
    scenario = made(
        check(within=f"{band!r} V", before="18 ms"),
        stimulus=stimulus,
        chain=stages,
        adc={"high": 1.0},
        simulation={"noise": False},
    )
    time = evaluate_checks(Simulation(scenario))[0].value
    assert time is not None
    chain = chain_of(scenario.chain)
    slowest = 1.0 / float(np.min(-chain.poles.real))
    later = time * (1.0 + 1e-6)
    assert np.all(_distances(chain, width, later, later + 40.0 * slowest, 12) <= band + 1e-9)
    if time > 0.0:
        assert _distances(chain, width, time * (1.0 - 1e-6), time, 0)[0] > band - 1e-9


def test_the_run_agrees_with_the_verdict() -> None:
    """No conversion at or after the reported time lies outside the band; the one before does."""
    low_pass = {"kind": "chebyshev", "order": 5, "corner": "2 kHz", "ripple": "1 dB"}
    scenario = made(check(within="1 mV"), chain=[low_pass], adc={"rate": "1 MHz"})
    run = simulate(scenario)
    found = evaluate_checks(run)
    final = next(row.value for row in found if row.name == "settling: final value")
    exit_ = 1e-3 + (found[0].value or 0.0)
    outside = run.time[np.abs(run.pin - final) > 1e-3]
    assert exit_ - 1e-6 <= outside[-1] <= exit_
