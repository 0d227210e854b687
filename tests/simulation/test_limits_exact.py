"""What is exact in a chain with limiters, on any grid: no limit touched, jumps, held signals."""

from __future__ import annotations

from typing import Any, Literal

import numpy as np
import pytest
from drives import InMemory, marched, outputs
from hypothesis import example, given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from frontend_sim.analog import stages
from frontend_sim.analog.block import Block, gain_block
from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.cut import CutChain
from frontend_sim.analog.limits import Limiter, StaticMap
from frontend_sim.analog.stages.base import Stage
from frontend_sim.simulation import limited
from frontend_sim.simulation.limited import Limited
from frontend_sim.simulation.linear import Axis
from frontend_sim.simulation.uniform import WAVEFORM_TILE
from frontend_sim.stimulus.drive import Drive, Lines
from frontend_sim.stimulus.sine import Tone

Real = NDArray[np.float64]

RATE, COUNT = 20e3, 200
TAU = 1e-4
LOW_PASS = stages.RcLowpass(resistance=1e3, capacitance=1e-7)


class Curve(Stage):
    """A curved sensor, y = exp(0.7 u) - 0.3 or another curve, with a tangent that is not one."""

    kind: Literal["curve"] = "curve"
    which: Literal["exp", "square", "both"] = "exp"

    def blocks(self) -> tuple[Block, ...]:
        """Return some gain, which is no tangent of the curve."""
        return (gain_block(0.5 if self.which == "exp" else 0.0),)

    def limiter(self, temperature: float = 298.15) -> Limiter:
        """Return the curve."""
        if self.which == "exp":
            return StaticMap(range(1), 0.5, _curve)
        square = self.which == "square"
        return StaticMap(range(1), 0.0, np.square if square else lambda u: _curve(u) ** 2)


def _curve(u: Any) -> Any:
    return np.exp(0.7 * u) - 0.3


def _run(
    chain: list[Stage],
    drives: list[Drive],
    rate: float,
    times: Real,
    block: int | None = None,
    initial: Any = "settled",
) -> Real:
    interval = float(np.median(np.diff(times)))
    longest = max(float(times[0]), float(np.max(np.diff(times)))) + interval
    axis, last = Axis(interval, longest), float(times[-1])
    model = Limited.of(CutChain.of(chain), drives, [len(chain)], initial, axis, rate, last)
    return marched(model, times, block)


RECORDED = InMemory(np.random.default_rng(1).standard_normal(400), 1e4)
DRIVES: dict[str, Drive] = {
    "sine": Tone(1.2, 997.0, 0.3, 0.9),
    "step": Lines.of(0.0, [1e-3], [2.0]),
    "recording": RECORDED,
}


@pytest.mark.parametrize("name", DRIVES)
def test_a_limit_that_is_never_reached_changes_no_bit(name: str) -> None:
    """The chain with limits far away gives the linear chain's output, bit for bit."""
    far: list[Stage] = [
        LOW_PASS,
        stages.NoninvertingAmplifier(
            gain=2, gain_bandwidth=1e5, slew_rate=1e9, output_low=-90, output_high=90
        ),
        stages.RailLimit(low=-80, high=80),
        stages.SlewLimit(slew_rate=1e9, bandwidth=5e4),
        stages.Clamp(low=-70, high=70, resistance=1e3, capacitance=1e-9, diode_resistance=20),
        stages.TransportDelay(delay=1e-5),
        LOW_PASS,
    ]
    plain: list[Stage] = [
        LOW_PASS,
        stages.NoninvertingAmplifier(gain=2, gain_bandwidth=1e5),
        stages.Gain(gain=1),
        stages.PolesZeros(zeros=(), poles=(-2.0 * np.pi * 5e4,), gain=2.0 * np.pi * 5e4),
        stages.RcLowpass(resistance=1e3, capacitance=1e-9),
        stages.TransportDelay(delay=1e-5),
        LOW_PASS,
    ]
    times = np.arange(COUNT) / RATE
    found = _run(far, [DRIVES[name]], 4.0 * RATE, times)
    linear = outputs(chain_of(plain), [DRIVES[name]], times, interval=1.0 / RATE)
    np.testing.assert_allclose(found, linear, rtol=0, atol=1e-13)
    same = outputs(CutChain.of(far).chain, [DRIVES[name]], times, interval=1.0 / RATE)
    np.testing.assert_array_equal(found, same)


def _held(levels: list[float], ends: list[float], times: Real, delay: float = 0.0) -> Real:
    """Return held levels through the low pass; from ends[i] on level i + 1, at rest before."""
    y, state, last, begin = np.full(len(times), levels[0]), levels[0], levels[0], 0.0
    for end, level in zip(ends, levels[1:], strict=True):
        state = last + (state - last) * np.exp((begin - end) / TAU)
        y = np.where(
            times >= end + delay, level + (state - level) * np.exp(-(times - end - delay) / TAU), y
        )
        begin, last = end, level
    return y


JUMPS = [[0.0, 3e-3], [1e-3, 3e-3], [1.2345e-3, 3.00001e-3]]


@pytest.mark.parametrize("jumps", JUMPS)
@pytest.mark.parametrize("rate", [20e3, 40e3, 33e3])
def test_a_curved_sensor_steps_exactly(jumps: list[float], rate: float) -> None:
    """A step through a curve and a low pass is its closed form to 1e-13, on any grid."""
    drive = Lines.of(0.2, jumps, [2.0, -1.0])
    levels = [float(_curve(u)) for u in (0.2, 2.0, -1.0)]
    for times in (np.arange(COUNT) / RATE, np.sort(np.random.default_rng(0).uniform(0, 9e-3, 99))):
        found = _run([Curve(), LOW_PASS], [drive], rate, times)
        np.testing.assert_allclose(found, _held(levels, jumps, times), rtol=0, atol=1e-13)


@pytest.mark.parametrize("jumps", JUMPS)
def test_two_curves_with_a_delay_between(jumps: list[float]) -> None:
    """A jump passes through a curve, a delay that fits no grid, and a curve without a tangent."""
    delay = 3.3e-5
    drive = Lines.of(0.2, jumps, [2.0, -1.0])
    chain = [Curve(), stages.TransportDelay(delay=delay), Curve(which="square"), LOW_PASS]
    levels = [float(_curve(u)) ** 2 for u in (0.2, 2.0, -1.0)]
    times = np.arange(COUNT) / RATE
    found = _run(chain, [drive], 40e3, times)
    np.testing.assert_allclose(found, _held(levels, jumps, times, delay), rtol=0, atol=1e-13)


def test_jumps_long_apart_find_the_deviations_between(monkeypatch: pytest.MonkeyPatch) -> None:
    """What is forgotten of a deviation is not needed any more, however long apart jumps are.

    Two curves with a high pass before each: both of what jumps and what decays. 1.5 s are more
    points of the grid than are held, unless a slot is made longer than the run.
    """
    drive = Lines.of(0.2, [1e-3, 1.50001], [2.0, -1.0])
    high_pass = stages.RcHighpass(resistance=1e5, capacitance=1e-5)
    chain = [high_pass, Curve(), high_pass, Curve(which="square"), LOW_PASS]
    times = np.arange(1600) / 1e3
    found = _run(chain, [drive], 200e3, times)
    monkeypatch.setattr(limited, "SLOT", 1 << 24)
    monkeypatch.setattr(limited, "GRID_BLOCK", 1 << 24)
    np.testing.assert_allclose(found, _run(chain, [drive], 200e3, times), rtol=0, atol=1e-12)


@pytest.mark.parametrize("rate", [1e4, 40e3, 33e3])
def test_a_held_recording_through_a_curve_is_a_held_recording(rate: float) -> None:
    """The curve of the points, held, is what the rest of the chain sees: to 1e-12, on any grid."""
    held = InMemory(RECORDED.data, 1e4, "hold")
    curved = InMemory(_curve(held.data), 1e4, "hold")
    times = np.arange(300) / RATE
    found = _run([Curve(), LOW_PASS], [held], rate, times)
    true = outputs(chain_of([LOW_PASS]), [curved], times, interval=1.0 / RATE)
    np.testing.assert_allclose(found, true, rtol=0, atol=1e-12)


@given(rate=st.floats(1e4, 3e5), shift=st.floats(0.0, 4e-5))
@example(rate=1e4, shift=4e-16)
@settings(max_examples=25, deadline=None)
def test_clipping_at_the_pin_is_exact(rate: float, shift: float) -> None:
    """Where the limiter is the pin, every conversion sees it itself, not lines between points."""
    times = shift + np.arange(COUNT) / RATE
    tone = Tone(1.2, 997.0, 0.3, 0.9)
    found = _run([stages.RailLimit(low=0.1, high=1.9)], [tone], rate, times)
    np.testing.assert_allclose(found, np.clip(tone.values(times), 0.1, 1.9), rtol=0, atol=1e-12)


def test_a_chain_at_rest_begins_at_its_rail() -> None:
    """From rest, an output whose lower rail is above zero starts there and charges what follows."""
    times = np.arange(1, COUNT) / RATE
    chain: list[Stage] = [stages.RailLimit(low=0.5, high=3.0), LOW_PASS]
    found = _run(chain, [Lines.of(0.0, [0.0], [0.0])], RATE, times, initial="rest")
    np.testing.assert_allclose(found, 0.5 * (1.0 - np.exp(-times / TAU)), rtol=0, atol=1e-13)


def test_a_settled_overload_has_charged_what_follows() -> None:
    """Settled beyond a rail, a high pass behind it is at rest, and sees the way back as a step."""
    times = np.arange(COUNT) / RATE
    chain: list[Stage] = [
        stages.RailLimit(low=0.0, high=3.0),
        stages.RcHighpass(resistance=1e3, capacitance=1e-7),
    ]
    found = _run(chain, [Lines.of(5.0, [2e-3], [2.0])], RATE, times)
    true = np.where(times < 2e-3, 0.0, -np.exp(-(times - 2e-3) / TAU))
    np.testing.assert_allclose(found, true, rtol=0, atol=1e-13)


def test_the_rails_hold_the_offset_too() -> None:
    """An offset voltage counts at the rails: 1 V · 2 + 2 · 0.1 V, cut off at 2.1 V."""
    times = np.arange(COUNT) / RATE
    for key in ({}, {"gain_bandwidth": 1e6}):
        amplifier = stages.NoninvertingAmplifier(
            gain=2, offset_voltage=0.1, output_high=2.1, output_low=0, **key
        )
        for level, true in ((0.2, 0.6), (1.0, 2.1)):
            drive = Lines.of(level, [0.0], [level])
            found = _run([amplifier], [drive], RATE, times)
            np.testing.assert_allclose(found, true, rtol=1e-12)


@pytest.mark.parametrize(("drive", "rate"), [("sine", 80e3), ("sine", 111e3), ("recording", 96e3)])
def test_blocks_never_show(drive: str, rate: float) -> None:
    """Bit for bit the same, however the conversions are cut at multiples of a tile."""
    # A delay that fits no grid is slow: once is enough.
    delay = 1.23e-4 if rate == 111e3 else 0.0
    chain: list[Stage] = [
        stages.SlewLimit(slew_rate=4e3, bandwidth=5e3),
        Curve(),
        stages.TransportDelay(delay=delay),
        stages.NoninvertingAmplifier(
            gain=2, gain_bandwidth=1e5, second_pole=2e5, slew_rate=1e5, output_high=1.5
        ),
        stages.RcHighpass(resistance=1e4, capacitance=1e-6),
        stages.Clamp(low=-0.2, high=0.3, resistance=1e3, capacitance=1e-8, diode_resistance=50),
    ]
    data = np.random.default_rng(2).standard_normal(70000)
    source: Drive = InMemory(data, 48e3) if drive == "recording" else DRIVES["sine"]
    times = np.arange(2 * WAVEFORM_TILE + 77) / RATE
    whole = _run(chain, [source], rate, times)
    np.testing.assert_array_equal(_run(chain, [source], rate, times, WAVEFORM_TILE), whole)


def test_slow_conversions_hold_no_more_than_a_slot() -> None:
    """With a million points of the grid between conversions the answer is the same, to rounding."""
    chain: list[Stage] = [LOW_PASS, stages.RailLimit(low=-0.1, high=1.1), LOW_PASS]
    drives: list[Drive] = [Tone(1.2, 97.0, 0.3, 0.9)]
    fast = _run(chain, drives, 2e6, np.arange(601) / 1e3)
    slow = _run(chain, drives, 2e6, np.arange(4) / 5.0)
    np.testing.assert_allclose(slow, fast[::200], rtol=0, atol=1e-12)
