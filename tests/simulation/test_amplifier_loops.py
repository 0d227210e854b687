"""Amplifiers with capacitors around them, slewing and at rails, against their nodes' equations."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cache
from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from drives import outputs
from loops import Loop
from numpy.typing import NDArray

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.cut import CutChain
from frontend_sim.analog.limits import AmplifierLoop, Segments
from frontend_sim.analog.network import OpenLoop, opened
from frontend_sim.analog.stages import STAGES
from frontend_sim.analog.stages.amplifier_stage import AmplifierStage
from frontend_sim.errors import ModelError
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate
from frontend_sim.simulation.limited import Limited
from frontend_sim.simulation.linear import Axis
from frontend_sim.stimulus.drive import Drive, Lines
from frontend_sim.stimulus.sine import Tone

Real = NDArray[np.float64]
UNITY = 2.0 * np.pi * 3e5

SINE = Tone(0.9, 2.1e3, 0.3, 0.4)
JUMPS = (1.0123e-4, 5.017e-4)
STEP = Lines.of(0.1, JUMPS, [1.3, -0.2])
SMALL = Tone(0.9e-6, 2.1e3, 0.3, 0.4e-6)
"""The same sine as a current [A]."""


def _sine(t: float) -> float:
    return 0.4 + 0.9 * float(np.sin(2.0 * np.pi * 2.1e3 * t + 0.3))


def _step(t: float) -> float:
    return 0.1 if t < JUMPS[0] else 1.3 if t < JUMPS[1] else -0.2


R1, R2, R3, C1, C2 = 12e3, 15e3, 8e3, 2.2e-9, 1e-9
SALLEN_KEY = {
    "kind": "sallen-key", "resistance_1": R1, "resistance_2": R2, "capacitance_1": C1,
    "capacitance_2": C2,
}  # fmt: skip
MULTIPLE = {
    "kind": "multiple-feedback", "input_resistance": R1, "feedback_resistance": R2,
    "middle_resistance": R3, "ground_capacitance": C1, "feedback_capacitance": C2,
}  # fmt: skip
BAND = {
    "kind": "multiple-feedback", "response": "band-pass", "input_resistance": R1,
    "feedback_resistance": 60e3, "feedback_capacitance": C1, "middle_capacitance": C2,
    "ground_resistance": 9e3,
}  # fmt: skip
HIGH_PASS = {**SALLEN_KEY, "response": "high-pass"}


def _low(limits: Any = None, gain: float = 1.0, **amplifier: Any) -> Loop:
    """C1 from the middle to the output holds v0 = v_middle - w, C2 holds v1 = v_plus."""

    def caps(v: Sequence[float], u: float, w: float) -> list[float]:
        into, on = (u - v[0] - w) / R1, (v[0] + w - v[1]) / R2
        return [(into - on) / C1, on / C2]

    return Loop(
        caps, lambda v, u, w: v[1] - w / gain, 2,
        driven=lambda v, u, w: gain * v[1], change=lambda v, u, w: gain * caps(v, u, w)[1],
        **amplifier, **(limits or {}),
    )  # fmt: skip


def _multiple(limits: Any = None, **amplifier: Any) -> Loop:
    """C1 holds v0 = v_middle, C2 holds v1 = v_minus - w."""

    def caps(v: Sequence[float], u: float, w: float) -> list[float]:
        through = (v[0] - v[1] - w) / R3
        return [((u - v[0]) / R1 + (w - v[0]) / R2 - through) / C1, through / C2]

    return Loop(
        caps, lambda v, u, w: -v[1] - w, 2,
        driven=lambda v, u, w: -v[1], change=lambda v, u, w: -caps(v, u, w)[1],
        **amplifier, **(limits or {}),
    )  # fmt: skip


def _band(limits: Any = None, **amplifier: Any) -> Loop:
    """C1 holds v0 = v_middle - w, C2 holds v1 = v_middle - v_minus."""

    def caps(v: Sequence[float], u: float, w: float) -> list[float]:
        middle = v[0] + w
        into = (middle - v[1] - w) / 60e3
        return [((u - middle) / R1 - middle / 9e3 - into) / C1, into / C2]

    return Loop(
        caps, lambda v, u, w: v[1] - v[0] - w, 2,
        driven=lambda v, u, w: v[1] - v[0],
        change=lambda v, u, w: caps(v, u, w)[1] - caps(v, u, w)[0],
        **amplifier, **(limits or {}),
    )  # fmt: skip


def _high(limits: Any = None, **amplifier: Any) -> Loop:
    """C1 holds v0 = u - v_middle, C2 holds v1 = v_middle - v_plus."""

    def caps(v: Sequence[float], u: float, w: float) -> list[float]:
        middle, plus = u - v[0], u - v[0] - v[1]
        return [((middle - w) / R1 + plus / R2) / C1, plus / R2 / C2]

    return Loop(caps, lambda v, u, w: u - v[0] - v[1] - w, 2, **amplifier, **(limits or {}))


RESISTANCE, FEEDBACK, INPUT = 1e6, 2e-11, 1e-10
DIODE = {
    "kind": "transimpedance-amplifier", "feedback_resistance": RESISTANCE,
    "feedback_capacitance": FEEDBACK, "input_capacitance": INPUT,
}  # fmt: skip


def _diode(limits: Any = None, **amplifier: Any) -> Loop:
    """C_in holds v0 = v_minus; with C_f the current also moves w: C_f (v0' - w') flows back.

    In z = v0 - C_f w / (C_f + C_in) no slope of w is left.
    """
    total = FEEDBACK + INPUT

    def minus(v: Sequence[float], w: float) -> float:
        return v[0] + FEEDBACK / total * w

    def caps(v: Sequence[float], u: float, w: float) -> list[float]:
        return [(1e-6 * u - (minus(v, w) - w) / RESISTANCE) / total]

    return Loop(
        caps, lambda v, u, w: -minus(v, w), 1,
        driven=lambda v, u, w: -v[0] * total / FEEDBACK,
        change=lambda v, u, w: -caps(v, u, w)[0] * total / FEEDBACK,
        **amplifier, **(limits or {}),
    )  # fmt: skip


OUT, LOAD = 300.0, 3e-9


def _loaded(limits: Any = None, **amplifier: Any) -> Loop:
    """A buffer with a load behind its output resistance: the capacitor is the output."""
    return Loop(
        lambda v, u, w: [(w - v[0]) / OUT / LOAD], lambda v, u, w: u - v[0], 1,
        output=lambda v, u, w: v[0], **amplifier, **(limits or {}),
    )  # fmt: skip


def _foot(limits: Any = None, **amplifier: Any) -> Loop:
    """Twin-T whose foot stands at k w: middles v0 and v1 held by their capacitors, and v_plus.

    C = R2's capacitors: v0 = v_first - k w on the shunt; v1 = u - v_second, v2 = v_second - v_plus.
    """
    r, c, k = 1e4, 1e-8, 0.6

    def caps(v: Sequence[float], u: float, w: float) -> list[float]:
        first, second = v[0] + k * w, u - v[1]
        plus = second - v[2]
        onward = (first - plus) / r
        charge = -onward  # into plus through R2 and out of it through C2
        return [
            ((u - first) / r - onward) / (2.0 * c),
            ((second - k * w) / (0.5 * r) + charge) / c,
            charge / c,
        ]

    return Loop(caps, lambda v, u, w: u - v[1] - v[2] - w, 3, **amplifier, **(limits or {}))


TWIN_T = {
    "kind": "twin-t-notch", "resistance_1": 1e4, "resistance_2": 1e4, "shunt_resistance": 5e3,
    "capacitance_1": 1e-8, "capacitance_2": 1e-8, "shunt_capacitance": 2e-8, "feedback": 0.6,
}  # fmt: skip


@dataclass
class Case:
    """A stage, its oracle, and the limits of both."""

    stage: dict[str, Any]
    loop: Callable[..., Loop]
    amplifier: dict[str, Any]
    limits: dict[str, float]
    drive: Drive = SINE
    u: Callable[[float], float] = _sine
    jumps: tuple[float, ...] = ()


RAILS = {"low": -0.2, "high": 1.0}
NEGATIVE = {"low": -0.9, "high": 0.15}
SLEW = {"up": 6e3, "down": 6e3}
POLE = {"rate": UNITY}
PUSHED: dict[str, Any] = {"drive": STEP, "u": _step, "jumps": JUMPS}

CASES = {
    "Sallen-Key, rails": Case(SALLEN_KEY, _low, POLE, RAILS),
    "Sallen-Key, slew": Case(SALLEN_KEY, _low, POLE, SLEW),
    "Sallen-Key, both, step": Case(SALLEN_KEY, _low, POLE, {**RAILS, **SLEW}, **PUSHED),
    "Sallen-Key, ideal, rails": Case(SALLEN_KEY, _low, {}, RAILS),
    "Sallen-Key, ideal, slew": Case(SALLEN_KEY, _low, {}, SLEW),
    "Sallen-Key, ideal, both, step": Case(SALLEN_KEY, _low, {}, {**RAILS, **SLEW}, **PUSHED),
    "Sallen-Key, finite gain": Case(SALLEN_KEY, _low, {"rate": UNITY, "leak": UNITY / 50}, RAILS),
    "Sallen-Key, high pass, rails": Case(HIGH_PASS, _high, POLE, {"low": -0.05, "high": 0.06}),
    "Sallen-Key, high pass, step": Case(HIGH_PASS, _high, POLE, {**RAILS, **SLEW}, **PUSHED),
    "multiple feedback, rails": Case(MULTIPLE, _multiple, POLE, NEGATIVE),
    "multiple feedback, both": Case(MULTIPLE, _multiple, POLE, {**NEGATIVE, **SLEW}),
    "multiple feedback, ideal, rails": Case(MULTIPLE, _multiple, {}, NEGATIVE),
    "multiple feedback, ideal, both": Case(MULTIPLE, _multiple, {}, {**NEGATIVE, **SLEW}),
    "multiple feedback, ideal, step": Case(MULTIPLE, _multiple, {}, NEGATIVE, **PUSHED),
    "band pass, rails": Case(BAND, _band, POLE, {"low": -0.2, "high": 0.15}),
    "band pass, ideal, step": Case(BAND, _band, {}, {"low": -0.2, "high": 0.15}, **PUSHED),
    "transimpedance, rails": Case(DIODE, _diode, POLE, NEGATIVE),
    "transimpedance, both, step": Case(DIODE, _diode, POLE, {**NEGATIVE, **SLEW}, **PUSHED),
    "transimpedance, ideal, rails": Case(DIODE, _diode, {}, NEGATIVE),
    "second pole, rails": Case(
        SALLEN_KEY, _low, {"rate": UNITY, "second": 2.0 * np.pi * 8e5}, {**RAILS, **SLEW}
    ),
    "loaded buffer, rails": Case({"kind": "buffer"}, _loaded, POLE, RAILS),
    "loaded buffer, rails, step": Case({"kind": "buffer"}, _loaded, POLE, RAILS, **PUSHED),
    "notch with a driven foot, step": Case(TWIN_T, _foot, {}, {"low": -0.2, "high": 1.0}, **PUSHED),
}  # fmt: skip


def _stage(case: Case, **more: Any) -> Any:
    keys = {"low": "output_low", "high": "output_high", "up": "slew_rate"}
    values = dict(case.stage)
    values |= {keys[key]: value for key, value in case.limits.items() if key in keys}
    if "rate" in case.amplifier:
        values["gain_bandwidth"] = case.amplifier["rate"] / (2.0 * np.pi)
    if "leak" in case.amplifier:
        values["open_loop_gain"] = case.amplifier["rate"] / case.amplifier["leak"]
    if "second" in case.amplifier:
        values["second_pole"] = case.amplifier["second"] / (2.0 * np.pi)
    if case.loop is _loaded:
        values |= {"output_resistance": OUT, "load_capacitance": LOAD}
    return STAGES[values["kind"]].model_validate({**values, **more})


def _drive(case: Case) -> Drive:
    if case.stage is not DIODE:
        return case.drive
    return SMALL if case.drive is SINE else Lines.of(1e-7, JUMPS, [1.3e-6, -0.2e-6])


TIMES = np.arange(1, 120) / 1e5


def _found(stage: Any, drive: Drive, rate: float) -> Real:
    axis = Axis(1e-5, 2e-5)
    model = Limited.of(CutChain.of([stage]), [drive], [1], "settled", axis, rate, TIMES[-1])
    _, (pin,) = model.advance(model.start(), 0, TIMES)
    return np.asarray(pin)


@cache
def _true(name: str) -> Real:
    case = CASES[name]
    loop = case.loop(case.limits, **case.amplifier)
    if name.startswith("notch"):
        loop = _ideal_notch(case)
    return loop.run(case.u, TIMES, case.jumps)


def _ideal_notch(case: Case) -> Loop:
    loop = case.loop(case.limits)
    loop.driven = lambda v, u, w: u - v[1] - v[2]
    loop.change = lambda v, u, w: -loop.caps(v, u, w)[1] - loop.caps(v, u, w)[2]
    return loop


@pytest.mark.parametrize("name", CASES)
def test_second_order_against_the_equations_of_the_nodes(name: str) -> None:
    """Over three halvings of the step the error falls by h² or faster; a step is exact.

    scipy's integration is good to some 1e-9 V here. Where events meet the grid moves each error by
    a factor of its own, hence 1.6 and not 2.
    """
    case, true = CASES[name], _true(name)
    rates = 1e5 * 2.0 ** np.arange(2, 6)
    errors = [float(np.max(np.abs(_found(_stage(case), _drive(case), r) - true))) for r in rates]
    assert np.max(np.abs(true - _found(_stage(case, **FAR), _drive(case), 1e5))) > 1e-2
    if case.jumps:
        assert max(errors) < 1e-8
    else:
        assert errors[-1] < 1e-4
        assert -np.polyfit(np.log2(rates), np.log2(errors), 1)[0] > 1.6


FAR = {"output_low": -90.0, "output_high": 90.0, "slew_rate": 1e9}


@pytest.mark.parametrize("drive", [SINE, STEP], ids=["sine", "step"])
@pytest.mark.parametrize("name", ["Sallen-Key, both, step", "band pass, ideal, step"])
def test_limits_that_are_never_reached_change_no_bit(name: str, drive: Drive) -> None:
    """With limits far away the output is that of the linear chain, bit for bit."""
    stage = _stage(CASES[name], **FAR)
    linear = outputs(CutChain.of([stage]).chain, [drive], TIMES, interval=1e-5)
    np.testing.assert_array_equal(_found(stage, drive, 4e5), linear)
    plain = stage.model_copy(update=dict.fromkeys(FAR))
    same = outputs(chain_of([plain]), [drive], TIMES, interval=1e-5)
    np.testing.assert_allclose(linear, same, rtol=0, atol=1e-9)


@pytest.mark.parametrize("name", CASES)
def test_the_estimate_of_a_picked_grid_is_an_upper_bound(name: str) -> None:
    """The grid that a run picks keeps its estimate, held against the equations of the nodes."""
    case, true = CASES[name], _true(name)
    kind = "sine" if case.drive is SINE else "sum"
    size = 1e-6 if case.stage is DIODE else 1.0
    sine = {"kind": kind, "amplitude": 0.9 * size, "frequency": 2.1e3, "offset": 0.4 * size}
    step = {"kind": kind, "term": [
        {"kind": "step", "before": 0.1 * size, "after": 1.3 * size, "at": JUMPS[0]},
        {"kind": "step", "after": -1.5 * size, "at": JUMPS[1]},
    ]}  # fmt: skip
    scenario = Scenario.model_validate({
        "stimulus": {**sine, "phase": 0.3} if kind == "sine" else step,
        "chain": [_stage(case).model_dump(mode="json", exclude_none=True)],
        "adc": {"rate": 1e5, "bits": 12, "low": -2.0, "high": 2.0},
        "simulation": {"duration": 1.2e-3},
    })  # fmt: skip
    run = simulate(scenario)
    assert run.grid is not None
    assert run.grid.estimate is not None
    error = float(np.max(np.abs(run.pin[1:120] - true))) / scenario.adc.lsb
    # 1e-9 V is what scipy's integration is good to.
    assert error <= run.grid.estimate + 1e-9 / scenario.adc.lsb
    assert run.grid.estimate <= 0.05


def test_blocks_never_show() -> None:
    """Cut in two anywhere, a run gives the same bits."""
    stage = _stage(CASES["Sallen-Key, both, step"])
    whole = _found(stage, STEP, 4e5)
    axis = Axis(1e-5, 2e-5)
    model = Limited.of(CutChain.of([stage]), [STEP], [1], "settled", axis, 4e5, TIMES[-1])
    states, first = model.advance(model.start(), 0, TIMES[:50])
    _, second = model.advance(states, 50, TIMES[50:])
    np.testing.assert_allclose(np.append(first[0], second[0]), whole, rtol=0, atol=1e-12)


@pytest.mark.parametrize("name", CASES)
def test_no_bit_hangs_on_where_stretches_are_cut(name: str) -> None:
    """Advanced in stretches of any number of pieces, a loop gives the same bits.

    Only the age of the last event adds up in another order: its last digit may differ.
    """
    case = CASES[name]
    limiter = CutChain.of([_stage(case)]).places[0].limiter
    u = _drive(case).values(np.arange(1201) / 1e6)
    length, none = np.full(1200, 1e-6), np.empty(0, np.int64)

    def advanced(cuts: Sequence[int]) -> tuple[Real, Real]:
        state, found = limiter.start(float(u[0]), 0.0), []
        for first, last in pairwise((0, *cuts, 1200)):
            here, zero = slice(first, last), np.zeros(last - first)
            span = Segments(length[here], u[:-1][here], u[1:][here], zero, 0.0, none)
            state, d, _, _ = limiter.advance(state, span)
            found.append(d)
        return state, np.concatenate(found)

    state, d = advanced([])
    assert np.any(d)
    for seed in range(4):
        cuts = np.random.default_rng(seed).choice(np.arange(1, 1200), 40, replace=False)
        after, again = advanced(np.sort(cuts).tolist())
        np.testing.assert_array_equal(again, d)
        np.testing.assert_array_equal(after[:-1], state[:-1])
        np.testing.assert_allclose(after[-1], state[-1], rtol=1e-13)


def test_constants_count_at_the_rails() -> None:
    """An offset of 50 mV at the input lifts the output of a gained section up to its rail."""
    values = {**SALLEN_KEY, "feedback_resistance": 1e4, "ground_resistance": 1e4,
              "offset_voltage": 0.05, "offset_drift": 1e-3, "output_high": 1.0}  # fmt: skip
    for gain_bandwidth in (None, 1e6):
        stage = STAGES["sallen-key"].model_validate({**values, "gain_bandwidth": gain_bandwidth})
        for level, true in ((0.2, 0.5), (0.5, 1.0)):
            found = _found(stage, Lines.of(level, [0.0], [level]), 2e5)
            np.testing.assert_allclose(found, true, rtol=0, atol=1e-9)
        # 35 K above 25 degC the offset is 85 mV: 0.4 V + 0.17 V.
        warm = CutChain.of([stage], 298.15 + 35.0)
        axis, held = Axis(1e-5, 2e-5), Lines.of(0.2, [0.0], [0.2])
        model = Limited.of(warm, [held], [1], "settled", axis, 2e5, TIMES[-1])
        np.testing.assert_allclose(model.advance(model.start(), 0, TIMES)[1][0], 0.57, atol=1e-9)
        assert warm.places[0].limiter.high == pytest.approx(1.0 - 0.17, abs=1e-9)  # type: ignore[attr-defined]  # this limiter has it


def test_what_cannot_be_limited_is_told() -> None:
    """A capacitance that delays an ideal amplifier's feedback, and rails that leave zero out."""
    stage = STAGES["transimpedance-amplifier"].model_validate(
        {"feedback_resistance": 1e6, "input_capacitance": 1e-10, "gain_bandwidth": 1e6}
    )
    assert isinstance(stage, AmplifierStage)
    around = opened(stage.circuit(), "the amplifier")
    with pytest.raises(ModelError, match="a capacitance at its input delays it; give gain_band"):
        AmplifierLoop.of(around, OpenLoop(), (np.inf, np.inf, -1.0, 1.0), (0.0, 0.0))
    with pytest.raises(ValueError, match="leave 0 V out: the amplifier of the foot"):
        STAGES["twin-t-notch"].model_validate({**TWIN_T, "output_low": 0.1})
