"""Chains with limiters against an event-driven integration at tight tolerances, and their order."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cache

import numpy as np
import pytest
from numpy.typing import NDArray
from overload import Amplifier, Clamp

from frontend_sim.analog import stages
from frontend_sim.analog.cut import CutChain
from frontend_sim.analog.stages.base import Stage
from frontend_sim.simulation.limited import Limited
from frontend_sim.simulation.linear import Axis
from frontend_sim.stimulus.drive import Drive, Lines
from frontend_sim.stimulus.sine import Tone

Real = NDArray[np.float64]

RATE = 20e3
TIMES = np.arange(1, 200) / RATE
BETWEEN = TIMES + 3.07e-6
"""Conversions that lie on no grid below."""

PRE, POST = 1.0 / (1e3 * 2e-8), 1.0 / (1e4 * 1e-7)
LOOP, GAIN = 2.0 * np.pi * 1e5 / 2.0, 2.0
JUMPS = (1.0123e-3, 5.017e-3)


def _sine(t: float) -> float:
    return 0.9 + 1.2 * float(np.sin(2.0 * np.pi * 997.0 * t + 0.3))


def _step(t: float) -> float:
    return 0.3 if t < JUMPS[0] else 2.2 if t < JUMPS[1] else 0.2


SINE = Tone(1.2, 997.0, 0.3, 0.9)
STEP = Lines.of(0.3, JUMPS, [2.2, 0.2])


@dataclass
class Case:
    """A chain, its oracle, and what both are driven with."""

    chain: list[Stage]
    oracle: Amplifier | Clamp
    u: Callable[[float], float]
    drive: Drive
    jumps: tuple[float, ...] = field(default=())


LOW_PASS = stages.RcLowpass(resistance=1e3, capacitance=2e-8)
HIGH_PASS = stages.RcHighpass(resistance=1e4, capacitance=1e-7)


def _amplifier(**limits: float) -> stages.NoninvertingAmplifier:
    return stages.NoninvertingAmplifier(gain=GAIN, gain_bandwidth=1e5, **limits)


RAILS = {"output_low": 0.1, "output_high": 3.2}
LIMITS = {"low": 0.1, "high": 3.2}
CLAMP = stages.Clamp(
    low=0.0, high=1.5, upper_forward_voltage=0.1, lower_forward_voltage=0.1,
    resistance=1e3, capacitance=2e-8, diode_resistance=40,
)  # fmt: skip

CASES = {
    "sine into rails, AC-coupled": Case(
        [LOW_PASS, _amplifier(**RAILS), HIGH_PASS],
        Amplifier(LOOP, GAIN, **LIMITS, before=PRE, behind=POST), _sine, SINE,
    ),
    "sine into slew": Case(
        [_amplifier(slew_rate=1.2e4)], Amplifier(LOOP, GAIN, 1.2e4, 1.2e4), _sine, SINE
    ),
    "sine into both, AC-coupled": Case(
        [LOW_PASS, _amplifier(slew_rate=1.2e4, **RAILS), HIGH_PASS],
        Amplifier(LOOP, GAIN, 1.2e4, 1.2e4, **LIMITS, before=PRE, behind=POST), _sine, SINE,
    ),
    "overload by a step and recovery, AC-coupled": Case(
        [LOW_PASS, _amplifier(slew_rate=1.2e4, **RAILS), HIGH_PASS],
        Amplifier(LOOP, GAIN, 1.2e4, 1.2e4, **LIMITS, before=PRE, behind=POST),
        _step, STEP, JUMPS,
    ),
    "step straight into the amplifier, AC-coupled": Case(
        [_amplifier(slew_rate=1.2e4, **RAILS), HIGH_PASS],
        Amplifier(LOOP, GAIN, 1.2e4, 1.2e4, **LIMITS, behind=POST), _step, STEP, JUMPS,
    ),
    "sine into a clamp with resistance, AC-coupled": Case(
        [CLAMP, HIGH_PASS], Clamp(PRE, -0.1, 1.6, 25.0, POST), _sine, SINE
    ),
    "step into an ideal clamp, AC-coupled": Case(
        [CLAMP.model_copy(update={"diode_resistance": None}), HIGH_PASS],
        Clamp(PRE, -0.1, 1.6, np.inf, POST), _step, STEP, JUMPS,
    ),
}  # fmt: skip


def _found(case: Case, times: Real, rate: float) -> Real:
    interval, last = 1.0 / RATE, float(times[-1])
    chain, axis = CutChain.of(case.chain), Axis(interval, float(times[0]) + interval)
    model = Limited.of(chain, [case.drive], [len(case.chain)], "settled", axis, rate, last)
    return model.advance(model.start(), 0, times)[1][0]


@cache
def _true(name: str) -> tuple[Real, Real]:
    """Return the oracle's output at the conversions on the grid and between its points."""
    case = CASES[name]
    both = np.sort(np.concatenate([TIMES, BETWEEN]))
    if isinstance(case.oracle, Amplifier):
        state = case.oracle.settled(case.u(0.0))
    else:
        state = [case.u(0.0)] * 2
        state[0] = state[1] = min(max(case.u(0.0), case.oracle.low), case.oracle.high)
    values = case.oracle.machine().run(case.u, state, both, case.jumps)
    return values[np.searchsorted(both, TIMES)], values[np.searchsorted(both, BETWEEN)]


@pytest.mark.parametrize("name", CASES)
def test_second_order_at_conversions_on_the_grid(name: str) -> None:
    """Over four halvings of the step the error falls by h² or faster, or is rounding already.

    scipy's integration is good to about 1e-10 V here: below 1e-9 V nothing is compared. The slope
    is at least 1.7, not 2: where an event meets the grid moves each error by a factor of its own.
    """
    rates = RATE * 2.0 ** np.arange(4, 9)
    errors = [float(np.max(np.abs(_found(CASES[name], TIMES, r) - _true(name)[0]))) for r in rates]
    assert errors[-1] < 1e-5
    if errors[0] > 1e-9:
        assert -np.polyfit(np.log2(rates), np.log2(errors), 1)[0] > 1.7


@pytest.mark.parametrize("name", CASES)
def test_second_order_at_conversions_between_points(name: str) -> None:
    """The same where no conversion meets a point of the grid."""
    rates = RATE * 2.0 ** np.arange(4, 9)
    errors = [
        float(np.max(np.abs(_found(CASES[name], BETWEEN, r) - _true(name)[1]))) for r in rates
    ]
    assert errors[-1] < 2e-5
    if errors[0] > 1e-9:
        assert -np.polyfit(np.log2(rates), np.log2(errors), 1)[0] > 1.6


TWO_POLES = {
    "sine": Case(
        [stages.NoninvertingAmplifier(
            gain=2, gain_bandwidth=2e5, second_pole=3e5, slew_rate=2e5, **RAILS
        )],
        Amplifier(2e5 * np.pi, 2.0, 2e5, 2e5, **LIMITS, second=6e5 * np.pi),
        lambda t: 0.9 + 1.2 * float(np.sin(2.0 * np.pi * 2.1e4 * t + 0.3)),
        Tone(1.2, 2.1e4, 0.3, 0.9),
    ),
    "step": Case(
        [stages.NoninvertingAmplifier(
            gain=2, gain_bandwidth=2e5, second_pole=3e5, slew_rate=2e5, **RAILS
        )],
        Amplifier(2e5 * np.pi, 2.0, 2e5, 2e5, **LIMITS, second=6e5 * np.pi),
        lambda t: 0.3 if t < 1.0123e-4 else 2.2 if t < 5.017e-4 else 0.2,
        Lines.of(0.3, [1.0123e-4, 5.017e-4], [2.2, 0.2]), (1.0123e-4, 5.017e-4),
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", TWO_POLES)
def test_an_amplifier_with_a_second_pole(name: str) -> None:
    """Slope limit on the integrator, second pole behind it, feedback around both.

    A step is exact (to 1e-9 V, scipy's own error); a sine converges with the second order.
    """
    case = TWO_POLES[name]
    assert isinstance(case.oracle, Amplifier)
    times = np.arange(1, 250) / 4e5
    state = case.oracle.settled(case.u(0.0))
    true = case.oracle.machine().run(case.u, state, times, case.jumps)
    rates = 4e5 * 2.0 ** np.arange(2, 6)
    errors = [float(np.max(np.abs(_found(case, times, r) - true))) for r in rates]
    if name == "step":
        assert max(errors) < 1e-9
    else:
        assert abs(-np.polyfit(np.log2(rates), np.log2(errors), 1)[0] - 2.0) < 0.1
        assert errors[-1] < 2e-5
