"""Limiters on their own: what they keep within, their events, their refusals."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from frontend_sim.analog.block import first_order, gain_block, second_order
from frontend_sim.analog.cut import CutChain
from frontend_sim.analog.limits import (
    AmplifierLimits,
    AmplifierLoop,
    Clipping,
    DiodeClamp,
    Limiter,
    Segments,
    SlewFollower,
    StaticMap,
)
from frontend_sim.analog.limits.amplifier import ClosedLoop
from frontend_sim.analog.network import opened
from frontend_sim.analog.stages import STAGES
from frontend_sim.analog.stages.amplifier_stage import AmplifierStage
from frontend_sim.errors import ModelError, ScenarioError

Real = NDArray[np.float64]

LOOP = 2.0 * math.pi * 1e5
UP, DOWN, LOW, HIGH = 3e5, 2e5, -0.7, 1.1

LIMITERS: dict[str, tuple[Limiter, float | None, float]] = {
    "closed loop": (ClosedLoop(range(1), LOOP, 2.0, UP, DOWN, LOW, HIGH), LOOP, 2.0),
    "slew alone": (ClosedLoop(range(1), LOOP, -2.0, UP, DOWN, -np.inf, np.inf), LOOP, -2.0),
    "follower": (SlewFollower(range(1), 2.0, UP, DOWN, LOW, HIGH), None, 2.0),
    "clipping": (Clipping(range(1), 2.0, LOW, HIGH), None, 2.0),
    "clamp": (DiodeClamp(range(1), LOOP, 20.0, LOW, HIGH), LOOP, 1.0),
    "ideal clamp": (DiodeClamp(range(1), LOOP, np.inf, LOW, HIGH), LOOP, 1.0),
}
"""Limiter, rate of the linear block (None for a gain), its gain."""


def _linear(times: Real, u: Real, rate: float | None, gain: float) -> Real:
    """Return the linear answer at the nodes of a line: exact, from rest on the first value."""
    if rate is None:
        return gain * u
    v = np.empty(len(u))
    v[0] = gain * u[0]
    for i, h in enumerate(np.diff(times)):
        slope = gain * (u[i + 1] - u[i]) / h
        target = gain * u[i] - slope / rate
        v[i + 1] = gain * u[i + 1] - slope / rate + (v[i] - target) * math.exp(-rate * h)
    return v


def _output(limiter: Limiter, times: Real, u: Real, rate: float | None, gain: float) -> Any:
    v = _linear(times, u, rate, gain)
    none = np.empty(0, np.int64)
    span = Segments(np.diff(times), u[:-1], u[1:], v[1:], float(v[0]), none)
    _, d, _, touched = limiter.advance(limiter.start(float(u[0]), float(v[0])), span)
    return v[1:] + d, touched


LINES = st.lists(
    st.tuples(st.floats(1e-7, 2e-5), st.floats(-2.0, 2.0)), min_size=2, max_size=12
)  # fmt: skip


def _nodes(line: Sequence[tuple[float, float]]) -> tuple[Real, Real]:
    times = np.concatenate([[0.0], np.cumsum([length for length, _ in line])])
    return times, np.array([0.1, *(value for _, value in line)])


@pytest.mark.parametrize("name", LIMITERS)
@given(line=LINES, cuts=st.lists(st.floats(0.0, 1.0), min_size=1, max_size=30))
@settings(max_examples=60, deadline=None)
def test_events_do_not_depend_on_the_pieces(
    name: str, line: list[tuple[float, float]], cuts: list[float]
) -> None:
    """A line cut anywhere gives the same output: events are found where they are, to 1e-9 V."""
    limiter, rate, gain = LIMITERS[name]
    times, u = _nodes(line)
    finer = np.union1d(times, np.array(cuts) * times[-1])
    # Two nodes nearer than rounding are one.
    finer = finer[np.diff(finer, prepend=-1.0) > 1e-12]
    coarse, touched = _output(limiter, times, u, rate, gain)
    fine, touched_fine = _output(limiter, finer, np.interp(finer, times, u), rate, gain)
    at = np.searchsorted(finer[1:], times[1:] - 1e-12)
    np.testing.assert_allclose(fine[at], coarse, rtol=0, atol=1e-9)
    np.testing.assert_allclose(touched_fine.time, touched.time, rtol=0, atol=1e-11)


@pytest.mark.parametrize("name", ["closed loop", "slew alone", "follower", "clipping"])
@given(line=LINES)
@settings(max_examples=60, deadline=None)
def test_rails_and_slew_rates_are_kept(name: str, line: list[tuple[float, float]]) -> None:
    """No output leaves the rails, and none moves further in a piece than its slew rate lets it."""
    limiter, rate, gain = LIMITERS[name]
    times, u = _nodes(line)
    finer = np.linspace(0.0, times[-1], 500)
    y, _ = _output(limiter, finer, np.interp(finer, times, u), rate, gain)
    if name != "slew alone":
        # The output is the linear answer plus the deviation: the sum rounds.
        assert np.min(y) >= LOW - 1e-14
        assert np.max(y) <= HIGH + 1e-14
    if name != "clipping":
        change = np.diff(y)
        assert np.max(change) <= UP * finer[1] * (1.0 + 1e-9) + 1e-12
        assert np.min(change) >= -DOWN * finer[1] * (1.0 + 1e-9) - 1e-12


@given(line=LINES)
@settings(max_examples=40, deadline=None)
def test_a_fast_loop_is_a_follower(line: list[tuple[float, float]]) -> None:
    """At 1e10 rad/s the closed loop lags a follower by what slews in 0.1 ns, 30 uV each."""
    times, u = _nodes(line)
    loop, _ = _output(ClosedLoop(range(1), 1e10, 2.0, UP, DOWN, LOW, HIGH), times, u, 1e10, 2.0)
    follower, _ = _output(SlewFollower(range(1), 2.0, UP, DOWN, LOW, HIGH), times, u, None, 2.0)
    np.testing.assert_allclose(loop, follower, rtol=0, atol=1e-4)


@given(line=LINES)
@settings(max_examples=40, deadline=None)
def test_the_loop_of_a_circuit_without_capacitors_is_the_closed_loop(
    line: list[tuple[float, float]],
) -> None:
    """The same amplifier through both kernels, of different construction, to 1e-8 V.

    The loop of a circuit looks for limits at the ends of short steps only, so these are short here.
    """
    nodes, levels = _nodes(line)
    times = np.union1d(nodes, np.linspace(0.0, nodes[-1], 2000))
    times = times[np.diff(times, prepend=-1.0) > 1e-12]
    u = np.interp(times, nodes, levels)
    stage = STAGES["noninverting-amplifier"].model_validate({"gain": 2, "gain_bandwidth": 2e5})
    assert isinstance(stage, AmplifierStage)
    around, gain = opened(stage.circuit(), "the amplifier"), stage.open_loop()
    higher = AmplifierLoop.of(around, gain, (UP, DOWN, LOW, HIGH), (0.0, 0.0))
    loop, _ = _output(LIMITERS["closed loop"][0], times, u, LOOP, 2.0)
    found, _ = _output(higher, times, u, LOOP, 2.0)
    np.testing.assert_allclose(found, loop, rtol=0, atol=1e-8)


def test_a_rail_is_left_at_once() -> None:
    """No wind-up: after 1 ms of overload by 100 V the output follows in the loop's own time."""
    rate = 1e6
    loop = ClosedLoop(range(1), rate, 1.0, np.inf, np.inf, -5.0, 5.0)
    times = np.array([0.0, 1e-3, 1e-3 + 1e-9, 1e-3 + 1e-6])
    u = np.array([100.0, 100.0, 0.0, 0.0])
    y, touched = _output(loop, times, u, rate, 1.0)
    assert y[0] == 5.0
    # The line from 100 V to 0 V crosses 5 V after 0.95 ns; then exp(-t/T) from there.
    assert y[-1] == pytest.approx(5.0 * math.exp(-1.0 + 0.95e-3), rel=1e-4)
    assert touched.time[0] == pytest.approx(1e-3 + 0.95e-9, rel=1e-9)


def test_a_clamp_conducts_until_its_current_ends() -> None:
    """Held at 1 V by 3 V; as the source falls, the node leaves where the source passes 1 V."""
    clamp = DiodeClamp(range(1), 1e6, np.inf, 0.0, 1.0)
    times = np.array([0.0, 1e-5, 2e-5])
    y, touched = _output(clamp, times, np.array([3.0, 3.0, 0.0]), 1e6, 1.0)
    assert y[0] == 1.0
    assert touched.time[0] == pytest.approx(1e-5 + 1e-5 * 2.0 / 3.0, rel=1e-12)
    # From there 1/3 of 10 us of a ramp of 0.3 V/us through a time constant of 1 us.
    slope, left = -3.0 / 1e-5, 1e-5 / 3.0
    assert y[1] == pytest.approx(
        1.0 + slope * (left - 1e-6 * (1.0 - math.exp(-left / 1e-6))), rel=1e-9
    )


def test_a_conducting_diode_divides() -> None:
    """At rest R and R_d share what is beyond the level: 1 V + 2 V · 40/1040."""
    for rate in (None, 1e6):
        limiter: Limiter = (
            Clipping(range(1), 1.0, 0.0, 1.0, 1.0 / 26.0)
            if rate is None
            else DiodeClamp(range(1), rate, 25.0, 0.0, 1.0)
        )
        assert 3.0 + limiter.start(3.0, 3.0)[0] == pytest.approx(1.0 + 2.0 / 26.0, rel=1e-14)


def test_limits_find_their_place() -> None:
    """A pole is the loop, a gain follows, and anything else is refused."""
    limits = AmplifierLimits(1e6, -1.0, 1.0)
    pole, gain = first_order(-1e6, (0.0, 2e6)), gain_block(3.0)
    pair = second_order(1e6, 1e6, (0.0, 0.0, 1e12))
    high_pass = first_order(-1e3, (1.0, 0.0))
    kinds = [
        ([pole], ClosedLoop, range(1)),
        ([gain], SlewFollower, range(1)),
        ([gain, pole], ClosedLoop, range(1, 2)),
    ]
    for blocks, kind, replaced in kinds:
        limiter = limits.around(blocks)
        assert isinstance(limiter, kind)
        assert limiter.replaced == replaced
    assert isinstance(AmplifierLimits(output_high=1.0).around([gain]), Clipping)
    assert AmplifierLimits().around([pole]) is None
    for blocks in ([gain, pair], [high_pass]):
        with pytest.raises(ModelError, match="a gain or a single pole"):
            limits.around(blocks)


def test_an_integrator_with_limits_is_refused() -> None:
    """A pole at the origin has no closed loop to limit; the message says so."""
    with pytest.raises(ModelError, match="a closed loop with a pole left of the origin"):
        AmplifierLimits(1e6).around([first_order(0.0, (0.0, 1e3))])


@pytest.mark.parametrize(
    ("given", "words"),
    [
        ({"slew_rate": 0.0}, "slew_rate 0 V/s must be above 0"),
        ({"slew_rate": 1.0, "slew_rate_down": -1.0}, "slew_rate_down -1 V/s must be above 0"),
        ({"output_low": 3.0, "output_high": 1.0}, "rails are reversed: output_low 3 V"),
        ({"output_low": 1.0, "output_high": 1.0}, "rails are reversed"),
    ],
)
def test_impossible_limits_are_refused(given: dict[str, float], words: str) -> None:
    """Each impossible limit is named, with what it should be."""
    with pytest.raises(ValueError, match=words):
        AmplifierLimits(**given)


@pytest.mark.parametrize(
    ("kind", "values", "words"),
    [
        ("rail-limit", {}, "give low, high or both"),
        ("rail-limit", {"low": 3, "high": 1}, "low 3 V must lie below high 1 V"),
        ("slew-limit", {"slew_rate": 0}, "above 0"),
        ("slew-limit", {"slew_rate": "1 V"}, "slope"),
        ("slew-limit", {"slew_rate": 1, "slew_rate_down": -1}, "above 0"),
        ("slew-limit", {"slew_rate": 1, "bandwidth": 0}, "above 0"),
        ("clamp", {}, "give low, high or both"),
        ("clamp", {"low": 1, "high": 1}, "reversed or equal"),
        ("clamp", {"high": 1, "capacitance": 1e-9}, "capacitance needs resistance"),
        ("clamp", {"high": 1, "diode_resistance": 10}, "diode_resistance needs resistance"),
        ("clamp", {"high": 1, "resistance": -1}, "above 0"),
        ("clamp", {"high": 1, "upper_forward_voltage": -0.3}, "at least 0"),
    ],
)
def test_wrong_keys_are_refused(kind: str, values: dict[str, Any], words: str) -> None:
    """Each wrong value of a kind is named."""
    with pytest.raises(ScenarioError, match=words):
        STAGES[kind].model_validate({"kind": kind, **values})


def test_a_curve_without_a_value_is_told() -> None:
    """An input where the curve is not finite is named."""
    curve = StaticMap(range(1), 1.0, lambda u: np.where(u > 1.0, np.inf, u))
    with pytest.raises(ModelError, match="no finite output for an input of 2"):
        curve.start(2.0, 2.0)


def test_a_cut_chain_has_the_same_matrices() -> None:
    """Cutting adds points, and changes nothing else."""
    from frontend_sim.analog.chain import chain_of

    row = [
        STAGES["rc-lowpass"].model_validate({"resistance": 1e3, "capacitance": 1e-8}),
        STAGES["clamp"].model_validate({"high": 1, "resistance": 1e3, "capacitance": 1e-9}),
        STAGES["transport-delay"].model_validate({"delay": 1e-6}),
    ]
    whole, cut = chain_of(row), CutChain.of(row)
    np.testing.assert_array_equal(cut.chain.a, whole.a)
    np.testing.assert_array_equal(cut.chain.b, whole.b)
    points = list(cut.points)
    np.testing.assert_array_equal(cut.chain.c[points], whole.c)
    np.testing.assert_array_equal(cut.chain.delay[points], whole.delay)
