"""Rows of instants that hold events, one by one and many together."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from frontend_sim.analog.chain import Chain, chain_of
from frontend_sim.analog.stages import Butterworth, Gain, RcLowpass, Stage, TransportDelay
from frontend_sim.simulation.linear import Axis, Linear
from frontend_sim.stimulus import Chirp, Pulse, Ramp, Step
from frontend_sim.stimulus.base import Stimulus

Real = NDArray[np.float64]
RATE, COUNT, ROW = 20e3, 1000, 32
BEGIN = 5 * ROW / RATE
"""An instant at which a row begins."""


def model(chain: Chain, pulse: dict[str, Any]) -> Linear:
    """Return the output of a filter that a train of pulses drives."""
    drives = Pulse.model_validate({"kind": "pulse", "high": 1.0, **pulse}).drives((1,))
    axis = Axis(1.0 / RATE, 2.0 / RATE, uniform=True)
    return Linear.of(chain, drives, [len(chain.points) - 1], "settled", axis)


def parts(made: Linear, cuts: list[int]) -> np.ndarray:
    """Return the outputs at all instants, asked in parts."""
    instants, state, found = np.arange(COUNT) / RATE, made.start(), []
    for begin, end in zip([0, *cuts], [*cuts, COUNT], strict=True):
        if end > begin:
            state, values = made.advance(state, begin, instants[begin:end])
            found.append(values[0])
    return np.concatenate(found)


@given(
    cuts=st.lists(st.integers(1, COUNT - 1), max_size=6).map(sorted),
    period=st.sampled_from([1e-4, 1.7e-3, 1.6e-3, 7.7e-3]),
    off=st.sampled_from([-3, -1, 0, 1, 3]),
)
@settings(max_examples=60, deadline=None)
@example(cuts=[3 * ROW, 5 * ROW, 6 * ROW], period=1.6e-3, off=1)
def test_no_cut_shows_where_rows_hold_events(cuts: list[int], period: float, off: int) -> None:
    """The same bits however instants are cut, also with edges a rounding off a row's begin."""
    at = BEGIN - 2 * 1.6e-3 + off * np.spacing(BEGIN)
    made = model(chain_of([Butterworth(order=3, corner=3e3)]), {
        "at": at, "width": 0.4 * period, "period": period
    })  # fmt: skip
    assert np.array_equal(parts(made, cuts), parts(made, []))


@pytest.mark.parametrize("off", [-1, 0, 1])
def test_an_edge_a_rounding_off_a_row_takes_effect_there(off: int) -> None:
    """The instant shows the new value, on whichever side of it rounding left the edge."""
    pulse = {"at": BEGIN + off * np.spacing(BEGIN), "width": 1.1e-3}
    found = parts(model(chain_of([Gain(gain=2.0)]), pulse), [])
    np.testing.assert_array_equal(found[5 * ROW - 1 : 5 * ROW + 1], [0.0, 2.0])


@pytest.mark.parametrize("off", [-2, -1, 0, 1, 2])
def test_no_cut_shows_between_an_edge_and_one_that_is_at_an_instant(off: int) -> None:
    """The way from the first edge to the row's end is as long, whether the second one is known."""
    at = BEGIN - 0.3 / RATE
    pulse = {"at": at, "width": BEGIN + off * np.spacing(BEGIN) - at}
    made = model(chain_of([Butterworth(order=3, corner=9e3)]), pulse)
    assert np.array_equal(parts(made, [5 * ROW]), parts(made, []))


@pytest.mark.parametrize("uniform", [True, False])
@pytest.mark.parametrize(
    ("origin", "delay"), [(2e-4, 5e-4), (3e-4, 5e-4), (1e-4, 4e-3), (1e-4, 4e-4), (2e-4, 8e-4)]
)
def test_an_instant_at_zero_but_for_rounding_is_at_zero(
    origin: float, delay: float, uniform: bool
) -> None:
    """Behind a delay the signal begins at the instant that lies there, and goes on from there.

    2e-4 + 3 / 10e3 is less than 5e-4, or more, as it is rounded. The ramp is that of a capacitor,
    v = t - T (1 - exp(-t / T)) behind a step in its slope.
    """
    rate, constant = 1e4, 1.3e-3
    axis = Axis(1.0 / rate, 2.0 / rate, uniform, origin)
    instants = origin + np.arange(200) / rate
    begun = round((delay - origin) * rate)
    time = np.arange(200 - begun) / rate
    filtered = time + constant * np.expm1(-time / constant)
    low_pass = RcLowpass(resistance=1.3e3, capacitance=1e-6)
    cases: list[tuple[Stimulus, Stage, Real]] = [
        (Step(after=1.0), Gain(gain=1.0), np.ones(len(time))),
        (Ramp(slope=1.0), low_pass, filtered),
    ]
    for stimulus, stage, expected in cases:
        chain = chain_of([stage, TransportDelay(delay=delay)])
        made = Linear.of(chain, stimulus.drives((1,)), [2], "settled", axis)
        _, (found,) = made.advance(made.start(), 0, instants)
        np.testing.assert_allclose(found[begun:], expected, rtol=0, atol=1e-12)
        np.testing.assert_array_equal(found[:begun], 0.0)


STIMULI: dict[str, Stimulus] = {
    "edges": Pulse(high=1.0, at=1e-3, width=4.1e-4, period=1.37e-3),
    "many edges between two instants": Pulse(high=1.0, width=3e-6, period=1.1e-5),
    "slopes": Pulse(high=1.0, at=1e-3, width=4e-4, period=1.3e-3, rise=7e-5, fall=1e-5),
    "sweep": Chirp(amplitude=1.0, start_frequency=10.0, stop_frequency=4e3, length=0.045),
}


@pytest.mark.parametrize("name", STIMULI)
@pytest.mark.parametrize("origin", [0.0, 1.7e-5])
def test_rows_agree_with_single_instants(name: str, origin: float) -> None:
    """Instants that are known to be a row, and the same ones taken as any other instants.

    One goes by powers of one step and by what is left of rows, the other from node to node. The
    phase of a sweep is known to 1e-13 of a cycle.
    """
    drives = STIMULI[name].drives((1,))
    chain = chain_of([Butterworth(order=5, corner=3e3), TransportDelay(delay=3.3e-5)])
    instants, found = origin + np.arange(COUNT) / RATE, []
    for uniform in (True, False):
        axis = Axis(1.0 / RATE, 2.0 / RATE, uniform, origin)
        made = Linear.of(chain, drives, [len(chain.points) - 1], "settled", axis)
        found.append(made.advance(made.start(), 0, instants)[1][0])
    assert np.ptp(found[0]) > 0.1
    np.testing.assert_allclose(found[0], found[1], rtol=0, atol=1e-12)
